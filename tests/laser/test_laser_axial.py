"""The field along the chip: closed forms, a boundary-value twin, balances and limits."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.constants import c, elementary_charge, h
from scipy.integrate import simpson, solve_bvp

from coatings.errors import ArrayError
from coatings.laser import (
    FacetLight,
    FieldModel,
    GainLaw,
    LaserChip,
    axial_power_ratio,
    axial_profile,
    estimate,
    facet_split,
    front_over_least,
    mirror_loss_per_cm,
    operate,
    threshold_current_A,
    total_slope_W_per_A,
)


def lost_uniform_W(chip: LaserChip, *, current_A: float, R1: float, R2: float) -> float:
    """slope (I - I_th) of the uniform model, cold."""
    mirror = mirror_loss_per_cm(R1, R2, length_um=chip.length_um)
    threshold = threshold_current_A(chip, threshold_gain_per_cm=chip.internal_loss_per_cm + mirror)
    return float(total_slope_W_per_A(chip, mirror_loss_per_cm=mirror) * (current_A - threshold))


def rigrod_cases() -> list[tuple[float, float, float, float]]:
    """Length [um], R1, R2 and current over threshold of twenty cases, fixed seed."""
    rng = np.random.default_rng(20)
    return [
        (
            float(rng.uniform(500.0, 6000.0)),
            float(10.0 ** rng.uniform(-4.0, -0.02)),
            float(10.0 ** rng.uniform(-2.0, -0.001)),
            float(1.0 + 10.0 ** rng.uniform(-3.0, 2.0)),
        )
        for _ in range(20)
    ]


@pytest.mark.parametrize(("length", "R1", "R2", "over"), rigrod_cases())
def test_rigrods_closed_form(pump, length, R1, R2, over):
    # L10: Rigrod, J. Appl. Phys. 36, 2487 (1965) (from memory): linear gain law without loss.
    chip = replace(
        pump, gain_law=GainLaw.LINEAR, internal_loss_per_cm=0.0, length_um=length, emitters=3
    )
    loss = mirror_loss_per_cm(R1, R2, length_um=length)
    current = float(over * threshold_current_A(chip, threshold_gain_per_cm=loss))
    profile = axial_profile(chip, current_A=current, R_front=R1, R_rear=R2)
    width_cm, photon_V = 95e-4, h * c / (elementary_charge * 976e-9)
    pumping = current / (3 * width_cm * length * 1e-4) / 120.0
    g0_L = 18.0 * (pumping - 1.0) * length * 1e-4
    saturation = 3 * 0.95 * width_cm * photon_V * 120.0 / 18.0
    root1, root2 = np.sqrt(R1), np.sqrt(R2)
    common = (g0_L + np.log(root1 * root2)) / ((root1 + root2) * (1.0 - root1 * root2))
    front = saturation * (1.0 - R1) * root2 * common
    rear = saturation * (1.0 - R2) * root1 * common
    assert profile.forward_W[-1] * (1.0 - R1) == pytest.approx(front, rel=1e-6)
    assert profile.backward_W[0] * (1.0 - R2) == pytest.approx(rear, rel=1e-6)
    ratio = axial_power_ratio(chip, current_A=current, R_front=R1, R_rear=R2)
    uniform = lost_uniform_W(chip, current_A=current, R1=R1, R2=R2)
    assert ratio * uniform == pytest.approx(front + rear, rel=1e-6)


def local_gain(law: GainLaw, pumping: float, density: np.ndarray) -> np.ndarray:
    """g/G0 by halving, slow and obvious."""
    low, high = np.zeros_like(density), np.full_like(density, pumping)
    for _ in range(60):
        y = 0.5 * (low + high)
        spontaneous = np.exp(y) if law is GainLaw.LOGARITHMIC else 1.0 + y
        over = spontaneous + y * density > pumping
        low, high = np.where(over, low, y), np.where(over, y, high)
    return 0.5 * (low + high)


@pytest.mark.parametrize("law", GainLaw)
@pytest.mark.parametrize(
    ("R1", "R2", "loss", "current"),
    [(0.03, 0.97, 0.8, 12.0), (0.005, 0.98, 0.8, 5.0), (0.3, 0.3, 3.0, 6.0), (0.4, 0.1, 0.0, 9.0)],
)
def test_boundary_value_twin(pump, law, R1, R2, loss, current):
    chip = replace(pump, gain_law=law, internal_loss_per_cm=loss)
    pumping = current / (95e-4 * 0.4) / 120.0
    saturation = 0.95 * 95e-4 * h * c / (elementary_charge * 976e-9) * 120.0 / 18.0

    def rates(z_cm: np.ndarray, logs: np.ndarray) -> np.ndarray:
        density = np.exp(logs[0]) + np.exp(logs[1])
        net = 18.0 * local_gain(law, pumping, density) - loss
        return np.array([net, -net])

    def ends(rear: np.ndarray, front: np.ndarray) -> np.ndarray:
        return np.array([rear[0] - rear[1] - np.log(R2), front[1] - front[0] - np.log(R1)])

    z = np.linspace(0.0, 0.4, 41)
    level = np.log(lost_uniform_W(chip, current_A=current, R1=R1, R2=R2) / saturation)
    guess = np.array([level + 0.0 * z, level - 0.5 + 0.0 * z])
    twin = solve_bvp(rates, ends, z, guess, tol=1e-8, max_nodes=20000)
    assert twin.success
    profile = axial_profile(chip, current_A=current, R_front=R1, R_rear=R2)
    forward, backward = saturation * np.exp(twin.sol(profile.z_um * 1e-4))
    np.testing.assert_allclose(profile.forward_W, forward, rtol=1e-6)
    np.testing.assert_allclose(profile.backward_W, backward, rtol=1e-6)


@pytest.mark.parametrize("law", GainLaw)
@pytest.mark.parametrize("loss", [0.0, 0.8, 25.0])
def test_stimulated_photons_are_lost_at_the_facets_or_inside(pump, law, loss):
    chip = replace(pump, gain_law=law, internal_loss_per_cm=loss, stages=2, emitters=4)
    profile = axial_profile(chip, current_A=800.0, R_front=0.01, R_rear=0.95, rise_K=15.0)
    assert profile.z_um[-1] == pytest.approx(4000.0, rel=1e-8)
    y = profile.gain_per_cm / 18.0
    held = np.exp(y) if law is GainLaw.LOGARITHMIC else 1.0 + y
    spontaneous = simpson(120.0 * np.exp(15.0 / 170.0) * held, x=profile.z_um * 1e-4)
    stimulated_A = 800.0 - 4 * 95e-4 * spontaneous
    photon_V = h * c / (elementary_charge * 976e-9)
    made = 0.95 * np.exp(-15.0 / 600.0) * 2 * photon_V * stimulated_A
    assert profile.lost_W + profile.internal_loss_W == pytest.approx(made, rel=1e-5)


@pytest.mark.parametrize("law", GainLaw)
def test_waves_obey_the_facets_and_their_product_is_constant(pump, law):
    chip = replace(pump, gain_law=law)
    profile = axial_profile(chip, current_A=12.0, R_front=0.03, R_rear=0.97)
    np.testing.assert_allclose(
        profile.forward_W * profile.backward_W,
        profile.forward_W[0] * profile.backward_W[0],
        rtol=1e-12,
    )
    assert profile.backward_W[-1] / profile.forward_W[-1] == pytest.approx(0.03, rel=1e-12)
    assert profile.forward_W[0] / profile.backward_W[0] == pytest.approx(0.97, rel=1e-12)


@pytest.mark.parametrize(("R", "ratio"), [(0.008, 5.63), (0.2, 1.34)])
def test_density_at_the_front_over_the_least(pump, R, ratio):
    # L9: identity; the 975 nm, 6 mm devices of Arslan et al. use these reflectances.
    assert front_over_least(R) == pytest.approx(ratio, abs=0.005)
    profile = axial_profile(pump, current_A=12.0, R_front=R, R_rear=0.99)
    assert profile.density_over_least[-1] == pytest.approx(float(front_over_least(R)), rel=1e-12)
    assert profile.density_over_least.min() == pytest.approx(1.0, abs=1e-3)


@pytest.mark.parametrize(
    ("R1", "R2", "ratio"),
    [(0.03, 0.97, 0.97687), (0.005, 0.98, 0.95080), (0.3, 0.3, 0.99927)],
)
def test_power_against_the_uniform_model(pump, R1, R2, ratio):
    # Computed for this project by independent code, cold, at 12 A.
    found = axial_power_ratio(pump, current_A=12.0, R_front=R1, R_rear=R2)
    assert found == pytest.approx(ratio, abs=6e-6)


@pytest.mark.parametrize("law", GainLaw)
def test_both_models_meet_as_the_facets_close_with_the_third_order(pump, law):
    chip = replace(pump, gain_law=law)
    logs = 0.4 / 2.0 ** np.arange(5)
    R = np.exp(-logs)
    off = 1.0 - axial_power_ratio(chip, current_A=12.0, R_front=R, R_rear=R)
    assert np.all(off > 0.0)
    order = np.log2(off[:-1] / off[1:])
    np.testing.assert_allclose(order, 3.0, atol=0.02)


def test_both_models_meet_at_threshold_with_the_first_order(pump):
    threshold = operate(
        pump, FacetLight.lossless(0.03), FacetLight.lossless(0.97), current_A=1.0
    ).threshold_A
    over = np.array([1e-3, 1e-4, 1e-5])
    off = 1.0 - axial_power_ratio(
        pump, current_A=threshold * (1.0 + over), R_front=0.03, R_rear=0.97
    )
    np.testing.assert_allclose(off[1:] / off[:-1], 0.1, rtol=0.01)
    below = axial_power_ratio(
        pump, current_A=threshold * np.array([1.0, 0.5, 0.0]), R_front=0.03, R_rear=0.97
    )
    np.testing.assert_array_equal(below, 1.0)


@given(
    st.sampled_from(list(GainLaw)),
    st.floats(-6.0, -0.01),
    st.floats(-3.0, -0.001),
    st.floats(0.0, 30.0),
    st.floats(0.0, 4.0),
)
def test_hole_burning_never_adds_light(law, log_R1, log_R2, loss, log_current):
    chip = LaserChip(
        wavelength_nm=976.0,
        length_um=3000.0,
        stripe_um=50.0,
        internal_loss_per_cm=loss,
        injection_efficiency=0.9,
        transparency_A_per_cm2=120.0,
        modal_gain_per_cm=18.0,
        gain_law=law,
    )
    ratio = axial_power_ratio(
        chip, current_A=10.0**log_current, R_front=10.0**log_R1, R_rear=10.0**log_R2
    )
    assert 0.0 < ratio <= 1.0 + 1e-9


def test_swapped_facets_make_the_same_light(pump):
    one = axial_power_ratio(pump, current_A=12.0, R_front=0.03, R_rear=0.97)
    assert axial_power_ratio(pump, current_A=12.0, R_front=0.97, R_rear=0.03) == pytest.approx(
        float(one), rel=1e-12
    )


def test_a_long_lossy_chip_saturates_where_gain_meets_loss(pump):
    # a_i L = 10: far along, the stronger wave settles where g(P) = a_i.
    chip = replace(pump, internal_loss_per_cm=25.0)
    profile = axial_profile(chip, current_A=200.0, R_front=0.01, R_rear=0.99)
    assert profile.gain_per_cm[-1] == pytest.approx(25.0, rel=1e-3)
    lost = axial_power_ratio(chip, current_A=200.0, R_front=0.01, R_rear=0.99) * lost_uniform_W(
        chip, current_A=200.0, R1=0.01, R2=0.99
    )
    assert lost == pytest.approx(profile.lost_W, rel=1e-4)


def test_operation_divides_axial_light_as_the_split_says(pump):
    front, rear = FacetLight(R=0.01, T=0.97, A=0.02), FacetLight(R=0.96, T=0.01, A=0.02, S=0.01)
    chip = replace(pump, thermal_K_per_W=0.0, spontaneous_factor=0.0)
    working = operate(chip, front, rear, current_A=12.0, model=FieldModel.AXIAL)
    profile = axial_profile(chip, current_A=12.0, R_front=0.01, R_rear=0.96)
    assert working.front_W == pytest.approx(profile.forward_W[-1] * 0.97, rel=1e-10)
    assert working.rear_W == pytest.approx(profile.backward_W[0] * 0.01, rel=1e-10)
    split = facet_split(front, rear)
    assert working.coating_absorbed_W == pytest.approx(split.absorbed * profile.lost_W, rel=1e-10)


def test_axial_model_is_taken_where_it_matters_only(pump):
    unequal = estimate(pump, FacetLight.lossless(0.03), FacetLight.lossless(0.97))
    equal = estimate(pump, FacetLight.lossless(0.3), FacetLight.lossless(0.3))
    assert (unequal.model, equal.model) == ("axial", "uniform")
    forced = estimate(
        pump, FacetLight.lossless(0.3), FacetLight.lossless(0.3), model=FieldModel.AXIAL
    )
    assert forced.model == "axial"
    assert forced.front_W < equal.front_W


def test_refusals(pump):
    with pytest.raises(ArrayError, match=r"0.3 A is not above the threshold of 0.6095 A"):
        axial_profile(pump, current_A=0.3, R_front=0.03, R_rear=0.97)
    with pytest.raises(ArrayError, match="R_front, R_rear: both are 1"):
        axial_profile(pump, current_A=3.0, R_front=1.0, R_rear=1.0)
    with pytest.raises(ArrayError, match="R_front: is zero or negative"):
        front_over_least(0.0)
    with pytest.raises(ArrayError, match="R_rear: reaches 2"):
        axial_power_ratio(pump, current_A=3.0, R_front=0.5, R_rear=2.0)
