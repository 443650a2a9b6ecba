"""The compiled kernels against 40-digit arithmetic, to 1e-12."""

import numpy as np
import pytest
from film_in_40_digits import amplitudes

from coatings.optics import Scene, reflectance, response

EXACT = 1e-12


def _worst(scene, thickness, film):
    """Largest difference in r, t, R and T over a batch."""
    found = response(scene, thickness, film=film)
    alone = reflectance(scene, thickness, film=film)
    worst = 0.0
    for s, row in enumerate(np.atleast_2d(thickness)):
        for p, nm in enumerate(scene.wavelength_nm):
            r, t, big_t, big_r = amplitudes(
                wavelength_nm=nm,
                incident=scene.incident[p],
                outside=scene.outside[p],
                films=[scene.films[m, p] for m in film],
                thickness_nm=row,
                q=0.0 if scene.q is None else scene.q[p],
                tm=bool(scene.tm[p]),
            )
            errors = [found.r[s, p] - r, found.t[s, p] - t, alone[s, p] - big_r]
            if not np.isnan(big_t):
                errors.append(found.T[s, p] - big_t)
            worst = max(worst, *np.abs(errors))
    return worst


def _random_scene(rng, *, absorbing, oblique):
    points = 4
    k = 10.0 ** rng.uniform(-5, 0.7, (3, points)) * (rng.random((3, 1)) < 0.6) * absorbing
    incident = rng.uniform(1.0, 3.6, points)
    return Scene(
        rng.uniform(400.0, 1700.0, points),
        incident,
        rng.choice([1.0, 1.45, 1.45 + 0.3j]),
        rng.uniform(1.3, 4.0, (3, points)) + 1j * k,
        q=incident * np.sin(rng.uniform(0.0, 1.5, points)) if oblique else None,
        tm=rng.random(points) < 0.5,
    )


@pytest.mark.parametrize("oblique", [False, True])
@pytest.mark.parametrize("absorbing", [False, True])
@pytest.mark.parametrize("seed", range(20))
def test_random_stacks(seed, absorbing, oblique):
    rng = np.random.default_rng([seed, absorbing, oblique])
    scene = _random_scene(rng, absorbing=absorbing, oblique=oblique)
    layers = int(rng.integers(1, 13))
    thickness = rng.uniform(0.0, 400.0, (1, layers))
    assert _worst(scene, thickness, rng.integers(0, 3, layers)) < EXACT


@pytest.mark.parametrize("seed", range(8))
def test_complex_transverse_wave_number(seed):
    """q on an arc below the real axis, as the integrals over a guided mode take it."""
    rng = np.random.default_rng(seed)
    points = 4
    s = rng.uniform(0.05, 0.95, points)
    q = 4.0 * s - 1.6j * s * (1.0 - s)
    films = rng.uniform(1.4, 2.6, (2, points)) + 0j
    scene = Scene(np.full(points, 976.0), 3.3, 1.0, films, q=q, tm=rng.random(points) < 0.5)
    assert _worst(scene, rng.uniform(20.0, 300.0, (1, 4)), [0, 1, 0, 1]) < EXACT


@pytest.mark.parametrize("tm", [False, True])
@pytest.mark.parametrize("q", [None, 1.2, 3.0])
def test_fifty_micrometres_of_gold(q, tm):
    scene = Scene([976.0], 3.3, 1.0, [[0.21 + 6.3j], [1.45 + 0j]], q=q, tm=tm)
    assert _worst(scene, [[100.0, 50_000.0, 200.0]], [1, 0, 1]) < EXACT


@pytest.mark.parametrize("q", [None, 0.9])
def test_three_hundred_layers(q):
    rng = np.random.default_rng(7)
    nm = np.array([700.0, 976.0, 1500.0])
    scene = Scene(nm, 3.3, 1.0, [[1.45] * 3, [2.1 + 1e-4j] * 3], q=q)
    assert _worst(scene, rng.uniform(50.0, 250.0, (1, 300)), [0, 1] * 150) < EXACT


@pytest.mark.parametrize("tm", [False, True])
@pytest.mark.parametrize("high", [2.1, 4.2, 4.2 + 1e-3j])
def test_two_hundred_pairs(high, tm):
    nm = np.array([850.0, 976.0, 1100.0])
    scene = Scene(nm, 3.3, 1.0, [[1.38] * 3, [high] * 3], q=0.3, tm=tm)
    row = [976.0 / 4 / 1.38, 976.0 / 4 / np.real(high)] * 200
    assert _worst(scene, [row], [0, 1] * 200) < EXACT


def test_long_evanescent_mirror_does_not_overflow():
    """Each pair multiplies the fields by about 15; 400 pairs would reach 1e470."""
    scene = Scene([976.0], 3.5, 3.4, [[1.0], [3.4]], q=1.02, tm=[False])
    found = response(scene, [[900.0, 40.0] * 400], film=[0, 1] * 400)
    r, t, big_t, _ = amplitudes(
        wavelength_nm=976.0,
        incident=3.5,
        outside=3.4,
        films=[1.0, 3.4] * 400,
        thickness_nm=[900.0, 40.0] * 400,
        q=1.02,
    )
    assert found.r[0, 0] == pytest.approx(r, abs=EXACT)
    assert found.t[0, 0] == pytest.approx(t, abs=EXACT)
    assert found.T[0, 0] == pytest.approx(big_t, abs=EXACT)


@pytest.mark.parametrize("tm", [False, True])
@pytest.mark.parametrize("nm", [0.0, 1e-6, 1e-3])
def test_vanishing_layers(nm, tm):
    scene = Scene([976.0] * 2, 3.3, 1.0, [[1.45] * 2, [0.2 + 6j] * 2], q=[0.5, 2.0], tm=tm)
    assert _worst(scene, [[nm, 120.0, nm]], [1, 0, 1]) < EXACT


@pytest.mark.parametrize("tm", [False, True])
@pytest.mark.parametrize("offset", [0.0, 1e-15, -1e-15, 1e-9, -1e-9, 1e-5])
def test_grazing_inside_a_film(offset, tm):
    """kz of the film passes through zero: d sinc(delta)."""
    scene = Scene([976.0], 3.3, 1.0, [[1.45], [2.1]], q=1.45 * (1.0 + offset), tm=tm)
    assert _worst(scene, [[150.0, 300.0, 150.0]], [1, 0, 1]) < EXACT


@pytest.mark.parametrize("tm", [False, True])
def test_total_reflection(tm):
    scene = Scene([976.0] * 2, 3.3, 1.0, [[2.1] * 2], q=[1.2, 2.9], tm=tm)
    assert _worst(scene, [[180.0]], [0]) < EXACT


@pytest.mark.parametrize("q", [None, 0.7])
@pytest.mark.parametrize("k", [-1e-6, -1e-3, -0.1])
def test_gain(k, q):
    scene = Scene([976.0], 3.3, 1.0, [[2.1 + 1j * k]], q=q)
    assert _worst(scene, [[450.0]], [0]) < EXACT


@pytest.mark.parametrize("side", ["incident", "outside"])
def test_complex_half_spaces(side):
    sides = {"incident": 3.3, "outside": 1.0} | {side: 3.2 + 0.01j}
    scene = Scene([976.0], films=[[1.9]], q=0.4, tm=True, **sides)
    assert _worst(scene, [[110.0]], [0]) < EXACT
