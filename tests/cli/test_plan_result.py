"""What ``plan`` leaves: names, lengths and sense of the result, and the chosen recipe."""

from __future__ import annotations

import hashlib
import json
import tomllib
from pathlib import Path
from typing import Any

import pytest
from small_product import HEAD_KEYS, TEXT, changed, process, written

from coatings import __version__
from coatings.cli.main import run

LASER_KEYS = {
    "R_front", "R_rear", "mirror_loss_per_cm", "threshold_gain_per_cm", "threshold_A",
    "slope_front_W_per_A", "slope_rear_W_per_A", "front_fraction", "front_W", "rear_W",
    "coating_absorbed_W", "facet_output_MW_per_cm2", "facet_load_MW_per_cm2",
    "wall_plug_efficiency", "axial_ratio", "model", "external",
}  # fmt: skip
STACK_KEYS = {"layers", "meets", "margin", "yield", "run_yield", "total_nm", "R"}


@pytest.fixture(scope="module")
def result(planned: Path) -> dict[str, Any]:
    return json.loads((planned / "result.json").read_text(), parse_constant=pytest.fail)


def test_result_carries_its_origin(planned: Path, result: dict[str, Any]) -> None:
    text = (planned.parent / "small.toml").read_bytes()
    assert set(result) >= HEAD_KEYS
    assert result["tool"] == "facetwright"
    assert result["version"] == __version__
    assert result["recipe_sha256"] == hashlib.sha256(text).hexdigest()
    assert result["seed"] == 1


@pytest.mark.parametrize("side", ["front", "rear"])
def test_shortlist_is_complete_sorted_and_consistent(result: dict[str, Any], side: str) -> None:
    facet = result[side]
    stacks = facet["stacks"]
    assert {len(s["layers"]) for s in stacks} == set(range(1, len(stacks[0]["layers"]) + 1))
    assert [s["yield"] for s in stacks] == sorted((s["yield"] for s in stacks), reverse=True)
    assert 0 <= facet["chosen"] < len(stacks)
    for stack in stacks:
        assert set(stack) >= STACK_KEYS
        assert stack["meets"] is (stack["margin"] >= 0)
        assert stack["total_nm"] == pytest.approx(sum(layer["nm"] for layer in stack["layers"]))
        assert 0 <= stack["yield_low"] <= stack["yield"] <= stack["yield_high"] <= 1
        assert 0 <= stack["run_yield"] <= 1
        assert all(round(layer["nm"], 1) == layer["nm"] for layer in stack["layers"])
    assert facet["base"] == []
    assert facet["cap"] == []


def test_laser_has_the_names_of_the_contract(result: dict[str, Any]) -> None:
    laser = result["laser"]
    assert set(laser) == LASER_KEYS
    assert laser["model"] in ("uniform", "axial")
    taken = {side: result[side]["stacks"][result[side]["chosen"]] for side in ("front", "rear")}
    assert laser["R_front"] == pytest.approx(taken["front"]["R"], abs=1e-12)
    assert laser["R_rear"] == pytest.approx(taken["rear"]["R"], abs=1e-12)
    assert result["limits"] == [
        {"name": "threshold_max_A", "limit": 0.5, "value": laser["threshold_A"], "kept": True},
        {"name": "rear_min_W", "limit": 0.0, "value": laser["rear_W"], "kept": True},
    ]


def test_result_says_what_it_rests_on(result: dict[str, Any]) -> None:
    names = {entry["name"] for entry in result["materials"]}
    assert names == {"Al2O3", "SiO2", "TiO2", "air"}
    assert all(entry["source"] and entry["sample"] for entry in result["materials"])
    assert any("No thermal resistance" in note for note in result["notes"])


def test_files_are_those_that_are_named(planned: Path) -> None:
    assert {path.name for path in planned.iterdir()} == {
        "result.json", "chosen.toml", "spectra.png", "layers-yield.png", "power.png",
    }  # fmt: skip
    for picture in planned.glob("*.png"):
        assert picture.read_bytes().startswith(b"\x89PNG\r\n\x1a\n")


def test_chosen_recipe_keeps_the_users_words_and_adds_the_layers(
    planned: Path, result: dict[str, Any]
) -> None:
    text = (planned / "chosen.toml").read_text(encoding="utf-8")
    for remark in ("# A small product: this line stays.", "# and this remark", "# one film only",
                   "# a weak mirror"):  # fmt: skip
        assert remark in text
    chosen, given = tomllib.loads(text), tomllib.loads(TEXT)
    for side in ("front", "rear"):
        taken = result[side]["stacks"][result[side]["chosen"]]
        assert chosen[side].pop("layers") == taken["layers"]
    assert chosen == given


def test_chosen_recipe_gives_curve_the_R_of_the_result(
    planned: Path, result: dict[str, Any], tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    arguments = ["--nm", "980", "980", "1", "--json", "c.json", "--quiet"]
    assert run(["curve", str(planned / "chosen.toml"), *arguments]) == 0
    curve = json.loads(Path("c.json").read_text())
    for side in ("front", "rear"):
        taken = result[side]["stacks"][result[side]["chosen"]]
        assert curve[side]["R"] == [pytest.approx(taken["R"], abs=1e-13)]
        assert curve[side]["windows"][0]["margin"] == pytest.approx(taken["margin"], abs=1e-13)


def test_chosen_recipe_is_planned_again_to_the_same_layers(
    planned: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    arguments = ["plan", str(planned / "chosen.toml"), "--facet", "front", "--quiet"]
    assert run([*arguments, "--workers", "1"]) == 0
    assert Path("out/chosen/chosen.toml").read_text() == (planned / "chosen.toml").read_text()


def test_one_facet_leaves_the_other_alone(recipe: Path) -> None:
    assert run(["plan", str(recipe), "--facet", "front", "--quiet", "--seed", "7"]) == 0
    result = json.loads(Path("out/small/result.json").read_text())
    assert "rear" not in result
    assert result["seed"] == 7
    assert "layers" not in tomllib.loads(Path("out/small/chosen.toml").read_text())["rear"]


def test_take_changes_the_choice_and_the_chosen_recipe(recipe: Path) -> None:
    arguments = ["plan", str(recipe), "--facet", "rear", "--quiet", "--workers", "1"]
    assert run([*arguments, "--take", "1"]) in (0, 1)
    result = json.loads(Path("out/small/result.json").read_text())
    assert result["rear"]["chosen"] == 1
    chosen = tomllib.loads(Path("out/small/chosen.toml").read_text())
    assert chosen["rear"]["layers"] == result["rear"]["stacks"][1]["layers"]


def test_own_tables_go_along_with_the_chosen_recipe(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    rows = "\n".join(f"{nm},{1.65 + 1e4 / nm**2:.6f}" for nm in range(900, 1101, 10))
    (tmp_path / "lots").mkdir()
    (tmp_path / "lots" / "alumina.csv").write_text(f"wavelength_nm,n\n{rows}\n")
    own = TEXT + '\n[materials.Al2O3]\ntable = "lots/alumina.csv"\n'
    path = written(tmp_path, own)
    assert run(["plan", str(path), "--facet", "front", "--quiet"]) == 0
    result = json.loads(Path("out/small/result.json").read_text())
    assert any("instead of the library's" in note for note in result["notes"])
    assert any("absorption counted as zero" in note for note in result["notes"])
    assert Path("out/small/lots/alumina.csv").read_bytes() == Path("lots/alumina.csv").read_bytes()
    moved = tmp_path / "moved"
    Path("out/small").rename(moved)
    arguments = ["--facet", "front", "--nm", "980", "980", "1", "--json", "c.json", "--quiet"]
    assert run(["curve", str(moved / "chosen.toml"), *arguments]) == 0
    curve = json.loads(Path("c.json").read_text())
    assert curve["R"] == [result["front"]["stacks"][result["front"]["chosen"]]["R"]]
    assert curve["notes"] == [note for note in result["notes"] if note in curve["notes"]]


def test_target_out_of_reach_ends_with_status_1_and_says_by_how_much(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    path = written(tmp_path, changed("at_most = 0.06", "at_most = 0.005"))
    assert run(["plan", str(path), "--facet", "front"]) == 1
    said = " ".join(capsys.readouterr().out.split())
    assert "NOT MET: R is" in said
    assert "what would help:" in said
    assert "a window wider by" in said
    result = json.loads(Path("out/small/result.json").read_text())
    stack = result["front"]["stacks"][result["front"]["chosen"]]
    assert stack["meets"] is False
    assert stack["margin"] < 0
    assert any("plane wave" in note for note in result["notes"])


def test_given_layers_are_judged_as_they_are(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(tmp_path)
    given = changed(
        'palette    = ["Al2O3"]     # one film only\nmax_layers = 1',
        'layers = [{ material = "Al2O3", nm = 150.05 }]',
    )
    assert run(["plan", str(written(tmp_path, given)), "--facet", "front", "--quiet"]) == 0
    result = json.loads(Path("out/small/result.json").read_text())
    assert result["front"]["searched"] is False
    assert result["front"]["stacks"][0]["layers"] == [{"material": "Al2O3", "nm": 150.05}]
    assert Path("out/small/chosen.toml").read_text() == given


@pytest.mark.slow
def test_same_seed_gives_the_same_bytes_whatever_the_workers(recipe: Path) -> None:
    outputs = [
        process("plan", recipe, "--json", "-", "--quiet", "--workers", workers, cwd=recipe.parent)
        for workers in ("1", "2", "5")
    ]
    assert [output.returncode for output in outputs] == [0, 0, 0]
    assert outputs[0].stdout == outputs[1].stdout == outputs[2].stdout
    assert json.loads(outputs[0].stdout)["seed"] == 1


def test_another_seed_draws_other_chips(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(tmp_path)
    # One quarter wave of alumina on index 3.3 reflects about 1 %: many chips on either side.
    loose = changed('method = "ion-beam"', 'method = "e-beam"')
    path = written(tmp_path, changed("at_most = 0.06", "at_most = 0.0105", loose))
    yields = []
    for seed in ("1", "2"):
        run(["plan", str(path), "--facet", "front", "--seed", seed, "--quiet"])
        result = json.loads(Path("out/small/result.json").read_text())
        yields.append([stack["yield"] for stack in result["front"]["stacks"]])
    assert 0.05 < yields[0][0] < 0.95
    assert yields[0] != yields[1]
