"""The list of entries, read from one file; no table is opened and numpy is not needed."""

from __future__ import annotations

import difflib
import json
from functools import cache
from pathlib import Path

from materials.info import Info, info_from_head

FOLDER = Path(__file__).parent / "tables"
INDEX = FOLDER / "index.json"

#: Asked for by the trade, and not here: why.
DECLINED = {
    "InGaAs-on-GaAs": (
        "no measured index of strained InGaAs below its gap is published with composition and "
        "range; give the recipe index = ... for the well (its few nm hardly move the mode)"
    ),
    "AlGaAsSb": (
        "no index table with composition is in the open data; AlGaSb-0.50 and GaSb are, "
        "or give the recipe index = ... from the grower"
    ),
    "GaInAsSb": (
        "no index table with composition is in the open data; GaSb is, "
        "or give the recipe index = ... from the grower"
    ),
    "ZnSe-film": (
        "no index table of a ZnSe film is in the open data; ZnSe (bulk) is, and a recipe can "
        "scale it: scale = ..., of = 'ZnSe'"
    ),
    "La2O3": "no index table is in the open data; Y2O3, Sc2O3, LaF3 and HfO2 are",
    "YF3": "no index table is in the open data; YbF3, LaF3 and GdF3 are",
}


@cache
def _all() -> dict[str, Info]:
    heads = json.loads(INDEX.read_text(encoding="utf-8"))
    return {head["name"]: info_from_head(head, INDEX.name) for head in heads}


def names() -> tuple[str, ...]:
    """Names of all entries; an alloy stands as 'AlGaAs:x'."""
    return tuple(_all())


def entries() -> tuple[Info, ...]:
    """Provenance of all entries, in the order of the list; opens one file only."""
    return tuple(_all().values())


def entry(name: str) -> Info | None:
    """Provenance of one entry as it stands in the list, or None."""
    return _all().get(name)


def search(word: str) -> tuple[Info, ...]:
    """Entries whose name, compound, use, sample, process, source or notes contain the word."""
    wanted = word.casefold()
    return tuple(info for info in entries() if wanted in _searchable(info))


def _searchable(info: Info) -> str:
    parts = (info.name, info.compound, info.common, info.use, info.kind, info.sample)
    return " ".join((*parts, info.process, info.source, info.notes)).casefold()


def nearest(name: str) -> str | None:
    """The name closest to a mistyped one, or None when nothing is close."""
    stem, colon, number = name.partition(":")
    known = {
        info.name.removesuffix(":x").casefold(): info.name
        for info in entries()
        if not colon or info.composition is not None
    }
    close = difflib.get_close_matches(stem.casefold(), known, n=1, cutoff=0.6)
    if not close:
        return None
    found = known[close[0]]
    return found.removesuffix("x") + number if colon and number else found


def reaching(compound: str, wavelength_nm: float, *, but: str) -> tuple[str, ...]:
    """Entries of a compound whose range holds a wavelength, without the one named and alloys."""
    return tuple(
        info.name
        for info in entries()
        if info.compound == compound
        and info.composition is None
        and info.name != but
        and info.range_nm[0] <= wavelength_nm <= info.range_nm[1]
    )
