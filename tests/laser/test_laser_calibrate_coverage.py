"""Intervals of the calibration hold the truth as often as they say."""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest
from uncoated_chips import BARE, a_truth, kind, perfect_chips, scattered_chips

from coatings.laser import Calibration, FacetLight, GainLaw, calibrate

RUNS = 1200
SIX = (500.0, 900.0, 1600.0) * 2


@cache
def runs(lengths: tuple[float, ...], R_sigma: float) -> list[tuple[np.ndarray, Calibration]]:
    """Calibrations with their truths, drawn from a spread of chips, laws, and bare facets."""
    rng = np.random.default_rng(20)
    found = []
    for run in range(RUNS):
        law = list(GainLaw)[run % 2]
        truth = a_truth(rng)
        bare = FacetLight.lossless(BARE.R + R_sigma * rng.standard_normal())
        perfect = perfect_chips(truth, list(lengths), bare=bare, law=law)
        chips = scattered_chips(perfect, rng, slope=0.015, threshold=0.02)
        found.append((truth.row(), calibrate(chips, kind(gain_law=law, R_sigma=R_sigma))))
    return found


def coverage(found: list[tuple[np.ndarray, Calibration]]) -> np.ndarray:
    inside = [
        [each.low <= value <= each.high for each, value in zip(fit.quantities, truth, strict=True)]
        for truth, fit in found
    ]
    return np.mean(inside, axis=0)


@pytest.mark.slow
@pytest.mark.parametrize(
    ("lengths", "R_sigma"),
    [((600.0, 1000.0, 1500.0, 2200.0) * 3, 0.01), (SIX, 0.0)],
)
def test_ninety_five_percent_intervals(lengths, R_sigma):
    each = coverage(runs(lengths, R_sigma))
    assert 0.93 < each.mean() < 0.97
    assert np.all((each > 0.90) & (each < 0.99))


@pytest.mark.slow
def test_normal_intervals_would_be_too_narrow():
    # Negative control: six chips leave four degrees of freedom; 1.96 standard errors then hold
    # 2 P(t_4 < 1.96) - 1 = 88 %.
    found = runs(SIX, 0.0)
    inside = [
        [
            abs(q.value - value) <= 1.96 * q.sigma
            for q, value in zip(fit.quantities, truth, strict=True)
        ]
        for truth, fit in found
    ]
    assert np.mean(inside) < 0.92
