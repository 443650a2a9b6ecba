"""``ripple``: the closed form, the mode's own phases, limits, refusals."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy.constants import c
from small_product import HEAD_KEYS, TEXT, refusal, written

from coatings.cli.main import run
from coatings.facets import facet_spectrum
from coatings.recipe import load_recipe

RIPPLE_KEYS = {
    "gain_dB", "ripple_dB", "mode_spacing_GHz", "R_product_needed", "wavelength_nm", "gain",
}  # fmt: skip
HEAD = TEXT[: TEXT.index("[laser]")]
BARE_R = (2.3 / 4.3) ** 2
GAIN_DB = 3.0


def chip(*, more: str = "", group: str = "group_index = 3.3\n", limit: float | None = 14.0) -> str:
    """A chip of 2 mm with bare facets whose index does not change over the band."""
    ripple = "" if limit is None else f"ripple_dB = {limit}\n"
    return f"{HEAD.rstrip()}\n{group}\n[amplifier]\ngain_dB = {GAIN_DB}\n{ripple}{more}"


def ripple(capsys: pytest.CaptureFixture[str], recipe: Path, *, status: int = 0) -> Any:
    """JSON of ``ripple``, which must print nothing else."""
    line = ["ripple", str(recipe), "--json", "-", "--out", str(recipe.parent / "out")]
    assert run(line) == status
    out, err = capsys.readouterr()
    assert err == ""
    return json.loads(out, parse_constant=pytest.fail)


def test_bare_facets_by_the_closed_form(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    result = ripple(capsys, written(tmp_path, chip()))
    assert set(result) >= HEAD_KEYS | RIPPLE_KEYS
    G = 10.0 ** (GAIN_DB / 10.0)
    x = G * BARE_R
    expected = 20.0 * np.log10((1.0 + x) / (1.0 - x))
    assert result["ripple_dB"] == pytest.approx(expected, rel=1e-9)
    assert result["mode_spacing_GHz"] == pytest.approx(c / (2 * 3.3 * 2e-3) / 1e9, rel=1e-12)
    root = 10.0 ** (14.0 / 20.0)
    assert result["R_product_needed"] == pytest.approx(((root - 1) / (root + 1) / G) ** 2, rel=1e-9)
    gain_dB = 10.0 * np.log10(result["gain"])
    assert np.ptp(gain_dB) == pytest.approx(expected, rel=0.01)
    peak = np.flatnonzero((gain_dB[1:-1] > gain_dB[:-2]) & (gain_dB[1:-1] > gain_dB[2:])) + 1
    GHz = c / np.array(result["wavelength_nm"])[peak]
    assert -np.diff(GHz).mean() == pytest.approx(result["mode_spacing_GHz"], rel=1e-3)
    assert (tmp_path / "out" / "ripple.png").read_bytes().startswith(b"\x89PNG")


def test_coated_facets_with_the_phases_of_their_own(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    layers = (
        '\n[front]\nlayers = [{ material = "Al2O3", nm = 90.0 }]\n'
        '\n[rear]\nlayers = [{ material = "SiO2", nm = 170.0 }, { material = "TiO2", nm = 90.0 }]\n'
    )
    path = written(tmp_path, chip(more=layers, group="group_index = 3.9\n"))
    result = ripple(capsys, path)
    recipe, G = load_recipe(path), 10.0 ** (GAIN_DB / 10.0)
    nm = np.array(result["wavelength_nm"])[::17]
    front, rear = (facet_spectrum(recipe, s, wavelength_nm=nm) for s in ("front", "rear"))
    index = 3.3 + (3.3 - 3.9) * (nm - 980.0) / 980.0
    theta = 4e3 * np.pi * index * 2000.0 / nm + front.phase_rad + rear.phase_rad
    turn = G * np.sqrt(front.R * rear.R) * np.exp(1j * theta)
    expected = front.T * rear.T * G / np.abs(1.0 - turn) ** 2
    assert np.array(result["gain"])[::17] == pytest.approx(expected, rel=2e-3)
    worst = G * np.sqrt(np.max(front.R * rear.R))
    assert result["round_trip"] == pytest.approx(worst, rel=1e-3)


def test_limits_and_a_chip_that_lases(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert ripple(capsys, written(tmp_path, chip(limit=1.0)), status=1)["kept"] is False
    free = ripple(capsys, written(tmp_path, chip(limit=None)))
    assert free["R_product_needed"] is None
    lasing = chip().replace("gain_dB = 3.0", "gain_dB = 20.0")
    result = ripple(capsys, written(tmp_path, lasing), status=1)
    assert result["ripple_dB"] is None
    assert result["round_trip"] == pytest.approx(100.0 * BARE_R)
    assert run(["ripple", str(tmp_path / "small.toml"), "--out", str(tmp_path / "out")]) == 1
    out = capsys.readouterr().out
    assert "the chip lases" in out
    assert "MISSED" in out


def test_windows_count_without_phase(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    windows = (
        '\n[front]\npalette = ["Al2O3"]\nmax_layers = 1\n[[front.windows]]\nat_most = 0.01\n'
        '\n[rear]\npalette = ["Al2O3"]\nmax_layers = 1\n[[rear.windows]]\nat_least = 0.04\n'
    )
    result = ripple(capsys, written(tmp_path, chip(more=windows)))
    assert result["R_product"] == pytest.approx(4e-4, rel=1e-12)
    assert any("without phase" in note for note in result["notes"])


def test_group_index_of_a_guide_and_of_a_material(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    guide = (
        'guide = { layers = [{ material = "AlGaAs:0.30" }, { index = 3.42, um = 0.3 }, '
        '{ material = "AlGaAs:0.30" }] }'
    )
    path = written(tmp_path, chip(group="").replace("index         = 3.3", guide))
    result = ripple(capsys, path)
    assert (
        run(["curve", str(path), "--json", "-", "--out", str(tmp_path), "--nm", "980", "980", "1"])
        == 0
    )
    figures = json.loads(capsys.readouterr().out)["guide"]
    assert result["group_index"] == pytest.approx(figures["group_index"], rel=1e-12)
    text = chip(group="").replace("index         = 3.3", 'index = "AlGaAs:0.30"')
    path = written(tmp_path, text)
    material = load_recipe(path).material("AlGaAs:0.30")
    assert ripple(capsys, path)["group_index"] == float(material.group_index([980.0])[0])


@pytest.mark.parametrize(
    ("text", "said"),
    [
        (HEAD, "amplifier: is missing; add an [amplifier] section"),
        (chip(group=""), "chip.group_index: is missing"),
        (chip().replace("[975.0, 985.0]", "[980.0, 980.0]"), "chip.band_nm: is one wavelength"),
        (chip().replace("2000.0", "900000.0"), "chip.band_nm: holds too many modes"),
    ],
)
def test_recipes_without_a_ripple(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], text: str, said: str
) -> None:
    lines = refusal(capsys, "ripple", written(tmp_path, text), "--out", tmp_path / "out")
    assert said in lines[0]
