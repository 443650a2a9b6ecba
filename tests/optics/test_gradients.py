"""Derivatives against the complex-step method."""

import numpy as np
import pytest
from film_in_pairs import STEP, Pair, amplitudes

from coatings.errors import ArrayError, InputError
from coatings.optics import (
    Dispersion,
    Scene,
    amplitude_gradient,
    gradient,
    group_delay,
    index_gradient,
    response,
    weighted_gradient,
)

CLOSE = {"rtol": 1e-9, "atol": 1e-11}


def _case(seed):
    """A random scene with real and absorbing films, and three stacks for it."""
    rng = np.random.default_rng(seed)
    points, layers = 3, int(rng.integers(1, 9))
    k = 10.0 ** rng.uniform(-4, 0.3, (3, 1)) * (rng.random((3, 1)) < 0.6)
    incident = rng.uniform(2.9, 3.6, points)
    q = None if seed % 3 == 0 else incident * np.sin(rng.uniform(0.05, 1.4, points))
    scene = Scene(
        rng.uniform(500.0, 1600.0, points),
        incident,
        1.33 + 0.02j * (seed % 2),
        rng.uniform(1.3, 4.0, (3, points)) + 1j * k,
        q=q,
        tm=rng.random(points) < 0.5,
    )
    return scene, rng.uniform(5.0, 300.0, (2, layers)), rng.integers(0, 3, layers)


def _point(scene, p, row, film):
    return {
        "wavelength_nm": scene.wavelength_nm[p],
        "incident": scene.incident[p],
        "outside": scene.outside[p],
        "films": [scene.films[m, p] for m in film],
        "thickness_nm": list(row),
        "q": 0.0 if scene.q is None else scene.q[p],
        "tm": bool(scene.tm[p]),
    }


def _stepped(point, key, layer, change):
    """Derivatives of r, t, R, T when entry ``layer`` of ``key`` is changed."""
    entries = list(point[key])
    entries[layer] = change(entries[layer])
    r, t, big_r, big_t = amplitudes(**{**point, key: entries})
    slopes = [np.imag(part) / STEP for part in (r.x, r.y, t.x, t.y, big_r, big_t)]
    return {
        "r": slopes[0] + 1j * slopes[1],
        "t": slopes[2] + 1j * slopes[3],
        "R": slopes[4],
        "T": slopes[5],
        "A": -slopes[4] - slopes[5],
    }


def _by_step(scene, thickness, film, key, change):
    """Arrays (S, P, L) of the derivatives."""
    shape = (len(thickness), scene.points, len(film))
    found = {of: np.empty(shape, complex) for of in "rtRTA"}
    for s, p, layer in np.ndindex(shape):
        slopes = _stepped(_point(scene, p, thickness[s], film), key, layer, change)
        for of, value in slopes.items():
            found[of][s, p, layer] = value
    return found


@pytest.mark.parametrize("seed", range(12))
def test_by_thickness(seed):
    scene, thickness, film = _case(seed)
    expected = _by_step(scene, thickness, film, "thickness_nm", lambda nm: nm + 1j * STEP)
    values = response(scene, thickness, film=film)
    for of in "RTA":
        value, slope = gradient(scene, thickness, film=film, of=of)
        np.testing.assert_allclose(value, getattr(values, of), rtol=1e-12, atol=1e-14)
        np.testing.assert_allclose(slope, expected[of].real, **CLOSE)
    for of in "rt":
        value, slope = amplitude_gradient(scene, thickness, film=film, of=of)
        np.testing.assert_array_equal(value, getattr(values, of))
        np.testing.assert_allclose(slope, expected[of], **CLOSE)


@pytest.mark.parametrize("seed", range(12))
def test_by_index(seed):
    scene, thickness, film = _case(seed)
    by_n = _by_step(
        scene, thickness, film, "films", lambda n: Pair(n.real + 1j * STEP, n.imag + 0j)
    )
    by_k = _by_step(
        scene, thickness, film, "films", lambda n: Pair(n.real + 0j, n.imag + 1j * STEP)
    )
    for of in "RTA":
        _, slope = index_gradient(scene, thickness, film=film, of=of)
        np.testing.assert_allclose(slope.real, by_n[of].real, **CLOSE)
        np.testing.assert_allclose(slope.imag, by_k[of].real, **CLOSE)
    for of in "rt":
        _, slope = amplitude_gradient(scene, thickness, film=film, of=of, by="index")
        np.testing.assert_allclose(slope, by_n[of], **CLOSE)
        np.testing.assert_allclose(1j * slope, by_k[of], **CLOSE)


@pytest.mark.parametrize("seed", range(12))
def test_weighted_sum_is_that_of_the_points(seed):
    scene, thickness, film = _case(seed)
    weight = np.random.default_rng(seed).normal(size=(2, 3))
    value, slope = gradient(scene, thickness, film=film)
    r_too, weighted = weighted_gradient(scene, thickness, film=film, weight=weight)
    np.testing.assert_array_equal(r_too, value)
    np.testing.assert_allclose(weighted, np.einsum("sp,spl->sl", weight, slope), rtol=1e-12)


@pytest.mark.parametrize("layers", [15, 16, 17, 100])
def test_weighted_sum_over_several_blocks(layers):
    rng = np.random.default_rng(layers)
    scene = Scene(np.linspace(800.0, 1100.0, 150), 3.3, 1.0, [[1.45] * 150, [2.1 + 1e-3j] * 150])
    thickness, film = rng.uniform(50.0, 200.0, (2, layers)), rng.integers(0, 2, layers)
    weight = rng.normal(size=(2, 150))
    _, slope = gradient(scene, thickness, film=film)
    _, general = amplitude_gradient(scene, thickness, film=film)
    r = response(scene, thickness, film=film).r
    np.testing.assert_allclose(slope, 2 * (r.conj()[:, :, None] * general).real, atol=1e-13)
    _, weighted = weighted_gradient(scene, thickness, film=film, weight=weight)
    np.testing.assert_allclose(weighted, np.einsum("sp,spl->sl", weight, slope), atol=1e-12)


@pytest.mark.parametrize("seed", range(6))
def test_shifted_indices(seed):
    scene, thickness, film = _case(seed)
    rng = np.random.default_rng(seed)
    film_shift = rng.normal(0.0, 0.05, (2, 3)) + 1j * abs(rng.normal(0.0, 0.05, (2, 3)))
    incident_shift = rng.normal(0.0, 0.05, 2)
    shifts = {"film": film, "film_shift": film_shift, "incident_shift": incident_shift}
    weight = rng.normal(size=(2, 3))
    together = [
        *gradient(scene, thickness, **shifts),
        *index_gradient(scene, thickness, **shifts, of="A"),
        weighted_gradient(scene, thickness, weight=weight, **shifts)[1],
        response(scene, thickness, **shifts).t,
    ]
    for s in range(2):
        moved = Scene(
            scene.wavelength_nm,
            scene.incident + incident_shift[s],
            scene.outside,
            scene.films + film_shift[s][:, None],
            q=scene.q,
            tm=scene.tm,
        )
        one = thickness[s : s + 1]
        alone = [
            *gradient(moved, one, film=film),
            *index_gradient(moved, one, film=film, of="A"),
            weighted_gradient(moved, one, film=film, weight=weight[s : s + 1])[1],
            response(moved, one, film=film).t,
        ]
        for both, single in zip(together, alone, strict=True):
            np.testing.assert_allclose(both[s], single[0], rtol=1e-12, atol=1e-14)


@pytest.mark.parametrize("tm", [False, True])
def test_index_slope_where_a_film_turns_evanescent(tm):
    """At kz = 0 the formulas with sin(delta)/kz have no value; the derivative is the limit's."""
    scenes = [Scene([976.0], 3.3, 1.0, [[n]], q=1.45, tm=tm) for n in (1.45, 1.45 + 1e-7)]
    at, near = (index_gradient(scene, [[230.0]], film=[0])[1][0, 0, 0] for scene in scenes)
    assert at == pytest.approx(near, rel=1e-5)


def test_thick_metal_hides_what_lies_beneath():
    scene = Scene([976.0], 3.3, 1.0, [[0.21 + 6.3j], [1.45 + 0j]])
    thickness = [[100.0, 50_000.0, 200.0]]
    _, slope = gradient(scene, thickness, film=[1, 0, 1])
    _, by_index = index_gradient(scene, thickness, film=[1, 0, 1])
    assert slope[0, 0, 0] != 0.0
    assert slope[0, 0, 1] == pytest.approx(0.0, abs=1e-300)
    assert slope[0, 0, 2] == pytest.approx(0.0, abs=1e-300)
    assert by_index[0, 0, 2] == pytest.approx(0.0, abs=1e-300)
    bare = index_gradient(Scene([976.0], 3.3, 0.21 + 6.3j, [[1.45 + 0j]]), [[100.0]], film=[0])
    assert by_index[0, 0, 0] == pytest.approx(bare[1][0, 0, 0], rel=1e-12)


def test_a_mirror_too_long_for_floating_point_has_the_slopes_of_a_long_one():
    """400 pairs, each worth a factor 15: fields of 1e470, and nothing seen beyond the first few."""
    scene = Scene([976.0], 3.5, 3.4, [[1.0 + 1e-3j], [3.4]], q=1.02)
    long, short = ([[900.0, 40.0] * pairs] for pairs in (400, 30))
    for function, options in (
        (gradient, {}),
        (amplitude_gradient, {"of": "r"}),
        (amplitude_gradient, {"of": "r", "by": "index"}),
    ):
        _, slope = function(scene, long, film=[0, 1] * 400, **options)
        _, expected = function(scene, short, film=[0, 1] * 30, **options)
        assert np.isfinite(slope).all()
        assert abs(expected[0, 0, :4]).min() > 1e-12
        np.testing.assert_allclose(slope[0, 0, :12], expected[0, 0, :12], rtol=1e-9, atol=1e-15)


@pytest.mark.parametrize("by", ["thickness", "index"])
def test_scaling_on_the_way_leaves_the_slopes_of_t(by):
    """Mirrors on which the fields stay below 1e100, and pass it."""
    scene = Scene([976.0], 3.5, 3.4, [[1.0], [3.4]], q=1.02)
    relative = []
    for pairs in (50, 200):
        t, slope = amplitude_gradient(
            scene, [[900.0, 40.0] * pairs], film=[0, 1] * pairs, of="t", by=by
        )
        assert 0.0 < abs(t[0, 0]) < 1e-50
        relative.append(slope[0, 0, :6] / t[0, 0])
    np.testing.assert_allclose(relative[1], relative[0], rtol=1e-9)


@pytest.mark.parametrize("seed", range(6))
def test_group_delay_with_dispersion(seed):
    """Phase slope by a complex step of the wavelength, all indices moving with it."""
    scene, thickness, film = _case(seed)
    rng = np.random.default_rng(seed)
    by_nm = rng.normal(0.0, 1e-3, (5, scene.points))
    found = group_delay(
        scene,
        thickness,
        film=film,
        dispersion=Dispersion(films=by_nm[:3], incident=by_nm[3], outside=by_nm[4]),
    )
    for s, p in np.ndindex(found.shape):
        point = _point(scene, p, thickness[s], film)
        for key, slope in (("incident", by_nm[3, p]), ("outside", by_nm[4, p])):
            point[key] = Pair(point[key].real + 1j * STEP * slope, point[key].imag + 0j)
        point["films"] = [
            Pair(n.real + 1j * STEP * by_nm[m, p], n.imag + 0j)
            for n, m in zip(point["films"], film, strict=True)
        ]
        nm = point["wavelength_nm"]
        r = amplitudes(**{**point, "wavelength_nm": nm + 1j * STEP})[0]
        slope = np.imag(r.x) + 1j * np.imag(r.y)
        phase_by_nm = (slope / (np.real(r.x) + 1j * np.real(r.y))).imag / STEP
        expected = -(nm**2) / (2 * np.pi * 299.792458) * phase_by_nm
        assert found[s, p] == pytest.approx(expected, rel=1e-9, abs=1e-12)


def test_group_delay_of_a_spacer():
    """A layer matched to the chip in front of a mirror only adds the way there and back."""
    scene = Scene([976.0], 3.3, 0.2 + 6.0j, [[3.3]])
    delay = group_delay(scene, [[1000.0]], film=[0])[0, 0]
    assert delay == pytest.approx(2 * 3.3 * 1000.0 / 299.792458, rel=1e-12)


def test_group_delay_of_darkness_is_no_number():
    scene = Scene([976.0], 2.0, 2.0, np.empty((0, 1)))
    assert np.isnan(group_delay(scene, np.empty((1, 0)), film=[])[0, 0])


def test_no_layers():
    scene = Scene([976.0], 3.3, 1.0, np.empty((0, 1)))
    for value, slope in (
        gradient(scene, np.empty((2, 0)), film=[]),
        index_gradient(scene, np.empty((2, 0)), film=[], of="T"),
    ):
        assert value.shape == (2, 1)
        assert slope.shape == (2, 1, 0)


SCENE = Scene([900.0, 950.0], 3.3, 1.0, [[1.45, 1.45]])


def test_unknown_quantity():
    with pytest.raises(InputError, match="of: got 'S'; give one of R, T, A"):
        gradient(SCENE, [[100.0]], film=[0], of="S")
    with pytest.raises(InputError, match="of: got 'R'; give one of r, t"):
        amplitude_gradient(SCENE, [[100.0]], film=[0], of="R")
    with pytest.raises(InputError, match="by: got 'q'; give one of thickness, index"):
        amplitude_gradient(SCENE, [[100.0]], film=[0], by="q")


def test_bad_weights_and_slopes():
    with pytest.raises(ArrayError, match=r"weight: has shape \(1, 3\); expected \(1, 2\)"):
        weighted_gradient(SCENE, [[100.0]], film=[0], weight=[[1.0, 1.0, 1.0]])
    with pytest.raises(ArrayError, match=r"weight\[0, 1\]: is inf"):
        weighted_gradient(SCENE, [[100.0]], film=[0], weight=[[1.0, np.inf]])
    with pytest.raises(ArrayError, match=r"dispersion.films: has shape \(1, 1\)"):
        group_delay(SCENE, [[100.0]], film=[0], dispersion=Dispersion(films=[[0.1]]))
