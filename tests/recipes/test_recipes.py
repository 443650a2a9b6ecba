"""Every recipe of the house: planned once, and the plan holds what it promises."""

from __future__ import annotations

import json
import re
import tomllib
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

from coatings.cli.main import run

HOUSE = Path(__file__).resolve().parents[2]
RECIPES = sorted((HOUSE / "recipes").glob("*.toml"))
LEAST_YIELD = 0.8
ONE_SCREEN = 30

pytestmark = pytest.mark.slow


@dataclass(frozen=True)
class Ran:
    """What ``plan`` of one recipe said and left."""

    text: str
    status: int
    said: str
    result: dict[str, Any]
    folder: Path

    @property
    def recipe(self) -> dict[str, Any]:
        """The recipe's tables."""
        return tomllib.loads(self.text)


@pytest.fixture(scope="module", params=RECIPES, ids=lambda path: path.stem)
def ran(request: pytest.FixtureRequest, tmp_path_factory: pytest.TempPathFactory) -> Ran:
    folder = tmp_path_factory.mktemp(request.param.stem)
    with pytest.MonkeyPatch.context() as patch:
        patch.setenv("COLUMNS", "80")
        said = folder / "said.txt"
        status = _run_into(said, ["plan", str(request.param), "--out", str(folder / "out")])
    return Ran(
        text=request.param.read_text(encoding="utf-8"),
        status=status,
        said=said.read_text(encoding="utf-8"),
        result=json.loads((folder / "out" / "result.json").read_text(encoding="utf-8")),
        folder=folder / "out",
    )


def _run_into(path: Path, arguments: list[str]) -> int:
    with path.open("w", encoding="utf-8") as out, pytest.MonkeyPatch.context() as patch:
        patch.setattr("sys.stdout", out)
        return run(arguments)


def test_plan_says_yes(ran: Ran) -> None:
    assert ran.status == 0


def test_every_facet_meets_its_windows_with_a_good_yield(ran: Ran) -> None:
    sides = [side for side in ("front", "rear") if ran.recipe.get(side, {}).get("windows")]
    assert sides
    for side in sides:
        taken = ran.result[side]["stacks"][ran.result[side]["chosen"]]
        assert taken["meets"]
        assert taken["margin"] >= 0
        assert taken["yield"] >= LEAST_YIELD


def test_laser_is_estimated_where_the_recipe_has_one(ran: Ran) -> None:
    laser = ran.result["laser"]
    assert (laser is not None) is ("laser" in ran.recipe)
    if laser is not None:
        assert 0 < laser["threshold_A"] < ran.recipe["laser"]["drive_A"]
        assert laser["front_W"] > 0
        assert laser["rear_W"] > 0
        assert all(limit["kept"] for limit in ran.result["limits"])


def test_summary_fits_one_screen(ran: Ran) -> None:
    lines = ran.said.splitlines()
    assert len([line for line in lines if "/" not in line]) <= ONE_SCREEN
    assert all(line == line.rstrip() for line in lines)
    assert all(len(line) <= 80 for line in lines if str(ran.folder) not in line)


def test_chosen_recipe_is_taken_by_curve(ran: Ran) -> None:
    chosen = ran.folder / "chosen.toml"
    result = ran.folder / "curve.json"
    arguments = ["--out", str(ran.folder / "c"), "--json", str(result), "--quiet"]
    assert run(["curve", str(chosen), *arguments]) == 0
    curve = json.loads(result.read_text(encoding="utf-8"))
    for side in ("front", "rear"):
        if side in ran.result:
            taken = ran.result[side]["stacks"][ran.result[side]["chosen"]]
            margins = [window["margin"] for window in curve[side]["windows"]]
            assert min(margins) == pytest.approx(taken["margin"], abs=1e-12)


def test_remarks_of_the_recipe_are_kept(ran: Ran) -> None:
    remark = re.compile(r"#.*")
    kept = (ran.folder / "chosen.toml").read_text(encoding="utf-8")
    assert remark.findall(kept) == remark.findall(ran.text)


def test_start_writes_a_recipe_that_plan_takes_unchanged(tmp_path: Path) -> None:
    assert run(["start", str(tmp_path), "--quiet"]) == 0
    out = tmp_path / "out"
    assert run(["plan", str(tmp_path / "starter.toml"), "--out", str(out), "--quiet"]) == 0
    result = json.loads((out / "result.json").read_text(encoding="utf-8"))
    for side in ("front", "rear"):
        assert result[side]["stacks"][result[side]["chosen"]]["yield"] >= LEAST_YIELD
    assert result["laser"]["front_W"] > 0
