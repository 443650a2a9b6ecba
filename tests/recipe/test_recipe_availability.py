"""Keys whose feature is not there yet: accepted, and refused where they would change a result."""

from __future__ import annotations

import re

import pytest
from recipe_texts import front, laser, only, read, window, witness

from coatings.errors import RecipeError
from coatings.recipe import Recipe, check_available, unavailable

ABSENT = {
    "trade": (
        lambda: read(laser(), front(window(), only(reflectance='"trade"'))),
        r"front\.windows#2\.reflectance: ",
        {"plan", "curve"},
    ),
    "external": (
        lambda: read("[external]\nreflectance = 0.05\ncoupling = 0.8"),
        r"external: ",
        {"plan"},
    ),
    "air": (
        lambda: read("[process]\nair_shift_percent = { Al2O3 = 0.5 }"),
        r"process\.air_shift_percent: ",
        {"plan"},
    ),
    "air of the rear": (
        lambda: read("[rear.process]\nair_shift_percent = { Al2O3 = 0.5 }"),
        r"rear\.process\.air_shift_percent: ",
        {"plan"},
    ),
    "gain peak": (
        lambda: read(laser(gain_peak_nm="976", gain_width_nm="40")),
        r"laser\.gain_peak_nm: ",
        {"plan"},
    ),
}


@pytest.mark.parametrize("case", ABSENT)
@pytest.mark.parametrize("command", ["plan", "curve", "materials"])
def test_absent_feature(case: str, command: str) -> None:
    make, path, commands = ABSENT[case]
    recipe: Recipe = make()
    if command not in commands:
        assert check_available(recipe, command) is None
        return
    with pytest.raises(RecipeError, match=path + r".* is not available yet") as caught:
        check_available(recipe, command)
    assert len(caught.value.problems) == 1
    assert re.match(r"recipes/x\.toml: ", str(caught.value))


def test_all_absent_features_at_once() -> None:
    recipe = read(
        "[external]\nreflectance = 0.05\ncoupling = 0.8",
        "[process]\nair_shift_percent = { Al2O3 = 0.5 }",
    )
    asked = [str(path) for path, _ in unavailable(recipe, "plan")]
    assert asked == ["external", "process.air_shift_percent"]


def test_keys_that_change_nothing_here() -> None:
    recipe = read(
        laser(),
        front(window(polarization='"both"'), window(polarization='"TM"', of='"coating"')),
        "[amplifier]\ngain_dB = 25.0",
        "[process]\nair_shift_percent = { Al2O3 = 0.0 }\nstress_max_N_per_m = 50\n"
        "stress_MPa = { Al2O3 = -100, Ta2O5 = -150 }",
        witness(),
        tilt_deg="0.0",
    )
    assert unavailable(recipe, "plan") == []
