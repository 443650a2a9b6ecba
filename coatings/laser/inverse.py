"""A coated facet's reflectivity from the laser itself.

Two published ways:

- above threshold, the slopes of both facets. P+ P- is constant along the chip, whatever current,
  heat and hole burning do, so S_u/S_k = (T_u/T_k) sqrt(R_k/R_u), u the unknown facet and k the
  known one. Ettenberg, Sommers, Kressel and Lockwood, Appl. Phys. Lett. 18, 571 (1971) (from
  memory);
- below threshold, the ripple. Its contrast m gives x = G sqrt(R_u R_k) = (sqrt m - 1)/(sqrt m + 1)
  with G the single-pass gain. Hakki and Paoli, J. Appl. Phys. 44, 4113 (1973) for the reading;
  Kaminow, Eisenstein and Stulz, IEEE J. Quantum Electron. QE-19, 493 (1983) for a coated facet
  against the same chip bare (both from memory).
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum

import numpy as np

from coatings.errors import ArrayError, InputError, Problem
from coatings.laser.checks import not_negative, reflectances
from coatings.laser.facets import FacetLight
from coatings.laser.inverse_fringes import RippleReading
from coatings.laser.inverse_slopes import SlopeRatio
from coatings.laser.resonator import single_pass_gain
from coatings.laser.student import combined, half_width

_NEPER_PER_DB = np.log(10.0) / 10.0


class Method(Enum):
    """How a reflectivity was read from the laser."""

    TWO_SIDED = "two-sided"
    RIPPLE = "ripple"


@dataclass(frozen=True)
class Reflectivity:
    """Reflectivity of a coated facet for the guided mode, with its 95 % interval.

    ``degrees`` of freedom behind the interval (Student's t; inf where what is not known was given,
    not estimated); ``notes`` in sentences.
    """

    method: Method
    R: float
    R_low: float
    R_high: float
    degrees: float
    notes: tuple[str, ...] = ()

    def to_json_dict(self) -> dict[str, float | str]:
        """Method, value and interval by name."""
        return {
            "method": self.method.value,
            "R": self.R,
            "R_low": self.R_low,
            "R_high": self.R_high,
        }


def R_from_slope_ratio(ratio: float, *, known: FacetLight, loss: float = 0.0) -> float:
    """R of the unknown facet from the slopes' ratio S_u/S_k.

    With k = ratio T_k/sqrt(R_k) and T_u = 1 - R_u - loss: R_u is the square of the positive root
    of z^2 + k z - (1 - loss) = 0.

    Parameters
    ----------
    ratio : slope of the unknown facet over that of the known one [1].
    known : the known facet; plain numbers.
    loss : A + S of the unknown facet [1].

    Raises
    ------
    ArrayError
        A ratio not above zero, a loss outside 0 ... 1, or a known facet that lets no light out.
    """
    if not 0.0 < ratio < np.inf:
        raise ArrayError(Problem("ratio", f"is {ratio:g}; give slopes that both rise"))
    if not 0.0 <= loss < 1.0:
        raise ArrayError(Problem("loss", f"is {loss:g}; give A + S from 0 to below 1"))
    R_known = float(reflectances("known R", known.R))
    if not known.T > 0.0:
        raise ArrayError(
            Problem("known T", "is zero: nothing leaves an opaque facet; give one that transmits")
        )
    k, rest = ratio * float(known.T) / np.sqrt(R_known), 1.0 - loss
    # The root as a quotient: the difference would cancel for a good antireflection coating.
    return float((2.0 * rest / (k + np.sqrt(k * k + 4.0 * rest))) ** 2)


def reflectivity_from_slopes(
    slopes: SlopeRatio,
    *,
    known: FacetLight,
    loss: float = 0.0,
    known_R_sigma: float = 0.0,
    meters_sigma: float = 0.0,
) -> Reflectivity:
    """R of the unknown facet from two-sided slopes, with its interval.

    Parameters
    ----------
    slopes : from ``slope_ratio``, the unknown facet over the known one.
    known : the known facet; plain numbers.
    loss : A + S of the unknown facet [1].
    known_R_sigma : standard uncertainty of the known R (its T moves against it) [1].
    meters_sigma : standard uncertainty of one power meter's scale against the other's,
        relative [1].

    Raises
    ------
    ArrayError
        As ``R_from_slope_ratio``; a negative uncertainty.
    """
    not_negative("known_R_sigma", known_R_sigma)
    not_negative("meters_sigma", meters_sigma)
    R = R_from_slope_ratio(slopes.ratio, known=known, loss=loss)
    by_known = known_R_sigma * (1.0 / float(known.T) + 0.5 / float(known.R))
    reach, degrees = _reach(
        ((slopes.ratio_sigma, slopes.degrees), (meters_sigma, np.inf), (by_known, np.inf))
    )
    low, high = (
        R_from_slope_ratio(slopes.ratio * factor, known=known, loss=loss)
        for factor in (np.exp(reach), np.exp(-reach))
    )
    return Reflectivity(Method.TWO_SIDED, R, low, high, degrees, slopes.notes)


def reflectivity_from_ripple(
    coated: RippleReading,
    *,
    gain_dB: float,
    R_known: float,
    gain_sigma_dB: float = 0.0,
    R_known_sigma: float = 0.0,
) -> Reflectivity:
    """R of the unknown facet from the ripple and a known gain, (x/G)^2/R_k.

    Parameters
    ----------
    coated : the ripple, from ``read_ripple``.
    gain_dB : gain of a single pass where the ripple was read [dB].
    R_known : reflectance of the other facet [1].
    gain_sigma_dB, R_known_sigma : standard uncertainties [dB], [1].

    Raises
    ------
    ArrayError
        A reflectance outside 0 ... 1 or a negative uncertainty.
    InputError
        The ripple asks for a reflectance above 1.
    """
    known = float(reflectances("R_known", R_known))
    R = (coated.x / float(single_pass_gain(gain_dB))) ** 2 / known
    _refuse_above_one(R, "the gain is higher than given, or the known facet reflects more")
    exact = (
        2.0 * _NEPER_PER_DB * float(not_negative("gain_sigma_dB", gain_sigma_dB)),
        float(not_negative("R_known_sigma", R_known_sigma)) / known,
    )
    return _from_logarithm(R, ((2.0 * coated.ln_x_sigma, coated.degrees),), exact, coated.notes)


def reflectivity_from_bare(
    coated: RippleReading,
    bare: RippleReading,
    *,
    R_product_bare: float,
    R_known: float,
    R_product_bare_sigma: float = 0.0,
    R_known_sigma: float = 0.0,
) -> Reflectivity:
    """R of the unknown facet from the ripple of the same chip before and after coating.

    At one current below threshold the gain is the same, so R_u R_k = (x/x_bare)^2 R_product_bare.

    Parameters
    ----------
    coated, bare : the ripple after and before, at one current, wavelength and temperature.
    R_product_bare : R1 R2 of the chip before coating [1].
    R_known : the other facet's R now [1].
    R_product_bare_sigma, R_known_sigma : standard uncertainties [1].

    Raises
    ------
    ArrayError
        A reflectance outside 0 ... 1 or a negative uncertainty.
    InputError
        The ripples ask for a reflectance above 1.
    """
    product = float(reflectances("R_product_bare", R_product_bare))
    known = float(reflectances("R_known", R_known))
    R = (coated.x / bare.x) ** 2 * product / known
    _refuse_above_one(R, "the two spectra are not of one chip at one current")
    exact = (
        float(not_negative("R_product_bare_sigma", R_product_bare_sigma)) / product,
        float(not_negative("R_known_sigma", R_known_sigma)) / known,
    )
    read = tuple((2.0 * each.ln_x_sigma, each.degrees) for each in (coated, bare))
    notes = (*coated.notes, *(f"Bare: {note}" for note in bare.notes))
    return _from_logarithm(R, read, exact, notes)


def _refuse_above_one(R: float, why: str) -> None:
    if R > 1.0:
        raise InputError(
            Problem("ripple", f"asks for a reflectance of {R:.3g}, above 1: {why}; check both")
        )


def _from_logarithm(
    R: float,
    read: tuple[tuple[float, float], ...],
    exact: tuple[float, ...],
    notes: tuple[str, ...],
) -> Reflectivity:
    """Interval of R from independent errors of ln R: those read, with degrees, and those given."""
    reach, degrees = _reach((*read, *((sigma, np.inf) for sigma in exact)))
    return Reflectivity(Method.RIPPLE, R, R * np.exp(-reach), R * np.exp(reach), degrees, notes)


def _reach(parts: tuple[tuple[float, float], ...]) -> tuple[float, float]:
    """Half width of the 95 % interval of a sum of errors, and its degrees of freedom."""
    sigma, degrees = combined(parts)
    return half_width(sigma, degrees), degrees
