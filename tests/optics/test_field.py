"""Standing waves and absorbed power: against a dense twin, closed forms and conservation."""

import warnings

import numpy as np
import pytest
from scipy.special import roots_legendre

from coatings.optics import Scene, response
from coatings.optics.field import standing_wave

NO_LAYER = np.empty(0), np.empty(0, np.int64)
NODES, WEIGHTS = roots_legendre(60)


def _case(seed):
    """A random scene of three points: real, absorbing, metallic and evanescent films."""
    rng = np.random.default_rng(seed)
    points, layers = 3, int(rng.integers(1, 8))
    k = 10.0 ** rng.uniform(-5, 0.8, (3, 1)) * (rng.random((3, 1)) < 0.6)
    incident = rng.uniform(2.9, 3.6, points)
    q = None if seed % 3 == 0 else incident * np.sin(rng.uniform(0.05, 1.4, points))
    scene = Scene(
        rng.uniform(500.0, 1600.0, points),
        incident,
        1.33 + 0.02j * (seed % 2),
        rng.uniform(0.3, 4.0, (3, points)) + 1j * k,
        q=q,
        tm=rng.random(points) < 0.5,
    )
    return scene, rng.uniform(5.0, 300.0, layers), rng.integers(0, 3, layers)


def _waves(scene, p, nm, film):
    """The slow twin: two waves in every medium, amplitudes from one dense system of equations.

    Returns a function of (medium, depth behind its chip-side face) giving the squared electric
    field over that of the arriving wave; medium 0 is the chip, with depths below zero.
    """
    k0 = 2 * np.pi / scene.wavelength_nm[p]
    q = 0.0 if scene.q is None else scene.q[p].real
    index = np.array([scene.incident[p], *scene.films[film, p], scene.outside[p]])
    kappa = np.sqrt(index**2 - q**2 + 0j)
    eta = index**2 / kappa if scene.tm[p] else kappa
    depth = np.array([0.0, *nm, 0.0])
    count = len(index)
    # A forward wave counts from the chip-side face of its medium, a backward one from the outer.
    fade = np.exp(1j * k0 * kappa * depth)
    matrix, right = np.zeros((2 * count, 2 * count), complex), np.zeros(2 * count, complex)
    matrix[0, 0] = right[0] = 1.0
    matrix[1, -1] = 1.0
    for j in range(count - 1):
        f, g = 2 * j, 2 * j + 2
        matrix[f + 2, f : f + 4] = fade[j], 1.0, -1.0, -fade[j + 1]
        matrix[f + 3, f : f + 2] = eta[j] * fade[j], -eta[j]
        matrix[f + 3, g : g + 2] = -eta[j + 1], eta[j + 1] * fade[j + 1]
    waves = np.linalg.solve(matrix, right).reshape(count, 2)

    def squared(medium, z):
        there = waves[medium, 0] * np.exp(1j * k0 * kappa[medium] * z)
        back = waves[medium, 1] * np.exp(1j * k0 * kappa[medium] * (depth[medium] - z))
        total = abs(there + back) ** 2
        normal = abs(q / index) ** 2
        if not scene.tm[p]:
            return total
        along = abs(q / index[medium] ** 2 * eta[medium] * (there - back)) ** 2
        return (total + along) * (1.0 - normal[0])  # cos^2 of the arriving wave

    return squared


@pytest.mark.parametrize("seed", range(24))
def test_everything_against_the_twin(seed):
    scene, nm, film = _case(seed)
    wave = standing_wave(scene, nm, film=film)
    profile = wave.profile(step_nm=7.0, chip_nm=300.0, outside_nm=200.0)
    start = np.array([0.0, *wave.face_nm])
    for p in range(scene.points):
        twin = _waves(scene, p, nm, film)
        for z, medium, found in zip(profile.z_nm, profile.medium, profile.E2[p], strict=True):
            assert found == pytest.approx(twin(medium + 1, z - start[medium + 1]), abs=1e-12)
        for j, d in enumerate([0.0, *nm]):
            sides = twin(j, d), twin(j + 1, 0.0)
            np.testing.assert_allclose(wave.face_E2[p, j], sides, rtol=1e-11, atol=1e-13)
        k0 = 2 * np.pi / scene.wavelength_nm[p]
        for j, d in enumerate(nm):
            samples = twin(j + 1, 0.5 * d * (1 + NODES))
            loss = k0 * (scene.films[film[j], p] ** 2).imag / wave.flow_index[p]
            integral = loss * 0.5 * d * (WEIGHTS @ samples)
            assert wave.layer_absorbed[p, j] == pytest.approx(integral, rel=1e-9, abs=1e-14)


@pytest.mark.parametrize("seed", range(60))
def test_layers_absorb_what_is_missing(seed):
    scene, nm, film = _case(seed)
    wave = standing_wave(scene, nm, film=film)
    given = response(scene, nm[None, :], film=film)
    np.testing.assert_allclose(wave.layer_absorbed.sum(axis=1), given.A[0], atol=1e-13)
    np.testing.assert_allclose(wave.A, given.A[0], atol=1e-13)
    np.testing.assert_array_equal(wave.R, given.R[0])
    np.testing.assert_array_equal(wave.T, given.T[0])
    for m in range(3):
        np.testing.assert_allclose(
            wave.film_absorbed[:, m], wave.layer_absorbed[:, film == m].sum(axis=1), atol=1e-15
        )


@pytest.mark.parametrize("seed", range(30))
def test_peak_is_the_largest_of_many_samples(seed):
    scene, nm, film = _case(seed)
    wave = standing_wave(scene, nm, film=film)
    profile = wave.profile(step_nm=0.05, chip_nm=0.0, outside_nm=0.0)
    for j in range(len(nm)):
        within = profile.medium == j
        sampled = profile.E2[:, within]
        np.testing.assert_allclose(wave.layer_peak_E2[:, j], sampled.max(axis=1), rtol=1e-6)
        assert (wave.layer_peak_E2[:, j] >= sampled.max(axis=1) * (1 - 1e-12)).all()
        at = wave.layer_peak_nm[:, j]
        assert ((at >= wave.face_nm[j]) & (at <= wave.face_nm[j + 1])).all()
        for p, z in enumerate(at):
            near = np.interp(z, profile.z_nm[within], sampled[p])
            assert near == pytest.approx(wave.layer_peak_E2[p, j], rel=1e-6)
    for m in set(film):
        highest = wave.layer_peak_E2[:, film == m].max(axis=1)
        np.testing.assert_array_equal(wave.film_peak_E2[:, m], highest)


def test_a_peak_inside_a_layer_by_closed_form():
    """Clear layers in air are fullest on a face where the wave is flat; before a wall without a
    field, a quarter wave from it."""
    low, nm = 1.45, 976.0 / 4 / 1.45
    scene = Scene([976.0], 3.3, 1.0, [[low]])
    wave = standing_wave(scene, [2 * nm], film=[0])
    bare = (2 * 3.3 / 4.3) ** 2
    assert wave.layer_peak_E2[0, 0] == pytest.approx(bare, rel=1e-13)
    longer = standing_wave(scene, [1.5 * nm], film=[0])
    outer = longer.face_E2[0, 1, 0]
    assert longer.layer_peak_E2[0, 0] == pytest.approx(outer, rel=1e-13)
    metal = Scene([976.0], 3.3, 1e6, [[low]])
    pinned = standing_wave(metal, [1.5 * nm], film=[0])
    assert pinned.layer_peak_nm[0, 0] == pytest.approx(0.5 * nm, abs=1e-3)


def test_film_that_is_in_no_layer():
    wave = standing_wave(Scene([976.0], 3.3, 1.0, [[1.45], [2.1 + 1e-3j]]), [80.0], film=[0])
    assert np.isnan(wave.film_peak_E2[0, 1])
    assert wave.film_absorbed[0, 1] == 0.0


def test_standing_wave_in_the_chip():
    """Bare facet: period lambda/(2 n), maxima (1 + |r|)^2, minima (1 - |r|)^2, maximum at z = 0."""
    wave = standing_wave(Scene([976.0], 3.3, 1.0, np.empty((0, 1))), NO_LAYER[0], film=NO_LAYER[1])
    period, r = 976.0 / 2 / 3.3, 2.3 / 4.3
    profile = wave.profile(step_nm=3.0, chip_nm=4 * period, outside_nm=300.0)
    z, inside = profile.z_nm[profile.medium == -1], profile.E2[0, profile.medium == -1]
    expected = 1 + r**2 + 2 * r * np.cos(2 * np.pi * z / period)
    np.testing.assert_allclose(inside, expected, rtol=1e-12)
    assert inside[-1] == pytest.approx((1 + r) ** 2, rel=1e-13)
    beyond = profile.E2[0, profile.medium == 0]
    np.testing.assert_allclose(beyond, (1 + r) ** 2, rtol=1e-12)
    assert beyond[0] / wave.flow_index[0] == pytest.approx(wave.T[0], rel=1e-12)
    assert wave.A[0] == pytest.approx(0.0, abs=1e-15)
    assert wave.layer_absorbed.shape == (1, 0)


def test_skin_depth_of_gold():
    """|E|^2 falls as exp(-2 z/depth), depth = lambda/(2 pi k) (textbook); 50 um swallow the rest."""
    k, n = 6.3, 0.21
    scene = Scene([976.0], 3.3, 1.0, [[n + 1j * k]])
    wave = standing_wave(scene, [50_000.0], film=[0])
    profile = wave.profile(step_nm=10.0, chip_nm=10.0, outside_nm=10.0)
    within = profile.medium == 0
    z, E2 = profile.z_nm[within], profile.E2[0, within]
    depth = 976.0 / (2 * np.pi * k)
    seen = z < 300.0
    np.testing.assert_allclose(E2[seen], E2[0] * np.exp(-2 * z[seen] / depth), rtol=1e-11)
    assert E2[-1] == 0.0
    R = abs((3.3 - n - 1j * k) / (3.3 + n + 1j * k)) ** 2
    assert wave.layer_absorbed[0, 0] == pytest.approx(1 - R, rel=1e-12)
    assert wave.T[0] == 0.0
    assert np.isnan(wave.per_leaving[0])


def test_nothing_overflows():
    """Metal and evanescent layers of 50 um, and 200 pairs: finite throughout and without a word."""
    films = [[0.21 + 6.3j], [1.0 + 0j], [3.0 + 0j]]
    with warnings.catch_warnings():
        warnings.simplefilter("error")
        for tm in (False, True):
            scene = Scene([976.0], 3.5, 1.0, films, q=2.9, tm=tm)
            for nm, film in (
                ([100.0, 50_000.0, 200.0], [2, 0, 1]),
                ([100.0, 50_000.0, 200.0], [2, 1, 2]),
                ([150.0, 300.0] * 200, [1, 2] * 200),
            ):
                wave = standing_wave(scene, nm, film=film)
                profile = wave.profile(step_nm=50.0)
                for array in (profile.E2, profile.absorption_per_nm, wave.layer_peak_E2):
                    assert np.isfinite(array).all()
                A = response(scene, [nm], film=film).A[0, 0]
                assert wave.layer_absorbed.sum() == pytest.approx(A, abs=1e-12)


@pytest.mark.parametrize("tm", [False, True])
def test_where_a_film_turns_evanescent(tm):
    """At kz = 0 the closed form is 0/0; the integrals are those of the neighbours on both sides."""
    k = 1e-9
    at, below, above = (
        standing_wave(Scene([976.0], 3.3, 1.0, [[n + 1j * k]], q=1.45, tm=tm), [230.0], film=[0])
        for n in (1.45, 1.45 - 1e-7, 1.45 + 1e-7)
    )
    mean = 0.5 * (below.layer_absorbed + above.layer_absorbed)
    np.testing.assert_allclose(at.layer_absorbed, mean, rtol=1e-9)
    np.testing.assert_allclose(at.layer_absorbed.sum(axis=1), at.A, atol=1e-15)
    exact = standing_wave(Scene([976.0], 3.3, 1.0, [[1.45]], q=1.45, tm=tm), [230.0], film=[0])
    np.testing.assert_allclose(exact.profile().E2, at.profile().E2, rtol=1e-6)


@pytest.mark.parametrize("tm", [False, True])
@pytest.mark.parametrize("d", [1e-6, 1e-3, 1.0])
def test_thin_layers_keep_relative_accuracy(d, tm):
    """A thin absorber takes density times thickness; nothing is lost to cancellation."""
    scene = Scene([976.0], 3.3, 1.0, [[1.45], [2.1 + 1e-6j]], q=0.8, tm=tm)
    wave = standing_wave(scene, [100.0, d], film=[0, 1])
    mean = wave.face_absorption_per_nm[0, 1:, :].ravel()[1:3].mean()
    assert wave.layer_absorbed[0, 1] == pytest.approx(mean * d, rel=1e-4 * d + 1e-11)


def test_layers_of_no_thickness():
    scene = Scene([976.0], 3.3, 1.0, [[1.45], [2.1 + 0.1j]])
    wave = standing_wave(scene, [100.0, 0.0, 50.0], film=[0, 1, 0])
    without = standing_wave(scene, [100.0, 50.0], film=[0, 0])
    assert wave.layer_absorbed[0, 1] == 0.0
    assert wave.layer_peak_E2[0, 1] == pytest.approx(wave.face_E2[0, 1, 0], rel=1e-13)
    np.testing.assert_allclose(wave.face_E2[0, [0, 1, 3]], without.face_E2[0], rtol=1e-13)


def test_split_layer_is_the_whole():
    scene = Scene([976.0], 3.3, 1.0, [[1.9 + 0.05j]], q=1.1, tm=True)
    whole = standing_wave(scene, [180.0], film=[0])
    split = standing_wave(scene, [70.0, 110.0], film=[0, 0])
    assert split.layer_absorbed.sum() == pytest.approx(whole.layer_absorbed.sum(), rel=1e-13)
    assert split.film_peak_E2[0, 0] == pytest.approx(whole.film_peak_E2[0, 0], rel=1e-13)
    np.testing.assert_allclose(split.face_E2[0, 1, 0], split.face_E2[0, 1, 1], rtol=1e-13)


def test_density_integrates_to_the_layer():
    """The sampled profile is for plotting; it agrees with the closed form as a trapezoid may."""
    scene = Scene([976.0], 3.3, 1.0, [[1.45 + 1e-4j], [2.1 + 0.02j]], q=0.9, tm=True)
    wave = standing_wave(scene, [150.0, 90.0, 60.0], film=[0, 1, 0])
    profile = wave.profile(step_nm=0.2)
    for j in range(3):
        within = profile.medium == j
        total = np.trapezoid(profile.absorption_per_nm[0, within], profile.z_nm[within])
        assert total == pytest.approx(wave.layer_absorbed[0, j], rel=1e-5)
        ends = profile.absorption_per_nm[0, within][[0, -1]]
        faces = wave.face_absorption_per_nm[0, j, 1], wave.face_absorption_per_nm[0, j + 1, 0]
        np.testing.assert_allclose(ends, faces, rtol=1e-12)


def test_normal_field_jumps_in_tm_alone():
    """N^2 E along the normal is continuous, and so is E along the face."""
    scene = Scene([976.0, 976.0], 3.3, 1.0, [[1.45] * 2, [2.1] * 2], q=0.7, tm=[False, True])
    wave = standing_wave(scene, [120.0, 80.0], film=[0, 1])
    te, tm = wave.face_E2[0], wave.face_E2[1]
    np.testing.assert_allclose(te[:, 0], te[:, 1], rtol=1e-13)
    index = np.array([3.3, 1.45, 2.1, 1.0])
    for j in range(3):
        # E2 = tangential + D^2/N^4: two equations, positive for both parts
        matrix = [[1.0, index[j] ** -4], [1.0, index[j + 1] ** -4]]
        tangential, displaced = np.linalg.solve(matrix, tm[j])
        assert tangential > 0.0
        assert displaced > 0.0


def test_gain_gives_back():
    scene = Scene([976.0], 3.3, 1.0, [[3.3 - 0.01j]], q=0.5)
    wave = standing_wave(scene, [200.0], film=[0])
    assert wave.layer_absorbed[0, 0] < 0.0
    assert wave.layer_absorbed[0, 0] == pytest.approx(
        response(scene, [[200.0]], film=[0]).A[0, 0], rel=1e-11
    )


@pytest.mark.parametrize("tm", [False, True])
def test_an_absorbing_chip(tm):
    """The net flow through the face less T is what the layers absorb, though 1 - R - T is not."""
    scene = Scene([800.0], 3.6 + 0.08j, 1.0, [[1.45 + 0.01j], [2.1 + 0.02j]], q=0.6, tm=tm)
    wave = standing_wave(scene, [120.0, 80.0], film=[0, 1])
    assert wave.layer_absorbed.sum() == pytest.approx(wave.A[0], rel=1e-12)
    assert abs(1 - wave.R[0] - wave.T[0] - wave.A[0]) > 1e-4
    profile = wave.profile(chip_nm=200.0)
    in_chip, face = profile.E2[0, profile.medium == -1], wave.face_E2[0, 0, 0]
    assert in_chip[-1] == pytest.approx(face, rel=1e-12)


def test_profile_covers_what_was_asked():
    wave = standing_wave(Scene([976.0], 3.3, 1.0, [[1.45]]), [100.0], film=[0])
    profile = wave.profile(step_nm=3.0, chip_nm=40.0, outside_nm=0.0)
    assert profile.z_nm[0] == -40.0
    assert profile.z_nm[-1] == 100.0
    assert np.diff(profile.z_nm).max() <= 3.0
    assert (np.diff(profile.z_nm) >= 0.0).all()
    assert (profile.z_nm == 0.0).sum() == 2
    np.testing.assert_array_equal(np.unique(profile.medium), [-1, 0, 1])
