"""Shape of the fringes of a resonator, as an instrument of finite resolution sees it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.laser.checks import FloatArray

_SHARP = 1e-7
_LAST_HARMONIC = 27.6  # exp(-27.6) is 1e-12
_MOST_HARMONICS = 3000
_FEWEST_TO_TWIST = 8.0
_BEND = 1e-3
_NEAR, _FAR = 1e-9, 600.0
_MOST_TRIALS = 100


def log_shape(
    x: FloatArray, theta: FloatArray, *, blur: float
) -> tuple[FloatArray, FloatArray, FloatArray]:
    """ln F and its derivatives with respect to x and theta; arrays of one shape.

    F = 1 + 2 sum_k exp(-blur k^2) x^k cos(k theta); without blur it is
    (1 - x^2)/(1 + x^2 - 2 x cos theta).
    """
    if blur < _SHARP:
        gap = 1.0 + x**2 - 2.0 * x * np.cos(theta)
        by_x = -2.0 * x / (1.0 - x**2) - 2.0 * (x - np.cos(theta)) / gap
        return np.log((1.0 - x**2) / gap), by_x, -2.0 * x * np.sin(theta) / gap
    weakest = max(-np.log(np.max(x)), 1.0 / _MOST_HARMONICS)
    reach = min(np.sqrt(_LAST_HARMONIC / blur), _LAST_HARMONIC / weakest)
    F, by_x, by_theta = np.ones_like(theta), np.zeros_like(theta), np.zeros_like(theta)
    turn, power = np.exp(1j * theta), np.ones_like(theta, dtype=complex)
    for k in range(1, min(int(reach) + 2, _MOST_HARMONICS)):
        last, power = power, power * x * turn
        weight = 2.0 * np.exp(-blur * k * k)
        F += weight * power.real
        by_x += weight * k * (last * turn).real
        by_theta -= weight * k * power.imag
    return np.log(F), by_x / F, by_theta / F


@dataclass(frozen=True, eq=False)
class Shape:
    """Fringes over ``s`` = (wave number - that of the reading)/``scale``, shape (n,).

    ``envelope``, ``phase`` and ``decay`` are polynomials in s, lowest power first: ln I0, theta
    and -ln x, a parabola where the gain is one. Where decay would fall to zero or below (threshold)
    it is bent to stay above, so that every trial has x between 0 and 1.
    """

    s: FloatArray
    scale: float
    blur: float
    envelope: FloatArray
    phase: FloatArray
    decay: FloatArray

    @property
    def x(self) -> float:
        """x at the reading, s = 0."""
        return float(np.exp(-_bent(self.decay[:1])[0][0]))

    @property
    def ln_x_by_decay(self) -> float:
        """Derivative of -ln x at the reading with respect to decay's first coefficient."""
        return float(_bent(self.decay[:1])[1][0])

    @property
    def fringes(self) -> float:
        """Number of fringes over the points."""
        theta = _along(self.s[[0, -1]], self.phase)
        return float(abs(theta[1] - theta[0]) / (2.0 * np.pi))

    @property
    def period(self) -> float:
        """Fringe period at the reading, in wave number."""
        return float(2.0 * np.pi * self.scale / abs(self.phase[1]))

    @property
    def parameters(self) -> FloatArray:
        """All coefficients in a row."""
        return np.concatenate([self.envelope, self.phase, self.decay])

    def logarithm(self) -> FloatArray:
        """ln I at the points."""
        ln_F, _, _ = log_shape(*self._inner(), blur=self.blur)
        return _along(self.s, self.envelope) + ln_F

    def jacobian(self) -> FloatArray:
        """Derivatives of ``logarithm`` with respect to ``parameters``, shape (n, p)."""
        x, theta = self._inner()
        _, by_x, by_theta = log_shape(x, theta, blur=self.blur)
        powers = np.polynomial.polynomial.polyvander(self.s, 4)
        by_decay = -by_x * x * _bent(_along(self.s, self.decay))[1]
        columns = np.concatenate(
            [
                powers[:, : self.envelope.size],
                powers[:, : self.phase.size] * by_theta[:, None],
                powers[:, : self.decay.size] * by_decay[:, None],
            ],
            axis=1,
        )
        return np.asarray(columns, dtype=np.float64)

    def _inner(self) -> tuple[FloatArray, FloatArray]:
        return np.exp(-_bent(_along(self.s, self.decay))[0]), _along(self.s, self.phase)

    def with_parameters(self, row: FloatArray) -> Shape:
        """The same points with other coefficients."""
        first, second = self.envelope.size, self.envelope.size + self.phase.size
        return Shape(self.s, self.scale, self.blur, row[:first], row[first:second], row[second:])

    def on(self, s: FloatArray, scale: float, fringes: float) -> Shape:
        """The same curves over other points, with as many coefficients as ``fringes`` allow."""
        sizes = coefficients(fringes)
        old = (self.envelope, self.phase, self.decay)
        rows = [
            _rescaled(part, scale / self.scale, size) for part, size in zip(old, sizes, strict=True)
        ]
        return Shape(s, scale, self.blur, *rows)


def _along(s: FloatArray, coefficients: FloatArray) -> FloatArray:
    """Polynomial, lowest power first."""
    return np.asarray(np.polynomial.polynomial.polyval(s, coefficients), dtype=np.float64)


def _bent(decay: FloatArray) -> tuple[FloatArray, FloatArray]:
    """Decay where it is well above zero, positive everywhere; and the bend's derivative."""
    root = np.hypot(decay, _BEND)
    # (decay + root)/2, written for decay < 0 without cancellation.
    bent = np.where(decay > 0.0, 0.5 * (decay + root), 0.5 * _BEND**2 / (root + np.abs(decay)))
    return np.clip(bent, _NEAR, _FAR), 0.5 * (1.0 + decay / root)


def coefficients(fringes: float) -> tuple[int, int, int]:
    """Coefficients of envelope, phase and decay that a number of fringes can carry."""
    return (4, 3, 3) if fringes < _FEWEST_TO_TWIST else (5, 4, 3)


def _rescaled(part: FloatArray, ratio: float, size: int) -> FloatArray:
    row = np.zeros(size)
    kept = min(size, part.size)
    row[:kept] = part[:kept] * ratio ** np.arange(kept)
    return row


def fit_shape(start: Shape, logarithm: FloatArray) -> Shape:
    """Least squares of ln I from a start, by Levenberg and Marquardt's method."""
    from scipy.optimize import least_squares

    found = least_squares(
        lambda row: start.with_parameters(row).logarithm() - logarithm,
        start.parameters,
        jac=lambda row: start.with_parameters(row).jacobian(),
        method="lm",
        xtol=1e-10,
        ftol=1e-10,
        max_nfev=_MOST_TRIALS,
    )
    return start.with_parameters(found.x)


def first_shape(
    s: FloatArray, scale: float, logarithm: FloatArray, *, period: float, blur: float
) -> Shape:
    """A start: envelope and first harmonic of ln I at a given period."""
    turns = 2.0 * np.pi * s * scale / period
    design = np.stack([np.ones_like(s), s, s**2, np.cos(turns), np.sin(turns)], axis=1)
    row = np.linalg.lstsq(design, logarithm, rcond=None)[0]
    # ln F without blur is 2 sum x^k cos(k theta)/k: the first harmonic's amplitude is 2 x.
    x = min(max(0.5 * float(np.hypot(row[3], row[4])) * np.exp(blur), 0.01), 0.9)
    phase = np.array([-np.arctan2(row[4], row[3]), 2.0 * np.pi * scale / period])
    return Shape(s, scale, blur, row[:3], phase, np.array([-np.log(x)]))
