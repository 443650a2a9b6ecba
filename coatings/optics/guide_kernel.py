# ruff: noqa: PLR0917 - kernels take their arrays one by one
"""Compiled loops: bound modes of a slab guide. Arrays in, arrays out, no checks.

Lengths are in units of 1/k0, so a layer of permittivity eps has kappa = sqrt(eps - N^2) with N the
effective index. phi is E_y (TE) or H_y (TM), w = 1 (TE) or 1/eps (TM), and v = w dphi/dx:

    phi and v are continuous,  v' = w (N^2 - eps) phi.

Counting. For real eps, with eps > 0 for TM, this is a Sturm-Liouville problem in -N^2: the solution
that vanishes on the far left has as many zeros as there are modes of larger N. `zeros` counts them
layer by layer, by the phase atan2(kappa phi, phi') where the field oscillates and by the sign where
it does not; one more lies in the right half-space when phi and v + w gamma phi differ in sign there.
Bisection on that whole number finds the mode of any order and can miss none.

Polishing. From the left and from the right the fields grow towards the mode, so neither loses
accuracy; they meet at the interface where the mode is strongest. For the left one
d(v/phi)/dN^2 = (integral of w phi^2 so far) / phi^2, and likewise from the right, so Newton's step is

    dN^2 = - (v_L phi_R - v_R phi_L) / s / (I_L + I_R/s^2),     s = phi_R/phi_L  (or v_R/v_L),

exact, analytic (no conjugate) and with the normalisation integral as its denominator. Complex
permittivity is reached from its real part in n equal steps; n doubles until n and 2n agree.
"""

from __future__ import annotations

import cmath
import math

import numpy as np
from numpy.typing import NDArray

from coatings.optics.cache import compiled

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]
Whole = NDArray[np.int64]

BOUND, ABSENT, LOST, TWIN = 0, 1, 2, 3
SPLIT = 1e-8
"""Modes closer than this in effective index count as twins."""
AGREE = 1e-11
MOST_STEPS = 512
PATIENCE = 40


@compiled()
def zeros(eps: Floats, length: Floats, square: float, tm: bool) -> int:
    """How many bound modes have N^2 above ``square``; eps (N), length (N - 2)."""
    w = 1.0 / eps[0] if tm else 1.0
    phi, v = 1.0, w * math.sqrt(max(square - eps[0], 0.0))
    count = 0
    for j in range(length.size):
        w = 1.0 / eps[j + 1] if tm else 1.0
        slope, d, y = v / w, length[j], eps[j + 1] - square
        if y > 0.0:
            k = math.sqrt(y)
            start = math.atan2(k * phi, slope)
            count += int(math.floor((start + k * d) / math.pi) - math.floor(start / math.pi))
            c, s = math.cos(k * d), math.sin(k * d) / k
            ahead = c * phi + s * slope
        else:
            g = math.sqrt(-y)
            c = 0.5 * (1.0 + math.exp(-2.0 * g * d))
            s = -0.5 * math.expm1(-2.0 * g * d) / g if g > 0.0 else d
            ahead = c * phi + s * slope
            if ahead * phi < 0.0:
                count += 1
        v = w * (c * slope - y * s * phi)
        size = math.hypot(ahead, v)
        phi, v = ahead / size, v / size
    w = 1.0 / eps[-1] if tm else 1.0
    if (v + w * math.sqrt(max(square - eps[-1], 0.0)) * phi) * phi < 0.0:
        count += 1
    return count


@compiled()
def bracket(eps: Floats, length: Floats, order: int, tm: bool) -> float:
    """N^2 of the mode of that order by bisection, or -1 where it is not bound."""
    low = max(float(eps[0]), float(eps[-1]))
    high = low
    for j in range(1, eps.size - 1):
        high = max(high, float(eps[j]))
    if high <= low or zeros(eps, length, low, tm) <= order:
        return -1.0
    while True:
        middle = 0.5 * (low + high)
        if not low < middle < high:
            return middle
        if zeros(eps, length, middle, tm) > order:
            low = middle
        else:
            high = middle


@compiled()
def outward_root(z: complex) -> complex:
    """Square root with Re >= 0."""
    root = cmath.sqrt(z)
    return -root if root.real < 0.0 else root


@compiled()
def cross(kappa: complex, d: float) -> tuple[complex, complex, complex, float]:
    """cos z and sin z / kappa with exp(Im z) left out, d^3 (1 - sin 2z/2z)/(2 z^2) with its square.

    z = kappa d, Im kappa >= 0; the last number is exp(-2 Im z).
    """
    z = kappa * d
    fade = math.exp(-2.0 * z.imag)
    turn = complex(math.cos(z.real), math.sin(z.real))
    c = 0.5 * (turn * fade + turn.conjugate())
    if abs(z) < 1e-2:
        y = z * z
        root = math.sqrt(fade)
        s = root * d * (1.0 - y / 6.0 * (1.0 - y / 20.0 * (1.0 - y / 42.0)))
        late = fade * d**3 * (1.0 / 3.0 - y / 15.0 + 2.0 * y * y / 315.0 - y * y * y / 2835.0)
    else:
        s = -0.5j * (turn * fade - turn.conjugate()) / kappa
        late = (d * fade - s * c) / (2.0 * kappa * kappa)
    return c, s, late, fade


@compiled()
def walk(
    eps: Complexes,
    length: Floats,
    square: complex,
    tm: bool,
    phi: Complexes,
    v: Complexes,
    area: Complexes,
    size: Floats,
) -> None:
    """Field from the left at every interface, to unit size, with the integral of w phi^2 so far.

    size: logarithm of what was divided out.
    """
    w = 1.0 / eps[0] if tm else 1.0 + 0.0j
    gamma = outward_root(square - eps[0])
    p, f, a, logarithm = 1.0 + 0.0j, w * gamma, 0.5 * w / gamma, 0.0
    for j in range(length.size + 1):
        if j > 0:
            w = 1.0 / eps[j] if tm else 1.0 + 0.0j
            kappa = cmath.sqrt(eps[j] - square)
            kappa = -kappa if kappa.imag < 0.0 else kappa
            d = length[j - 1]
            c, s, late, fade = cross(kappa, d)
            slope = f / w
            layer = 0.5 * p * p * (d * fade + s * c) + p * slope * s * s + slope * slope * late
            a = a * fade + w * layer
            p, f = c * p + s * slope, w * (c * slope - kappa * kappa * s * p)
            logarithm += kappa.imag * d
        big = math.sqrt(abs(p) ** 2 + abs(f) ** 2)
        p, f, a = p / big, f / big, a / (big * big)
        logarithm += math.log(big)
        phi[j], v[j], area[j], size[j] = p, f, a, logarithm


@compiled()
def both_walks(
    eps: Complexes, length: Floats, square: complex, tm: bool, fields: Complexes, sizes: Floats
) -> int:
    """Fields from both sides, fields (6, N - 1): phi, v, area from the left, then from the right.

    Returns the interface where they are strongest together.
    """
    walk(eps, length, square, tm, fields[0], fields[1], fields[2], sizes[0])
    back = fields[:, ::-1]
    walk(eps[::-1], length[::-1], square, tm, back[3], back[4], back[5], sizes[1, ::-1])
    best = 0
    for i in range(length.size + 1):
        fields[4, i] = -fields[4, i]
        if sizes[0, i] + sizes[1, i] > sizes[0, best] + sizes[1, best]:
            best = i
    return best


@compiled()
def ratio(fields: Complexes, at: int) -> complex:
    """Right field over left field at an interface, by their larger component."""
    if abs(fields[0, at]) >= abs(fields[1, at]):
        return complex(fields[3, at] / fields[0, at])
    return complex(fields[4, at] / fields[1, at])


@compiled()
def polish(
    eps: Complexes, length: Floats, square: complex, tm: bool, fields: Complexes, sizes: Floats
) -> tuple[complex, bool]:
    """Newton's method on N^2; false where it does not settle."""
    last = math.inf
    for _ in range(PATIENCE):
        at = both_walks(eps, length, square, tm, fields, sizes)
        s = ratio(fields, at)
        gap = fields[1, at] * fields[3, at] - fields[4, at] * fields[0, at]
        step = gap / s / (fields[2, at] + fields[5, at] / (s * s))
        square -= step
        if abs(step) < 1e-14 * abs(square) and abs(step) >= 0.25 * last:
            return square, True
        if abs(step) < 1e-17 * abs(square):
            return square, True
        if not abs(step) < 0.1 * abs(square):
            return square, False
        last = abs(step)
    return square, last < 1e-14 * abs(square)


@compiled()
def follow(
    eps: Complexes, length: Floats, start: float, tm: bool, fields: Complexes, sizes: Floats
) -> tuple[complex, bool]:
    """N^2 of the mode that starts at ``start`` when loss and gain are switched on."""
    steps, found, settled = 1, complex(start), False
    part = np.empty_like(eps)
    while steps <= MOST_STEPS:
        square, good = complex(start), True
        for step in range(steps + 1):
            for j in range(eps.size):
                part[j] = complex(eps[j].real, eps[j].imag * step / steps)
            square, fine = polish(part, length, square, tm, fields, sizes)
            good = good and fine
        if settled and good and abs(square - found) < AGREE * abs(square):
            return square, True
        found, settled = square, good
        steps *= 2
    return found, False


@compiled()
def compose(
    eps: Complexes,
    length: Floats,
    square: complex,
    tm: bool,
    fields: Complexes,
    sizes: Floats,
    phi: Complexes,
    v: Complexes,
) -> None:
    """The mode at every interface, to the norm integral w phi^2 = 1."""
    at = both_walks(eps, length, square, tm, fields, sizes)
    s = ratio(fields, at)
    norm = cmath.sqrt(fields[2, at] + fields[5, at] / (s * s))
    for i in range(length.size + 1):
        if i <= at:
            factor = math.exp(sizes[0, i] - sizes[0, at]) / norm
            phi[i], v[i] = factor * fields[0, i], factor * fields[1, i]
        else:
            factor = math.exp(sizes[1, i] - sizes[1, at]) / norm / s
            phi[i], v[i] = factor * fields[3, i], factor * fields[4, i]


@compiled()
def count(eps: Complexes, length: Floats, tm: bool, modes: Whole) -> None:
    """How many modes are bound at each wavelength, loss and gain left out."""
    for i in range(modes.size):
        real = eps[i].real.copy()
        low = max(real[0], real[-1])
        modes[i] = zeros(real, length[i], low, tm) if real.max() > low else 0


@compiled()
def solve(
    eps: Complexes,
    length: Floats,
    order: int,
    tm: bool,
    square: Complexes,
    phi: Complexes,
    v: Complexes,
    state: Whole,
) -> None:
    """One mode at W wavelengths: N^2 (W), phi and v at the interfaces (W, N - 1), state (W).

    eps (W, N), length (W, N - 2). States: BOUND; ABSENT; LOST while loss was switched on; TWIN: the
    next mode is closer than SPLIT.
    """
    fields = np.empty((6, phi.shape[1]), np.complex128)
    sizes = np.empty((2, phi.shape[1]))
    for i in range(square.size):
        real = eps[i].real.copy()
        start = bracket(real, length[i], order, tm)
        if start < 0.0:
            state[i] = ABSENT
            continue
        apart = 2.0 * math.sqrt(start) * SPLIT
        floor = max(real[0], real[-1])
        below = zeros(real, length[i], max(start - apart, floor), tm)
        if below > order + 1 or zeros(real, length[i], start + apart, tm) < order:
            state[i] = TWIN
            continue
        lossless = True
        for j in range(eps.shape[1]):
            lossless = lossless and eps[i, j].imag == 0.0
        if lossless:
            square[i], good = polish(eps[i], length[i], complex(start), tm, fields, sizes)
        else:
            square[i], good = follow(eps[i], length[i], start, tm, fields, sizes)
        state[i] = BOUND if good else LOST
        compose(eps[i], length[i], square[i], tm, fields, sizes, phi[i], v[i])
