"""What is known about an entry besides its numbers: sample, source, range."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from materials.errors import TableError

USES = ("semiconductor", "film", "metal", "witness", "ambient", "own")
K_STATUSES = ("measured", "model", "below detection", "unknown")
KINDS = ("table", "formula", "alloy", "constant", "mixture")
NOT_STATED = "not stated"
ROOM = "room"
REQUIRED = (
    "name", "use", "kind", "compound", "common", "sample", "process", "temperature_C",
    "range_nm", "k_status", "accuracy", "source", "doi", "year",
)  # fmt: skip


@dataclass(frozen=True)
class Info:
    """Provenance of one entry.

    Attributes
    ----------
    name : name in recipes.
    use : "semiconductor", "film", "metal", "witness", "ambient", or "own" for a recipe's own data.
    kind : "table", "formula", "alloy", "constant" or "mixture".
    compound : chemical compound; entries of one compound are compared with each other.
    common : names by which people ask for the compound, parted by commas.
    sample : bulk or film, orientation or thickness, substrate.
    process : how it was grown or deposited, or "not stated".
    temperature_C : temperature of the measurement [deg C]; None where no number is stated.
    range_nm : first and last wavelength [nm].
    k_status : "measured", "model" (k of a dispersion model fitted to measurements), "below
        detection" or "unknown"; the last two count as k = 0.
    accuracy : as the paper states it, or None.
    source : full citation.
    doi : DOI, or None.
    year : year of publication, or None for a recipe's own data.
    notes : what else a user must know.
    composition : lowest and highest composition of an alloy, else None.
    composition_meaning : what the number after the colon means, else "".
    thermal_C : temperatures [deg C] over which the index can be asked for, else None.
    room_temperature : True where the paper says room temperature without a number.
    """

    name: str
    use: str
    kind: str
    compound: str
    common: str
    sample: str
    process: str
    temperature_C: float | None
    range_nm: tuple[float, float]
    k_status: str
    accuracy: str | None
    source: str
    doi: str | None
    year: int | None
    notes: str = ""
    composition: tuple[float, float] | None = None
    composition_meaning: str = ""
    thermal_C: tuple[float, float] | None = None
    room_temperature: bool = False

    @property
    def temperature(self) -> str:
        """Temperature of the measurement in words."""
        if self.temperature_C is not None:
            return f"{self.temperature_C:g} deg C"
        return "room temperature" if self.room_temperature else NOT_STATED

    @property
    def k_known(self) -> bool:
        """True where k was measured or fitted; False where it is taken as zero."""
        return self.k_status in ("measured", "model")


def info_from_head(head: Mapping[str, str], where: str) -> Info:
    """Info from the ``# key: value`` lines of a table; refuses one that is incomplete."""
    for key in REQUIRED:
        if not head.get(key, "").strip():
            raise TableError(where, f"the head lacks {key!r}; add a line '# {key}: ...'")
    _check_choice(head, "use", USES, where)
    _check_choice(head, "kind", KINDS, where)
    _check_choice(head, "k_status", K_STATUSES, where)
    return Info(
        name=head["name"],
        use=head["use"],
        kind=head["kind"],
        compound=head["compound"],
        common=head["common"],
        sample=head["sample"],
        process=head["process"],
        temperature_C=_number_or_none(head, "temperature_C", where),
        range_nm=_pair(head, "range_nm", where),
        k_status=head["k_status"],
        accuracy=_text_or_none(head["accuracy"]),
        source=head["source"],
        doi=_text_or_none(head["doi"]),
        year=None if head["year"] == NOT_STATED else int(_number(head["year"], "year", where)),
        notes=head.get("notes", ""),
        composition=_pair(head, "composition", where) if "composition" in head else None,
        composition_meaning=head.get("composition_meaning", ""),
        thermal_C=_pair(head, "thermal_C", where) if "thermal_C" in head else None,
        room_temperature=head["temperature_C"] == ROOM,
    )


def _check_choice(head: Mapping[str, str], key: str, choices: tuple[str, ...], where: str) -> None:
    if head[key] not in choices:
        raise TableError(where, f"{key} is {head[key]!r}; it must be one of {', '.join(choices)}")


def _text_or_none(text: str) -> str | None:
    return None if text == NOT_STATED else text


def _number(text: str, key: str, where: str) -> float:
    try:
        return float(text)
    except ValueError:
        raise TableError(where, f"{key} is {text!r}; it must be a number") from None


def _number_or_none(head: Mapping[str, str], key: str, where: str) -> float | None:
    text = head[key]
    return None if text in (NOT_STATED, ROOM) else _number(text, key, where)


def _pair(head: Mapping[str, str], key: str, where: str) -> tuple[float, float]:
    parts = head[key].split()
    if len(parts) != 2:
        raise TableError(where, f"{key} is {head[key]!r}; it must be two numbers, low and high")
    low, high = (_number(part, key, where) for part in parts)
    if not low < high:
        raise TableError(where, f"{key} is {head[key]!r}; the first must be below the second")
    return low, high
