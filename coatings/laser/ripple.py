"""Gain spectrum and ripple of an amplifier or gain chip over its band."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.constants import c

from coatings.errors import ArrayError, InputError, Problem
from coatings.laser.checks import FloatArray, out_of_range, positive, same_shape
from coatings.laser.facets import FacetLight
from coatings.laser.resonator import (
    R_product_needed,
    mode_spacing_GHz,
    reflected_gain,
    ripple_dB,
    round_trip,
    round_trip_phase_rad,
    single_pass_gain,
    transmitted_gain,
)

_LEAST_POINTS_PER_FRINGE = 8


@dataclass(frozen=True, kw_only=True)
class Amplifier:
    """A gain chip below threshold: ``gain_dB`` is the single pass at ``wavelength_nm``.

    ``ripple_dB`` is the most that the facets may cause; None sets no limit. With ``gain_peak_nm``
    and ``gain_width_nm`` the modal gain is a parabola with that full width at half maximum, and
    ``internal_loss_per_cm`` counts beside it; without them the gain is the same over the band.

    Raises
    ------
    InputError
        A size or index not above zero, a negative loss or ripple, one gain figure without the
        other, or a parabola that has no gain at the wavelength of operation.
    """

    wavelength_nm: float
    length_um: float
    index: float
    group_index: float
    gain_dB: float
    ripple_dB: float | None = None
    internal_loss_per_cm: float = 0.0
    gain_peak_nm: float | None = None
    gain_width_nm: float | None = None

    def __post_init__(self) -> None:
        problems = []
        for name in ("wavelength_nm", "length_um", "index", "group_index"):
            problems += out_of_range(name, getattr(self, name), low=0.0, open_low=True)
        for name in ("gain_peak_nm", "gain_width_nm"):
            problems += out_of_range(name, getattr(self, name), low=0.0, open_low=True)
        for name in ("ripple_dB", "internal_loss_per_cm"):
            problems += out_of_range(name, getattr(self, name), low=0.0)
        problems += out_of_range("gain_dB", self.gain_dB, low=-300.0, high=300.0)
        if problems:
            raise InputError(problems)
        if (self.gain_peak_nm is None) != (self.gain_width_nm is None):
            raise InputError(
                Problem("gain_peak_nm, gain_width_nm", "one is missing; give both or neither")
            )
        if self._parabola(np.asarray(self.wavelength_nm)) <= 0.0:
            raise InputError(
                Problem(
                    "gain_peak_nm, gain_width_nm",
                    f"leave no gain at {self.wavelength_nm:g} nm; move the peak or widen the gain",
                )
            )

    def _parabola(self, wavelength_nm: FloatArray) -> FloatArray:
        if self.gain_peak_nm is None or self.gain_width_nm is None:
            return np.ones_like(wavelength_nm)
        off: FloatArray = (wavelength_nm - self.gain_peak_nm) / self.gain_width_nm
        return 1.0 - 2.0 * off**2

    def gain_at_dB(self, wavelength_nm: FloatArray) -> FloatArray:
        """Single-pass gain over wavelength [dB]: (g shape - a_i) L in decibel."""
        per_neper = 10.0 / np.log(10.0)
        lost_dB = self.internal_loss_per_cm * self.length_um * 1e-4 * per_neper
        wavelength = positive("wavelength_nm", wavelength_nm)
        shape = self._parabola(wavelength) / self._parabola(np.asarray(self.wavelength_nm))
        gain: FloatArray = (self.gain_dB + lost_dB) * shape - lost_dB
        return gain


@dataclass(frozen=True)
class Ripple:
    """Spectrum and ripple of an amplifier.

    ``ripple_dB`` and ``gain_dB`` are the worst ripple over the band and the single pass at the
    wavelength of operation; ``R_product_needed`` is the R1 R2 that the limit demands at the band's
    highest gain (None without a limit); ``gain`` the transmitted, ``reflected`` the reflected gain
    at ``wavelength_nm``; ``worst_nm`` where the ripple is worst. Saturation is not modelled.
    """

    gain_dB: float
    ripple_dB: float
    mode_spacing_GHz: float
    R_product_needed: float | None
    wavelength_nm: FloatArray
    gain: FloatArray
    reflected: FloatArray
    worst_nm: float
    R_product: float
    notes: tuple[str, ...]

    def to_json_dict(self) -> dict[str, float | list[float] | None]:
        """The figures of the result, plain numbers and lists."""
        return {
            "gain_dB": self.gain_dB,
            "ripple_dB": self.ripple_dB,
            "mode_spacing_GHz": self.mode_spacing_GHz,
            "R_product_needed": self.R_product_needed,
            "wavelength_nm": self.wavelength_nm.tolist(),
            "gain": self.gain.tolist(),
        }


def fringe_grid_nm(
    amplifier: Amplifier, *, band_nm: tuple[float, float], points_per_fringe: int = 24
) -> FloatArray:
    """Wavelengths over a band, evenly spaced in frequency and fine enough for the fringes [nm].

    Parameters
    ----------
    amplifier : the chip.
    band_nm : two rising wavelengths [nm].
    points_per_fringe : points a mode spacing, 8 or more [1].

    Raises
    ------
    ArrayError
        A band that does not rise, or too few points.
    """
    low, high = band_nm
    if not 0.0 < low < high < np.inf:
        raise ArrayError(Problem("band_nm", f"is {low:g} to {high:g}; give two rising values"))
    if points_per_fringe < _LEAST_POINTS_PER_FRINGE:
        raise ArrayError(
            Problem(
                "points_per_fringe",
                f"is {points_per_fringe}; give {_LEAST_POINTS_PER_FRINGE} or more",
            )
        )
    fringes = _fringes(amplifier, low, high)
    points = int(np.ceil(fringes * points_per_fringe)) + 1
    grid: FloatArray = 1.0 / np.linspace(1.0 / low, 1.0 / high, max(points, 2))
    return grid


def _fringes(amplifier: Amplifier, low_nm: float, high_nm: float) -> float:
    """Number of mode spacings between two wavelengths."""
    spacing = mode_spacing_GHz(group_index=amplifier.group_index, length_um=amplifier.length_um)
    return float((c / low_nm - c / high_nm) / spacing)


def ripple_spectrum(
    amplifier: Amplifier,
    *,
    wavelength_nm: FloatArray,
    r_front: NDArray[np.complex128],
    r_rear: NDArray[np.complex128],
    T_front: FloatArray,
    T_rear: FloatArray,
) -> Ripple:
    """Gain spectrum of an amplifier from the complex reflection of the mode at its facets.

    Parameters
    ----------
    amplifier : the chip.
    wavelength_nm : rising wavelengths that resolve the fringes (``fringe_grid_nm``), shape (n,).
    r_front, r_rear : complex reflection of the mode at those wavelengths, shape (n,) or ().
    T_front, T_rear : transmitted share [1], shape (n,) or ().

    Raises
    ------
    ArrayError
        Wavelengths that do not rise or are too coarse for the fringes, shapes that do not match,
        or a chip that lases at this gain.
    """
    wavelength = positive("wavelength_nm", wavelength_nm)
    _refuse_coarse(amplifier, wavelength)
    front, turn1 = _facet("front", r_front, T_front, wavelength)
    rear, turn2 = _facet("rear", r_rear, T_rear, wavelength)
    gain_dB = amplifier.gain_at_dB(wavelength)
    product = np.asarray(front.R) * np.asarray(rear.R)
    phase = round_trip_phase_rad(
        wavelength,
        index=amplifier.index,
        group_index=amplifier.group_index,
        length_um=amplifier.length_um,
        reference_nm=amplifier.wavelength_nm,
    )
    light = {"gain": single_pass_gain(gain_dB), "phase_rad": phase + turn1 + turn2}
    worst = int(np.argmax(round_trip(product, gain_dB=gain_dB)))
    return _result(
        amplifier,
        wavelength,
        transmitted_gain(front, rear, **light),
        reflected_gain(front, rear, **light),
        (worst, product, gain_dB),
    )


def _result(
    amplifier: Amplifier,
    wavelength: FloatArray,
    gain: FloatArray,
    reflected: FloatArray,
    band: tuple[int, FloatArray, FloatArray],
) -> Ripple:
    worst, product, gain_dB = band
    limit = amplifier.ripple_dB
    needed = None
    if limit is not None:
        needed = float(R_product_needed(limit, gain_dB=np.max(gain_dB)))
    spacing = mode_spacing_GHz(group_index=amplifier.group_index, length_um=amplifier.length_um)
    found = float(ripple_dB(product[worst], gain_dB=gain_dB[worst]))
    return Ripple(
        gain_dB=amplifier.gain_dB,
        ripple_dB=found,
        mode_spacing_GHz=float(spacing),
        R_product_needed=needed,
        wavelength_nm=wavelength,
        gain=gain,
        reflected=reflected,
        worst_nm=float(wavelength[worst]),
        R_product=float(product[worst]),
        notes=_notes(limit, found),
    )


def _notes(limit_dB: float | None, found_dB: float) -> tuple[str, ...]:
    always = "Saturation is not modelled: the gain is that of a weak signal."
    if limit_dB is None:
        return (always, "No ripple limit is given: no reflectivity is demanded.")
    if found_dB <= limit_dB:
        return (always,)
    return (always, f"The ripple of {found_dB:.3g} dB passes the limit of {limit_dB:g} dB.")


def _facet(
    name: str, r: NDArray[np.complex128], T: FloatArray, wavelength: FloatArray
) -> tuple[FacetLight, FloatArray]:
    """Facet and phase of its reflection; what is neither R nor T counts as lost (A)."""
    r = np.asarray(r, dtype=np.complex128)
    R, share, _ = same_shape(
        {f"{name} |r|^2": np.abs(r) ** 2, f"T_{name}": T, "wavelength_nm": wavelength}
    )
    return FacetLight(R=R, T=share, A=1.0 - R - share), np.broadcast_to(np.angle(r), R.shape)


def _refuse_coarse(amplifier: Amplifier, wavelength: FloatArray) -> None:
    if wavelength.ndim != 1 or wavelength.size < 2 or np.any(np.diff(wavelength) <= 0.0):
        raise ArrayError(Problem("wavelength_nm", "is not a rising row; give two or more, rising"))
    widest = int(np.argmax(-np.diff(1.0 / wavelength)))
    step = _fringes(amplifier, float(wavelength[widest]), float(wavelength[widest + 1]))
    if step * _LEAST_POINTS_PER_FRINGE > 1.0 + 1e-9:
        raise ArrayError(
            Problem(
                "wavelength_nm",
                f"steps of {step:.3g} mode spacings blur the fringes; "
                f"give at least {_LEAST_POINTS_PER_FRINGE} points a spacing",
            )
        )
