"""The terminal: 80 columns, one screen, no colours where none are wanted, readers who leave early."""

from __future__ import annotations

import json
import os
import subprocess
from pathlib import Path
from typing import Any

import pytest
from small_product import COMMAND, TEXT, process

from coatings.cli.main import run
from coatings.cli.screen import print_rows

ONE_SCREEN = 30
PLAIN = {"NO_COLOR": "1", "COLUMNS": "80"}


@pytest.fixture(autouse=True)
def eighty_columns(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("COLUMNS", "80")
    for name in ("FORCE_COLOR", "TTY_COMPATIBLE", "TTY_INTERACTIVE"):
        monkeypatch.delenv(name, raising=False)


def test_plan_fits_one_screen(recipe: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["plan", str(recipe), "--workers", "1"]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert len(lines) <= ONE_SCREEN
    assert all(len(line) <= 80 and line == line.rstrip() for line in lines)
    assert [line.split()[0] for line in lines if not line.startswith(" ")] == [
        "PLAN", "FRONT", "REAR", "LASER", "RUN", "NOTE", "FILES",
    ]  # fmt: skip


def test_curve_fits_the_width(planned: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert run(["curve", str(planned / "chosen.toml"), "--out", str(planned.parent / "c")]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert all(len(line) <= 80 and line == line.rstrip() for line in lines if "/" not in line)


def test_long_text_wraps_beside_its_label(capsys: pytest.CaptureFixture[str]) -> None:
    print_rows([("[bold]NOTE[/bold]", "word " * 30), ("", "end")])
    lines = capsys.readouterr().out.splitlines()
    assert lines[0].startswith("NOTE word")
    assert all(line.startswith("     ") for line in lines[1:])
    assert max(map(len, lines)) <= 80


def test_square_brackets_of_the_user_are_no_markup(
    recipe: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    recipe.write_text(TEXT.replace("980 nm small chip", "[red]lot[/red] [7]"))
    run(["curve", str(recipe)])
    assert "CURVE [red]lot[/red] [7], revision B" in capsys.readouterr().out


@pytest.mark.parametrize("option", ["--quiet", "--json"])
def test_silence(planned: Path, capsys: pytest.CaptureFixture[str], option: str) -> None:
    out = str(planned.parent / "c")
    more = ["-"] if option == "--json" else []
    assert run(["curve", str(planned / "chosen.toml"), "--out", out, option, *more]) == 0
    said = capsys.readouterr()
    assert said.err == ""
    assert said.out == "" or json.loads(said.out)
    assert (option == "--quiet") is (said.out == "")


PLAIN_SIGNS: tuple[dict[str, str], ...] = (
    {"LC_ALL": "C", "PYTHONIOENCODING": "ascii"},
    {"LC_ALL": "C", "PYTHONUTF8": "0", "PYTHONCOERCECLOCALE": "0", "TERM": "dumb"},
)


@pytest.mark.parametrize("env", PLAIN_SIGNS)
def test_letters_that_the_terminal_lacks(recipe: Path, env: dict[str, str]) -> None:
    recipe.write_text(TEXT.replace("small chip", "chip \u00b5 \u2192"), encoding="utf-8")
    ended = process("curve", recipe, env={**PLAIN, **env}, cwd=recipe.parent)
    assert ended.returncode == 1
    assert ended.stderr == ""
    assert ended.stdout.startswith("CURVE 980 nm chip ")
    assert "\x1b" not in ended.stdout


def test_json_is_utf8_whatever_the_terminal_takes(recipe: Path) -> None:
    env = {**PLAIN, **PLAIN_SIGNS[0]}
    ended = process("materials", "Ta2O5", "--json", "-", env=env, cwd=recipe.parent)
    assert json.loads(ended.stdout)["name"] == "Ta2O5"
    ended = process("materials", "silicone-gel", "--json", "-", env=env, cwd=recipe.parent)
    assert not ended.stdout.isascii()


@pytest.mark.parametrize(
    ("arguments", "status"),
    [(["materials"], 0), (["materials", "Ta2O5", "--json", "-"], 0), (["curve", "small.toml"], 1)],
)
def test_reader_who_leaves_early(recipe: Path, arguments: list[str], status: int) -> None:
    reading, writing = os.pipe()
    os.close(reading)  # nobody reads: every write is a broken pipe
    ended = subprocess.run(
        [*COMMAND, *arguments], stdout=writing, stderr=subprocess.PIPE, cwd=recipe.parent,
        text=True, timeout=60, check=False,
    )  # fmt: skip
    os.close(writing)
    assert ended.returncode == status
    assert ended.stderr == ""


@pytest.mark.parametrize("arguments", [["materials"], ["materials", "Ta2O5", "--json", "-"]])
@pytest.mark.skipif(not Path("/dev/full").exists(), reason="no device that is always full")
def test_standard_output_on_a_full_disk(recipe: Path, arguments: list[str]) -> None:
    with Path("/dev/full").open("w") as full:
        ended = subprocess.run(
            [*COMMAND, *arguments], stdout=full, stderr=subprocess.PIPE, cwd=recipe.parent,
            text=True, timeout=60, check=False,
        )  # fmt: skip
    assert ended.returncode == 2
    assert ended.stderr == (
        "facetwright: standard output: can't be written: No space left on device\n"
    )


def test_streams_that_are_closed(recipe: Path) -> None:
    line = f"{COMMAND[0]} -c '{COMMAND[2]}' curve small.toml >&- 2>&-"
    ended = subprocess.run(["sh", "-c", line], cwd=recipe.parent, timeout=60, check=False)
    assert ended.returncode == 1
    assert (recipe.parent / "out/small/curve.png").exists()


def _bare(home: Path) -> dict[str, Any]:
    """An environment with next to nothing in it."""
    return {"PATH": os.environ["PATH"], "MPLCONFIGDIR": str(home / "no" / "such")}


def test_no_home_and_no_cache_folder(recipe: Path) -> None:
    ended = subprocess.run(
        [*COMMAND, "curve", "small.toml", "--json", "-"], capture_output=True, text=True,
        env=_bare(Path("/proc")), cwd=recipe.parent, timeout=120, check=False,
    )  # fmt: skip
    assert ended.returncode == 1
    assert json.loads(ended.stdout)["tool"] == "facetwright"
    assert "Traceback" not in ended.stderr
