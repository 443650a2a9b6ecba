"""Loading by name, and how far the entries of one compound are from each other."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import cache

import numpy as np

from materials.alloys import alloy, composition_of
from materials.builders import mixture
from materials.curves import Floats
from materials.errors import MaterialError, UnknownMaterial
from materials.index import DECLINED, FOLDER, entries, entry, nearest
from materials.info import Info
from materials.material import Material
from materials.tables import read_entry, split_head


@cache
def load(name: str) -> Material:
    """Material by name; only its own table is read, once.

    Parameters
    ----------
    name : a name of the list, or an alloy with its composition such as 'AlGaAs:0.30'.

    Raises
    ------
    UnknownMaterial
        for a name that is not in the list; carries the nearest one.
    CompositionError
        for an alloy without composition or outside its model.
    """
    stem = name.partition(":")[0]
    listed = entry(f"{stem}:x")
    if listed is not None:
        return _alloy(name, stem, listed)
    if ":" in name or entry(name) is None:
        raise UnknownMaterial(name, nearest(name), DECLINED.get(stem, ""))
    return read_entry(FOLDER / f"{name}.csv")


def _alloy(name: str, stem: str, listed: Info) -> Material:
    composition = composition_of(name, listed)
    path = FOLDER / f"{stem}.csv"
    head, _ = split_head(path.read_text(encoding="utf-8"), path.name)
    if "mixture" in head:
        first, second = (load(part) for part in head["mixture"].split())
        return mixture(name, first, second, fraction=composition)
    return alloy(replace(listed, name=name), head["model"], composition)


@dataclass(frozen=True)
class Difference:
    """How far another entry of the same compound is over the common range.

    Attributes
    ----------
    name : the other entry.
    range_nm : common range [nm].
    mean_n, worst_n : mean of n(other) - n(this), and the one of largest magnitude.
    worst_nm : wavelength [nm] of ``worst_n``.
    worst_k : largest difference of k by magnitude, with its sign; None where one k is unknown.
    """

    name: str
    range_nm: tuple[float, float]
    mean_n: float
    worst_n: float
    worst_nm: float
    worst_k: float | None


def compare(name: str) -> tuple[Difference, ...]:
    """Differences of the other entries of the same compound from this one.

    Taken at 400 wavelengths evenly spaced in the logarithm over the common range; entries
    without a common range are left out.
    """
    here = load(name)
    others = (
        info.name
        for info in entries()
        if info.compound == here.info.compound and info.name != name and info.kind != "alloy"
    )
    found = (_difference(here, load(other)) for other in others)
    return tuple(difference for difference in found if difference is not None)


def _difference(here: Material, other: Material) -> Difference | None:
    low = max(here.range_nm[0], other.range_nm[0])
    high = min(here.range_nm[1], other.range_nm[1])
    if not low < high:
        return None
    wavelength = _spread(low, high)
    gap = other.nk(wavelength) - here.nk(wavelength)
    at = int(np.argmax(np.abs(gap.real)))
    k_at = int(np.argmax(np.abs(gap.imag)))
    return Difference(
        name=other.name,
        range_nm=(low, high),
        mean_n=float(gap.real.mean()),
        worst_n=float(gap.real[at]),
        worst_nm=float(wavelength[at]),
        worst_k=float(gap.imag[k_at]) if here.k_known and other.k_known else None,
    )


def _spread(low: float, high: float) -> Floats:
    wavelength = np.geomspace(low, high, 400)
    wavelength[0], wavelength[-1] = low, high
    return wavelength


def self_check() -> tuple[str, ...]:
    """Load every entry and evaluate it over its range; returns the names.

    Raises
    ------
    MaterialError
        for an index that is not finite, n <= 0 or k < 0.
    """
    return tuple(_checked(info) for info in entries())


def _checked(info: Info) -> str:
    name = info.name
    if info.composition is not None:
        name = name.replace(":x", f":{np.mean(info.composition):.2f}")
    material = load(name)
    index = material.nk(_spread(*material.range_nm))
    if not (np.isfinite(index).all() and (index.real > 0.0).all() and (index.imag >= 0.0).all()):
        raise MaterialError(f"{name}: the index is not finite, or n <= 0, or k < 0 in its range")
    return name
