"""R and T against textbook figures, closed forms and another field's library."""

import warnings
from itertools import pairwise

import numpy as np
import pytest
from scipy.special import jv, yv

from coatings.optics import Scene, reflectance, response

with warnings.catch_warnings():
    warnings.simplefilter("ignore")  # what the referee warns of on import is not ours
    import skrf
    from skrf.media import DefinedGammaZ0

NO_FILM = np.empty((0, 1))


def _bare(n0, ns):
    return reflectance(Scene([550.0], n0, ns, NO_FILM), np.empty((1, 0)), film=[])[0, 0]


def _layers(n0, ns, indices, nm, at=550.0):
    scene = Scene([at], n0, ns, np.reshape(indices, (-1, 1)))
    return reflectance(scene, [nm], film=range(len(nm)))[0, 0]


def test_air_on_glass():
    """F1: 4.26 % for n = 1.52. Arithmetic; handbook figure."""
    assert round(100 * _bare(1.0, 1.52), 2) == 4.26


def test_magnesium_fluoride_on_glass():
    """F2: 1.26 % for a quarter wave of 1.38 on 1.52. Arithmetic; handbook figure."""
    r = _layers(1.0, 1.52, [1.38], [550.0 / 4 / 1.38])
    assert round(100 * r, 2) == 1.26


@pytest.mark.parametrize("pairs", [1, 2, 5, 12])
@pytest.mark.parametrize(("first", "second"), [(2.3, 1.38), (1.38, 2.3)])
def test_quarter_wave_stack(first, second, pairs):
    """F3: closed form of the quarter-wave stack of 2N layers (textbook)."""
    n0, ns = 1.0, 1.52
    step = ns * (first / second) ** (2 * pairs)
    indices, nm = [first, second] * pairs, [550.0 / 4 / first, 550.0 / 4 / second] * pairs
    expected = ((n0 - step) / (n0 + step)) ** 2
    assert _layers(n0, ns, indices, nm) == pytest.approx(expected, abs=1e-13)


@pytest.mark.parametrize("side", [-1, 1])
def test_edge_of_the_quarter_wave_band(side):
    """F3: at lambda0/lambda = 1 +- (2/pi) asin((nH-nL)/(nH+nL)) half the trace of a pair is -1,
    so R of many pairs saturates just inside and not just outside (textbook)."""
    high, low, pairs = 2.3, 1.38, 400
    half_width = 2 / np.pi * np.arcsin((high - low) / (high + low))
    film, nm = [0, 1] * pairs, [[550.0 / 4 / high, 550.0 / 4 / low] * pairs]

    def outside_light(g):
        scene = Scene([550.0 / g], 1.0, 1.52, [[high], [low]])
        return response(scene, nm, film=film).T[0, 0]

    assert outside_light(1 + side * half_width * 0.999) < 1e-6
    assert outside_light(1 + side * half_width * 1.001) > 1e-3


@pytest.mark.parametrize(("n0", "n1", "ns"), [(3.3, 1.76, 1.0), (1.0, 1.38, 1.52), (3.2, 2.1, 1.4)])
def test_quarter_wave(n0, n1, ns):
    """F4: ((n0 ns - n1^2)/(n0 ns + n1^2))^2 (textbook)."""
    expected = ((n0 * ns - n1**2) / (n0 * ns + n1**2)) ** 2
    assert _layers(n0, ns, [n1], [550.0 / 4 / n1]) == pytest.approx(expected, abs=1e-14)


def test_three_films_in_place_of_one():
    """F5: a symmetric three-film sandwich equivalent to a quarter wave of sqrt(n_c) has R = 0.

    US patent 5,282,219 (read). The phases p of the outer films a and q of the inner film b make
    the product of the matrices a b a that of one film of phase pi/2 and index sqrt(n_c): its
    elements 11 and 12 are 0 and -i/sqrt(n_c). Solved here by Newton's method.
    """
    chip, a, b = 3.3, 1.62, 2.1
    target = np.sqrt(chip)

    def product(p, q):
        def matrix(n, phase):
            c, s = np.cos(phase), np.sin(phase)
            return np.array([[c, -1j * s / n], [-1j * n * s, c]])

        return matrix(a, p) @ matrix(b, q) @ matrix(a, p)

    def misfit(x):
        m = product(*x)
        return np.array([m[0, 0].real, (1j * m[0, 1]).real * target - 1.0])

    x = np.array([0.4, 0.8])
    for _ in range(30):
        columns = [(misfit(x + h) - misfit(x - h)) / 2e-6 for h in 1e-6 * np.eye(2)]
        x = x - np.linalg.solve(np.transpose(columns), misfit(x))
    assert (x > 0).all()
    nm = 1550.0 / (2 * np.pi) * np.array([x[0] / a, x[1] / b, x[0] / a])
    scene = Scene([1550.0], chip, 1.0, [[a], [b]])
    assert reflectance(scene, [nm], film=[0, 1, 0])[0, 0] < 1e-12


def test_skin_depth_of_a_metal():
    """Light dies in a metal as exp(-4 pi k d / lambda): the definition of its skin depth."""
    scene = Scene([976.0], 1.0, 1.0, [[0.21 + 6.3j]])
    t = response(scene, [[300.0], [400.0]], film=[0]).T[:, 0]
    assert t[1] / t[0] == pytest.approx(np.exp(-4 * np.pi * 6.3 * 100.0 / 976.0), rel=1e-7)


def test_absorbing_film_on_a_metal():
    """Opaque metal: R = ((n-1)^2 + k^2)/((n+1)^2 + k^2). Textbook (Born & Wolf, ch. 14; from
    memory)."""
    n, k = 0.21, 6.3
    found = _layers(1.0, 1.0, [n + 1j * k], [20_000.0])
    assert found == pytest.approx(((n - 1) ** 2 + k**2) / ((n + 1) ** 2 + k**2), abs=1e-14)


@pytest.mark.parametrize("tm", [False, True])
def test_oblique_facet(tm):
    """Fresnel's formulas: r_s = -sin(a-b)/sin(a+b), r_p = tan(a-b)/tan(a+b) for the field along
    the wave; its tangential part has the opposite sign (Born & Wolf, section 1.5; from memory)."""
    n, a = 1.52, np.radians(40.0)
    b = np.arcsin(np.sin(a) / n)
    scene = Scene([550.0], 1.0, n, NO_FILM, q=np.sin(a), tm=tm)
    r = response(scene, np.empty((1, 0)), film=[]).r[0, 0]
    expected = -np.tan(a - b) / np.tan(a + b) if tm else -np.sin(a - b) / np.sin(a + b)
    assert r == pytest.approx(expected, abs=1e-14)


@pytest.mark.parametrize("tm", [False, True])
def test_oblique_film_by_summing_its_echoes(tm):
    """Airy's sum r01 + r12 e^(2 i delta) ... = (r01 + r12 x)/(1 + r01 r12 x), textbook."""
    indices, q, nm, d = (1.0, 2.1 + 0.05j, 1.52), 0.8, 550.0, 130.0
    cosines = [np.sqrt(1 - (q / n) ** 2 + 0j) for n in indices]
    eta = [n / c if tm else n * c for n, c in zip(indices, cosines, strict=True)]
    r01, r12 = ((a - b) / (a + b) for a, b in pairwise(eta))
    echo = np.exp(4j * np.pi * indices[1] * cosines[1] * d / nm)
    scene = Scene([nm], 1.0, 1.52, [[indices[1]]], q=q, tm=tm)
    r = response(scene, [[d]], film=[0]).r[0, 0]
    assert r == pytest.approx((r01 + r12 * echo) / (1 + r01 * r12 * echo), abs=1e-14)


def test_graded_layer():
    """10 000 slices of a layer with n^2 = g exp(-2 z/s) against its closed form.

    E'' + (k0 a)^2 exp(-2 z/s) E = 0 is Bessel's equation of order 0 in x = k0 a s exp(-z/s):
    E = J0(x), Y0(x) and H ~ dE/dz = -(x/s) E'(x) (Bessel functions: DLMF 10.2, 10.6).
    """
    nm, chip, outside, a, depth = 976.0, 3.3, 1.0, 3.0, 400.0
    s, k0 = depth / np.log(2.0), 2 * np.pi / nm
    slices = 10_000
    edges = np.linspace(0.0, depth, slices + 1)
    middle = 0.5 * (edges[1:] + edges[:-1])
    scene = Scene([nm], chip, outside, (a * np.exp(-middle / s))[:, None])
    found = response(scene, [np.full(slices, depth / slices)], film=range(slices)).r[0, 0]
    x0, x1 = k0 * a * s, k0 * a * s * np.exp(-depth / s)

    def pair(x):
        return np.array([[jv(0, x), yv(0, x)], [x / s * jv(1, x), x / s * yv(1, x)]])

    field, slope = pair(x0) @ np.linalg.solve(pair(x1), [1.0, 1j * k0 * outside])
    admittance = slope / (1j * k0 * field)
    assert found == pytest.approx((chip - admittance) / (chip + admittance), abs=1e-8)


@pytest.mark.parametrize("seed", range(10))
def test_cascaded_transmission_lines(seed):
    """F8: lossless lines of impedance 1/n in scikit-rf reflect as the films do."""
    rng = np.random.default_rng(seed)
    nm = np.linspace(800.0, 1200.0, 21)[::-1]
    indices, thickness = rng.uniform(1.3, 3.5, 6), rng.uniform(20.0, 300.0, 6)
    frequency = skrf.Frequency.from_f(299_792_458.0 / (nm * 1e-9), unit="Hz")

    def line(n, d_nm):
        gamma = 2j * np.pi * n / (nm * 1e-9)
        medium = DefinedGammaZ0(frequency, z0_port=1.0, z0=1.0 / n, gamma=gamma)
        return medium.line(d_nm * 1e-9, "m")

    network = line(indices[0], thickness[0])
    for n, d in zip(indices[1:], thickness[1:], strict=True):
        network = network ** line(n, d)
    network.renormalize([1.0 / 3.3, 1.0])
    scene = Scene(nm, 3.3, 1.0, np.repeat(indices[:, None], nm.size, axis=1))
    found = response(scene, [thickness], film=range(6))
    np.testing.assert_allclose(found.R[0], abs(network.s[:, 0, 0]) ** 2, atol=1e-10)
    np.testing.assert_allclose(found.T[0], abs(network.s[:, 1, 0]) ** 2, atol=1e-10)


def test_views_of_a_response():
    scene = Scene([900.0, 976.0], 3.3, 1.0, [[1.9 + 0.01j, 1.9 + 0.01j]])
    found = response(scene, [[100.0], [0.0], [50.0]], film=[0])
    assert found.R.shape == found.T.shape == found.A.shape == found.phase_rad.shape == (3, 2)
    np.testing.assert_allclose(found.R + found.T + found.A, 1.0, rtol=1e-15)
    np.testing.assert_allclose(np.exp(1j * found.phase_rad), found.r / abs(found.r), atol=1e-15)
    np.testing.assert_allclose(
        reflectance(scene, [[100.0], [0.0], [50.0]], film=[0]), found.R, rtol=1e-15
    )


def test_films_by_stack():
    scene = Scene([900.0, 976.0], 3.3, 1.0, [[1.45, 1.45], [2.1, 2.1]])
    thickness = [[100.0, 80.0], [90.0, 70.0]]
    both = response(scene, thickness, film=[[0, 1], [1, 0]])
    for s, film in enumerate(([0, 1], [1, 0])):
        alone = response(scene, thickness[s : s + 1], film=film)
        np.testing.assert_array_equal(both.r[s], alone.r[0])


def test_no_power_flows_from_an_evanescent_side():
    scene = Scene([976.0], 1.0, 1.0, NO_FILM, q=1.5)
    assert np.isnan(response(scene, np.empty((1, 0)), film=[]).T[0, 0])
