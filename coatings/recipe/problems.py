"""From what the schema refuses to one clear line a problem."""

from __future__ import annotations

import difflib
from collections.abc import Iterable, Iterator, Mapping
from typing import Any

from pydantic import BaseModel, ValidationError

from coatings.recipe.document import RecipeTable
from coatings.recipe.expectation import choices, expectation, extra
from coatings.recipe.lookup import Place, find, section_of
from coatings.recipe.paths import Found, KeyPath, shown
from coatings.recipe.section import is_number


def schema_problems(error: ValidationError, raw: Mapping[str, Any]) -> list[Found]:
    """One problem for every key that the schema refuses.

    Parameters
    ----------
    error : what pydantic found
    raw : the recipe's tables, to show the value at fault

    Returns
    -------
    list of (key path, what was found and what was expected), each key path once
    """
    found: dict[KeyPath, str] = {}
    for detail in error.errors(include_url=False, include_context=False):
        place = find(detail["loc"])
        found.setdefault(place.path, _say(detail["type"], place, raw))
    return list(found.items())


def nearest(word: str, names: Iterable[str]) -> str | None:
    """The most similar of some names, whatever the case; None when none is similar."""
    by_folded = {name.casefold(): name for name in names}
    close = difflib.get_close_matches(
        word.casefold()[:80], by_folded, n=1, cutoff=0.6 if len(word) > 2 else 0.5
    )
    return by_folded[close[0]] if close else None


def value_at(raw: Any, path: KeyPath) -> Any:
    """The value at a key path; None when there is none."""
    value = raw
    for part in path.parts:
        if isinstance(part, str) and isinstance(value, dict):
            value = value.get(part)
        elif isinstance(part, int) and isinstance(value, tuple) and part < len(value):
            value = value[part]
        else:
            return None
    return value


def _say(kind: str, place: Place, raw: Mapping[str, Any]) -> str:
    if kind == "extra_forbidden":
        return _unknown_key(place)
    field = place.field
    if kind == "missing":
        return "is missing" if field is None else f"is missing; expected {expectation(field)}"
    value = value_at(raw, place.path)
    if field is None:
        return f"is {shown(value)}; expected a table"
    if kind in ("model_type", "model_attributes_type", "dict_type"):
        return f"is {shown(value)}; expected {_table(place)}"
    return f"is {shown(value)}; expected {_expected(place, value)}{_hint(place, value)}"


def _expected(place: Place, value: object) -> str:
    return "" if place.field is None else expectation(place.field, value, is_item=place.is_item)


def _table(place: Place) -> str:
    field = place.field
    if field is None or section_of(field.annotation) is None:
        return "a table" if field is None else expectation(field)
    said = extra(field, "expects")
    return said if said and not place.is_item else "a table"


def _unknown_key(place: Place) -> str:
    key = str(place.path.parts[-1])
    names = list(place.section.model_fields)
    guess = nearest(key, names)
    if guess is not None:
        return f"unknown key; did you mean {guess}?"
    homes = list(_homes(key))
    if homes:
        return f"unknown key here; it belongs to {' or '.join(homes)}"
    return f"unknown key; expected one of {', '.join(names)}"


def _homes(key: str) -> Iterator[str]:
    """Top-level sections that have this key."""
    for name, field in RecipeTable.model_fields.items():
        section: type[BaseModel] | None = section_of(field.annotation)
        if section is not None and key in section.model_fields:
            yield f"[{name}]"


def _hint(place: Place, value: object) -> str:
    field = place.field
    if field is None:
        return ""
    if extra(field, "unit") == "fraction":
        return _percent_hint(value)
    options = choices(field)
    guess = nearest(value, options) if isinstance(value, str) and options else None
    return f"; did you mean {shown(guess)}?" if guess else ""


def _percent_hint(value: object) -> str:
    """3 where a fraction is expected was most likely meant in percent."""
    pair = value if isinstance(value, tuple) else (value,)
    numbers = [float(item) for item in pair if is_number(item) and 0 <= item <= 100]
    if len(numbers) != len(pair) or not pair or max(numbers) < 1.0:
        return ""
    fractions = ", ".join(f"{item / 100:.6g}" for item in numbers)
    percents = " to ".join(f"{item:.6g}" for item in numbers)
    written = f"[{fractions}]" if isinstance(value, tuple) else fractions
    return f"; did you mean {written} ({percents} %)?"
