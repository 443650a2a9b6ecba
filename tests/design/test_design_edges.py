"""Recipes at the edges of what can be asked: no warning, no nan, every limit kept."""

from __future__ import annotations

import numpy as np
import pytest
from design_recipes import recipe
from films_in_numpy import Twin

from coatings.design.plan import facet_task, plan_facets
from coatings.design.relax import shortfall
from coatings.design.search import _starts, search_count

ION = {"method": "ion-assisted"}
HUGE = {
    "run_percent": 50.0,
    "layer_percent": 50.0,
    "thickness_sigma_nm": 100.0,
    "position_percent": 50.0,
    "index": {"L": 1.0, "H": 1.0},
    "chip_index": 1.0,
}
STRESS = {**ION, "stress_MPa": {"L": -300.0, "H": 200.0}, "stress_max_N_per_m": 5.0}
TWO = {"palette": ["L", "H"], "max_layers": 2, "layer_nm": [15.0, 300.0]}
ONE = {"palette": ["L"], "max_layers": 1, "layer_nm": [15.0, 300.0]}
METAL = {"Au": {"index": 0.2, "k": 6.2}}
AR = {"at_most": 0.02, "band_nm": [960.0, 992.0]}

CASES = {
    "one film": (ONE, [AR], ION, {}),
    "one film of several layers": ({**ONE, "max_layers": 3}, [AR], ION, {}),
    "first and last alike": ({**TWO, "max_layers": 3, "first": "H", "last": "H"}, [AR], ION, {}),
    "first and last alike, even": ({**TWO, "first": "H", "last": "H"}, [AR], ION, {}),
    "equal limits": ({**TWO, "layer_nm": [120.0, 120.0]}, [AR], ION, {}),
    "total just enough": ({**TWO, "layer_nm": [40.0, 300.0], "total_nm": 80.0}, [AR], ION, {}),
    "total of one layer": ({**TWO, "layer_nm": [40.0, 300.0], "total_nm": 79.0}, [AR], ION, {}),
    "no limits": ({"palette": ["L", "H"], "max_layers": 2}, [AR], ION, {}),
    "one wavelength": (TWO, [{"at_most": 0.001, "band_nm": [976.0, 976.0]}], ION, {}),
    "window far away": (
        TWO,
        [{"at_most": 0.1}, {"at_most": 0.2, "band_nm": [400.0, 410.0]}],
        ION,
        {},
    ),
    "sister chip": (TWO, [AR, {"at_most": 0.02, "index": 3.6}], ION, {}),
    "a million to one": (TWO, [{"at_most": 1e-6}], ION, {}),
    "nothing at all": (TWO, [{"at_most": 0.0}], ION, {}),
    "everything": (TWO, [{"at_least": 1.0}], ION, {}),
    "contradiction": (TWO, [{"at_most": 0.1}, {"at_least": 0.2}], ION, {}),
    "nearly no width": (TWO, [{"reflectance": 0.1, "tolerance": 1e-9}], ION, {}),
    "absorptance alone": ({**TWO, "palette": ["L", "X"]}, [{"absorption_at_most": 0.01}], ION, {}),
    "absorptance of nothing": (TWO, [{"absorption_at_most": 0.0, "at_most": 0.2}], ION, {}),
    "a metal": (
        {"palette": ["L", "Au"], "max_layers": 3, "layer_nm": [5.0, 200.0]},
        [{"at_least": 0.97}],
        ION,
        {"materials": METAL},
    ),
    "a metal without limits": (
        {"palette": ["Au", "L"], "max_layers": 2},
        [{"at_least": 0.9, "absorption_at_most": 0.1}],
        ION,
        {"materials": METAL},
    ),
    "a film that swallows all": (
        {"palette": ["B", "L"], "max_layers": 2, "layer_nm": [5.0, 5000.0]},
        [{"at_most": 0.5}],
        ION,
        {"materials": {"B": {"index": 3.0, "k": 5.0}}},
    ),
    "an index below one": (
        {"palette": ["N", "H"], "max_layers": 2},
        [AR],
        ION,
        {"materials": {"N": {"index": 0.4, "k": 0.0}}},
    ),
    "the chip's own index": (
        {"palette": ["N", "L"], "max_layers": 2},
        [AR],
        ION,
        {"materials": {"N": {"index": 3.3, "k": 0.0}}},
    ),
    "the index of air": (
        {"palette": ["N", "L"], "max_layers": 2},
        [AR],
        ION,
        {"materials": {"N": {"index": 1.0, "k": 0.0}}},
    ),
    "films of one index": (
        {"palette": ["L", "N"], "max_layers": 2},
        [AR],
        ION,
        {"materials": {"N": {"index": 1.45, "k": 0.0}}},
    ),
    "no errors": (TWO, [AR], None, {}),
    "huge errors": (TWO, [AR], HUGE, {}),
    "huge errors with an optical monitor": (TWO, [AR], {**HUGE, "holds": "optical"}, {}),
    "errors of the chip alone": (TWO, [AR], {"chip_index": 0.01}, {}),
    "stress that binds": (TWO, [AR], STRESS, {}),
    "base and cap": (
        {**TWO, "base": [{"material": "M", "nm": 10.0}], "cap": [{"material": "L", "nm": 20.0}]},
        [AR],
        ION,
        {},
    ),
    "immersed": ({**TWO, "outside": 1.45}, [AR], ION, {}),
    "immersed in the film": ({**ONE, "outside": 1.45}, [AR], ION, {}),
    "far infrared": (
        TWO,
        [{"at_most": 0.2}],
        ION,
        {"chip": {"wavelength_nm": 9000.0, "band_nm": [8950.0, 9050.0]}},
    ),
}


def assert_sound(made, plan):
    for each in plan.stacks:
        figures = [each.margin, *vars(each.yields).values(), *each.nm]
        assert np.isfinite(figures).all()
        assert plan.task.limits.held(each.nm[None], film=each.film)[0]
        assert (each.film[1:] != each.film[:-1]).all()
        y = each.yields
        assert 0.0 <= y.low <= y.chips <= y.high <= 1.0
        names = [plan.task.model.goal.films[f] for f in each.film]
        twin = Twin.of(made, names).margin(each.nm[None])[0]
        assert each.margin == pytest.approx(twin, abs=1e-9)
    if not plan.meets:
        short = shortfall(plan)
        assert short.miss > 0.0
        assert np.isfinite([short.miss, short.bound, short.reached, short.wavelength_nm]).all()


@pytest.mark.usefixtures("quick_search")
@pytest.mark.parametrize("name", CASES)
def test_nothing_breaks(name):
    facet, windows, process, others = CASES[name]
    made = recipe(facet, *windows, process=process, **others)
    plan = plan_facets(made, sides=("front",), seed=0, workers=1)["front"]
    assert_sound(made, plan)
    EXPECTED.get(name, lambda _: None)(plan)


def one_layer_only(plan):
    assert {len(f.nm) for f in plan.stacks} == {1}


def all_equal(nm):
    def check(plan):
        assert all((f.nm == nm).all() for f in plan.stacks)

    return check


def odd_only(plan):
    assert {len(f.nm) for f in plan.stacks} <= {1, 3}
    assert all(f.film[0] == f.film[-1] == 1 for f in plan.stacks)


def opaque_metal(plan):
    """An opaque metal under a film: about 0.97 for gold on this chip."""
    films = plan.task.model.goal.films
    assert "Au" in [films[f] for f in plan.taken.film]


EXPECTED = {
    "one film": one_layer_only,
    "one film of several layers": one_layer_only,
    "first and last alike": odd_only,
    "first and last alike, even": odd_only,
    "equal limits": all_equal(120.0),
    "total of one layer": one_layer_only,
    "a metal": opaque_metal,
}


def test_the_contradiction_is_split_in_half():
    """At most 0.1 and at least 0.2 on one band: the nearest stack misses both by half."""
    facet, windows, process, _ = CASES["contradiction"]
    facet = {**facet, "max_layers": 2}
    made = recipe(facet, *windows, process={**process, "decimals_nm": 4})
    plan = plan_facets(made, sides=("front",), seed=0, workers=1)["front"]
    assert plan.taken.margin == pytest.approx(-0.05, abs=0.002)


@pytest.mark.parametrize(
    "facet",
    [
        {"layers": [{"material": "H", "nm": 100.0}, {"material": "H", "nm": 20.0}]},
        {"base": [{"material": "L", "nm": 100.0}]},
        {"cap": [{"material": "L", "nm": 100.0}]},
        {
            "layers": [],
            "base": [{"material": "X", "nm": 5.0}],
            "cap": [{"material": "L", "nm": 50.0}],
        },
        {},
    ],
)
@pytest.mark.parametrize("process", [None, ION, HUGE], ids=["none", "ion", "huge"])
def test_facets_that_are_given(facet, process):
    made = recipe(facet, {"at_most": 0.3}, process=process)
    plan = plan_facets(made, sides=("front",), seed=0, workers=1)["front"]
    each = plan.taken
    assert np.isfinite([each.margin, *vars(each.yields).values()]).all()
    names = [entry.material for entry in made.front.layers or ()]
    assert each.margin == pytest.approx(
        Twin.of(made, names).margin(each.nm.reshape(1, -1))[0], abs=1e-12
    )


@pytest.mark.slow
def test_four_films_do_not_explode():
    palette = ["L", "M", "H", "N"]
    facet = {"palette": palette, "max_layers": 12, "layer_nm": [15.0, 400.0]}
    made = recipe(facet, {"at_least": 0.95}, process=ION, materials={"N": {"index": 1.9, "k": 0.0}})
    plan = plan_facets(made, sides=("front",), seed=0, workers=2)["front"]
    assert_sound(made, plan)
    assert plan.taken.yields.chips > 0.99


@pytest.mark.usefixtures("quick_search")
def test_only_facets_with_windows_are_planned():
    made = recipe(ONE, AR, process=ION)
    assert set(plan_facets(made, seed=0, workers=1)) == {"front"}


@pytest.mark.slow
def test_hundreds_of_layers_need_bounded_memory_and_time():
    """The Jacobians of all starts are what grows: layers squared times starts, some 100 MB here."""
    facet = {"palette": ["L", "H"], "max_layers": 400, "layer_nm": [15.0, 400.0]}
    made = recipe(facet, {"at_least": 0.9999}, process=ION)
    task = facet_task(made, "front", seed=0)
    starts = _starts(
        task, task.limits.orders(200, np.random.default_rng(0))[0], 32, np.random.default_rng(0)
    )
    assert len(starts) < 150
    found = search_count(task, 80)
    assert found[0].margin > 0.0
