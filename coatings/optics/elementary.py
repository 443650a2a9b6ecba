"""Sine, cosine, exponential and root as plain arithmetic, so that loops over them run in vectors.

The series are Taylor's, on intervals so short that the first term left out is below the last bit.
"""

from __future__ import annotations

import math

import numpy as np

from coatings.optics.cache import compiled

ROUND = 1.5 * 2.0**52  # added and taken away again: rounds to the nearest whole number
SINE = tuple((-1) ** k * math.pi ** (2 * k + 1) / math.factorial(2 * k + 1) for k in range(8))[::-1]
COSINE = tuple((-1) ** k * math.pi ** (2 * k) / math.factorial(2 * k) for k in range(9))[::-1]
FADING = tuple((-1) ** k / math.factorial(k) for k in range(1, 14))[::-1]

FADING_LITTLE = FADING[-7:]
LITTLE = 1.0 / 64.0

PER_LN2 = 1.0 / math.log(2.0)
LN2_HIGH = math.floor(math.log(2.0) * 2.0**32) / 2.0**32  # 32 bits: its multiples are exact
LN2_LOW = 1.9082149292705877e-10  # ln 2 - LN2_HIGH
FADED = 700.0  # exp(-700) is 1e-304
BIAS, MANTISSA = np.int64(1023), np.int64(52)


@compiled()
def sine_cosine(turns: float) -> tuple[float, float]:
    """sin and cos of 2 pi ``turns`` within 4e-16; near zero the sine keeps relative accuracy."""
    halves = (2.0 * turns + ROUND) - ROUND
    f = turns - 0.5 * halves  # a quarter turn at most; the angle 2 pi f is doubled from pi f
    odd = halves - 2.0 * ((0.5 * halves + ROUND) - ROUND)
    sign = 1.0 - 2.0 * odd * odd
    z = f * f
    s = 0.0
    for a in SINE:
        s = s * z + a
    s *= f
    c = 0.0
    for b in COSINE:
        c = c * z + b
    return sign * (2.0 * s * c), sign * (1.0 - 2.0 * s * s)


@compiled()
def power_of_e(u: float) -> tuple[float, float]:
    """exp(-u), u >= 0, as the pair (two, p) of two (1 + p); above 700 u counts as 700."""
    u = min(u, FADED)
    shifted = ROUND - u * PER_LN2
    k = shifted - ROUND
    bits = np.float64(shifted).view(np.int64)
    two = np.int64((bits + BIAS) << MANTISSA).view(np.float64)
    f = (u + k * LN2_HIGH) + k * LN2_LOW
    p = 0.0
    for a in FADING:
        p = (p + a) * f
    return two, p


@compiled()
def one_less_power(u: float) -> float:
    """1 - exp(-u), u >= 0, to a relative 2e-16."""
    two, p = power_of_e(u)
    return (1.0 - two) - two * p


@compiled()
def one_less_little_power(u: float) -> float:
    """1 - exp(-u) for u from 0 to `LITTLE`, in a third of the steps."""
    p = 0.0
    for a in FADING_LITTLE:
        p = (p + a) * u
    return -p


@compiled()
def square_root(re: float, im: float) -> tuple[float, float]:
    """Root whose real part is not negative; that of a negative number is on the upper axis."""
    size = math.sqrt(re * re + im * im)
    a = math.sqrt(0.5 * (size + abs(re)))
    b = 0.5 * im / (a if a > 0.0 else 1.0)
    if re >= 0.0:
        return a, b
    return abs(b), (-a if im < 0.0 else a)
