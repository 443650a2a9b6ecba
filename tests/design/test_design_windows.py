"""Windows as constraints: grids, bounds, slacks and margins against the slow twin."""

from __future__ import annotations

import numpy as np
import pytest
from design_recipes import recipe
from films_in_numpy import Twin
from hypothesis import given
from hypothesis import strategies as st

from coatings.curve import window_margins
from coatings.design.model import FacetModel, facet_frame
from coatings.design.windows import LEAST_WIDTH, facet_goal, window_grid_nm
from coatings.facets import film_rows
from coatings.stack import Stack

PALETTE = {"palette": ["L", "H"], "max_layers": 4}
BAND = {"band_nm": [950.0, 1000.5]}
CASES = {
    "target": ([{"reflectance": 0.05, "tolerance": 0.01}], {}),
    "between": ([{"between": [0.2, 0.5], **BAND}], {}),
    "ceiling": ([{"at_most": 0.1, **BAND}], {}),
    "floor": ([{"at_least": 0.1}], {}),
    "absorptance alone": ([{"absorption_at_most": 0.02}], {}),
    "floor and absorptance": ([{"at_least": 0.3, "absorption_at_most": 0.02, **BAND}], {}),
    "point": ([{"at_most": 0.1, "band_nm": [976.0, 976.0]}], {}),
    "far from the chip's band": (
        [{"at_most": 0.1}, {"at_least": 0.02, "band_nm": [500.0, 530.0]}],
        {},
    ),
    "sister chip": ([{"at_most": 0.1}, {"at_most": 0.1, "index": 3.6}], {"group_index": 3.8}),
    "overlapping": ([{"at_most": 0.1}, {"at_least": 0.02, "band_nm": [970.0, 1100.0]}], {}),
}
NAMES = ["X", "L", "H"]
NM = np.array([[12.0, 150.0, 80.0], [30.0, 0.0, 200.0], [0.0, 0.0, 0.0], [90.0, 300.0, 410.0]])


def facet_model(made):
    return FacetModel(facet_goal(made, "front"), facet_frame(made.front))


@pytest.mark.parametrize("name", CASES)
@pytest.mark.parametrize("around", [False, True], ids=["plain", "base and cap"])
def test_margins_are_those_of_the_twin(name, around):
    windows, chip = CASES[name]
    facet = {"palette": ["L", "H", "X"], "max_layers": 4}
    if around:
        facet["base"] = [{"material": "M", "nm": 10.0}, {"material": "X", "nm": 4.0}]
        facet["cap"] = [{"material": "M", "nm": 25.0}]
    made = recipe(facet, *windows, chip=chip)
    model = facet_model(made)
    margin = model.margin(NM, film=film_rows(NAMES, model.goal.films))
    assert margin == pytest.approx(Twin.of(made, NAMES).margin(NM), abs=1e-12)


def test_slack_under_index_errors_is_that_of_the_twin():
    made = recipe(
        {"palette": ["L", "H", "X"], "max_layers": 4},
        {"at_most": 0.3, "absorption_at_most": 0.05},
        {"at_least": 0.01, "index": 3.5},
    )
    model, twin = facet_model(made), Twin.of(made, NAMES)
    rng = np.random.default_rng(3)
    by_film, chip = rng.normal(scale=0.05, size=(4, 3)), rng.normal(scale=0.05, size=4)
    rows = film_rows(NAMES, model.goal.films)
    slack = model.goal.slack(NM, film=rows, film_shift=by_film, incident_shift=chip)
    assert slack.min(axis=1) == pytest.approx(twin.slack(NM, by_film[:, rows], chip), abs=1e-12)


def test_each_window_has_its_own_margin_and_worst_wavelength():
    windows = [{"between": [0.02, 0.3]}, {"at_most": 0.2, "band_nm": [800.0, 850.0]}]
    stack = Stack.of(["L", "H"], [150.0, 90.0])
    both = window_margins(recipe(PALETTE, *windows), "front", stack)
    for window, each in zip(windows, both, strict=True):
        alone = recipe(PALETTE, window)
        twin = Twin.of(alone, ["L", "H"])
        assert each.margin == pytest.approx(twin.margin(np.array([stack.nm]))[0], abs=1e-12)
        low, high = each.window.band_nm
        assert low <= each.worst_nm <= high
        there = recipe(PALETTE, {**window, "band_nm": [each.worst_nm, each.worst_nm]})
        at_worst = Twin.of(there, ["L", "H"]).margin(np.array([stack.nm]))[0]
        assert at_worst == pytest.approx(each.margin, abs=1e-12)


@given(low=st.floats(200.0, 3000.0), width=st.floats(0.0, 300.0))
def test_grid_holds_both_ends_and_is_no_coarser_than_one_nm(low, width):
    grid = window_grid_nm((low, low + width))
    assert grid[0] == low
    assert grid[-1] == low + width
    if low + width > low:
        steps = np.diff(grid)
        assert steps.max() <= 1.0 + 1e-6
        assert steps.min() > 0.0
        assert len(grid) <= np.ceil(width) + 2
    else:
        assert len(grid) == 1


def test_grid_of_whole_nanometres_has_steps_of_one():
    assert window_grid_nm((955.0, 997.0)) == pytest.approx(np.arange(955.0, 998.0))


@pytest.mark.parametrize(
    ("window", "constraints"),
    [
        ({"reflectance": 0.05, "tolerance": 0.01}, 2),
        ({"reflectance": 0.01, "tolerance": 0.02}, 1),
        ({"between": [0.0, 0.2]}, 1),
        ({"between": [0.2, 1.0]}, 1),
        ({"at_most": 0.0}, 1),
        ({"at_least": 1.0}, 1),
        ({"at_least": 0.5, "absorption_at_most": 0.1}, 2),
        ({"at_least": 0.5, "absorption_at_most": 1.0}, 1),
    ],
)
def test_bounds_that_cannot_be_missed_make_no_constraint(window, constraints):
    goal = facet_goal(recipe(PALETTE, {**window, "band_nm": [976.0, 976.0]}), "front")
    assert len(goal.constraints.bound) == constraints


@pytest.mark.parametrize(
    ("window", "centre", "width", "bounded"),
    [
        ({"reflectance": 0.05, "tolerance": 0.01}, 0.05, 0.01, True),
        ({"at_most": 0.02}, 0.0, 0.02, True),
        ({"at_least": 0.97}, 1.0, 0.03, True),
        ({"at_least": 1.0}, 1.0, LEAST_WIDTH, True),
        ({"at_most": 0.0}, 0.0, LEAST_WIDTH, True),
        ({"absorption_at_most": 0.02}, 0.5, 1.0, False),
    ],
)
def test_centres_and_widths(window, centre, width, bounded):
    goal = facet_goal(recipe(PALETTE, window), "front")
    assert goal.centre == pytest.approx(centre)
    assert goal.width == pytest.approx(width)
    assert (goal.bounded == bounded).all()


def test_a_thinned_goal_keeps_the_ends_of_every_window():
    goal = facet_goal(recipe(PALETTE, {"at_most": 0.1}, {"at_most": 0.2, **BAND}), "front")
    thin = goal.thinned(7)
    for number, band in enumerate([(964.0, 988.0), (950.0, 1000.5)]):
        nm = thin.scene.wavelength_nm[thin.window == number]
        assert len(nm) == 7
        assert (nm[0], nm[-1]) == band
    assert facet_goal(recipe(PALETTE, {"at_most": 0.1}), "front").thinned(99).scene.points == 25


def test_a_selection_of_points_has_the_slack_of_those_points():
    made = recipe(PALETTE, {"between": [0.01, 0.1]})
    goal = facet_goal(made, "front")
    points = np.array([20, 3, 3, 11])
    film = film_rows(["L", "H"], goal.films)
    nm = np.array([[120.0, 60.0]])
    whole = goal.slack(nm, film=film).reshape(2, 25)
    assert goal.at(points).slack(nm, film=film) == pytest.approx(whole[:, points].reshape(1, -1))
