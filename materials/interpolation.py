"""Interpolation that keeps monotone data monotone and has a continuous slope.

Piecewise cubics with the tangents of Fritsch and Butland: at an inner point the weighted harmonic
mean of the neighbouring chords, zero where they differ in sign; at an end the three-point
formula, limited so that the curve stays monotone. Real and imaginary part are treated apart.

References
----------
F. N. Fritsch and J. Butland, "A method for constructing local monotone piecewise cubic
interpolants", SIAM J. Sci. Stat. Comput. 5, 300-304 (1984), doi:10.1137/0905021.
"""

from __future__ import annotations

import numpy as np

from materials.curves import Complexes, Floats, Tabulated


def monotone(wavelength_nm: Floats, index: Complexes) -> Tabulated:
    """Curve through a table with two rows or more, wavelengths rising."""
    real = _tangents(wavelength_nm, index.real)
    imag = _tangents(wavelength_nm, index.imag)
    return Tabulated(wavelength_nm, index, real + 1j * imag)


def _tangents(x: Floats, y: Floats) -> Floats:
    h = np.diff(x)
    chord = np.diff(y) / h
    if len(x) == 2:
        return np.array([chord[0], chord[0]])
    tangent = np.zeros(len(x))
    w1 = 2.0 * h[1:] + h[:-1]
    w2 = h[1:] + 2.0 * h[:-1]
    same = np.sign(chord[:-1]) * np.sign(chord[1:]) > 0
    a, b = chord[:-1][same], chord[1:][same]
    tangent[1:-1][same] = (w1 + w2)[same] / (w1[same] / a + w2[same] / b)
    tangent[0] = _end(h[0], h[1], chord[0], chord[1])
    tangent[-1] = _end(h[-1], h[-2], chord[-1], chord[-2])
    return tangent


def _end(h0: float, h1: float, chord0: float, chord1: float) -> float:
    tangent = ((2.0 * h0 + h1) * chord0 - h0 * chord1) / (h0 + h1)
    if np.sign(tangent) != np.sign(chord0):
        return 0.0
    if np.sign(chord0) != np.sign(chord1) and abs(tangent) > 3.0 * abs(chord0):
        return float(3.0 * chord0)
    return float(tangent)
