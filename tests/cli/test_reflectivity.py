"""``reflectivity``: the facet that made the data comes back, by slopes and by ripple; refusals."""

from __future__ import annotations

import json
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from small_product import HEAD_KEYS, TEXT, changed, refusal, written

from coatings.cli.main import run
from coatings.laser import FacetLight, power_current
from coatings.product import facet_light, laser_chip
from coatings.recipe import load_recipe

LAYERED = changed(
    "max_layers = 2",
    'layers = [{ material = "SiO2", nm = 150.0 }, { material = "TiO2", nm = 95.0 }]\nmax_layers = 2',
    changed("index         = 3.3", "index = 3.3\ngroup_index = 3.6", TEXT),
)
AMPLIFIER = "\n[amplifier]\ngain_dB = 8.0\n"
GAIN = 10.0**0.8
BARE_R = (2.3 / 4.3) ** 2


def columns(folder: Path, head: str, *values: Sequence[float] | np.ndarray) -> Path:
    path = folder / f"{head.split(',')[1].strip()}.csv"
    rows = [",".join(repr(float(v)) for v in row) for row in zip(*values, strict=True)]
    path.write_text("\n".join([head, *rows]) + "\n")
    return path


def airy(folder: Path, x: float, name: str = "coated.csv", *, half_nm: float = 1.0) -> Path:
    """Spectrum of a resonator: 1/(1 + x^2 - 2 x cos theta), modes 0.0667 nm apart."""
    nm = np.linspace(980.0 - half_nm, 980.0 + half_nm, 1501)
    theta = 2.0 * np.pi * 2.0 * 3.6 * 2e6 * (1.0 / nm - 1.0 / 980.0)
    intensity = np.exp(0.1 * (nm - 980.0)) / (1.0 + x**2 - 2.0 * x * np.cos(theta))
    path = columns(folder, "wavelength_nm,intensity", nm, intensity)
    return path.rename(folder / name)


def reflectivity(capsys: pytest.CaptureFixture[str], *arguments: str | Path) -> Any:
    """JSON of ``reflectivity``, which must print nothing else."""
    assert run(["reflectivity", *map(str, arguments), "--json", "-"]) == 0
    out, err = capsys.readouterr()
    assert err == ""
    return json.loads(out, parse_constant=pytest.fail)


def test_front_by_the_slopes_of_both_sides(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = written(tmp_path, LAYERED)
    recipe = load_recipe(path)
    current = np.linspace(0.05, 3.0, 60)
    power = power_current(
        laser_chip(recipe), FacetLight.lossless(0.023), facet_light(recipe, "rear"),
        current_A=current,
    )  # fmt: skip
    data = columns(tmp_path, "current_A,front_W,rear_W", current, power.front_W, power.rear_W)
    result = reflectivity(capsys, path, data, "--facet", "front")
    assert set(result) >= HEAD_KEYS | {"method", "R", "R_low", "R_high"}
    assert result["method"] == "two-sided"
    assert result["R"] == pytest.approx(0.023, rel=1e-6)
    assert result["R_low"] <= result["R"] * (1 + 1e-9)
    assert result["R_high"] >= result["R"] * (1 - 1e-9)
    assert run(["reflectivity", str(path), str(data), "--facet", "front"]) == 0
    assert "method: two-sided" in capsys.readouterr().out
    lines = refusal(capsys, "reflectivity", path, data, "--facet", "front", "--resolution", "0.1")
    assert "--resolution: goes with a spectrum" in lines[0]


def test_front_by_the_ripple_and_the_gain(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = written(tmp_path, LAYERED + AMPLIFIER)
    R_rear = float(facet_light(load_recipe(path), "rear").R)
    data = airy(tmp_path, GAIN * np.sqrt(0.01 * R_rear))
    result = reflectivity(capsys, path, data, "--facet", "front")
    assert result["method"] == "ripple"
    assert result["R"] == pytest.approx(0.01, rel=1e-4)
    assert result["R_low"] < 0.01 * 1.0001
    assert result["R_high"] > 0.01 * 0.9999
    assert result["reading"]["spacing_nm"] == pytest.approx(980.0**2 / (2 * 3.6 * 2e6), rel=1e-3)
    assert run(["reflectivity", str(path), str(data), "--facet", "front"]) == 0
    assert "fringes" in capsys.readouterr().out


def test_front_against_the_same_chip_bare(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = written(tmp_path, LAYERED)
    R_rear = float(facet_light(load_recipe(path), "rear").R)
    coated = airy(tmp_path, 2.0 * np.sqrt(0.01 * R_rear))
    bare = airy(tmp_path, 2.0 * BARE_R, "bare.csv")
    result = reflectivity(capsys, path, coated, "--facet", "front", "--bare", bare)
    assert result["R"] == pytest.approx(0.01, rel=1e-4)
    # The plane wave's bare R is not known well, and the interval says so.
    assert result["R_high"] > 1.2 * result["R"]
    lines = refusal(capsys, "reflectivity", path, coated, "--facet", "front")
    assert "amplifier: is missing" in lines[0]
    assert "--bare FILE" in lines[0]


def test_the_other_facet_by_its_window(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = written(tmp_path, LAYERED + AMPLIFIER)
    data = airy(tmp_path, GAIN * np.sqrt(0.06 * 0.4))
    result = reflectivity(capsys, path, data, "--facet", "rear")
    assert result["known_R"] == 0.06
    assert result["R"] == pytest.approx(0.4, rel=1e-4)
    assert any("counts by its window" in note for note in result["notes"])


def test_data_without_an_answer(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = written(tmp_path, LAYERED + AMPLIFIER)
    few = airy(tmp_path, 0.5, "few.csv", half_nm=0.06)
    lines = refusal(capsys, "reflectivity", path, few, "--facet", "front")
    assert "few.csv: " in lines[0]
    assert "fringes" in lines[0]
    weak = written(tmp_path, LAYERED + AMPLIFIER.replace("8.0", "1.0"), "weak.toml")
    strong = airy(tmp_path, 0.5, "strong.csv")
    lines = refusal(capsys, "reflectivity", weak, strong, "--facet", "rear")
    assert "strong.csv: ripple: asks for a reflectance of" in lines[0]
    dark = columns(tmp_path, "current_A,front_W,rear_W", [1, 2, 3], [0, 1, 2], [0, 1, 2])
    lines = refusal(capsys, "reflectivity", path, dark, "--facet", "front")
    assert "front_W.csv: front_W: does not change with current" in lines[0]
    lines = refusal(capsys, "reflectivity", path, dark, "--facet", "front", "--bare", few)
    assert "--bare: goes with a spectrum" in lines[0]
    mixed = columns(tmp_path, "current_A,intensity", [1.0], [2.0])
    lines = refusal(capsys, "reflectivity", path, mixed, "--facet", "front")
    assert "expected current_A, front_W, rear_W or wavelength_nm, intensity" in lines[0]
    lines = refusal(capsys, "reflectivity", path, few)
    assert "--facet" in lines[0]
