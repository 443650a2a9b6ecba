"""The spectrophotometer's slit: readings as averages of a spectrum over wavelength.

A reading at x0 is the integral of w(x - x0) f(x) with the slit function w of unit area. Between its
samples f is taken as linear; for that line the integral is exact. With G'' = w each sample's weight
is a second difference of G,

    (G(x_{p+1}) - G(x_p))/(x_{p+1} - x_p) - (G(x_p) - G(x_{p-1}))/(x_p - x_{p-1}),

so neither a coarse grid nor a narrow slit needs a second rule: a slit much narrower than the grid
interpolates.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike
from scipy.special import ndtr

from coatings.errors import InputError, Problem
from coatings.optics.arrays import Reals, check_finite, numbers, refuse

SlitShape = Literal["triangular", "rectangular", "gaussian"]

SIGMAS_PER_FWHM = 1.0 / np.sqrt(8.0 * np.log(2.0))
GAUSSIAN_REACH = 2.0  # full widths: 4.7 sigma; the 2.5e-6 beyond are left out


@dataclass(frozen=True)
class Slit:
    """Bandwidth of the instrument.

    Parameters
    ----------
    shape : "triangular", "rectangular" or "gaussian"
        Triangular is that of a monochromator with equal slits (common practice, no source).
    fwhm_nm : float
        Full width at half maximum [nm], above 0.

    Raises
    ------
    InputError
        Naming the argument and the value.
    """

    shape: SlitShape
    fwhm_nm: float

    def __post_init__(self) -> None:
        if self.shape not in _SHAPES:
            known = ", ".join(_SHAPES)
            raise InputError(Problem("slit.shape", f"got {self.shape!r}; give one of {known}"))
        if not 0.0 < self.fwhm_nm < np.inf:
            problem = f"got {self.fwhm_nm}; give more than 0, or no slit at all"
            raise InputError(Problem("slit.fwhm_nm", problem))

    @property
    def reach_nm(self) -> float:
        """How far to either side of a reading the slit lets light through [nm]."""
        return _SHAPES[self.shape][0] * self.fwhm_nm

    def grid_nm(self, reading_nm: ArrayLike, *, step_nm: float) -> Reals:
        """Wavelengths that cover every reading with its slit, evenly, ``step_nm`` apart at most.

        Parameters
        ----------
        reading_nm : array (Q,)
            Wavelengths of the readings [nm], in any order.
        step_nm : float
            Largest step [nm], above 0.

        Returns
        -------
        array (P,)
            Ascending [nm].

        Raises
        ------
        ArrayError
            Naming the argument, the place and the value.
        InputError
            When the step is not above 0.
        """
        readings = _readings(reading_nm)
        if not 0.0 < step_nm < np.inf:
            raise InputError(Problem("step_nm", f"got {step_nm}; give more than 0"))
        low, high = readings.min() - self.reach_nm, readings.max() + self.reach_nm
        return np.linspace(low, high, 2 + int((high - low) / step_nm))

    def weights(self, reading_nm: ArrayLike, wavelength_nm: ArrayLike) -> Reals:
        """Matrix that turns a spectrum into readings: reading = weights @ spectrum.

        Parameters
        ----------
        reading_nm : array (Q,)
            Wavelengths of the readings [nm], in any order.
        wavelength_nm : array (P,)
            Grid of the spectrum [nm], ascending. Each reading needs it `reach_nm` to either side:
            nothing is assumed about the spectrum beyond its ends.

        Returns
        -------
        array (Q, P)
            Every row adds up to 1. Between samples the error is that of linear interpolation,
            step^2/8 times the curvature of the spectrum.

        Raises
        ------
        ArrayError
            Naming the argument, the place and the value; also when the grid ends inside a slit.
        """
        readings = _readings(reading_nm)
        grid = _grid(wavelength_nm)
        self._check_covered(readings, grid)
        away = (grid - readings[:, None]) / self.fwhm_nm
        raised = self.fwhm_nm * _SHAPES[self.shape][1](away)
        slopes = np.zeros((len(readings), grid.size + 1))
        slopes[:, 1:-1] = np.diff(raised, axis=1) / np.diff(grid)
        slopes[:, -1] = 1.0
        beyond = _SHAPES[self.shape][0]
        slopes[:, 1:-1][away[:, 1:] <= -beyond] = 0.0
        slopes[:, 1:-1][away[:, :-1] >= beyond] = 1.0
        return np.diff(slopes, axis=1)

    def _check_covered(self, readings: Reals, grid: Reals) -> None:
        low, high = readings - self.reach_nm, readings + self.reach_nm
        slack = 1e-9 * self.reach_nm
        outside = (low < grid[0] - slack) | (high > grid[-1] + slack)
        if outside.any():
            q = int(np.argmax(outside))
            raise refuse(
                f"reading_nm[{q}]",
                f"is {readings[q]} nm; its slit needs the spectrum from {low[q]:g} to {high[q]:g}"
                f" nm, which is given from {grid[0]:g} to {grid[-1]:g} nm",
            )


def _readings(reading_nm: ArrayLike) -> Reals:
    readings: Reals = numbers(reading_nm, "reading_nm", np.float64, 1)
    if not readings.size:
        raise refuse("reading_nm", "is empty; give one reading or more")
    check_finite(readings, "reading_nm")
    return readings


def _grid(wavelength_nm: ArrayLike) -> Reals:
    grid: Reals = numbers(wavelength_nm, "wavelength_nm", np.float64, 1)
    check_finite(grid, "wavelength_nm")
    if grid.size < 2:
        raise refuse("wavelength_nm", f"has {grid.size} points; a slit needs 2 or more")
    steps = np.diff(grid)
    if steps.min() <= 0.0:
        p = int(np.argmax(steps <= 0.0))
        raise refuse(f"wavelength_nm[{p + 1}]", f"is {grid[p + 1]} nm; must be above {grid[p]} nm")
    return grid


def _triangular(x: Reals) -> Reals:
    """G of a triangle of unit area, x in full widths at half maximum."""
    falling = np.clip(1.0 - abs(x), 0.0, None) ** 3 / 6.0
    return np.maximum(x, 0.0) + falling


def _rectangular(x: Reals) -> Reals:
    return np.maximum(x, 0.0) + np.clip(0.5 - abs(x), 0.0, None) ** 2 / 2.0


def _gaussian(x: Reals) -> Reals:
    """The same of a Gaussian cut off at the reach and made of unit area again."""
    cut, sigma = GAUSSIAN_REACH / SIGMAS_PER_FWHM, SIGMAS_PER_FWHM
    u = -np.minimum(abs(x) / sigma, cut)
    tail = ndtr(-cut)
    rest = u * ndtr(u) + _bell(u) - (-cut * tail + _bell(np.float64(-cut))) - tail * (u + cut)
    whole: Reals = np.maximum(x, 0.0) + sigma * rest / (1.0 - 2.0 * tail)
    return whole


def _bell(u: Reals | np.float64) -> Reals:
    bell: Reals = np.exp(-0.5 * u * u) / np.sqrt(2.0 * np.pi)
    return bell


_SHAPES: dict[str, tuple[float, Callable[[Reals], Reals]]] = {
    "triangular": (1.0, _triangular),
    "rectangular": (0.5, _rectangular),
    "gaussian": (GAUSSIAN_REACH, _gaussian),
}
