"""Starts: the exact solutions are exact, and the published V-coat is among them."""

from __future__ import annotations

import numpy as np
import pytest
from design_recipes import recipe
from films_in_numpy import Twin

from coatings.design import starts
from coatings.design.limits import run_limits
from coatings.design.model import FacetModel, facet_frame
from coatings.design.windows import facet_goal
from coatings.facets import film_rows
from coatings.optics import response

BASE = [{"material": "M", "nm": 10.0}, {"material": "H", "nm": 7.0}]
CAP = [{"material": "L", "nm": 33.0}, {"material": "M", "nm": 5.0}]


def facet_model(made):
    return FacetModel(facet_goal(made, "front"), facet_frame(made.front))


def spot_and_model(window, around=None, **chip):
    facet = {"palette": ["L", "M", "H"], "max_layers": 5, **(around or {})}
    model = facet_model(recipe(facet, window, chip=chip))
    return starts.spots(model.goal)[0], model


def reflectance_at(spot, model, nm, film):
    scene = model.goal.at(
        np.flatnonzero(model.goal.scene.wavelength_nm == spot.wavelength_nm)[:1]
    ).scene
    return response(scene, model.frame.nm(nm), film=model.frame.film(film)).R[:, 0]


@pytest.mark.parametrize("wanted", [0.02, 0.1, 0.3, 0.6])
@pytest.mark.parametrize("around", [{}, {"base": BASE}, {"cap": CAP}, {"base": BASE, "cap": CAP}])
@pytest.mark.parametrize("names", [["L"], ["H", "L"], ["L", "H", "M", "L", "H"]])
def test_a_closed_stack_meets_its_reflectance_exactly(wanted, around, names):
    spot, model = spot_and_model({"reflectance": wanted, "tolerance": 0.005}, around)
    film = film_rows(names, model.goal.films)
    given = np.random.default_rng(8).uniform(10.0, 400.0, (60, len(names)))
    closed = starts.closed_by_first_layer(spot, model, given, film=film)
    if wanted == 0.1:
        assert len(closed) > 0
    if len(closed):
        assert reflectance_at(spot, model, closed, film) == pytest.approx(wanted, abs=1e-10)
        assert (closed[:, 0] >= 0.0).all()


def test_solutions_come_in_pairs_each_up_to_two_half_waves_thicker():
    spot, model = spot_and_model({"reflectance": 0.1, "tolerance": 0.005})
    film = film_rows(["L"], model.goal.films)
    closed = starts.closed_by_first_layer(spot, model, np.array([[50.0]]), film=film)
    half_wave = 976.0 / 2 / 1.45
    found = np.sort(closed[:, 0])
    assert len(found) == 6
    assert found[2:] - found[:-2] == pytest.approx(half_wave)
    # one layer is symmetric about its quarter wave
    assert found[0] + found[1] == pytest.approx(half_wave)


def test_no_solution_gives_no_row():
    # one lossless film of 1.45 between 3.3 and 1 keeps R between 0.0491 and 0.2861
    for wanted, solutions in ((0.04, 0), (0.06, 6), (0.28, 6), (0.29, 0)):
        spot, model = spot_and_model({"reflectance": wanted, "tolerance": 0.001})
        film = film_rows(["L"], model.goal.films)
        closed = starts.closed_by_first_layer(spot, model, np.array([[50.0]]), film=film)
        assert len(closed) == solutions


def test_the_two_layer_family_holds_the_v_coat():
    """Two layers with R = 0: the thicknesses of the textbook's V-coat (closed form, from memory),

    tan^2 d1 = (ns - n0)(n2^2 - n0 ns) n1^2 / [(n1^2 ns - n0 n2^2)(n0 ns - n1^2)] and the same with
    n1 and n2 exchanged for d2, the signs by tan d1 tan d2 = n1 n2 (ns - n0)/(n1^2 ns - n0 n2^2).
    n1 lies next to n0.
    """
    n0, n1, n2, ns, lam = 1.0, 1.45, 2.1, 3.3, 976.0
    square1 = (
        (ns - n0) * (n2**2 - n0 * ns) * n1**2 / ((n1**2 * ns - n0 * n2**2) * (n0 * ns - n1**2))
    )
    product = n1 * n2 * (ns - n0) / (n1**2 * ns - n0 * n2**2)
    outer = np.arctan(np.sqrt(square1)) * lam / (2 * np.pi * n1)
    inner = np.arctan(product / np.sqrt(square1)) % np.pi * lam / (2 * np.pi * n2)
    made = recipe(
        {"palette": ["L", "H"], "max_layers": 2}, {"reflectance": 1e-9, "tolerance": 1e-10}
    )
    assert Twin.of(
        recipe({"palette": ["L", "H"], "max_layers": 2}, {"at_most": 0.5, "band_nm": [lam, lam]}),
        ["H", "L"],
    ).margin(np.array([[inner, outer]])) == pytest.approx(0.5, abs=1e-12)
    model = facet_model(made)
    spot = starts.spots(model.goal)[0]
    film = film_rows(["H", "L"], model.goal.films)
    closed = starts.closed_by_first_layer(spot, model, np.array([[50.0, outer]]), film=film)
    assert np.abs(closed[:, 0] - inner).min() < 0.02


@pytest.mark.parametrize("index", [1.0, 3.3, 0.4])
def test_indices_that_equal_the_surroundings_raise_nothing(index):
    made = recipe(
        {"palette": ["N", "L"], "max_layers": 2},
        {"reflectance": 0.1, "tolerance": 0.01},
        materials={"N": {"index": index, "k": 0.0}},
    )
    model = facet_model(made)
    spot = starts.spots(model.goal)[0]
    for names in (["N"], ["L"], ["N", "L"], ["L", "N"]):
        film = film_rows(names, model.goal.films)
        closed = starts.closed_by_first_layer(
            spot, model, np.full((3, len(names)), 40.0), film=film
        )
        assert np.isfinite(closed).all()


def test_spots_are_the_middles_of_the_windows_on_the_reflectance():
    windows = [
        {"absorption_at_most": 0.01, "band_nm": [400.0, 410.0]},
        {"at_most": 0.02, "band_nm": [970.0, 980.0]},
        {"at_least": 0.9, "band_nm": [1000.0, 1010.0], "index": 3.5},
    ]
    model = facet_model(recipe({"palette": ["L", "H"], "max_layers": 2}, *windows))
    found = starts.spots(model.goal)
    assert [s.wavelength_nm for s in found] == [975.0, 1005.0]
    assert [s.reflectance for s in found] == pytest.approx([0.005, 0.95])
    assert [s.incident for s in found] == [3.3, 3.5]
    alone = facet_model(recipe({"palette": ["L"], "max_layers": 1}, windows[0]))
    assert [s.wavelength_nm for s in starts.spots(alone.goal)] == [405.0]


def test_quarter_waves_and_equal_thicknesses():
    spot, model = spot_and_model({"at_most": 0.02})
    film = film_rows(["L", "H", "L"], model.goal.films)
    quarter = 976.0 / 4 / np.array([1.45, 2.1, 1.45])
    rows = starts.quarter_waves(spot, film=film)
    for expected in (quarter, 3 * quarter, quarter * [1, 2, 1], quarter * [0.5, 1, 1]):
        assert np.isclose(rows, expected).all(axis=1).any()
    equal = starts.equal_thicknesses(spot, film=film, steps=5)
    optical = equal * [1.45, 2.1, 1.45] / 976.0
    assert optical == pytest.approx(np.repeat(np.linspace(0.03, 1.0, 5)[:, None], 3, axis=1))


def test_a_long_stack_is_varied_at_its_ends_only():
    spot, model = spot_and_model({"at_least": 0.9})
    film = film_rows(["L", "H"] * 200, model.goal.films)
    assert len(starts.quarter_waves(spot, film=film)) == 2 + 3 * 2 * starts.MOST_VARIED


def test_random_starts_fill_what_the_run_can_hold():
    facet = {
        "palette": ["L", "H"],
        "max_layers": 3,
        "layer_nm": {"L": [20.0, 600.0], "H": [30.0, 90.0]},
    }
    made = recipe(facet, {"at_most": 0.02})
    limits = run_limits(made, "front")
    nm = starts.random_thicknesses(
        limits, film=np.array([0, 1, 0]), count=400, generator=np.random.default_rng(1)
    )
    assert (nm >= [20.0, 30.0, 20.0]).all()
    assert (nm <= [600.0, 90.0, 600.0]).all()
    assert nm.max(axis=0) == pytest.approx([600.0, 90.0, 600.0], rel=0.02)
    assert nm.mean(axis=0) == pytest.approx([310.0, 60.0, 310.0], rel=0.1)
