"""The recipe with the chosen layers filled in, the user's comments kept."""

from __future__ import annotations

from collections.abc import Mapping

import tomlkit
from tomlkit.items import Table

from coatings.recipe import FacetName, Recipe
from coatings.stack import Stack


def chosen_recipe(recipe: Recipe, stacks: Mapping[FacetName, Stack]) -> str:
    """Text of the recipe with ``layers`` of each side in ``stacks`` replaced; all else as written."""
    document = tomlkit.parse(recipe.text)
    for side, stack in stacks.items():
        table = document[side]
        layers = tomlkit.array()
        for layer in stack:
            entry = tomlkit.inline_table()
            entry.update({"material": layer.material, "nm": layer.nm})
            layers.append(entry)
        _put(table, layers.multiline(True))
    return tomlkit.dumps(document)


def _put(table: Table, layers: tomlkit.items.Array) -> None:
    """Set ``layers`` in place, or before the first sub-table: TOML has no way back into a table."""
    if "layers" in table:
        table["layers"] = layers
        return
    later = [
        (key, table[key])
        for key in list(table)
        if isinstance(table[key], tomlkit.items.AoT | Table)
    ]
    for key, _ in later:
        table.remove(key)
    table.append("layers", layers)
    for key, value in later:
        table.append(key, value)
