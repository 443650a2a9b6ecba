"""Pictures, by what is drawn: curves, gates, layers, colours."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from matplotlib.colors import to_hex
from matplotlib.figure import Figure

from coatings.curve import facet_curve
from coatings.documents.look import FILM_COLOURS, SIDE_COLOURS, film_colours
from coatings.documents.pictures import _frame_windows, power_picture, spectrum_picture
from coatings.documents.plots import Band, draw_gates, draw_layers, draw_power, draw_spectrum
from coatings.laser import FieldModel, PowerCurrent
from coatings.recipe import Recipe, parse_recipe

TEXT = """
recipe = 1
title = "chip"
[chip]
wavelength_nm = 980.0
band_nm = [975.0, 985.0]
polarization = "TE"
length_um = 500.0
stripe_um = 5.0
index = 3.3
[front]
base = [{ material = "Al2O3", nm = 10.0 }]
layers = [{ material = "SiO2", nm = 100.0 }, { material = "Ta2O5", nm = 50.0 }]
[[front.windows]]
between = [0.02, 0.4]
[[front.windows]]
band_nm = [960.0, 965.0]
at_most = 0.5
[rear]
layers = [{ material = "Ta2O5", nm = 117.0 }]
"""


def _light(current: np.ndarray, *, front: float, rear: float) -> PowerCurrent:
    return PowerCurrent(
        current, front * current, rear * current, junction_C=25.0 + current,
        model=FieldModel.UNIFORM, rollover_A=None, quenched_A=None,
    )  # fmt: skip


@pytest.fixture
def recipe() -> Recipe:
    return parse_recipe(TEXT, path=Path("x.toml"))


def test_spectrum_is_drawn_in_percent_in_the_sides_colour(recipe: Recipe) -> None:
    ax = Figure().subplots()
    curve = facet_curve(recipe, "front")
    line = draw_spectrum(ax, curve.spectrum, side="front")
    assert np.array_equal(line.get_xdata(), curve.spectrum.wavelength_nm)
    assert np.allclose(line.get_ydata(), 100 * curve.spectrum.R)
    assert line.get_color() == SIDE_COLOURS["front"]
    assert ax.get_xlim() == (
        curve.spectrum.wavelength_nm[0],
        curve.spectrum.wavelength_nm[-1],
    )


def test_band_of_chips_is_filled_between_its_quantiles(recipe: Recipe) -> None:
    ax = Figure().subplots()
    curve = facet_curve(recipe, "rear")
    nm, R = curve.spectrum.wavelength_nm, curve.spectrum.R
    draw_spectrum(ax, curve.spectrum, side="rear", band=Band(nm, R - 0.01, R, R + 0.02))
    (filled,) = ax.collections
    heights = filled.get_paths()[0].vertices[:, 1]
    assert heights.min() == pytest.approx(100 * (R.min() - 0.01))
    assert heights.max() == pytest.approx(100 * (R.max() + 0.02))


def test_gates_stand_at_the_bounds_and_face_outward(recipe: Recipe) -> None:
    ax = Figure().subplots()
    ax.set_ylim(0, 60)
    bars = draw_gates(ax, recipe.front.windows)
    places = [(bar.get_x(), bar.get_width(), bar.get_y(), bar.get_height() > 0) for bar in bars]
    assert places == [
        (975.0, 10.0, pytest.approx(2.0), False),
        (975.0, 10.0, pytest.approx(40.0), True),
        (960.0, 5.0, pytest.approx(50.0), True),
    ]


def test_gates_look_alike_on_a_logarithmic_axis(recipe: Recipe) -> None:
    ax = Figure().subplots()
    ax.set_yscale("log")
    ax.set_ylim(1.0, 100.0)
    bars = draw_gates(ax, recipe.front.windows)
    ratios = [(bar.get_y() + bar.get_height()) / bar.get_y() for bar in bars]
    assert ratios == pytest.approx([100**-0.035, 100**0.035, 100**0.035])


def test_gate_of_the_film_alone_is_hollow(recipe: Recipe) -> None:
    ax = Figure().subplots()
    (window,) = recipe.front.windows[1:]
    (bar,) = draw_gates(ax, [replace(window, of="coating")])
    assert bar.get_facecolor()[3] == 0.0


def test_gates_far_apart_ask_for_a_logarithmic_axis() -> None:
    apart = TEXT.replace("at_most = 0.5", "at_most = 0.0005")
    recipe = parse_recipe(apart, path=Path("x.toml"))
    ax = Figure().subplots()
    draw_spectrum(ax, facet_curve(recipe, "front").spectrum, side="front")
    _frame_windows(ax, list(recipe.front.windows))
    assert ax.get_yscale() == "log"
    assert ax.get_ylim()[0] < 0.05


def test_layers_run_from_the_chip_at_the_left() -> None:
    ax = Figure().subplots()
    colours = film_colours(["A", "B"])
    boxes = draw_layers(ax, [("A", 100.0, 0.2), ("B", 50.0, 0.3)], outside="air", colours=colours)
    assert [text.get_text() for text in ax.texts] == ["chip", "100", "50", "air"]
    lefts = [box.get_x() for box in boxes]
    assert lefts == sorted(lefts)
    assert [to_hex(box.get_facecolor()) for box in boxes[1:]] == [colours["A"], colours["B"]]
    assert boxes[2].get_width() == pytest.approx(0.3)


def test_thin_layer_is_drawn_but_not_lettered() -> None:
    ax = Figure().subplots()
    layers = [("A", 0.1, 0.001), ("B", 50.0, 0.5)]
    boxes = draw_layers(ax, layers, outside="air", colours=film_colours(["A", "B"]))
    assert len(boxes) == 3
    assert [text.get_text() for text in ax.texts] == ["chip", "50", "air"]


def test_colours_are_apart_and_stay_with_the_film() -> None:
    assert len(set(FILM_COLOURS)) == len(FILM_COLOURS)
    assert not set(FILM_COLOURS) & set(SIDE_COLOURS.values())
    many = film_colours(["A", "B", "A", "C"])
    assert list(many) == ["A", "B", "C"]
    assert len(set(many.values())) == 3


def test_power_is_marked_at_the_drive() -> None:
    current = np.linspace(0.1, 2.0, 20)
    power = _light(current, front=0.5, rear=0.001)
    ax = Figure().subplots()
    line = draw_power(ax, power, side="rear", drive_A=1.0)
    assert line.get_color() == SIDE_COLOURS["rear"]
    assert line.get_ydata()[-1] == pytest.approx(2.0)  # mW
    assert [text.get_text() for text in ax.texts] == ["1 mW at 1 A"]
    assert ax.get_ylabel() == "rear (mW)"


@pytest.mark.parametrize(
    ("most_W", "unit"), [(2.0, "W"), (0.4, "mW"), (4e-4, "uW"), (4e-7, "nW"), (0.0, "W")]
)
def test_power_has_a_readable_unit(most_W: float, unit: str) -> None:
    current = np.linspace(0.1, 1.0, 5)
    ax = Figure().subplots()
    draw_power(ax, _light(current, front=most_W, rear=0.0), side="front", drive_A=None)
    assert ax.get_ylabel() == f"front ({unit})"


def test_whole_pictures_are_png_and_the_same_each_time(recipe: Recipe) -> None:
    curves = {side: facet_curve(recipe, side) for side in ("front", "rear")}
    first, second = (spectrum_picture(recipe, curves, stacks={}, bands={}) for _ in range(2))
    assert first.startswith(b"\x89PNG")
    assert first == second
    current = np.linspace(0.1, 2.0, 20)
    dark = _light(current, front=0.0, rear=0.0)
    assert power_picture(dark, drive_A=None, title="dark").startswith(b"\x89PNG")
