"""Refinement: least squares stays inside the limits, minimax finds what an exhaustive grid finds."""

from __future__ import annotations

import numpy as np
import pytest
from design_recipes import recipe
from films_in_numpy import Twin
from scipy.optimize import minimize

from coatings.design.limits import run_limits
from coatings.design.model import FacetModel, facet_frame
from coatings.design.plan import facet_task
from coatings.design.polish import least_squares, minimax
from coatings.design.search import search_count
from coatings.design.windows import facet_goal

STRESS = {"stress_MPa": {"L": -300.0, "H": 200.0}, "stress_max_N_per_m": 25.0}


def facet_parts(made):
    return FacetModel(facet_goal(made, "front"), facet_frame(made.front)), run_limits(made, "front")


def random_nm(limits, film, count=40, seed=0):
    low, high = limits.bounds(film)
    nm = np.random.default_rng(seed).uniform(low, high, (count, len(film)))
    return limits.inside(nm, film=film)


FACET = {"palette": ["L", "H"], "max_layers": 4, "layer_nm": [15.0, 300.0], "total_nm": 600.0}
WINDOWS = {
    "target": {"reflectance": 0.08, "tolerance": 0.01, "band_nm": [940.0, 1010.0]},
    "ceiling": {"at_most": 0.01, "band_nm": [940.0, 1010.0]},
    "nothing at all": {"at_most": 0.0},
    "everything": {"at_least": 1.0},
}


@pytest.mark.parametrize("name", WINDOWS)
@pytest.mark.parametrize("process", [None, STRESS], ids=["total", "stress"])
def test_least_squares_keeps_the_limits_and_lowers_the_misses(name, process):
    model, limits = facet_parts(recipe(FACET, WINDOWS[name], process=process))
    film = np.array([0, 1, 0, 1])
    nm = random_nm(limits, film)
    better = least_squares(model, nm, film=film, limits=limits)
    assert limits.held(better, film=film).all()

    def miss(stacks):
        R, _ = model.reflectance(stacks, film=film)
        return (((R - model.goal.centre) / model.goal.width) ** 2).sum(axis=1)

    assert (miss(better) <= miss(nm)).all()
    assert np.median(miss(better)) < 0.7 * np.median(miss(nm))


def test_a_window_on_the_absorptance_alone_pulls_on_nothing_else():
    """Without a bound on R the absorptance is all that is brought down."""
    facet = {"palette": ["L", "X"], "max_layers": 2, "layer_nm": [10.0, 200.0]}
    model, limits = facet_parts(recipe(facet, {"absorption_at_most": 0.001}))
    film = np.array([0, 1])
    nm = random_nm(limits, film)
    better = least_squares(model, nm, film=film, limits=limits)
    before, after = (
        np.square(model.absorptance(stacks, film=film)[0]).sum(axis=1) for stacks in (nm, better)
    )
    assert (after <= before).all()
    thin = nm[:, 1] < 25.0  # thicker films have minima of their own
    assert better[thin, 1] == pytest.approx(10.0)


@pytest.mark.parametrize("name", WINDOWS)
@pytest.mark.parametrize("process", [None, STRESS], ids=["total", "stress"])
def test_minimax_keeps_the_limits_and_never_loses(name, process):
    model, limits = facet_parts(recipe(FACET, WINDOWS[name], process=process))
    film = np.array([1, 0, 1, 0])
    for row in random_nm(limits, film, count=8, seed=3):
        better = minimax(model, row, film=film, limits=limits)
        assert limits.held(better[None], film=film).all()
        start, end = model.margin(np.array([row, better]), film=film)
        assert end >= start


# The problems of the exhaustive grid: chip 3.3, films 1.45 and 2.1, ceiling over 60 or 300 nm.
CEILING = {"at_most": 0.02, "band_nm": [946.0, 1006.0]}
WIDE = {"at_most": 0.02, "band_nm": [850.0, 1150.0]}


def pairs_of_layers(names, index, grid, wavelength):
    """2 x 2 matrices (G^2, P, 2, 2) of two layers over every pair of thicknesses on a grid."""
    singles = []
    for name in names:
        n = index[name]
        delta = 2 * np.pi * n * grid[:, None] / wavelength
        cos, sin = np.cos(delta), np.sin(delta)
        singles.append(np.array([[cos, -1j * sin / n], [-1j * n * sin, cos]]).transpose(2, 3, 0, 1))
    both = singles[0][:, None] @ singles[1][None]
    return both.reshape(-1, len(wavelength), 2, 2)


def exhaustive(names, grid, wavelength, *, best):
    """The flattest stacks (best, L) of every combination on a grid, by multiplying out matrices."""
    index = {"L": 1.45, "H": 2.1}
    right = pairs_of_layers(names[-2:], index, grid, wavelength) @ np.array([1.0, 1.0])
    if len(names) == 2:
        worst = reflectance(right).max(axis=1)[None]
    else:
        left = pairs_of_layers(names[:2], index, grid, wavelength)
        worst = np.empty((len(left), len(right)))
        for i, matrix in enumerate(left):
            worst[i] = reflectance((matrix[None] @ right[..., None])[..., 0]).max(axis=1)
    flat = np.argpartition(worst.ravel(), best)[:best]
    inner, outer = np.unravel_index(flat, worst.shape)
    thick = np.stack(np.meshgrid(grid, grid, indexing="ij"), axis=-1).reshape(-1, 2)
    return thick[outer] if len(names) == 2 else np.hstack([thick[inner], thick[outer]])


def reflectance(field):
    B, C = field[..., 0], field[..., 1]
    return np.abs((3.3 * B - C) / (3.3 * B + C)) ** 2


def refined(twin, nm, low, high):
    found = minimize(
        lambda x: -twin.margin(x[None])[0],
        nm,
        method="Nelder-Mead",
        bounds=[(low, high)] * len(nm),
        options={"maxiter": 800, "xatol": 1e-4, "fatol": 1e-9},
    )
    return -found.fun


@pytest.mark.parametrize("first", ["L", "H"])
def test_two_layers_against_an_exhaustive_grid(first):
    last = "HL".replace(first, "")
    facet = {"palette": ["L", "H"], "max_layers": 2, "layer_nm": [10.0, 500.0], "first": first}
    made = recipe(facet, CEILING, process={"decimals_nm": 4})
    stacks = exhaustive(
        [first, last], np.arange(10.0, 501.0, 2.0), np.linspace(946, 1006, 7), best=30
    )
    twin = Twin.of(made, [first, last])
    reference = max(refined(twin, nm, 10.0, 500.0) for nm in stacks)
    found = search_count(facet_task(made, "front", seed=2), 2)[0]
    assert found.margin == pytest.approx(reference, abs=2e-6)
    assert twin.margin(found.nm[None])[0] == pytest.approx(found.margin, abs=1e-12)


@pytest.mark.slow
@pytest.mark.parametrize("first", ["L", "H"])
def test_four_layers_against_an_exhaustive_grid(first):
    last = "HL".replace(first, "")
    names = [first, last, first, last]
    facet = {"palette": ["L", "H"], "max_layers": 4, "layer_nm": [10.0, 300.0], "first": first}
    made = recipe(facet, WIDE, process={"decimals_nm": 4})
    stacks = exhaustive(names, np.arange(10.0, 301.0, 8.0), np.linspace(850, 1150, 7), best=150)
    twin = Twin.of(made, names, step_nm=5.0)
    reference = max(refined(twin, nm, 10.0, 300.0) for nm in stacks[:40])
    found = search_count(facet_task(made, "front", seed=2), 4)[0]
    assert found.margin >= reference - 1e-5
    assert Twin.of(made, names).margin(found.nm[None])[0] == pytest.approx(found.margin, abs=1e-12)
