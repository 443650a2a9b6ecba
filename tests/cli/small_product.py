"""A product that is planned within seconds, and ways to run the command line on it."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path
from typing import Any

import pytest

from coatings.cli.main import run

TEXT = """\
# A small product: this line stays.
recipe   = 1
title    = "980 nm small chip"   # and this remark
revision = "B"

[chip]
wavelength_nm = 980.0
band_nm       = [975.0, 985.0]
polarization  = "TE"
length_um     = 2000.0
stripe_um     = 50.0
index         = 3.3

[laser]
internal_loss_per_cm   = 1.0
injection_efficiency   = 0.9
transparency_A_per_cm2 = 110.0
modal_gain_per_cm      = 20.0
drive_A                = 3.0
junction_V             = 1.3
mode_height_um         = 0.8
threshold_max_A        = 0.5

[front]
palette    = ["Al2O3"]     # one film only
max_layers = 1
[[front.windows]]
at_most = 0.06

[rear]
palette    = ["SiO2", "TiO2"]
max_layers = 2
[[rear.windows]]           # a weak mirror
at_least = 0.55

[process]
method = "ion-beam"
"""

COMMAND = (sys.executable, "-c", "from coatings.cli.main import main; main()")
HEAD_KEYS = {"tool", "version", "recipe_sha256", "seed"}


def written(folder: Path, text: str = TEXT, name: str = "small.toml") -> Path:
    """The recipe as a file."""
    path = folder / name
    path.write_text(text, encoding="utf-8")
    return path


def changed(old: str, new: str, text: str = TEXT) -> str:
    """The recipe with one thing changed."""
    assert old in text
    return text.replace(old, new, 1)


def refusal(capsys: pytest.CaptureFixture[str], *arguments: str | Path) -> list[str]:
    """Lines of a command that must end with status 2 and say so in one line a problem."""
    status = run([str(argument) for argument in arguments])
    out, err = capsys.readouterr()
    assert status == 2, err
    assert out == ""
    lines = err.splitlines()
    assert 1 <= len(lines) <= 6
    assert all(line.startswith("facetwright: ") for line in lines)
    assert "Traceback" not in err
    return [line.removeprefix("facetwright: ") for line in lines]


def process(
    *arguments: str | Path, env: dict[str, str] | None = None, **options: Any
) -> subprocess.CompletedProcess[str]:
    """The command as a process of its own."""
    return subprocess.run(
        [*COMMAND, *map(str, arguments)],
        capture_output="stdout" not in options,
        text=True,
        env={**os.environ, **(env or {})},
        timeout=120,
        check=False,
        **options,
    )
