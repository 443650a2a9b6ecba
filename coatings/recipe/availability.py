"""Keys of the format whose feature this version does not have: refused where they would count.

A feature that arrives deletes its row.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

from coatings.errors import Problem, RecipeError
from coatings.recipe.paths import Found, KeyPath
from coatings.recipe.recipe import Recipe

_CHIP = KeyPath(("chip",))


@dataclass(frozen=True)
class Row:
    """A feature that is absent, the keys that ask for it, and the commands it would change."""

    what: str
    asked: Callable[[Recipe], Iterator[KeyPath]]
    commands: frozenset[str]


def _trade(recipe: Recipe) -> Iterator[KeyPath]:
    for name, facet in recipe.facets.items():
        for place, window in enumerate(facet.windows):
            if window.is_trade:
                yield KeyPath((name, "windows", place, "reflectance"))


def _external(recipe: Recipe) -> Iterator[KeyPath]:
    if recipe.external is not None:
        yield KeyPath(("external",))


def _air_shift(recipe: Recipe) -> Iterator[KeyPath]:
    tables = {
        KeyPath(("process",)): recipe.process_table,
        KeyPath(("front", "process")): recipe.front.table.process,
        KeyPath(("rear", "process")): recipe.rear.table.process,
    }
    for path, table in tables.items():
        if table is not None and any(table.air_shift_percent.values()):
            yield path / "air_shift_percent"


def _gain_peak(recipe: Recipe) -> Iterator[KeyPath]:
    if recipe.laser is not None and recipe.laser.gain_peak_nm is not None:
        yield KeyPath(("laser", "gain_peak_nm"))


_PLAN = frozenset({"plan"})
_LIGHT = frozenset({"plan", "curve", "field"})

ROWS: tuple[Row, ...] = (
    Row('a window that takes "trade" as its target', _trade, _LIGHT),
    Row("feedback from an external reflector", _external, _PLAN),
    Row("the shift of a film's index in air", _air_shift, _PLAN),
    Row("gain that depends on wavelength", _gain_peak, _PLAN),
)


def unavailable(recipe: Recipe, command: str) -> list[Found]:
    """Keys of a recipe that would change what a command computes, and can't yet."""
    return [
        (path, f"{row.what} is not available yet; leave the key out")
        for row in ROWS
        if command in row.commands
        for path in row.asked(recipe)
    ]


def check_available(recipe: Recipe, command: str) -> None:
    """Refuse a recipe that asks a command for a feature that is not there.

    Parameters
    ----------
    recipe : the recipe
    command : name of the command: "plan", "curve"

    Raises
    ------
    RecipeError
        with one problem for every such key
    """
    found = unavailable(recipe, command)
    if found:
        raise RecipeError([Problem(f"{recipe.path}: {path}", what) for path, what in found])
