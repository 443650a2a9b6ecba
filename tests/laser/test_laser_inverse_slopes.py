"""A coated facet's reflectivity from the slopes of both facets."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from coatings.errors import ArrayError, InputError
from coatings.laser import (
    FacetLight,
    LaserChip,
    Method,
    R_from_slope_ratio,
    Side,
    SlopeRatio,
    TwoSidedSweep,
    facet_split,
    operate,
    reflectivity_from_slopes,
    slope_ratio,
)

BARE = FacetLight.lossless(0.31)
CURRENTS = np.linspace(0.2, 12.0, 60)


@pytest.mark.parametrize(
    ("ratio", "R"), [(2.297, 0.10), (3.428, 0.05), (7.989, 0.01), (25.49, 0.001)]
)
def test_reflectances_behind_printed_ratios(ratio, R):
    # L7: rear R0 = 0.31, computed for this project from the split formula; the ratios have four
    # digits, and R goes with about their square.
    assert R_from_slope_ratio(ratio, known=BARE) == pytest.approx(R, rel=1e-3)


@given(
    R=st.floats(1e-6, 0.999),
    known=st.floats(1e-6, 0.999),
    loss=st.floats(0.0, 0.3),
    other_loss=st.floats(0.0, 0.3),
)
def test_undoes_the_split_of_the_power(R, known, loss, other_loss):
    unknown = FacetLight(R=R * (1 - loss), T=(1 - R) * (1 - loss), A=loss)
    other = FacetLight(R=known * (1 - other_loss), T=(1 - known) * (1 - other_loss), A=other_loss)
    split = facet_split(unknown, other)
    ratio = float(split.front / split.rear)
    assert R_from_slope_ratio(ratio, known=other, loss=loss) == pytest.approx(unknown.R, rel=1e-9)


def sweep_of(
    chip: LaserChip, front: FacetLight, rear: FacetLight, current_A: np.ndarray = CURRENTS
) -> TwoSidedSweep:
    """Both powers by the full forward model: knee, heat and axial field."""
    working = operate(chip, front, rear, current_A=current_A)
    return TwoSidedSweep(current_A, working.front_W, working.rear_W)


@pytest.mark.parametrize("R", [0.3, 0.05, 1e-3])
@pytest.mark.parametrize("hot", [2.0, 8.0])
def test_perfect_sweep_gives_the_truth_through_heat_and_hole_burning(pump, R, hot):
    chip = replace(pump, thermal_K_per_W=hot, spontaneous_factor=0.0)
    rear = FacetLight(R=0.9, T=0.08, A=0.02)
    sweep = sweep_of(chip, FacetLight.lossless(R), rear)
    found = reflectivity_from_slopes(slope_ratio(sweep, unknown=Side.FRONT), known=rear)
    assert found.R == pytest.approx(R, rel=1e-6)
    assert found.method is Method.TWO_SIDED
    assert found.R_low <= found.R <= found.R_high
    assert found.notes == ()


def test_either_facet_may_be_the_unknown(pump):
    front, rear = FacetLight(R=0.05, T=0.94, A=0.01), FacetLight.lossless(0.9)
    sweep = sweep_of(replace(pump, spontaneous_factor=0.0), front, rear)
    found = reflectivity_from_slopes(slope_ratio(sweep, unknown=Side.REAR), known=front)
    assert found.R == pytest.approx(0.9, rel=1e-6)
    found = reflectivity_from_slopes(slope_ratio(sweep, unknown=Side.FRONT), known=rear, loss=0.01)
    assert found.R == pytest.approx(0.05, rel=1e-6)


def test_knee_is_found_and_left_out(pump):
    # Spontaneous light below the knee, different at both meters, does not count.
    sweep = sweep_of(pump, BARE, FacetLight.lossless(0.9), np.linspace(0.0, 3.0, 121))
    stray = np.minimum(sweep.current_A, 0.5)
    seen = TwoSidedSweep(
        sweep.current_A, sweep.front_W + 0.04 * stray, sweep.rear_W + 0.004 * stray
    )
    ratio = slope_ratio(seen, unknown=Side.FRONT)
    threshold = operate(pump, BARE, FacetLight.lossless(0.9), current_A=1.0).threshold_A
    assert ratio.knee_A == pytest.approx(threshold, abs=0.05)
    assert ratio.from_A >= 1.1 * ratio.knee_A
    found = reflectivity_from_slopes(ratio, known=FacetLight.lossless(0.9))
    assert found.R == pytest.approx(0.31, rel=2e-3)


def test_range_can_be_given(pump):
    sweep = sweep_of(pump, BARE, FacetLight.lossless(0.9))
    ratio = slope_ratio(sweep, unknown=Side.FRONT, range_A=(4.0, 8.0))
    assert ratio.from_A >= 4.0
    assert ratio.to_A <= 8.0
    assert ratio.knee_A is None
    assert ratio.points == np.count_nonzero((CURRENTS >= 4.0) & (CURRENTS <= 8.0))


@pytest.mark.parametrize("growing", [False, True])
def test_intervals_hold_the_truth(pump, growing):
    # 1200 sweeps, noise even or growing with power; 95 % within 93 to 97 % (three standard
    # errors of the share are 1.9 %).
    rng = np.random.default_rng(10)
    rear = FacetLight.lossless(0.6)
    inside = 0
    for _ in range(1200):
        R = np.exp(rng.uniform(np.log(1e-3), np.log(0.3)))
        current = np.linspace(1.0, 4.0, 16)
        split = facet_split(FacetLight.lossless(R), rear)
        light = 0.9 * (current - 0.5)
        noise = 0.01 * (light if growing else np.full(16, 2.0)) * rng.standard_normal((2, 16))
        seen = TwoSidedSweep(
            current, split.front * (light + noise[0]), split.rear * (light + noise[1])
        )
        found = reflectivity_from_slopes(slope_ratio(seen, unknown=Side.FRONT), known=rear)
        inside += found.R_low <= R <= found.R_high
    assert 0.93 < inside / 1200 < 0.97


def test_what_is_not_known_of_the_other_facet_widens_the_interval():
    exact = SlopeRatio(8.0, 0.0, 10.0, 1.0, 2.0, 12, None, ())
    plain = reflectivity_from_slopes(exact, known=BARE)
    assert plain.R_low == pytest.approx(plain.R, rel=1e-12)
    meters = reflectivity_from_slopes(exact, known=BARE, meters_sigma=0.02)
    assert meters.R_low == pytest.approx(
        R_from_slope_ratio(8.0 * np.exp(1.959964 * 0.02), known=BARE), rel=1e-6
    )
    # The known R moved by its sigma, by brute force.
    found = reflectivity_from_slopes(exact, known=BARE, known_R_sigma=1e-4)
    moved = R_from_slope_ratio(8.0, known=FacetLight.lossless(0.31 + 1e-4))
    half = (np.log(found.R_high) - np.log(found.R_low)) / 2.0 / 1.959964
    assert half == pytest.approx(abs(np.log(moved / found.R)), rel=1e-3)


def test_result_has_the_names_of_the_contract():
    found = reflectivity_from_slopes(
        SlopeRatio(8.0, 0.01, 10.0, 1.0, 2.0, 12, None, ()), known=BARE
    )
    result = found.to_json_dict()
    assert list(result) == ["method", "R", "R_low", "R_high"]
    assert result["method"] == "two-sided"


def test_drifting_ratio_is_said():
    current = np.linspace(1.0, 4.0, 20)
    light = current - 0.5
    saturating = TwoSidedSweep(current, light - 0.02 * light**2, 0.2 * light)
    assert "drifts" in slope_ratio(saturating, unknown=Side.FRONT).notes[0]


def test_ratio_that_is_not_one():
    for ratio in (0.0, -1.0, np.inf, np.nan):
        with pytest.raises(ArrayError, match="give slopes that both rise"):
            R_from_slope_ratio(ratio, known=BARE)


def test_known_facet_and_loss_that_can_not_be():
    with pytest.raises(ArrayError, match="known T: is zero"):
        R_from_slope_ratio(2.0, known=FacetLight(R=1.0, T=0.0))
    with pytest.raises(ArrayError, match="known R: is zero or negative"):
        R_from_slope_ratio(2.0, known=FacetLight(R=0.0, T=1.0))
    with pytest.raises(ArrayError, match="loss: is 1"):
        R_from_slope_ratio(2.0, known=BARE, loss=1.0)


@pytest.mark.parametrize("name", ["known_R_sigma", "meters_sigma"])
def test_negative_uncertainties(name):
    slopes = SlopeRatio(8.0, 0.0, 10.0, 1.0, 2.0, 12, None, ())
    with pytest.raises(ArrayError, match=f"{name}.*give 0 or more"):
        reflectivity_from_slopes(slopes, known=BARE, **{name: -0.1})


def test_sweeps_that_can_not_be():
    row = np.linspace(0.0, 1.0, 5)
    with pytest.raises(ArrayError, match="not rows of one size"):
        TwoSidedSweep(row, row, row[:4])
    with pytest.raises(ArrayError, match="current_A: falls to -1"):
        TwoSidedSweep(row - 1.0, row, row)
    with pytest.raises(ArrayError, match="front_W: holds a value that is not finite"):
        TwoSidedSweep(row, row * np.nan, row)


def test_sweeps_that_say_nothing():
    row = np.linspace(1.0, 2.0, 8)
    with pytest.raises(InputError, match="rear_W: does not change with current"):
        slope_ratio(TwoSidedSweep(row, row, np.ones(8)), unknown=Side.FRONT)
    with pytest.raises(InputError, match="do not rise together"):
        slope_ratio(TwoSidedSweep(row, row, -row), unknown=Side.FRONT)
    with pytest.raises(InputError, match="2 points clear of threshold; give at least 4"):
        slope_ratio(TwoSidedSweep(row, row, row), unknown=Side.FRONT, range_A=(1.0, 1.2))
    kink = np.maximum(np.linspace(0.0, 1.0, 12) - 0.7, 0.0)
    with pytest.raises(InputError, match=r"light sets in at 0\.7"):
        slope_ratio(TwoSidedSweep(np.linspace(0.0, 1.0, 12), kink, kink), unknown=Side.FRONT)


def test_sweep_that_hangs_on_one_point():
    power = np.array([1.0, 1.0, 1.0, 1.0, 2.0])
    with pytest.raises(InputError, match="hang on a single point"):
        slope_ratio(
            TwoSidedSweep(np.arange(1.0, 6.0), power, power), unknown=Side.FRONT, range_A=(0.5, 6.0)
        )
