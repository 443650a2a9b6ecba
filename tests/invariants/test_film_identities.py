"""F6, F7 and their kin: identities that hold for every stack (textbook; exact)."""

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from coatings.optics import Scene, gradient, response

real_index = st.floats(1.3, 4.0)
losses = st.one_of(st.just(0.0), st.floats(1e-6, 4.0))
lengths = st.floats(0.0, 600.0)
angles = st.floats(0.0, 85.0)
polarizations = st.booleans()
lossless_layers = st.lists(st.tuples(real_index, lengths), min_size=1, max_size=8)
layers = st.lists(st.tuples(real_index, losses, lengths), min_size=1, max_size=8)

quick = settings(max_examples=60, deadline=None)


def _light(chip, outside, films, nm, *, q=None, tm=False, wavelength_nm=976.0):
    """Response of one stack at one point; a column of indices, a row of thicknesses."""
    scene = Scene([wavelength_nm], chip, outside, np.reshape(films, (-1, 1)), q=q, tm=tm)
    return response(scene, np.reshape(nm, (1, -1)), film=range(len(films)))


def _q(index, degrees):
    return index * np.sin(np.radians(degrees))


@quick
@given(stack=lossless_layers, chip=real_index, degrees=angles, tm=polarizations)
def test_energy_is_kept_without_loss(stack, chip, degrees, tm):
    films, nm = zip(*stack, strict=True)
    found = _light(chip, 1.0, films, nm, q=_q(chip, degrees), tm=tm)
    assert found.A[0, 0] == pytest.approx(0.0, abs=1e-11)


@quick
@given(stack=layers, chip=real_index, degrees=angles, tm=polarizations)
def test_loss_never_makes_light(stack, chip, degrees, tm):
    films, nm = [n + 1j * k for n, k, _ in stack], [d for *_, d in stack]
    found = _light(chip, 1.0, films, nm, q=_q(chip, degrees), tm=tm)
    assert found.A[0, 0] > -1e-11
    assert 0.0 <= found.R[0, 0] <= 1.0 + 1e-11
    assert found.T[0, 0] >= 0.0


@quick
@given(stack=layers, sides=st.tuples(real_index, real_index), degrees=angles, tm=polarizations)
def test_transmittance_is_the_same_both_ways(stack, sides, degrees, tm):
    films, nm = [n + 1j * k for n, k, _ in stack], [d for *_, d in stack]
    q = _q(min(sides), degrees)
    there = _light(*sides, films, nm, q=q, tm=tm).T[0, 0]
    back = _light(*sides[::-1], films[::-1], nm[::-1], q=q, tm=tm).T[0, 0]
    assert there == pytest.approx(back, rel=1e-9, abs=1e-14)


@quick
@given(
    stack=lossless_layers,
    sides=st.tuples(real_index, real_index),
    degrees=angles,
    tm=polarizations,
)
def test_reflectance_of_a_lossless_stack_is_the_same_both_ways(stack, sides, degrees, tm):
    films, nm = zip(*stack, strict=True)
    q = _q(min(sides), degrees)
    there = _light(*sides, films, nm, q=q, tm=tm).R[0, 0]
    back = _light(*sides[::-1], films[::-1], nm[::-1], q=q, tm=tm).R[0, 0]
    assert there == pytest.approx(back, abs=1e-11)


@quick
@given(stack=layers, share=st.floats(0.0, 1.0), which=st.integers(0, 7), degrees=angles)
def test_a_split_layer_is_the_whole_layer(stack, share, which, degrees):
    films, nm = [n + 1j * k for n, k, _ in stack], [d for *_, d in stack]
    at = which % len(nm)
    first = share * nm[at]
    split_films = [*films[:at], films[at], *films[at:]]
    split_nm = [*nm[:at], first, nm[at] - first, *nm[at + 1 :]]
    q = _q(3.3, degrees)
    whole = _light(3.3, 1.0, films, nm, q=q).r[0, 0]
    assert _light(3.3, 1.0, split_films, split_nm, q=q).r[0, 0] == pytest.approx(whole, abs=1e-11)


@quick
@given(stack=layers, index=real_index, orders=st.integers(1, 3), which=st.integers(0, 8))
def test_a_half_wave_layer_is_not_seen(stack, index, orders, which):
    films, nm = [n + 1j * k for n, k, _ in stack], [d for *_, d in stack]
    at = which % (len(nm) + 1)
    half_wave = orders * 976.0 / 2 / index
    more = _light(3.3, 1.0, [*films[:at], index, *films[at:]], [*nm[:at], half_wave, *nm[at:]]).R[
        0, 0
    ]
    assert more == pytest.approx(_light(3.3, 1.0, films, nm).R[0, 0], abs=1e-11)


@quick
@given(stack=layers, chip=real_index)
def test_polarizations_agree_at_normal_incidence(stack, chip):
    films, nm = [n + 1j * k for n, k, _ in stack], [d for *_, d in stack]
    te, tm = (_light(chip, 1.0, films, nm, q=0.0, tm=tm) for tm in (False, True))
    plain = _light(chip, 1.0, films, nm, tm=True)
    for found in (tm, plain):
        assert found.r[0, 0] == pytest.approx(te.r[0, 0], abs=1e-12)
        assert found.t[0, 0] == pytest.approx(te.t[0, 0], abs=1e-12)


@quick
@given(chip=real_index, outside=st.floats(1.0, 4.0))
def test_no_tm_light_returns_at_the_brewster_angle(chip, outside):
    q = chip * np.sin(np.arctan2(outside, chip))
    assert _light(chip, outside, [1.5], [0.0], q=q, tm=True).R[0, 0] < 1e-25


@quick
@given(chip=st.floats(1.5, 4.0), part=st.floats(0.01, 0.99), tm=polarizations)
def test_phase_at_total_reflection(chip, part, tm):
    """r = (eta_1 - i |eta_2|)/(eta_1 + i |eta_2|), so tan(phase/2) = -|eta_2|/eta_1 for TE. For TM
    eta_2 = -i n2^2/decay, the sign turns and the ratio is n2^2 kz1/(n1^2 decay), n2 = 1 here."""
    q = 1.0 + part * (chip - 1.0)
    inside, decay = np.sqrt(chip**2 - q**2), np.sqrt(q**2 - 1.0)
    found = _light(chip, 1.0, [1.5], [0.0], q=q, tm=tm)
    assert found.R[0, 0] == pytest.approx(1.0, abs=1e-13)
    assert found.T[0, 0] == 0.0
    tangent = -decay / inside
    if tm:
        tangent = inside / decay / chip**2
    expected = np.exp(2j * np.arctan(tangent))
    assert found.r[0, 0] == pytest.approx(expected, abs=1e-12)


@quick
@given(stack=layers, k=st.floats(-1e-9, 1e-9), degrees=st.floats(0.0, 17.0), tm=polarizations)
def test_gain_goes_over_into_loss_smoothly(stack, k, degrees, tm):
    films, nm = [n + 1j * loss for n, loss, _ in stack], [d for *_, d in stack]
    q = _q(3.3, degrees)
    nearly = _light(3.3, 1.0, [1.7 + 1j * k, *films], [150.0, *nm], q=q, tm=tm).r[0, 0]
    without = _light(3.3, 1.0, [1.7, *films], [150.0, *nm], q=q, tm=tm).r[0, 0]
    assert nearly == pytest.approx(without, abs=1e-6)


@quick
@given(stack=layers, scale=st.floats(0.5, 2.0), tm=polarizations)
def test_only_thickness_over_wavelength_matters(stack, scale, tm):
    films, nm = [n + 1j * k for n, k, _ in stack], np.array([d for *_, d in stack])
    one = _light(3.3, 1.0, films, nm, q=0.7, tm=tm).r[0, 0]
    other = _light(3.3, 1.0, films, scale * nm, q=0.7, tm=tm, wavelength_nm=scale * 976.0)
    assert other.r[0, 0] == pytest.approx(one, abs=1e-11)


@quick
@given(stack=lossless_layers, tm=polarizations)
def test_slopes_of_a_lossless_stack_balance(stack, tm):
    films, nm = zip(*stack, strict=True)
    scene = Scene([976.0], 3.3, 1.0, np.reshape(films, (-1, 1)), q=0.4, tm=tm)
    slopes = [gradient(scene, [nm], film=range(len(nm)), of=of)[1] for of in "RTA"]
    np.testing.assert_allclose(slopes[0], -slopes[1], atol=1e-11)
    np.testing.assert_allclose(slopes[2], 0.0, atol=1e-11)
