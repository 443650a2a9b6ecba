"""Recipes for the tests of the design room: one facet, its windows, its run."""

from __future__ import annotations

from collections.abc import Mapping
from pathlib import Path

from coatings.recipe import Recipe, parse_recipe

NO_ERRORS = {"run_percent": 0.0}
Keys = Mapping[str, object]


def toml(value: object) -> str:
    """A value as TOML writes it."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, str):
        return f'"{value}"'
    if isinstance(value, Mapping):
        return "{ " + ", ".join(f'"{k}" = {toml(v)}' for k, v in value.items()) + " }"
    if isinstance(value, list | tuple):
        return "[" + ", ".join(toml(item) for item in value) + "]"
    return repr(value)


def section(head: str, keys: Keys) -> str:
    """A TOML table."""
    return "\n".join([head, *(f"{key} = {toml(value)}" for key, value in keys.items()), ""])


def recipe_text(
    facet: Keys,
    *windows: Keys,
    process: Keys | None = None,
    chip: Keys | None = None,
    materials: Mapping[str, Keys] | None = None,
    side: str = "front",
) -> str:
    """A recipe whose films and chip have plain numbers for indices.

    The films L (1.45), M (1.65), H (2.1) and X (3.5 + 0.02 i) are there for every facet.
    """
    chip_keys = {
        "wavelength_nm": 976.0,
        "band_nm": [964.0, 988.0],
        "polarization": "TE",
        "length_um": 4000.0,
        "stripe_um": 95.0,
        "index": 3.3,
        **(chip or {}),
    }
    films: dict[str, Keys] = {
        "L": {"index": 1.45, "k": 0.0},
        "M": {"index": 1.65, "k": 0.0},
        "H": {"index": 2.1, "k": 0.0},
        "X": {"index": 3.5, "k": 0.02},
        **(materials or {}),
    }
    return "\n".join(
        [
            "recipe = 1",
            section("[chip]", chip_keys),
            section(f"[{side}]", facet),
            *(section(f"[[{side}.windows]]", window) for window in windows),
            section("[process]", NO_ERRORS if process is None else process),
            *(section(f"[materials.{name}]", keys) for name, keys in films.items()),
        ]
    )


def recipe(
    facet: Keys,
    *windows: Keys,
    process: Keys | None = None,
    chip: Keys | None = None,
    materials: Mapping[str, Keys] | None = None,
    side: str = "front",
) -> Recipe:
    """`recipe_text` read; without ``process`` every error is zero."""
    text = recipe_text(facet, *windows, process=process, chip=chip, materials=materials, side=side)
    return parse_recipe(text, path=Path("recipes/x.toml"))
