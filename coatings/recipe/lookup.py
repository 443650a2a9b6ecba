"""From a key path to the field of the schema that describes it."""

from __future__ import annotations

import types
from collections.abc import Sequence
from dataclasses import dataclass
from typing import Annotated, Any, Union, get_args, get_origin

from pydantic import BaseModel
from pydantic.fields import FieldInfo

from coatings.recipe.document import RecipeTable
from coatings.recipe.paths import KeyPath
from coatings.recipe.section import TAGS


@dataclass(frozen=True)
class Place:
    """A place in the schema.

    ``path`` is how far the recipe's keys reach (places inside a list of plain values are left
    out); ``section`` the table that holds its last key, ``field`` that key's field (None when the
    section has no such key). ``is_item``: the path ends inside the field's list or table.
    """

    path: KeyPath
    section: type[BaseModel]
    field: FieldInfo | None
    is_item: bool = False


def find(loc: Sequence[str | int]) -> Place:
    """The place of a location such as ``("front", "windows", 1, "at_most")``.

    Parameters
    ----------
    loc : keys and list places; tags of alternatives, as pydantic puts them in, are skipped

    Returns
    -------
    Place
    """
    section: type[BaseModel] = RecipeTable
    place = Place(KeyPath(), section, None)
    inner: Any = RecipeTable
    for part in (part for part in loc if part not in TAGS):
        if isinstance(inner, type) and issubclass(inner, BaseModel):
            section = inner
            field = section.model_fields.get(str(part))
            place = Place(place.path / part, section, field)
            inner = None if field is None else plain(field.annotation)
            continue
        inner, is_key = _inside(inner, part)
        if not is_key:
            break
        place = Place(place.path / part, place.section, place.field, is_item=True)
    return place


def plain(annotation: Any) -> Any:
    """The type without ``Annotated`` and without its None."""
    if get_origin(annotation) is Annotated:
        return plain(get_args(annotation)[0])
    if get_origin(annotation) in (Union, types.UnionType):
        others = [part for part in get_args(annotation) if part is not type(None)]
        if len(others) == 1:
            return plain(others[0])
    return annotation


def section_of(annotation: Any) -> type[BaseModel] | None:
    """The section that a type is, or that its list or table holds; None for plain values."""
    inner = plain(annotation)
    if get_origin(inner) in (tuple, dict):
        arguments = [part for part in get_args(inner) if part is not Ellipsis]
        inner = plain(arguments[-1])
    return inner if isinstance(inner, type) and issubclass(inner, BaseModel) else None


def _inside(annotation: Any, part: str | int) -> tuple[Any, bool]:
    """Type of one item, and whether the step to it is shown in the key path."""
    if get_origin(annotation) in (Union, types.UnionType):
        annotation = next(
            (option for option in map(plain, get_args(annotation)) if get_origin(option) is dict),
            annotation,
        )
    if get_origin(annotation) is tuple and isinstance(part, int):
        item = section_of(annotation)
        return item, item is not None
    if get_origin(annotation) is dict and isinstance(part, str) and part != "[key]":
        return plain(get_args(annotation)[1]), True
    return None, False
