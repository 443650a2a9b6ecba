"""The chip below threshold: published examples, sums of round trips, extremes."""

from __future__ import annotations

import json
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.constants import c
from scipy.optimize import brentq

from coatings.errors import ArrayError, InputError
from coatings.laser import (
    Amplifier,
    FacetLight,
    R_product_needed,
    fringe_grid_nm,
    mirror_loss_per_cm,
    mode_spacing_GHz,
    reflected_gain,
    ripple_dB,
    ripple_spectrum,
    round_trip,
    round_trip_phase_rad,
    single_pass_gain,
    transmitted_gain,
)

CHIP = Amplifier(
    wavelength_nm=1550.0,
    length_um=1000.0,
    index=3.2,
    group_index=3.6,
    gain_dB=25.0,
    ripple_dB=0.5,
)


def test_reflectance_behind_a_peak_gain():
    # L4: single pass 5 dB, peak 20 dB, equal facets: 0.27549 (printed 0.276; Kumar and Deen,
    # Fiber Optic Communications (2014), example before 6.14, authors from memory).
    def peak_dB_over(R: float) -> float:
        facet = FacetLight.lossless(R)
        peak = transmitted_gain(facet, facet, gain=single_pass_gain(5.0), phase_rad=0.0)
        return float(10.0 * np.log10(peak) - 20.0)

    assert brentq(peak_dB_over, 0.01, 0.31) == pytest.approx(0.27549, abs=6e-6)


def test_mode_spacing():
    # L5: n 3.5, 200 um: 214 GHz (same book, example 6.14).
    assert mode_spacing_GHz(group_index=3.5, length_um=200.0) == pytest.approx(214.0, abs=0.5)


def test_reflectances_that_a_ripple_demands():
    # L6: 20 dB, ratio 2: G sqrt(R1 R2) < 0.17; with R1 = 2 R2: 0.24 % and 0.12 % (Agrawal,
    # Fiber-Optic Communication Systems, problem 6.5, attribution from memory).
    product = R_product_needed(10.0 * np.log10(2.0), gain_dB=20.0)
    assert 100.0 * np.sqrt(product) == pytest.approx(0.17, abs=0.005)
    lower = np.sqrt(product / 2.0)
    np.testing.assert_allclose([lower, 2.0 * lower], [0.0012, 0.0024], atol=5e-5)


@given(st.floats(1e-4, 0.99), st.floats(0.0, 40.0))
def test_demand_undoes_the_ripple(x, gain_dB):
    product = (x / 10.0 ** (gain_dB / 10.0)) ** 2
    ripple = ripple_dB(product, gain_dB=gain_dB)
    assert ripple == pytest.approx(20.0 * np.log10((1.0 + x) / (1.0 - x)), rel=1e-9)
    demanded = R_product_needed(ripple, gain_dB=gain_dB)
    assert demanded == pytest.approx(product, rel=1e-9)


@given(st.floats(1e-5, 0.3), st.floats(1e-5, 0.3), st.floats(0.05, 0.95))
def test_ripple_is_that_of_the_spectrums_extremes(R1, R2, x):
    G = x / np.sqrt(R1 * R2)
    theta = np.linspace(0.0, 2.0 * np.pi, 1001)
    gain = transmitted_gain(
        FacetLight.lossless(R1), FacetLight.lossless(R2), gain=G, phase_rad=theta
    )
    found = 10.0 * np.log10(gain.max() / gain.min())
    expected = ripple_dB(R1 * R2, gain_dB=10.0 * np.log10(G))
    assert found == pytest.approx(expected, rel=1e-9)


@pytest.mark.parametrize(
    ("R1", "R2", "G"), [(0.3, 0.3, 2.0), (0.01, 0.9, 8.0), (1e-4, 1e-3, 300.0)]
)
def test_closed_forms_are_the_sums_of_the_round_trips(R1, R2, G):
    front, rear = FacetLight.lossless(R1), FacetLight.lossless(R2)
    theta = np.linspace(0.0, 2.0 * np.pi, 37)
    loop = G * np.sqrt(R1 * R2) * np.exp(1j * theta)
    trips = sum(loop**m for m in range(3000))
    through = np.abs(np.sqrt((1.0 - R1) * (1.0 - R2) * G) * trips) ** 2
    np.testing.assert_allclose(
        transmitted_gain(front, rear, gain=G, phase_rad=theta), through, rtol=1e-10
    )
    # Inside: t1^2 = -(T1/R1) r1 r1' for a lossless film, with r1 = r1' = sqrt(R1).
    back = np.abs(np.sqrt(R1) - (1.0 - R1) / np.sqrt(R1) * loop * trips) ** 2
    np.testing.assert_allclose(
        reflected_gain(front, rear, gain=G, phase_rad=theta), back, rtol=1e-9, atol=1e-12
    )


@given(st.floats(1e-4, 0.95), st.floats(1e-4, 0.95), st.floats(0.0, 6.28))
def test_a_passive_chip_keeps_its_energy(R1, R2, theta):
    facets = FacetLight.lossless(R1), FacetLight.lossless(R2)
    through = transmitted_gain(*facets, gain=1.0, phase_rad=theta)
    back = reflected_gain(*facets, gain=1.0, phase_rad=theta)
    assert through + back == pytest.approx(1.0, abs=1e-10)


def test_denominator_vanishes_exactly_at_threshold():
    R1, R2, length_cm = 0.02, 0.6, 0.1
    mirror = mirror_loss_per_cm(R1, R2, length_um=1e4 * length_cm)
    G = np.exp(mirror * length_cm)
    assert G * np.sqrt(R1 * R2) == pytest.approx(1.0, rel=1e-14)
    facets = FacetLight.lossless(R1), FacetLight.lossless(R2)
    for short in (1e-3, 1e-5, 1e-7):
        peak = transmitted_gain(*facets, gain=G * (1.0 - short), phase_rad=0.0)
        assert peak * short**2 == pytest.approx((1 - R1) * (1 - R2) * G, rel=2.0 * short)
    with pytest.raises(ArrayError, match="the chip lases from 1 on"):
        transmitted_gain(*facets, gain=G * (1.0 + 1e-12), phase_rad=0.0)


def test_phase_has_the_group_index_everywhere():
    nm = np.array([1500.0, 1550.0, 1600.0])
    phase = round_trip_phase_rad(
        nm, index=3.2, group_index=3.6, length_um=1000.0, reference_nm=1550.0
    )
    index = 3.2 + (3.2 - 3.6) * (nm - 1550.0) / 1550.0
    np.testing.assert_allclose(phase, 4.0 * np.pi * 1e6 * index / nm, rtol=1e-14)


class TestSpectrum:
    def spectrum(self, chip=CHIP, R1=1e-4, R2=2e-4, phase=0.0):
        nm = fringe_grid_nm(chip, band_nm=(1548.0, 1552.0), points_per_fringe=48)
        return ripple_spectrum(
            chip,
            wavelength_nm=nm,
            r_front=np.sqrt(R1) * np.exp(1j * phase),
            r_rear=np.full(nm.shape, np.sqrt(R2) + 0j),
            T_front=np.asarray(1.0 - R1),
            T_rear=np.full(nm.shape, 1.0 - R2),
        )

    def test_ripple_and_spacing_show_in_the_spectrum(self):
        found = self.spectrum()
        swing = 10.0 * np.log10(found.gain.max() / found.gain.min())
        # 48 points a fringe miss the very extremes by little.
        assert swing == pytest.approx(found.ripple_dB, rel=5e-3)
        inner = found.gain[1:-1]
        peaks = 1 + np.flatnonzero((inner > found.gain[:-2]) & (inner > found.gain[2:]))
        spacing = np.diff(-c / found.wavelength_nm[peaks])
        assert spacing.mean() == pytest.approx(found.mode_spacing_GHz, rel=2e-3)

    def test_phase_of_the_facet_moves_the_fringes(self):
        half_turn = self.spectrum(phase=np.pi)
        usual = self.spectrum()
        assert np.argmax(usual.gain[:48]) != np.argmax(half_turn.gain[:48])
        assert half_turn.ripple_dB == pytest.approx(usual.ripple_dB, rel=1e-12)

    def test_demand_is_that_of_the_highest_gain_of_the_band(self):
        flat = self.spectrum()
        assert flat.R_product_needed == pytest.approx(
            float(R_product_needed(0.5, gain_dB=25.0)), rel=1e-12
        )
        peaked = replace(CHIP, gain_peak_nm=1552.0, gain_width_nm=30.0)
        assert self.spectrum(peaked).R_product_needed < flat.R_product_needed
        assert self.spectrum(peaked).worst_nm == pytest.approx(1552.0)

    def test_result_and_notes(self):
        found = self.spectrum()
        figures = json.loads(json.dumps(found.to_json_dict()))
        assert set(figures) == {
            "gain_dB",
            "ripple_dB",
            "mode_spacing_GHz",
            "R_product_needed",
            "wavelength_nm",
            "gain",
        }
        assert len(figures["gain"]) == len(figures["wavelength_nm"])
        assert "Saturation is not modelled" in found.notes[0]
        assert found.reflected.shape == found.gain.shape
        assert "passes the limit of 0.5 dB" in found.notes[1]
        assert len(self.spectrum(R1=1e-7, R2=1e-7).notes) == 1
        free = self.spectrum(replace(CHIP, ripple_dB=None))
        assert free.R_product_needed is None
        assert "No ripple limit" in free.notes[1]

    def test_gain_over_the_band(self):
        chip = replace(CHIP, gain_peak_nm=1550.0, gain_width_nm=60.0, internal_loss_per_cm=10.0)
        nm = np.array([1550.0, 1520.0, 1580.0])
        lost = 10.0 * np.log10(np.e)
        np.testing.assert_allclose(
            chip.gain_at_dB(nm), [25.0, *2 * [0.5 * (25.0 + lost) - lost]], rtol=1e-13
        )

    def test_a_chip_that_lases(self):
        with pytest.raises(ArrayError, match=r"G sqrt\(R1 R2\) reaches 94.*: the chip lases"):
            self.spectrum(R1=0.3, R2=0.3)


class TestRefusals:
    def test_ripple_of_a_lasing_chip(self):
        with pytest.raises(ArrayError, match="the chip lases from 1 on; lower the gain"):
            ripple_dB(0.09, gain_dB=10.0)
        with pytest.raises(ArrayError, match="R_product: falls to -1"):
            round_trip(-1.0, gain_dB=1.0)

    def test_gain_beyond_reason(self):
        with pytest.raises(ArrayError, match="gain_dB: passes 300 dB"):
            single_pass_gain(1000.0)

    @pytest.mark.parametrize(
        ("change", "match"),
        [
            ({"length_um": -1.0}, "length_um: is -1"),
            ({"group_index": 0.0}, "group_index: is 0"),
            ({"ripple_dB": -0.1}, "ripple_dB: is -0.1"),
            ({"gain_dB": 400.0}, "gain_dB: is 400; give a number -300 or more and at most 300"),
            ({"gain_width_nm": 30.0}, "one is missing; give both or neither"),
            ({"gain_peak_nm": 1400.0, "gain_width_nm": 30.0}, "leave no gain at 1550 nm"),
        ],
    )
    def test_amplifiers(self, change, match):
        with pytest.raises(InputError, match=match):
            replace(CHIP, **change)

    def test_grids(self):
        with pytest.raises(ArrayError, match="band_nm: is 1560 to 1550; give two rising"):
            fringe_grid_nm(CHIP, band_nm=(1560.0, 1550.0))
        with pytest.raises(ArrayError, match="points_per_fringe: is 4; give 8 or more"):
            fringe_grid_nm(CHIP, band_nm=(1550.0, 1560.0), points_per_fringe=4)

    @pytest.mark.parametrize(
        ("nm", "match"),
        [
            (np.array([1550.0, 1549.0]), "wavelength_nm: is not a rising row"),
            (np.array([1550.0, 1550.5]), "mode spacings blur the fringes; give at least 8 points"),
        ],
    )
    def test_wavelengths(self, nm, match):
        with pytest.raises(ArrayError, match=match):
            ripple_spectrum(
                CHIP,
                wavelength_nm=nm,
                r_front=np.asarray(0.01 + 0j),
                r_rear=np.asarray(0.01 + 0j),
                T_front=np.asarray(0.99),
                T_rear=np.asarray(0.99),
            )
