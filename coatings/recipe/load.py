"""Reading a recipe: all problems of the file at once, or a Recipe."""

from __future__ import annotations

import hashlib
import tomllib
from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Any

from pydantic import BaseModel, ValidationError

from coatings.errors import Problem, RecipeError
from coatings.recipe.document import FORMAT_VERSION, RecipeTable
from coatings.recipe.facet import FacetTable, facet_notes, resolve_facet
from coatings.recipe.files import MEGABYTE, ReadError, decode, read_bytes
from coatings.recipe.lookup import section_of
from coatings.recipe.own_materials import Shelf
from coatings.recipe.paths import Found, KeyPath, shown
from coatings.recipe.physical import Sections, conflicts, material_problems
from coatings.recipe.problems import schema_problems
from coatings.recipe.recipe import Recipe
from coatings.recipe.section import is_number

SIZE_LIMIT = MEGABYTE
_MOST_DOTS = 5000


def load_recipe(path: Path) -> Recipe:
    """Read and check a recipe file.

    Parameters
    ----------
    path : the file

    Returns
    -------
    Recipe

    Raises
    ------
    RecipeError
        with every problem of the file: where (file and key path) and what (with its mend)
    """
    try:
        content = read_bytes(path, at_most=SIZE_LIMIT)
        text = decode(content)
    except ReadError as fault:
        raise RecipeError(
            Problem(str(path), f"{fault}; give a recipe, a text file in TOML")
        ) from None
    return _parse(text, path=path, sha256=hashlib.sha256(content).hexdigest())


def parse_recipe(text: str, *, path: Path) -> Recipe:
    """Check a recipe given as text.

    Parameters
    ----------
    text : the recipe in TOML
    path : the file it is from: named in messages, and its folder holds the tables of [materials]

    Returns
    -------
    Recipe

    Raises
    ------
    RecipeError
        with every problem of the recipe
    """
    return _parse(text, path=path, sha256=hashlib.sha256(text.encode()).hexdigest())


def _parse(text: str, *, path: Path, sha256: str) -> Recipe:
    try:
        raw = _tables(text)
    except ReadError as fault:
        raise RecipeError(Problem(str(path), str(fault))) from None
    version = raw.get("recipe")
    if is_number(version) and version != FORMAT_VERSION:
        what = f"is {shown(version)}; this program reads recipes of format version {FORMAT_VERSION}"
        raise RecipeError(Problem(f"{path}: recipe", what))
    found, table, sections = _validate(raw)
    blamed = [where for where, _ in found]
    found += _news(conflicts(sections), blamed)
    shelf = Shelf(sections.materials, path.parent, broken=_broken_materials(found))
    found += _news(material_problems(sections, shelf), blamed)
    if table is None or found:
        raise RecipeError([Problem(f"{path}: {where}", what) for where, what in found])
    return _recipe(table, shelf, text=text, path=path, sha256=sha256)


def _tables(text: str) -> dict[str, Any]:
    """The recipe as nested tables, lists made tuples."""
    if not text.strip():
        raise ReadError("is empty; expected a recipe (the start command writes one)")
    try:
        # A key of a hundred thousand dotted parts takes the parser minutes.
        if any(line.count(".") > _MOST_DOTS for line in text.splitlines()):
            raise RecursionError
        return {key: _frozen(value) for key, value in tomllib.loads(text).items()}
    except RecursionError:
        raise ReadError("is nested too deeply; no recipe needs more than a few levels") from None
    except ValueError as error:
        raise ReadError(f"is not TOML: {_one_line(str(error))}") from None


def _one_line(message: str) -> str:
    return "".join(sign if sign.isprintable() else " " for sign in message)


def _frozen(value: Any) -> Any:
    if isinstance(value, list):
        return tuple(_frozen(item) for item in value)
    if isinstance(value, dict):
        return {key: _frozen(item) for key, item in value.items()}
    return value


def _validate(raw: Mapping[str, Any]) -> tuple[list[Found], RecipeTable | None, Sections]:
    try:
        table = RecipeTable.model_validate(raw)
    except ValidationError as error:
        found = schema_problems(error, raw)
        readable = {
            name: _readable(name, raw[name], [path for path, _ in found])
            for name in Sections.__dataclass_fields__
            if name in raw
        }
        given = {name: value for name, value in readable.items() if value is not None}
        return found, None, Sections(**{**_absent_facets(raw), **given})
    values = {name: getattr(table, name) for name in Sections.__dataclass_fields__}
    return [], table, Sections(**values)


def _absent_facets(raw: Mapping[str, Any]) -> dict[str, FacetTable]:
    return {name: FacetTable() for name in ("front", "rear") if name not in raw}


def _readable(name: str, value: Any, faults: Iterable[KeyPath]) -> Any:
    """The section without its faulty keys, so that the rest can still be checked; else None."""
    field = RecipeTable.model_fields[name]
    section = section_of(field.annotation)
    blamed = [path.parts[1:] for path in faults if path.parts[0] == name]
    if section is None or () in blamed:
        return None
    if isinstance(value, tuple):
        items = [_pruned(section, item, _below(blamed, place)) for place, item in enumerate(value)]
        return None if None in items else tuple(items)
    if name == "materials":
        made = {key: _pruned(section, item, _below(blamed, key)) for key, item in value.items()}
        return {key: item for key, item in made.items() if item is not None}
    return _pruned(section, value, blamed)


def _pruned(
    section: type[BaseModel], value: Any, blamed: Iterable[tuple[str | int, ...]]
) -> BaseModel | None:
    """The section without the keys that hold a fault, if what is left can be read."""
    if not isinstance(value, dict):
        return None
    remaining = _without(value, [parts for parts in blamed if parts])
    try:
        return section.model_validate(remaining)
    except ValidationError as error:
        broken = {detail["loc"][0] for detail in error.errors() if detail["loc"]}
    try:
        return section.model_validate({k: v for k, v in remaining.items() if k not in broken})
    except ValidationError:
        return None


def _without(value: Any, faults: list[tuple[str | int, ...]]) -> Any:
    """A copy without the innermost keys that are at fault; items of lists keep their places."""
    if isinstance(value, tuple):
        return tuple(_without(item, _below(faults, place)) for place, item in enumerate(value))
    if not isinstance(value, dict):
        return value
    kept = {key: (item, _below(faults, key)) for key, item in value.items()}
    return {key: _without(item, inside) for key, (item, inside) in kept.items() if () not in inside}


def _below(faults: list[tuple[str | int, ...]], part: str | int) -> list[tuple[str | int, ...]]:
    return [parts[1:] for parts in faults if parts and parts[0] == part]


def _news(found: Iterable[Found], blamed: Iterable[KeyPath]) -> list[Found]:
    """Each problem once, but for places that the schema blames: the rest may follow from that."""
    return [
        (path, what)
        for path, what in dict.fromkeys(found)
        if not any(other.contains(path) or path.contains(other) for other in blamed)
    ]


def _broken_materials(found: Iterable[Found]) -> frozenset[str]:
    """Own materials that can't be made because their sections are at fault."""
    parts = [path.parts for path, _ in found]
    return frozenset(str(part[1]) for part in parts if part[0] == "materials" and len(part) > 1)


def _recipe(table: RecipeTable, shelf: Shelf, *, text: str, path: Path, sha256: str) -> Recipe:
    notes = [
        note
        for name, facet in (("front", table.front), ("rear", table.rear))
        for note in facet_notes(facet, KeyPath((name,)))
    ]
    return Recipe(
        path=path,
        text=text,
        sha256=sha256,
        title=table.title or path.stem,
        revision=table.revision,
        chip=table.chip,
        laser=table.laser,
        external=table.external,
        amplifier=table.amplifier,
        front=resolve_facet("front", table.front, table.chip),
        rear=resolve_facet("rear", table.rear, table.chip),
        process_table=table.process,
        witnesses=table.witness,
        notes=tuple(notes),
        shelf=shelf,
    )
