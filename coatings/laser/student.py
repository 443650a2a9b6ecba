"""Student's t: how far a standard error reaches when it was itself estimated."""

from __future__ import annotations

from collections.abc import Iterable

import numpy as np

# scipy's quantile has no limit for infinite degrees; a million is normal to seven digits.
_AS_GOOD_AS_NORMAL = 1e6


def t_quantile(probability: float, degrees: float) -> float:
    """t below which a Student variable of ``degrees`` (above 0, may be inf) lies [1]."""
    from scipy.special import stdtrit

    return float(stdtrit(min(degrees, _AS_GOOD_AS_NORMAL), probability))


def t_probability(t: float, degrees: float) -> float:
    """Probability that a Student variable of ``degrees`` lies below ``t``."""
    from scipy.special import stdtr

    return float(stdtr(min(degrees, _AS_GOOD_AS_NORMAL), t))


def half_width(sigma: float, degrees: float, *, share: float = 0.95) -> float:
    """Half width of the interval that holds ``share``, for a standard error ``sigma``."""
    return sigma * t_quantile(0.5 + 0.5 * share, degrees)


def combined(parts: Iterable[tuple[float, float]]) -> tuple[float, float]:
    """Standard error of a sum of independent errors (sigma, degrees), and its degrees.

    Welch, Biometrika 34, 28 (1947); Satterthwaite, Biometrics Bulletin 2, 110 (1946) (both from
    memory).
    """
    pairs = list(parts)
    total = sum(sigma**2 for sigma, _ in pairs)
    estimated = sum(sigma**4 / degrees for sigma, degrees in pairs)
    degrees = total**2 / estimated if estimated > 0.0 else np.inf
    return float(np.sqrt(total)), float(degrees)
