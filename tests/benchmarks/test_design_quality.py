"""The search against the best known stacks of `design_problems`, found by `find_best_known`.

best_known.json holds, for each problem and layer count, the best of scipy's differential evolution over
every order of films (see the script). Yields are judged by the slow twin on one common set of 100 000
chips, margins by the slow twin on the full grid.
"""

from __future__ import annotations

import json

import numpy as np
import pytest
from design_problems import PROBLEMS
from films_in_numpy import Twin
from find_best_known import STORE, common_yield

from coatings.design.plan import facet_task
from coatings.design.search import search_count

YIELD_LOSS = 0.005
MARGIN_LOSS = 0.02  # of the best known
KNOWN = json.loads(STORE.read_text())
HIGHEST = [(name, max(KNOWN[name], key=int)) for name in KNOWN]
OTHERS = [(name, count) for name in KNOWN for count in KNOWN[name] if (name, count) not in HIGHEST]


def check(name, count, seed):
    """The search's stack is judged as the best known one was."""
    known, problem = KNOWN[name][count], PROBLEMS[name]
    task = facet_task(problem.recipe, "front", seed=seed)
    found = search_count(task, int(count))[0]
    twin = Twin.of(problem.recipe, [task.model.goal.films[film] for film in found.film])
    if known["yield"] is None:
        margin = float(twin.margin(found.nm[None])[0])
        assert margin >= known["margin"] - MARGIN_LOSS * abs(known["margin"])
    else:
        assert common_yield(twin, found.nm) >= known["yield"] - YIELD_LOSS


@pytest.mark.slow
@pytest.mark.parametrize(("name", "count"), HIGHEST)
def test_the_search_finds_what_brute_force_finds(name, count):
    check(name, count, seed=0)


@pytest.mark.skipif(
    "not config.getoption('--benchmark-enable')", reason="every count and more seeds"
)
@pytest.mark.parametrize("seed", [1, 2, 3])
@pytest.mark.parametrize(("name", "count"), OTHERS)
def test_at_every_layer_count_from_several_seeds(name, count, seed):
    check(name, count, seed)


@pytest.mark.parametrize("name", KNOWN)
def test_the_store_holds_what_it_says(name):
    """The stored margins are those of the stored thicknesses, which keep the limits."""
    made = PROBLEMS[name].recipe
    for count, known in KNOWN[name].items():
        nm = np.array(known["nm"])
        assert len(nm) == len(known["films"]) == int(count)
        limits = np.array([made.front.layer_limits_nm(film) for film in known["films"]])
        assert ((nm >= limits[:, 0]) & (nm <= limits[:, 1])).all()
        margin = Twin.of(made, known["films"]).margin(nm[None])[0]
        assert margin == pytest.approx(known["margin"], abs=2e-4)
