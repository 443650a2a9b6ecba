"""What ``curve`` leaves: names, lengths, balance of light, grids, exit status."""

from __future__ import annotations

import csv
import json
from pathlib import Path
from typing import Any

import pytest
from small_product import HEAD_KEYS, changed, refusal, written

from coatings.cli.main import run

CURVE_KEYS = {
    "facet", "side", "model", "wavelength_nm", "R", "T", "A", "S", "phase_rad", "windows",
}  # fmt: skip
LISTS = ("wavelength_nm", "R", "T", "A", "S", "phase_rad")


def curve(capsys: pytest.CaptureFixture[str], *arguments: str | Path) -> tuple[int, Any]:
    """Status and JSON of ``curve``, which must print nothing else."""
    status = run(["curve", *map(str, arguments), "--json", "-"])
    out, err = capsys.readouterr()
    assert err == ""
    return status, json.loads(out, parse_constant=pytest.fail)


def test_both_facets_by_name(planned: Path, capsys: pytest.CaptureFixture[str]) -> None:
    status, result = curve(capsys, planned / "chosen.toml", "--out", planned.parent / "c")
    assert status == 0
    assert set(result) >= HEAD_KEYS
    for side in ("front", "rear"):
        assert set(result[side]) >= CURVE_KEYS
        assert result[side]["facet"] == side
        assert result[side]["side"] == "chip"
        assert result[side]["model"] == "plane"
        assert len({len(result[side][name]) for name in LISTS}) == 1
        assert all(window["margin"] >= 0 for window in result[side]["windows"])
        shares = [result[side][name] for name in ("R", "T", "A", "S")]
        for parts in zip(*shares, strict=True):
            assert sum(parts) == pytest.approx(1.0, abs=1e-12)
            assert min(parts) >= -1e-12
    assert (planned.parent / "c" / "curve.png").exists()


def test_one_facet_is_flat(planned: Path, capsys: pytest.CaptureFixture[str]) -> None:
    out = planned.parent / "c"
    _, both = curve(capsys, planned / "chosen.toml", "--out", out)
    _, rear = curve(capsys, planned / "chosen.toml", "--out", out, "--facet", "rear")
    assert set(rear) >= HEAD_KEYS | CURVE_KEYS
    assert {key: rear[key] for key in both["rear"]} == both["rear"]


@pytest.mark.parametrize(
    ("grid", "expected"),
    [
        (("980", "980", "1"), [980.0]),
        (("970", "972", "1"), [970.0, 971.0, 972.0]),
        (("970", "971.5", "1"), [970.0, 971.0, 971.5]),
        (("970", "970.4", "0.1"), [970.0, 970.1, 970.2, 970.3, 970.4]),
    ],
)
def test_grid(
    planned: Path,
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
    grid: tuple[str, ...],
    expected: list[float],
) -> None:
    _, result = curve(capsys, planned / "chosen.toml", "--out", tmp_path, "--nm", *grid)
    assert result["front"]["wavelength_nm"] == pytest.approx(expected, abs=1e-9)
    assert len(result["front"]["R"]) == len(expected)


def test_margins_do_not_depend_on_the_grid(
    planned: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    _, coarse = curve(capsys, planned / "chosen.toml", "--out", tmp_path, "--nm", "980", "980", "1")
    _, fine = curve(capsys, planned / "chosen.toml", "--out", tmp_path)
    assert coarse["rear"]["windows"] == fine["rear"]["windows"]


def test_csv_holds_the_numbers_of_the_json(
    planned: Path, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    table = tmp_path / "s.csv"
    _, result = curve(capsys, planned / "chosen.toml", "--out", tmp_path / "o", "--csv", table)
    rows = list(csv.DictReader(table.read_text().splitlines()))
    assert [row["facet"] for row in rows].count("rear") == len(result["rear"]["R"])
    rear = [row for row in rows if row["facet"] == "rear"]
    for name in LISTS:
        assert [float(row[name]) for row in rear] == pytest.approx(result["rear"][name], rel=1e-11)


def test_recipe_without_layers_misses_and_says_why(
    recipe: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert run(["curve", str(recipe)]) == 1
    said = capsys.readouterr().out
    assert "no layers chosen yet" in said
    assert "MISSED by" in said
    assert Path("out/small/curve.png").exists()


def test_bare_facets_without_windows_are_no_miss(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    text = (
        "recipe = 1\n[chip]\nwavelength_nm = 980.0\nband_nm = [975.0, 985.0]\n"
        'polarization = "TE"\nlength_um = 500.0\nstripe_um = 5.0\nindex = 3.0\n'
    )
    status, result = curve(capsys, written(tmp_path, text, "bare.toml"))
    assert status == 0
    assert result["front"]["windows"] == []
    # Fresnel at normal incidence: ((3 - 1)/(3 + 1))^2 = 1/4
    assert result["front"]["R"] == pytest.approx([0.25] * len(result["front"]["R"]), abs=1e-12)


@pytest.mark.parametrize(
    ("grid", "said"),
    [
        (("1000", "900", "1"), "FROM <= TO"),
        (("nan", "900", "1"), "FROM <= TO"),
        (("900", "nan", "1"), "FROM <= TO"),
        (("900", "1000", "nan"), "STEP above 0"),
        (("900", "1000", "0"), "STEP above 0"),
        (("900", "1000", "-1"), "STEP above 0"),
        (("-5", "1000", "1"), "FROM <= TO"),
        (("900", "inf", "1"), "FROM <= TO"),
        (("900", "1000", "1e-4"), "at most 100000"),
        (("10", "20", "1"), "known over"),
    ],
)
def test_grid_that_is_none(
    recipe: Path, capsys: pytest.CaptureFixture[str], grid: tuple[str, ...], said: str
) -> None:
    (line,) = refusal(capsys, "curve", recipe, "--nm", *grid)
    assert said in line
    assert not Path("out").exists()


def test_unknown_k_is_said(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    path = written(
        tmp_path,
        changed('palette    = ["Al2O3"]     # one film only\nmax_layers = 1',
                'layers = [{ material = "Al2O3-laser-ablated", nm = 150.0 }]'),
    )  # fmt: skip
    _, result = curve(capsys, path, "--facet", "front")
    assert "Al2O3-laser-ablated (unknown)" in " ".join(result["notes"])
    run(["curve", str(path), "--facet", "front"])
    assert "absorption counted as zero" in capsys.readouterr().out
