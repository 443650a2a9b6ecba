# ruff: noqa: PLR0917 - kernels take their arrays one by one
"""Compiled loops: Fourier transforms of a guided mode in closed form. No checks.

With lengths in 1/k0, f~(q) = integral of f exp(-i q x) dx. In a layer phi'' = -kappa^2 phi, so

    d/dx [(phi' + i q phi) exp(-i q x)] = (q^2 - kappa^2) phi exp(-i q x),

and every interface at x adds (v/w + i q phi) exp(-i q x) / (q^2 - kappa^2) as the upper end of the
layer below it and takes it away as the lower end of the layer above. The tails add
phi exp(-i q x) / (gamma -+ i q). The transform of g = w phi takes each layer's part times its w.
Where q is so close to kappa that the difference of the two ends would lose its digits, the layer is
taken as its two travelling waves, or, thinner than a hundredth of a radian, by Gauss's rule.
"""

from __future__ import annotations

import cmath
import math

import numpy as np
from numpy.typing import NDArray

from coatings.optics.cache import compiled
from coatings.optics.guide_kernel import outward_root

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

CLOSE = 1e-5
THIN = 1e-2
GAUSS = math.sqrt(0.6)


@compiled()
def sinc(z: complex) -> complex:
    """sin z / z."""
    if abs(z) < 1e-3:
        return 1.0 - z * z / 6.0 * (1.0 - z * z / 20.0)
    return cmath.sin(z) / z


@compiled()
def close_layer(
    phi: complex, slope: complex, kappa: complex, q: complex, x: float, d: float
) -> complex:
    """Transform of one layer from x to x + d when q is next to kappa; field given at x."""
    start = cmath.exp(-1j * q * x)
    if abs(kappa) * d < THIN:
        total = 0.0j
        for k in range(3):
            u = 0.5 * d * (1.0 + (k - 1) * GAUSS)
            weight = (8.0 if k == 1 else 5.0) / 18.0 * d
            z = kappa * u
            field = phi * cmath.cos(z) + slope * u * sinc(z)
            total += weight * field * cmath.exp(-1j * q * u)
        return start * total
    up = 0.5 * (phi - 1j * slope / kappa)
    down = 0.5 * (phi + 1j * slope / kappa)
    a, b = 0.5 * d * (kappa - q), 0.5 * d * (-kappa - q)
    return start * d * (up * cmath.exp(1j * a) * sinc(a) + down * cmath.exp(1j * b) * sinc(b))


@compiled()
def wave(q: complex, x: float) -> complex:
    """exp(-i q x)."""
    size = math.exp(q.imag * x)
    return complex(size * math.cos(q.real * x), -size * math.sin(q.real * x))


@compiled()
def transform_at(
    q: complex,
    eps: Complexes,
    square: complex,
    decay: tuple[complex, complex],
    x: Floats,
    phi: Complexes,
    v: Complexes,
    tm: bool,
) -> tuple[complex, complex, complex, complex]:
    """f~(q), f~(-q), g~(q), g~(-q) of one mode at one q."""
    last = x.size - 1
    w = 1.0 / eps[0] if tm else 1.0 + 0.0j
    phase = wave(q, x[0])
    inverse = 1.0 / phase
    f, b = phi[0] * phase / (decay[0] - 1j * q), phi[0] * inverse / (decay[0] + 1j * q)
    g, h = w * f, w * b
    for j in range(1, x.size):
        w = 1.0 / eps[j] if tm else 1.0 + 0.0j
        y = eps[j] - square
        gap = q * q - y
        d = x[j] - x[j - 1]
        phase_ahead = wave(q, x[j])
        inverse_ahead = 1.0 / phase_ahead
        before, after = v[j - 1] / w, v[j] / w
        if abs(gap) * d < CLOSE * (abs(q) + math.sqrt(abs(y))):
            kappa = cmath.sqrt(y)
            forth = close_layer(phi[j - 1], before, kappa, q, x[j - 1], d)
            back = close_layer(phi[j - 1], before, kappa, -q, x[j - 1], d)
        else:
            one, two = 1j * q * phi[j - 1], 1j * q * phi[j]
            gap = 1.0 / gap
            forth = ((after + two) * phase_ahead - (before + one) * phase) * gap
            back = ((after - two) * inverse_ahead - (before - one) * inverse) * gap
        f, b, g, h = f + forth, b + back, g + w * forth, h + w * back
        phase, inverse = phase_ahead, inverse_ahead
    w = 1.0 / eps[-1] if tm else 1.0 + 0.0j
    forth = phi[last] * phase / (decay[1] + 1j * q)
    back = phi[last] * inverse / (decay[1] - 1j * q)
    return f + forth, b + back, g + w * forth, h + w * back


@compiled()
def transform(
    q: Complexes,
    eps: Complexes,
    square: Complexes,
    x: Floats,
    phi: Complexes,
    v: Complexes,
    tm: bool,
    out: Complexes,
) -> None:
    """f~(q), f~(-q), g~(q), g~(-q) to ``out`` (4, W, K) at q (W, K).

    eps (W, N), square (W), x, phi, v (W, N - 1).
    """
    for i in range(q.shape[0]):
        decay = (outward_root(square[i] - eps[i, 0]), outward_root(square[i] - eps[i, -1]))
        for k in range(q.shape[1]):
            f, b, g, h = transform_at(q[i, k], eps[i], square[i], decay, x[i], phi[i], v[i], tm)
            out[0, i, k], out[1, i, k], out[2, i, k], out[3, i, k] = f, b, g, h
