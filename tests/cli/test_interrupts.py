"""Ctrl-C and polite kills: a clean end, status 1, and a word on what was written."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest
from small_product import COMMAND, TEXT, written

from coatings.cli import planning
from coatings.cli.interrupts import watched_interrupts
from coatings.cli.main import run
from coatings.documents.files import undisturbed
from coatings.errors import InputError, Problem

LONG = TEXT.replace("max_layers = 2", "max_layers = 14").replace("0.55", "0.99")


def group_members(leader: int) -> list[str]:
    """Processes of a session that still run."""
    listed = subprocess.run(
        ["ps", "-o", "stat=,args=", "-s", str(leader)], capture_output=True, text=True, check=False
    )
    return [line for line in listed.stdout.splitlines() if not line.startswith("Z")]


@pytest.mark.slow
@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM])
@pytest.mark.parametrize("seconds", [0.05, 0.6, 2.0, 4.0])
def test_end_at_any_time(tmp_path: Path, seconds: float, number: signal.Signals) -> None:
    path = written(tmp_path, LONG)
    work = subprocess.Popen(
        [*COMMAND, "plan", str(path), "--workers", "2"], stdout=subprocess.PIPE,
        stderr=subprocess.PIPE, text=True, cwd=tmp_path, start_new_session=True,
    )  # fmt: skip
    time.sleep(seconds)
    started = time.monotonic()
    send = os.killpg if number == signal.SIGINT else os.kill  # a terminal signals the whole group
    send(work.pid, number)
    out, err = work.communicate(timeout=60)
    if seconds > 0.5:
        assert work.returncode == 1, err
        assert "Traceback" not in err
        assert "nothing was written" in err or "CUT SHORT" in out
    assert time.monotonic() - started < 15.0
    left = set(tmp_path.rglob("*")) - {path}
    assert bool(left) is ("CUT SHORT" in out)
    time.sleep(1.0)
    assert group_members(work.pid) == []


def test_best_so_far_is_written_and_said_to_be_so(
    recipe: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    """The interrupt comes after the first layer count, as from the keyboard."""
    real, calls = planning.plan_facets, []

    def progress(side: str, count: int, _best: object) -> None:
        calls.append((side, count))
        signal.raise_signal(signal.SIGINT)

    def stopped(*arguments: object, **options: object) -> object:
        return real(*arguments, **{**options, "progress": progress})  # type: ignore[arg-type]

    monkeypatch.setattr(planning, "plan_facets", stopped)
    assert run(["plan", str(recipe), "--facet", "rear", "--workers", "1"]) == 1
    assert calls == [("rear", 2)]
    assert "CUT SHORT: the best so far" in capsys.readouterr().out
    result = json.loads(Path("out/small/result.json").read_text())
    assert result["cut_short"] is True
    assert len(result["rear"]["stacks"][0]["layers"]) == 2
    assert Path("out/small/chosen.toml").exists()


def test_what_a_stop_left_unfound_is_no_fault_of_the_input(
    recipe: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    def stopped(*_: object, **__: object) -> None:
        try:
            signal.raise_signal(signal.SIGINT)
        except KeyboardInterrupt:
            raise InputError(Problem("front", "stopped; nothing was written")) from None

    monkeypatch.setattr(planning, "plan_facets", stopped)
    assert run(["plan", str(recipe)]) == 1
    assert capsys.readouterr().err == "facetwright: front: stopped; nothing was written\n"


def test_stop_before_the_search(
    recipe: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(planning, "_own_tables", lambda *_: signal.raise_signal(signal.SIGINT))
    assert run(["plan", str(recipe)]) == 1
    assert "facetwright: stopped; nothing was written" in capsys.readouterr().err
    assert not Path("out").exists()


def test_stop_while_printing_keeps_the_files(
    recipe: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(
        "coatings.cli.screen.print_rows", lambda _: signal.raise_signal(signal.SIGINT)
    )
    assert run(["curve", str(recipe)]) == 1
    assert "every file is written" in capsys.readouterr().err
    assert Path("out/small/curve.png").exists()


def test_stop_waits_for_files_to_be_in_place() -> None:
    steps = []

    def work() -> None:
        with undisturbed():
            signal.raise_signal(signal.SIGINT)
            steps.append("placed")

    with pytest.raises(KeyboardInterrupt):
        work()
    assert steps == ["placed"]


def test_handlers_are_put_back() -> None:
    before = signal.getsignal(signal.SIGINT), signal.getsignal(signal.SIGTERM)
    with pytest.raises(KeyboardInterrupt), watched_interrupts():
        signal.raise_signal(signal.SIGTERM)
    assert (signal.getsignal(signal.SIGINT), signal.getsignal(signal.SIGTERM)) == before


@pytest.mark.skipif(sys.platform == "win32", reason="signals of Unix")
def test_signal_that_is_ignored_stays_ignored() -> None:
    before = signal.signal(signal.SIGTERM, signal.SIG_IGN)
    try:
        with watched_interrupts() as interrupts:
            signal.raise_signal(signal.SIGTERM)
        assert not interrupts.seen
    finally:
        signal.signal(signal.SIGTERM, before)
