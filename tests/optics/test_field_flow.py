"""Field strengths and heat at work, and what `standing_wave` refuses."""

import numpy as np
import pytest
from scipy.constants import epsilon_0
from scipy.constants import speed_of_light as c

from coatings.errors import ArrayError, InputError
from coatings.optics import Scene
from coatings.optics.field import standing_wave
from coatings.optics.flow import absorbed_W_per_cm3, chip_flow_MW_per_cm2, field_V_per_m

SCENE = Scene([900.0, 950.0], 3.3, 1.0, [[1.45, 1.45]])


def test_field_of_a_plane_wave_in_vacuum():
    """Flow = c eps0 E^2/2 (textbook): 10 MW/cm2 are 8.68 MV/m."""
    found = field_V_per_m(1.0, flow_MW_per_cm2=10.0, flow_index=1.0)
    assert found == pytest.approx(np.sqrt(2 * 1e11 / (c * epsilon_0)), rel=1e-9)
    assert found == pytest.approx(8.68e6, rel=1e-3)


def test_field_carries_the_flow_outside():
    """Behind a clear coating the flow is T times that which arrives, whatever the angle."""
    for tm in (False, True):
        scene = Scene([976.0], 3.3, 1.0, [[1.45]], q=0.6, tm=tm)
        wave = standing_wave(scene, [100.0], film=[0])
        E = field_V_per_m(wave.face_E2[0, -1, 1], flow_MW_per_cm2=2.0, flow_index=wave.flow_index)
        flow = 0.5 * c * epsilon_0 * E**2 * np.sqrt(1.0 - 0.6**2)
        assert flow[0] == pytest.approx(2e10 * wave.T[0], rel=1e-9)


def test_flow_per_watt_leaving():
    """1 W through T = 0.5 and 100 um2: 2 W arrive, 2 MW/cm2."""
    assert chip_flow_MW_per_cm2(leaving_W=1.0, T=0.5, area_um2=100.0) == pytest.approx(2.0)
    wave = standing_wave(SCENE, [100.0], film=[0])
    np.testing.assert_allclose(wave.per_leaving * wave.T, 1.0, rtol=1e-15)


def test_heat():
    """1e-5 of 1 MW/cm2 in a nanometre: 10 W/cm2 in 1e-7 cm."""
    assert absorbed_W_per_cm3(1e-5, flow_MW_per_cm2=1.0) == pytest.approx(1e8)


@pytest.mark.parametrize("bad", [-1.0, float("nan"), float("inf")])
def test_bad_flows(bad):
    with pytest.raises(InputError, match=r"flow_MW_per_cm2: got .*; give 0 or more"):
        field_V_per_m(1.0, flow_MW_per_cm2=bad, flow_index=1.0)
    with pytest.raises(InputError, match=r"flow_MW_per_cm2: got .*; give 0 or more"):
        absorbed_W_per_cm3(1.0, flow_MW_per_cm2=bad)
    good = {"leaving_W": 1.0, "T": 0.5, "area_um2": 1.0}
    for key, least in (("leaving_W", "0 or more"), ("T", "more than 0"), ("area_um2", "more")):
        with pytest.raises(InputError, match=f"{key}: got .*; give {least}"):
            chip_flow_MW_per_cm2(**{**good, key: bad})


def test_nothing_leaves():
    with pytest.raises(InputError, match=r"T: got 0\.0; give more than 0"):
        chip_flow_MW_per_cm2(leaving_W=1.0, T=0.0, area_um2=1.0)


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"step_nm": 0.0}, "step_nm: got 0.0; give more than 0"),
        ({"chip_nm": -1.0}, "chip_nm: got -1.0; give 0 or more"),
        ({"outside_nm": float("nan")}, "outside_nm: got nan; give 0 or more"),
    ],
)
def test_bad_profiles(change, message):
    with pytest.raises(InputError, match=message):
        standing_wave(SCENE, [100.0], film=[0]).profile(**change)


@pytest.mark.parametrize(
    ("thickness", "film", "message"),
    [
        ([[100.0]], [0], r"thickness_nm: has 2 axes \(shape \(1, 1\)\); give 1"),
        ([-5.0], [0], r"thickness_nm\[0, 0\]: is -5.0 nm; give 0 or more"),
        ([100.0], [[0]], r"film: has 2 axes \(shape \(1, 1\)\); give 1"),
        ([100.0], [1], r"film\[0\]: is 1; the scene has 1 films"),
        ([100.0, 50.0], [0], r"film: has shape \(1,\); expected \(2,\)"),
    ],
)
def test_bad_stacks(thickness, film, message):
    with pytest.raises(ArrayError, match=message):
        standing_wave(SCENE, thickness, film=film)


def test_bad_scenes():
    films = [[1.45, 1.45]]
    growing = Scene([900.0, 950.0], 3.3, 1.0, films, q=[0.5, 0.5 + 0.1j])
    with pytest.raises(ArrayError, match=r"q\[1\]: is \(0.5\+0.1j\); give a real one"):
        standing_wave(growing, [100.0], film=[0])
    dark = Scene([900.0, 950.0], 3.3, 1.0, films, q=[3.4, 0.5])
    with pytest.raises(ArrayError, match=r"incident\[0\]: is \(3.3\+0j\); no power flows"):
        standing_wave(dark, [100.0], film=[0])
