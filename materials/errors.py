"""The error tree of the materials library.

    MaterialError                 root; also a ValueError
    ├── UnknownMaterial           no entry of that name
    ├── OutOfRange                a wavelength that the data do not reach
    ├── CompositionError          an alloy outside the compositions of its model
    ├── TemperatureError          a temperature for which no paper gives the index
    └── TableError                a table that can't be used

Each message is one line: what, where, how to mend.
"""

from __future__ import annotations

from collections.abc import Sequence


class MaterialError(ValueError):
    """Root of every error that the materials library raises on purpose."""


class UnknownMaterial(MaterialError):
    """No entry of that name; ``nearest`` is the closest one, if any is close."""

    def __init__(self, name: str, nearest: str | None, reason: str = "") -> None:
        self.name = name
        self.nearest = nearest
        if reason:
            mend = reason
        elif nearest is not None:
            mend = f"did you mean {nearest!r}?"
        else:
            mend = "see the list of the library, or give the recipe a table of its own"
        super().__init__(f"no material {name!r}: {mend}")


class OutOfRange(MaterialError):
    """A wavelength beyond the data; ``alternatives`` are entries that do reach it."""

    def __init__(
        self,
        name: str,
        wavelength_nm: float,
        range_nm: tuple[float, float],
        alternatives: Sequence[str] = (),
        reason: str = "",
    ) -> None:
        self.name = name
        self.wavelength_nm = wavelength_nm
        self.range_nm = range_nm
        self.alternatives = tuple(alternatives)
        mend = (
            f"{', '.join(self.alternatives)} of the same compound "
            f"{'reaches' if len(self.alternatives) == 1 else 'reach'} it"
            if self.alternatives
            else "no entry of the same compound reaches it"
        )
        limit = f"{range_nm[0]:g} to {range_nm[1]:g} nm"
        because = f" ({reason})" if reason else ""
        super().__init__(
            f"{name} is known over {limit}{because}, not at {wavelength_nm:g} nm; {mend}"
        )


class CompositionError(MaterialError):
    """An alloy without composition, or outside the compositions of its model."""


class TemperatureError(MaterialError):
    """A temperature for which no source of the library gives the index."""


class TableError(MaterialError):
    """A table that can't be used: ``where`` it is, and the ``line`` (from 1) at fault, if any."""

    def __init__(self, where: str, what: str, line: int | None = None) -> None:
        self.where = where
        self.line = line
        place = where if line is None else f"{where}, line {line}"
        super().__init__(f"{place}: {what}")
