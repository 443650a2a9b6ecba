# ruff: noqa: PLR0915, PLR0917 - a kernel takes its arrays one by one, and unpacks them
"""Compiled loops: reflectivity of a guided mode and its exact derivatives. No checks.

`facet` derives the formulas. At each of the K nodes of a wavelength's contour `kernel` gives the
plane wave's r from a medium of the mode's index; rho = r (TE) or -r (TM), and with the admittance
Y0 = eta (TE) or 1/eta (TM) of that medium

    e = sum P_ff Y0 (1 - rho),    c = sum P_fg (1 - rho),    d = sum P_gg (1 + rho)/Y0,

P the products of transforms with quadrature weight and 1/(2 pi) in them. Y = e + c^2/d and the mode
has (N - Y)/(N + Y), of E_y (TE) or H_y (TM). Its derivative,

    dr = 2 N/(N + Y)^2 sum G dr_plane,    G = P_ff Y0 + 2 (c/d) P_fg + (c/d)^2 P_gg/Y0,

is a weighted sum of those of the plane waves: one backward pass of `slopes` a node.

Nodes go in blocks of 64 with a scratch array each, laid out as in `slopes`; six planes at the end
hold P. TE has f = g, and one P; TM three.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from coatings.optics.cache import SUMS, compiled
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
    ZERO,
    Floats,
    Index,
    U,
    Whole,
    fill_films,
    fill_row,
    reflect,
    sweep,
)
from coatings.optics.slopes import emit_slopes

Complexes = NDArray[np.complex128]


@compiled()
def mix_products(w: Floats, at: Index, products: Floats, mix: Floats, p0: Index, n: Index) -> None:
    """Sum over shifts of mix times products, (V, 1 or 3, 2K), to planes at ``at``."""
    for m in range(U(products.shape[1])):
        for part in range(TWO):
            plane = at + PLANE * (TWO * m + part)
            for i in range(n):
                w[plane + i] = mix[0] * products[0, m, TWO * (p0 + i) + part]
            for v in range(ONE, U(mix.size)):
                for i in range(n):
                    w[plane + i] += mix[v] * products[v, m, TWO * (p0 + i) + part]


@compiled(SUMS)
def add_moments(
    w: Floats, out: Index, admittance: Index, at: Index, tm: bool, n: Index
) -> tuple[complex, complex, complex]:
    """This block's part of e, c and d; ``admittance``: planes Re Y0, Im Y0, Re 1/Y0, Im 1/Y0."""
    sign = -1.0 if tm else 1.0
    fg, gg = (at + P2, at + P4) if tm else (at, at)
    inverse = admittance - P2 if tm else admittance + P2
    er, ei, cr, ci, dr, di = 0.0, 0.0, 0.0, 0.0, 0.0, 0.0
    for i in range(n):
        rr, ri = sign * w[out + P2 + i], sign * w[out + P3 + i]
        yr, yi = w[admittance + i], w[admittance + PLANE + i]
        ar, ai = yr * (1.0 - rr) + yi * ri, yi * (1.0 - rr) - yr * ri
        pr, pi = w[at + i], w[at + PLANE + i]
        er += pr * ar - pi * ai
        ei += pr * ai + pi * ar
        pr, pi = w[fg + i], w[fg + PLANE + i]
        cr += pr * (1.0 - rr) + pi * ri
        ci += pi * (1.0 - rr) - pr * ri
        yr, yi = w[inverse + i], w[inverse + PLANE + i]
        ar, ai = yr * (1.0 + rr) - yi * ri, yi * (1.0 + rr) + yr * ri
        pr, pi = w[gg + i], w[gg + PLANE + i]
        dr += pr * ar - pi * ai
        di += pr * ai + pi * ar
    return complex(er, ei), complex(cr, ci), complex(dr, di)


@compiled()
def start_modal_slope(
    w: Floats,
    incident: Index,
    out: Index,
    admittance: Index,
    at: Index,
    tm: bool,
    alpha: Index,
    share: tuple[complex, complex, complex],
    n: Index,
) -> None:
    """Planes Re, Im of alpha = G (-2 i eta_in / D^2).

    G = P_ff Y0, P_fg and P_gg/Y0 times the three shares.
    """
    fg, gg = (at + P2, at + P4) if tm else (at, at)
    inverse = admittance - P2 if tm else admittance + P2
    e, c, d = -2j * share[0], -2j * share[1], -2j * share[2]
    for i in range(n):
        yr, yi = w[admittance + i], w[admittance + PLANE + i]
        pr, pi = w[at + i], w[at + PLANE + i]
        br, bi = pr * yr - pi * yi, pr * yi + pi * yr
        ar, ai = e.real * br - e.imag * bi, e.real * bi + e.imag * br
        pr, pi = w[fg + i], w[fg + PLANE + i]
        ar += c.real * pr - c.imag * pi
        ai += c.real * pi + c.imag * pr
        yr, yi = w[inverse + i], w[inverse + PLANE + i]
        pr, pi = w[gg + i], w[gg + PLANE + i]
        br, bi = pr * yr - pi * yi, pr * yi + pi * yr
        ar += d.real * br - d.imag * bi
        ai += d.real * bi + d.imag * br
        er, ei = w[incident + P2 + i], w[incident + P3 + i]
        gr, gi = w[out + i], w[out + PLANE + i]
        xr, xi = gr * gr - gi * gi, 2.0 * gr * gi
        ur, ui = er * xr - ei * xi, er * xi + ei * xr
        w[alpha + i] = ar * ur - ai * ui
        w[alpha + PLANE + i] = ar * ui + ai * ur


@compiled()
def shares(
    part: int, parts: int, index: complex, r: complex, total: complex, d: complex, tilt: complex
) -> tuple[complex, complex, complex]:
    """Shares of G for dR (one part), or for Re and Im of dr, then Re and Im of d(c/d)."""
    turn = -1j if part % 2 == 1 else 1.0 + 0.0j
    if part > 1:
        return 0.0j, -turn / d, -turn * tilt / d
    factor = turn * 2.0 * index / (index + total) ** 2
    if parts == 1:
        factor *= 2.0 * r.conjugate()
    return factor, 2.0 * tilt * factor, tilt * tilt * factor


@compiled()
def modal(
    thickness: Floats,
    film: Whole,
    around: Floats,
    points: Floats,
    film_shift: Floats,
    mix: Floats,
    n_eff: Complexes,
    products: Floats,
    r: Complexes,
    tilt: Complexes,
    slopes: Floats,
) -> None:
    """The mode's r and c/d (S, W), and slopes with thickness (S, 0, 1 or 4, W, L).

    thickness (S, L), film (1 or S, L), film_shift (0 or S, 2M) as for `kernel.respond`; around
    (M + 2, 2 W K), its incident row unused, and points (4, W K), the nodes of one wavelength after
    those of another; mix (1 or S, V): how much of each of V shifts of the guide's index a stack
    takes; n_eff (V, W); products (W, V, 1 or 3, 2 K). slopes come zeroed: of R; or Re and Im of
    those of r, then of c/d with the sign of rho. r is that of the tangential E.
    """
    stacks, layers, rows = U(thickness.shape[0]), U(thickness.shape[1]), U(around.shape[0]) - TWO
    waves, nodes = U(n_eff.shape[1]), U(products.shape[3]) // TWO
    blocks = (nodes + PLANE - ONE) // PLANE
    events = layers // EVERY + ONE
    parts = slopes.shape[1]
    incident, outside = ROW * rows, ROW * (rows + ONE)
    loss = ROW * (rows + TWO)
    slope, out = loss + PLANE, loss + P2
    alpha = out + STATE
    gone = alpha + P2
    norm = gone + PLANE * layers
    state = norm + PLANE * events
    held = state + STATE * (layers + ONE)
    scratch = np.zeros((blocks, held + P5 + PLANE))
    lossy = np.empty((blocks, rows))
    shrunk = np.empty((blocks, events), np.bool_)
    unwanted = np.empty((0, 0))
    tm = points[3, 0] > 0.5
    sign = -1.0 if tm else 1.0
    admittance = incident + (P4 if tm else P2)
    for wave in range(waves):
        for b in range(blocks):
            p0 = wave * nodes + PLANE * b
            n = min(PLANE, nodes - PLANE * b)
            fill_row(scratch[b], outside, around[rows + ONE], 0.0, 0.0, points, p0, n, 1.0)
        for s in range(stacks):
            index = 0.0j
            weights = mix[s if mix.shape[0] > 1 else ZERO]
            for v in range(U(weights.size)):
                index += weights[v] * n_eff[v, wave]
            e, c, d = 0.0j, 0.0j, 0.0j
            kinds = film[s if film.shape[0] > 1 else ZERO]
            for b in range(blocks):
                w = scratch[b]
                p0 = wave * nodes + PLANE * b
                n = min(PLANE, nodes - PLANE * b)
                full = (n + PAD) & ~PAD
                if s == ZERO or film_shift.size > 0:
                    fill_films(w, lossy[b], around, film_shift, s, points, p0, n)
                if s == ZERO or mix.shape[0] > 1:
                    fill_row(w, incident, around[rows], index.real, index.imag, points, p0, n, 1.0)
                    mix_products(w, held, products[wave], weights, PLANE * b, n)
                at = sweep(
                    w,
                    thickness[s],
                    kinds,
                    lossy[b],
                    shrunk[b],
                    outside,
                    state,
                    gone,
                    norm,
                    loss,
                    parts > 0,
                    full,
                )
                reflect(w, at, incident, out, full)
                de, dc, dd = add_moments(w, out, admittance, held, tm, n)
                e, c, d = e + de, c + dc, d + dd
            ratio = c / d
            total = e + c * ratio
            r[s, wave] = sign * (index - total) / (index + total)
            tilt[s, wave] = ratio
            for part in range(parts):
                share = shares(part, parts, index, r[s, wave], total, d, ratio)
                for b in range(blocks):
                    w = scratch[b]
                    n = min(PLANE, nodes - PLANE * b)
                    full = (n + PAD) & ~PAD
                    start_modal_slope(w, incident, out, admittance, held, tm, alpha, share, full)
                    emit_slopes(
                        w,
                        kinds,
                        lossy[b],
                        shrunk[b],
                        state,
                        gone,
                        norm,
                        alpha,
                        slope,
                        slopes[s, part, wave],
                        unwanted,
                        ZERO,
                        n,
                        full,
                    )
