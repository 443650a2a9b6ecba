# ruff: noqa: PLR0917 - kernels take their arrays one by one
"""Compiled loops, point by point: derivatives of the amplitudes r and t. No checks.

Slower than `slopes` (complex numbers one at a time) and wider: r and t, by thickness or by index,
with the slopes of r by the admittances on both sides.

With v_j = [B_j, C_j] the field on the outer face of layer j and w_j = [eta_in, 1] M_1 ... M_j, the
denominator D = eta_in B_0 + C_0 is w_j v_j for every j, so

    d ln t/dx = -(w_{j-1} dM_j/dx v_j) / (w_{j-1} M_j v_j),

in which every scale cancels. For r the row is [C, -B], see `kernel`. By index, with
y = kappa^2 = N^2 - q^2 and K = k0 d, the matrix is made of three functions without singularity,

    cos delta,  sin delta / kappa,  kappa sin delta,

whose derivatives by N = N/kappa d/d kappa are written out in `matrix_by_index`; for small delta
(delta cos delta - sin delta) / kappa^3 is taken from its series.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from coatings.optics.cache import compiled
from coatings.optics.elementary import one_less_power, sine_cosine
from coatings.optics.kernel import (
    LARGE,
    NM,
    ONE,
    P2,
    P4,
    PLANE,
    ROW,
    SHRINK,
    TM,
    TWO,
    TWO_PI,
    ZERO,
    Floats,
    Index,
    U,
    Whole,
    fill_films,
    fill_row,
)

Complexes = NDArray[np.complex128]
SERIES = tuple((-1) ** k * 2 * k / math.factorial(2 * k + 1) for k in range(1, 10))[::-1]


@compiled()
def pair(w: Floats, at: Index) -> complex:
    """The complex number whose parts lie one plane apart."""
    return complex(w[at], w[at + PLANE])


@compiled()
def vertical(w: Floats, at: Index) -> complex:
    """kz [1/nm] of a row at one point."""
    return complex(TWO_PI * w[at], 0.5 * w[at + PLANE])


@compiled()
def span(z: complex) -> float:
    """A size of z without a root."""
    return abs(z.real) + abs(z.imag)


@compiled()
def turn(w: Floats, at: Index, d: float) -> tuple[complex, complex, float]:
    """cos and sin of delta, exp(-Im delta) left out, and exp(-2 Im delta)."""
    s, c = sine_cosine(float(w[at] * d))
    gone = one_less_power(float(w[at + PLANE] * d))
    h = 0.5 * gone
    g = 1.0 - h
    return complex(g * c, -h * s), complex(g * s, h * c), 1.0 - gone


@compiled()
def lag(cos: complex, sin: complex, delta: complex, kappa: complex, length: float) -> complex:
    """(delta cos delta - sin delta) / kappa^3 with exp(-Im delta) left out; length is k0 d."""
    if delta.real**2 + delta.imag**2 > 0.25:
        return (delta * cos - sin) / kappa**3
    z = delta * delta
    total = 0.0 * z
    for a in SERIES:
        total = total * z + a
    return length**3 * math.exp(-delta.imag) * total


@compiled()
def matrix_by_index(
    cos: complex, sin: complex, kappa: complex, index: complex, length: float, tm: bool
) -> tuple[complex, complex, complex]:
    """d/dN of the elements 11 (= 22), 12 and 21 of a layer's matrix at fixed q."""
    delta = length * kappa
    by_kappa = index / kappa
    inverse = index * lag(cos, sin, delta, kappa, length)  # d/dN of sin delta / kappa
    product = by_kappa * (sin + delta * cos)  # d/dN of kappa sin delta
    diagonal = -sin * length * by_kappa
    if not tm:
        return diagonal, -1j * inverse, -1j * product
    square = index * index
    upper = product / square - 2.0 * sin * kappa / (square * index)
    lower = square * inverse + 2.0 * index * sin / kappa
    return diagonal, -1j * upper, -1j * lower


@compiled()
def inward(
    w: Floats,
    d: Floats,
    film: Whole,
    eta_out: complex,
    b: Complexes,
    c: Complexes,
    cos: Complexes,
    sin: Complexes,
    left: Floats,
    norm: Floats,
) -> None:
    """Fields on every interface, and cos, sin, e and the squared scale of every layer."""
    b[d.size], c[d.size] = 1.0, eta_out
    for layer in range(d.size - 1, -1, -1):
        at = ROW * U(film[layer])
        cos[layer], sin[layer], left[layer] = turn(w, at, d[layer])
        eta, inverse = pair(w, at + P2), pair(w, at + P4)
        x, y = b[layer + 1], c[layer + 1]
        nb = cos[layer] * x - 1j * sin[layer] * inverse * y
        nc = cos[layer] * y - 1j * sin[layer] * eta * x
        scale = SHRINK if span(nb) + span(nc) > LARGE else 1.0
        b[layer], c[layer], norm[layer] = scale * nb, scale * nc, scale * scale


@compiled()
def outward(
    w: Floats,
    d: Floats,
    film: Whole,
    index: Complexes,
    k0: float,
    tm: bool,
    eta_in: complex,
    by_index: bool,
    b: Complexes,
    c: Complexes,
    cos: Complexes,
    sin: Complexes,
    left: Floats,
    norm: Floats,
    dr: Complexes,
    dt: Complexes,
    p: Index,
) -> complex:
    """Fill dr/dx and d ln t/dx of every layer of one point; returns dr/d eta_out."""
    start = 2.0 * eta_in / (eta_in * b[0] + c[0]) ** 2
    w1, w2 = eta_in, 1.0 + 0.0j
    for layer in range(d.size):
        m = U(film[layer])
        at = ROW * m
        eta, inverse, kz = pair(w, at + P2), pair(w, at + P4), vertical(w, at)
        co, si = cos[layer], sin[layer]
        x, y = b[layer + 1], c[layer + 1]
        up, down = -1j * si * inverse, -1j * si * eta
        v1, v2 = w1 * co + w2 * down, w1 * up + w2 * co
        start *= norm[layer]
        if by_index:
            d11, d12, d21 = matrix_by_index(co, si, kz / k0, index[m], k0 * d[layer], tm)
            x1, x2 = d11 * x + d12 * y, d21 * x + d11 * y
            u1, u2 = co * x + up * y, down * x + co * y
            dr[layer, p] = start * (u2 * x1 - u1 * x2)
            dt[layer, p] = -(w1 * x1 + w2 * x2) / (v1 * x + v2 * y)
            start *= left[layer]
        else:
            start *= left[layer]
            dr[layer, p] = -1j * kz * start * (inverse * y * y - eta * x * x)
            dt[layer, p] = 1j * kz * (v1 * inverse * y + v2 * eta * x) / (v1 * x + v2 * y)
        scale = SHRINK if span(v1) + span(v2) > LARGE else 1.0
        w1, w2 = scale * v1, scale * v2
    return complex(-start * b[d.size])


@compiled()
def differentiate(
    thickness: Floats,
    film: Whole,
    around: Floats,
    points: Floats,
    film_shift: Floats,
    incident_shift: Floats,
    dr: Complexes,
    dt: Complexes,
    edge: Complexes,
    by_index: bool,
) -> None:
    """dr/dx and d ln t/dx, x the thickness [nm] or the index of each layer.

    First arguments as for `kernel.respond`; dr, dt (S, L, P); edge (S, 2, P): dr by the incident
    and by the outside admittance.
    """
    layers, rows, columns = thickness.shape[1], U(around.shape[0]) - TWO, U(points.shape[1])
    incident, outside = ROW * rows, ROW * (rows + ONE)
    w = np.zeros(ROW * (rows + TWO))
    lossy = np.empty(rows)
    index = np.empty(rows, np.complex128)
    b, c = np.empty(layers + 1, np.complex128), np.empty(layers + 1, np.complex128)
    cos, sin = np.empty(layers, np.complex128), np.empty(layers, np.complex128)
    left, norm = np.empty(layers), np.empty(layers)
    for p in range(columns):
        fill_row(w, outside, around[rows + ONE], 0.0, 0.0, points, p, ONE, 1.0)
        eta_out = pair(w, outside + P2)
        tm = points.shape[0] > 1 and points[TM, p] > 0.5
        for s in range(U(thickness.shape[0])):
            if s == ZERO or film_shift.size > 0:
                fill_films(w, lossy, around, film_shift, s, points, p, ONE)
                for m in range(rows):
                    index[m] = complex(around[m, TWO * p], around[m, TWO * p + ONE])
                    if film_shift.size > 0:
                        index[m] += complex(film_shift[s, TWO * m], film_shift[s, TWO * m + ONE])
            by = incident_shift[s] if incident_shift.size > 0 else 0.0
            fill_row(w, incident, around[rows], by, 0.0, points, p, ONE, 1.0)
            eta_in = pair(w, incident + P2)
            kinds = film[s if film.shape[0] > 1 else ZERO]
            d = thickness[s]
            inward(w, d, kinds, eta_out, b, c, cos, sin, left, norm)
            edge[s, 1, p] = outward(
                w,
                d,
                kinds,
                index,
                TWO_PI / points[NM, p],
                tm,
                eta_in,
                by_index,
                b,
                c,
                cos,
                sin,
                left,
                norm,
                dr[s],
                dt[s],
                p,
            )
            edge[s, 0, p] = 2.0 * b[0] * c[0] / (eta_in * b[0] + c[0]) ** 2
