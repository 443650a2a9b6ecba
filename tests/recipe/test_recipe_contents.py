"""What a sound recipe says once it is read: defaults, windows, index."""

from __future__ import annotations

import pickle
from pathlib import Path

import numpy as np
import pytest
from recipe_texts import document, front, laser, only, read, window, witness

from coatings.errors import RecipeError
from coatings.recipe import Window, parse_recipe

# The example of the recipe format with every section; the guide stands in a test of its own.
EXAMPLE = """
recipe   = 1
title    = "976 nm pump chip, 4 mm"
revision = "A"

[chip]
wavelength_nm = 976.0
band_nm       = [964.0, 988.0]
polarization  = "TE"
length_um     = 4000.0
stripe_um     = 95.0
emitters      = 1
index         = 3.30
group_index   = 3.75
tilt_deg      = 0.0
lateral_um    = 3.5

[laser]
internal_loss_per_cm    = 0.8
injection_efficiency    = 0.95
gain_law                = "logarithmic"
transparency_A_per_cm2  = 120.0
modal_gain_per_cm       = 18.0
gain_peak_nm  = 976.0
gain_width_nm = 40.0
stages                  = 1
drive_A                 = 12.0
spontaneous_factor      = 1e-5
series_mohm = 14.0
junction_V  = 1.31
thermal_K_per_W = 2.0
heatsink_C  = 25.0
reference_C = 25.0
t0_K = 170.0
t1_K = 600.0
threshold_max_A = 1.0
rear_min_W      = 0.0
facet_limit_MW_per_cm2 = 20.0
mode_height_um = 0.8

[external]
reflectance = 0.05
coupling    = 0.8
wavelength_nm = 976.0
band_nm     = [975.5, 976.5]

[amplifier]
gain_dB   = 25.0
ripple_dB = 0.5

[front]
outside = "air"
palette = ["Al2O3", "Ta2O5"]
base    = [ { material = "Al2O3", nm = 10.0, on_witness = false } ]
cap     = [ { material = "Al2O3", nm = 20.0 } ]
first   = "Al2O3"
last    = "Ta2O5"
layers  = [
  { material = "Al2O3", nm = 118.0 },
]
max_layers = 4
layer_nm   = { Al2O3 = [15.0, 600.0], Ta2O5 = [15.0, 300.0] }
total_nm   = 1200.0
[[front.windows]]
reflectance = 0.03
tolerance   = 0.01
[[front.windows]]
band_nm = [1060.0, 1070.0]
at_most = 0.10
polarization = "TE"
of = "mode"
index = 3.30
absorption_at_most = 0.002

[rear]
palette = ["SiO2", "Ta2O5"]
max_layers = 12
[[rear.windows]]
at_least = 0.97

[process]
method             = "ion-assisted"
run_percent        = 1.0
layer_percent      = 1.0
thickness_sigma_nm = 0.3
index              = { Al2O3 = 0.01, Ta2O5 = 0.02 }
holds              = "physical"
position_percent   = 0.3
chip_index         = 0.005
decimals_nm        = 1
rate_nm_per_s      = { Al2O3 = 0.3, Ta2O5 = 0.2 }
stress_MPa         = { Al2O3 = -100, Ta2O5 = -150 }
air_shift_percent  = { Al2O3 = 0.0 }

[[witness]]
name         = "W1"
facet        = "front"
substrate    = "borosilicate-crown"
thickness_mm = 1.0
back         = "ground"
quantity     = "R"
angle_deg    = 8.0
polarization = "mean"
tooling      = 1.00
tooling_sigma = 0.01
noise        = 0.0005
scale_sigma  = 0.002
offset_sigma = 0.001
wavelength_sigma_nm = 0.3

[materials.Ta2O5]
scale = 0.985
of = "Ta2O5"
"""


def test_example_of_the_format() -> None:
    recipe = parse_recipe(EXAMPLE, path=Path("recipes/pump.toml"))
    assert (recipe.title, recipe.revision) == ("976 nm pump chip, 4 mm", "A")
    assert recipe.laser is not None
    assert recipe.laser.threshold_max_A == 1.0
    assert recipe.external is not None
    assert recipe.external.band_nm == (975.5, 976.5)
    assert recipe.amplifier is not None
    assert recipe.amplifier.gain_dB == 25.0
    assert [piece.name for piece in recipe.witnesses] == ["W1"]
    assert recipe.front.base[0].on_witness is False
    assert recipe.front.cap[0].on_witness is True
    assert recipe.front.films == ("Al2O3", "Ta2O5")
    assert recipe.front.layer_limits_nm("Ta2O5") == (15.0, 300.0)
    assert [w.label() for w in recipe.front.windows] == [
        "0.02-0.04 over 964-988 nm",
        "at most 0.1, absorption at most 0.002 over 1060-1070 nm, index 3.3",
    ]
    assert recipe.rear.windows[0].label() == "at least 0.97 over 964-988 nm"
    rear = recipe.process_for("rear")
    assert rear.index == {"Al2O3": 0.01, "Ta2O5": 0.02, "SiO2": 0.01}
    assert recipe.material_notes == (
        "Ta2O5: the recipe's own (Ta2O5, index times 0.985, "
        f"{recipe.material('Ta2O5').range_nm[0]:g}-{recipe.material('Ta2O5').range_nm[1]:g} nm) "
        "instead of the library's",
    )


def test_guide_of_the_example() -> None:
    guide = """[chip.guide]
layers = [
  { material = "AlGaAs:0.30" },
  { material = "AlGaAs:0.20", um = 0.60 },
  { index = 3.42, um = 0.012 },
  { material = "AlGaAs:0.20", um = 0.40 },
  { material = "AlGaAs:0.30" },
]"""
    recipe = read(guide, index=None)
    assert recipe.chip.guide is not None
    assert [layer.um for layer in recipe.chip.guide.layers] == [None, 0.60, 0.012, 0.40, None]
    with pytest.raises(
        RecipeError, match=r"chip\.index: is absent, the chip being given by its gui"
    ):
        recipe.chip_index(np.array([976.0]))


def test_defaults() -> None:
    recipe = read(laser(drive_A=None, junction_V=None), witness())
    assert (recipe.title, recipe.revision) == ("x", "")
    assert (recipe.chip.emitters, recipe.chip.tilt_deg, recipe.chip.group_index) == (1, 0.0, None)
    assert (recipe.external, recipe.amplifier, recipe.notes, recipe.material_notes) == (
        None, None, (), (),
    )  # fmt: skip
    for facet in (recipe.front, recipe.rear):
        assert facet.is_bare
        assert not facet.is_searchable
        assert facet.outside == "air"
        assert facet.films == ()
        assert facet.layers is None
        assert facet.layer_limits_nm("SiO2") == (None, None)
    light = recipe.laser
    assert light is not None
    assert (light.gain_law, light.stages) == ("logarithmic", 1)
    assert (light.spontaneous_factor, light.series_mohm, light.thermal_K_per_W) == (0.0, 0.0, 0.0)
    assert (light.threshold_max_A, light.facet_limit_MW_per_cm2, light.rear_min_W) == (
        None, None, 0.0,
    )  # fmt: skip
    piece = recipe.witnesses[0]
    assert (piece.tooling, piece.tooling_sigma, piece.noise) == (1.0, 0.0, 0.0)
    assert read().laser is None


def test_layers_of_nothing_differ_from_absent_layers() -> None:
    assert read("[front]\nlayers = []").front.layers == ()
    assert read("[front]\nlayers = []").front.is_bare
    assert read("[front]").front.layers is None


def test_bare_and_searchable() -> None:
    assert read(front()).front.is_searchable
    assert not read(front()).front.is_bare
    coated = read('[front]\ncap = [{ material = "SiO2", nm = 100 }]').front
    assert not coated.is_bare
    assert not coated.is_searchable
    assert read("[front]\n[[front.windows]]\nat_most = 0.4").front.is_bare


def test_one_pair_of_limits_serves_every_film() -> None:
    facet = read(front(layer_nm="[15, 400]")).front
    assert facet.layer_limits_nm("Al2O3") == facet.layer_limits_nm("Ta2O5") == (15.0, 400.0)
    partial = read(front(layer_nm="{ Al2O3 = [15, 600] }")).front
    assert partial.layer_limits_nm("Ta2O5") == (None, None)


def test_outside_may_be_an_index() -> None:
    recipe = read(front(outside="1.45"))
    assert recipe.front.outside == 1.45
    index = recipe.index_of(recipe.front.outside, [970.0, 980.0])
    assert index.tolist() == [1.45 + 0j, 1.45 + 0j]


def first_window(table: str, **chip_changed: str) -> Window:
    return read(laser(), front(table), **chip_changed).front.windows[0]


@pytest.mark.parametrize(
    ("table", "low", "high"),
    [
        (window(), 0.04, 0.06),
        (window(reflectance="0.005", tolerance="0.01"), None, 0.015),
        (window(reflectance="0.01", tolerance="0.01"), None, 0.02),
        (window(reflectance="0.995", tolerance="0.01"), 0.985, None),
        (only(between="[0.02, 0.05]"), 0.02, 0.05),
        (only(between="[0.0, 0.05]"), None, 0.05),
        (only(at_most="0.1"), None, 0.1),
        (only(at_least="0.9"), 0.9, None),
        (only(absorption_at_most="0.01"), None, None),
        (only(reflectance='"trade"'), None, None),
    ],
)
def test_bounds_of_a_window(table: str, low: float | None, high: float | None) -> None:
    found = first_window(table)
    assert found.low == (None if low is None else pytest.approx(low, rel=1e-12))
    assert found.high == (None if high is None else pytest.approx(high, rel=1e-12))


@pytest.mark.parametrize(
    ("table", "label"),
    [
        (only(absorption_at_most="0.01"), "absorption at most 0.01 over 964-988 nm"),
        (only(reflectance='"trade"'), "best for the drive over 964-988 nm"),
        (only(at_most="0.001", band_nm="[1550, 1550]"), "at most 0.001 over 1550 nm"),
    ],
)
def test_label_of_a_window(table: str, label: str) -> None:
    assert first_window(table).label() == label


def test_window_takes_band_and_polarization_of_the_chip() -> None:
    plain = first_window(window(), polarization='"TM"')
    assert (plain.band_nm, plain.polarization, plain.of) == ((964.0, 988.0), "TM", "mode")
    own = first_window(window(polarization='"both"', band_nm="[955, 997]", of='"coating"'))
    assert (own.band_nm, own.polarization, own.of) == ((955.0, 997.0), "both", "coating")
    assert not plain.is_trade
    traded = first_window(only(reflectance='"trade"', tolerance="0.01"))
    assert (traded.is_trade, traded.tolerance) == (True, 0.01)


def test_numeric_index_is_constant_without_a_group_index() -> None:
    assert read().chip_index([900.0, 976.0, 1100.0]).tolist() == [3.30, 3.30, 3.30]


def test_group_index_tilts_a_numeric_index() -> None:
    # ng = n - lambda dn/dlambda, so the slope at the chip's wavelength is (n - ng)/lambda.
    recipe = read(front(window(index="3.25")), group_index="3.75")
    low, mid, high = recipe.chip_index([966.24, 976.0, 985.76])
    assert mid == 3.30
    assert (low, high) == pytest.approx((3.3045, 3.2955), abs=1e-12)
    sister = recipe.window_index(recipe.front.windows[0], [976.0, 985.76])
    assert sister == pytest.approx([3.25, 3.245], abs=1e-12)


def test_window_without_index_has_the_chip_s() -> None:
    recipe = read(front(), group_index="3.75")
    grid = np.linspace(960.0, 990.0, 7)
    assert (recipe.window_index(recipe.front.windows[0], grid) == recipe.chip_index(grid)).all()


def test_material_as_the_chip_s_index() -> None:
    recipe = read(index='"AlGaAs:0.30"', group_index="3.75")
    grid = np.array([970.0, 980.0])
    assert (recipe.chip_index(grid) == recipe.material("AlGaAs:0.30").nk(grid).real).all()


def test_recipe_is_frozen_and_goes_to_other_processes() -> None:
    recipe = parse_recipe(EXAMPLE, path=Path("recipes/pump.toml"))
    with pytest.raises(AttributeError, match="cannot assign"):
        recipe.title = "another"  # type: ignore[misc]
    with pytest.raises(ValueError, match="frozen"):
        recipe.chip.length_um = 1.0  # type: ignore[misc]
    copy = pickle.loads(pickle.dumps(recipe))
    assert copy.sha256 == recipe.sha256
    assert copy.material("Ta2O5").nk(976.0) == recipe.material("Ta2O5").nk(976.0)


def test_text_is_kept() -> None:
    assert read(front()).text == document(front())
