"""Witness pieces of a recipe: which layers reach them, how they are seen, what is written."""

from __future__ import annotations

import csv
import json
from pathlib import Path

import numpy as np
import pytest

from coatings.cli.main import run
from coatings.errors import InputError
from coatings.recipe import Recipe, parse_recipe
from coatings.witness import (
    default_witness_grid_nm,
    find_witness,
    witness_curve,
    witness_stack,
)

RECIPE = """
recipe = 1
[chip]
wavelength_nm = 976.0
band_nm = [970.0, 980.0]
polarization = "TE"
length_um = 4000.0
stripe_um = 95.0
index = 3.3
[materials.glass]
index = 1.5
[materials.film]
index = 2.0
[materials.lot]
table = "lot.csv"
[front]
base = [{ material = "film", nm = 10.0, on_witness = false }]
layers = [{ material = "film", nm = 120.0 }]
cap = [{ material = "film", nm = 2.0 }]
[[witness]]
name = "plate"
facet = "front"
substrate = "glass"
back = "polished"
quantity = "R"
tooling = 1.05
[[witness]]
name = "ground"
facet = "front"
substrate = "glass"
back = "ground"
quantity = "R"
[[witness]]
name = "bar"
facet = "front"
substrate = "chip"
back = "ground"
quantity = "R"
[[witness]]
name = "slit"
facet = "front"
substrate = "glass"
back = "ground"
quantity = "R"
bandwidth_nm = 40.0
[[witness]]
name = "bare"
facet = "rear"
substrate = "glass"
back = "polished"
quantity = "T"
[[witness]]
name = "narrow"
facet = "front"
substrate = "lot"
back = "ground"
quantity = "R"
"""
WAVELENGTH = np.linspace(800.0, 1100.0, 13)


@pytest.fixture
def recipe(tmp_path: Path) -> Recipe:
    (tmp_path / "lot.csv").write_text("wavelength_nm,n\n300,1.5\n500,1.5\n")
    path = tmp_path / "witness.toml"
    path.write_text(RECIPE)
    return parse_recipe(RECIPE, path=path)


def single_layer(n: float, plate: float, nm: float, wavelength: np.ndarray) -> np.ndarray:
    """R of one film between air and a half-space, by Airy's sum (any optics text)."""
    r1, r2 = (1.0 - n) / (1.0 + n), (n - plate) / (n + plate)
    echo = r2 * np.exp(4j * np.pi * n * nm / wavelength)
    return np.abs((r1 + echo) / (1.0 + r1 * echo)) ** 2


def test_layers_that_reach_the_piece_times_tooling(recipe: Recipe) -> None:
    stack = witness_stack(recipe, find_witness(recipe, "plate"))
    assert stack.nm == pytest.approx([126.0, 2.1])


def test_ground_back_is_the_film_alone(recipe: Recipe) -> None:
    curve = witness_curve(recipe, find_witness(recipe, "ground"), wavelength_nm=WAVELENGTH)
    assert curve.R == pytest.approx(single_layer(2.0, 1.5, 122.0, WAVELENGTH), abs=1e-12)


def test_bar_has_the_chip_beneath(recipe: Recipe) -> None:
    curve = witness_curve(recipe, find_witness(recipe, "bar"), wavelength_nm=WAVELENGTH)
    assert curve.R == pytest.approx(single_layer(2.0, 3.3, 122.0, WAVELENGTH), abs=1e-12)


def test_clear_plate_with_both_faces(recipe: Recipe) -> None:
    # Incoherent sum of two faces: R = Ra + (1 - Ra)^2 Rb/(1 - Ra Rb), clear films look alike from both
    # sides (textbook, from memory).
    curve = witness_curve(recipe, find_witness(recipe, "plate"), wavelength_nm=WAVELENGTH)
    a, b = single_layer(2.0, 1.5, 128.1, WAVELENGTH), 0.04
    assert curve.R == pytest.approx(a + (1 - a) ** 2 * b / (1 - a * b), abs=1e-12)
    assert curve.R + curve.T + curve.A == pytest.approx(np.ones(13), abs=1e-12)


def test_bare_facet_leaves_a_bare_plate(recipe: Recipe) -> None:
    # Two faces of 4 % each: T = (1 - R)/(1 + R).
    curve = witness_curve(recipe, find_witness(recipe, "bare"), wavelength_nm=WAVELENGTH)
    assert curve.T == pytest.approx(np.full(13, 0.96 / 1.04), abs=1e-12)


def test_slit_is_the_mean_over_a_triangle(recipe: Recipe) -> None:
    curve = witness_curve(recipe, find_witness(recipe, "slit"), wavelength_nm=np.array([900.0]))
    around = np.linspace(860.0, 940.0, 4001)
    weight = 1.0 - np.abs(around - 900.0) / 40.0
    seen = single_layer(2.0, 1.5, 122.0, around)
    assert curve.R[0] == pytest.approx(np.average(seen, weights=weight), abs=2e-6)


def test_unknown_piece(recipe: Recipe) -> None:
    with pytest.raises(
        InputError, match=r"'W9' is not a witness piece; the recipe has plate, ground"
    ):
        find_witness(recipe, "W9")


def test_recipe_without_pieces() -> None:
    bare = parse_recipe(RECIPE[: RECIPE.index("[materials.glass]")], path=Path("w.toml"))
    with pytest.raises(InputError, match=r"the recipe has no \[\[witness\]\] table; add one"):
        find_witness(bare, "W1")


def test_plate_out_of_range(recipe: Recipe) -> None:
    narrow = find_witness(recipe, "narrow")
    with pytest.raises(InputError, match=r"witness narrow.*900"):
        witness_curve(recipe, narrow, wavelength_nm=np.array([900.0]))
    with pytest.raises(InputError, match="no range in common around 976 nm"):
        default_witness_grid_nm(recipe, narrow)


def test_command(recipe: Recipe, tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    out, table = tmp_path / "out", tmp_path / "w.csv"
    arguments = ["curve", str(recipe.path), "--witness", "plate", "--out", str(out)]
    assert run([*arguments, "--json", "-", "--csv", str(table)]) == 0
    result = json.loads(capsys.readouterr().out)
    assert (result["facet"], result["side"], result["model"]) == ("front", "witness", "plane")
    lengths = {len(result[key]) for key in ("wavelength_nm", "R", "T", "A", "S", "phase_rad")}
    assert len(lengths) == 1
    assert (out / "witness.png").read_bytes().startswith(b"\x89PNG")
    rows = list(csv.DictReader(table.read_text().splitlines()))
    assert [float(row["R"]) for row in rows] == pytest.approx(result["R"], abs=1e-11)


@pytest.mark.parametrize("extra", [["--facet", "front"], ["--plane"]])
def test_options_that_do_not_go_together(
    recipe: Recipe, extra: list[str], capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(["curve", str(recipe.path), "--witness", "plate", *extra]) == 2
    assert f"--witness: does not go with {extra[0]}" in capsys.readouterr().err
