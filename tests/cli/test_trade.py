"""``trade``: the best front against a plain search, the window to paste, facets without layers, refusals."""

from __future__ import annotations

import json
import tomllib
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from small_product import HEAD_KEYS, TEXT, changed, refusal, written

from coatings.cli.main import run
from coatings.counted import counted_facet
from coatings.laser import FacetLight, estimate
from coatings.product import laser_chip
from coatings.recipe import load_recipe

TRADE_KEYS = {
    "R_front", "threshold_A", "front_W", "rear_W", "facet_load_MW_per_cm2", "wall_plug_efficiency",
    "length_um", "drive_A", "best", "laser",
}  # fmt: skip
FRONT_WINDOW = "[[front.windows]]\nat_most = 0.06\n"
REAR_WINDOW = "[[rear.windows]]           # a weak mirror\nat_least = 0.55\n"


def trade(
    capsys: pytest.CaptureFixture[str], recipe: Path, *arguments: str, status: int = 0
) -> Any:
    """JSON of ``trade``, which must print nothing else."""
    line = ["trade", str(recipe), *arguments, "--json", "-", "--out", str(recipe.parent / "out")]
    assert run(line) == status
    out, err = capsys.readouterr()
    assert err == ""
    return json.loads(out, parse_constant=pytest.fail)


def test_best_front_is_that_of_a_plain_search(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    recipe = written(tmp_path, changed("threshold_max_A        = 0.5", "threshold_max_A = 0.24"))
    result = trade(capsys, recipe)
    assert (result["laser"]["R_front"], result["laser"]["R_rear"]) == (0.06, 0.55)
    assert result["best"]["limited_by"] == "threshold"
    assert set(result) >= HEAD_KEYS | TRADE_KEYS
    assert len({len(result[name]) for name in ("R_front", "threshold_A", "front_W", "rear_W")}) == 1
    chip, rear = laser_chip(load_recipe(recipe)), FacetLight.lossless(0.55)
    best = result["best"]
    power: dict[float, float] = {}
    limited = 0
    for R in np.geomspace(1e-4, 0.9, 151):
        figures = estimate(chip, FacetLight.lossless(R), rear)
        assert figures.threshold_A is not None
        assert figures.front_W is not None
        limited += figures.threshold_A > 0.24
        if figures.threshold_A <= 0.24:
            power[float(R)] = figures.front_W
    assert limited > 0
    assert best["front_W"] == pytest.approx(max(power.values()), rel=2e-3)
    inside = [R for R, watts in power.items() if watts >= 0.99 * best["front_W"]]
    assert best["R_low"] == pytest.approx(min(inside), rel=0.065)
    assert best["R_high"] == pytest.approx(max(inside), rel=0.065)
    assert (tmp_path / "out" / "trade.png").read_bytes().startswith(b"\x89PNG")


@pytest.mark.parametrize(
    ("window", "R"),
    [
        ("at_most = 0.06", 0.06),
        ("at_least = 0.02", 0.02),
        ("between = [0.02, 0.06]", 0.04),
        ("reflectance = 0.01\ntolerance = 0.05", 0.01),
        ("at_most = 0.5\nband_nm = [1060.0, 1070.0]\n[[front.windows]]\nat_most = 0.06", 0.06),
        ('at_most = 0.5\nof = "coating"\n[[front.windows]]\nat_most = 0.06', 0.06),
        ('at_most = 0.5\npolarization = "TM"\n[[front.windows]]\nat_most = 0.06', 0.06),
        ("at_most = 0.5\nindex = 3.4\n[[front.windows]]\nat_most = 0.06", 0.06),
    ],
)
def test_facets_without_layers_count_with_their_windows(
    tmp_path: Path, window: str, R: float
) -> None:
    found = counted_facet(
        load_recipe(written(tmp_path, changed("at_most = 0.06", window))), "front"
    )
    assert found is not None
    assert found.light.R == pytest.approx(R, abs=1e-15)
    assert found.light.T == pytest.approx(1.0 - R, abs=1e-15)
    assert not found.by_layers


def test_layers_and_bare_facets_count_as_they_are(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    layered = changed(
        "max_layers = 1", 'layers = [{ material = "Al2O3", nm = 100.0 }]\nmax_layers = 1'
    )
    bare = layered[: layered.index("[rear]")]
    result = trade(capsys, written(tmp_path, bare))
    assert run(
        ["curve", str(tmp_path / "small.toml"), "--json", "-", "--out", str(tmp_path / "c")]
    ) in (0, 1)
    curve = json.loads(capsys.readouterr().out)
    for side in ("front", "rear"):
        at = curve[side]["wavelength_nm"].index(980.0)
        assert result["laser"][f"R_{side}"] == pytest.approx(curve[side]["R"][at], abs=1e-14)
    assert result["laser"]["R_rear"] == pytest.approx((2.3 / 4.3) ** 2, abs=1e-12)


def test_the_window_to_paste_lies_inside_and_can_be_pasted(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    first = trade(capsys, written(tmp_path))
    window = tomllib.loads(first["window"])["front"]["windows"][0]
    assert window["reflectance"] - window["tolerance"] >= first["best"]["R_low"]
    assert window["reflectance"] + window["tolerance"] <= first["best"]["R_high"]
    second = trade(capsys, written(tmp_path, changed(FRONT_WINDOW, first["window"])))
    assert second["laser"]["R_front"] == window["reflectance"]
    assert second["best"]["R_front"] == pytest.approx(first["best"]["R_front"], rel=1e-3)
    assert run(["trade", str(tmp_path / "small.toml"), "--out", str(tmp_path / "out")]) == 0
    printed = capsys.readouterr().out
    assert all(line in printed for line in second["window"].splitlines())


def test_front_that_waits_for_the_trade(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    waiting = changed("at_most = 0.06", 'reflectance = "trade"')
    result = trade(capsys, written(tmp_path, waiting))
    assert "front" not in result["facets"]
    assert result["laser"]["R_front"] == pytest.approx(result["best"]["R_front"], rel=1e-12)
    assert run(["trade", str(tmp_path / "small.toml"), "--out", str(tmp_path / "out")]) == 0
    assert "the trade's to find" in capsys.readouterr().out


def test_no_front_keeps_the_limits(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    strict = changed("threshold_max_A        = 0.5", "threshold_max_A        = 0.01")
    result = trade(capsys, written(tmp_path, strict), status=1)
    assert result["best"]["R_front"] is None
    assert result["best"]["limited_by"] == "threshold"
    assert result["window"] is None


def test_sweeps_go_through_the_chip_as_it_is(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    recipe = written(tmp_path)
    result = trade(capsys, recipe, "--length", "2000", "2500", "400", "--current", "2", "3", "1")
    length, current = result["over_length"], result["over_current"]
    assert length["length_um"] == [2000.0, 2400.0, 2500.0]
    assert current["current_A"] == [2.0, 3.0]
    best = result["best"]["R_front"]
    assert length["R_front"][0] == pytest.approx(best, rel=1e-2)
    assert current["R_front"][1] == pytest.approx(best, rel=1e-2)
    line = ["trade", str(recipe), "--out", str(tmp_path / "out"), "--current", "0.01", "3", "0.1"]
    assert run(line) == 0
    printed = capsys.readouterr().out
    assert "no front keeps the limits (threshold)" in printed
    assert "one value in 3 is shown" in printed


def test_lossy_front_reflector_outside_and_amplifier(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    dark = changed(
        "max_layers = 1", 'layers = [{ material = "soot", nm = 60.0 }]\nmax_layers = 1'
    ) + (
        "\n[materials.soot]\nindex = 2.0\nk = 0.3\n"
        "\n[external]\nreflectance = 0.05\ncoupling = 0.8\nband_nm = [979.0, 981.0]\n"
        "\n[amplifier]\ngain_dB = 3.0\n"
    )
    dark = changed("threshold_max_A        = 0.5\n", "", dark)
    result = trade(capsys, written(tmp_path, changed('["Al2O3"] ', '["Al2O3", "soot"] ', dark)))
    assert result["laser"]["coating_absorbed_W"] > 0.0
    # Room for what the coating takes: the axis ends at nine tenths of the rest.
    assert 0.5 < result["R_front"][-1] < 0.86
    assert result["laser"]["external"] is not None
    assert result["ripple_dB"] is not None
    assert result["locking_margin_per_cm"] is not None
    assert any("No ripple limit is given" in note for note in result["notes"])
    assert run(["trade", str(tmp_path / "small.toml"), "--out", str(tmp_path / "out")]) == 0
    printed = capsys.readouterr().out
    assert "REFLECTOR" in printed
    assert "locking margin" in printed
    assert "ripple below threshold" in printed


@pytest.mark.parametrize(
    ("text", "said"),
    [
        (changed(TEXT[TEXT.index("[laser]") : TEXT.index("[front]")], ""), "laser: is missing"),
        (changed("drive_A                = 3.0\n", ""), "laser.drive_A: is missing"),
        (
            changed("at_least = 0.55", 'reflectance = "trade"'),
            'rear.windows: takes "trade" as its target, but a value is needed here',
        ),
        (
            changed(REAR_WINDOW, "[[rear.windows]]\nabsorption_at_most = 0.1\n"),
            "rear: has neither layers nor a window for the reflectance",
        ),
    ],
)
def test_recipes_that_cannot_be_traded(
    tmp_path: Path, capsys: pytest.CaptureFixture[str], text: str, said: str
) -> None:
    lines = refusal(capsys, "trade", written(tmp_path, text), "--out", tmp_path / "out")
    assert said in lines[0]
    assert not (tmp_path / "out").exists()


@pytest.mark.parametrize(
    ("option", "given", "said"),
    [
        ("--length", ("3000", "2000", "100"), "--length: got 3000 2000 100; give FROM < TO"),
        ("--current", ("1", "2", "0"), "--current: got 1 2 0; give FROM < TO and a STEP above 0"),
        ("--current", ("1", "2", "0.001"), "--current: asks for 1001 values; give at most 50"),
    ],
)
def test_ranges_that_are_none(
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
    option: str,
    given: tuple[str, ...],
    said: str,
) -> None:
    lines = refusal(capsys, "trade", written(tmp_path), option, *given, "--out", tmp_path / "out")
    assert said in lines[0]
