"""The plan of a facet: shortlist, order, choice, and the same answer whoever computes it."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from design_recipes import recipe
from films_in_numpy import Twin

from coatings.design.counts import CLOSE_COUNT, EVERY_COUNT, count_steps, is_enough
from coatings.design.plan import choose, facet_task, plan_facets, ranked, take
from coatings.design.search import APART_WAVES, Found
from coatings.design.spread import Yield
from coatings.errors import InputError

ERRORS = {"method": "ion-assisted", "position_percent": 0.3}
TARGET = {"reflectance": 0.10, "tolerance": 0.01, "band_nm": [940.0, 1010.0]}
FACET = {"palette": ["L", "H"], "max_layers": 3, "layer_nm": [15.0, 400.0]}
INDEX = {"L": 1.45, "M": 1.65, "H": 2.1}


@pytest.fixture(scope="module")
def front():
    made = recipe(FACET, TARGET, process=ERRORS)
    return made, plan_facets(made, sides=("front",), seed=1, workers=1)["front"]


def found(share, count, nm, margin=0.0, error=0.001):
    return Found(
        film=np.arange(count) % 2,
        nm=np.full(count, nm / count),
        margin=margin,
        yields=Yield(share, error, share, share, share),
    )


def task_with(process):
    return facet_task(recipe(FACET, TARGET, process=process), "front", seed=0)


def chosen(*stacks, process=ERRORS):
    task = task_with(process)
    best_first = ranked(list(stacks), by_margin=task.errors.none)
    return best_first[choose(best_first, task)]


def test_the_highest_yield_is_chosen():
    high, low = found(0.95, 4, 500.0), found(0.90, 1, 100.0)
    assert chosen(low, high) is high


def test_within_one_standard_error_fewer_layers_are_chosen():
    best, near, far = found(0.95, 4, 500.0), found(0.9495, 3, 900.0), found(0.9485, 2, 200.0)
    assert chosen(best, near, far) is near


def test_then_less_thickness():
    best, thick, thin = found(0.95, 3, 500.0), found(0.9497, 2, 300.0), found(0.9495, 2, 250.0)
    assert chosen(best, thick, thin) is thin


def test_by_margin_when_nothing_passes():
    stacks = [found(0.0, 1, 90.0, -0.03), found(0.0, 4, 500.0, -0.01), found(0.0, 2, 80.0, -0.02)]
    assert chosen(*stacks) is stacks[1]


def test_by_margin_when_nothing_errs():
    stacks = [
        found(1.0, 1, 90.0, 0.01, 0.0),
        found(1.0, 4, 500.0, 0.03, 0.0),
        found(0.0, 2, 80.0, -1.0, 0.0),
    ]
    assert chosen(*stacks, process=None) is stacks[1]
    order = ranked(stacks, by_margin=True)
    assert [f.margin for f in order] == [0.03, 0.01, -1.0]


def test_equal_yields_are_ordered_by_margin():
    stacks = [found(0.9, 1, 90.0, 0.001), found(0.9, 2, 90.0, 0.004), found(0.95, 3, 90.0, 0.0)]
    assert [len(f.nm) for f in ranked(stacks, by_margin=False)] == [3, 2, 1]


def test_the_shortlist_holds_every_layer_count_sorted_by_yield(front):
    _, plan = front
    assert {len(f.nm) for f in plan.stacks} == {1, 2, 3}
    shares = [f.yields.chips for f in plan.stacks]
    assert shares == sorted(shares, reverse=True)
    assert plan.searched
    assert not plan.cut_short
    assert plan.meets == (plan.taken.margin >= 0.0)


def test_second_designs_of_a_layer_count_are_truly_different(front):
    _, plan = front
    for count in (1, 2, 3):
        designs = [f for f in plan.stacks if len(f.nm) == count]
        assert len(designs) <= 2
        if len(designs) == 2:
            one, other = designs
            same_films = (one.film == other.film).all()
            index = np.array([INDEX[plan.task.model.goal.films[f]] for f in one.film])
            apart = np.abs(one.nm - other.nm) * index / 976.0
            assert not same_films or apart.max() >= APART_WAVES - 1e-3


def test_every_listed_stack_keeps_the_limits_and_is_ordered_to_a_tenth(front):
    _, plan = front
    for each in plan.stacks:
        assert ((each.nm >= 15.0) & (each.nm <= 400.0)).all()
        assert each.nm * 10 == pytest.approx(np.round(each.nm * 10), abs=1e-6)
        assert (each.film[1:] != each.film[:-1]).all()


def test_claimed_margins_and_yields_agree_with_the_twin(front):
    made, plan = front
    for each in plan.stacks:
        twin = Twin.of(made, [plan.task.model.goal.films[f] for f in each.film])
        assert twin.margin(each.nm[None])[0] == pytest.approx(each.margin, abs=1e-12)
        share = twin.inside(each.nm, twin.chips(runs=30_000, seed=11)).mean()
        error = np.hypot(each.yields.standard_error, np.sqrt(share * (1 - share) / 30_000))
        assert abs(share - each.yields.chips) < 3 * error
        assert each.yields.low <= each.yields.chips <= each.yields.high


def test_a_wrong_error_would_be_noticed(front):
    """The control of the test above: an index error that is twice as large is seen in a yield."""
    _, plan = front
    more = recipe(FACET, TARGET, process={**ERRORS, "index": {"L": 0.02, "H": 0.02}})
    gaps = []
    for each in plan.stacks:
        twin = Twin.of(more, [plan.task.model.goal.films[f] for f in each.film])
        share = twin.inside(each.nm, twin.chips(runs=30_000, seed=11)).mean()
        error = np.hypot(each.yields.standard_error, np.sqrt(share * (1 - share) / 30_000))
        gaps.append(abs(share - each.yields.chips) / error)
    assert max(gaps) > 6


def fingerprint(plans):
    return {
        side: [
            (f.film.tobytes(), f.nm.tobytes(), f.margin, f.yields.chips, f.yields.runs)
            for f in plan.stacks
        ]
        + [plan.chosen]
        for side, plan in plans.items()
    }


@pytest.mark.usefixtures("quick_search")
def test_the_same_bits_on_a_rerun_and_others_from_another_seed():
    made = recipe(FACET, TARGET, process=ERRORS)
    first, again, other = (
        fingerprint(plan_facets(made, sides=("front",), seed=seed, workers=1)) for seed in (1, 1, 2)
    )
    assert again == first
    assert other != first


@pytest.mark.slow
@pytest.mark.parametrize("workers", [2, 3])
def test_the_same_bits_whatever_the_workers(front, workers):
    made, plan = front
    shared = plan_facets(made, sides=("front",), seed=1, workers=workers)
    assert fingerprint(shared) == fingerprint({"front": plan})


@pytest.mark.usefixtures("quick_search")
def test_an_interrupt_keeps_the_best_so_far():
    made = recipe(FACET, TARGET, process=ERRORS)

    def progress(side, count, best):
        if count == 2:
            raise KeyboardInterrupt

    plan = plan_facets(made, sides=("front",), seed=1, workers=1, progress=progress)["front"]
    assert plan.cut_short
    assert {len(f.nm) for f in plan.stacks} == {3, 2}  # long ones are searched first


def test_an_interrupt_before_the_first_stack_is_said():
    made = recipe(
        {**FACET, "layer_nm": [100.3, 100.7]}, TARGET, process={**ERRORS, "decimals_nm": 0}
    )

    def progress(side, count, best):
        raise KeyboardInterrupt

    with pytest.raises(InputError, match="stopped before the first stack was found"):
        plan_facets(made, sides=("front",), seed=1, workers=1, progress=progress)


def test_limits_that_leave_no_stack_are_said():
    made = recipe(
        {**FACET, "layer_nm": [100.3, 100.7]}, TARGET, process={**ERRORS, "decimals_nm": 0}
    )
    with pytest.raises(InputError, match="no stack fits the limits of the run"):
        plan_facets(made, sides=("front",), seed=1, workers=1)


def test_given_layers_are_judged_as_they_are():
    layers = [{"material": "H", "nm": 155.8}, {"material": "L", "nm": 129.1}]
    made = recipe({"layers": layers}, TARGET, process=ERRORS)
    plan = plan_facets(made, sides=("front",), seed=1, workers=1)["front"]
    assert not plan.searched
    assert len(plan.stacks) == 1
    assert plan.taken.nm.tolist() == [155.8, 129.1]
    assert plan.stack(plan.taken).materials == ("H", "L")
    twin = Twin.of(made, ["H", "L"])
    share = twin.inside(plan.taken.nm, twin.chips(runs=30_000)).mean()
    assert plan.taken.yields.chips == pytest.approx(share, abs=0.003)


@pytest.mark.parametrize("keys", [{"layers": []}, {"base": [{"material": "L", "nm": 168.0}]}, {}])
def test_facets_without_searched_layers_are_judged(keys):
    made = recipe({**keys}, {"at_most": 0.4}, process=ERRORS)
    plan = plan_facets(made, sides=("front",), seed=1, workers=1)["front"]
    assert len(plan.taken.nm) == 0
    assert plan.taken.margin == pytest.approx(
        Twin.of(made, []).margin(np.empty((1, 0)))[0], abs=1e-12
    )


def test_another_stack_can_be_taken(front):
    _, plan = front
    other = take(plan, len(plan.stacks) - 1)
    assert other.taken is plan.stacks[-1]
    with pytest.raises(InputError, match="--take: is 99; front has stacks 0 to"):
        take(plan, 99)
    with pytest.raises(InputError, match="--take: is -1"):
        take(plan, -1)


@pytest.mark.parametrize("most", [1, 2, 15, 16, 17, 18, 22, 40, 41, 42, 43, 57, 123, 399, 400])
def test_layer_counts_rise_to_the_last_without_repeats(most):
    steps = count_steps(most)
    counts = [count for step in steps for count in step]
    assert counts == sorted(set(counts))
    assert counts[-1] == most
    assert counts[: min(most, CLOSE_COUNT)] == list(range(1, min(most, CLOSE_COUNT) + 1))
    assert steps[0] == list(range(1, min(most, EVERY_COUNT) + 1))
    assert len(counts) <= CLOSE_COUNT + 60


def test_more_layers_are_of_no_use_once_every_chip_passes():
    task = task_with(ERRORS)
    assert not is_enough(task, [[found(0.9999, 12, 500.0, 0.004)]])
    assert is_enough(task, [[found(1.0, 12, 500.0, 0.004)]])
    assert not is_enough(task_with(None), [[found(1.0, 12, 500.0, 0.004)]])


def test_more_layers_are_of_no_use_once_two_steps_have_brought_nothing():
    task = task_with(ERRORS)
    first, gain, none = [found(0.5, 8, 1.0)], [found(0.6, 17, 1.0)], [found(0.505, 21, 1.0)]
    assert not is_enough(task, [first, gain])
    assert not is_enough(task, [first, none])
    assert not is_enough(task, [first, none, gain])
    assert is_enough(task, [first, none, none])
    # the margin counts as well: a window of 0.01
    better = [found(0.0, 17, 1.0, 0.002)]
    assert not is_enough(task, [first, better, [found(0.0, 21, 1.0, 0.004)]])


@pytest.mark.usefixtures("quick_search")
def test_a_mirror_is_searched_no_further_than_it_is_useful():
    facet = {**FACET, "max_layers": 60}
    made = recipe(
        facet, {"at_least": 0.97, "band_nm": [955.0, 997.0]}, process={"method": "magnetron"}
    )
    plan = plan_facets(made, sides=("front",), seed=0, workers=1)["front"]
    counts = {len(f.nm) for f in plan.stacks}
    assert counts == set(range(1, EVERY_COUNT + 1))
    assert plan.taken.yields.chips > 0.999
    assert replace(plan, chosen=0).taken is plan.stacks[0]
