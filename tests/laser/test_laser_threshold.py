"""Threshold: published exercises, gain laws, limits, refusals."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from coatings.errors import ArrayError, InputError
from coatings.laser import (
    FacetLight,
    Gain,
    GainLaw,
    LaserChip,
    gain_shape,
    lowest_threshold,
    mirror_loss_per_cm,
    threshold_current_A,
    threshold_gain_per_cm,
)


def test_threshold_gain_of_a_textbook_exercise():
    # L1: R 0.32 both, 10 /cm, 500 um: 32.79 /cm (read in a common textbook exercise).
    loss = mirror_loss_per_cm(0.32, 0.32, length_um=500.0)
    gain = threshold_gain_per_cm(loss, internal_loss_per_cm=10.0)
    assert gain == pytest.approx(32.79, abs=0.005)


def test_threshold_gain_of_a_long_open_resonator():
    # L2: 75 cm, R 0.999 and 0.99, no loss: 7.367e-5 /cm (read in a university problem set).
    assert mirror_loss_per_cm(0.999, 0.99, length_um=75e4) == pytest.approx(7.367e-5, abs=5e-9)


def test_threshold_gain_with_loss_over_a_part_of_the_path():
    # L3: 0.1 /cm over 5 cm, gain over 20 cm, R 0.995 and 0.95: 2.64e-2 /cm (same problem set).
    mirror = mirror_loss_per_cm(0.995, 0.95, length_um=20e4)
    gain = threshold_gain_per_cm(mirror, internal_loss_per_cm=0.1 * 5.0 / 20.0)
    assert gain == pytest.approx(2.64e-2, abs=5e-5)


@pytest.mark.parametrize("law", GainLaw)
@pytest.mark.parametrize("rise", [0.0, 40.0])
def test_round_trip_gain_is_one_at_threshold(pump, law, rise):
    chip = replace(pump, gain_law=law)
    R1, R2 = 0.013, 0.96
    need = threshold_gain_per_cm(
        mirror_loss_per_cm(R1, R2, length_um=chip.length_um),
        internal_loss_per_cm=chip.internal_loss_per_cm,
    )
    current = threshold_current_A(chip, threshold_gain_per_cm=need, rise_K=rise)
    # Back from current to gain by the law itself, with Jtr carried by T0.
    ratio = current / (0.4 * 95e-4) / (120.0 * np.exp(rise / 170.0))
    gain = 18.0 * (np.log(ratio) if law is GainLaw.LOGARITHMIC else ratio - 1.0)
    half = np.exp((gain - chip.internal_loss_per_cm) * 0.4) * np.sqrt(R1 * R2)
    assert half == pytest.approx(1.0, rel=1e-13)


def test_linear_law_needs_transparency_and_more():
    gain = Gain(GainLaw.LINEAR, 100.0, 20.0)
    assert gain.current_density_A_per_cm2(20.0) == pytest.approx(200.0, rel=1e-15)
    assert gain.current_density_A_per_cm2(0.0) == pytest.approx(100.0, rel=1e-15)


def test_logarithmic_gain_far_beyond_reach_asks_an_infinite_current(pump):
    assert threshold_current_A(pump, threshold_gain_per_cm=18.0 * 800.0) == np.inf


def test_threshold_current_scales_with_the_emitters(pump):
    bar = replace(pump, emitters=19)
    assert threshold_current_A(bar, threshold_gain_per_cm=5.0) == pytest.approx(
        19.0 * threshold_current_A(pump, threshold_gain_per_cm=5.0), rel=1e-14
    )


def test_temperature_does_nothing_without_t0(pump):
    chip = replace(pump, t0_K=None)
    cold = threshold_current_A(chip, threshold_gain_per_cm=5.0)
    assert threshold_current_A(chip, threshold_gain_per_cm=5.0, rise_K=50.0) == cold


def test_reflectances_as_small_as_floats_go_do_not_underflow():
    loss = mirror_loss_per_cm(1e-200, 1e-200, length_um=1e4)
    assert loss == pytest.approx(200.0 * np.log(10.0), rel=1e-14)


class TestGainPeak:
    def test_shape_is_one_at_the_chip_and_half_at_half_width(self, pump):
        chip = replace(pump, gain_peak_nm=976.0, gain_width_nm=40.0)
        shape = gain_shape(chip, wavelength_nm=np.array([976.0, 956.0, 996.0]))
        np.testing.assert_allclose(shape, [1.0, 0.5, 0.5], rtol=1e-14)

    def test_shape_is_flat_without_a_peak(self, pump):
        np.testing.assert_array_equal(gain_shape(pump, wavelength_nm=np.array([900.0, 976.0])), 1)

    def test_lowest_threshold_sits_at_the_peak_for_flat_facets(self, pump):
        chip = replace(pump, gain_peak_nm=980.0, gain_width_nm=40.0)
        nm = np.linspace(964.0, 988.0, 25)
        flat = np.full(25, 0.03)
        found, current = lowest_threshold(
            chip, wavelength_nm=nm, R_front=flat, R_rear=np.full(25, 0.97)
        )
        assert found == pytest.approx(980.0)
        # There the gain is 1/0.98 of that at 976 nm: 1 - 2 (4/40)^2 = 0.98.
        need = 0.98 * threshold_gain_per_cm(
            mirror_loss_per_cm(0.03, 0.97, length_um=4000.0), internal_loss_per_cm=0.8
        )
        assert current == pytest.approx(threshold_current_A(chip, threshold_gain_per_cm=need))

    def test_a_sloping_coating_pulls_the_lowest_threshold(self, pump):
        chip = replace(pump, gain_peak_nm=976.0, gain_width_nm=40.0)
        nm = np.linspace(964.0, 988.0, 241)
        R = 0.03 * np.exp((nm - 976.0) / 20.0)
        found, current = lowest_threshold(
            chip, wavelength_nm=nm, R_front=R, R_rear=np.full_like(nm, 0.97)
        )
        slow = [
            threshold_current_A(
                chip,
                threshold_gain_per_cm=(0.8 - np.log(r * 0.97) / 0.8)
                / (1.0 - 2.0 * ((x - 976.0) / 40.0) ** 2),
            )
            for x, r in zip(nm, R, strict=True)
        ]
        assert current == pytest.approx(min(slow))
        assert found == nm[int(np.argmin(slow))]
        assert found > 976.0

    def test_no_gain_anywhere(self, pump):
        chip = replace(pump, gain_peak_nm=976.0, gain_width_nm=10.0)
        one = np.array([0.3])
        with pytest.raises(ArrayError, match="the band holds no gain"):
            lowest_threshold(chip, wavelength_nm=np.array([900.0]), R_front=one, R_rear=one)

    def test_no_gain_at_the_chips_own_wavelength(self, pump):
        chip = replace(pump, gain_peak_nm=900.0, gain_width_nm=10.0)
        with pytest.raises(ArrayError, match="leave no gain at the chip's own 976 nm"):
            gain_shape(chip, wavelength_nm=976.0)


class TestRefusals:
    @pytest.mark.parametrize(
        ("change", "match"),
        [
            ({"internal_loss_per_cm": -0.1}, "internal_loss_per_cm: is -0.1; give a number 0 or"),
            ({"t0_K": 0.0}, "t0_K: is 0; .* above 0, or leave it out"),
            ({"t1_K": -5.0}, "t1_K: is -5"),
            ({"injection_efficiency": 1.2}, "injection_efficiency: is 1.2; .* at most 1"),
            ({"length_um": 0.0}, "length_um: is 0; give a number above 0"),
            ({"length_um": float("nan")}, "length_um: is nan"),
            ({"spontaneous_factor": 2.0}, "spontaneous_factor"),
            ({"emitters": 0}, "emitters: is 0; give a whole number"),
            ({"stages": 1.5}, "stages: is 1.5"),
            ({"gain_peak_nm": 976.0}, "gain_peak_nm, gain_width_nm: one is missing"),
            ({"gain_law": "linear"}, "gain_law: is 'linear'; give GainLaw"),
            ({"heatsink_C": -300.0}, "heatsink_C: is -300; give a number above -273.15"),
        ],
    )
    def test_a_chip_with_a_wrong_number(self, pump, change, match):
        with pytest.raises(InputError, match=match):
            replace(pump, **change)

    def test_all_problems_come_at_once(self, pump):
        with pytest.raises(InputError) as caught:
            replace(pump, internal_loss_per_cm=-1.0, t0_K=0.0, emitters=0)
        assert len(caught.value.problems) == 3

    @pytest.mark.parametrize(
        ("R", "match"),
        [
            (0.0, "R_front: is zero or negative: a resonator without feedback"),
            (3.0, "R_front: reaches 3; give fractions of at most 1"),
            (np.nan, "R_front: holds a value that is not finite"),
        ],
    )
    def test_impossible_reflectances(self, R, match):
        with pytest.raises(ArrayError, match=match):
            mirror_loss_per_cm(R, 0.3, length_um=1000.0)

    def test_length_of_zero(self):
        with pytest.raises(ArrayError, match="length_um: falls to 0; give numbers above 0"):
            mirror_loss_per_cm(0.3, 0.3, length_um=0.0)

    def test_negative_losses(self):
        with pytest.raises(ArrayError, match="internal_loss_per_cm: falls to -1; give 0 or more"):
            threshold_gain_per_cm(1.0, internal_loss_per_cm=-1.0)

    def test_shapes(self):
        with pytest.raises(ArrayError, match=r"R_front \(2,\), R_rear \(3,\).*do not match"):
            mirror_loss_per_cm(np.full(2, 0.3), np.full(3, 0.3), length_um=1000.0)


class TestFacetLight:
    def test_lossless(self):
        facet = FacetLight.lossless(np.array([0.1, 0.4]))
        np.testing.assert_allclose(facet.T, [0.9, 0.6])
        assert facet.shape == (2,)

    def test_opaque_mirror(self):
        assert FacetLight(R=0.9, T=0.0, A=0.1).T == 0.0

    @pytest.mark.parametrize(
        ("shares", "match"),
        [
            ({"R": 0.3, "T": 0.5}, r"R \+ T \+ A \+ S misses 1 by 0.2"),
            ({"R": -0.1, "T": 1.1}, "facet R: falls to -0.1"),
            ({"R": 3.0, "T": 0.0}, r"facet R: reaches 3; .*did you mean 0.03 \(3 %\)"),
            ({"R": np.nan, "T": 0.0}, "facet R: holds a value that is not finite"),
            ({"R": np.zeros(2), "T": np.ones(3)}, "shapes do not match"),
        ],
    )
    def test_refusals(self, shares, match):
        with pytest.raises(ArrayError, match=match):
            FacetLight(**shares)


def test_a_chip_needs_no_more_than_its_laser_numbers():
    chip = LaserChip(
        wavelength_nm=1550.0,
        length_um=300.0,
        stripe_um=2.0,
        internal_loss_per_cm=10.0,
        injection_efficiency=0.8,
        transparency_A_per_cm2=200.0,
        modal_gain_per_cm=40.0,
    )
    assert chip.cold_C == chip.heatsink_C == 25.0
    assert chip.voltage_V(1.0) is None
    assert chip.facet_cm2 is None
