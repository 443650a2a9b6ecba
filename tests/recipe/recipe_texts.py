"""Recipes for the tests: a sound one, and ways to change one key of it."""

from __future__ import annotations

from pathlib import Path

import pytest

from coatings.errors import RecipeError
from coatings.recipe import Recipe, parse_recipe

CHIP = {
    "wavelength_nm": "976.0",
    "band_nm": "[964.0, 988.0]",
    "polarization": '"TE"',
    "length_um": "4000.0",
    "stripe_um": "95.0",
    "index": "3.30",
}
LASER = {
    "internal_loss_per_cm": "0.8",
    "injection_efficiency": "0.95",
    "transparency_A_per_cm2": "120.0",
    "modal_gain_per_cm": "18.0",
    "drive_A": "12.0",
    "junction_V": "1.31",
}
FRONT = {"palette": '["Al2O3", "Ta2O5"]', "max_layers": "4"}
WINDOW = {"reflectance": "0.05", "tolerance": "0.01"}
WITNESS = {
    "name": '"W1"',
    "facet": '"front"',
    "substrate": '"chip"',
    "back": '"ground"',
    "quantity": '"R"',
}


def table(head: str, keys: dict[str, str], **changed: str | None) -> str:
    """A TOML table; a changed key of None is left out."""
    merged = {**keys, **changed}
    lines = [f"{key} = {value}" for key, value in merged.items() if value is not None]
    return "\n".join([head, *lines, ""])


def chip(**changed: str | None) -> str:
    """[chip]."""
    return table("[chip]", CHIP, **changed)


def laser(**changed: str | None) -> str:
    """[laser]."""
    return table("[laser]", LASER, **changed)


def front(*windows: str, **changed: str | None) -> str:
    """[front] with its windows; one sound window when none is named."""
    return "\n".join([table("[front]", FRONT, **changed), *(windows or (window(),))])


def window(**changed: str | None) -> str:
    """[[front.windows]]: 0.05 +- 0.01."""
    return table("[[front.windows]]", WINDOW, **changed)


def only(**keys: str) -> str:
    """[[front.windows]] with these keys and no others."""
    return table("[[front.windows]]", keys)


def witness(**changed: str | None) -> str:
    """[[witness]]."""
    return table("[[witness]]", WITNESS, **changed)


def document(*sections: str, **chip_changed: str | None) -> str:
    """A whole recipe."""
    return "\n".join(["recipe = 1", chip(**chip_changed), *sections])


def read(*sections: str, folder: Path = Path("recipes"), **chip_changed: str | None) -> Recipe:
    """The recipe, which must be sound."""
    return parse_recipe(document(*sections, **chip_changed), path=folder / "x.toml")


def problems(text: str, folder: Path = Path("recipes")) -> list[str]:
    """All problems of a recipe, which must have some; without the file's name."""
    path = folder / "x.toml"
    with pytest.raises(RecipeError, match=r"x\.toml: ") as caught:
        parse_recipe(text, path=path)
    lines = [str(problem) for problem in caught.value.problems]
    assert all("\n" not in line for line in lines)
    assert all(line.startswith(f"{path}: ") for line in lines)
    return [line.removeprefix(f"{path}: ") for line in lines]
