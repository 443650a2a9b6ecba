"""Period of the fringes in a spectrum, before anything is fitted."""

from __future__ import annotations

import numpy as np

from coatings.errors import InputError, Problem
from coatings.laser.checks import FloatArray

FEWEST_FRINGES = 3.0
# A little below, so that a spectrum just short of three is told how many it shows.
_SEARCHED_FROM = 2.6
_POINTS_A_FRINGE = 4.0
_FINER = 8
_CANDIDATES = 3
_AROUND = 0.25
_FEWEST_POINTS = 16


def find_periods(
    wave_per_cm: FloatArray, logarithm: FloatArray, *, expected_per_cm: float | None
) -> tuple[float, ...]:
    """Candidate fringe periods in wave number [1/cm], the likeliest first.

    Highest lines of the windowed Fourier transform of ln I, its slow part taken off; from three
    fringes in the spectrum to four points a fringe.

    Parameters
    ----------
    wave_per_cm : falling or rising wave numbers [1/cm], shape (n,).
    logarithm : ln I there.
    expected_per_cm : mode spacing from group index and length [1/cm]; the search then keeps
        within a quarter of it.

    Raises
    ------
    InputError
        A spectrum that has, or can show, fewer than three fringes.
    """
    span = float(np.ptp(wave_per_cm))
    size = wave_per_cm.size
    low, high = _SEARCHED_FROM, size / _POINTS_A_FRINGE
    if size < _FEWEST_POINTS:
        raise too_few_fringes(f"holds {size} points")
    if expected_per_cm is not None:
        fringes = span / expected_per_cm
        if fringes < FEWEST_FRINGES:
            raise too_few_fringes(f"spans {fringes:.2g} mode spacings")
        if fringes > high:
            raise InputError(
                Problem(
                    "wavelength_nm",
                    f"has {size / fringes:.2g} points a fringe; measure with at least "
                    f"{_POINTS_A_FRINGE:g}",
                )
            )
        low, high = max(low, fringes * (1.0 - _AROUND)), min(high, fringes * (1.0 + _AROUND))
    lines = _strongest(wave_per_cm, logarithm, low, high)
    if not lines:
        where = "" if expected_per_cm is None else " near the spacing of group index and length"
        raise too_few_fringes(f"has no line{where}")
    return tuple(span / cycles for cycles in lines)


def too_few_fringes(found: str) -> InputError:
    """The refusal of a spectrum without three regular fringes."""
    return InputError(
        Problem(
            "wavelength_nm, intensity",
            f"{found}: fewer than three regular fringes; measure a wider span, closer to "
            "threshold or with a finer resolution",
        )
    )


def _strongest(
    wave: FloatArray, logarithm: FloatArray, low: float, high: float
) -> tuple[float, ...]:
    """Numbers of cycles over the span of the strongest lines between two numbers."""
    rising = slice(None) if wave[0] < wave[-1] else slice(None, None, -1)
    even = np.linspace(wave.min(), wave.max(), wave.size)
    values = np.interp(even, wave[rising], logarithm[rising])
    s = np.linspace(-1.0, 1.0, wave.size)
    rest = values - np.polynomial.Polynomial.fit(s, values, 2)(s)
    power = np.abs(np.fft.rfft(rest * np.hanning(wave.size), _FINER * wave.size)) ** 2
    # Sample k of the padded transform has k (n - 1)/(8 n) cycles over the span.
    cycles = np.arange(power.size) * (wave.size - 1) / (_FINER * wave.size)
    inside = np.flatnonzero((cycles >= low) & (cycles <= high))
    peaks = [
        k
        for k in inside[(inside > 0) & (inside < power.size - 1)]
        if power[k] >= power[k - 1] and power[k] > power[k + 1]
    ]
    peaks.sort(key=lambda k: -power[k])
    return tuple(float(cycles[k]) for k in peaks[:_CANDIDATES])
