"""What a command imports and how long it takes to start."""

from __future__ import annotations

import subprocess
import sys
import time

import pytest

HEAVY = ("scipy", "matplotlib", "numba", "pydantic")
TELL = (
    "import sys; from coatings.cli.main import run; status = run({arguments!r}); "
    "print('HEAVY', *[m for m in {heavy!r} if m in sys.modules]); sys.exit(status)"
)


@pytest.mark.parametrize(
    "arguments",
    [["--help"], ["plan", "--help"], ["curve", "--help"], ["materials"], ["start", "--help"]],
)
def test_light_commands_import_nothing_heavy(arguments: list[str]) -> None:
    told = subprocess.run(
        [sys.executable, "-c", TELL.format(arguments=arguments, heavy=HEAVY)],
        capture_output=True, text=True, timeout=60, check=True,
    )  # fmt: skip
    assert told.stdout.splitlines()[-1].strip() == "HEAVY"


@pytest.mark.parametrize(("arguments", "most_s"), [(["--help"], 0.4), (["materials"], 0.4)])
def test_light_commands_start_at_once(arguments: list[str], most_s: float) -> None:
    """The best of four, with as much again for a busy machine."""
    command = [sys.executable, "-c", "from coatings.cli.main import main; main()", *arguments]
    taken = []
    for _ in range(4):
        started = time.perf_counter()
        subprocess.run(command, capture_output=True, timeout=60, check=True)
        taken.append(time.perf_counter() - started)
    assert min(taken) < 2 * most_s
