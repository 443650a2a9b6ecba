"""Exact derivatives of what a facet does to the mode, and shifts of indices stack by stack."""

import numpy as np
import pytest
from facets import GUIDES, SILICA, TANTALA, facet
from modal_in_numpy import Twin

from coatings.errors import InputError

BOTH = pytest.mark.parametrize("tm", [False, True])


@BOTH
@pytest.mark.parametrize("guide", GUIDES)
def test_gradients_against_cauchy_s_integral(guide, tm):
    one = facet(*GUIDES[guide], 1310.0, tm=tm, films=(SILICA + 0.01j, TANTALA), fine=2)
    twin = Twin(one.mode, highest_index=one.mode.n_eff[0].real)
    film, nm = [1, 0, 1, 0], np.array([[80.0, 190.0, 155.0, 240.0]])
    r, slope = one.amplitude_gradient(nm, film=film)
    big_r, big_slope = one.gradient(nm, film=film)
    films = [(SILICA + 0.01j, TANTALA)[kind] for kind in film]
    # The twin's sums end at q = 60, where those of TM still lack a millionth.
    error = (2e-6 if tm else 1e-7) * np.abs(slope).max()
    for layer in range(4):
        expected = twin.slope(films, nm[0], layer)
        assert abs(slope[0, 0, layer] - expected) < error
        by_r = 2.0 * (r[0, 0].conj() * expected).real
        assert abs(big_slope[0, 0, layer] - by_r) < 2.0 * error
    assert big_r[0, 0] == pytest.approx(abs(r[0, 0]) ** 2, rel=1e-14)


@BOTH
@pytest.mark.parametrize("guide", GUIDES)
def test_gradients_against_differences_of_high_order(guide, tm):
    one = facet(*GUIDES[guide], [1290.0, 1310.0], tm=tm, films=(SILICA + 0.01j, TANTALA))
    film, nm = [1, 0, 1, 0], np.array([[80.0, 190.0, 155.0, 240.0]])
    _, slope = one.amplitude_gradient(nm, film=film)
    for layer in range(4):
        step = np.zeros(4)
        step[layer] = 2.0
        found = 0.0
        for k, weight in ((1, 3 / 4), (2, -3 / 20), (3, 1 / 60)):
            up = one.reflection(nm + k * step, film=film)
            found += weight * (up - one.reflection(nm - k * step, film=film)) / 2.0
        assert np.abs(slope[0, :, layer] - found[0]).max() < 1e-7 * np.abs(slope).max()


def test_a_shift_of_the_guide_is_a_guide_that_is_shifted():
    nm = np.linspace(1280.0, 1340.0, 5)
    shift = np.array([-0.018, -0.004, 0.0, 0.007, 0.02])
    thickness = np.tile([80.0, 190.0], (5, 1)) + np.arange(5.0)[:, None]
    for tm in (False, True):
        for index, um in GUIDES.values():
            one = facet(index, um, nm, tm=tm)
            together = one.response(thickness, film=[1, 0], incident_shift=shift)
            _, slope = one.gradient(thickness, film=[1, 0], incident_shift=shift)
            for s, by in enumerate(shift):
                alone = one.shifted(by)
                expected = alone.response(thickness[s : s + 1], film=[1, 0])
                assert np.abs(together.r[s] - expected.r[0]).max() < 1e-6
                np.testing.assert_allclose(together.T[s], expected.T[0], atol=1e-6)
                np.testing.assert_allclose(together.S[s], expected.S[0], atol=2e-6)
                expected_slope = alone.gradient(thickness[s : s + 1], film=[1, 0])[1]
                np.testing.assert_allclose(slope[s], expected_slope[0], atol=1e-8)


@BOTH
def test_film_shifts_and_several_films_stack_by_stack(tm):
    rng = np.random.default_rng(5)
    nm = np.array([1280.0, 1310.0, 1340.0])
    one = facet(*GUIDES["unequal"], nm, tm=tm)
    thickness = rng.uniform(40.0, 300.0, (4, 3))
    film = np.array([[0, 1, 0], [1, 0, 1], [0, 0, 1], [1, 1, 0]])
    shift = rng.normal(0.0, 0.02, (4, 2)) + 1j * rng.uniform(0.0, 1e-3, (4, 2))
    together = one.response(thickness, film=film, film_shift=shift)
    value, slope = one.gradient(thickness, film=film, film_shift=shift)
    np.testing.assert_allclose(value, together.R, rtol=1e-13)
    for s in range(4):
        films = np.array([SILICA, TANTALA]) + shift[s]
        alone = facet(*GUIDES["unequal"], nm, tm=tm, films=films)
        expected = alone.response(thickness[s : s + 1], film=film[s])
        # The contour of the shifted films is another one: equal within the quadrature.
        np.testing.assert_allclose(together.r[s], expected.r[0], atol=1e-6)
        np.testing.assert_allclose(together.S[s], expected.S[0], atol=1e-6)
        steeper = alone.gradient(thickness[s : s + 1], film=film[s])[1]
        np.testing.assert_allclose(slope[s], steeper[0], atol=1e-7)


@BOTH
def test_weighted_gradient_is_the_weighted_sum(tm):
    rng = np.random.default_rng(6)
    one = facet(*GUIDES["tight"], [1290.0, 1310.0, 1330.0], tm=tm)
    thickness, weight = rng.uniform(40.0, 300.0, (4, 3)), rng.normal(size=(4, 3))
    value, slope = one.gradient(thickness, film=[0, 1, 0])
    found, weighted = one.weighted_gradient(thickness, film=[0, 1, 0], weight=weight)
    np.testing.assert_array_equal(found, value)
    np.testing.assert_allclose(weighted, (weight[:, :, None] * slope).sum(axis=1), rtol=1e-12)


def test_a_shift_too_far_is_refused_with_its_size():
    one = facet([3.3, 3.4, 1.0], [0.26], 976.0, tm=False)
    with pytest.raises(InputError, match=r"guide: with -.* on the index of every layer, .*976 nm"):
        one.reflection([[100.0]], film=[0], incident_shift=[-0.7])


def fourth_order(value, step):
    return (8.0 * (value(step) - value(-step)) - (value(2 * step) - value(-2 * step))) / 12.0


@BOTH
@pytest.mark.parametrize("k", [0.0, 0.02])
def test_gradients_of_every_share(k, tm):
    one = facet(*GUIDES["unequal"], [1290.0, 1310.0], tm=tm, films=(SILICA, TANTALA + 1j * k))
    film, nm = [1, 0, 1], np.array([[80.0, 190.0, 155.0], [100.0, 120.0, 130.0]])
    for of in ("R", "T", "S", "A"):
        value, slope = one.gradient(nm, film=film, of=of)
        np.testing.assert_allclose(value, getattr(one.response(nm, film=film), of), atol=1e-14)
        for layer in range(3):
            step = np.zeros(3)
            step[layer] = 0.5
            expected = fourth_order(
                lambda d, of=of: getattr(one.response(nm + d, film=film), of), step
            )
            np.testing.assert_allclose(slope[:, :, layer], 2.0 * expected, atol=1e-10)


@BOTH
def test_gradients_of_shares_of_shifted_guides(tm):
    one = facet(*GUIDES["unequal"], [1310.0], tm=tm, films=(SILICA, TANTALA + 0.01j))
    shift = np.array([0.007, -0.012])
    nm = np.array([[80.0, 190.0], [100.0, 120.0]])
    for of in ("T", "A"):
        value, slope = one.gradient(nm, film=[1, 0], of=of, incident_shift=shift)
        for s, by in enumerate(shift):
            alone = one.shifted(by).gradient(nm[s : s + 1], film=[1, 0], of=of)
            np.testing.assert_allclose(value[s], alone[0][0], atol=2e-6)
            np.testing.assert_allclose(slope[s], alone[1][0], atol=1e-8)


def test_a_share_that_is_none_of_the_four():
    with pytest.raises(InputError, match="of: got 'B'; give one of R, T, S, A"):
        facet(*GUIDES["weak"], 1310.0, tm=False).gradient([[100.0]], film=[0], of="B")
