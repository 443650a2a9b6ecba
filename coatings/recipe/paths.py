"""Key paths: where in a recipe something stands, written the way its reader would look for it."""

from __future__ import annotations

import json
import re
from dataclasses import dataclass
from typing import TypeAlias

_BARE_KEY = re.compile(r"[A-Za-z0-9_-]+")
_LONGEST_SHOWN = 60


@dataclass(frozen=True)
class KeyPath:
    """Keys from the top of the recipe; an int is a place in a list, counted from 0.

    Written ``front.windows#2.at_most`` for the second window: list places are shown from 1.
    """

    parts: tuple[str | int, ...] = ()

    def __truediv__(self, part: str | int) -> KeyPath:
        return KeyPath((*self.parts, part))

    def __str__(self) -> str:
        written = ""
        for part in self.parts:
            if isinstance(part, int):
                written += f"#{part + 1}"
            else:
                key = part if _BARE_KEY.fullmatch(part) else shown(part)
                written += f".{key}" if written else key
        return written

    def contains(self, other: KeyPath) -> bool:
        """Whether ``other`` is this place or one inside it."""
        return other.parts[: len(self.parts)] == self.parts


Found: TypeAlias = tuple[KeyPath, str]
"""A problem before its file is known: where in the recipe, and what with its mend."""


def shown(value: object) -> str:
    """A TOML value on one short line, control characters escaped."""
    if isinstance(value, str):
        return _cut(json.dumps(value, ensure_ascii=not value.isprintable()))
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, int | float):
        return _number(value)
    if isinstance(value, tuple | list):
        return _cut("[" + ", ".join(shown(item) for item in value[:8]) + "]")
    return "a table" if isinstance(value, dict) else _cut(str(value))


def _number(value: float) -> str:
    # Python refuses to write a whole number of many thousand digits.
    if isinstance(value, int) and value.bit_length() > 64:
        return f"a whole number of {value.bit_length()} bits"
    return repr(value)


def _cut(text: str) -> str:
    return text if len(text) <= _LONGEST_SHOWN else text[: _LONGEST_SHOWN - 3] + "..."
