"""Rounding to what can be ordered, against every stack of the grid around."""

from __future__ import annotations

from itertools import product

import numpy as np
import pytest
from design_recipes import recipe
from films_in_numpy import Twin

from coatings.design.ordered import best_ordered
from coatings.design.plan import facet_task
from coatings.design.polish import minimax
from coatings.design.search import CLOSELY, search_count

WHOLE = {"decimals_nm": 0}
SHARP = {"at_most": 0.0005, "band_nm": [966.0, 986.0]}
FACET = {"palette": ["L", "H"], "max_layers": 3, "layer_nm": [15.0, 300.0]}
NAMES = {0: "L", 1: "H"}


def neighbourhood(nm, reach):
    """Every whole-nanometre stack within ``reach`` nm of the rounded one."""
    steps = np.array(list(product(range(-reach, reach + 1), repeat=len(nm))), dtype=float)
    return np.maximum(np.round(nm) + steps, 15.0)


@pytest.mark.parametrize("order", [[0, 1], [1, 0], [0, 1, 0], [1, 0, 1]])
def test_whole_nanometres_against_the_whole_neighbourhood(order):
    made = recipe(FACET, SHARP, process=WHOLE)
    task = facet_task(made, "front", seed=0)
    film = np.array(order)
    free = search_count(
        facet_task(recipe(FACET, SHARP, process={"decimals_nm": 5}), "front", seed=0), len(order)
    )
    start = next((f.nm for f in free if f.film.tolist() == order), None)
    if start is None:
        start = minimax(task.model, np.full(len(order), 100.0), film=film, limits=task.limits)
    found = best_ordered(
        start,
        film=film,
        limits=task.limits,
        score=lambda s: task.model.margin(s, film=film),
        **CLOSELY,
    )
    twin = Twin.of(made, [NAMES[f] for f in order])
    best = twin.margin(neighbourhood(start, 3)).max()
    assert (found == np.round(found)).all()
    assert twin.margin(found[None])[0] >= best - 1e-12


def test_plain_rounding_loses_where_the_neighbourhood_does_not():
    """10 % within 0.2 % over 160 nm: plain rounding of the flattest stack leaves a thirtieth of its margin,
    the best of all 7^4 stacks around leaves nine tenths."""
    window = {"reflectance": 0.1, "tolerance": 0.002, "band_nm": [900.0, 1060.0]}
    facet = {**FACET, "max_layers": 4, "first": "H"}
    fine = recipe(facet, window, process={"decimals_nm": 5})
    made = recipe(facet, window, process=WHOLE)
    exact = search_count(facet_task(fine, "front", seed=0), 4)[0].nm
    task = facet_task(made, "front", seed=0)
    film = np.array([1, 0, 1, 0])
    found = best_ordered(
        exact,
        film=film,
        limits=task.limits,
        score=lambda s: task.model.margin(s, film=film),
        **CLOSELY,
    )
    twin = Twin.of(made, ["H", "L", "H", "L"], step_nm=4.0)
    around = twin.margin(neighbourhood(exact, 3)).max()
    free, plain, ordered = twin.margin(np.array([exact, np.round(exact), found]))
    assert plain < 0.2 * free
    assert ordered > 0.9 * free
    assert ordered == pytest.approx(around, abs=2e-6)


def test_whole_nanometres_of_a_search_against_every_stack_of_the_grid():
    """Two layers on whole nanometres: all of them, 286^2, by the slow twin at five wavelengths."""
    facet = {**FACET, "max_layers": 2, "layer_nm": [15.0, 300.0], "first": "H"}
    made = recipe(facet, SHARP, process=WHOLE)
    every = np.array(list(product(np.arange(15.0, 301.0), repeat=2)))
    rough = Twin.of(made, ["H", "L"], step_nm=5.0).margin(every)
    best = Twin.of(made, ["H", "L"]).margin(every[np.argsort(rough)[-50:]]).max()
    found = search_count(facet_task(made, "front", seed=1), 2)[0]
    assert found.margin == pytest.approx(best, abs=1e-12)


def test_a_total_that_binds_is_kept_after_rounding():
    made = recipe({**FACET, "total_nm": 200.5}, SHARP, process=WHOLE)
    task = facet_task(made, "front", seed=0)
    film = np.array([1, 0, 1])
    found = best_ordered(
        np.array([60.1, 80.2, 60.2]),
        film=film,
        limits=task.limits,
        score=lambda s: s.sum(axis=1),
        **CLOSELY,
    )
    assert found.sum() == 200.0


def test_a_long_stack_with_a_total_is_rounded_inside_it():
    made = recipe({**FACET, "max_layers": 20, "total_nm": 1000.0}, {"at_least": 0.9}, process=WHOLE)
    limits = facet_task(made, "front", seed=0).limits
    film = np.tile([0, 1], 10)
    found = best_ordered(
        np.full(20, 50.0) + np.tile([0.4, -0.4], 10),
        film=film,
        limits=limits,
        score=lambda s: np.zeros(len(s)),
        **CLOSELY,
    )
    assert limits.held(found[None], film=film).all()


def test_a_grid_without_a_stack_has_no_best():
    made = recipe({**FACET, "layer_nm": [100.3, 100.7]}, SHARP, process=WHOLE)
    limits = facet_task(made, "front", seed=0).limits
    film = np.array([0, 1])
    found = best_ordered(
        np.array([100.5, 100.5]),
        film=film,
        limits=limits,
        score=lambda s: np.zeros(len(s)),
        **CLOSELY,
    )
    assert found is None
