"""Measured data in simple CSV files: a line of column names, then one row of numbers a point.

Blank lines and lines that begin with # are passed over. Everything else must be a finite number with a
point as decimal mark: each fault is named by file, line and column.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from coatings.errors import InputError, Problem
from coatings.recipe.files import MEGABYTE, ReadError, decode, read_bytes

FloatArray: TypeAlias = NDArray[np.float64]
Layout: TypeAlias = tuple[str, ...]
_Line: TypeAlias = tuple[int, list[str]]

MOST_BYTES = 10 * MEGABYTE
_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?", re.ASCII)


@dataclass(frozen=True, eq=False)
class DataFile:
    """What a file holds: columns by name, each of shape (n,), in the order of the ``layout`` met."""

    path: Path
    layout: Layout
    columns: dict[str, FloatArray]


def read_data(path: Path, *, layouts: Sequence[Layout]) -> DataFile:
    """Columns of a CSV file.

    Parameters
    ----------
    path : the file.
    layouts : the sets of column names that it may have, in any order within the file.

    Raises
    ------
    InputError
        A file that is missing, not regular, larger than 10 MB or not text; a first line that is none of the
        layouts; a row of another length; a value that is no finite number; no rows.
    """
    try:
        text = decode(read_bytes(path, at_most=MOST_BYTES))
    except ReadError as error:
        why = error.problems[0].what
        raise InputError(Problem(f"{path}", f"{why}; give a CSV file of measured data")) from None
    lines = list(_lines(text))
    if not lines:
        raise InputError(Problem(f"{path}", f"is empty; expected the columns {_either(layouts)}"))
    head, layout = lines[0][1], _layout(path, lines[0], layouts)
    if len(lines) == 1:
        raise InputError(Problem(f"{path}", "has no rows below its column names; add the data"))
    table = _numbers(path, head, lines[1:])
    return DataFile(path, layout, {name: table[:, head.index(name)] for name in layout})


@contextmanager
def named(path: Path) -> Iterator[None]:
    """Put the file's name before what is wrong with its numbers."""
    try:
        yield
    except InputError as error:
        raise InputError(
            [
                Problem(": ".join(filter(None, (str(path), problem.where))), problem.what)
                for problem in error.problems
            ]
        ) from None


def _lines(text: str) -> Iterator[_Line]:
    for number, line in enumerate(text.splitlines(), start=1):
        if line.strip() and not line.lstrip().startswith("#"):
            yield number, [cell.strip() for cell in line.split(",")]


def _either(layouts: Sequence[Layout]) -> str:
    return " or ".join(", ".join(layout) for layout in layouts)


def _layout(path: Path, line: _Line, layouts: Sequence[Layout]) -> Layout:
    number, head = line
    for layout in layouts:
        if sorted(head) == sorted(layout):
            return layout
    found = ", ".join(name or "(nothing)" for name in head)
    found = found if len(found) <= 80 else f"{found[:80]}..."
    raise InputError(
        Problem(f"{path}: line {number}", f"names {found}; expected {_either(layouts)}")
    )


def _numbers(path: Path, head: Sequence[str], lines: Sequence[_Line]) -> FloatArray:
    problems: list[Problem] = []
    table = np.empty((len(lines), len(head)))
    for row, (number, cells) in enumerate(lines):
        if len(cells) != len(head):
            what = f"has {len(cells)} values, expected {len(head)}; the decimal mark is a point"
            problems.append(Problem(f"{path}: line {number}", what))
            continue
        for place, (name, cell) in enumerate(zip(head, cells, strict=True)):
            value = float(cell) if _NUMBER.fullmatch(cell) else math.nan
            table[row, place] = value
            if not math.isfinite(value):
                what = f"is {cell[:30]!r}; expected a finite number"
                problems.append(Problem(f"{path}: line {number}, {name}", what))
    if problems:
        raise InputError(problems)
    return table
