"""The recipe with the chosen layers filled in, the user's comments kept.

TOML lets one table be written in many ways (inline, with dotted keys, in pieces among other tables).
Layers are put into every piece in turn until the text reads as it should; where no piece takes them the
recipe is written anew, without comments.
"""

from __future__ import annotations

import tomllib
from collections.abc import Mapping
from typing import Any

import tomlkit
from tomlkit.exceptions import TOMLKitError
from tomlkit.items import AoT, Array, InlineTable, Table

from coatings.recipe import FacetName, Recipe
from coatings.stack import Stack


def chosen_recipe(recipe: Recipe, stacks: Mapping[FacetName, Stack]) -> str:
    """Text of the recipe with ``layers`` of each side in ``stacks`` replaced; all else as written."""
    text = recipe.text
    for side, stack in stacks.items():
        text = _with_layers(text, side, stack)
    if "\r\n" in recipe.text:
        text = text.replace("\r\n", "\n").replace("\n", "\r\n")
    return text


def _with_layers(text: str, side: FacetName, stack: Stack) -> str:
    wanted = tomllib.loads(text)
    wanted[side]["layers"] = [{"material": layer.material, "nm": layer.nm} for layer in stack]
    for piece in range(_count_pieces(text, side)):
        candidate = _put_into(text, side, piece, stack)
        if candidate is not None and _reads_as(candidate, wanted):
            return candidate
    return tomlkit.dumps(wanted)


def _count_pieces(text: str, side: FacetName) -> int:
    try:
        return len(_pieces(tomlkit.parse(text), side))
    except TOMLKitError:
        return 0


def _pieces(document: tomlkit.TOMLDocument, side: FacetName) -> list[Table | InlineTable]:
    """The pieces of a facet's table, those with keys of their own first."""
    pieces = [
        item
        for key, item in document.body
        if key is not None and key.key == side and isinstance(item, Table | InlineTable)
    ]
    return sorted(pieces, key=lambda item: isinstance(item, Table) and item.is_super_table())


def _put_into(text: str, side: FacetName, piece: int, stack: Stack) -> str | None:
    document = tomlkit.parse(text)
    try:
        _put(_pieces(document, side)[piece], _array(stack))
        return tomlkit.dumps(document)
    except TOMLKitError:
        return None


def _reads_as(text: str, wanted: Mapping[str, Any]) -> bool:
    try:
        return tomllib.loads(text) == wanted
    except tomllib.TOMLDecodeError:
        return False


def _array(stack: Stack) -> Array:
    layers = tomlkit.array()
    for layer in stack:
        entry = tomlkit.inline_table()
        entry.update({"material": layer.material, "nm": layer.nm})
        layers.append(entry)
    return layers.multiline(len(stack) > 0)


def _put(table: Table | InlineTable, layers: Array) -> None:
    """Set ``layers`` in place, or before the first sub-table: TOML has no way back into a table."""
    if isinstance(table, InlineTable):
        table["layers"] = layers.multiline(False)
        return
    if "layers" in table:
        table["layers"] = layers
        return
    later = [(key, table[key]) for key in list(table) if isinstance(table[key], AoT | Table)]
    for key, _ in later:
        table.remove(key)
    table.append("layers", layers)
    for key, value in later:
        table.append(key, value)
