"""``calibrate``: what chips were made with comes back; outliers, the section to paste, refusals."""

from __future__ import annotations

import json
import tomllib
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from small_product import HEAD_KEYS, TEXT, changed, refusal, written

from coatings.cli.main import run
from coatings.counted import bare_light, bare_R_sigma
from coatings.laser import FacetLight, LaserChip, estimate
from coatings.recipe import load_recipe

TRUTH: dict[str, Any] = {
    "internal_loss_per_cm": 1.7,
    "injection_efficiency": 0.83,
    "transparency_A_per_cm2": 95.0,
    "modal_gain_per_cm": 31.0,
}
LENGTHS = (700.0, 700.0, 1000.0, 1000.0, 1500.0, 1500.0, 2200.0, 2200.0, 3000.0, 3000.0)
BARE_R = (2.3 / 4.3) ** 2
HEAD = TEXT[: TEXT.index("[laser]")]
GUIDE = """guide = { layers = [
  { material = "AlGaAs:0.30" }, { index = 3.42, um = 0.3 }, { material = "AlGaAs:0.30" } ] }"""


def chips(
    folder: Path,
    *,
    bare: FacetLight | None = None,
    share: float = 1.0,
    column: str = "slope_W_per_A",
    doctored: int | None = None,
    lengths: tuple[float, ...] = LENGTHS,
) -> Path:
    """Uncoated chips by the laser's direct models, with a ten-thousandth of scatter in turn."""
    facet = FacetLight.lossless(BARE_R) if bare is None else bare
    rows = []
    for row, length in enumerate(lengths):
        chip = LaserChip(wavelength_nm=980.0, stripe_um=50.0, length_um=length, **TRUTH)
        figures = estimate(chip, facet, facet)
        assert figures.threshold_A is not None
        slope = share * (figures.slope_front_W_per_A + figures.slope_rear_W_per_A)
        factor = 1.25 if row == doctored else 1.0
        rows.append(f"{length!r},{figures.threshold_A!r},{factor * slope!r}")
    path = folder / "chips.csv"
    path.write_text("\n".join([f"length_um,threshold_A,{column}", *rows]) + "\n")
    return path


def calibrate(capsys: pytest.CaptureFixture[str], recipe: Path, data: Path, *more: str) -> Any:
    """JSON of ``calibrate``, which must print nothing else."""
    out = str(recipe.parent / "out")
    assert run(["calibrate", str(recipe), str(data), *more, "--json", "-", "--out", out]) == 0
    said, err = capsys.readouterr()
    assert err == ""
    return json.loads(said, parse_constant=pytest.fail)


def test_what_the_chips_were_made_with_comes_back(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    recipe = written(tmp_path)
    result = calibrate(capsys, recipe, chips(tmp_path))
    assert set(result) >= HEAD_KEYS | set(TRUTH)
    for name, truth in TRUTH.items():
        assert result[name]["value"] == pytest.approx(truth, rel=1e-6)
        assert result["by_lines"][name]["value"] == pytest.approx(truth, rel=1e-6)
        assert set(result[name]) == {"value", "sigma"}
    # A plane wave's R is up to a fifth off, any value alike: 0.2 R/sqrt 3.
    assert result["bare"] == pytest.approx({"R": BARE_R, "sigma": 0.2 * BARE_R / 3**0.5}, rel=1e-9)
    assert result["modal_gain_per_cm"]["sigma"] > 0.01 * TRUTH["modal_gain_per_cm"]
    section = tomllib.loads((tmp_path / "out" / "laser.toml").read_text())["laser"]
    assert {name: section[name] for name in TRUTH} == pytest.approx(TRUTH, rel=1e-2)
    assert (tmp_path / "out" / "calibrate.png").read_bytes().startswith(b"\x89PNG")


def test_the_modes_own_facet_and_slopes_of_one_side(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    recipe = written(tmp_path, HEAD.replace("index         = 3.3", GUIDE))
    loaded = load_recipe(recipe)
    bare = bare_light(loaded)
    assert bare.R > 1.05 * BARE_R
    assert bare_R_sigma(loaded, bare) == pytest.approx(2.0 * np.sqrt(bare.R) * 4e-4)
    data = chips(tmp_path, bare=bare, share=0.5, column="front_slope_W_per_A")
    result = calibrate(capsys, recipe, data)
    for name, truth in TRUTH.items():
        assert result[name]["value"] == pytest.approx(truth, rel=1e-6)
    assert any("Without [laser]" in note for note in result["notes"])


def test_an_outlier_is_named_left_out_or_kept(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    recipe, data = written(tmp_path), chips(tmp_path, doctored=4)
    result = calibrate(capsys, recipe, data)
    assert [outlier["row"] for outlier in result["outliers"]] == [4]
    assert result["internal_loss_per_cm"]["value"] == pytest.approx(1.7, rel=1e-6)
    kept = calibrate(capsys, recipe, data, "--keep-outliers")
    assert kept["internal_loss_per_cm"]["value"] != pytest.approx(1.7, rel=1e-3)
    assert run(["calibrate", str(recipe), str(data), "--out", str(tmp_path / "out")]) == 0
    printed = capsys.readouterr().out
    assert "9 of 10 chips" in printed
    assert "chip 5 (1500 um): slope" in printed
    assert "internal_loss_per_cm = 1.7" in printed


def test_chips_that_cannot_be(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    recipe, out = written(tmp_path), tmp_path / "out"
    one = chips(tmp_path, lengths=(1000.0, 1000.0, 1000.0))
    lines = refusal(capsys, "calibrate", recipe, one, "--out", out)
    assert "chips.csv: length_um: holds one length only" in lines[0]
    rising = tmp_path / "rising.csv"
    rising.write_text(
        "length_um,threshold_A,slope_W_per_A\n1000,0.2,0.5\n2000,0.25,0.6\n3000,0.3,0.7\n"
    )
    lines = refusal(capsys, "calibrate", recipe, rising, "--out", out)
    assert "rising.csv: slope_W_per_A: rises with length" in lines[0]
    text = tmp_path / "text.csv"
    text.write_text("length_um,threshold_A,slope_W_per_A\n1000,0.2,none\n")
    lines = refusal(capsys, "calibrate", recipe, text, "--out", out)
    assert lines[0].endswith("line 2, slope_W_per_A: is 'none'; expected a finite number")
    lines = refusal(capsys, "calibrate", recipe, tmp_path / "absent.csv", "--out", out)
    assert "absent.csv: no such file" in lines[0]
    assert not out.exists()


def test_data_are_not_written_over(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    data = chips(tmp_path)
    lines = refusal(capsys, "calibrate", written(tmp_path), data, "--json", data)
    assert "--json: would replace" in lines[0]


def test_linear_gain_and_stages_come_from_the_recipe(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    linear = changed("drive_A  ", 'stages = 2\ngain_law = "linear"\ndrive_A  ')
    result = calibrate(capsys, written(tmp_path, linear), chips(tmp_path))
    assert result["injection_efficiency"]["value"] == pytest.approx(0.83 / 2.0, rel=1e-6)
    assert 'gain_law = "linear"' in result["section"]
