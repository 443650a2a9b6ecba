"""What is said of windows that can't be met: numbers against the slow twin."""

from __future__ import annotations

import numpy as np
import pytest
from design_recipes import recipe
from films_in_numpy import Twin, light

from coatings.design.plan import plan_facets
from coatings.design.relax import shortfall

pytestmark = pytest.mark.usefixtures("quick_search")
MAGNETRON = {"method": "magnetron"}


def planned(facet, *windows, process=MAGNETRON):
    made = recipe(
        {"palette": ["L", "H"], "layer_nm": [15.0, 400.0], **facet}, *windows, process=process
    )
    plan = plan_facets(made, sides=("front",), seed=0, workers=1)["front"]
    return made, plan


def slack_at(made, plan, window, nm):
    """Slack of one window at one wavelength by the slow twin."""
    names = [plan.task.model.goal.films[f] for f in plan.taken.film]
    grid = np.array([nm])
    index = np.array([made.material(name).nk(grid) for name in names])[None]
    incident = made.window_index(window, grid)[None].astype(complex)
    outside = made.index_of(made.front.outside, grid)
    big_r, big_a = light(grid, incident, outside, index, plan.taken.nm[None])
    slacks = []
    if window.low is not None:
        slacks.append(big_r[0, 0] - window.low)
    if window.high is not None:
        slacks.append(window.high - big_r[0, 0])
    if window.absorption_at_most is not None:
        slacks.append(window.absorption_at_most - big_a[0, 0])
    return min(slacks)


def worst_of_twin(made, plan):
    """Least slack of all windows and wavelengths with the window's number."""
    worst = []
    for number, window in enumerate(made.front.windows):
        low, high = window.band_nm
        grid = np.linspace(low, high, int(np.ceil(high - low)) + 1)
        worst += [(slack_at(made, plan, window, nm), number) for nm in grid]
    return min(worst)


CASES = {
    "mirror": ({"max_layers": 4}, [{"at_least": 0.9}]),
    "two windows": (
        {"max_layers": 2},
        [{"at_most": 0.02}, {"at_least": 0.7, "band_nm": [700.0, 720.0]}],
    ),
    "absorptance": (
        {"max_layers": 1, "palette": ["X"], "layer_nm": [60.0, 100.0]},
        [{"at_most": 0.9, "absorption_at_most": 0.001}],
    ),
    "nothing lossless": ({"max_layers": 2}, [{"at_least": 1.0}]),
    "sister chip": ({"max_layers": 1}, [{"at_most": 0.1}, {"at_most": 0.001, "index": 3.9}]),
}


@pytest.mark.parametrize("name", CASES)
def test_the_miss_is_that_of_the_worst_wavelength(name):
    facet, windows = CASES[name]
    made, plan = planned(facet, *windows)
    assert not plan.meets
    short = shortfall(plan)
    slack, number = worst_of_twin(made, plan)
    assert short.miss == pytest.approx(-slack, abs=1e-12)
    assert short.miss == pytest.approx(-plan.taken.margin, abs=1e-12)
    assert short.window == number
    at_worst = slack_at(made, plan, made.front.windows[number], short.wavelength_nm)
    assert at_worst == pytest.approx(slack, abs=1e-12)
    assert abs(short.reached - short.bound) == pytest.approx(short.miss, abs=1e-12)
    assert short.quantity == ("A" if name == "absorptance" else "R")


def test_a_window_wider_by_the_miss_is_met():
    _, plan = planned({"max_layers": 4}, {"at_least": 0.9})
    miss = shortfall(plan).miss
    names = [plan.task.model.goal.films[f] for f in plan.taken.film]
    for beyond, met in ((1e-9, True), (-1e-9, False)):
        wider = recipe({"layers": []}, {"at_least": 0.9 - miss - beyond})
        assert (Twin.of(wider, names).margin(plan.taken.nm[None])[0] >= 0.0) == met


def test_more_layers_that_meet_are_found_and_do_meet():
    _, plan = planned({"max_layers": 7}, {"at_least": 0.9})
    assert not plan.meets
    more = shortfall(plan).layers_that_meet
    assert more in (8, 9)
    _, again = planned({"max_layers": more}, {"at_least": 0.9})
    assert again.taken.margin >= 0.0
    _, fewer = planned({"max_layers": more - 1}, {"at_least": 0.9})
    assert fewer.taken.margin < 0.0


def test_where_two_more_layers_do_not_meet_nothing_is_promised():
    _, plan = planned({"max_layers": 2}, {"at_least": 0.99})
    assert shortfall(plan).layers_that_meet is None


def test_given_layers_get_no_advice_on_layers():
    made = recipe({"layers": [{"material": "L", "nm": 30.0}]}, {"at_most": 0.01}, process=MAGNETRON)
    plan = plan_facets(made, sides=("front",), seed=0, workers=1)["front"]
    short = shortfall(plan)
    assert short.layers_that_meet is None
    assert short.miss == pytest.approx(-Twin.of(made, ["L"]).margin(np.array([[30.0]]))[0])
