"""The reflector before the front: sums over round trips, energy, locking."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from coatings.errors import ArrayError, InputError
from coatings.laser import (
    External,
    FacetLight,
    estimate,
    estimate_external,
    highest_locking_R,
    locking_margin_per_cm,
    rival_nm,
    with_external,
)

GRATING = External(reflectance=0.05, coupling=0.8, wavelength_nm=976.0, band_nm=(975.5, 976.5))
REAR = FacetLight.lossless(0.97)
share = st.floats(1e-4, 0.98)


def fields(R: float, T: float, outside: float, rho: float) -> np.ndarray:
    """Reflected amplitude over the phase of the path outside, as a sum of its round trips."""
    theta = np.linspace(0.0, 2.0 * np.pi, 721)
    wave = rho * np.exp(1j * theta)
    trips = sum((np.sqrt(outside) * wave) ** m for m in range(400))
    return np.sqrt(R) - T * wave * trips


@pytest.mark.parametrize(
    ("R", "T", "outside", "reflectance", "coupling"),
    [
        (0.03, 0.97, 0.03, 0.05, 0.8),
        (0.001, 0.999, 0.001, 0.3, 0.9),
        (0.3, 0.6, 0.25, 0.9, 0.95),
        (0.9, 0.1, 0.9, 0.9, 1.0),
    ],
)
def test_mean_and_range_are_those_of_the_coherent_sum(R, T, outside, reflectance, coupling):
    external = External(reflectance=reflectance, coupling=coupling)
    both = with_external(FacetLight(R=R, T=T, A=1.0 - R - T), external, R_outside=outside)
    power = np.abs(fields(R, T, outside, coupling * np.sqrt(reflectance))) ** 2
    found = [both.R_least, both.light.R, both.R_most]
    assert found == pytest.approx([power.min(), power[:-1].mean(), power.max()], rel=1e-9)


@given(share, share, share)
def test_shares_add_up_and_lie_in_range(R, reflectance, coupling):
    both = with_external(
        FacetLight.lossless(R), External(reflectance=reflectance, coupling=coupling)
    )
    light = both.light
    np.testing.assert_allclose(light.R + light.T + light.A + light.S, 1.0, atol=1e-12)
    assert both.R_least <= light.R <= both.R_most <= 1.0 + 1e-12
    np.testing.assert_allclose(light.A, 0.0, atol=1e-12)
    assert light.S >= -1e-12


def test_full_coupling_to_a_lossless_reflector_loses_nothing():
    light = with_external(FacetLight.lossless(0.1), External(reflectance=0.4)).light
    np.testing.assert_allclose(light.S, 0.0, atol=1e-14)


def test_no_reflector_changes_only_what_is_collected():
    light = with_external(FacetLight.lossless(0.1), External(reflectance=0.0, coupling=0.7)).light
    np.testing.assert_allclose([light.R, light.T], [0.1, 0.63], rtol=1e-14)


class TestLocking:
    def test_rival_is_the_gain_peak_or_the_nearer_edge_of_the_band(self, pump):
        peaked = replace(pump, gain_peak_nm=980.0, gain_width_nm=40.0)
        assert rival_nm(peaked, GRATING) == 980.0
        assert rival_nm(replace(peaked, gain_peak_nm=976.3), GRATING) == 976.5
        assert rival_nm(replace(peaked, gain_peak_nm=975.6), GRATING) == 975.5
        assert rival_nm(peaked, External(reflectance=0.05, wavelength_nm=976.0)) == 980.0
        assert rival_nm(pump, External(reflectance=0.05)) is None

    def test_margin_without_detuning_is_the_gain_in_mirror_loss(self, pump):
        margin = locking_margin_per_cm(
            pump, R_locked=0.06, R_rival=0.03, R_rear=0.97, locked_nm=976.0, rival_nm=975.0
        )
        assert margin == pytest.approx(np.log(2.0) / 0.8, rel=1e-13)

    def test_margin_with_detuning_by_hand(self, pump):
        chip = replace(pump, gain_peak_nm=984.0, gain_width_nm=40.0)
        margin = locking_margin_per_cm(
            chip, R_locked=0.06, R_rival=0.03, R_rear=0.97, locked_nm=976.0, rival_nm=984.0
        )
        # The peak has 1/0.92 of the gain at 976 nm: 1 - 2 (8/40)^2 = 0.92.
        rival = 0.92 * (0.8 - np.log(0.03 * 0.97) / 0.8)
        assert margin == pytest.approx(rival - (0.8 - np.log(0.06 * 0.97) / 0.8), rel=1e-12)

    def test_rival_without_gain_never_wins(self, pump):
        chip = replace(pump, gain_peak_nm=976.0, gain_width_nm=10.0)
        margin = locking_margin_per_cm(
            chip, R_locked=0.06, R_rival=0.03, R_rear=0.97, locked_nm=976.0, rival_nm=990.0
        )
        assert margin == np.inf

    def test_locked_wavelength_without_gain(self, pump):
        chip = replace(pump, gain_peak_nm=976.0, gain_width_nm=10.0)
        with pytest.raises(ArrayError, match="locked_nm: the medium has no gain at 990 nm"):
            locking_margin_per_cm(
                chip, R_locked=0.06, R_rival=0.03, R_rear=0.97, locked_nm=990.0, rival_nm=976.0
            )

    @pytest.mark.parametrize("detuning", [-12.0, -6.0, 5.0, 9.0])
    def test_coating_for_a_detuning_sits_where_the_margin_vanishes(self, pump, detuning):
        chip = replace(pump, gain_peak_nm=980.0, gain_width_nm=40.0)
        limit = highest_locking_R(chip, GRATING, R_rear=0.97, detuning_nm=detuning)
        margins = [
            locking_margin_per_cm(
                chip,
                R_locked=with_external(FacetLight.lossless(R), GRATING).light.R,
                R_rival=R,
                R_rear=0.97,
                locked_nm=980.0 + detuning,
                rival_nm=980.0,
            )
            for R in (0.99 * limit, limit, 1.01 * limit)
        ]
        assert margins[0] > 0.0 > margins[2]
        assert margins[1] == pytest.approx(0.0, abs=1e-9)

    def test_more_detuning_asks_for_a_lower_coating(self, pump):
        chip = replace(pump, gain_peak_nm=980.0, gain_width_nm=40.0)
        limits = [
            highest_locking_R(chip, GRATING, R_rear=0.97, detuning_nm=d)
            for d in (2.0, 5.0, 10.0, 15.0)
        ]
        assert np.all(np.diff(limits) < 0.0)

    def test_the_gain_peak_itself_locks_behind_any_front(self, pump):
        assert highest_locking_R(pump, GRATING, R_rear=0.97) == 1.0

    def test_nothing_fed_back_or_nothing_to_beat(self, pump):
        dark = replace(GRATING, reflectance=0.0)
        assert highest_locking_R(pump, dark, R_rear=0.97) is None
        assert highest_locking_R(pump, External(reflectance=0.1), R_rear=0.97) is None

    def test_too_far_for_any_coating(self, pump):
        chip = replace(pump, gain_peak_nm=980.0, gain_width_nm=40.0)
        weak = replace(GRATING, reflectance=1e-9)
        assert highest_locking_R(chip, weak, R_rear=0.97, detuning_nm=19.9) is None


class TestEstimate:
    def test_figures_are_those_of_the_facet_with_its_reflector(self, pump):
        front = FacetLight.lossless(0.005)
        found = estimate_external(pump, front, REAR, external=GRATING)
        light = with_external(front, GRATING).light
        assert found.laser == estimate(pump, light, REAR)
        assert found.R_least < found.R_effective < found.R_most
        assert found.laser.threshold_A < estimate(pump, front, REAR).threshold_A
        assert found.locked_nm == 976.0
        assert found.locks
        figures = found.to_json_dict()
        assert figures["front_W"] == found.laser.front_W
        assert figures["locks"] is True

    def test_own_resonance_wins_far_from_the_peak(self, pump):
        chip = replace(pump, gain_peak_nm=990.0, gain_width_nm=40.0)
        found = estimate_external(chip, FacetLight.lossless(0.05), REAR, external=GRATING)
        assert found.rival_nm == 990.0
        assert found.locks is False
        better = estimate_external(
            chip, FacetLight.lossless(found.R_front_locks_below * 0.99), REAR, external=GRATING
        )
        assert better.locks

    def test_reflector_everywhere_has_nothing_to_hold_against(self, pump):
        external = External(reflectance=0.05)
        found = estimate_external(pump, FacetLight.lossless(0.01), REAR, external=external)
        assert found.locking_margin_per_cm is found.locks is found.rival_nm is None
        assert found.locked_nm == 976.0

    def test_locked_wavelength_is_the_bands_middle_without_its_own(self, pump):
        external = External(reflectance=0.05, band_nm=(974.0, 975.0))
        assert external.locked_nm(pump) == 974.5


class TestRefusals:
    @pytest.mark.parametrize(
        ("given_", "match"),
        [
            ({"reflectance": 1.5}, "external reflectance: is 1.5; .* at most 1"),
            ({"reflectance": 0.1, "coupling": -0.1}, "external coupling: is -0.1"),
            ({"reflectance": 0.1, "wavelength_nm": 0.0}, "external wavelength_nm: is 0"),
            ({"reflectance": 0.1, "band_nm": (980.0, 970.0)}, "band_nm: is 980 to 970; give two"),
            (
                {"reflectance": 0.1, "band_nm": (970.0, 980.0), "wavelength_nm": 990.0},
                "misses wavelength_nm = 990; widen the band",
            ),
        ],
    )
    def test_reflectors(self, given_, match):
        with pytest.raises(InputError, match=match):
            External(**given_)

    def test_no_way_out_between_two_mirrors(self):
        with pytest.raises(ArrayError, match="front and reflector both reflect all"):
            with_external(FacetLight.lossless(1.0), External(reflectance=1.0))

    def test_outside_reflectance_that_cannot_be(self):
        with pytest.raises(ArrayError, match="R_outside: is negative or more than 1 - T"):
            with_external(FacetLight.lossless(0.1), GRATING, R_outside=0.5)
