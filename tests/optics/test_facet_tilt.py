"""A tilted stripe: overlap, waves around normal incidence, the film alone, what is refused."""

import numpy as np
import pytest
from scipy.integrate import quad

from coatings.errors import ArrayError, InputError
from coatings.optics import Scene, amplitude_gradient, reflection, response
from coatings.optics.facet import ModalFacet
from coatings.optics.guide import Guide, fundamental
from coatings.optics.tilt import TiltedFacet, coating_scene, lateral_overlap

BOTH = pytest.mark.parametrize("tm", [False, True])
NM = np.array([1290.0, 1310.0, 1330.0])
N = 3.2
STACKS = np.array([[120.0, 200.0], [60.0, 150.0]])


def scene(tm, *, incident=N, outside=1.0):
    return Scene(NM, incident, outside, np.repeat([[1.45], [2.1]], 3, axis=1), tm=tm)


def by_direct_integral(plane, nm, film, *, tilt_deg, lateral_um, place):
    """The field of the tilted beam on the facet, its waves reflected one by one, and the overlap.

    A plain sum over x and over kx; nothing is centred or taken out.
    """
    theta, w = np.radians(tilt_deg), 0.5 * lateral_um
    k0 = 2e3 * np.pi / plane.wavelength_nm[place]
    b = k0 * N * np.sin(theta)
    x = np.linspace(-8.0 * w, 8.0 * w, 2001)
    dx = x[1] - x[0]
    forth = np.exp(-((x * np.cos(theta) / w) ** 2) + 1j * b * x)
    back = np.exp(-((x * np.cos(theta) / w) ** 2) - 1j * b * x)
    kx = np.linspace(-0.999, 0.999, 2001) * k0 * N
    spectrum = np.exp(-1j * np.outer(kx, x)) @ forth * dx
    waves = Scene(
        np.full(kx.size, plane.wavelength_nm[place]),
        N,
        plane.outside[place],
        np.repeat(plane.films[:, place : place + 1], kx.size, axis=1),
        q=kx / k0,
        tm=np.logical_not(plane.tm[place]).repeat(kx.size),
    )
    r = reflection(waves, nm[None, :], film=film)[0]
    reflected = np.exp(1j * np.outer(x, kx)) @ (spectrum * r) * (kx[1] - kx[0]) / (2.0 * np.pi)
    return (reflected * back.conj()).sum() / (np.abs(back) ** 2).sum()


def test_overlap_against_a_numerical_integral():
    for tilt, um in ((0.0, 3.0), (2.0, 3.5), (5.0, 2.0), (7.0, 1.2)):
        found = lateral_overlap([1310.0], [N], tilt_deg=tilt, lateral_um=um)[0]
        theta, w = np.radians(tilt), 0.5 * um / np.cos(np.radians(tilt))
        b = 2e3 * np.pi / 1310.0 * N * np.sin(theta)
        top, _ = quad(
            lambda x, w=w, b=b: np.exp(-2.0 * (x / w) ** 2) * np.cos(2.0 * b * x),
            -8.0 * w,
            8.0 * w,
            limit=400,
            epsabs=1e-13,
        )
        below, _ = quad(lambda x, w=w: np.exp(-2.0 * (x / w) ** 2), -8.0 * w, 8.0 * w)
        assert found == pytest.approx(top / below, abs=1e-10)
        square = np.exp(-((2.0 * np.pi * N * 0.5 * um * np.tan(theta) / 1.310) ** 2))
        assert found**2 == pytest.approx(square, rel=1e-12)


@BOTH
@pytest.mark.parametrize(("tilt", "um"), [(1.0, 3.0), (3.0, 3.5), (4.0, 1.5)])
def test_reflection_into_the_mode_against_the_direct_integral(tilt, um, tm):
    plane = scene(tm)
    found = TiltedFacet(plane, tilt, um).reflection(STACKS, film=[1, 0])
    for s, nm in enumerate(STACKS):
        for place in (0, 2):
            expected = by_direct_integral(
                plane, nm, [1, 0], tilt_deg=tilt, lateral_um=um, place=place
            )
            overlap = lateral_overlap([NM[place]], [N], tilt_deg=tilt, lateral_um=um)[0]
            assert abs(found[s, place] - expected) < 1e-6 * overlap + 1e-10


def test_weights_sum_to_one():
    for um in (0.8, 3.0, 20.0):
        tilted = TiltedFacet(scene(False), 3.0, um)
        np.testing.assert_allclose(tilted.weight.sum(axis=1), 1.0, atol=1e-9)


@BOTH
def test_a_wide_stripe_meets_the_film_as_at_normal_incidence_not_at_the_tilt(tm):
    plane = scene(tm)
    tilted = TiltedFacet(plane, 0.3, 60.0).reflection(STACKS, film=[1, 0])
    overlap = lateral_overlap(NM, N, tilt_deg=0.3, lateral_um=60.0)
    normal = reflection(plane, STACKS, film=[1, 0])
    np.testing.assert_allclose(tilted / overlap, normal, atol=1e-5)


@BOTH
def test_no_tilt_is_no_tilt(tm):
    plane = scene(tm)
    for lateral in (None, 3.0):
        found = TiltedFacet(plane, 0.0, lateral).response(STACKS, film=[1, 0])
        expected = response(plane, STACKS, film=[1, 0])
        np.testing.assert_allclose(found.r, expected.r, rtol=1e-14)
        np.testing.assert_allclose(found.T, expected.T, rtol=1e-13)
        np.testing.assert_allclose(found.S, 0.0, atol=1e-15)
    modal, tilted = guided(tm, 0.0, 3.0)
    found, expected = (one.response(STACKS, film=[1, 0]) for one in (tilted, modal))
    np.testing.assert_allclose(found.r, expected.r, rtol=1e-13)
    np.testing.assert_array_equal(found.S, expected.S)
    r = tilted.reflection(STACKS, film=[1, 0])
    np.testing.assert_allclose(r, expected.r, rtol=1e-12)


def guided(tm, tilt, um):
    mode = fundamental(Guide(NM, [3.17, 3.38, 3.17], [0.2]), tm=tm)
    modal = ModalFacet(mode, 1.0, np.repeat([[1.45], [2.1]], 3, axis=1))
    return modal, TiltedFacet(modal.plane, tilt, um, modal)


@BOTH
def test_with_a_guide_both_spreads_add(tm):
    modal, tilted = guided(tm, 3.0, 2.0)
    overlap = lateral_overlap(NM, modal.mode.n_eff, tilt_deg=3.0, lateral_um=2.0)
    lateral = TiltedFacet(modal.plane, 3.0, 2.0).reflection(STACKS, film=[1, 0]) / overlap
    normal = reflection(modal.plane, STACKS, film=[1, 0])
    across = modal.reflection(STACKS, film=[1, 0])
    found = tilted.reflection(STACKS, film=[1, 0]) / overlap
    np.testing.assert_allclose(found - normal, (lateral - normal) + (across - normal), atol=1e-13)


def _left_out(lateral_um, across_um=0.6):
    """Double mean of r(kx^2 + ky^2) over two Gaussian spreads, less the sum of the single ones."""
    k0, n = 2e3 * np.pi / 1310.0, 3.2
    x, w = np.polynomial.hermite.hermgauss(24)
    w = w / np.sqrt(np.pi)
    lateral, across = np.sqrt(2.0) * x / (k0 * lateral_um), np.sqrt(2.0) * x / (k0 * across_um)

    def r(q_squared):
        films, q = np.full((1, q_squared.size), 1.8), np.sqrt(q_squared)
        waves = Scene(np.full(q.size, 1310.0), n, 1.0, films, q=q)
        return reflection(waves, [[185.0]], film=[0])[0]

    double = w @ r((lateral[:, None] ** 2 + across[None, :] ** 2).ravel()).reshape(24, 24) @ w
    normal = r(np.zeros(1))[0]
    one, other = w @ r(lateral**2) - normal, w @ r(across**2) - normal
    return abs(double - normal - one - other), abs(one), abs(other)


def test_spreads_add_in_a_scalar_film_of_both_directions():
    # A narrow guide and a narrow stripe: what is left out stays small beside what is taken in, and
    # falls with the square of the stripe's width.
    left, one, other = _left_out(1.5)
    assert left < 0.05 * other
    assert left < 0.4 * one
    wider, _, _ = _left_out(3.0)
    assert wider == pytest.approx(left / 4.0, rel=0.25)


@BOTH
def test_the_film_alone_at_the_tilt_angle(tm):
    found = coating_scene(scene(tm), tilt_deg=7.0)
    by_hand = Scene(
        NM,
        N,
        1.0,
        np.repeat([[1.45], [2.1]], 3, axis=1),
        q=np.full(3, N * np.sin(np.radians(7.0))),
        tm=not tm,
    )
    np.testing.assert_array_equal(
        response(found, STACKS, film=[1, 0]).R, response(by_hand, STACKS, film=[1, 0]).R
    )


def test_brewster_s_angle_belongs_to_the_chip_s_te():
    # The field along the layers lies in the plane of incidence: TE vanishes at atan(n2/n1).
    angle = np.degrees(np.arctan(1.0 / N))
    none, no_film = np.empty((1, 0)), np.empty(0, int)
    te, tm = (
        response(coating_scene(scene(is_tm), tilt_deg=angle), none, film=no_film).R
        for is_tm in (False, True)
    )
    assert te.max() < 1e-25
    assert tm.min() > 0.3


@BOTH
def test_powers_add_up_and_s_is_what_the_mode_does_not_take_back(tm):
    plane = Scene(NM, N, 1.0, np.repeat([[1.45], [2.1 + 0.01j]], 3, axis=1), tm=tm)
    found = TiltedFacet(plane, 5.0, 2.5).response(STACKS, film=[1, 0])
    alone = response(coating_scene(plane, tilt_deg=5.0), STACKS, film=[1, 0])
    np.testing.assert_allclose(found.T, alone.T, rtol=1e-14)
    np.testing.assert_allclose(found.A, alone.A, atol=1e-14)
    np.testing.assert_allclose(found.S, alone.R - found.R, atol=1e-14)
    assert (found.A > 0.0).all()


@BOTH
@pytest.mark.parametrize("with_guide", [False, True])
def test_gradients_and_shifts(with_guide, tm):
    rng = np.random.default_rng(3)
    tilted = guided(tm, 2.0, 2.0)[1] if with_guide else TiltedFacet(scene(tm), 2.0, 2.0)
    shifts = {
        "film_shift": rng.normal(0.0, 0.01, (2, 2)),
        "incident_shift": rng.normal(0.0, 0.005, 2),
    }
    value, slope = tilted.gradient(STACKS, film=[1, 0], **shifts)
    np.testing.assert_allclose(value, tilted.reflectance(STACKS, film=[1, 0], **shifts), rtol=1e-11)
    for layer in range(2):
        step = np.zeros(2)
        step[layer] = 1e-2
        up = tilted.reflectance(STACKS + step, film=[1, 0], **shifts)
        down = tilted.reflectance(STACKS - step, film=[1, 0], **shifts)
        np.testing.assert_allclose(
            slope[:, :, layer], (up - down) / 2e-2, atol=1e-6 * np.abs(slope).max()
        )
    for of in ("T", "S", "A"):
        share, steep = tilted.gradient(STACKS, film=[1, 0], of=of, **shifts)
        up = getattr(tilted.response(STACKS + step, film=[1, 0], **shifts), of)
        down = getattr(tilted.response(STACKS - step, film=[1, 0], **shifts), of)
        np.testing.assert_allclose(steep[:, :, 1], (up - down) / 2e-2, atol=1e-8)
        np.testing.assert_allclose(share, 0.5 * (up + down), atol=1e-6)
    weight = rng.normal(size=(2, 3))
    again, weighted = tilted.weighted_gradient(STACKS, film=[1, 0], weight=weight, **shifts)
    np.testing.assert_array_equal(again, value)
    np.testing.assert_allclose(weighted, np.einsum("sw,swl->sl", weight, slope), rtol=1e-13)


def test_shares_without_tilt_are_the_guide_s():
    modal, tilted = guided(False, 0.0, None)
    for of in ("R", "S"):
        found, expected = (one.gradient(STACKS, film=[1, 0], of=of) for one in (tilted, modal))
        np.testing.assert_array_equal(found[1], expected[1])
    with pytest.raises(InputError, match="of: got 'B'; give one of R, T, S, A"):
        tilted.gradient(STACKS, film=[1, 0], of="B")


def test_a_shift_moves_overlap_and_waves():
    found = TiltedFacet(scene(False), 3.0, 2.0).reflection(
        STACKS, film=[1, 0], incident_shift=[0.02, -0.01]
    )
    for s, by in enumerate((0.02, -0.01)):
        alone = TiltedFacet(scene(False, incident=N + by), 3.0, 2.0)
        expected = alone.reflection(STACKS[s : s + 1], film=[1, 0])
        np.testing.assert_allclose(found[s], expected[0], rtol=1e-12)


def test_without_tilt_the_plain_gradient():
    r, slope = TiltedFacet(scene(True), 0.0).amplitude_gradient(STACKS, film=[1, 0])
    expected, steeper = amplitude_gradient(scene(True), STACKS, film=[1, 0])
    np.testing.assert_allclose(r, expected, rtol=1e-13)
    np.testing.assert_allclose(slope, steeper, rtol=1e-10)


def test_a_bare_seven_degree_facet_returns_some_millionths():
    # A lateral mode of 3 um at 1310 nm: 0.3 exp(-(2 pi 3.2 1.5 tan(7 deg)/1.31)^2), by hand.
    plane = scene(False)
    none, no_film = np.empty((1, 0)), np.empty(0, int)
    found = TiltedFacet(plane, 7.0, 3.0).reflectance(none, film=no_film)
    by_hand = (2.2 / 4.2) ** 2 * np.exp(
        -((2.0 * np.pi * N * 1.5 * np.tan(np.radians(7.0)) / 1.31) ** 2)
    )
    assert found[0, 1] == pytest.approx(by_hand, rel=0.02)


@pytest.mark.parametrize(
    ("tilt", "um", "message"),
    [
        (7.0, None, "lateral_um: is missing with a tilt of 7 degrees; give the lateral mode's"),
        (-1.0, 3.0, "tilt_deg: is -1.0; give 0 to below 90 degrees"),
        (float("nan"), 3.0, "tilt_deg: is nan; give 0 to below 90"),
        (7.0, 0.0, "lateral_um: is 0.0 um; give more than 0"),
        (20.0, 3.0, r"tilt_deg: is 20 degrees, beyond total reflection at 1290 nm \(18.21 deg"),
    ],
)
def test_refusals(tilt, um, message):
    with pytest.raises(InputError, match=message):
        TiltedFacet(scene(False), tilt, um)


def test_bad_weights_are_named():
    with pytest.raises(ArrayError, match=r"weight: has shape \(1, 3\); expected \(2, 3\)"):
        TiltedFacet(scene(False), 2.0, 2.0).weighted_gradient(
            STACKS, film=[1, 0], weight=np.ones((1, 3))
        )
