# ruff: noqa: PLR0917 - kernels take their arrays one by one
"""Compiled loops: power that a mode sends outside, or back into the chip beside itself. No checks.

`facet` derives the integrands. With A = t a/2 (out) or -(1 - rho)/2 (back) on phi~ and
Z = A/Y0 (out) or (1 + rho)/(2 Y0) (back) times c/d on g~, both +q and -q add up to

    |A|^2 Phi + |Z|^2 G + 2 Re(A conj(Z) H),   Phi = |f~(q)|^2 + |f~(-q)|^2,
    G = |g~(q)|^2 + |g~(-q)|^2,   H = f~(q) conj g~(q) + f~(-q) conj g~(-q),

times Re(eta_out) or Re(Y0). Layout and blocks as in `modal_kernel`.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from coatings.optics.cache import compiled
from coatings.optics.elementary import power_of_e
from coatings.optics.kernel import (
    EVERY,
    ONE,
    P2,
    P3,
    P4,
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
from coatings.optics.pointwise import pair

Complexes = NDArray[np.complex128]


@compiled()
def portion(
    w: Floats,
    at: Index,
    outside: Index,
    admittance: Index,
    out: Index,
    loss: Index,
    incident: Index,
    tilt: complex,
    tm: bool,
    back: bool,
) -> tuple[complex, complex, float]:
    """A, Z and the real admittance at one node."""
    inverse = pair(w, at + (admittance - P2 if tm else admittance + P2))
    if back:
        rho = pair(w, at + out + P2) * (-1.0 if tm else 1.0)
        return -0.5 * (1.0 - rho), 0.5 * (1.0 + rho) * inverse * tilt, w[at + admittance]
    two, p = power_of_e(float(0.5 * w[at + loss]))
    through = two * (1.0 + p) * pair(w, at + incident + P2) * pair(w, at + out)
    if tm:
        through *= pair(w, at + admittance)
    return through, through * inverse * tilt, w[at + outside + P2]


@compiled()
def radiate(
    thickness: Floats,
    film: Whole,
    around: Floats,
    points: Floats,
    film_shift: Floats,
    products: Floats,
    r: Complexes,
    tilt: Complexes,
    power: Floats,
    back: bool,
) -> None:
    """Power (S, W) sent out, or ``back`` into the chip beside the mode.

    First arguments as for `modal_kernel.modal`, the incident row holding the mode's index;
    products (W, 4, K): Phi, G, Re H, Im H with weight; r, tilt (S, W) as `modal` gives them.
    """
    stacks, rows = U(thickness.shape[0]), U(around.shape[0]) - TWO
    waves, nodes = U(products.shape[0]), U(products.shape[2])
    incident, outside = ROW * rows, ROW * (rows + ONE)
    loss = ROW * (rows + TWO)
    gone, norm, out, state = loss + PLANE, loss + P2, loss + P3, loss + P3 + STATE
    w = np.zeros(state + TWO * STATE)
    lossy = np.empty(rows)
    shrunk = np.empty(U(thickness.shape[1]) // EVERY + ONE, np.bool_)
    tm = points[3, 0] > 0.5
    sign = -1.0 if tm else 1.0
    admittance = incident + (P4 if tm else P2)
    for wave in range(waves):
        for first in range(ZERO, nodes, PLANE):
            p0 = wave * nodes + first
            n = min(PLANE, nodes - first)
            full = (n + PAD) & ~PAD
            fill_row(w, outside, around[rows + ONE], 0.0, 0.0, points, p0, n, 1.0)
            fill_row(w, incident, around[rows], 0.0, 0.0, points, p0, n, 1.0)
            for s in range(stacks):
                if s == ZERO or film_shift.size > 0:
                    fill_films(w, lossy, around, film_shift, s, points, p0, n)
                kinds = film[s if film.shape[0] > 1 else ZERO]
                at = sweep(
                    w,
                    thickness[s],
                    kinds,
                    lossy,
                    shrunk,
                    outside,
                    state,
                    gone,
                    norm,
                    loss,
                    False,
                    full,
                )
                reflect(w, at, incident, out, full)
                total = 0.0
                for i in range(n):
                    a, z, flow = portion(
                        w,
                        i,
                        outside,
                        admittance,
                        out,
                        loss,
                        incident,
                        tilt[s, wave],
                        tm,
                        back,
                    )
                    cross = a * z.conjugate()
                    h = products[wave, 2:, first + i]
                    total += flow * (
                        (a.real**2 + a.imag**2) * products[wave, 0, first + i]
                        + (z.real**2 + z.imag**2) * products[wave, 1, first + i]
                        + 2.0 * (cross.real * h[0] - cross.imag * h[1])
                    )
                factor = 1.0 + sign * r[s, wave]
                power[s, wave] += total * (factor.real**2 + factor.imag**2)
