"""Derivatives of what the spectrophotometer sees, against complex steps through a plain twin."""

import numpy as np
import pytest
from film_in_pairs import STEP, Pair, amplitudes

from coatings.optics.slit import Slit
from coatings.optics.witness import WitnessPiece, witness_gradient, witness_spectrum

NM = np.array([620.0, 976.0])
FILM = [0, 1, 0, 2]
NANOMETRES = np.array([[90.0, 40.0, 150.0, 20.0], [30.0, 110.0, 60.0, 75.0]])
FILMS = np.array([[1.45, 1.44], [2.2 + 1e-3j, 2.1 + 1e-4j], [1.8 + 0.1j, 1.7 + 0.2j]])
PIECES = [
    WitnessPiece(NM, plate, FILMS, 0.5, back, angle, side)
    for plate in (1.51, 1.51 + 4e-5j, 3.5 + 2e-5j)
    for back in ("polished", "ground")
    for angle, side in ((0.0, "mean"), (35.0, "mean"), (50.0, "p"))
]


def _seen(piece, p, nm, indices):
    """R and T of one piece at one point, analytic in thicknesses and in Pairs of n and k."""
    q = np.sin(np.radians(piece.angle_deg))
    plate = piece.plate[p]
    at = {"wavelength_nm": NM[p], "q": q}
    tau = np.exp(-4 * np.pi / NM[p] * np.sqrt(plate**2 - q**2).imag * piece.thickness_mm * 1e6)
    results = []
    for tm in {"s": [False], "p": [True], "mean": [False, True]}[piece.polarization]:
        _, _, R, T = amplitudes(
            incident=1.0, outside=plate, films=indices[::-1], thickness_nm=nm[::-1], tm=tm, **at
        )
        inside = {"incident": plate, "outside": 1.0, "tm": tm, **at}
        _, _, inner_R, inner_T = amplitudes(films=indices, thickness_nm=nm, **inside)
        _, _, back_R, back_T = amplitudes(films=[], thickness_nm=[], **inside)
        back_R = 0.0 if piece.back == "ground" else back_R
        left = 1.0 - inner_R * back_R * tau**2
        results.append(
            np.array([R + T * inner_T * tau**2 * back_R / left, tau * T * back_T / left])
        )
    return np.mean(results, axis=0)


def _step(piece, p, nm, layer=None, film=None, part=0):
    """d(R, T) by the thickness of a layer, or by n (part 0) or k (part 1) of a film."""
    nm = [d + 1j * STEP * (j == layer) for j, d in enumerate(nm)]
    indices = []
    for m in FILM:
        n, k = FILMS[m, p].real + 0j, FILMS[m, p].imag + 0j
        moved = 1j * STEP * (m == film)
        indices.append(Pair(n + moved * (part == 0), k + moved * (part == 1)))
    return _seen(piece, p, nm, indices).imag / STEP


@pytest.mark.parametrize("number", range(len(PIECES)))
def test_against_complex_steps(number):
    piece = PIECES[number]
    spectrum = witness_spectrum(piece, NANOMETRES, film=FILM)
    for which, of in enumerate("RT"):
        found = witness_gradient(piece, NANOMETRES, film=FILM, of=of)
        np.testing.assert_allclose(found.value, getattr(spectrum, of), rtol=1e-12)
        less = witness_gradient(piece, NANOMETRES, film=FILM, of=of, by_film=False)
        np.testing.assert_array_equal(less.by_thickness, found.by_thickness)
        assert less.by_film is None
        for s, p in np.ndindex(2, 2):
            row = list(NANOMETRES[s])
            by_nm = [_step(piece, p, row, layer=j)[which] for j in range(4)]
            by_n, by_k = (
                [_step(piece, p, row, film=m, part=part)[which] for m in range(3)]
                for part in (0, 1)
            )
            np.testing.assert_allclose(found.by_thickness[s, p], by_nm, rtol=1e-8, atol=1e-12)
            np.testing.assert_allclose(found.by_film[s, p].real, by_n, rtol=1e-8, atol=1e-11)
            np.testing.assert_allclose(found.by_film[s, p].imag, by_k, rtol=1e-8, atol=1e-11)


def test_films_of_their_own_and_shifts():
    """Differences of the spectrum itself, with a film order and index shifts for every stack."""
    film, step = np.array([FILM, [2, 1, 1, 0]]), 1e-4
    shift = np.array([[0.01, -0.02, 0.0], [0.03 + 0.01j, 0.0, 0.02]])
    piece = PIECES[4]
    found = witness_gradient(piece, NANOMETRES, film=film, film_shift=shift)
    for j in range(4):
        up, down = (
            witness_spectrum(piece, NANOMETRES + h * np.eye(4)[j], film=film, film_shift=shift).R
            for h in (step, -step)
        )
        np.testing.assert_allclose(found.by_thickness[:, :, j], (up - down) / 2 / step, atol=1e-10)
    for m in range(3):
        up, down = (
            witness_spectrum(piece, NANOMETRES, film=film, film_shift=shift + h * np.eye(3)[m]).R
            for h in (step, -step)
        )
        np.testing.assert_allclose(found.by_film[:, :, m].real, (up - down) / 2 / step, atol=1e-6)


def test_through_a_slit():
    """Readings and their derivatives are the same average."""
    readings = np.array([700.0, 720.0])
    slit = Slit("triangular", 4.0)
    grid = slit.grid_nm(readings, step_nm=1.0)
    films = np.full((2, grid.size), [[1.45], [2.1]])
    piece = WitnessPiece(grid, 1.51, films, 1.0, angle_deg=8.0)
    weights = slit.weights(readings, grid)
    options = {"film": [0, 1, 0]}
    plain = witness_gradient(piece, [[300.0, 200.0, 100.0]], **options)
    found = witness_gradient(piece, [[300.0, 200.0, 100.0]], **options, weights=weights)
    seen = witness_spectrum(piece, [[300.0, 200.0, 100.0]], **options, weights=weights)
    assert found.value.shape == seen.T.shape == (1, 2)
    np.testing.assert_allclose(seen.R, found.value, rtol=1e-12)
    for q in range(2):
        np.testing.assert_allclose(found.value[0, q], weights[q] @ plain.value[0])
        np.testing.assert_allclose(found.by_thickness[0, q], weights[q] @ plain.by_thickness[0])
        np.testing.assert_allclose(found.by_film[0, q], weights[q] @ plain.by_film[0])


@pytest.mark.parametrize("of", ["R", "T"])
def test_no_layers(of):
    found = witness_gradient(PIECES[0], np.empty((2, 0)), film=[], of=of)
    assert found.by_thickness.shape == (2, 2, 0)
    np.testing.assert_array_equal(found.by_film, np.zeros((2, 2, 3)))
