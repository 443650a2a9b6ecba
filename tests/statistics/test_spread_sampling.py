"""Drawn chips against an independent sampler in numpy: every error term within three standard errors.

Each comparison has a control: the same test finds the difference when one error is a fifth larger.
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

sys.path.append(str(Path(__file__).parents[1] / "design"))

from design_recipes import recipe
from films_in_numpy import Twin

from coatings.design.plan import facet_task
from coatings.design.spread import (
    draw_chips,
    draw_mirrored,
    draw_runs,
    drawn_slack,
    reflectance_quantiles,
    run_errors,
    sampled_yield,
    wilson_interval,
)

INDEX = {"L": 0.02, "H": 0.05, "M": 0.0}
TERMS = {
    "run": {"run_percent": 2.0},
    "layer": {"layer_percent": 2.0},
    "offset": {"thickness_sigma_nm": 3.0},
    "position": {"position_percent": 1.5},
    "index": {"index": INDEX},
    "chip index": {"chip_index": 0.05},
    "optical": {"index": INDEX, "holds": "optical"},
    "all": {
        "run_percent": 1.0,
        "layer_percent": 1.0,
        "thickness_sigma_nm": 1.0,
        "position_percent": 0.7,
        "index": INDEX,
        "chip_index": 0.02,
        "holds": "optical",
    },
}
NAMES, NM = ["H", "L"], np.array([150.0, 115.0])
WINDOW = {"reflectance": 0.1, "tolerance": 0.01, "band_nm": [950.0, 1000.0]}
AROUND = {"base": [{"material": "M", "nm": 12.0}], "cap": [{"material": "H", "nm": 9.0}]}
CHIPS = 40_000


def made_with(process):
    return recipe({"palette": ["L", "H"], "max_layers": 2, **AROUND}, WINDOW, process=process)


def facet_slack(process, *, seed=0):
    task = facet_task(made_with(process), "front", seed=0)
    film = np.array([1, 0])
    draws = draw_chips(
        task.errors,
        film=task.model.frame.film(film),
        count=CHIPS,
        generator=np.random.default_rng(seed),
    )
    return drawn_slack(task.model, NM, film=film, draws=draws)


def twin_slack(process, *, seed=77):
    twin = Twin.of(made_with(process), NAMES, step_nm=2.0)
    every, shift, chip = twin.deposited(NM, twin.chips(runs=CHIPS, seed=seed))
    return twin.slack(every, shift, chip)


def larger(process, by):
    name = next(iter(process))
    value = process[name]
    return {
        **process,
        name: {k: by * v for k, v in value.items()} if name == "index" else by * value,
    }


def differences(one, other):
    """Differences of mean, of spread and of the share inside, in standard errors."""
    n = len(one)

    def scores(x):
        centred = x - x.mean()
        return [
            (x.mean(), x.var() / n),
            (x.var(), np.var(centred**2) / n),
            ((x >= 0).mean(), (x >= 0).var() / n),
        ]

    return [
        abs(a - b) / np.sqrt(va + vb + 1e-30)
        for (a, va), (b, vb) in zip(scores(one), scores(other), strict=True)
    ]


@pytest.mark.parametrize("name", TERMS)
def test_every_error_term_agrees_with_an_independent_sampler(name):
    process = TERMS[name]
    drawn = facet_slack(process)
    assert max(differences(drawn, twin_slack(process))) < 3.0


@pytest.mark.parametrize("name", [name for name in TERMS if name not in ("all", "optical")])
def test_an_error_that_is_larger_by_a_fifth_is_noticed(name):
    process = TERMS[name]
    assert max(differences(facet_slack(process), twin_slack(larger(process, 1.2)))) > 5.0


def test_what_the_monitor_holds_is_noticed():
    physical = {"index": INDEX}
    assert max(differences(facet_slack(physical), twin_slack({**physical, "holds": "optical"}))) > 5


def test_an_optical_monitor_holds_index_times_thickness():
    errors = run_errors(made_with({"index": INDEX, "holds": "optical"}), "front")
    film = np.array([0, 1, 1])
    draws = draw_chips(errors, film=film, count=500, generator=np.random.default_rng(0))
    films = made_with(None).front.films
    index = np.array([{"L": 1.45, "H": 2.1, "M": 1.65}[name] for name in films])
    ordered = np.array([100.0, 50.0, 80.0])
    held = draws.nm(ordered) * (index + draws.film_shift)[:, film]
    assert held == pytest.approx(np.tile(ordered * index[film], (500, 1)))


def test_what_a_run_shares_and_what_a_chip_has_alone():
    errors = run_errors(made_with(TERMS["all"]), "front")
    film = np.array([0, 1])
    draws = draw_runs(errors, film=film, runs=7, chips=5, generator=np.random.default_rng(1))
    assert len(draws) == 35
    by_run = draws.film_shift.reshape(7, 5, -1)
    assert (by_run == by_run[:, :1]).all()
    offset = draws.offset_nm.reshape(7, 5, -1)
    assert (offset == offset[:, :1]).all()
    assert len(np.unique(draws.incident_shift)) == 35
    assert len(np.unique(draws.factor[:, 0])) == 35
    # within a run the factors of two layers differ by the position alone, a common term here
    none = run_errors(
        made_with({"run_percent": 1.0, "layer_percent": 1.0, "position_percent": 0.5}), "front"
    )
    factor = draw_runs(none, film=film, runs=7, chips=5, generator=np.random.default_rng(1)).factor
    gap = (factor[:, 0] - factor[:, 1]).reshape(7, 5)
    assert gap == pytest.approx(np.tile(gap[:, :1], (1, 5)), abs=1e-12)


@pytest.mark.parametrize("holds", ["physical", "optical"])
def test_mirrored_draws_have_the_distribution_of_plain_ones(holds):
    process = {**TERMS["all"], "holds": holds, "index": {"L": 0.15, "H": 0.3, "M": 0.0}}
    errors = run_errors(made_with(process), "front")
    film = np.array([2, 1, 0])
    count = 200_000
    mirrored = draw_mirrored(errors, film=film, count=count, generator=np.random.default_rng(3))
    plain = draw_chips(errors, film=film, count=count, generator=np.random.default_rng(4))
    assert len(mirrored) == count
    for name in ("factor", "offset_nm", "film_shift", "incident_shift"):
        one, other = getattr(mirrored, name), getattr(plain, name)
        for power in (1, 2):
            a, b = one**power, other**power
            # opposite pairs: each pair counts once
            error = np.sqrt(2 * a.var(axis=0) / count + b.var(axis=0) / count)
            assert (np.abs(a.mean(axis=0) - b.mean(axis=0)) <= 3.5 * error + 1e-15).all()
    assert mirrored.offset_nm.sum(axis=0) == pytest.approx(0.0, abs=1e-6)


def test_an_odd_number_of_mirrored_draws_is_made_even():
    errors = run_errors(made_with(TERMS["all"]), "front")
    draws = draw_mirrored(errors, film=np.array([0]), count=7, generator=np.random.default_rng(0))
    assert len(draws) == 8


@pytest.mark.parametrize("name", ["run", "position", "all"])
def test_yield_and_run_yield_against_the_twin(name):
    process = TERMS[name]
    task = facet_task(made_with(process), "front", seed=0)
    found = sampled_yield(
        task.model,
        NM,
        film=np.array([1, 0]),
        errors=task.errors,
        generator=np.random.default_rng(0),
        chips=20_000,
        runs=1000,
        chips_a_run=60,
    )
    twin = Twin.of(made_with(process), NAMES, step_nm=2.0)
    chips = twin.inside(NM, twin.chips(runs=20_000, seed=5))
    share = chips.mean()
    assert abs(found.chips - share) < 3 * np.sqrt(2 * share * (1 - share) / 20_000 + 1e-9)
    runs = twin.inside(NM, twin.chips(runs=1000, chips=60, seed=6)).reshape(1000, 60)
    good = (runs.mean(axis=1) >= 0.95).mean()
    assert abs(found.runs - good) < 3 * np.sqrt(2 * good * (1 - good) / 1000 + 1e-9)
    assert found.low < found.chips < found.high
    assert found.standard_error == pytest.approx(np.sqrt(found.chips * (1 - found.chips) / 20_000))


def test_all_chips_of_a_run_share_its_fate_when_only_the_run_errs():
    task = facet_task(made_with({"run_percent": 3.0}), "front", seed=0)
    film = task.model.frame.film(np.array([1, 0]))
    draws = draw_runs(task.errors, film=film, runs=50, chips=20, generator=np.random.default_rng(0))
    slack = drawn_slack(task.model, NM, film=np.array([1, 0]), draws=draws).reshape(50, 20)
    assert (slack == slack[:, :1]).all()
    assert 0 < (slack[:, 0] >= 0).mean() < 1


def test_without_errors_the_yield_is_all_or_nothing():
    task = facet_task(made_with(None), "front", seed=0)
    for nm, inside in ((NM, task.model.margin(NM[None], film=np.array([1, 0]))[0] >= 0.0),):
        found = sampled_yield(
            task.model,
            nm,
            film=np.array([1, 0]),
            errors=task.errors,
            generator=np.random.default_rng(0),
        )
        assert (found.chips, found.standard_error) == (float(inside), 0.0)


@pytest.mark.parametrize(
    ("passed", "count", "low", "high"),
    [
        # E. B. Wilson's score interval at 95 %, worked by hand from the formula with z = 1.959964:
        # (p + z^2/2n -+ z sqrt(p(1-p)/n + z^2/4n^2)) / (1 + z^2/n)
        (0, 10, 0.0, 0.277533),  # z^2/(n + z^2) = 3.841459/13.841459
        (10, 10, 0.722467, 1.0),
        (5, 10, 0.236593, 0.763407),
        # R. G. Newcombe, Stat. Med. 17, 857 (1998), table I (from memory): 81 of 263, 15 of 148
        (81, 263, 0.2553, 0.3662),
        (15, 148, 0.0624, 0.1605),
        (1, 29, 0.0061, 0.1718),
    ],
)
def test_wilson_intervals_by_hand_and_as_published(passed, count, low, high):
    assert wilson_interval(passed, count) == pytest.approx((low, high), abs=5e-5)


def test_quantiles_of_the_curve_against_the_twin():
    process = TERMS["all"]
    task = facet_task(made_with(process), "front", seed=0)
    frame = task.model.frame
    film = frame.film(np.array([1, 0]))
    ordered = frame.nm(NM[None])[0]
    draws = draw_chips(task.errors, film=film, count=20_000, generator=np.random.default_rng(2))
    light = task.model.goal.at(np.array([0, 25])).light
    levels = (0.05, 0.5, 0.95)
    found = reflectance_quantiles(light, ordered, film=film, draws=draws, quantiles=levels)
    for column, nm in enumerate((950.0, 975.0)):
        window = {"between": [0.0, 0.999], "band_nm": [nm, nm]}
        made = recipe({"palette": ["L", "H"], "max_layers": 2, **AROUND}, window, process=process)
        twin = Twin.of(made, NAMES)
        big_r = 0.999 - twin.slack(*twin.deposited(NM, twin.chips(runs=20_000, seed=8)))
        for row, level in enumerate(levels):
            below = (big_r <= found[row, column]).mean()
            assert abs(below - level) < 3 * np.sqrt(2 * level * (1 - level) / 20_000)


def test_a_film_that_would_come_out_below_nothing_is_absent():
    errors = run_errors(made_with({"thickness_sigma_nm": 100.0}), "front")
    draws = draw_chips(errors, film=np.array([0]), count=1000, generator=np.random.default_rng(0))
    nm = draws.nm(np.array([20.0]))
    assert nm.min() == 0.0
    assert 0.3 < (nm == 0.0).mean() < 0.5
