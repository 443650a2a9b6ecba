"""Limits of the run: orders of films, bounds, total, stress, the grid of ordered thicknesses."""

from __future__ import annotations

from itertools import pairwise, product

import numpy as np
import pytest
from design_recipes import recipe
from hypothesis import given
from hypothesis import strategies as st

from coatings.design.limits import MOST_ORDERS, run_limits
from coatings.design.orders import Orders

WINDOW = {"at_most": 0.1}


def limits_of(process=None, materials=None, **facet):
    facet = {"palette": ["L", "H"], "max_layers": 4, **facet}
    return run_limits(recipe(facet, WINDOW, process=process, materials=materials), "front")


def brute(palette, count, first, last):
    return [
        order
        for order in product(palette, repeat=count)
        if all(a != b for a, b in pairwise(order))
        and first in (None, order[0])
        and last in (None, order[-1])
    ]


@pytest.mark.parametrize("films", [1, 2, 3, 4])
@pytest.mark.parametrize("count", [1, 2, 3, 4, 5])
@pytest.mark.parametrize("first", [None, 0])
@pytest.mark.parametrize("last", [None, 0, 1])
def test_every_order_is_listed_and_counted(films, count, first, last):
    palette = tuple(range(films))
    expected = brute(palette, count, first, last)
    orders = Orders(palette, count, first, last)
    assert list(orders.every()) == expected
    assert orders.number() == len(expected)
    assert set(orders.in_turn()) <= set(expected)


@pytest.mark.parametrize(
    ("count", "first", "last", "number"),
    [(4, 0, 0, 0), (5, 0, 0, 1), (5, 0, 1, 0), (6, 0, 1, 1), (400, None, None, 2), (399, 1, 1, 1)],
)
def test_two_films_leave_the_parity_to_first_and_last(count, first, last, number):
    assert Orders((0, 1), count, first, last).number() == number


@given(count=st.integers(6, 80), films=st.integers(3, 9), seed=st.integers(0, 99))
def test_drawn_orders_keep_the_rules(count, films, seed):
    orders = Orders(tuple(range(films)), count, first=1, last=0)
    drawn = orders.some(12, np.random.default_rng(seed))
    assert len(drawn) == len(set(drawn)) <= 12
    for order in drawn:
        assert len(order) == count
        assert order[0] == 1
        assert order[-1] == 0
        assert all(a != b for a, b in pairwise(order))


def test_orders_of_400_layers_of_20_films_are_drawn():
    """The number of orders has hundreds of digits; the shares stay floats."""
    orders = Orders(tuple(range(20)), 400, first=1, last=0)
    assert len(str(orders.number())) > 500
    assert {len(order) for order in orders.some(3, np.random.default_rng(0))} == {400}


def test_every_order_is_drawn_as_often_as_any_other():
    orders = Orders((0, 1, 2), 4, last=2)
    rng = np.random.default_rng(5)
    ways = orders._ways()
    drawn = [orders._drawn(ways, rng) for _ in range(4000)]
    expected = brute((0, 1, 2), 4, None, 2)
    counts = np.array([drawn.count(order) for order in expected])
    mean = 4000 / len(expected)
    chi2 = float(((counts - mean) ** 2 / mean).sum())
    assert counts.sum() == 4000
    assert chi2 < len(expected) - 1 + 4 * np.sqrt(2 * (len(expected) - 1))


def test_many_orders_hold_those_of_two_films_in_turn():
    limits = limits_of(palette=["L", "M", "H"])
    found = limits.orders(12, np.random.default_rng(0))
    assert len(found) == MOST_ORDERS
    alternating = {tuple(o) for o in found if len(set(o.tolist())) == 2}
    assert len(alternating) == 6


def test_an_order_that_no_total_can_hold_is_left_out():
    limits = limits_of(
        layer_nm={"L": [20.0, 90.0], "H": [50.0, 90.0]}, total_nm=100.0, max_layers=3
    )
    rng = np.random.default_rng(0)
    assert [o.tolist() for o in limits.orders(1, rng)] == [[0], [1]]
    assert [o.tolist() for o in limits.orders(3, rng)] == [[0, 1, 0]]
    assert limits.orders(4, rng) == []


def test_bounds_are_those_of_each_material():
    limits = limits_of(layer_nm={"L": [20.0, 600.0]})
    low, high = limits.bounds(np.array([0, 1]))
    assert low == pytest.approx([20.0, 0.1])
    # without a limit the search ends at an optical thickness of 1.25 waves
    assert high == pytest.approx([600.0, 1.25 * 976.0 / 2.1])


def test_a_layer_of_nothing_is_no_layer():
    assert limits_of(layer_nm=[0.0, 300.0]).thinnest_nm == pytest.approx(0.1)
    whole = limits_of(layer_nm=[0.0, 300.0], process={"decimals_nm": 0})
    assert whole.thinnest_nm == pytest.approx(1.0)


@pytest.mark.parametrize(("index", "k"), [(0.2, 6.0), (0.5, 0.0)])
def test_a_metal_or_an_index_below_one_is_not_searched_over_micrometres(index, k):
    limits = limits_of(palette=["N"], max_layers=1, materials={"N": {"index": index, "k": k}})
    assert limits.thickest_nm[0] <= 1.25 * 976.0
    assert limits.thickest_nm[0] > 100.0


def test_starts_are_moved_under_the_total_by_thinning_all_layers_alike():
    limits = limits_of(layer_nm=[10.0, 400.0], total_nm=300.0)
    film = np.array([0, 1, 0])
    nm = np.array([[100.0, 100.0, 90.0], [400.0, 200.0, 10.0], [500.0, 5.0, 400.0]])
    moved = limits.inside(nm, film=film)
    assert moved[0] == pytest.approx(nm[0])
    assert moved[1:].sum(axis=1) == pytest.approx(300.0)
    assert (moved[1] - 10.0) / (nm[1] - 10.0 + 1e-300) == pytest.approx([270 / 580, 270 / 580, 0])
    assert limits.held(moved, film=film).all()


STRESS = {
    "stress_MPa": {"L": -300.0, "H": 200.0, "M": 50.0},
    "stress_max_N_per_m": 30.0,
}


def test_the_stress_of_base_and_cap_counts():
    limits = limits_of(
        process=STRESS,
        base=[{"material": "M", "nm": 100.0}],
        cap=[{"material": "L", "nm": 50.0}],
    )
    fixed = 50.0 * 0.1 - 300.0 * 0.05  # MPa um = N/m
    assert limits.stress_room_N_per_m == pytest.approx((-30.0 - fixed, 30.0 - fixed))
    film = np.array([0, 1])
    # -0.3 N/m a nm of L, 0.2 a nm of H
    assert limits.held(np.array([[100.0, 100.0]]), film=film).all()  # -10
    assert not limits.held(np.array([[100.0, 10.0]]), film=film).any()  # -28 below -20


def test_starts_are_moved_under_the_stress_and_stay_in_bounds():
    limits = limits_of(process=STRESS, layer_nm=[15.0, 400.0], total_nm=900.0)
    film = np.array([0, 1, 0, 1])
    nm = np.random.default_rng(2).uniform(0.0, 500.0, (300, 4))
    assert not limits.held(np.clip(nm, 15.0, 400.0), film=film).all()
    moved = limits.inside(nm, film=film)
    assert limits.held(moved, film=film).all()


def test_an_order_whose_stress_no_stack_keeps_is_left_out():
    limits = limits_of(process=STRESS, layer_nm=[101.0, 400.0])
    found = limits.orders(1, np.random.default_rng(0))
    assert [o.tolist() for o in found] == [[1]]  # 101 nm of L alone are 30.3 N/m
    assert limits.middle(np.array([0])) is None


def test_the_middle_is_inside_every_limit():
    limits = limits_of(process=STRESS, layer_nm=[15.0, 400.0], total_nm=500.0)
    for order in ([0], [0, 1], [1, 0, 1, 0]):
        film = np.array(order)
        middle = limits.middle(film)
        low, high = limits.bounds(film)
        assert limits.held(middle[None], film=film).all()
        assert (middle > low + 5.0).all()
        assert (middle < high - 5.0).all()


@pytest.mark.parametrize("decimals", [0, 1, 3])
def test_rounding_stays_on_the_grid_and_in_bounds(decimals):
    limits = limits_of(layer_nm=[15.03, 99.97], process={"decimals_nm": decimals})
    film = np.array([0, 1])
    nm = np.random.default_rng(4).uniform(10.0, 110.0, (50, 2))
    rounded = limits.rounded(nm, film=film)
    assert rounded * 10**decimals == pytest.approx(np.round(rounded * 10**decimals), abs=1e-6)
    assert limits.held(rounded, film=film).all()
    inner = (nm > 17.0) & (nm < 98.0)
    assert np.abs(rounded - nm)[inner].max() <= 0.5 * 10.0**-decimals + 1e-9
