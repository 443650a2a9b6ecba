"""Modes of a guide: values, their number, their figures, and what they tend to."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from coatings.errors import InputError
from coatings.optics.far_field import far_field
from coatings.optics.guide import Guide, count_modes, fundamental, modes, shifted_mode

BOTH = pytest.mark.parametrize("tm", [False, True])
FIVE = ([3.17, 3.25, 3.40, 3.30, 3.20], [0.10, 0.20, 0.15])


# Computed for this project by independent code, to the digits shown; no literature.
@pytest.mark.parametrize(
    ("core", "clad", "um", "nm", "n_eff"),
    [
        (3.38, 3.17, 0.1, 1550.0, 3.181388),
        (3.38, 3.17, 0.2, 1550.0, 3.207772),
        (3.38, 3.17, 0.4, 1550.0, 3.262305),
        (3.60, 3.385, 0.2, 850.0, 3.474881),
        (3.60, 3.24, 0.3, 860.0, 3.489290),
    ],
)
def test_effective_indices(core, clad, um, nm, n_eff):
    mode = fundamental(Guide([nm], [clad, core, clad], [um]), tm=False)
    assert mode.n_eff[0] == pytest.approx(n_eff, abs=5.1e-7)


@BOTH
@pytest.mark.parametrize("um", [0.1, 0.31, 1.0, 7.3, 40.0])
def test_number_of_modes_of_the_symmetric_slab(um, tm):
    # Closed form: V = k0 d sqrt(n1^2 - n2^2), 1 + floor(V/pi) modes, TE and TM alike.
    v = 2e3 * np.pi / 1310.0 * um * np.sqrt(3.4**2 - 3.2**2)
    guide = Guide([1310.0], [3.2, 3.4, 3.2], [um])
    assert count_modes(guide, tm=tm)[0] == 1 + int(v / np.pi)
    assert len(modes(guide, tm=tm)) == 1 + int(v / np.pi)


@BOTH
def test_every_mode_of_two_far_guides_is_a_mode_of_one_of_them(tm):
    left = Guide([1310.0], [3.2, 3.4, 3.2], [2.0])
    right = Guide([1310.0], [3.2, 3.45, 3.2], [1.5])
    both = Guide([1310.0], [3.2, 3.4, 3.2, 3.45, 3.2], [2.0, 8.0, 1.5])
    alone = [m.n_eff[0].real for guide in (left, right) for m in modes(guide, tm=tm)]
    found = [m.n_eff[0].real for m in modes(both, tm=tm)]
    np.testing.assert_allclose(found, sorted(alone, reverse=True), rtol=0, atol=1e-8)


@BOTH
def test_modes_are_orthogonal_and_of_falling_index_with_one_zero_more_each(tm):
    guide = Guide([1310.0], [3.17, 3.25, 3.40, 3.25, 3.20], [0.8, 1.5, 1.1])
    x = np.linspace(-8.0, 12.0, 200_001)
    layer = np.searchsorted([0.0, 0.8, 2.3, 3.4], x)
    weight = 1.0 / guide.index[layer, 0].real ** 2 if tm else 1.0
    found = modes(guide, tm=tm)
    fields = np.array([m.profile(x).real for m in found])
    fields /= np.sqrt((weight * fields**2).sum(axis=1))[:, None]
    np.testing.assert_allclose((weight * fields) @ fields.T, np.eye(len(found)), atol=2e-5)
    index = [m.n_eff[0].real for m in found]
    assert index == sorted(index, reverse=True)
    for order, field in enumerate(fields):
        seen = field[np.abs(field) > 1e-12]
        assert (np.diff(np.sign(seen)) != 0).sum() == order


def _split(index, um, part):
    """The same guide with every inner layer cut in two."""
    layers = [index[0]] + [n for n in index[1:-1] for _ in range(2)] + [index[-1]]
    return layers, [piece for d in um for piece in (part * d, (1.0 - part) * d)]


@BOTH
@settings(max_examples=40, deadline=None)
@given(
    inner=st.lists(
        st.tuples(st.floats(3.0, 3.6), st.floats(0.02, 1.5), st.floats(-0.001, 0.001)),
        min_size=1,
        max_size=2,
    ),
    outer=st.tuples(st.floats(2.9, 3.2), st.floats(2.9, 3.2)),
    part=st.floats(0.1, 0.9),
)
def test_cut_layers_and_a_turned_guide_change_nothing(inner, outer, part, tm):
    index = [outer[0], *(n + 1j * k for n, _, k in inner), outer[1]]
    um = [d for _, d, _ in inner]
    guide = Guide([1000.0], index, um)
    real = Guide([1000.0], np.real(index), um)
    try:
        close = [m.n_eff[0].real for m in modes(real, tm=tm)][:2]
    except InputError:  # no mode, or nearly none, or twins
        return
    if len(close) > 1 and close[0] - close[1] < 1e-2:
        return
    mode = fundamental(guide, tm=tm)
    cut = fundamental(Guide([1000.0], *_split(index, um, part)), tm=tm)
    turned = fundamental(Guide([1000.0], index[::-1], um[::-1]), tm=tm)
    assert abs(cut.n_eff[0] - mode.n_eff[0]) < 1e-12
    assert abs(turned.n_eff[0] - mode.n_eff[0]) < 1e-12
    together = cut.confinement[1:-1, 0].reshape(-1, 2).sum(axis=1)
    np.testing.assert_allclose(together, mode.confinement[1:-1, 0], atol=1e-10)
    np.testing.assert_allclose(turned.confinement[::-1], mode.confinement, atol=1e-10)
    np.testing.assert_allclose(turned.near_field_height_um, mode.near_field_height_um, rtol=1e-7)


@BOTH
def test_index_slopes_by_differences(tm):
    index, um = np.array(FIVE[0], complex), FIVE[1]
    mode = fundamental(Guide([1310.0], index, um), tm=tm)
    for layer in range(5):
        step = np.zeros(5, complex)
        step[layer] = 1e-5
        up = fundamental(Guide([1310.0], index + step, um), tm=tm).n_eff[0]
        down = fundamental(Guide([1310.0], index - step, um), tm=tm).n_eff[0]
        assert mode.index_slopes[layer, 0] == pytest.approx((up - down) / 2e-5, abs=1e-9)


@BOTH
def test_small_loss_acts_through_the_slopes(tm):
    index, um = np.array(FIVE[0], complex), FIVE[1]
    loss = 1e-6 * np.array([1.0, 2.0, -3.0, 1.0, 0.5])
    slopes = fundamental(Guide([1310.0], index, um), tm=tm).index_slopes[:, 0].real
    n_eff = fundamental(Guide([1310.0], index + 1j * loss, um), tm=tm).n_eff[0]
    assert n_eff.imag == pytest.approx(slopes @ loss, rel=1e-4)


@BOTH
def test_no_dispersion_makes_the_index_depend_on_length_over_wavelength_only(tm):
    guide = Guide([1310.0], *FIVE)
    scaled = Guide([2620.0], FIVE[0], np.multiply(FIVE[1], 2.0))
    one, two = fundamental(guide, tm=tm), fundamental(scaled, tm=tm)
    assert abs(one.n_eff[0] - two.n_eff[0]) < 1e-14
    assert two.near_field_height_um[0] == pytest.approx(2.0 * one.near_field_height_um[0])
    assert two.far_field_fwhm_deg[0] == pytest.approx(one.far_field_fwhm_deg[0], abs=1e-8)


@BOTH
def test_group_index_of_a_wide_guide_is_the_core_s(tm):
    slope = -3e-4
    guide = Guide([1310.0], [3.2, 3.4, 3.2], [60.0], [0.0, slope, 0.0])
    mode = fundamental(guide, tm=tm)
    assert mode.group_index[0] == pytest.approx(3.4 - 1310.0 * slope, abs=3e-5)
    assert mode.confinement[1, 0] == pytest.approx(1.0, abs=1e-5)


@BOTH
@pytest.mark.parametrize("loss", [0.0, 0.05])
def test_figures_against_sums_over_the_profile(tm, loss):
    index = np.array(FIVE[0]) + 1j * np.array([0.0, 0.0, loss, 0.0, 0.0])
    mode = fundamental(Guide([1310.0], index, FIVE[1]), tm=tm)
    x = (np.arange(400_000) + 0.5) * 3e-5 - 6.0
    step = x[1] - x[0]
    layer = np.searchsorted(np.cumsum([0.0, *FIVE[1]]), x)
    phi = mode.profile(x)
    w = 1.0 / index[layer] ** 2 if tm else 1.0
    flow = (mode.n_eff[0] * w).real * np.abs(phi) ** 2
    share = np.bincount(layer, flow) / flow.sum()
    np.testing.assert_allclose(mode.confinement[:, 0], share, atol=2e-5)
    slope = np.gradient(phi, step) / (2e3 * np.pi / 1310.0)
    energy = np.abs(phi) ** 2
    if tm:
        energy = np.abs(mode.n_eff[0] * w * phi) ** 2 + np.abs(w * slope) ** 2
    height = energy.sum() * step / energy.max()
    assert mode.near_field_height_um[0] == pytest.approx(height, rel=4e-4)


@BOTH
def test_far_field_against_a_plain_sum(tm):
    mode = fundamental(Guide([1310.0], *FIVE), tm=tm)
    x = (np.arange(40_000) + 0.5) * 3e-4 - 6.0
    layer = np.searchsorted(np.cumsum([0.0, *FIVE[1]]), x)
    field = mode.profile(x) / (mode.guide.index[layer, 0] ** 2 if tm else 1.0)
    angle = np.linspace(-80.0, 80.0, 33)
    k = 2e3 * np.pi / 1310.0 * np.sin(np.radians(angle))
    sums = np.abs(np.exp(-1j * np.outer(k, x)) @ field) ** 2
    sums *= 1.0 if tm else np.cos(np.radians(angle)) ** 2
    np.testing.assert_allclose(far_field(mode, angle), sums / sums.max(), atol=1e-5)


@BOTH
def test_far_field_width(tm):
    mode = fundamental(Guide([1310.0], *FIVE), tm=tm)
    angle = np.linspace(-60.0, 60.0, 24_001)
    above = angle[far_field(mode, angle) > 0.5]
    assert mode.far_field_fwhm_deg[0] == pytest.approx(above[-1] - above[0], abs=0.011)


def test_far_field_of_a_wide_mode_is_that_of_its_cosine():
    # E ~ cos(pi x/d) within d: half width where the transform falls to 1/sqrt(2).
    mode = fundamental(Guide([1000.0], [3.0, 3.5, 3.0], [30.0]), tm=False)
    # cos(u)/(1 - (2u/pi)^2) = 1/sqrt(2) at u = 1.8678; u = pi d sin(theta)/lambda
    effective_um = 30.0 + 2.0 * mode.tail_um[0, 0]
    half = np.degrees(np.arcsin(1.86781 / (np.pi * effective_um)))
    assert mode.far_field_fwhm_deg[0] == pytest.approx(2.0 * half, rel=1e-3)


def test_a_far_field_that_stays_above_half_has_no_width():
    mode = fundamental(Guide([1550.0], [1.0, 3.4, 1.0], [0.06]), tm=True)
    tight = fundamental(Guide([1550.0], [1.0, 3.4, 1.0], [0.35]), tm=True)
    assert np.isfinite(mode.far_field_fwhm_deg[0])
    assert np.isnan(tight.far_field_fwhm_deg[0])


@BOTH
def test_many_wavelengths_are_as_one_by_one(tm):
    nm = np.array([1290.0, 1310.0, 1330.0])
    index = np.array(FIVE[0])[:, None] - 3e-4 * (nm - 1310.0)
    together = fundamental(Guide(nm, index, FIVE[1]), tm=tm)
    for place, wavelength in enumerate(nm):
        alone = fundamental(Guide([wavelength], index[:, place], FIVE[1]), tm=tm)
        assert together.n_eff[place] == alone.n_eff[0]
        assert together.far_field_fwhm_deg[place] == alone.far_field_fwhm_deg[0]
        x = np.linspace(-1.0, 2.0, 7)
        np.testing.assert_array_equal(together.profile(x, place=place), alone.profile(x))


@BOTH
def test_profile_is_continuous_and_meets_the_interfaces(tm):
    mode = fundamental(Guide([1310.0], *FIVE), tm=tm)
    at = np.cumsum([0.0, *FIVE[1]])
    np.testing.assert_allclose(mode.profile(at - 1e-12), mode.profile(at + 1e-12), atol=1e-9)
    assert np.abs(mode.profile(at)).max() == pytest.approx(1.0, abs=1e-12)


@BOTH
def test_a_shift_moves_the_index_by_the_sum_of_slopes(tm):
    mode = fundamental(Guide([1310.0], *FIVE), tm=tm)
    moved = shifted_mode(mode, by=1e-6).n_eff[0] - mode.n_eff[0]
    assert moved.real == pytest.approx(1e-6 * mode.index_slopes[:, 0].real.sum(), rel=1e-4)


def test_what_was_given_is_neither_changed_nor_shared():
    nm, um = np.array([1310.0]), np.array([0.2])
    guide = Guide(nm, [3.2, 3.4, 3.2], um)
    before = fundamental(guide, tm=False).n_eff[0]
    nm[0], um[0] = 900.0, 3.0
    assert fundamental(guide, tm=False).n_eff[0] == before
    with pytest.raises(ValueError, match="read-only"):
        guide.index[0, 0] = 1.0
