"""Errors of the run: what a method fills in, and what a facet overrides."""

from __future__ import annotations

import re

import pytest
from recipe_texts import front, read

from coatings.errors import InputError
from coatings.recipe import ProcessErrors

# Common practice, from memory: the table of the recipe format.
METHODS = {
    "e-beam": (2.0, 1.5, 0.5, 0.02, 1.0, 0.005),
    "ion-assisted": (1.0, 1.0, 0.3, 0.01, 0.5, 0.005),
    "magnetron": (0.4, 0.4, 0.2, 0.005, 0.3, 0.005),
    "ion-beam": (0.2, 0.2, 0.1, 0.003, 0.2, 0.005),
}


def sigmas(process: ProcessErrors, film: str = "Al2O3") -> tuple[float, ...]:
    return (
        process.run_percent,
        process.layer_percent,
        process.thickness_sigma_nm,
        process.index[film],
        process.position_percent,
        process.chip_index,
    )


@pytest.mark.parametrize("method", METHODS)
def test_method_fills_what_is_not_given(method: str) -> None:
    process = read(front(), f'[process]\nmethod = "{method}"').process_for("front")
    assert sigmas(process) == sigmas(process, "Ta2O5") == METHODS[method]
    assert (process.holds, process.decimals_nm) == ("physical", 1)
    assert len(process.assumed) == 1
    assert re.match(rf"method {method} assumed \(not given in \[process\]; ", process.assumed[0])


def test_ion_assisted_is_assumed_without_process_and_said_to_be() -> None:
    process = read(front()).process_for("front")
    assert process.method == "ion-assisted"
    assert sigmas(process) == METHODS["ion-assisted"]
    assert process.assumed == (
        "method ion-assisted assumed (the recipe has no [process]; common practice): run 1 %, "
        "layer 1 %, thickness 0.3 nm, position 0.5 %, chip index 0.005, index 0.01 of Al2O3, Ta2O5",
    )


def test_process_without_method_leaves_the_rest_zero() -> None:
    process = read(front(), "[process]\nrun_percent = 1.5").process_for("front")
    assert process.run_percent == 1.5
    assert (process.layer_percent, process.thickness_sigma_nm, process.chip_index) == (0, 0, 0)
    assert (process.index, process.assumed, process.method) == ({}, (), None)
    assert read("[process]").process_for("rear").run_percent == 0.0


def test_given_values_go_before_the_method() -> None:
    text = '[process]\nmethod = "magnetron"\nrun_percent = 0\nindex = { Al2O3 = 0.04 }'
    process = read(front(), text).process_for("front")
    assert (process.run_percent, process.layer_percent) == (0.0, 0.4)
    assert process.index == {"Al2O3": 0.04, "Ta2O5": 0.005}
    assert "run" not in process.assumed[0].split("): ")[1]
    assert process.assumed[0].endswith("index 0.005 of Ta2O5")


def test_facet_overrides_key_by_key() -> None:
    text = """[process]
method = "ion-assisted"
run_percent = 0.7
index = { Al2O3 = 0.01, Ta2O5 = 0.02 }
[front.process]
layer_percent = 0.2
index = { Ta2O5 = 0.03 }
[rear.process]
method = "ion-beam"
"""
    recipe = read(front(), text)
    ahead, behind = recipe.process_for("front"), recipe.process_for("rear")
    assert (ahead.method, ahead.run_percent, ahead.layer_percent) == ("ion-assisted", 0.7, 0.2)
    assert ahead.index == {"Al2O3": 0.01, "Ta2O5": 0.03}
    assert (behind.method, behind.run_percent, behind.layer_percent) == ("ion-beam", 0.7, 0.2)
    assert behind.position_percent == 0.2
    assert behind.index == {"Al2O3": 0.01, "Ta2O5": 0.02}


def test_facet_overrides_what_is_assumed() -> None:
    process = read(front(), "[front.process]\nrun_percent = 3.0").process_for("front")
    assert (process.method, process.run_percent, process.layer_percent) == ("ion-assisted", 3, 1)


def test_no_third_facet() -> None:
    with pytest.raises(InputError, match="there is no facet 'side'; expected front or rear"):
        read().process_for("side")
