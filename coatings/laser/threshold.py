"""Threshold of a Fabry-Perot chip: where the round trip gives back what it loses.

In intensity the round trip R1 R2 exp(2 (g - a_i) L) = 1, hence the threshold modal gain
g_th = a_i + a_m with the mirror loss a_m = ln(1/(R1 R2))/(2 L).
"""

from __future__ import annotations

import numpy as np

from coatings.errors import ArrayError, Problem
from coatings.laser.checks import (
    FloatArray,
    Real,
    not_negative,
    numbers,
    positive,
    reflectances,
    same_shape,
)
from coatings.laser.chip import LaserChip


def mirror_loss_per_cm(R_front: Real, R_rear: Real, *, length_um: Real) -> FloatArray:
    """Mirror loss a_m = ln(1/(R1 R2))/(2 L), the facets' share of the loss spread over the chip.

    Coldren, Corzine and Masanovic, Diode Lasers and Photonic Integrated Circuits, 2nd ed. (2012),
    chapter 2 (from memory). Vectorised.

    Parameters
    ----------
    R_front, R_rear : power reflectances into the mode [1], above 0, at most 1.
    length_um : length of the chip [um].

    Returns
    -------
    a_m [1/cm], for intensity.

    Raises
    ------
    ArrayError
        A reflectance of zero (no feedback, no threshold) or above 1, or a length not above 0.
    """
    front = reflectances("R_front", R_front)
    rear = reflectances("R_rear", R_rear)
    length_cm = positive("length_um", length_um) * 1e-4
    front, rear, length_cm = same_shape({"R_front": front, "R_rear": rear, "length_um": length_cm})
    # Sum of logarithms: the product of two very small reflectances would underflow.
    loss: FloatArray = -(np.log(front) + np.log(rear)) / (2.0 * length_cm)
    return loss


def threshold_gain_per_cm(mirror_loss_per_cm: Real, *, internal_loss_per_cm: Real) -> FloatArray:
    """Threshold modal gain g_th = a_i + a_m [1/cm].

    Parameters
    ----------
    mirror_loss_per_cm : a_m [1/cm].
    internal_loss_per_cm : a_i [1/cm].

    Raises
    ------
    ArrayError
        A negative loss.
    """
    mirror = not_negative("mirror_loss_per_cm", mirror_loss_per_cm)
    return mirror + not_negative("internal_loss_per_cm", internal_loss_per_cm)


def threshold_current_A(
    chip: LaserChip, *, threshold_gain_per_cm: Real, rise_K: Real = 0.0
) -> FloatArray:
    """Threshold current I_th = J(g_th) L w (all emitters) at ``rise_K`` above the reference.

    T0 acts on the transparency: Jtr exp(dT/T0). Pankove, IEEE J. Quantum Electron. QE-4, 119
    (1968) (from memory).

    Parameters
    ----------
    chip : the chip.
    threshold_gain_per_cm : g_th [1/cm].
    rise_K : junction temperature less reference temperature, dT [K].

    Returns
    -------
    I_th [A] of the bar; inf where a logarithmic law would need a current beyond all floats.

    Raises
    ------
    ArrayError
        A gain that is not finite.
    """
    gain = numbers("threshold_gain_per_cm", threshold_gain_per_cm)
    cold = chip.gain.current_density_A_per_cm2(gain) * chip.pumped_cm2
    return warmed_threshold_A(chip, cold, np.asarray(rise_K, dtype=np.float64))


def warmed_threshold_A(chip: LaserChip, cold_A: FloatArray, rise_K: FloatArray) -> FloatArray:
    """Cold threshold [A] carried to ``rise_K`` above the reference by T0. No checks."""
    if chip.t0_K is None:
        return cold_A + 0.0 * rise_K
    with np.errstate(over="ignore"):
        warm: FloatArray = cold_A * np.exp(rise_K / chip.t0_K)
    return warm


def gain_shape(chip: LaserChip, *, wavelength_nm: Real) -> FloatArray:
    """Gain at a wavelength over the gain at the chip's own wavelength of operation.

    A parabola 1 - 2 ((lambda - peak)/width)^2 with ``gain_width_nm`` its full width at half
    maximum, divided by its value at ``chip.wavelength_nm``, where the gain law holds. Below zero
    the medium absorbs. One everywhere when the chip names no peak.

    Raises
    ------
    ArrayError
        The chip's own wavelength lies where the parabola has no gain.
    """
    wavelength = positive("wavelength_nm", wavelength_nm)
    peak_nm, width_nm = chip.gain_peak_nm, chip.gain_width_nm
    if peak_nm is None or width_nm is None:
        return np.ones_like(wavelength)
    own = 1.0 - 2.0 * ((chip.wavelength_nm - peak_nm) / width_nm) ** 2
    if own <= 0.0:
        raise ArrayError(
            Problem(
                "gain_peak_nm, gain_width_nm",
                f"leave no gain at the chip's own {chip.wavelength_nm:g} nm; "
                "move the peak or widen the gain",
            )
        )
    shape: FloatArray = (1.0 - 2.0 * ((wavelength - peak_nm) / width_nm) ** 2) / own
    return shape


def lowest_threshold(
    chip: LaserChip, *, wavelength_nm: FloatArray, R_front: FloatArray, R_rear: FloatArray
) -> tuple[float, float]:
    """Wavelength at which threshold is lowest over a band, and its current.

    The gain that lambda needs, g_th(lambda), is taken from a medium whose gain there is
    ``gain_shape`` times that at the chip's own wavelength: I_th = J(g_th/shape) L w.

    Parameters
    ----------
    chip : the chip, with ``gain_peak_nm`` and ``gain_width_nm``.
    wavelength_nm : wavelengths of the band [nm].
    R_front, R_rear : reflectances at those wavelengths [1], the coatings' dispersion included.

    Returns
    -------
    wavelength [nm] and threshold current [A], at the reference temperature.

    Raises
    ------
    ArrayError
        Nowhere in the band is there gain, or the shapes do not match.
    """
    shape = gain_shape(chip, wavelength_nm=wavelength_nm)
    loss = mirror_loss_per_cm(R_front, R_rear, length_um=chip.length_um)
    shape, loss = same_shape({"wavelength_nm": shape, "R_front, R_rear": loss})
    lit = shape > 0.0
    if not np.any(lit):
        raise ArrayError(
            Problem("wavelength_nm", "the band holds no gain; move it to the gain peak")
        )
    need = threshold_gain_per_cm(loss[lit], internal_loss_per_cm=chip.internal_loss_per_cm)
    best = int(np.argmin(need / shape[lit]))
    current = threshold_current_A(chip, threshold_gain_per_cm=(need / shape[lit])[best])
    return float(np.asarray(wavelength_nm)[lit][best]), float(current)
