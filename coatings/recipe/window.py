"""[[front.windows]], [[rear.windows]]: what a facet must do, and over which wavelengths."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from typing import Annotated, Literal

from pydantic import Discriminator, Tag

from coatings.recipe.chip import Chip
from coatings.recipe.paths import Found, KeyPath
from coatings.recipe.section import (
    BAND,
    NAME_TAG,
    NUMBER_TAG,
    Band,
    Fraction,
    Section,
    entry,
    is_number,
    number,
)

TARGETS = ("reflectance", "between", "at_most", "at_least")
_ONE_TARGET = "one of reflectance (with tolerance), between, at_most, at_least"


def _number_or_trade(value: object) -> str | None:
    if is_number(value):
        return NUMBER_TAG
    return NAME_TAG if isinstance(value, str) else None


ReflectanceTarget = Annotated[
    Annotated[Fraction, Tag(NUMBER_TAG)] | Annotated[Literal["trade"], Tag(NAME_TAG)],
    Discriminator(_number_or_trade),
]


class WindowTable(Section):
    """One window as written."""

    reflectance: ReflectanceTarget | None = entry(
        'Target reflectance, with tolerance; "trade" takes the best value for drive_A',
        default=None,
        unit="fraction",
        expects='a fraction from 0 to 1, or "trade"',
    )
    tolerance: float | None = number(
        "Half width of the window around reflectance",
        "fraction",
        default=None,
        otherwise='needed with a number; with "trade" the window is R_low to R_high of the trade',
        gt=0.0,
        lt=1.0,
    )
    between: tuple[Fraction, Fraction] | None = entry(
        "Lowest and highest reflectance",
        default=None,
        unit="fraction",
        expects="two fractions [low, high] from 0 to 1",
    )
    at_most: float | None = number("Highest reflectance", "fraction", default=None, ge=0.0, le=1.0)
    at_least: float | None = number("Lowest reflectance", "fraction", default=None, ge=0.0, le=1.0)
    absorption_at_most: float | None = number(
        "Highest absorptance of the coating; beside or instead of a reflectance",
        "fraction",
        default=None,
        otherwise="no limit",
        ge=0.0,
        le=1.0,
    )
    band_nm: Band | None = entry(
        "Wavelengths of the window",
        default=None,
        unit="nm",
        expects=BAND,
        otherwise="chip.band_nm",
    )
    polarization: Literal["TE", "TM", "both"] | None = entry(
        "Polarization in which the window is judged", default=None, otherwise="the chip's"
    )
    of: Literal["mode", "coating"] = entry(
        '"mode": what returns into the guided mode; "coating": the film alone at the tilt angle',
        default="mode",
    )
    index: float | None = number(
        "Modal index of a sister chip that shares the run",
        "1",
        default=None,
        noun="an index",
        otherwise="the chip's",
        ge=1.0,
        le=10.0,
    )


@dataclass(frozen=True)
class Window:
    """A window with its defaults filled in.

    ``low`` and ``high`` bound the reflectance; None where that side is open (a bound of 0 from
    below or of 1 from above never binds and is open too). ``tolerance`` is kept for a trade window.
    """

    band_nm: tuple[float, float]
    low: float | None
    high: float | None
    absorption_at_most: float | None
    polarization: Literal["TE", "TM", "both"]
    of: Literal["mode", "coating"]
    index: float | None
    is_trade: bool
    tolerance: float | None

    def label(self) -> str:
        """Short text for people: ``0.04-0.06 over 955-997 nm``."""
        parts = [self._reflectance_label()]
        if self.absorption_at_most is not None:
            parts.append(f"absorption at most {self.absorption_at_most:g}")
        text = ", ".join(part for part in parts if part)
        low, high = self.band_nm
        band = f"{low:g} nm" if low == high else f"{low:g}-{high:g} nm"
        sister = "" if self.index is None else f", index {self.index:g}"
        return f"{text} over {band}{sister}"

    def _reflectance_label(self) -> str:
        if self.is_trade:
            return "best for the drive"
        if self.low is not None and self.high is not None:
            return f"{self.low:.6g}-{self.high:.6g}"
        if self.high is not None:
            return f"at most {self.high:.6g}"
        return "" if self.low is None else f"at least {self.low:.6g}"


def bounds(table: WindowTable) -> tuple[float | None, float | None]:
    """Lowest and highest reflectance that the window asks for; None where it asks for none."""
    low, high = table.at_least, table.at_most
    if table.between is not None:
        low, high = table.between
    if isinstance(table.reflectance, float) and table.tolerance is not None:
        low, high = table.reflectance - table.tolerance, table.reflectance + table.tolerance
    return (
        None if low is None or low <= 0.0 else low,
        None if high is None or high >= 1.0 else high,
    )


def resolve_window(table: WindowTable, chip: Chip) -> Window:
    """The window with the chip's band and polarization where it names none."""
    low, high = bounds(table)
    return Window(
        band_nm=table.band_nm or chip.band_nm,
        low=low,
        high=high,
        absorption_at_most=table.absorption_at_most,
        polarization=table.polarization or chip.polarization,
        of=table.of,
        index=table.index,
        is_trade=table.reflectance == "trade",
        tolerance=table.tolerance,
    )


def window_conflicts(table: WindowTable, at: KeyPath) -> Iterator[Found]:
    """A window has one reflectance target, or an absorption limit, or both."""
    given = [key for key in TARGETS if getattr(table, key) is not None]
    if len(given) > 1:
        yield at, f"has {' and '.join(given)}; expected {_ONE_TARGET}"
        return
    if not given and table.absorption_at_most is None:
        yield at, f"has no target; expected {_ONE_TARGET}, or absorption_at_most"
        return
    yield from _band_conflicts(table, at)
    yield from _tolerance_conflicts(table, at)
    yield from _bound_conflicts(table, at, given)


def _band_conflicts(table: WindowTable, at: KeyPath) -> Iterator[Found]:
    if table.band_nm is not None and table.band_nm[0] > table.band_nm[1]:
        low, high = table.band_nm
        yield at / "band_nm", f"is [{low:g}, {high:g}], reversed; expected [low, high], in nm"


def _tolerance_conflicts(table: WindowTable, at: KeyPath) -> Iterator[Found]:
    if table.reflectance is None and table.tolerance is not None:
        yield at / "tolerance", "stands without reflectance; leave it out or give reflectance"
    if isinstance(table.reflectance, float) and table.tolerance is None:
        yield (
            at / "tolerance",
            "is missing; reflectance needs it (or use between, at_most, at_least)",
        )


def _bound_conflicts(table: WindowTable, at: KeyPath, given: list[str]) -> Iterator[Found]:
    if table.between is not None and table.between[0] >= table.between[1]:
        low, high = table.between
        yield at / "between", f"is [{low:g}, {high:g}]; expected [low, high] with low below high"
        return
    is_pending = table.reflectance == "trade" or (
        table.reflectance is not None and table.tolerance is None
    )
    if given and not is_pending and bounds(table) == (None, None):
        yield at / given[0], "lets every reflectance pass; tighten it or leave the window out"
