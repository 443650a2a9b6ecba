"""Ripple of a chip below threshold: its contrast at one wavelength, from a noisy spectrum.

Between peaks and valleys the spectrum of a resonator is known: I = I0 (1 - x^2)/(1 + x^2 - 2 x cos
theta), so ln I is a slow curve plus ln F(x, theta). Peaks and valleys are found by fitting that
shape to all points at once: ln I a polynomial, theta a polynomial in the wave number (the mode
spacing may drift), x a smooth curve (the gain falls to both sides). Noise does not widen the
contrast, as it does for the highest and the lowest point of each fringe.

An instrument of Gaussian line, resolution w (full width at half maximum) against a mode spacing p,
weakens the k-th harmonic of F = 1 + 2 sum x^k cos(k theta) by exp(-h k^2), h = 2 (pi w/(2.355 p))^2:
with w given the blurred shape is fitted, and x is that of the chip.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy.constants import c

from coatings.errors import ArrayError, InputError, Problem
from coatings.laser.checks import FloatArray, not_negative, positive
from coatings.laser.inverse_period import FEWEST_FRINGES, find_periods, too_few_fringes
from coatings.laser.inverse_shape import Shape, first_shape, fit_shape, log_shape

_MOST_FRINGES = 60.0
_FIRST_FRINGES = 12.0
_STANDS_OUT = 6.0
_CORRELATED = 0.3
_SPIKE_SIGMAS = 6.0
_MOST_SPIKES = 0.05
_SPIKE_ROUNDS = 3
_LEAST_SPIKE = 1e-6
_HIDDEN = 0.05
_SAME_PERIOD = 0.15
_POINTS_A_PEAK = 1.0
_POINTS_A_FRINGE = 3.0
_FWHM_SIGMAS = 2.0 * np.sqrt(2.0 * np.log(2.0))


@dataclass(frozen=True, eq=False)
class FringeSpectrum:
    """Emission or gain of a chip below threshold: rising ``wavelength_nm`` and linear
    ``intensity`` in any unit, shape (n,).

    Raises
    ------
    ArrayError
        Rows of different size, wavelengths that do not rise, an intensity of zero or below (as
        decibels have).
    """

    wavelength_nm: FloatArray
    intensity: FloatArray

    def __post_init__(self) -> None:
        wavelength = positive("wavelength_nm", self.wavelength_nm)
        intensity = np.asarray(self.intensity, dtype=np.float64)
        if wavelength.ndim != 1 or wavelength.shape != intensity.shape:
            raise ArrayError(
                Problem("wavelength_nm, intensity", "are not rows of one size; give pairs")
            )
        if np.any(np.diff(wavelength) <= 0.0):
            raise ArrayError(Problem("wavelength_nm", "does not rise from row to row; order it"))
        if not np.all((intensity > 0.0) & np.isfinite(intensity)):
            raise ArrayError(
                Problem(
                    "intensity",
                    "holds values that are not above zero; give linear intensity (not decibels) "
                    "with the dark level taken off, without the points below the noise",
                )
            )
        object.__setattr__(self, "wavelength_nm", wavelength)
        object.__setattr__(self, "intensity", intensity)


@dataclass(frozen=True, eq=False)
class RippleReading:
    """The ripple at one wavelength.

    Attributes
    ----------
    at_nm : where it is read [nm].
    x : G sqrt(R1 R2) [1]; ``ln_x_sigma`` its relative standard error, ``degrees`` of freedom.
    contrast : Imax/Imin of the chip, ((1 + x)/(1 - x))^2 [1]; ``seen_contrast`` what the
        instrument shows of it.
    spacing_nm, spacing_GHz : mode spacing there.
    fringes : number of fringes in the part used; ``band_nm`` that part.
    peaks_nm, valleys_nm : where they are.
    wavelength_nm, fitted : the points used and the fitted intensity there; ``spikes`` points left
        out.
    notes : sentences for the reader.
    """

    at_nm: float
    x: float
    ln_x_sigma: float
    degrees: float
    contrast: float
    seen_contrast: float
    spacing_nm: float
    spacing_GHz: float
    fringes: float
    band_nm: tuple[float, float]
    peaks_nm: FloatArray
    valleys_nm: FloatArray
    wavelength_nm: FloatArray
    fitted: FloatArray
    spikes: int
    notes: tuple[str, ...]


def read_ripple(
    spectrum: FringeSpectrum,
    *,
    at_nm: float | None = None,
    resolution_nm: float = 0.0,
    mode_spacing_GHz: float | None = None,
) -> RippleReading:
    """x = G sqrt(R1 R2) from the fringes around a wavelength.

    Parameters
    ----------
    spectrum : the measurement.
    at_nm : where to read [nm]; the middle of the spectrum when None.
    resolution_nm : full width at half maximum of the instrument's line [nm]; 0 takes the
        spectrum as it is.
    mode_spacing_GHz : what group index and length make of it; the search keeps within a quarter.

    Raises
    ------
    ArrayError
        A wavelength outside the spectrum, a negative resolution.
    InputError
        Fewer than three regular fringes, fringes too coarsely sampled or that do not stand out of
        the noise, a resolution that hides them.
    """
    not_negative("resolution_nm", resolution_nm)
    wave = 1e7 / spectrum.wavelength_nm
    at = float(0.5 * (wave[0] + wave[-1])) if at_nm is None else _inside(spectrum, at_nm)
    expected = None if mode_spacing_GHz is None else mode_spacing_GHz * 1e7 / c
    logarithm = np.log(spectrum.intensity)
    periods = find_periods(wave, logarithm, expected_per_cm=expected)
    starts = [
        _start(wave, logarithm, at, period, resolution_nm)
        for period in _visible(periods, resolution_nm, at)
    ]
    for start in sorted(starts, key=_Window.mean_square):
        window = _grown(wave, logarithm, at, start, resolution_nm)
        if window.keeps_period():
            return _reading(_without_spikes(window), at)
    raise too_few_fringes("shows no period that lasts")


def _inside(spectrum: FringeSpectrum, at_nm: float) -> float:
    low, high = float(spectrum.wavelength_nm[0]), float(spectrum.wavelength_nm[-1])
    if not low <= at_nm <= high:
        raise ArrayError(
            Problem(
                "at_nm",
                f"{at_nm:g} nm lies outside the spectrum, {low:g} to {high:g} nm; measure there",
            )
        )
    return 1e7 / at_nm


def _blur(resolution_nm: float, at_per_cm: float, period_per_cm: float) -> float:
    """h of the instrument's line against the fringes."""
    width = resolution_nm * at_per_cm**2 * 1e-7 / _FWHM_SIGMAS
    return float(2.0 * (np.pi * width / period_per_cm) ** 2)


def _visible(periods: tuple[float, ...], resolution_nm: float, at: float) -> tuple[float, ...]:
    """The periods that the instrument can show; refused where it hides even the likeliest."""
    hidden = [np.exp(-_blur(resolution_nm, at, period)) < _HIDDEN for period in periods]
    if hidden[0]:
        raise InputError(
            Problem(
                "resolution_nm",
                f"{resolution_nm:g} nm hides fringes of {1e7 * periods[0] / at**2:.3g} nm; "
                "measure with a finer resolution",
            )
        )
    return tuple(period for period, out in zip(periods, hidden, strict=True) if not out)


@dataclass(frozen=True, eq=False)
class _Window:
    """Points around the reading, as used, with the shape fitted to them and the period sought."""

    wave: FloatArray
    logarithm: FloatArray
    shape: Shape
    period: float
    spikes: int = 0

    def mean_square(self) -> float:
        return float(np.mean((self.logarithm - self.shape.logarithm()) ** 2))

    def keeps_period(self) -> bool:
        """Whether the fitted fringes are those sought, at the reading and over all points."""
        sought = float(np.ptp(self.wave)) / self.period
        here, over_all = self.period / self.shape.period, self.shape.fringes / sought
        return max(abs(here - 1.0), abs(over_all - 1.0)) < _SAME_PERIOD

    def keep(self, rows: NDArray[np.bool_]) -> _Window:
        """Without some points, fitted anew."""
        s, scale, fringes = self.shape.s[rows], self.shape.scale, self.shape.fringes
        logarithm = self.logarithm[rows]
        shape = fit_shape(self.shape.on(s, scale, fringes), logarithm)
        left_out = int(np.count_nonzero(~rows))
        return replace(
            self,
            wave=self.wave[rows],
            logarithm=logarithm,
            shape=shape,
            spikes=self.spikes + left_out,
        )


def _start(
    wave: FloatArray, logarithm: FloatArray, at: float, period: float, resolution_nm: float
) -> _Window:
    """A dozen fringes of a period around the reading, with one x for all of them.

    Curves released too early can bend x to threshold.
    """
    rows, s, scale = _around(wave, at, _FIRST_FRINGES, period)
    here = logarithm[rows]
    blur = _blur(resolution_nm, at, period)
    shape = fit_shape(first_shape(s, scale, here, period=period, blur=blur), here)
    return _Window(wave[rows], here, shape, period)


def _grown(
    wave: FloatArray, logarithm: FloatArray, at: float, start: _Window, resolution_nm: float
) -> _Window:
    """The shape over a window that grows from a dozen fringes, so that no fringe is miscounted."""
    fringes, shape, period = _FIRST_FRINGES, start.shape, start.period
    while True:
        rows, s, scale = _around(wave, at, fringes, period)
        here = logarithm[rows]
        # The period is known better now, and the blur goes with its square.
        shape = replace(shape, blur=_blur(resolution_nm, at, shape.period))
        shape = fit_shape(shape.on(s, scale, float(np.ptp(wave[rows])) / period), here)
        if rows.all() or fringes >= _MOST_FRINGES:
            return _Window(wave[rows], here, shape, period)
        fringes = min(2.0 * fringes, _MOST_FRINGES)


def _around(
    wave: FloatArray, at: float, fringes: float, period: float
) -> tuple[NDArray[np.bool_], FloatArray, float]:
    """Rows of a number of fringes around the reading, their place over a scale, and the scale."""
    scale = 0.5 * fringes * period
    rows = np.abs(wave - at) <= _reach_around(wave, at, scale)
    return rows, (wave[rows] - at) / scale, scale


def _reach_around(wave: FloatArray, at: float, half: float) -> float:
    """Half width of a window of the wanted number of fringes, longer where an end cuts it off."""
    before, after = at - float(wave.min()), float(wave.max()) - at
    return half + max(0.0, half - min(before, after))


def _without_spikes(window: _Window) -> _Window:
    """Points far off all others are left out, at most a twentieth: cosmic rays, glitches."""
    for _ in range(_SPIKE_ROUNDS):
        off = np.abs(window.logarithm - window.shape.logarithm())
        usual = float(np.median(off)) / 0.6745
        spikes = off > max(_SPIKE_SIGMAS * usual, _LEAST_SPIKE)
        if not spikes.any() or np.count_nonzero(spikes) > _MOST_SPIKES * off.size:
            return window
        window = window.keep(~spikes)
    return window


def _reading(window: _Window, at: float) -> RippleReading:
    shape = window.shape
    if shape.fringes < FEWEST_FRINGES:
        raise too_few_fringes(f"shows {shape.fringes:.3g} fringes")
    degrees = window.logarithm.size - shape.parameters.size
    sigma, memory = _ln_x_sigma(window, degrees)
    x = shape.x
    if not sigma * _STANDS_OUT < 1.0 or (window.mean_square() > x**2 and memory > _CORRELATED):
        raise too_few_fringes("no ripple stands out of the rest")
    points_a_fringe = window.wave.size / shape.fringes
    if points_a_fringe < _POINTS_A_FRINGE or (1.0 - x) * points_a_fringe < _POINTS_A_PEAK:
        raise too_few_fringes(
            f"{points_a_fringe:.2g} points a fringe can't show peaks of {(1.0 - x) / np.pi:.2g} "
            "fringes"
        )
    spacing_nm = 1e7 * shape.period / at**2
    peaks, valleys = (_places(shape, at, offset) for offset in (0.0, np.pi))
    ln_F, _, _ = log_shape(np.array([x, x]), np.array([0.0, np.pi]), blur=shape.blur)
    ends = 1e7 / window.wave[[0, -1]]
    return RippleReading(
        at_nm=1e7 / at,
        x=x,
        ln_x_sigma=sigma,
        degrees=float(degrees),
        contrast=((1.0 + x) / (1.0 - x)) ** 2,
        seen_contrast=float(np.exp(ln_F[0] - ln_F[1])),
        spacing_nm=spacing_nm,
        spacing_GHz=shape.period * c * 1e-7,
        fringes=shape.fringes,
        band_nm=(float(ends[0]), float(ends[1])),
        peaks_nm=peaks,
        valleys_nm=valleys,
        wavelength_nm=1e7 / window.wave,
        fitted=np.exp(shape.logarithm()),
        spikes=window.spikes,
        notes=_notes(window, memory),
    )


def _ln_x_sigma(window: _Window, degrees: int) -> tuple[float, float]:
    """Relative standard error of x and the correlation of neighbouring residuals.

    Each point counts with its own residual, so that valleys may be noisier than peaks; neighbours
    that go together (an oversampled instrument line, or a shape that is not quite this one) widen
    the error as if there were fewer points.
    """
    if degrees < 1:
        return np.inf, 0.0
    shape = window.shape
    rest = window.logarithm - shape.logarithm()
    slopes = shape.jacobian()
    inverse = np.linalg.pinv(slopes)
    # What each point keeps of its noise: those at steep flanks pull the curve towards themselves.
    free = np.maximum(1.0 - np.sum(inverse.T * slopes, axis=1), 1.0 / rest.size)
    place = shape.envelope.size + shape.phase.size
    variance = float(np.sum((inverse[place] * rest) ** 2 / free))
    square = float(rest @ rest)
    memory = float(rest[1:] @ rest[:-1]) / square if square > 0.0 else 0.0
    if memory > 2.0 / np.sqrt(rest.size):
        variance *= (1.0 + memory) / (1.0 - memory)
    return float(shape.ln_x_by_decay * np.sqrt(variance)), memory


def _places(shape: Shape, at: float, offset: float) -> FloatArray:
    """Wavelengths where the round trip is a whole number of turns plus an offset [nm], rising."""
    s = np.linspace(shape.s.min(), shape.s.max(), 4096)
    turns = (np.polynomial.polynomial.polyval(s, shape.phase) - offset) / (2.0 * np.pi)
    whole = np.arange(np.ceil(turns.min()), np.floor(turns.max()) + 1.0)
    order = slice(None) if turns[0] < turns[-1] else slice(None, None, -1)
    places = np.interp(whole, turns[order], s[order]) * shape.scale + at
    return np.sort(1e7 / places)


def _notes(window: _Window, memory: float) -> tuple[str, ...]:
    notes = [
        "Light that does not pass the resonator (stray emission, other modes) lowers the contrast "
        "and with it the reflectance found."
    ]
    if window.spikes:
        notes.append(f"{window.spikes} points far off their neighbours were left out.")
    if memory > _CORRELATED:
        notes.append(
            f"Neighbouring residuals go together ({memory:.2f}): the points are not independent or "
            "a second set of modes is there; the interval is widened."
        )
    return tuple(notes)
