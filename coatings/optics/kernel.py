# ruff: noqa: PLR0917 - kernels take their arrays one by one
"""Compiled loops: light through layers. Arrays in, arrays out, no checks.

Method. A layer of complex index N and thickness d, at the transverse wave number q (in units of
k0 = 2 pi / wavelength), has kz = k0 kappa, kappa = sqrt(N^2 - q^2), delta = kz d and the
admittance eta = kappa (TE) or N^2 / kappa (TM). Tangential fields (B, C) on its chip side follow
from those on its outer side by

    [B, C]' = [[cos delta, -i sin delta / eta], [-i eta sin delta, cos delta]] [B, C]

started outside with [1, eta_out]; r = (eta_in B - C) / (eta_in B + C).

Nothing overflows. The matrix is even in kappa, so inside a film the root with Im kappa >= 0 is
taken even under gain, and exp(-Im delta) is left out of cos and sin: with e = exp(-2 Im delta)

    exp(-Im delta) cos delta = (1 + e)/2 cos Re delta - i (1 - e)/2 sin Re delta
    exp(-Im delta) sin delta = (1 + e)/2 sin Re delta + i (1 - e)/2 cos Re delta

whose parts are never larger than one. 1 - e keeps its relative accuracy, and so sin delta / eta
does when kappa -> 0: an exact zero is replaced by 1e-30, which is d sinc(delta) to the last bit.
What was left out matters for t and for derivatives only and is kept as a logarithm or a factor.
Long mirrors make (B, C) grow; every 16 layers it is scaled down where it passed 1e100.

Derivatives. With M of determinant one, the row [C, -B] is carried outward by the same
matrices that carried [B, C] inward. So dr/dd of every layer follows from the fields that the
forward pass met on its outer face,

    dr/dd_j = -2 i eta_in / D^2 [ (kz/eta) C_j^2 - kz eta B_j^2 ],   D = eta_in B_0 + C_0

and no second recurrence is needed.

Layout. Work goes through the points in blocks of 64, in one flat scratch array that stays in the
fastest cache. A plane is 64 numbers, one a point. A state is four planes: Re B, Im B, Re C, Im C.
A row (one film material) is six: Re kappa / wavelength [turns/nm], 2 Im kz [1/nm],
Re eta, Im eta, Re 1/eta, Im 1/eta. Unsigned indices spare the compiler a test for negative ones;
a loop never writes the state it reads, or the compiler would not dare to work in vectors.
Complex arrays come as float64 with real and imaginary parts side by side.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np
from numpy.typing import NDArray

from coatings.optics.cache import PEAKS, SUMS, compiled
from coatings.optics.elementary import (
    LITTLE,
    one_less_little_power,
    one_less_power,
    power_of_e,
    sine_cosine,
    square_root,
)

U = np.uint64
Floats = NDArray[np.float64]
Whole = NDArray[np.int64]
Flags = NDArray[np.bool_]
Index = Any  # an unsigned 64-bit number inside compiled code

ZERO, ONE, TWO = U(0), U(1), U(2)
PLANE, P2, P3, P4, P5 = U(64), U(128), U(192), U(256), U(320)
STATE, ROW = U(256), U(384)
NM, Q_RE, Q_IM, TM = U(0), U(1), U(2), U(3)
EVERY = U(16)
PAD = U(7)
LARGE = 1e100
SHRINK, SHRINK_SQUARED, SHRINK_LOSS = 2.0**-300, 2.0**-600, 600.0 * math.log(2.0)
TWO_PI, FOUR_PI = 2.0 * math.pi, 4.0 * math.pi
SMALLEST, SMALLEST_SQUARED = 1e-30, 1e-60


@compiled()
def fill_row(
    w: Floats,
    row: Index,
    index: Floats,
    shift_re: float,
    shift_im: float,
    points: Floats,
    p0: Index,
    n: Index,
    forward: float,
) -> None:
    """Fill a row for points p0 ... p0+n-1 of one medium; ``forward`` 1 takes the outgoing root."""
    oblique = points.shape[0] > 1
    for i in range(n):
        p = p0 + i
        nr = index[TWO * p] + shift_re
        ni = index[TWO * p + ONE] + shift_im
        if oblique:
            qr, qi = points[Q_RE, p], points[Q_IM, p]
            zr = (nr - qr) * (nr + qr) - (ni - qi) * (ni + qi)
            zi = (nr - qr) * (ni + qi) + (ni - qi) * (nr + qr)
            kr, ki = square_root(zr, zi)
        else:
            kr, ki = nr, ni
        sign = -1.0 if ki + forward * kr < 0.0 else 1.0
        size = kr * kr + ki * ki
        tiny = size < SMALLEST_SQUARED
        kr = SMALLEST if tiny else sign * kr
        ki = 0.0 if tiny else sign * ki
        size = SMALLEST_SQUARED if tiny else size
        er, ei = kr, ki
        if oblique:
            mr = nr * nr - ni * ni
            mi = 2.0 * nr * ni
            hr = (mr * kr + mi * ki) / size
            hi = (mi * kr - mr * ki) / size
            er = hr if points[TM, p] > 0.5 else kr
            ei = hi if points[TM, p] > 0.5 else ki
        at = row + i
        w[at] = kr / points[NM, p]
        w[at + PLANE] = FOUR_PI * ki / points[NM, p]
        w[at + P2] = er
        w[at + P3] = ei
        size = er * er + ei * ei
        w[at + P4] = er / size
        w[at + P5] = -ei / size


@compiled(SUMS)
def total(w: Floats, at: Index, n: Index) -> float:
    """Sum of a plane."""
    result = 0.0
    for i in range(n):
        result += w[at + i]
    return result


@compiled(PEAKS)
def largest(w: Floats, at: Index, n: Index) -> float:
    """Largest number of a plane that holds none below zero."""
    result = 0.0
    for i in range(n):
        result = max(result, w[at + i])
    return result


@compiled(SUMS)
def largest_sum(w: Floats, at: Index, n: Index) -> float:
    """Sum of the magnitudes in a state: an upper bound of the largest."""
    result = 0.0
    for i in range(n):
        result += abs(w[at + i]) + abs(w[at + PLANE + i])
        result += abs(w[at + P2 + i]) + abs(w[at + P3 + i])
    return result


@compiled()
def cross_clear(w: Floats, src: Index, dst: Index, row: Index, d: float, n: Index) -> None:
    """Carry a state through a layer whose kappa and eta are real at every point of the block."""
    for i in range(n):
        s, c = sine_cosine(w[row + i] * d)
        se = s * w[row + P2 + i]
        sy = s * w[row + P4 + i]
        br, bi = w[src + i], w[src + PLANE + i]
        cr, ci = w[src + P2 + i], w[src + P3 + i]
        w[dst + i] = c * br + sy * ci
        w[dst + PLANE + i] = c * bi - sy * cr
        w[dst + P2 + i] = c * cr + se * bi
        w[dst + P3 + i] = c * ci - se * br


@compiled()
def fade(w: Floats, row: Index, gone: Index, loss: Index, d: float, n: Index, little: bool) -> None:
    """1 - exp(-2 Im delta) of a layer to plane ``gone``; 2 Im delta is added to ``loss``."""
    for i in range(n):
        u = w[row + PLANE + i] * d
        w[loss + i] += u
        w[gone + i] = one_less_little_power(u) if little else one_less_power(u)


@compiled()
def cross_lossy(
    w: Floats, src: Index, dst: Index, row: Index, gone: Index, d: float, n: Index
) -> None:
    """Carry a state through any layer whose plane ``gone`` `fade` has filled."""
    for i in range(n):
        s, c = sine_cosine(w[row + i] * d)
        h = 0.5 * w[gone + i]
        g = 1.0 - h
        cos_r, cos_i = g * c, -h * s
        sin_r, sin_i = g * s, h * c
        er, ei = w[row + P2 + i], w[row + P3 + i]
        yr, yi = w[row + P4 + i], w[row + P5 + i]
        ar, ai = sin_r * ei + sin_i * er, sin_i * ei - sin_r * er
        zr, zi = sin_r * yi + sin_i * yr, sin_i * yi - sin_r * yr
        br, bi = w[src + i], w[src + PLANE + i]
        cr, ci = w[src + P2 + i], w[src + P3 + i]
        w[dst + i] = cos_r * br - cos_i * bi + zr * cr - zi * ci
        w[dst + PLANE + i] = cos_r * bi + cos_i * br + zr * ci + zi * cr
        w[dst + P2 + i] = cos_r * cr - cos_i * ci + ar * br - ai * bi
        w[dst + P3 + i] = cos_r * ci + cos_i * cr + ar * bi + ai * br


@compiled()
def shrink(w: Floats, at: Index, norm: Index, loss: Index, n: Index) -> None:
    """Scale a state down where it is large; note the square of the factor and its logarithm."""
    for i in range(n):
        size = abs(w[at + i]) + abs(w[at + PLANE + i]) + abs(w[at + P2 + i]) + abs(w[at + P3 + i])
        large = size > LARGE
        factor = SHRINK if large else 1.0
        w[norm + i] = SHRINK_SQUARED if large else 1.0
        w[loss + i] += SHRINK_LOSS if large else 0.0
        w[at + i] *= factor
        w[at + PLANE + i] *= factor
        w[at + P2 + i] *= factor
        w[at + P3 + i] *= factor


@compiled()
def sweep(
    w: Floats,
    thickness: Floats,
    film: Whole,
    lossy: Floats,
    shrunk: Flags,
    outside: Index,
    state: Index,
    gone: Index,
    norm: Index,
    loss: Index,
    keep: bool,
    n: Index,
) -> Index:
    """Carry the fields from outside to the chip; returns where the state at the chip lies.

    ``keep`` stores the state at every interface (slot j: outer face of layer j-1) and 1 - e of
    every lossy layer; else two slots serve in turn.
    """
    layers = U(thickness.size)
    dst = state + STATE * (layers if keep else layers & ONE)
    for i in range(n):
        w[dst + i] = 1.0
        w[dst + PLANE + i] = 0.0
        w[dst + P2 + i] = w[outside + P2 + i]
        w[dst + P3 + i] = w[outside + P3 + i]
        w[loss + i] = 0.0
    for step in range(layers):
        layer = layers - ONE - step
        src = dst
        dst = state + STATE * (layer if keep else layer & ONE)
        row = ROW * U(film[layer])
        d, steepest = thickness[layer], lossy[film[layer]]
        if steepest > 0.0:
            at = gone + PLANE * layer if keep else gone
            fade(w, row, at, loss, d, n, steepest * d < LITTLE)
            cross_lossy(w, src, dst, row, at, d, n)
        else:
            cross_clear(w, src, dst, row, d, n)
        count = step + ONE
        if count % EVERY == ZERO:
            event = count // EVERY
            shrunk[event] = not largest_sum(w, dst, n) < LARGE
            if shrunk[event]:
                shrink(w, dst, norm + (PLANE * event if keep else ZERO), loss, n)
    return dst


@compiled()
def reflect(w: Floats, at: Index, incident: Index, out: Index, n: Index) -> None:
    """From the state at the chip: planes Re 1/D, Im 1/D, Re r, Im r at ``out``."""
    for i in range(n):
        er, ei = w[incident + P2 + i], w[incident + P3 + i]
        br, bi = w[at + i], w[at + PLANE + i]
        cr, ci = w[at + P2 + i], w[at + P3 + i]
        fr, fi = er * br - ei * bi, er * bi + ei * br
        dr, di = fr + cr, fi + ci
        size = dr * dr + di * di
        gr, gi = dr / size, -di / size
        ur, ui = fr - cr, fi - ci
        w[out + i] = gr
        w[out + PLANE + i] = gi
        w[out + P2 + i] = ur * gr - ui * gi
        w[out + P3 + i] = ur * gi + ui * gr


@compiled()
def fill_films(
    w: Floats,
    lossy: Floats,
    around: Floats,
    shifts: Floats,
    stack: Index,
    points: Floats,
    p0: Index,
    n: Index,
) -> None:
    """Fill the rows of all films; note the largest 2 Im kz of each, zero for real arithmetic."""
    for m in range(U(lossy.size)):
        by_re = shifts[stack, TWO * m] if shifts.size > 0 else 0.0
        by_im = shifts[stack, TWO * m + ONE] if shifts.size > 0 else 0.0
        fill_row(w, ROW * m, around[m], by_re, by_im, points, p0, n, 0.0)
        lossy[m] = largest(w, ROW * m + PLANE, n)


@compiled()
def emit(
    w: Floats,
    incident: Index,
    outside: Index,
    out: Index,
    loss: Index,
    r: Floats,
    t: Floats,
    big_t: Floats,
    big_r: Floats,
    p0: Index,
    n: Index,
) -> None:
    """Write one block of one stack; an empty output is not wanted."""
    for i in range(n if r.size > 0 else ZERO):
        r[TWO * (p0 + i)] = w[out + P2 + i]
        r[TWO * (p0 + i) + ONE] = w[out + P3 + i]
    for i in range(n if big_r.size > 0 else ZERO):
        big_r[p0 + i] = w[out + P2 + i] ** 2 + w[out + P3 + i] ** 2
    for i in range(n if t.size > 0 else ZERO):
        two, p = power_of_e(0.5 * w[loss + i])
        faded = 2.0 * two * (1.0 + p)
        er, ei = w[incident + P2 + i], w[incident + P3 + i]
        gr, gi = w[out + i], w[out + PLANE + i]
        tr, ti = faded * (er * gr - ei * gi), faded * (er * gi + ei * gr)
        t[TWO * (p0 + i)] = tr
        t[TWO * (p0 + i) + ONE] = ti
        ratio = w[outside + P2 + i] / er if er != 0.0 else math.nan
        big_t[p0 + i] = ratio * (tr * tr + ti * ti)


@compiled()
def respond(
    thickness: Floats,
    film: Whole,
    around: Floats,
    points: Floats,
    film_shift: Floats,
    incident_shift: Floats,
    r: Floats,
    t: Floats,
    big_t: Floats,
    big_r: Floats,
) -> None:
    """r, t with T, and R of S stacks at P points; an output without columns is not wanted.

    thickness (S, L) [nm]; film (1 or S, L); around (M + 2, 2P): index of the films, of the
    incident side, of the outside; points (1 or 4, P): wavelength [nm] and, if not all is at normal
    incidence, Re q, Im q, 1 for TM; film_shift (0 or S, 2M); incident_shift (0 or S);
    r, t (S, 2P); big_t, big_r (S, P).
    """
    stacks, rows, columns = U(thickness.shape[0]), U(around.shape[0]) - TWO, U(points.shape[1])
    events = U(thickness.shape[1]) // EVERY + ONE
    incident, outside = ROW * rows, ROW * (rows + ONE)
    loss = ROW * (rows + TWO)
    gone, norm, out, state = loss + PLANE, loss + P2, loss + P3, loss + P3 + STATE
    w = np.zeros(state + TWO * STATE)
    lossy = np.empty(rows)
    shrunk = np.empty(events, np.bool_)
    for p0 in range(ZERO, columns, PLANE):
        n = min(PLANE, columns - p0)
        full = (n + PAD) & ~PAD
        fill_row(w, outside, around[rows + ONE], 0.0, 0.0, points, p0, n, 1.0)
        for s in range(stacks):
            if s == ZERO or film_shift.size > 0:
                fill_films(w, lossy, around, film_shift, s, points, p0, n)
            if s == ZERO or incident_shift.size > 0:
                by = incident_shift[s] if incident_shift.size > 0 else 0.0
                fill_row(w, incident, around[rows], by, 0.0, points, p0, n, 1.0)
            kinds = film[s if film.shape[0] > 1 else ZERO]
            at = sweep(
                w, thickness[s], kinds, lossy, shrunk, outside, state, gone, norm, loss, False, full
            )
            reflect(w, at, incident, out, full)
            emit(w, incident, outside, out, loss, r[s], t[s], big_t[s], big_r[s], p0, n)


@compiled()
def first_bad(thickness: Floats, film: Whole, rows: int) -> tuple[int, int]:
    """Flat place of the first thickness that is no finite number >= 0, of the first film unknown.

    -1 stands for none. (The gate's check of what the other kernels trust.)
    """
    bad_thickness, bad_film = -1, -1
    flat = thickness.ravel()
    for i in range(flat.size):
        if not 0.0 <= flat[i] < math.inf:
            bad_thickness = i
            break
    kinds = film.ravel()
    for i in range(kinds.size):
        if not 0 <= kinds[i] < rows:
            bad_film = i
            break
    return bad_thickness, bad_film
