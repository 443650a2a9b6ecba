"""Input that can't be used: one clear line a problem, status 2, nothing written."""

from __future__ import annotations

import os
import threading
from pathlib import Path

import pytest
from small_product import TEXT, changed, process, refusal, written

from coatings.cli.main import run

TABLE = "\n[materials.Al2O3]\ntable = {}\n"
ROWS = "wavelength_nm,n,k\n900,1.6,0\n950,1.6,0\n1000,1.6,0\n1100,1.6,0\n"

BAD_RECIPES = {
    "not TOML": ("[chip\n", "is not TOML"),
    "empty": ("", "is empty"),
    "blank": (" \n\n", "is empty"),
    "wrong version": (changed("recipe   = 1", "recipe   = 2"), "format version 1"),
    "typo in a key": (changed("stripe_um", "stripe_nm"), "did you mean stripe_um?"),
    "string for a number": (changed("= 2000.0", '= "long"'), "chip.length_um"),
    "nan": (changed("= 2000.0", "= nan"), "chip.length_um"),
    "inf": (changed("= 2000.0", "= inf"), "chip.length_um"),
    "negative": (changed("= 2000.0", "= -1.0"), "chip.length_um"),
    "zero": (changed("= 2000.0", "= 0.0"), "chip.length_um"),
    "reversed band": (changed("[975.0, 985.0]", "[985.0, 975.0]"), "reversed"),
    "unknown material": (changed('["Al2O3"]', '["Al203"]'), "did you mean 'Al2O3'?"),
    "unknown polarization": (changed('"TE"', '"TX"'), "chip.polarization"),
    "window without target": (changed("at_most = 0.06", ""), "has no target"),
    "window with two targets": (
        changed("at_most = 0.06", "at_most = 0.06\nat_least = 0.01"),
        "at_most and at_least",
    ),
    "percent for a fraction": (
        changed("at_most = 0.06", "at_most = 3"),
        "did you mean 0.03 (3 %)?",
    ),
    "negative target": (changed("at_most = 0.06", "at_most = -0.1"), "at_most"),
    "composition beyond its range": (
        changed('["Al2O3"]', '["AlGaAs:1.7"]'),
        "between 0 and 1",
    ),
    "wavelength outside a table": (
        changed("[975.0, 985.0]", "[100.0, 985.0]"),
        "is known over",
    ),
    "table that leaves the folder": (TEXT + TABLE.format('"../x.csv"'), "leaves the recipe's folder"),
    "table that is absolute": (TEXT + TABLE.format('"/etc/passwd"'), "absolute path"),
    "table that is not there": (TEXT + TABLE.format('"none.csv"'), "no such file"),
}  # fmt: skip

BAD_TABLES = {
    "text": ROWS.replace("1000,1.6", "1000,high"),
    "a hole": ROWS.replace("1000,1.6", "1000,"),
    "unsorted wavelengths": ROWS.replace("950,", "1050,"),
    "repeated wavelengths": ROWS.replace("950,", "900,"),
    "k below zero": ROWS.replace("1000,1.6,0", "1000,1.6,-0.1"),
    "nothing": "",
}


@pytest.mark.parametrize("case", BAD_RECIPES)
@pytest.mark.parametrize("command", ["plan", "curve"])
def test_bad_recipe(
    recipe: Path, capsys: pytest.CaptureFixture[str], case: str, command: str
) -> None:
    text, said = BAD_RECIPES[case]
    recipe.write_text(text)
    lines = refusal(capsys, command, recipe)
    assert any(said in line for line in lines), lines
    assert all(line.startswith(str(recipe)) for line in lines)
    assert not Path("out").exists()


@pytest.mark.parametrize("case", BAD_TABLES)
def test_bad_table(recipe: Path, capsys: pytest.CaptureFixture[str], case: str) -> None:
    Path("own.csv").write_text(BAD_TABLES[case])
    recipe.write_text(TEXT + TABLE.format('"own.csv"'))
    (line,) = refusal(capsys, "plan", recipe)
    assert "materials.Al2O3.table" in line
    assert "own.csv" in line


def test_more_than_five_problems(recipe: Path, capsys: pytest.CaptureFixture[str]) -> None:
    recipe.write_text(TEXT.replace("_um ", "_nm ").replace("_nm ", "_inch ").replace("at_", "of_"))
    lines = refusal(capsys, "plan", recipe)
    assert len(lines) == 6
    assert lines[-1].startswith("and ")
    assert lines[-1].endswith(" more")


def test_paths_that_are_no_file(recipe: Path, capsys: pytest.CaptureFixture[str]) -> None:
    os.mkfifo("pipe")
    Path("binary.toml").write_bytes(bytes(range(256)))
    Path("loop.toml").symlink_to("loop.toml")
    for path, said in {
        "nowhere.toml": "no such file",
        "no/such/folder.toml": "no such file",
        ".": "is a folder",
        "pipe": "not a regular file",
        "/dev/zero": "not a regular file",
        "/dev/null": "not a regular file",
        "binary.toml": "not text in UTF-8",
        "loop.toml": "can't be read",
        "new\nline.toml": "no such file",
    }.items():
        (line,) = refusal(capsys, "plan", path)
        assert said in line


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (["plan"], "Missing argument 'RECIPE'"),
        (["plan", "R", "--seed", "-1"], "--seed"),
        (["plan", "R", "--seed", "x"], "--seed"),
        (["plan", "R", "--workers", "0"], "--workers"),
        (["plan", "R", "--facet", "side"], "'front', 'rear'"),
        (["plan", "R", "--take", "-1"], "--take"),
        (["plan", "R", "--sed", "1"], "--seed"),
        (["plan", "R", "more"], "more"),
        (["curve", "R", "--nm", "1", "2"], "--nm"),
        (["curve", "R", "--take", "1"], "--take"),
        (["plam", "R"], "did you mean 'plan'?"),
        (["witness", "R"], "expected start, trade, plan"),
        (["--sed"], "--sed"),
        (["plan", "R", "--take", "0"], "both facets are searched; name it with --facet"),
        (["plan", "R", "--facet", "front", "--take", "99"], "front has stacks 0 to"),
        (["materials", "Ta205"], "did you mean Ta2O5?"),
        (["materials", "qqqq"], "'facetwright materials' lists all"),
        (["materials", "AlGaAs:1.7"], "between 0 and 1"),
        (["materials", "Ta2O5", "--nm", "10", "20", "1"], "350 to 1800 nm"),
        (["materials", "--nm", "900", "1000", "1"], "name of one material"),
        (["materials", "--out", "x"], "name of one material"),
    ],
)
def test_misused_options(
    recipe: Path, capsys: pytest.CaptureFixture[str], arguments: list[str], said: str
) -> None:
    (line,) = refusal(capsys, *[str(recipe) if word == "R" else word for word in arguments])
    assert said in line
    assert not Path("out").exists()


def test_facet_without_windows(recipe: Path, capsys: pytest.CaptureFixture[str]) -> None:
    recipe.write_text(TEXT.split("[rear]", maxsplit=1)[0])
    (line,) = refusal(capsys, "plan", recipe, "--facet", "rear")
    assert "no windows on rear; add [[rear.windows]]" in line


@pytest.mark.parametrize("arguments", [[], ["--help"], ["plan", "-h"]])
def test_help_is_no_refusal(capsys: pytest.CaptureFixture[str], arguments: list[str]) -> None:
    assert run(arguments) == 0
    assert "Usage: facetwright" in capsys.readouterr().out


def test_runs_outside_the_main_thread(recipe: Path) -> None:
    statuses: list[int] = []
    arguments = ["curve", str(recipe), "--json", "c.json", "--quiet"]
    thread = threading.Thread(target=lambda: statuses.append(run(arguments)))
    thread.start()
    thread.join()
    assert statuses == [1]
    assert Path("c.json").exists()


@pytest.mark.parametrize(
    ("text", "arguments"),
    [
        ("", []),
        (changed("= 2000.0", "= nan"), []),
        (TEXT, ["--out", "small.toml"]),
        (TEXT, ["--json", "missing/x.json"]),
    ],
)
def test_as_a_process(recipe: Path, text: str, arguments: list[str]) -> None:
    recipe.write_text(text)
    ended = process("plan", recipe, *arguments, cwd=recipe.parent)
    assert ended.returncode == 2
    assert ended.stdout == ""
    assert len(ended.stderr.splitlines()) == 1
    assert written(recipe.parent, text) == recipe
    assert sorted(path.name for path in recipe.parent.iterdir()) == ["small.toml"]


def test_numbers_of_the_laser_that_contradict_each_other(
    recipe: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """More light than electrical power: said before the search, not after it."""
    monkeypatch.setattr("coatings.cli.planning.plan_facets", pytest.fail)
    recipe.write_text(changed("junction_V             = 1.3", "junction_V = 0.3"))
    (line,) = refusal(capsys, "plan", recipe)
    assert "junction_V" in line
    assert not Path("out").exists()


def test_a_material_that_the_library_declines_says_why(capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["materials", "InGaAs-on-GaAs"]) == 2
    line = capsys.readouterr().err
    assert line.startswith("facetwright: InGaAs-on-GaAs: is not a material; no measured index of")
