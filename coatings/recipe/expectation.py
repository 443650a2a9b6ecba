"""What a key of the recipe expects, said in words made from its field."""

from __future__ import annotations

from typing import Any, Literal, get_args, get_origin

from pydantic.fields import FieldInfo

from coatings.recipe.lookup import plain, section_of
from coatings.recipe.paths import shown
from coatings.recipe.section import is_number

_NOUNS = {
    "nm": "a length",
    "um": "a length",
    "mm": "a length",
    "fraction": "a fraction",
    "percent": "a percentage",
    "A": "a current",
    "W": "a power",
    "V": "a voltage",
    "K": "a temperature",
    "C": "a temperature",
    "deg": "an angle",
}
_UNITS = {"C": "degrees Celsius", "deg": "degrees", "percent": "percent"}
_UNITLESS = frozenset({"", "1", "fraction"})
_GENEROUS = 1000.0


def extra(field: FieldInfo, key: str) -> str:
    """What the schema says beside the field: unit, noun, expects or otherwise; else empty."""
    said = field.json_schema_extra
    value = said.get(key, "") if isinstance(said, dict) else ""
    return value if isinstance(value, str) else ""


def choices(field: FieldInfo) -> tuple[str, ...]:
    """The values that a key with a fixed choice may take; empty for any other key."""
    kind = plain(field.annotation)
    return tuple(map(str, get_args(kind))) if get_origin(kind) is Literal else ()


def expectation(field: FieldInfo, value: object = None, *, is_item: bool = False) -> str:
    """Phrase such as ``a length above 0, in um``, made from type, unit and limits.

    Parameters
    ----------
    field : the key's field
    value : what was found; a generous upper limit is only spoken of when it is broken
    is_item : speak of one value of the key's table

    Returns
    -------
    str
    """
    said = (extra(field, "item") if is_item else "") or extra(field, "expects")
    if said:
        return said
    kind = plain(field.annotation)
    if choices(field):
        offered = [shown(choice) for choice in choices(field)]
        return "one of " + ", ".join(offered) if len(offered) > 1 else offered[0]
    if kind is bool:
        return "true or false"
    if kind is int or kind is float:
        return _number(field, value, is_whole=kind is int)
    if kind is str:
        return _text(field)
    return "a table" if section_of(kind) is kind else "a list"


def limits(field: FieldInfo) -> dict[str, Any]:
    """Limits of a field by name: gt, ge, lt, le, min_length, max_length."""
    found: dict[str, Any] = {}
    for rule in field.metadata:
        for name in ("gt", "ge", "lt", "le", "min_length", "max_length"):
            value = getattr(rule, name, None)
            if value is not None:
                found[name] = value
    return found


def limits_in_words(found: dict[str, Any]) -> str:
    """``above 0``, ``from 0 to 1``, ``of 0 or more``; empty without limits."""
    low, high = _low_in_words(found), _high_in_words(found)
    if low and high:
        return f"{low} {high}"
    if "ge" in found:
        return f"of {found['ge']:g} or more"
    return low or (f"up to {found['le']:g}" if "le" in found else high)


def _low_in_words(found: dict[str, Any]) -> str:
    if "gt" in found:
        return f"above {found['gt']:g}"
    return f"from {found['ge']:g}" if "ge" in found else ""


def _high_in_words(found: dict[str, Any]) -> str:
    joint = "and " if "gt" in found else ""
    if "lt" in found:
        return f"{joint}below {found['lt']:g}" if joint else f"to below {found['lt']:g}"
    if "le" in found:
        return f"{joint}up to {found['le']:g}" if joint else f"to {found['le']:g}"
    return ""


def _number(field: FieldInfo, value: object, *, is_whole: bool) -> str:
    found = limits(field)
    if found.get("le", 0.0) >= _GENEROUS and not (is_number(value) and value > found["le"]):
        found.pop("le")
    unit = extra(field, "unit")
    noun = "a whole number" if is_whole else extra(field, "noun") or _NOUNS.get(unit, "a number")
    if "ge" in found and found["ge"] == found.get("le"):
        return f"{found['ge']:g}"
    words = limits_in_words(found)
    phrase = f"{noun} {words}" if words else noun
    return phrase if unit in _UNITLESS else f"{phrase}, in {_UNITS.get(unit, unit)}"


def _text(field: FieldInfo) -> str:
    found = limits(field)
    if "max_length" in found:
        return f"text of at most {found['max_length']} characters"
    return "text"
