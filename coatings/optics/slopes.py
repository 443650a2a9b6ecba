# ruff: noqa: PLR0917 - kernels take their arrays one by one
"""Compiled loops: exact slopes of R with every thickness, in vectors. No checks.

See `kernel` for the method and the layout.
"""

from __future__ import annotations

import numpy as np

from coatings.optics.cache import compiled
from coatings.optics.kernel import (
    EVERY,
    ONE,
    P2,
    P3,
    P4,
    P5,
    PAD,
    PLANE,
    ROW,
    STATE,
    TWO,
    TWO_PI,
    ZERO,
    Flags,
    Floats,
    Index,
    U,
    Whole,
    fill_films,
    fill_row,
    reflect,
    sweep,
    total,
)


@compiled()
def start_slope(w: Floats, incident: Index, out: Index, alpha: Index, n: Index) -> None:
    """Planes Re, Im of alpha = -4 i conj(r) eta_in / D^2: dR/dd = Re(alpha [...])."""
    for i in range(n):
        er, ei = w[incident + P2 + i], w[incident + P3 + i]
        gr, gi = w[out + i], w[out + PLANE + i]
        rr, ri = w[out + P2 + i], -w[out + P3 + i]
        hr, hi = gr * gr - gi * gi, 2.0 * gr * gi
        ur, ui = er * hr - ei * hi, er * hi + ei * hr
        w[alpha + i] = 4.0 * (ur * ri + ui * rr)
        w[alpha + PLANE + i] = -4.0 * (ur * rr - ui * ri)


@compiled()
def scale_slope(w: Floats, alpha: Index, factor: Index, n: Index) -> None:
    """Multiply alpha by a real plane."""
    for i in range(n):
        w[alpha + i] *= w[factor + i]
        w[alpha + PLANE + i] *= w[factor + i]


@compiled()
def fade_slope(w: Floats, alpha: Index, gone: Index, n: Index) -> None:
    """Multiply alpha by 1 - ``gone``."""
    for i in range(n):
        w[alpha + i] *= 1.0 - w[gone + i]
        w[alpha + PLANE + i] *= 1.0 - w[gone + i]


@compiled()
def slope_clear(w: Floats, at: Index, row: Index, alpha: Index, out: Index, n: Index) -> None:
    """dR/dd of a layer with real kappa and eta, from the state on its outer face."""
    for i in range(n):
        kz = TWO_PI * w[row + i]
        ky, ke = kz * w[row + P4 + i], kz * w[row + P2 + i]
        br, bi = w[at + i], w[at + PLANE + i]
        cr, ci = w[at + P2 + i], w[at + P3 + i]
        re = ky * (cr * cr - ci * ci) - ke * (br * br - bi * bi)
        im = 2.0 * (ky * cr * ci - ke * br * bi)
        w[out + i] = w[alpha + i] * re - w[alpha + PLANE + i] * im


@compiled()
def slope_lossy(w: Floats, at: Index, row: Index, alpha: Index, out: Index, n: Index) -> None:
    """dR/dd of any layer, from the state on its outer face."""
    for i in range(n):
        kr, ki = TWO_PI * w[row + i], 0.5 * w[row + PLANE + i]
        er, ei = w[row + P2 + i], w[row + P3 + i]
        yr, yi = w[row + P4 + i], w[row + P5 + i]
        kyr, kyi = kr * yr - ki * yi, kr * yi + ki * yr
        ker, kei = kr * er - ki * ei, kr * ei + ki * er
        br, bi = w[at + i], w[at + PLANE + i]
        cr, ci = w[at + P2 + i], w[at + P3 + i]
        b2r, b2i = br * br - bi * bi, 2.0 * br * bi
        c2r, c2i = cr * cr - ci * ci, 2.0 * cr * ci
        re = (kyr * c2r - kyi * c2i) - (ker * b2r - kei * b2i)
        im = (kyr * c2i + kyi * c2r) - (ker * b2i + kei * b2r)
        w[out + i] = w[alpha + i] * re - w[alpha + PLANE + i] * im


@compiled()
def weigh(w: Floats, alpha: Index, weight: Floats, p0: Index, n: Index) -> None:
    """Multiply alpha by the weights of one stack."""
    for i in range(n):
        w[alpha + i] *= weight[p0 + i]
        w[alpha + PLANE + i] *= weight[p0 + i]


@compiled()
def emit_slopes(
    w: Floats,
    film: Whole,
    lossy: Floats,
    shrunk: Flags,
    state: Index,
    gone: Index,
    norm: Index,
    alpha: Index,
    slope: Index,
    weighted: Floats,
    each: Floats,
    p0: Index,
    n: Index,
    full: Index,
) -> None:
    """Walk outward through a block of a stack; add to ``weighted`` (L), fill ``each`` (L, P)."""
    layers = U(film.size)
    for layer in range(layers):
        count = layers - layer
        if count % EVERY == ZERO and shrunk[count // EVERY]:
            scale_slope(w, alpha, norm + PLANE * (count // EVERY), full)
        at = state + STATE * (layer + ONE)
        row = ROW * U(film[layer])
        if lossy[film[layer]] > 0.0:
            fade_slope(w, alpha, gone + PLANE * layer, full)
            slope_lossy(w, at, row, alpha, slope, full)
        else:
            slope_clear(w, at, row, alpha, slope, full)
        if weighted.size > 0:
            weighted[layer] += total(w, slope, n)
        if each.size > 0:
            each[layer, p0 : p0 + n] = w[slope : slope + n]


@compiled()
def climb(
    thickness: Floats,
    film: Whole,
    around: Floats,
    points: Floats,
    film_shift: Floats,
    incident_shift: Floats,
    weight: Floats,
    big_r: Floats,
    weighted: Floats,
    each: Floats,
) -> None:
    """R and its slopes: sum over p of weight dR/dd (S, L), or dR/dd of every point (S, L, P).

    First arguments as for `kernel.respond`. weight (S, P) or (S, 0) for ones; ``weighted`` comes
    zeroed; of weighted (S, L) and each (S, L, P) one may have no elements: it is not wanted.
    """
    stacks, rows, columns = U(thickness.shape[0]), U(around.shape[0]) - TWO, U(points.shape[1])
    layers = U(thickness.shape[1])
    events = layers // EVERY + ONE
    incident, outside = ROW * rows, ROW * (rows + ONE)
    loss = ROW * (rows + TWO)
    slope, out = loss + PLANE, loss + P2
    alpha = out + STATE
    gone = alpha + P2
    norm = gone + PLANE * layers
    state = norm + PLANE * events
    w = np.zeros(state + STATE * (layers + ONE))
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
                w, thickness[s], kinds, lossy, shrunk, outside, state, gone, norm, loss, True, full
            )
            reflect(w, at, incident, out, full)
            for i in range(n):
                big_r[s, p0 + i] = w[out + P2 + i] ** 2 + w[out + P3 + i] ** 2
            start_slope(w, incident, out, alpha, full)
            if weight.size > 0:
                weigh(w, alpha, weight[s], p0, n)
            emit_slopes(
                w,
                kinds,
                lossy,
                shrunk,
                state,
                gone,
                norm,
                alpha,
                slope,
                weighted[s],
                each[s],
                p0,
                n,
                full,
            )
