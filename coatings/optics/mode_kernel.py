# ruff: noqa: PLR0917 - kernels take their arrays one by one
"""Compiled loops: what a bound mode looks like between its interfaces. No checks.

Lengths in 1/k0, phi and v = w phi' as in `guide_kernel`. A layer's field is taken from its stronger
end, so that it never is a difference of growing numbers.
"""

from __future__ import annotations

import cmath
import math

import numpy as np
from numpy.typing import NDArray

from coatings.optics.cache import compiled
from coatings.optics.guide_kernel import cross, outward_root

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]

_RULE = np.polynomial.legendre.leggauss(6)
GAUSS_X: Floats = 0.5 * (_RULE[0] + 1.0)
GAUSS_W: Floats = 0.5 * _RULE[1]
FEWEST_PIECES = 8
PIECES_PER_RADIAN = 3.0
GOLDEN = 0.5 * (math.sqrt(5.0) - 1.0)
NARROWINGS = 40


@compiled()
def inside(kappa: complex, phi: complex, slope: complex, u: float) -> tuple[complex, complex]:
    """phi and phi' a distance u from where they are given."""
    c, s, _, fade = cross(kappa, u)
    grow = 1.0 / math.sqrt(fade) if fade > 0.0 else 0.0
    return grow * (c * phi + s * slope), grow * (c * slope - kappa * kappa * s * phi)


@compiled()
def field_at(
    x: float,
    eps: Complexes,
    square: complex,
    at: Floats,
    phi: Complexes,
    v: Complexes,
    tm: bool,
    layer: int,
) -> tuple[complex, complex]:
    """phi and phi' at x, which lies in that layer."""
    w = 1.0 / eps[layer] if tm else 1.0 + 0.0j
    last = at.size - 1
    if layer == 0:
        gamma = outward_root(square - eps[0])
        p = phi[0] * cmath.exp(gamma * (x - at[0]))
        return p, gamma * p
    if layer > last:
        gamma = outward_root(square - eps[layer])
        p = phi[last] * cmath.exp(-gamma * (x - at[last]))
        return p, -gamma * p
    kappa = cmath.sqrt(eps[layer] - square)
    kappa = -kappa if kappa.imag < 0.0 else kappa
    if abs(phi[layer - 1]) > abs(phi[layer]):
        p, slope = inside(kappa, phi[layer], -v[layer] / w, at[layer] - x)
        return p, -slope
    return inside(kappa, phi[layer - 1], v[layer - 1] / w, x - at[layer - 1])


@compiled()
def values(
    x: Floats,
    eps: Complexes,
    square: complex,
    at: Floats,
    phi: Complexes,
    v: Complexes,
    tm: bool,
    out: Complexes,
) -> None:
    """phi at many places of one wavelength."""
    for i in range(x.size):
        layer = int(np.searchsorted(at, x[i]))
        out[i], _ = field_at(x[i], eps, square, at, phi, v, tm, layer)


@compiled()
def integrals(
    eps: Complexes,
    square: Complexes,
    at: Floats,
    phi: Complexes,
    v: Complexes,
    tm: bool,
    out: Complexes,
) -> None:
    """Integrals of phi^2 and phi'^2 over each layer, no conjugate; out (2, W, N).

    phi'^2 + kappa^2 phi^2 = C is constant in a layer of thickness d, and so, [ ] being the
    difference of its two ends, integral(phi^2) = (C d - [phi phi']) / (2 kappa^2) and
    integral(phi'^2) = [phi phi'] + kappa^2 integral(phi^2).
    """
    last = at.shape[1] - 1
    for i in range(square.size):
        for j in range(last + 2):
            w = 1.0 / eps[i, j] if tm else 1.0 + 0.0j
            y = eps[i, j] - square[i]
            if j in {0, last + 1}:
                p = phi[i, 0 if j == 0 else last]
                gamma = outward_root(-y)
                out[0, i, j], out[1, i, j] = 0.5 * p * p / gamma, 0.5 * p * p * gamma
                continue
            kappa = cmath.sqrt(y)
            kappa = -kappa if kappa.imag < 0.0 else kappa
            d = at[i, j] - at[i, j - 1]
            p, slope = phi[i, j - 1], v[i, j - 1] / w
            ends = phi[i, j] * v[i, j] / w - p * slope
            if abs(kappa) * d < 0.5:
                c, s, late, fade = cross(kappa, d)
                area = 0.5 * p * p * (d * fade + s * c) + p * slope * s * s + slope * slope * late
                out[0, i, j] = area / fade
            else:
                if abs(phi[i, j]) > abs(p):
                    p, slope = phi[i, j], v[i, j] / w
                out[0, i, j] = 0.5 * (d * (slope * slope + y * p * p) - ends) / y
            out[1, i, j] = ends + y * out[0, i, j]


@compiled()
def intensity(p: complex, slope: complex, w: complex, n_eff: complex, tm: bool) -> float:
    """|E|^2: of E_y (TE), of E_x and E_z together (TM)."""
    if not tm:
        return p.real**2 + p.imag**2
    across, along = n_eff * w * p, w * slope
    return across.real**2 + across.imag**2 + along.real**2 + along.imag**2


@compiled()
def sharpen(
    low: float,
    high: float,
    eps: Complexes,
    n_eff: complex,
    at: Floats,
    phi: Complexes,
    v: Complexes,
    tm: bool,
    layer: int,
) -> float:
    """Largest |E|^2 between two places of a layer by golden section."""
    w = 1.0 / eps[layer] if tm else 1.0 + 0.0j
    best = 0.0
    for _ in range(NARROWINGS):
        a, b = high - GOLDEN * (high - low), low + GOLDEN * (high - low)
        p, slope = field_at(a, eps, n_eff * n_eff, at, phi, v, tm, layer)
        left = intensity(p, slope, w, n_eff, tm)
        p, slope = field_at(b, eps, n_eff * n_eff, at, phi, v, tm, layer)
        right = intensity(p, slope, w, n_eff, tm)
        best = max(best, left, right)
        low, high = (a, high) if left < right else (low, b)
    return best


@compiled()
def size_of_layer(
    eps: Complexes,
    n_eff: complex,
    at: Floats,
    phi: Complexes,
    v: Complexes,
    tm: bool,
    layer: int,
) -> tuple[float, float, float]:
    """Integrals of |phi|^2 and of |E|^2 over an inner layer, and the largest |E|^2 in it."""
    w = 1.0 / eps[layer] if tm else 1.0 + 0.0j
    square = n_eff * n_eff
    start, d = at[layer - 1], at[layer] - at[layer - 1]
    pieces = FEWEST_PIECES + int(PIECES_PER_RADIAN * abs(cmath.sqrt(eps[layer] - square)) * d)
    step = d / pieces
    area, energy, peak, where = 0.0, 0.0, 0.0, start
    for k in range(pieces + 1):
        x = start + k * step
        p, slope = field_at(x, eps, square, at, phi, v, tm, layer)
        here = intensity(p, slope, w, n_eff, tm)
        if here > peak:
            peak, where = here, x
        for m in range(GAUSS_X.size if k < pieces else 0):
            p, slope = field_at(x + step * GAUSS_X[m], eps, square, at, phi, v, tm, layer)
            area += step * GAUSS_W[m] * (p.real**2 + p.imag**2)
            energy += step * GAUSS_W[m] * intensity(p, slope, w, n_eff, tm)
    low, high = max(where - step, start), min(where + step, start + d)
    return area, energy, max(peak, sharpen(low, high, eps, n_eff, at, phi, v, tm, layer))


@compiled()
def sizes(
    eps: Complexes,
    n_eff: Complexes,
    at: Floats,
    phi: Complexes,
    v: Complexes,
    tm: bool,
    flow: Floats,
    energy: Floats,
    peak: Floats,
) -> None:
    """Power in each layer, Re N w integral |phi|^2 (W, N); integral (W) and peak (W) of |E|^2."""
    last = at.shape[1] - 1
    for i in range(n_eff.size):
        energy[i], peak[i] = 0.0, 0.0
        for j in range(last + 2):
            w = 1.0 / eps[i, j] if tm else 1.0 + 0.0j
            if j in {0, last + 1}:
                p = phi[i, 0 if j == 0 else last]
                gamma = outward_root(n_eff[i] * n_eff[i] - eps[i, j])
                most = intensity(p, gamma * p, w, n_eff[i], tm)
                length = 0.5 / gamma.real
                area, total = length * (p.real**2 + p.imag**2), length * most
            else:
                area, total, most = size_of_layer(eps[i], n_eff[i], at[i], phi[i], v[i], tm, j)
            flow[i, j] = (n_eff[i] * w).real * area
            energy[i] += total
            peak[i] = max(peak[i], most)
