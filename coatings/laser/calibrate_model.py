"""Threshold and slope of uncoated chips over their length, as straight lines and as one joint fit.

With rho = ln(1/R) of the bare facets (both alike), g_th = a_i + rho/L and d the slope of all light
lost at both facets in photons an electron (slope over stages h nu/q):

    1/d = 1/eta_i + (a_i/(eta_i rho)) L                          a line over L,
    logarithmic   ln J_th = (ln Jtr + a_i/G0) + (rho/G0)/L       a line over 1/L,
    linear        J_th = Jtr (1 + a_i/G0) + (Jtr rho/G0)/L       a line over 1/L.

Coldren, Corzine and Masanovic, Diode Lasers and Photonic Integrated Circuits, 2nd ed. (2012),
chapter 2 (from memory). Chips scatter by factors, so every line is weighted for the same relative
scatter. Inside, the parameters are p = (a_i, ln eta_i, ln Jtr, ln G0).

rho only scales: a_i and G0 go with it, eta_i and Jtr do not see it. So what is not known of R adds
to the covariance exactly as (a_i/rho, 0, 0, 1/rho) sigma_rho.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from coatings.errors import InputError, Problem
from coatings.laser.checks import FloatArray
from coatings.laser.chip import GainLaw

_ROUNDS = 40
_SETTLED = 1e-9
# Close to the least, steps too small to show in the sum of squares still better the parameters.
_ROUND_OFF = 1.0 + 1e-12
_HALVINGS = 30


@dataclass(frozen=True)
class Points:
    """What was measured, reduced: arrays of shape (n,).

    ``length_cm``; ``efficiency`` d, photons lost at both facets an electron; ``density`` J_th
    [A/cm2]; ``rho`` = ln(1/R) and its ``rho_sigma``; ``law`` of the gain.
    """

    length_cm: FloatArray
    efficiency: FloatArray
    density: FloatArray
    rho: float
    rho_sigma: float
    law: GainLaw

    @property
    def size(self) -> int:
        """Number of chips."""
        return int(self.length_cm.size)

    def at(self, rows: NDArray[np.bool_]) -> Points:
        """The chips of a mask only."""
        return replace(
            self,
            length_cm=self.length_cm[rows],
            efficiency=self.efficiency[rows],
            density=self.density[rows],
        )


@dataclass(frozen=True)
class Fitted:
    """Parameters p = (a_i, ln eta_i, ln Jtr, ln G0) with their covariance split by its sources.

    ``by_source``: covariance from the scatter of slopes, of thresholds, from both together and
    from R, shape (4, 4, 4); NaN where no chip is left over to show the scatter. ``dof`` is what
    each of the two scatters was estimated from; ``scatter`` the two relative standard deviations
    and their correlation.
    """

    parameters: FloatArray
    by_source: FloatArray
    dof: int
    scatter: tuple[float, float, float]

    @property
    def covariance(self) -> FloatArray:
        """Covariance of p, shape (4, 4)."""
        total: FloatArray = self.by_source.sum(axis=0)
        return total

    def degrees(self) -> FloatArray:
        """Degrees of freedom of each parameter's standard error (Welch and Satterthwaite)."""
        slope, threshold, both, reflectance = np.diagonal(self.by_source, axis1=1, axis2=2)
        total = slope + threshold + both + reflectance
        estimated = slope**2 + threshold**2
        # Never below what one of the scatters has; without scatter (or nothing but R) it is exact.
        degrees = np.full(4, np.inf)
        np.divide(self.dof * total**2, estimated, out=degrees, where=estimated > 0.0)
        at_least: FloatArray = np.maximum(degrees, self.dof)
        return at_least


def straight_lines(points: Points) -> Fitted:
    """The parameters by two separate straight lines.

    Raises
    ------
    InputError
        A line whose sign no chip can have, so that its parameters do not exist.
    """
    length, d, J = points.length_cm, points.efficiency, points.density
    b, b_cov, b_rest = _line(d, d * length, np.ones_like(d))
    if points.law is GainLaw.LOGARITHMIC:
        c, c_cov, c_rest = _line(np.ones_like(J), 1.0 / length, np.log(J))
    else:
        c, c_cov, c_rest = _line(1.0 / J, 1.0 / (length * J), np.ones_like(J))
    refuse_impossible_lines(points, b, c)
    parameters, by_b, by_c = _from_lines(points, b, c)
    sources = np.zeros((4, 4, 4))
    sources[0] = by_b @ b_cov @ by_b.T
    sources[1] = by_c @ c_cov @ by_c.T
    sources[3] = _from_reflectance(points, parameters)
    return Fitted(parameters, sources, points.size - 2, scatter_of(b_rest, c_rest, points.size - 2))


def refuse_impossible_lines(points: Points, slope_line: FloatArray, line: FloatArray) -> None:
    """InputError where a line has a sign from which no parameter follows."""
    if slope_line[0] <= 0.0:
        raise InputError(
            Problem(
                "slope_W_per_A",
                "falls so fast with length that a very short chip would have an infinite slope "
                "(injection efficiency without bound); check the slopes of the shortest chips",
            )
        )
    if line[1] <= 0.0:
        raise InputError(
            Problem(
                "threshold_A",
                "over area does not fall with length, so the modal gain would be negative: a "
                "longer chip needs less gain; check stripe, lengths and heating",
            )
        )
    if points.law is GainLaw.LINEAR and line[0] <= line[1] * slope_line[1] / slope_line[0]:
        raise InputError(
            Problem(
                "threshold_A",
                "gives a transparency current of zero or less with the linear gain law; check the "
                'thresholds, or take gain_law = "logarithmic"',
            )
        )


def _line(
    one: FloatArray, over: FloatArray, target: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """Least squares of target = b0 one + b1 over: coefficients, covariance, residuals."""
    design = np.stack([one, over], axis=1)
    inverse = np.linalg.pinv(design)
    coefficients = inverse @ target
    rest: FloatArray = target - design @ coefficients
    spread = rest @ rest / (target.size - 2) if target.size > 2 else np.nan
    return coefficients, spread * inverse @ inverse.T, rest


def _from_lines(
    points: Points, b: FloatArray, c: FloatArray
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """p of the two lines and its derivatives with respect to each, shape (4, 2)."""
    rho, ratio = points.rho, b[1] / b[0]
    loss = np.array([-rho * ratio / b[0], rho / b[0]])
    efficiency = np.array([-1.0 / b[0], 0.0])
    left = c[0] - ratio * c[1]
    by_ratio = -c[1] * np.array([-ratio / b[0], 1.0 / b[0]])
    by_c = np.array([1.0, -ratio])
    if points.law is GainLaw.LOGARITHMIC:
        ln_Jtr, ln_G0 = left, np.log(rho / c[1])
        gain_b, gain_c = np.zeros(2), np.array([0.0, -1.0 / c[1]])
    else:
        ln_Jtr, ln_G0 = np.log(left), np.log(left * rho / c[1])
        by_ratio, by_c = by_ratio / left, by_c / left
        gain_b, gain_c = by_ratio, by_c + np.array([0.0, -1.0 / c[1]])
    parameters = np.array([rho * ratio, -np.log(b[0]), ln_Jtr, ln_G0])
    none = np.zeros(2)
    return (
        parameters,
        np.stack([loss, efficiency, by_ratio, gain_b]),
        np.stack([none, none, by_c, gain_c]),
    )


def expected(points: Points, p: FloatArray) -> tuple[FloatArray, FloatArray]:
    """ln d and ln J_th that parameters give; NaN where no such chip lases."""
    with np.errstate(invalid="ignore"):
        ln_d = p[1] - np.log(1.0 + p[0] * points.length_cm / points.rho)
        need = (p[0] + points.rho / points.length_cm) * np.exp(-p[3])
        pumping = need if points.law is GainLaw.LOGARITHMIC else np.log1p(need)
    return ln_d, p[2] + pumping


def residuals(points: Points, p: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Measured less expected, of ln d and ln J_th."""
    ln_d, ln_J = expected(points, p)
    return np.log(points.efficiency) - ln_d, np.log(points.density) - ln_J


def derivatives(points: Points, p: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Derivatives of ``expected`` with respect to p, each of shape (n, 4)."""
    length, rho, G0 = points.length_cm, points.rho, np.exp(p[3])
    one, none = np.ones(points.size), np.zeros(points.size)
    need = (p[0] + rho / length) / G0
    slow = one if points.law is GainLaw.LOGARITHMIC else 1.0 / (1.0 + need)
    by_slope = np.stack([-(length / rho) / (1.0 + p[0] * length / rho), one, none, none], axis=1)
    by_threshold = np.stack([slow / G0, none, one, -need * slow], axis=1)
    return by_slope, by_threshold


def joint_fit(points: Points) -> Fitted:
    """One least-squares fit of ln d and ln J_th of all chips, started from the lines.

    Slopes fix (a_i, eta_i); thresholds fix two numbers of the other two given a_i. So the result
    does not depend on how the two kinds are weighted; their scatters are estimated apart, and
    their correlation (a chip with more loss has less slope and more threshold) is counted.

    Raises
    ------
    InputError
        As ``straight_lines``.
    """
    p = _descend(points, straight_lines(points).parameters)
    by_slope, by_threshold = derivatives(points, p)
    inverse = np.linalg.pinv(np.concatenate([by_slope, by_threshold]))
    S, T = inverse[:, : points.size], inverse[:, points.size :]
    scatter = scatter_of(*residuals(points, p), points.size - 2)
    slope, threshold, correlation = scatter
    mixed = correlation * slope * threshold * (S @ T.T)
    sources = np.stack(
        [
            slope**2 * S @ S.T,
            threshold**2 * T @ T.T,
            mixed + mixed.T,
            _from_reflectance(points, p),
        ]
    )
    return Fitted(p, sources, points.size - 2, scatter)


def _descend(points: Points, p: FloatArray) -> FloatArray:
    """Gauss and Newton's steps, halved where the sum of squares would rise."""

    def squares(trial: FloatArray) -> float:
        rest = np.concatenate(residuals(points, trial))
        total = float(rest @ rest)
        return total if np.isfinite(total) else np.inf

    least = squares(p)
    for _ in range(_ROUNDS):
        slopes = np.concatenate(derivatives(points, p))
        step = np.linalg.lstsq(slopes, np.concatenate(residuals(points, p)), rcond=None)[0]
        if np.max(np.abs(step)) <= _SETTLED * (1.0 + np.max(np.abs(p))):
            return p + step
        for _ in range(_HALVINGS):
            now = squares(p + step)
            if now <= least * _ROUND_OFF:
                break
            step = 0.5 * step
        else:
            return p
        p, least = p + step, now
    return p


def _from_reflectance(points: Points, p: FloatArray) -> FloatArray:
    by_rho = np.array([p[0], 0.0, 0.0, 1.0]) / points.rho
    return np.outer(by_rho, by_rho) * points.rho_sigma**2


def scatter_of(slopes: FloatArray, thresholds: FloatArray, dof: int) -> tuple[float, float, float]:
    """Relative standard deviations and their correlation; NaN without degrees of freedom."""
    if dof < 1:
        return np.nan, np.nan, np.nan
    first, second = slopes @ slopes, thresholds @ thresholds
    if first == 0.0 or second == 0.0:
        return float(np.sqrt(first / dof)), float(np.sqrt(second / dof)), 0.0
    correlation = float(slopes @ thresholds / np.sqrt(first * second))
    return float(np.sqrt(first / dof)), float(np.sqrt(second / dof)), correlation
