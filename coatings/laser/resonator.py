"""The chip below threshold as a resonator: transmitted and reflected gain, ripple, mode spacing.

With the single-pass gain G = exp((g - a_i) L) in intensity, x = G sqrt(R1 R2) and the round-trip
phase theta = 2 k L + arg r1 + arg r2, the sum of all round trips is

    transmitted  t = t1 t2 sqrt(G) exp(i k L)/(1 - x exp(i theta)),
    reflected    r = r1' + t1^2 r2 G exp(2 i k L)/(1 - x exp(i theta)).

Both denominators vanish where x = 1 and theta is a whole number of turns: that is threshold. The
gain is the same whatever the signal: saturation is not modelled. Fabry-Perot amplifiers: Saitoh and
Mukai, IEEE J. Quantum Electron. QE-17 (1981), and Hakki and Paoli, J. Appl. Phys. 44, 4113 (1973)
for reading gain from the ripple (both from memory).
"""

from __future__ import annotations

import numpy as np
from scipy.constants import c

from coatings.errors import ArrayError, Problem
from coatings.laser.checks import FloatArray, Real, not_negative, numbers, positive
from coatings.laser.facets import FacetLight

_MOST_DB = 300.0


def single_pass_gain(gain_dB: Real) -> FloatArray:
    """Intensity gain of one pass, G = 10^(dB/10) [1].

    Raises
    ------
    ArrayError
        A gain that is not finite, or beyond 300 dB.
    """
    decibel = numbers("gain_dB", gain_dB)
    if np.any(np.abs(decibel) > _MOST_DB):
        raise ArrayError(
            Problem("gain_dB", f"passes {_MOST_DB:g} dB; give the single pass in decibel")
        )
    gain: FloatArray = 10.0 ** (decibel / 10.0)
    return gain


def mode_spacing_GHz(*, group_index: Real, length_um: Real) -> FloatArray:
    """Spacing of neighbouring modes in frequency, c/(2 n_g L) [GHz].

    Parameters
    ----------
    group_index : n_g [1].
    length_um : L [um].

    Raises
    ------
    ArrayError
        A value not above 0.
    """
    path_m = 2.0 * positive("group_index", group_index) * positive("length_um", length_um) * 1e-6
    spacing: FloatArray = c / path_m * 1e-9
    return spacing


def ripple_dB(R_product: Real, *, gain_dB: Real) -> FloatArray:
    """Highest over lowest transmitted gain, 10 log10(((1 + x)/(1 - x))^2) [dB].

    Agrawal, Fiber-Optic Communication Systems, chapter on amplifiers (attribution from memory).

    Parameters
    ----------
    R_product : R1 R2 [1].
    gain_dB : gain of a single pass [dB].

    Raises
    ------
    ArrayError
        A negative product, or a round-trip gain x of 1 or more: the chip lases.
    """
    x = round_trip(R_product, gain_dB=gain_dB)
    ripple: FloatArray = 20.0 * np.log10((1.0 + x) / (1.0 - x))
    return ripple


def round_trip(R_product: Real, *, gain_dB: Real) -> FloatArray:
    """Gain of half a round trip, x = G sqrt(R1 R2) [1], refused from threshold (1) on.

    Parameters
    ----------
    R_product : R1 R2 [1].
    gain_dB : gain of a single pass [dB].

    Raises
    ------
    ArrayError
        A negative product, or x of 1 or more.
    """
    x = single_pass_gain(gain_dB) * np.sqrt(not_negative("R_product", R_product))
    _refuse_lasing(x)
    return x


def R_product_needed(ripple_dB: Real, *, gain_dB: Real) -> FloatArray:
    """Largest R1 R2 that keeps the ripple, (x/G)^2 with x = (sqrt m - 1)/(sqrt m + 1) [1].

    Parameters
    ----------
    ripple_dB : the most that the facets may cause, 10 log10 m [dB].
    gain_dB : gain of a single pass [dB].

    Raises
    ------
    ArrayError
        A negative ripple.
    """
    # sqrt m = exp(2 u) with u half its logarithm: (sqrt m - 1)/(sqrt m + 1) = tanh u.
    x = np.tanh(not_negative("ripple_dB", ripple_dB) * np.log(10.0) / 40.0)
    product: FloatArray = (x / single_pass_gain(gain_dB)) ** 2
    return product


def round_trip_phase_rad(
    wavelength_nm: Real, *, index: float, group_index: float, length_um: float, reference_nm: float
) -> FloatArray:
    """Phase 2 k L of a round trip in a chip whose index tilts by its group index [rad].

    n(lambda) = n + (n - n_g)(lambda - lambda0)/lambda0, whose group index is n_g everywhere, gives
    2 k L = 4 pi L [n_g/lambda + (n - n_g)/lambda0]. The facets' phases come on top.

    Parameters
    ----------
    wavelength_nm : lambda [nm].
    index, group_index : n at the reference, and n_g [1].
    length_um : L [um].
    reference_nm : lambda0 [nm].

    Raises
    ------
    ArrayError
        A value not above 0.
    """
    wavelength = positive("wavelength_nm", wavelength_nm)
    length_nm = 1e3 * positive("length_um", length_um)
    tilt = (positive("index", index) - positive("group_index", group_index)) / positive(
        "reference_nm", reference_nm
    )
    phase: FloatArray = 4.0 * np.pi * length_nm * (group_index / wavelength + tilt)
    return phase


def transmitted_gain(
    front: FacetLight, rear: FacetLight, *, gain: Real, phase_rad: Real
) -> FloatArray:
    """Gain from one facet through the other, T1 T2 G/|1 - x exp(i theta)|^2 [1].

    Parameters
    ----------
    front, rear : the facets; numbers or arrays of the phase's shape.
    gain : single pass in intensity, G [1].
    phase_rad : full round trip, 2 k L + arg r1 + arg r2 [rad].

    Raises
    ------
    ArrayError
        A gain not above 0, or x of 1 or more.
    """
    G, theta = positive("gain", gain), numbers("phase_rad", phase_rad)
    R1, T1, _, _ = front.arrays()
    R2, T2, _, _ = rear.arrays()
    x = G * np.sqrt(R1 * R2)
    _refuse_lasing(x)
    transmitted: FloatArray = T1 * T2 * G / _denominator(x, theta)
    return transmitted


def reflected_gain(
    front: FacetLight,
    rear: FacetLight,
    *,
    gain: Real,
    phase_rad: Real,
    R_outside: Real | None = None,
) -> FloatArray:
    """Gain back out of the front, |r1' + t1^2 r2 G exp(2 i k L)/(1 - x exp(i theta))|^2 [1].

    t1^2 is taken opposite in phase to r1 r1', as of every lossless coating.

    Parameters
    ----------
    front, rear : the facets; numbers or arrays of the phase's shape.
    gain : single pass in intensity, G [1].
    phase_rad : full round trip, 2 k L + arg r1 + arg r2 [rad].
    R_outside : R1', the front from outside [1]; its R when None, exact for a lossless coating.

    Raises
    ------
    ArrayError
        A gain not above 0, a negative R_outside, or x of 1 or more.
    """
    G, theta = positive("gain", gain), numbers("phase_rad", phase_rad)
    R1, T1, _, _ = front.arrays()
    R2 = rear.arrays()[0]
    outside = not_negative("R_outside", R1 if R_outside is None else R_outside)
    x = G * np.sqrt(R1 * R2)
    _refuse_lasing(x)
    turn = np.exp(1j * theta)
    field = np.sqrt(outside) - T1 * np.sqrt(R2) * G * turn / (1.0 - x * turn)
    reflected: FloatArray = np.abs(field) ** 2
    return reflected


def _denominator(x: FloatArray, theta: FloatArray) -> FloatArray:
    """|1 - x exp(i theta)|^2 as (1 - x)^2 + 4 x sin^2(theta/2), exact near resonance."""
    denominator: FloatArray = (1.0 - x) ** 2 + 4.0 * x * np.sin(0.5 * theta) ** 2
    return denominator


def _refuse_lasing(x: FloatArray) -> None:
    if np.any(x >= 1.0):
        raise ArrayError(
            Problem(
                "gain, R1 R2",
                f"G sqrt(R1 R2) reaches {np.max(x):.4g}: the chip lases from 1 on; "
                "lower the gain or the facets' reflectance",
            )
        )
