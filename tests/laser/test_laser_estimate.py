"""The laser's line: regression, notes, limits, refusals."""

from __future__ import annotations

import json
import time
from dataclasses import replace

import numpy as np
import pytest

from coatings.errors import ArrayError, InputError
from coatings.laser import (
    FacetLight,
    FieldModel,
    Limits,
    estimate,
    judge_limits,
    keeps_limits,
    operate,
)

FRONT, REAR = FacetLight.lossless(0.03), FacetLight.lossless(0.97)

KEYS = {
    "R_front",
    "R_rear",
    "mirror_loss_per_cm",
    "threshold_gain_per_cm",
    "threshold_A",
    "slope_front_W_per_A",
    "slope_rear_W_per_A",
    "front_fraction",
    "front_W",
    "rear_W",
    "coating_absorbed_W",
    "facet_output_MW_per_cm2",
    "facet_load_MW_per_cm2",
    "wall_plug_efficiency",
    "axial_ratio",
    "model",
}


def test_regression_of_the_recipe_example(pump):
    # Regression, not truth: computed once for this project with the uniform model.
    found = estimate(pump, FRONT, REAR, model=FieldModel.UNIFORM)
    assert found.mirror_loss_per_cm == pytest.approx(4.42127, abs=5e-6)
    assert found.threshold_A == pytest.approx(0.609454, abs=5e-7)
    slope = found.slope_front_W_per_A + found.slope_rear_W_per_A
    assert slope == pytest.approx(1.021906, abs=5e-7)
    assert pump.voltage_V(12.0) == pytest.approx(1.478, abs=5e-4)
    assert found.junction_C == pytest.approx(37.778, abs=5e-4)
    assert found.front_W == pytest.approx(11.2858, abs=5e-5)
    assert found.rear_W == pytest.approx(0.06138, abs=5e-6)
    assert found.wall_plug_efficiency == pytest.approx(0.63632, abs=5e-6)
    assert found.facet_output_MW_per_cm2 == pytest.approx(14.850, abs=5e-4)
    assert found.facet_load_MW_per_cm2 == pytest.approx(15.768, abs=5e-4)


def test_result_has_its_keys_and_is_plain_json(pump):
    figures = estimate(pump, FRONT, REAR).to_json_dict()
    assert set(figures) == KEYS
    assert json.loads(json.dumps(figures)) == figures
    assert figures["axial_ratio"] == pytest.approx(1.03 / (2.0 * np.sqrt(0.03)))


def test_axial_field_is_said(pump):
    found = estimate(pump, FRONT, REAR)
    assert found.model == "axial"
    assert "The axial field changes the power by -2.3 %" in found.notes[-1]


def test_without_a_drive_there_are_no_watts(pump):
    found = estimate(replace(pump, drive_A=None), FRONT, REAR)
    assert found.front_W is found.facet_load_MW_per_cm2 is found.junction_C is None
    assert found.threshold_A == pytest.approx(0.609454, abs=5e-7)
    assert found.notes == ("No drive current is given: no watts, loads or efficiency.",)
    given = estimate(replace(pump, drive_A=None), FRONT, REAR, drive_A=12.0)
    assert given.front_W == estimate(pump, FRONT, REAR).front_W


@pytest.mark.parametrize(
    ("change", "note", "missing"),
    [
        ({"junction_V": None}, "junction voltage is not given", "wall_plug_efficiency"),
        ({"mode_height_um": None}, "height of the near field", "facet_load_MW_per_cm2"),
        ({"t0_K": None, "t1_K": None}, "Neither T0 nor T1", None),
        ({"thermal_K_per_W": 0.0}, "No thermal resistance", None),
    ],
)
def test_what_is_not_given_is_said(pump, change, note, missing):
    found = estimate(replace(pump, **change), FRONT, REAR)
    assert any(note in sentence for sentence in found.notes)
    if missing is not None:
        assert getattr(found, missing) is None


class TestStates:
    def test_below_threshold(self, pump):
        found = estimate(pump, FRONT, REAR, drive_A=0.5)
        assert "0.5 A is not above the threshold" in found.notes[0]
        assert 0.0 < found.front_W < 1e-3
        dark = estimate(replace(pump, spontaneous_factor=0.0), FRONT, REAR, drive_A=0.5)
        assert dark.front_W == 0.0
        assert "its factor is zero" in dark.notes[0]

    def test_no_current_at_all(self, pump):
        found = estimate(pump, FRONT, REAR, drive_A=0.0)
        assert found.front_W == 0.0
        assert found.wall_plug_efficiency is None

    def test_heat_puts_the_laser_out(self, pump):
        hot = replace(pump, thermal_K_per_W=20.0, t0_K=50.0, t1_K=150.0)
        found = estimate(hot, FRONT, REAR, drive_A=20.0)
        assert "there is no steady state that lases" in found.notes[0]
        assert found.front_W < 0.01
        assert any("carried far beyond" in note for note in found.notes)

    def test_near_runaway(self, pump):
        hot = replace(pump, thermal_K_per_W=14.0, t0_K=60.0, t1_K=250.0)
        found = estimate(hot, FRONT, REAR, drive_A=7.0)
        working = operate(hot, FRONT, REAR, current_A=7.0)
        assert 0.5 < working.thermal_feedback < 1.0
        assert found.notes[0].startswith("Near thermal runaway")

    def test_threshold_that_stretches_the_gain_law(self, pump):
        short = replace(pump, length_um=300.0)
        found = estimate(short, FacetLight.lossless(0.001), FacetLight.lossless(0.3))
        assert "Threshold needs more than 3 times the modal gain" in found.notes[0]
        assert found.threshold_A > 1.0

    def test_threshold_out_of_reach(self, pump):
        tiny = replace(pump, length_um=3.0)
        found = estimate(tiny, FacetLight.lossless(0.001), FacetLight.lossless(0.001))
        assert found.threshold_A is None
        assert "no current reaches it" in found.notes[0]
        assert found.front_W < 1e-3
        missed = judge_limits(Limits(threshold_max_A=1.0), found)[0]
        assert missed.kept is False


def test_opaque_rear(pump):
    found = estimate(pump, FRONT, FacetLight(R=0.97, T=0.0, A=0.03))
    assert found.rear_W == 0.0
    assert found.front_fraction == 1.0
    assert found.coating_absorbed_W > 0.0


def test_two_opaque_facets(pump):
    shut = FacetLight(R=0.9, T=0.0, A=0.1)
    found = estimate(pump, shut, shut)
    assert found.front_fraction is None
    assert found.front_W == 0.0
    assert found.facet_load_MW_per_cm2 > 0.0


def test_draws_share_one_call_and_take_milliseconds(pump):
    rng = np.random.default_rng(11)
    R = 0.03 * np.exp(0.1 * rng.standard_normal(10_000))
    start = time.perf_counter()
    working = operate(pump, FacetLight.lossless(R), REAR, current_A=12.0, model=FieldModel.UNIFORM)
    assert time.perf_counter() - start < 0.5
    assert working.front_W.shape == working.threshold_A.shape == (10_000,)
    one = estimate(pump, FacetLight.lossless(float(R[7])), REAR, model=FieldModel.UNIFORM)
    assert working.front_W[7] == pytest.approx(one.front_W, rel=1e-9)
    assert working.threshold_A[7] == pytest.approx(one.threshold_A, rel=1e-12)


class TestLimits:
    def test_every_limit_is_named(self, pump):
        limits = Limits(threshold_max_A=1.0, rear_min_W=0.1, facet_limit_MW_per_cm2=20.0)
        judged = judge_limits(limits, estimate(pump, FRONT, REAR))
        assert [j.kept for j in judged] == [True, False, True]
        assert str(judged[0]) == "threshold_max_A 1: kept at 0.6095"
        assert str(judged[1]).startswith("rear_min_W 0.1: missed at 0.0599")

    def test_unknown_figures_are_not_judged(self, pump):
        found = estimate(replace(pump, mode_height_um=None), FRONT, REAR)
        judged = judge_limits(Limits(facet_limit_MW_per_cm2=20.0), found)
        assert judged[0].kept is None
        assert "can't be judged" in str(judged[0])

    def test_no_limits(self, pump):
        assert judge_limits(Limits(), estimate(pump, FRONT, REAR)) == ()

    def test_arrays(self):
        kept = keeps_limits(
            Limits(threshold_max_A=1.0, rear_min_W=0.1, facet_limit_MW_per_cm2=20.0),
            threshold_A=np.array([0.5, 1.5]),
            rear_W=np.array([0.2, 0.2]),
            facet_load_MW_per_cm2=None,
        )
        np.testing.assert_array_equal(kept["threshold_max_A"], [True, False])
        np.testing.assert_array_equal(kept["rear_min_W"], True)
        assert "facet_limit_MW_per_cm2" not in kept

    def test_refusals(self):
        with pytest.raises(InputError, match="threshold_max_A: is 0; give a number above 0"):
            Limits(threshold_max_A=0.0)
        with pytest.raises(InputError, match="rear_min_W: is -1"):
            Limits(rear_min_W=-1.0)


def test_refusals(pump):
    many = FacetLight.lossless(np.array([0.1, 0.2]))
    with pytest.raises(ArrayError, match=r"front, rear: hold arrays; .* call operate"):
        estimate(pump, many, REAR)
    with pytest.raises(ArrayError, match="front R: is zero or negative"):
        estimate(pump, FacetLight.lossless(0.0), REAR)
    with pytest.raises(ArrayError, match="shapes do not match"):
        operate(pump, many, FacetLight.lossless(np.full(3, 0.9)), current_A=1.0)
    with pytest.raises(ArrayError, match="current_A: falls to -1"):
        operate(pump, FRONT, REAR, current_A=-1.0)
