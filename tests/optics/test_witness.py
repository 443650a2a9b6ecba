"""Coated plates as the spectrophotometer sees them: closed forms, coherent plates, bounces."""

import numpy as np
import pytest

from coatings.errors import ArrayError, InputError
from coatings.optics import Scene, response
from coatings.optics.witness import WitnessPiece, witness_gradient, witness_spectrum

NM = np.array([620.0, 780.0, 976.0])
NO_LAYER = {"thickness_nm": np.empty((1, 0)), "film": np.empty(0, np.int64)}
BACKS, SIDES = ("polished", "ground"), ("s", "p", "mean")


def _bare(plate=1.5, **options):
    piece = WitnessPiece(NM, plate, np.empty((0, 3)), 1.0, **options)
    return witness_spectrum(piece, NO_LAYER["thickness_nm"], film=NO_LAYER["film"])


def _films(seed, k=0.0):
    rng = np.random.default_rng(seed)
    films = rng.uniform(1.35, 2.4, (2, 3)) + 1j * k * rng.uniform(0.5, 2.0, (2, 1))
    return films, rng.uniform(30.0, 200.0, (2, 4)), rng.integers(0, 2, 4)


def _face(plate, films, nm, film, angle_deg, tm, *, of_plate):
    """Response of the film from air, or from inside the plate with the layers as listed."""
    q = np.sin(np.radians(angle_deg))
    if of_plate:
        return response(Scene(NM, plate, 1.0, films, q=q, tm=tm), nm, film=film)
    return response(Scene(NM, 1.0, plate, films, q=q, tm=tm), nm[:, ::-1], film=film[::-1])


def test_bare_plate():
    """R = 2 r/(1 + r), T = 2 n/(n^2 + 1) for a clear plate (textbook, from memory)."""
    n, r = 1.5, (0.5 / 2.5) ** 2
    seen = _bare(n)
    np.testing.assert_allclose(seen.R, 2 * r / (1 + r), rtol=1e-13)
    np.testing.assert_allclose(seen.T, 2 * n / (n * n + 1), rtol=1e-13)
    np.testing.assert_allclose(seen.A, 0.0, atol=1e-14)


def test_bare_plate_with_a_ground_back():
    """Only the front is seen; what passes is what two faces pass once, the rest is scattered."""
    r = 0.04
    seen = _bare(1.5, back="ground")
    np.testing.assert_allclose(seen.R, r, rtol=1e-13)
    np.testing.assert_allclose(seen.T, (1 - r) ** 2, rtol=1e-13)


@pytest.mark.parametrize("angle_deg", [0.0, 40.0])
def test_absorbing_plate(angle_deg):
    """T = (1 - r)^2 tau/(1 - r^2 tau^2), R = r (1 + tau T), tau = exp(-alpha D/cos) (Lambert; from memory)."""
    k = 2e-5
    inside = np.cos(np.arcsin(np.sin(np.radians(angle_deg)) / 1.5))
    tau = np.exp(-4 * np.pi * k / NM * 1e6 / inside)
    outside = np.cos(np.radians(angle_deg))
    r = ((outside - 1.5 * inside) / (outside + 1.5 * inside)) ** 2
    seen = _bare(1.5 + 1j * k, angle_deg=angle_deg, polarization="s")
    np.testing.assert_allclose(seen.T, [(1 - r) ** 2 * tau / (1 - r**2 * tau**2)], rtol=1e-8)
    np.testing.assert_allclose(seen.R, [r * (1 + tau * seen.T[0])], rtol=1e-8)


def test_brewster():
    seen = _bare(1.5, angle_deg=np.degrees(np.arctan(1.5)), polarization="p")
    np.testing.assert_allclose(seen.R, 0.0, atol=1e-28)
    np.testing.assert_allclose(seen.T, 1.0, rtol=1e-14)


@pytest.mark.parametrize("back", BACKS)
def test_s_is_p_at_normal_incidence_and_the_mean_is_last(back):
    films, nm, film = _films(1)

    def seen(polarization, angle_deg):
        piece = WitnessPiece(NM, 1.51 + 1e-6j, films, 1.0, back, angle_deg, polarization)
        return witness_spectrum(piece, nm, film=film)

    for quantity in "RT":
        s, p, mean = (getattr(seen(side, 0.0), quantity) for side in SIDES)
        np.testing.assert_allclose(p, s, rtol=1e-12)
        np.testing.assert_array_equal(mean, s)
        s, p, mean = (getattr(seen(side, 50.0), quantity) for side in SIDES)
        assert abs(s - p).max() > 1e-3
        np.testing.assert_allclose(mean, 0.5 * (s + p), rtol=1e-14)


@pytest.mark.parametrize("seed", range(8))
@pytest.mark.parametrize("plate", [1.51, 1.51 + 3e-5j, 3.4 + 1e-5j])
def test_mean_of_a_coherent_plate_over_its_phase(seed, plate):
    """Amplitudes of film, plate and back put together; mean over 4096 phases of the plate."""
    films, nm, film = _films(seed, k=1e-3 * (seed % 2))
    angle_deg, tm = 12.0 * (seed % 4), seed % 3 == 0
    piece = WitnessPiece(NM, plate, films, 0.5, "polished", angle_deg, "p" if tm else "s")
    seen = witness_spectrum(piece, nm, film=film)
    outer = _face(plate, films, nm, film, angle_deg, tm, of_plate=False)
    inner = _face(plate, films, nm, film, angle_deg, tm, of_plate=True)
    back = _face(plate, films, np.empty((2, 0)), film[:0], angle_deg, tm, of_plate=True)
    kz = 2 * np.pi / NM * np.sqrt(plate**2 - np.sin(np.radians(angle_deg)) ** 2 + 0j)
    crossing = np.exp(-kz.imag * 0.5e6 + 2j * np.pi * np.arange(4096)[:, None, None] / 4096)
    around = 1.0 - inner.r * back.r * crossing**2
    r = outer.r + outer.t * inner.t * back.r * crossing**2 / around
    t = outer.t * back.t * crossing / around
    np.testing.assert_allclose(seen.R, (abs(r) ** 2).mean(axis=0), rtol=1e-11)
    np.testing.assert_allclose(seen.T, (abs(t) ** 2).mean(axis=0), rtol=1e-11)


@pytest.mark.parametrize("angle_deg", [0.0, 45.0])
@pytest.mark.parametrize("tm", [False, True])
@pytest.mark.parametrize(("k", "rtol"), [(0.0, 1e-11), (1e-5, 1e-5)])
def test_mean_of_a_coherent_plate_over_its_thickness(angle_deg, tm, k, rtol):
    """The plate as one more layer of the coherent film, its thickness varied by one period."""
    films, nm, film = _films(3)
    plate = 1.51 + 1j * k
    piece = WitnessPiece(NM, plate, films, 0.2, "polished", angle_deg, "p" if tm else "s")
    seen = witness_spectrum(piece, nm[:1], film=film)
    q = np.sin(np.radians(angle_deg))
    for p, at in enumerate(NM):
        period = at / 2 / np.sqrt(1.51**2 - q**2)
        steps = 2e5 + period * (np.arange(256) - 127.5) / 256
        stack = np.column_stack([np.tile(nm[0, ::-1], (256, 1)), steps])
        indices = [[films[0, p]], [films[1, p]], [plate]]
        coherent = response(
            Scene([at], 1.0, 1.0, indices, q=q, tm=tm), stack, film=[*film[::-1], 2]
        )
        assert seen.R[0, p] == pytest.approx(coherent.R.mean(), rel=rtol)
        assert seen.T[0, p] == pytest.approx(coherent.T.mean(), rel=rtol)


@pytest.mark.parametrize("back", BACKS)
@pytest.mark.parametrize("k", [0.0, 0.01])
@pytest.mark.parametrize("plate_k", [0.0, 1e-6, 1e-5])
def test_light_bounce_by_bounce(back, k, plate_k):
    """The slow twin follows the light: what leaves, what film, plate and ground face take."""
    films, nm, film = _films(5, k=k)
    plate, angle_deg = 1.51 + 1j * plate_k, 30.0
    piece = WitnessPiece(NM, plate, films, 1.0, back, angle_deg, "p")
    seen = witness_spectrum(piece, nm, film=film)
    outer = _face(plate, films, nm, film, angle_deg, True, of_plate=False)
    inner = _face(plate, films, nm, film, angle_deg, True, of_plate=True)
    bare = _face(plate, films, np.empty((2, 0)), film[:0], angle_deg, True, of_plate=True)
    tau = np.exp(-4 * np.pi / NM * np.sqrt(plate**2 - 0.25 + 0j).imag * 1e6)
    R, T, lost, light = outer.R, np.zeros_like(outer.R), outer.A, outer.T
    for _ in range(80):
        lost, light = lost + (1 - tau) * light, tau * light
        T = T + bare.T * light
        returned = bare.R if back == "polished" else 0.0
        lost, light = lost + (1 - bare.T - returned) * light, returned * light
        lost, light = lost + (1 - tau) * light, tau * light
        R = R + inner.T * light
        lost, light = lost + (1 - inner.R - inner.T) * light, inner.R * light
    np.testing.assert_allclose(seen.R, R, rtol=1e-10)
    np.testing.assert_allclose(seen.T, T, rtol=1e-10)
    np.testing.assert_allclose(seen.A, lost, rtol=1e-9, atol=1e-13)
    clear = k == 0.0 and plate_k == 0.0 and back == "polished"
    assert (abs(seen.A) < 1e-13).all() if clear else (seen.A > 0.0).all()


def test_light_meets_the_last_layer_first():
    """50 um of gold deposited last: what lies beneath does not matter, nor does the plate."""
    films = np.array([[1.45] * 3, [0.2 + 5.5j] * 3])
    piece = WitnessPiece(NM, 1.51, films, 1.0)
    seen = witness_spectrum(piece, [[100.0, 50_000.0]], film=[0, 1])
    np.testing.assert_allclose(seen.R, abs((0.8 - 5.5j) / (1.2 + 5.5j)) ** 2, rtol=1e-13)
    np.testing.assert_array_equal(seen.T, 0.0)


def test_an_opaque_plate_shows_no_back():
    """A coated bar above its band gap: polished is ground, and nothing passes."""
    films, nm, film = _films(2)
    polished, ground = (
        witness_spectrum(WitnessPiece(NM, 3.6 + 0.1j, films, 0.1, back), nm, film=film)
        for back in BACKS
    )
    np.testing.assert_array_equal(polished.R, ground.R)
    assert polished.T.max() < 1e-50


def test_batches_and_shifts():
    """Every stack of a batch is what it is alone, and a shifted film is another film."""
    films, nm, _ = _films(4)
    film = np.array([[0, 1, 0, 1], [1, 1, 0, 0]])
    shift = np.array([[0.02, -0.03], [0.0, 0.01 + 0.002j]])
    piece = WitnessPiece(NM, 1.51 + 1e-6j, films, 1.0, angle_deg=8.0)
    both = witness_spectrum(piece, nm, film=film, film_shift=shift)
    for s in range(2):
        moved = WitnessPiece(NM, 1.51 + 1e-6j, films + shift[s][:, None], 1.0, angle_deg=8.0)
        alone = witness_spectrum(moved, nm[s : s + 1], film=film[s])
        np.testing.assert_allclose(both.R[s], alone.R[0], rtol=1e-12)
        np.testing.assert_allclose(both.T[s], alone.T[0], rtol=1e-12)


GOOD = {"wavelength_nm": NM, "plate": 1.51, "films": [[1.45] * 3, [2.1] * 3], "thickness_mm": 1.0}
NAN = float("nan")


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"wavelength_nm": [NAN, 1.0, 1.0]}, r"wavelength_nm\[0\]: is nan"),
        ({"wavelength_nm": 5.0}, r"wavelength_nm: has 0 axes"),
        ({"plate": [1.5, 1.5]}, r"plate: has shape \(2,\); expected \(3,\)"),
        ({"plate": [1.5, NAN, 1.5]}, r"plate\[1\]: is \(nan\+0j\); give a finite number"),
        ({"plate": [1.5, 1.5, 1.5 - 1e-3j]}, r"plate\[2\]: is .*; give n above 0 and k of 0"),
        ({"plate": 0.0}, r"plate\[0\]: is 0j; give n above 0"),
        ({"films": [[1.45] * 2]}, r"films: has shape \(1, 2\); expected \(1, 3\)"),
        ({"films": [[1.45, NAN, 2.0]]}, r"films\[0, 1\]: is \(nan\+0j\)"),
        ({"thickness_mm": 0.0}, r"thickness_mm: got 0.0; give more than 0"),
        ({"thickness_mm": NAN}, r"thickness_mm: got nan"),
        ({"angle_deg": 90.0}, r"angle_deg: got 90.0; give 0 or more and less than 90"),
        ({"angle_deg": -1.0}, r"angle_deg: got -1.0"),
        ({"angle_deg": 60.0, "plate": 0.5}, r"angle_deg: lets no light into a plate of index"),
        ({"back": "rough"}, r"back: got 'rough'; give one of polished, ground"),
        ({"polarization": "TE"}, r"polarization: got 'TE'; give one of s, p, mean"),
    ],
)
def test_bad_pieces(change, message):
    with pytest.raises(InputError, match=message):
        WitnessPiece(**{**GOOD, **change})


@pytest.mark.parametrize(
    ("thickness", "change", "message"),
    [
        ([[100.0, 90.0, -1.0]], {}, r"thickness_nm\[0, 2\]: is -1.0 nm"),
        ([100.0], {}, r"thickness_nm: has 1 axes"),
        ([[100.0, 90.0, 80.0]], {"film": [0, 1, 2]}, r"film\[2\]: is 2; the scene has 2 films"),
        ([[100.0, 90.0]], {}, r"film: has shape \(3,\); expected \(2,\)"),
        ([[1.0, 1.0, 1.0]], {"film_shift": [[0.1]]}, r"film_shift: has shape \(1, 1\)"),
        ([[1.0, 1.0, 1.0]], {"weights": [[1.0, 1.0]]}, r"weights: has shape \(1, 2\); expected"),
        ([[1.0, 1.0, 1.0]], {"weights": [[1.0, NAN, 0.0]]}, r"weights\[0, 1\]: is nan"),
    ],
)
def test_bad_stacks(thickness, change, message):
    arguments = {"film": [0, 1, 0], **change}
    for function in (witness_spectrum, witness_gradient):
        with pytest.raises(ArrayError, match=message):
            function(WitnessPiece(**GOOD), thickness, **arguments)


def test_what_was_given_is_neither_changed_nor_shared():
    nm = NM.copy()
    piece = WitnessPiece(**{**GOOD, "wavelength_nm": nm, "angle_deg": 8.0})
    nm[:] = 1.0
    np.testing.assert_array_equal(piece.wavelength_nm, NM)
    np.testing.assert_array_equal(piece.plate, [1.51] * 3)
    assert piece.films.shape == (2, 3)
    with pytest.raises(ValueError, match="read-only"):
        piece.films[0] = 1.0


def test_bad_quantity():
    with pytest.raises(InputError, match="of: got 'A'; give one of R, T"):
        witness_gradient(WitnessPiece(**GOOD), [[100.0]], film=[0], of="A")
