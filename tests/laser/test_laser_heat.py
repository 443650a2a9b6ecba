"""Heat: the lowest steady state against a slow scan, rollover, runaway, energy."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

from coatings.errors import ArrayError, InputError
from coatings.laser import (
    FacetLight,
    FieldModel,
    LaserChip,
    axial_power_ratio,
    operate,
    power_current,
)

FRONT, REAR = FacetLight.lossless(0.03), FacetLight.lossless(0.97)


def light_W(chip: LaserChip, *, current_A: float, junction_C: np.ndarray) -> np.ndarray:
    """Light of both facets of a lossless-coated chip, written out, without a knee."""
    rise = junction_C - chip.cold_C
    mirror = -np.log(0.03 * 0.97) / 0.8
    threshold = 120.0 * np.exp((0.8 + mirror) / 18.0) * 0.4 * 95e-4 * np.exp(rise / chip.t0_K)
    slope = 0.95 * chip.photon_V * mirror / (0.8 + mirror) * np.exp(-rise / chip.t1_K)
    return slope * np.maximum(current_A - threshold, 0.0)


def scanned_C(chip: LaserChip, *, current_A: float, axial: bool = False) -> float:
    """Lowest root of T - T_sink - R_th (I V - P) by a fine scan and Brent's method."""
    electrical = current_A * (1.31 + 0.014 * current_A)

    def open_(junction_C: np.ndarray) -> np.ndarray:
        light = light_W(chip, current_A=current_A, junction_C=junction_C)
        if axial:
            rise = junction_C - chip.cold_C
            light = light * axial_power_ratio(
                chip, current_A=current_A, R_front=0.03, R_rear=0.97, rise_K=rise
            )
        heat = electrical - light
        return junction_C - chip.heatsink_C - chip.thermal_K_per_W * heat

    # A little beyond the top, where a chip without light sits.
    top = chip.heatsink_C + 1.001 * chip.thermal_K_per_W * electrical
    grid = np.linspace(chip.heatsink_C, top, 20_001)
    first = int(np.argmax(open_(grid) >= 0.0))
    return float(brentq(open_, grid[first - 1], grid[first], xtol=1e-11))


@settings(max_examples=100, deadline=None)
@given(st.floats(1.0, 40.0), st.floats(0.1, 12.0), st.floats(20.0, 300.0), st.floats(50.0, 900.0))
def test_junction_is_the_lowest_root(current, thermal, t0, t1):
    chip = LaserChip(
        wavelength_nm=976.0,
        length_um=4000.0,
        stripe_um=95.0,
        internal_loss_per_cm=0.8,
        injection_efficiency=0.95,
        transparency_A_per_cm2=120.0,
        modal_gain_per_cm=18.0,
        series_mohm=14.0,
        junction_V=1.31,
        thermal_K_per_W=thermal,
        t0_K=t0,
        t1_K=t1,
    )
    working = operate(chip, FRONT, REAR, current_A=current, model=FieldModel.UNIFORM)
    assert working.junction_C == pytest.approx(scanned_C(chip, current_A=current), abs=1e-5)


@pytest.mark.parametrize("current", [9.3, 9.55, 9.575, 9.5795, 9.583, 9.587, 9.6])
def test_axial_junction_is_the_lowest_root_up_to_the_edge(pump, current):
    # The uniform chip goes out just below 9.59 A, the axial one just above 9.57 A: between them a
    # field that lags behind the temperature swings between lit and dark.
    chip = replace(
        pump, thermal_K_per_W=8.0, t0_K=40.0, t1_K=200.0, spontaneous_factor=0.0, drive_A=None
    )
    working = operate(chip, FRONT, REAR, current_A=current, model=FieldModel.AXIAL)
    assert working.quenched == (current > 9.574)
    assert working.junction_C == pytest.approx(
        scanned_C(chip, current_A=current, axial=True), abs=1e-3
    )


def test_many_draws_agree_with_one_by_one(pump):
    rng = np.random.default_rng(3)
    R = 0.03 * np.exp(0.3 * rng.standard_normal(40))
    # A bottleneck of the climb for some of the draws: feedback close to runaway.
    chip = replace(pump, thermal_K_per_W=9.0, t0_K=40.0, t1_K=200.0)
    together = operate(chip, FacetLight.lossless(R), REAR, current_A=9.0)
    single = [
        operate(chip, FacetLight.lossless(r), REAR, current_A=9.0, model=together.model).front_W
        for r in R
    ]
    np.testing.assert_allclose(together.front_W, single, rtol=1e-6)


def test_energy_goes_out_as_light_or_heat(pump):
    front, rear = FacetLight(R=0.02, T=0.95, A=0.02, S=0.01), FacetLight(R=0.95, T=0.0, A=0.05)
    working = operate(pump, front, rear, current_A=12.0)
    heat = 12.0 * (1.31 + 12.0 * 0.014) - working.front_W - working.rear_W
    assert working.junction_C == pytest.approx(25.0 + 2.0 * heat, abs=1e-4)
    lost = working.front_W + working.coating_absorbed_W + working.scattered_W + working.rear_W
    assert working.front_W < lost < 12.0 * (1.31 + 12.0 * 0.014)


def test_reference_temperature_off_the_heat_sink(pump):
    chip = replace(pump, reference_C=45.0, thermal_K_per_W=0.0, spontaneous_factor=0.0)
    working = operate(chip, FRONT, REAR, current_A=12.0, model=FieldModel.UNIFORM)
    lost = light_W(chip, current_A=12.0, junction_C=25.0)
    assert working.front_W + working.rear_W == pytest.approx(lost, rel=1e-12)
    assert working.hot_threshold_A < working.threshold_A


def test_feedback_is_the_slope_of_the_heat(pump):
    chip = replace(pump, thermal_K_per_W=5.0, spontaneous_factor=0.0)
    working = operate(chip, FRONT, REAR, current_A=14.0, model=FieldModel.UNIFORM)
    step = 1e-3
    fall = [
        light_W(chip, current_A=14.0, junction_C=working.junction_C + sign * step)
        for sign in (-1.0, 1.0)
    ]
    assert working.thermal_feedback == pytest.approx(
        5.0 * (fall[0] - fall[1]) / (2.0 * step), rel=1e-6
    )


class TestPowerCurrent:
    def test_rollover_and_the_end_of_lasing_are_stated(self, pump):
        chip = replace(pump, thermal_K_per_W=8.0, t0_K=60.0, t1_K=200.0)
        current = np.linspace(0.0, 30.0, 301)
        curve = power_current(chip, FRONT, REAR, current_A=current)
        assert np.all(np.isfinite(curve.front_W))
        assert np.all(np.isfinite(curve.junction_C))
        assert 0.0 < curve.rollover_A < curve.quenched_A < 30.0
        assert "rollover" in curve.notes[0]
        assert "no steady state that lases" in curve.notes[1]
        assert curve.front_W[0] == 0.0
        best = np.argmax(curve.front_W)
        assert current[best] == curve.rollover_A

    def test_a_cool_chip_rises_throughout(self, pump):
        curve = power_current(pump, FRONT, REAR, current_A=np.linspace(0.0, 15.0, 61))
        assert np.all(np.diff(curve.front_W) > 0.0)
        assert curve.rollover_A is None
        assert curve.quenched_A is None
        assert curve.notes == ()

    @pytest.mark.parametrize("current", [[1.0], [2.0, 1.0], [[1.0, 2.0]]])
    def test_currents_must_rise(self, pump, current):
        with pytest.raises(ArrayError, match="current_A: is not a rising row"):
            power_current(pump, FRONT, REAR, current_A=np.array(current))

    def test_one_facet_a_curve(self, pump):
        many = FacetLight.lossless(np.array([0.1, 0.2]))
        with pytest.raises(ArrayError, match="front, rear: hold arrays"):
            power_current(pump, many, REAR, current_A=np.array([1.0, 2.0]))


def test_light_beyond_the_electrical_power_has_no_steady_state(pump):
    chip = replace(pump, junction_V=0.5, series_mohm=0.0)
    with pytest.raises(InputError, match=r"at 12 A the chip would emit .* no steady state; raise"):
        operate(chip, FRONT, REAR, current_A=12.0)


def test_without_voltage_the_junction_stays_at_the_heat_sink(pump):
    working = operate(replace(pump, junction_V=None), FRONT, REAR, current_A=12.0)
    assert working.junction_C == 25.0
    assert working.thermal_feedback == 0.0
