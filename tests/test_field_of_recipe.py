"""The standing wave of a recipe: joined to the laser, printed, drawn."""

from __future__ import annotations

import json
from pathlib import Path

import numpy as np
import pytest

from coatings.cli.main import run
from coatings.field import facet_fields
from coatings.product import product_estimate
from coatings.recipe import Recipe, parse_recipe

RECIPE = """
recipe = 1
[chip]
wavelength_nm = 976.0
band_nm = [970.0, 980.0]
polarization = "TE"
length_um = 4000.0
stripe_um = 95.0
index = 3.3
[laser]
internal_loss_per_cm = 0.8
injection_efficiency = 0.95
transparency_A_per_cm2 = 120.0
modal_gain_per_cm = 18.0
drive_A = 12.0
mode_height_um = 0.8
[materials.grey]
index = 2.0
k = 0.01
[front]
layers = [{ material = "Al2O3", nm = 60.0 }, { material = "grey", nm = 90.0 }]
[rear]
layers = [{ material = "SiO2", nm = 167.0 }, { material = "Au", nm = 150.0 }]
"""
VACUUM_OHM = 376.730313668  # CODATA 2018


@pytest.fixture(scope="module")
def recipe() -> Recipe:
    return parse_recipe(RECIPE, path=Path("field.toml"))


def test_absorbed_watts_are_those_of_the_laser_estimate(recipe: Recipe) -> None:
    # What the coatings keep at the operating current, from the split of the power on one side and
    # from the integrals of the field on the other.
    fields = facet_fields(recipe, ("front", "rear"))
    estimate = product_estimate(recipe)
    works = [field.work for field in fields.values()]
    assert estimate is not None
    assert all(work is not None for work in works)
    absorbed = sum(float(work.absorbed_W.sum()) for work in works if work is not None)
    assert absorbed == pytest.approx(estimate.coating_absorbed_W, rel=1e-9)


def test_arriving_power_leaves_as_the_estimate_says(recipe: Recipe) -> None:
    fields = facet_fields(recipe, ("front", "rear"))
    estimate = product_estimate(recipe)
    assert estimate is not None
    for side, leaving in (("front", estimate.front_W), ("rear", estimate.rear_W)):
        work = fields[side].work
        assert work is not None
        assert work.arriving_W * float(fields[side].wave.T[0]) == pytest.approx(leaving, rel=1e-9)


def test_field_strength_from_the_flow(recipe: Recipe) -> None:
    # E^2 = 2 Z0 flow / n of a travelling wave, times the relative square at the chip's face |1 + r|^2.
    field = facet_fields(recipe, ("front",))["front"]
    work = field.work
    assert work is not None
    flow = work.arriving_W / (95e-6 * 0.8e-6)
    expected = np.sqrt(2 * VACUUM_OHM * flow / 3.3 * field.wave.face_E2[0, 0, 0])
    assert work.face_V_per_m == pytest.approx(expected, rel=1e-9)


def test_command_writes_result_and_picture(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = tmp_path / "field.toml"
    path.write_text(RECIPE)
    assert run(["field", str(path), "--out", str(tmp_path / "out"), "--json", "-"]) == 0
    result = json.loads(capsys.readouterr().out)
    assert (tmp_path / "out" / "field.png").read_bytes().startswith(b"\x89PNG")
    for side in ("front", "rear"):
        part = result[side]
        assert part["R"] + part["T"] + part["A"] == pytest.approx(1.0, abs=1e-12)
        assert sum(layer["absorbed"] for layer in part["layers"]) == pytest.approx(
            part["A"], abs=1e-9
        )
        profile = part["profile"]
        assert len(profile["z_nm"]) == len(profile["E2"]) == len(profile["absorption_per_nm"])
        z, density = np.array(profile["z_nm"]), np.array(profile["absorption_per_nm"])
        assert np.trapezoid(density, z) == pytest.approx(part["A"], rel=2e-3)


def test_without_laser_only_relative_figures() -> None:
    text = RECIPE[: RECIPE.index("[laser]")] + RECIPE[RECIPE.index("[materials.grey]") :]
    field = facet_fields(parse_recipe(text, path=Path("field.toml")), ("front",))["front"]
    assert field.work is None
    assert field.arriving_per_front_W == pytest.approx(1.0 / float(field.wave.T[0]))
