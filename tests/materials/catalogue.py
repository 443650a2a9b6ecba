"""What a catalogue says of an entry beyond the numbers, which come from the open data set."""

from __future__ import annotations

from dataclasses import dataclass, field

ROOM = "room"
UNSTATED = "not stated"


@dataclass(frozen=True)
class Spec:
    """One entry of the library: where its numbers are, and its provenance.

    ``key`` names shelf, book and page of the data set; a page may be given by its range in um.
    ``source``, ``doi`` and ``year`` come from the data set unless they stand here.
    ``thermal`` holds two (key, temperature) pairs of the same paper for dn/dT.
    """

    name: str
    key: tuple | None
    use: str
    compound: str
    sample: str
    process: str = UNSTATED
    temperature: str | float = UNSTATED
    k_status: str = "measured"
    accuracy: str = UNSTATED
    notes: str = ""
    limits_nm: tuple[float, float] = (220.0, 13000.0)
    formula: bool = False
    fixed_formula: tuple[str, str] | None = None
    k_used: bool = True
    model: str = ""
    source: str = ""
    doi: str = ""
    year: int | str = ""
    thermal: tuple = ()
    extra: dict[str, str] = field(default_factory=dict)
