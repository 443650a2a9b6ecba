"""Slope, knee and split: published figures, identities and a high-precision twin."""

from __future__ import annotations

from dataclasses import replace

import mpmath
import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from coatings.errors import ArrayError
from coatings.laser import (
    FacetLight,
    excess_current_A,
    facet_load_MW_per_cm2,
    facet_output_MW_per_cm2,
    facet_split,
    total_slope_W_per_A,
)

fraction = st.floats(1e-6, 0.999)


@pytest.mark.parametrize(
    ("R", "ratio"), [(0.10, 2.297), (0.05, 3.428), (0.01, 7.989), (0.001, 25.49)]
)
def test_slope_ratio_of_coated_fronts(R, ratio):
    # L7: rear 0.31 as cleaved; computed for this project from the split formula.
    split = facet_split(FacetLight.lossless(R), FacetLight.lossless(0.31))
    assert split.front / split.rear == pytest.approx(ratio, rel=2e-4)


def test_share_of_light_out_of_the_front():
    # L8: front 0.25, rear 0.61: 0.7502 (computed; a device paper reports 52 % of near 69 %).
    split = facet_split(FacetLight.lossless(0.25), FacetLight.lossless(0.61))
    assert split.front_fraction == pytest.approx(0.7502, abs=5e-5)


@given(fraction, fraction)
def test_lossless_facets_let_all_lost_light_out(R1, R2):
    split = facet_split(FacetLight.lossless(R1), FacetLight.lossless(R2))
    assert split.front + split.rear == pytest.approx(1.0, rel=1e-12)
    # What runs onto each facet: P1/(1 - R1) is as 1/sqrt(R1).
    assert split.front_incident / split.rear_incident == pytest.approx(np.sqrt(R2 / R1), rel=1e-12)


@given(fraction)
def test_symmetric_facets_split_evenly(R):
    split = facet_split(FacetLight.lossless(R), FacetLight.lossless(R))
    assert split.front == split.rear
    assert split.front_fraction == pytest.approx(0.5, abs=1e-15)


@given(st.lists(fraction, min_size=8, max_size=8))
def test_out_absorbed_and_scattered_are_all_that_is_lost(raw):
    a, b = np.array(raw[:4]), np.array(raw[4:])
    front, rear = FacetLight(*(a / a.sum())), FacetLight(*(b / b.sum()))
    split = facet_split(front, rear)
    total = split.front + split.rear + split.absorbed + split.scattered
    assert total == pytest.approx(1.0, rel=1e-12)


def test_opaque_rear_absorbs_what_it_would_let_out():
    clear = facet_split(FacetLight.lossless(0.05), FacetLight.lossless(0.9))
    opaque = facet_split(FacetLight.lossless(0.05), FacetLight(R=0.9, T=0.0, A=0.1))
    assert opaque.rear == 0.0
    assert opaque.absorbed == pytest.approx(clear.rear, rel=1e-14)
    assert opaque.front == pytest.approx(clear.front, rel=1e-14)


def test_two_opaque_facets_have_no_front_fraction_to_speak_of():
    shut = FacetLight(R=0.9, T=0.0, A=0.1)
    assert facet_split(shut, shut).front_fraction == 0.0


def test_slope_counts_stages_and_falls_with_temperature(pump):
    one = total_slope_W_per_A(pump, mirror_loss_per_cm=4.0)
    assert one == pytest.approx(0.95 * 1239.841984 / 976.0 * 4.0 / 4.8, rel=1e-9)
    cascade = replace(pump, stages=30)
    assert total_slope_W_per_A(cascade, mirror_loss_per_cm=4.0) == pytest.approx(30.0 * one)
    warm = total_slope_W_per_A(pump, mirror_loss_per_cm=4.0, rise_K=60.0)
    assert warm == pytest.approx(one * np.exp(-0.1), rel=1e-13)
    steady = replace(pump, t1_K=None)
    assert total_slope_W_per_A(steady, mirror_loss_per_cm=4.0, rise_K=60.0) == one


class TestKnee:
    @pytest.mark.parametrize("B", [0.0, 1e-9, 1e-5, 1e-2, 1.0])
    @pytest.mark.parametrize("j", [0.0, 1e-6, 0.5, 1.0 - 1e-9, 1.0, 1.0 + 1e-9, 2.0, 1e4])
    def test_photon_number_against_fifty_digits(self, j, B):
        with mpmath.workdps(50):
            m = mpmath.mpf(j) - 1
            s = (m + mpmath.sqrt(m * m + 4 * mpmath.mpf(B) * mpmath.mpf(j))) / 2
        assert excess_current_A(j, 1.0, spontaneous_factor=B) == pytest.approx(
            float(s), rel=1e-12, abs=1e-300
        )

    @given(st.floats(0.0, 100.0), st.floats(1e-12, 1.0))
    def test_carriers_clamp(self, j, B):
        # Rate equations: carriers N/N_th = j/(1 + s) ... with s the photon number over the
        # saturation: stimulated s N, spontaneous B N into the mode, so s = (s + B) N, N <= 1.
        s = excess_current_A(j, 1.0, spontaneous_factor=B)
        N = j / (1.0 + s)
        assert N <= 1.0
        assert s == pytest.approx((s + B) * N, rel=1e-9, abs=1e-12)

    def test_no_kink(self):
        j = np.linspace(0.999, 1.001, 2001)
        s = excess_current_A(j, 1.0, spontaneous_factor=1e-4)
        curvature = np.diff(s, 2) / (j[1] - j[0]) ** 2
        assert np.all(curvature > 0.0)
        assert curvature.max() < 1.0 / (2.0 * np.sqrt(1e-4))

    def test_a_threshold_out_of_reach_leaves_spontaneous_light(self):
        assert excess_current_A(2.0, np.inf, spontaneous_factor=1e-3) == pytest.approx(2e-3)

    def test_refusals(self):
        with pytest.raises(ArrayError, match="threshold_A: is not above 0"):
            excess_current_A(1.0, 0.0, spontaneous_factor=0.0)
        with pytest.raises(ArrayError, match="current_A: falls to -1; give 0 or more"):
            excess_current_A(-1.0, 1.0, spontaneous_factor=0.0)


def test_facet_load_is_output_times_one_plus_R_over_T(pump):
    front = FacetLight(R=0.05, T=0.93, A=0.02)
    split = facet_split(front, FacetLight.lossless(0.97))
    bar = replace(pump, emitters=10)
    output = facet_output_MW_per_cm2(bar, front_W=80.0 * split.front)
    load = facet_load_MW_per_cm2(bar, front_incident_W=80.0 * split.front_incident, R_front=0.05)
    assert output == pytest.approx(80.0 * split.front / (10 * 95.0 * 0.8) * 100.0, rel=1e-13)
    assert load == pytest.approx(output * 1.05 / 0.93, rel=1e-13)


def test_no_load_without_the_height_of_the_near_field(pump):
    chip = replace(pump, mode_height_um=None)
    assert facet_output_MW_per_cm2(chip, front_W=1.0) is None
    assert facet_load_MW_per_cm2(chip, front_incident_W=1.0, R_front=0.1) is None


def test_refusals(pump):
    mirror = FacetLight.lossless(1.0)
    with pytest.raises(ArrayError, match="front R, rear R: both are 1"):
        facet_split(mirror, mirror)
    with pytest.raises(ArrayError, match="front R: is zero or negative"):
        facet_split(FacetLight.lossless(0.0), mirror)
    with pytest.raises(ArrayError, match="mirror_loss_per_cm: is zero in a chip without internal"):
        total_slope_W_per_A(replace(pump, internal_loss_per_cm=0.0), mirror_loss_per_cm=0.0)
