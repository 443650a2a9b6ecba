"""A recipe's own table: text as instruments and spreadsheets write it, read strictly.

Header first: a wavelength column with its unit (nm or um), then n, then optionally k. Cells are
parted by commas, semicolons or tabs; with semicolons or tabs the decimal sign may be a comma.
Nothing is sorted, merged or filled in: what is wrong is refused with its line.
"""

from __future__ import annotations

import re
from dataclasses import replace

import numpy as np

from materials.builders import own_info
from materials.errors import TableError
from materials.interpolation import monotone
from materials.material import Material
from materials.tables import check_rows

LARGEST_BYTES = 10_000_000
_TO_NM = {"nm": 1.0, "um": 1e3, "µm": 1e3, "μm": 1e3, "micron": 1e3, "microns": 1e3}
_WAVELENGTH = re.compile(r"^(?:wavelength|lambda|λ|wl)[\s_]*[\(\[]?\s*([a-zµμ]*)\s*[\)\]]?$")
_HEADER = "write the header 'wavelength_nm,n,k' (or wavelength_um; k may be left out)"


def from_table_bytes(data: bytes, *, name: str, where: str) -> Material:
    """Material from the bytes of a file: UTF-8, or UTF-16 with its mark; 10 MB at most."""
    if len(data) > LARGEST_BYTES:
        raise TableError(where, f"{len(data) / 1e6:.1f} MB; a table of more than 10 MB is refused")
    encoding = "utf-16" if data[:2] in (b"\xff\xfe", b"\xfe\xff") else "utf-8-sig"
    try:
        text = data.decode(encoding)
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        raise TableError(where, "is not UTF-8 text; save the table as UTF-8", line) from None
    if "\0" in text:
        raise TableError(where, "is a binary file; save the table as text (CSV)")
    return from_table_text(text, name=name, where=where)


def from_table_text(text: str, *, name: str, where: str) -> Material:
    """Material from the text of a table.

    Parameters
    ----------
    text : header and rows; lines that are empty or begin with '#' do not count.
    name : name of the material in the recipe.
    where : what to call the table in errors, usually the file's name.

    Raises
    ------
    TableError
        with the line, for anything that is not a header or a row of numbers, for wavelengths
        that repeat or do not rise, n <= 0, k < 0, numbers that are not finite, cells that are
        missing, and fewer than two rows.
    """
    if len(text) > LARGEST_BYTES:
        raise TableError(where, "a table of more than 10 MB is refused")
    lines = [
        (number, line)
        for number, line in enumerate(text.removeprefix("\ufeff").splitlines(), start=1)
        if line.strip() and not line.lstrip().startswith("#")
    ]
    if not lines:
        raise TableError(where, f"is empty; {_HEADER}")
    number, header = lines[0]
    separator = next((s for s in ("\t", ";", ",") if s in header), None)
    if separator is None:
        raise TableError(where, f"{header.strip()!r} is not a header; {_HEADER}", number)
    order, to_nm = _header(header, separator, where, number)
    return _material(lines[1:], order, to_nm, separator, name=name, where=where)


def _header(header: str, separator: str, where: str, line: int) -> tuple[tuple[str, ...], float]:
    order: list[str] = []
    to_nm = 0.0
    for cell in header.split(separator):
        title = cell.strip().strip('"').casefold()
        matched = _WAVELENGTH.match(title)
        if matched:
            if matched[1] not in _TO_NM:
                raise TableError(where, f"{title!r} lacks its unit (nm or um); {_HEADER}", line)
            to_nm = _TO_NM[matched[1]]
            title = "wavelength_nm"
        order.append(title)
    if sorted(order) not in (["n", "wavelength_nm"], ["k", "n", "wavelength_nm"]):
        raise TableError(where, f"{header.strip()!r} is not a header of these; {_HEADER}", line)
    return tuple(order), to_nm


def _material(
    lines: list[tuple[int, str]],
    order: tuple[str, ...],
    to_nm: float,
    separator: str,
    *,
    name: str,
    where: str,
) -> Material:
    values = np.array(
        [_row(line, len(order), separator, where, number) for number, line in lines]
    ).reshape(-1, len(order))
    columns = {title: values[:, j] for j, title in enumerate(order)}
    columns["wavelength_nm"] = columns["wavelength_nm"] * to_nm
    check_rows(columns, where, [number for number, _ in lines])
    wavelength = columns["wavelength_nm"]
    index = columns["n"].astype(np.complex128)
    if "k" in columns:
        index.imag = columns["k"]
    info = replace(
        own_info(name, "table", f"table {where}, {len(lines)} rows", "unknown"),
        range_nm=(float(wavelength[0]), float(wavelength[-1])),
        k_status="measured" if "k" in columns else "unknown",
        source=f"the recipe's own table {where}",
    )
    return Material(info, monotone(wavelength, index))


def _row(line: str, count: int, separator: str, where: str, number: int) -> list[float]:
    cells = [cell.strip().strip('"') for cell in line.split(separator)]
    if len(cells) != count:
        hint = "; decimal commas need semicolons between the cells" if separator == "," else ""
        raise TableError(where, f"{len(cells)} cells where the header has {count}{hint}", number)
    return [_number(cell, separator, where, number) for cell in cells]


def _number(cell: str, separator: str, where: str, line: int) -> float:
    if not cell:
        raise TableError(where, "a cell is empty; every row needs all its numbers", line)
    text = cell if separator == "," else cell.replace(",", ".")
    try:
        return float(text)
    except ValueError:
        raise TableError(where, f"{cell!r} is not a number", line) from None
