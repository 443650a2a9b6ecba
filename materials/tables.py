"""Reading of the library's own table files: a head of ``# key: value`` lines, then rows."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from functools import partial
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from materials.alloys import THERMAL, fixed
from materials.curves import Curve, Floats, Sum, Window
from materials.dispersion import closed
from materials.errors import TableError
from materials.info import Info, info_from_head
from materials.interpolation import monotone
from materials.material import Material, Thermal


def split_head(text: str, where: str) -> tuple[dict[str, str], list[tuple[int, str]]]:
    """Head as a dict, and the numbered lines that follow it."""
    head: dict[str, str] = {}
    rows: list[tuple[int, str]] = []
    for number, line in enumerate(text.splitlines(), start=1):
        if not line.startswith("#"):
            rows.append((number, line))
            continue
        key, colon, value = line[1:].partition(":")
        if not colon:
            raise TableError(where, "a line of the head must read '# key: value'", number)
        head[key.strip()] = value.strip()
    return head, rows


def read_entry(path: Path) -> Material:
    """Material from one file of the library; refuses incomplete metadata and bad numbers."""
    head, rows = split_head(path.read_text(encoding="utf-8"), path.name)
    return from_entry(head, rows, path.name)


def from_entry(head: dict[str, str], rows: list[tuple[int, str]], where: str) -> Material:
    """Material from head and rows of a file of the library."""
    info = info_from_head(head, where)
    if info.kind == "alloy":
        return fixed(info, head["model"])
    columns = _columns(rows, where)
    if info.kind == "formula":
        curve: Curve = closed(head.get("formula", ""), head.get("coefficients", ""), where)
        if "k" in columns:
            curve = Sum(curve, _absorption(columns))
    else:
        curve = _table(columns, info, where)
    return Material(info, curve, _thermal(head, columns, curve, info))


def _table(columns: dict[str, Floats], info: Info, where: str) -> Curve:
    if "n" not in columns:
        raise TableError(where, "the table has no column n; add 'wavelength_nm,n,k' and rows")
    wavelength = columns["wavelength_nm"]
    if not np.allclose(info.range_nm, (wavelength[0], wavelength[-1]), rtol=1e-6, atol=0.0):
        raise TableError(where, "range_nm of the head differs from the first and last wavelength")
    index = columns["n"].astype(np.complex128)
    if "k" in columns:
        index.imag = columns["k"]
    return monotone(wavelength, index)


def _absorption(columns: dict[str, Floats]) -> Curve:
    wavelength = columns["wavelength_nm"]
    index = np.zeros(len(wavelength), dtype=np.complex128)
    index.imag = columns["k"]
    curve = monotone(wavelength, index)
    return Window(curve, (float(wavelength[0]), float(wavelength[-1])))


def _thermal(
    head: dict[str, str], columns: dict[str, Floats], curve: Curve, info: Info
) -> Thermal | None:
    if "thermal_model" in head:
        return partial(_modelled, THERMAL[head["thermal_model"]], info)
    if "dn_dT_per_K" not in columns or info.temperature_C is None:
        return None
    rate = monotone(columns["wavelength_nm"], columns["dn_dT_per_K"].astype(np.complex128))
    return partial(_warmed, info, curve, rate)


def _modelled(law: Callable[[float], Curve], info: Info, celsius: float) -> Material:
    return Material(
        replace(info, temperature_C=celsius), law(celsius), partial(_modelled, law, info)
    )


def _warmed(info: Info, curve: Curve, rate: Curve, celsius: float) -> Material:
    table_C = 0.0 if info.temperature_C is None else info.temperature_C
    return Material(
        replace(info, temperature_C=celsius),
        Sum(curve, rate, celsius - table_C),
        partial(_warmed, info, curve, rate),
    )


def _columns(rows: list[tuple[int, str]], where: str) -> dict[str, Floats]:
    if not rows:
        return {}
    names = rows[0][1].split(",")
    if names[0] != "wavelength_nm":
        raise TableError(where, "the first column must be wavelength_nm", rows[0][0])
    values = np.array([_numbers(line, len(names), where, number) for number, line in rows[1:]])
    values = values.reshape(-1, len(names))
    columns = {name: np.ascontiguousarray(values[:, j]) for j, name in enumerate(names)}
    check_rows(columns, where, [number for number, _ in rows[1:]])
    return columns


def _numbers(line: str, count: int, where: str, number: int) -> list[float]:
    cells = line.split(",")
    if len(cells) != count:
        raise TableError(where, f"{len(cells)} cells instead of {count}", number)
    try:
        return [float(cell) for cell in cells]
    except ValueError:
        raise TableError(where, f"{line!r} is not a row of numbers", number) from None


def check_rows(columns: dict[str, Floats], where: str, lines: Sequence[int]) -> None:
    """Refuse too few rows, numbers that are not finite, wrong signs and wrong order.

    Row i of the columns stands in line ``lines[i]``.
    """

    def refuse(bad: NDArray[np.bool_], what: str) -> None:
        if bad.any():
            raise TableError(where, what, lines[int(np.argmax(bad))])

    for name, values in columns.items():
        refuse(~np.isfinite(values), f"{name} is not a finite number")
    wavelength = columns["wavelength_nm"]
    refuse(wavelength <= 0.0, "the wavelength must be positive")
    step = np.diff(wavelength, prepend=0.0)
    refuse(step == 0.0, "the wavelength of the row before is repeated; keep one of the two")
    refuse(step < 0.0, "the wavelength is below that of the row before; sort the table, rising")
    if "n" in columns:
        refuse(columns["n"] <= 0.0, "n must be positive")
    if "k" in columns:
        refuse(columns["k"] < 0.0, "k is below zero, which would be gain; a film has k >= 0")
    if len(wavelength) < 2:
        raise TableError(where, "fewer than two rows; a table needs two wavelengths or more")
