"""Problems that lead a careless search astray, each against a plain scan by the slow twin."""

from __future__ import annotations

import numpy as np
import pytest
from design_recipes import recipe
from films_in_numpy import Twin

from coatings.design.plan import plan_facets

TENTH = {"decimals_nm": 1}


def planned(made):
    plan = plan_facets(made, sides=("front",), seed=0, workers=1)["front"]
    names = [plan.task.model.goal.films[f] for f in plan.taken.film]
    return plan, names, plan.taken.nm


def best_of_scan(made, names, grids, *, fine=0.1):
    """Largest margin over a grid of thicknesses, refined on ever finer grids around the best ten."""
    twin = Twin.of(made, names)
    step = grids[0][1] - grids[0][0]
    stacks = np.stack(np.meshgrid(*grids, indexing="ij"), axis=-1).reshape(-1, len(names))
    low, high = (np.array([edge(g) for g in grids]) for edge in (np.min, np.max))
    while True:
        margins = twin.margin(stacks)
        if step <= fine:
            return stacks[np.argmax(margins)], margins.max()
        leaders = stacks[np.argsort(margins)[-10:]]
        step = max(step / 4, fine)
        around = np.stack(
            np.meshgrid(*[np.arange(-5, 6) * step] * len(names), indexing="ij"), axis=-1
        ).reshape(-1, len(names))
        near = (leaders[:, None] + around[None]).reshape(-1, len(names))
        stacks = np.unique(np.round(np.clip(near, low, high), 4), axis=0)


def test_two_layers_that_beat_three():
    """With 60 nm as the thinnest layer a third layer only hurts."""
    window = {"at_most": 0.01, "band_nm": [926.0, 1026.0]}
    facet = {"palette": ["L", "H"], "max_layers": 3, "layer_nm": [60.0, 130.0]}
    made = recipe(facet, window, process=TENTH)
    grid = np.arange(60.0, 130.1, 2.0)
    two = max(best_of_scan(made, n, [grid] * 2)[1] for n in (["L", "H"], ["H", "L"]))
    coarse = np.arange(60.0, 130.1, 5.0)
    three = max(
        best_of_scan(made, n, [coarse] * 3, fine=0.5)[1] for n in (["L", "H", "L"], ["H", "L", "H"])
    )
    assert two > three + 1e-3
    plan, _, nm = planned(made)
    assert len(nm) == 2
    assert plan.taken.margin == pytest.approx(two, abs=1e-6)
    best_of_three = max(f.margin for f in plan.stacks if len(f.nm) == 3)
    assert best_of_three == pytest.approx(three, abs=2e-5)


def test_an_optimum_beyond_half_a_wave():
    """One layer that must serve two bands: the best is the second or third of the fringe orders."""
    windows = [
        {"reflectance": 0.20, "tolerance": 0.05, "band_nm": [970.0, 982.0]},
        {"at_most": 0.10, "band_nm": [800.0, 806.0]},
    ]
    facet = {"palette": ["L"], "max_layers": 1, "layer_nm": [15.0, 1000.0]}
    made = recipe(facet, *windows, process=TENTH)
    scan = np.arange(15.0, 1000.01, 0.1)
    margins = Twin.of(made, ["L"]).margin(scan[:, None])
    best = scan[np.argmax(margins)]
    assert best > 976.0 / (2 * 1.45)
    plan, _, nm = planned(made)
    assert nm[0] == pytest.approx(best, abs=0.051)
    assert plan.taken.margin == pytest.approx(margins.max(), abs=1e-9)


@pytest.mark.parametrize(("limits", "expected"), [([180.0, 300.0], 180.0), ([15.0, 150.0], 150.0)])
def test_a_thickness_at_a_bound(limits, expected):
    facet = {"palette": ["L"], "max_layers": 1, "layer_nm": limits}
    made = recipe(facet, {"at_most": 0.06}, process=TENTH)
    _, _, nm = planned(made)
    assert nm.tolist() == [expected]


def test_the_thinnest_layer_that_the_run_can_hold():
    """Free, the best stack has a layer of 2 nm; with 15 nm as the thinnest the best has one layer less."""
    window = {"reflectance": 0.05, "tolerance": 0.01, "band_nm": [940.0, 1010.0]}
    facet = {"palette": ["M", "H"], "max_layers": 2}
    free, _, thin = planned(recipe({**facet, "layer_nm": [1.0, 250.0]}, window, process=TENTH))
    assert len(thin) == 2
    assert thin.min() < 15.0
    made = recipe({**facet, "layer_nm": [15.0, 250.0]}, window, process=TENTH)
    grid = np.arange(15.0, 250.1, 5.0)
    best = max(best_of_scan(made, n, [grid] * 2)[1] for n in (["M", "H"], ["H", "M"]))
    one = max(best_of_scan(made, [n], [grid])[1] for n in ("M", "H"))
    plan, _, nm = planned(made)
    assert len(nm) == 1
    assert plan.taken.margin == pytest.approx(one, abs=6e-5)  # a tenth of a nanometre
    best_of_two = max(f.margin for f in plan.stacks if len(f.nm) == 2)
    assert best_of_two == pytest.approx(best, abs=6e-5)
    assert best < one
    assert plan.taken.margin < free.taken.margin


@pytest.mark.usefixtures("quick_search")
@pytest.mark.parametrize("decimals", [0, 1, 2])
def test_every_stack_can_be_ordered(decimals):
    process = {"method": "magnetron", "decimals_nm": decimals}
    facet = {"palette": ["L", "H"], "max_layers": 3, "layer_nm": [15.0, 300.0], "total_nm": 400.5}
    made = recipe(facet, {"at_most": 0.01}, process=process)
    plan, _, _ = planned(made)
    for each in plan.stacks:
        assert each.nm.tolist() == [round(float(nm), decimals) for nm in each.nm]
        assert each.nm.sum() <= 400.5 + 1e-9


def test_a_total_that_binds():
    """A total below the best single layer's thickness: the whole total is used."""
    facet = {"palette": ["L"], "max_layers": 1, "layer_nm": [15.0, 300.0], "total_nm": 120.0}
    _, _, nm = planned(recipe(facet, {"at_most": 0.06}, process=TENTH))
    assert nm.tolist() == [120.0]
    facet = {"palette": ["L", "H"], "max_layers": 2, "layer_nm": [15.0, 300.0], "total_nm": 120.0}
    made = recipe(facet, {"at_most": 0.06, "band_nm": [940.0, 1010.0]}, process=TENTH)
    plan, names, nm = planned(made)
    inner = np.arange(15.0, 105.05, 0.5)
    pairs = np.stack(np.meshgrid(inner, inner, indexing="ij"), axis=-1).reshape(-1, 2)
    pairs = pairs[pairs.sum(axis=1) <= 120.0 + 1e-9]
    singles = np.arange(15.0, 120.05, 0.1)[:, None]
    best = max(
        *(Twin.of(made, n).margin(pairs).max() for n in (["L", "H"], ["H", "L"])),
        *(Twin.of(made, n).margin(singles).max() for n in (["L"], ["H"])),
    )
    assert plan.taken.margin >= best - 1e-9
    assert nm.sum() <= 120.0 + 1e-9
    assert names


def test_a_mirror_finds_its_quarter_waves():
    """2N quarter waves on n0 give the textbook's R = ((n0 - ns y)/(n0 + ns y))^2, y = (nL/nH)^2N or its
    inverse; L on the chip is the higher for an outside of lower index."""
    facet = {"palette": ["L", "H"], "max_layers": 6, "layer_nm": [15.0, 400.0]}
    made = recipe(facet, {"at_least": 0.99, "band_nm": [976.0, 976.0]}, process={"decimals_nm": 4})
    plan, names, _ = planned(made)
    assert names == ["L", "H"] * 3
    y = (2.1 / 1.45) ** 6
    R = ((3.3 * y - 1.0 / 1.0) / (3.3 * y + 1.0)) ** 2
    assert plan.taken.margin == pytest.approx(R - 0.99, abs=1e-9)
