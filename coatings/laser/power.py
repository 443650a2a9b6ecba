"""From current to light: slope, knee, and how the light divides between the facets.

The uniform model: one photon density for the whole chip. P_tot = slope (I - I_th) is ALL light
lost at both facets, whether transmitted, absorbed or scattered there.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.errors import ArrayError, Problem
from coatings.laser.checks import (
    FloatArray,
    Real,
    not_negative,
    numbers,
    reflectances,
    same_shape,
)
from coatings.laser.chip import LaserChip
from coatings.laser.facets import FacetLight


def total_slope_W_per_A(
    chip: LaserChip, *, mirror_loss_per_cm: Real, rise_K: Real = 0.0
) -> FloatArray:
    """Slope of all light lost at both facets, eta_i stages (h nu/q) a_m/(a_i + a_m) [W/A].

    T1 acts on the injection efficiency: eta_i exp(-dT/T1). Biard, Carr and Reed, Trans.
    Metallurg. Soc. AIME 230, 286 (1964) for the loss ratio (from memory).

    Parameters
    ----------
    chip : the chip.
    mirror_loss_per_cm : a_m [1/cm].
    rise_K : junction temperature less reference temperature, dT [K].

    Raises
    ------
    ArrayError
        A negative mirror loss, or a mirror loss of zero in a chip without internal loss, whose
        slope is undefined.
    """
    mirror = not_negative("mirror_loss_per_cm", mirror_loss_per_cm)
    total = chip.internal_loss_per_cm + mirror
    if np.any(total == 0.0):
        raise ArrayError(
            Problem(
                "mirror_loss_per_cm",
                "is zero in a chip without internal loss: no light is lost anywhere; "
                "give a facet below R = 1",
            )
        )
    cold = chip.injection_efficiency * chip.stages * chip.photon_V * mirror / total
    return cooled_slope_W_per_A(chip, cold, np.asarray(rise_K, dtype=np.float64))


def cooled_slope_W_per_A(
    chip: LaserChip, cold_W_per_A: FloatArray, rise_K: FloatArray
) -> FloatArray:
    """Slope at the reference [W/A] carried to ``rise_K`` above it by T1. No checks."""
    if chip.t1_K is None:
        return cold_W_per_A + 0.0 * rise_K
    slope: FloatArray = cold_W_per_A * np.exp(-rise_K / chip.t1_K)
    return slope


def excess_current_A(current_A: Real, threshold_A: Real, *, spontaneous_factor: Real) -> FloatArray:
    """Current that turns into stimulated light, I_th s: I - I_th rounded by spontaneous emission.

    With j = I/I_th and the spontaneous factor B the photon number obeys s^2 - (j - 1) s - B j = 0,
    s = [(j - 1) + sqrt((j - 1)^2 + 4 B j)]/2, written for j < 1 without cancellation. Far above
    threshold s -> j - 1; the knee has neither kink nor divergence because the carriers clamp.
    Derived from the single-mode rate equations at steady state.

    Parameters
    ----------
    current_A : I [A], 0 or more.
    threshold_A : I_th [A], above 0; inf gives what spontaneous emission alone gives, B I.
    spontaneous_factor : B [1], the share of spontaneous emission that falls into the mode.

    Raises
    ------
    ArrayError
        A negative current or factor, or a threshold not above 0.
    """
    current = not_negative("current_A", current_A)
    factor = not_negative("spontaneous_factor", spontaneous_factor)
    threshold = np.asarray(threshold_A, dtype=np.float64)
    if not np.all(threshold > 0.0):
        raise ArrayError(Problem("threshold_A", "is not above 0; give a current above 0"))
    return excess_current_kernel_A(
        *same_shape({"current_A": current, "threshold_A": threshold, "B": factor})
    )


def excess_current_kernel_A(
    current_A: FloatArray, threshold_A: FloatArray, factor: FloatArray
) -> FloatArray:
    """``excess_current_A`` without checks; arrays of one shape."""
    j = current_A / threshold_A
    half = 0.5 * (np.abs(j - 1.0) + np.sqrt((j - 1.0) ** 2 + 4.0 * factor * j))
    above = j >= 1.0
    # Below threshold s = B j/half, hence I_th s = B I/half: finite for an infinite threshold too.
    below_A = np.divide(factor * current_A, half, out=np.zeros_like(j), where=~above)
    above_A = np.multiply(threshold_A, half, out=np.zeros_like(j), where=above)
    excess: FloatArray = np.where(above, above_A, below_A)
    return excess


@dataclass(frozen=True)
class FacetSplit:
    """Shares of P_tot, all light lost at both facets [1]; ``*_incident`` may exceed 1.

    ``front`` and ``rear`` leave the chip; ``absorbed`` stays in both coatings; ``scattered`` goes
    back into the chip outside the mode; ``front_incident`` and ``rear_incident`` are the powers
    that run onto the facets, over P_tot.
    """

    front: FloatArray
    rear: FloatArray
    absorbed: FloatArray
    scattered: FloatArray
    front_incident: FloatArray
    rear_incident: FloatArray

    @property
    def front_fraction(self) -> FloatArray:
        """Front light over all light that leaves; 0 where nothing leaves (two opaque facets)."""
        out = self.front + self.rear
        share: FloatArray = np.divide(self.front, out, out=np.zeros_like(out), where=out > 0.0)
        return share


def facet_split(front: FacetLight, rear: FacetLight) -> FacetSplit:
    """How the light lost at the facets divides, for any gain law and any axial field.

    P_j = P_tot T_j sqrt(R_k)/[(1 - R1) sqrt(R2) + (1 - R2) sqrt(R1)], k the other facet; A_j and
    S_j in place of T_j give what coating j absorbs and scatters. It follows from P+ P- being
    constant along the chip: the waves that meet the facets are as 1/sqrt(R1) to 1/sqrt(R2).
    Rigrod, J. Appl. Phys. 36, 2487 (1965) (from memory).

    Raises
    ------
    ArrayError
        A reflectance of zero, shapes that do not match, or two facets that both reflect all.
    """
    R1, T1, A1, S1, R2, T2, A2, S2 = same_shape(
        {f"front {n}": v for n, v in zip("RTAS", front.arrays(), strict=True)}
        | {f"rear {n}": v for n, v in zip("RTAS", rear.arrays(), strict=True)}
    )
    root1 = np.sqrt(reflectances("front R", R1))
    root2 = np.sqrt(reflectances("rear R", R2))
    bracket = (1.0 - R1) * root2 + (1.0 - R2) * root1
    if np.any(bracket <= 0.0):
        raise ArrayError(
            Problem("front R, rear R", "both are 1: no light is lost; give one facet below 1")
        )
    on1, on2 = root2 / bracket, root1 / bracket
    return FacetSplit(
        front=T1 * on1,
        rear=T2 * on2,
        absorbed=A1 * on1 + A2 * on2,
        scattered=S1 * on1 + S2 * on2,
        front_incident=on1,
        rear_incident=on2,
    )


def facet_output_MW_per_cm2(chip: LaserChip, *, front_W: Real) -> FloatArray | None:
    """Power density that leaves the front, P1/(emitters stripe h) [MW/cm2].

    h = int |E|^2 dx / max |E|^2 is ``chip.mode_height_um``; None where it is not given.

    Parameters
    ----------
    chip : the chip.
    front_W : front power of the bar, P1 [W].

    Raises
    ------
    ArrayError
        A power that is not finite.
    """
    power = numbers("front_W", front_W)
    if chip.facet_cm2 is None:
        return None
    return power * 1e-6 / chip.facet_cm2


def facet_load_MW_per_cm2(
    chip: LaserChip, *, front_incident_W: Real, R_front: Real
) -> FloatArray | None:
    """Density of the light inside the chip at the front, both directions [MW/cm2].

    P+ (1 + R)/(emitters stripe h) with P+ the light that runs onto the facet: the same as
    output (1 + R)/T, and finite for an opaque front. None where ``chip.mode_height_um`` is not
    given.

    Parameters
    ----------
    chip : the chip.
    front_incident_W : light that runs onto the front of the bar, P+ [W].
    R_front : reflectance of the front [1].

    Raises
    ------
    ArrayError
        A value that is not finite, or a reflectance of zero or above 1.
    """
    inside = numbers("front_incident_W", front_incident_W) * (
        1.0 + reflectances("R_front", R_front)
    )
    if chip.facet_cm2 is None:
        return None
    return inside * 1e-6 / chip.facet_cm2
