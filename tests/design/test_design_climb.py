"""The smooth yield and its gradient, and the climb inside the limits."""

from __future__ import annotations

import numpy as np
import pytest
from design_recipes import recipe
from films_in_numpy import Twin

from coatings.design.climb import SmoothYield, climb, slack_scale
from coatings.design.plan import facet_task
from coatings.design.spread import draw_mirrored

EVERY_ERROR = {
    "run_percent": 1.2,
    "layer_percent": 1.5,
    "thickness_sigma_nm": 0.6,
    "position_percent": 0.4,
    "index": {"L": 0.01, "H": 0.02, "X": 0.02, "M": 0.01},
    "chip_index": 0.01,
}
AROUND = {"base": [{"material": "M", "nm": 11.0}], "cap": [{"material": "H", "nm": 21.0}]}
TARGET = {"reflectance": 0.08, "tolerance": 0.01, "band_nm": [940.0, 1010.0]}
CASES = {
    "target": (["L", "H"], [TARGET], EVERY_ERROR),
    "optical": (["L", "H"], [TARGET], {**EVERY_ERROR, "holds": "optical"}),
    "absorptance": (
        ["L", "X"],
        [{"at_least": 0.2, "absorption_at_most": 0.03, "band_nm": [950.0, 1000.0]}],
        EVERY_ERROR,
    ),
    "absorptance alone": (["L", "X"], [{"absorption_at_most": 0.03}], EVERY_ERROR),
    "two windows": (
        ["L", "H"],
        [TARGET, {"at_most": 0.15, "band_nm": [800.0, 820.0], "index": 3.5}],
        EVERY_ERROR,
    ),
}


def smooth_yield(name, count=64, **facet):
    palette, windows, process = CASES[name]
    facet = {"palette": palette, "max_layers": 3, "layer_nm": [10.0, 300.0], **facet}
    made = recipe({**facet, **AROUND}, *windows, process=process)
    task = facet_task(made, "front", seed=0)
    film = np.array([0, 1, 0])
    draws = draw_mirrored(
        task.errors,
        film=task.model.frame.film(film),
        count=count,
        generator=np.random.default_rng(4),
    )
    return SmoothYield(task.model, film, draws), task.limits, made


@pytest.mark.parametrize("name", CASES)
@pytest.mark.parametrize("nm", [[100.0, 20.0, 90.0], [30.0, 110.0, 200.0], [200.0, 12.0, 15.0]])
def test_the_gradient_is_that_of_central_differences(name, nm):
    smooth, _, _ = smooth_yield(name)
    nm, tau, step = np.array(nm), 0.02, 1e-4
    value, slope = smooth.gradient(nm, tau=tau)
    assert value == pytest.approx(smooth.value(nm, tau=tau), abs=1e-14)
    assert 0.0 < value < 1.0
    for j in range(3):
        by = np.eye(3)[j] * step
        difference = (smooth.value(nm + by, tau=tau) - smooth.value(nm - by, tau=tau)) / (2 * step)
        assert slope[j] == pytest.approx(difference, abs=1e-7, rel=1e-5)


def test_layers_that_vanish_in_some_draws_do_not_count_there():
    """A film that would come out below nothing is absent: its slope there is zero."""
    smooth, _, _ = smooth_yield("target")
    nm = np.array([0.5, 90.0, 60.0])
    _, slope = smooth.gradient(nm, tau=0.02)
    step = np.array([1e-5, 0.0, 0.0])
    difference = (smooth.value(nm + step, tau=0.02) - smooth.value(nm - step, tau=0.02)) / 2e-5
    assert (smooth.draws.nm(smooth.model.frame.nm(nm[None])[0])[:, 1] == 0.0).any()
    assert slope[0] == pytest.approx(difference, rel=1e-4)


def test_a_sharp_smooth_yield_is_the_share_of_the_twin():
    smooth, _, made = smooth_yield("two windows", count=200)
    twin = Twin.of(made, ["L", "H", "L"])
    draws = smooth.draws
    nm = np.array([110.0, 20.0, 60.0])
    every = np.maximum(twin.every_nm(nm[None])[0] * draws.factor + draws.offset_nm, 0.0)
    rows = smooth.model.frame.film(smooth.film)
    slack = twin.slack(every, draws.film_shift[:, rows], draws.incident_shift)
    assert smooth.slack(nm) == pytest.approx(slack, abs=1e-12)
    assert smooth.value(nm, tau=1e-9) == pytest.approx((slack >= 0).mean(), abs=1e-6)


@pytest.mark.parametrize("name", CASES)
def test_the_climb_never_ends_lower_and_keeps_the_limits(name):
    smooth, limits, _ = smooth_yield(name, total_nm=320.0)
    for start in ([100.0, 20.0, 90.0], [30.0, 110.0, 150.0]):
        nm = limits.inside(np.array([start]), film=smooth.film)[0]
        found = climb(smooth, nm, limits=limits)
        assert limits.held(found[None], film=smooth.film).all()
        tau = 0.1 * slack_scale(smooth, nm)
        assert smooth.value(found, tau=tau) >= smooth.value(nm, tau=tau) - 0.02


def test_the_climb_keeps_a_stress_limit_that_binds():
    palette, windows, process = CASES["target"]
    stress = {"stress_MPa": {"L": -300.0, "H": 100.0, "M": 0.0}, "stress_max_N_per_m": 12.0}
    made = recipe(
        {"palette": palette, "max_layers": 2, "layer_nm": [10.0, 300.0]},
        *windows,
        process={**process, **stress},
    )
    task = facet_task(made, "front", seed=0)
    film = np.array([1, 0])
    draws = draw_mirrored(task.errors, film=film, count=128, generator=np.random.default_rng(0))
    smooth = SmoothYield(task.model, film, draws)
    nm = climb(smooth, task.limits.middle(film), limits=task.limits)
    free = climb(smooth, np.array([155.0, 129.0]), limits=_without_stress(task.limits))
    assert task.limits.held(nm[None], film=film).all()
    assert not task.limits.held(free[None], film=film).any()


def _without_stress(limits):
    from dataclasses import replace

    return replace(limits, stress_room_N_per_m=None)
