"""Whether an external reflector holds the chip to its wavelength.

The chip's own resonances compete where the reflector does not reflect: at the gain peak or, when
that lies in the reflector's band, at the band's nearer edge. The mode whose threshold asks less of
the medium wins. With s the gain over that at the chip's wavelength of operation:

    margin = [a_i + ln(1/(R1 R2))/(2 L)]/s, rival, - [a_i + ln(1/(R R2))/(2 L)]/s, locked,

and the chip is locked where it is positive. R is the front with the reflector, powers added.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.errors import ArrayError, Problem
from coatings.laser.checks import FloatArray, Real
from coatings.laser.chip import LaserChip
from coatings.laser.estimate import LaserEstimate, estimate
from coatings.laser.external import External, with_external
from coatings.laser.facets import FacetLight
from coatings.laser.threshold import gain_shape, mirror_loss_per_cm

_LOWEST_R = 1e-12
# Just below 1, where even a perfect reflector leaves a way out between the two.
_HIGHEST_LOG_R = -1e-9


def rival_nm(chip: LaserChip, external: External) -> float | None:
    """Wavelength of the chip's own resonance that competes with the reflector [nm].

    The gain peak (the wavelength of operation without one) when it lies outside the reflector's
    band, else the nearer edge of the band; None when the reflector reflects everywhere.
    """
    if external.everywhere:
        return None
    peak = chip.wavelength_nm if chip.gain_peak_nm is None else chip.gain_peak_nm
    if external.band_nm is None:
        return peak
    low, high = external.band_nm
    if not low <= peak <= high:
        return peak
    return low if peak - low <= high - peak else high


def locking_margin_per_cm(
    chip: LaserChip,
    *,
    R_locked: Real,
    R_rival: Real,
    R_rear: Real,
    locked_nm: float,
    rival_nm: float,
) -> FloatArray:
    """Gain margin of the locked wavelength over the chip's own resonance [1/cm]; positive locks.

    Parameters
    ----------
    chip : the chip; with gain peak and width the gain's shape counts.
    R_locked : front with the reflector at ``locked_nm`` [1].
    R_rival : front alone at ``rival_nm`` [1].
    R_rear : rear, at both [1].
    locked_nm, rival_nm : the two wavelengths [nm].

    Raises
    ------
    ArrayError
        A reflectance of zero, or a locked wavelength where the medium has no gain.
    """
    s_locked = float(gain_shape(chip, wavelength_nm=locked_nm))
    s_rival = float(gain_shape(chip, wavelength_nm=rival_nm))
    if s_locked <= 0.0:
        raise ArrayError(
            Problem("locked_nm", f"the medium has no gain at {locked_nm:g} nm; move the reflector")
        )
    locked = mirror_loss_per_cm(R_locked, R_rear, length_um=chip.length_um)
    own = mirror_loss_per_cm(R_rival, R_rear, length_um=chip.length_um)
    ahead = (chip.internal_loss_per_cm + locked) / s_locked
    if s_rival <= 0.0:
        return np.full_like(ahead, np.inf)
    margin: FloatArray = (chip.internal_loss_per_cm + own) / s_rival - ahead
    return margin


def highest_locking_R(
    chip: LaserChip, external: External, *, R_rear: float, detuning_nm: float | None = None
) -> float | None:
    """Highest front reflectance at which the reflector still holds the chip.

    The front is lossless and the same at both wavelengths: T = 1 - R, R1' = R.

    Parameters
    ----------
    chip : the chip.
    external : the reflector.
    R_rear : rear reflectance [1].
    detuning_nm : reflector less rival wavelength [nm]; as the recipe has it when None.

    Returns
    -------
    R [1]; 1.0 where every front locks; None where none does, or nothing competes.

    Raises
    ------
    ArrayError
        A locked wavelength where the medium has no gain, a rear without feedback.
    """
    from scipy.optimize import brentq

    rival = rival_nm(chip, external)
    if rival is None or external.fed_back == 0.0:
        return None
    locked = external.locked_nm(chip) if detuning_nm is None else rival + detuning_nm

    def margin(log_R: float) -> float:
        front = FacetLight.lossless(np.exp(log_R))
        return float(
            locking_margin_per_cm(
                chip,
                R_locked=with_external(front, external).light.R,
                R_rival=front.R,
                R_rear=R_rear,
                locked_nm=locked,
                rival_nm=rival,
            )
        )

    lowest = float(np.log(_LOWEST_R))
    if margin(lowest) <= 0.0:
        return None
    # Near R = 1 the reflector is hidden: the rival wins there unless its gain is the smaller.
    if margin(_HIGHEST_LOG_R) >= 0.0:
        return 1.0
    return float(np.exp(brentq(margin, lowest, _HIGHEST_LOG_R, xtol=1e-12)))


@dataclass(frozen=True)
class ExternalEstimate:
    """The laser with its reflector.

    ``laser`` holds the figures with front and reflector as one facet: its front power is that
    beyond the reflector. ``R_least``, ``R_most``: the range under coherent feedback.
    ``locking_margin_per_cm`` and ``R_front_locks_below`` are None where nothing competes or
    nothing locks.
    """

    laser: LaserEstimate
    R_effective: float
    R_least: float
    R_most: float
    locked_nm: float
    rival_nm: float | None
    locking_margin_per_cm: float | None
    R_front_locks_below: float | None

    @property
    def locks(self) -> bool | None:
        """Whether the locked wavelength wins; None where nothing competes."""
        if self.locking_margin_per_cm is None:
            return None
        return self.locking_margin_per_cm > 0.0

    def to_json_dict(self) -> dict[str, float | bool | None]:
        """Plain figures by name."""
        margin = self.locking_margin_per_cm
        return {
            "R_effective": self.R_effective,
            "R_least": self.R_least,
            "R_most": self.R_most,
            "locked_nm": self.locked_nm,
            "rival_nm": self.rival_nm,
            "locking_margin_per_cm": margin if margin is None or np.isfinite(margin) else None,
            "locks": self.locks,
            "R_front_locks_below": self.R_front_locks_below,
            "threshold_A": self.laser.threshold_A,
            "front_W": self.laser.front_W,
            "rear_W": self.laser.rear_W,
        }


def estimate_external(
    chip: LaserChip,
    front: FacetLight,
    rear: FacetLight,
    *,
    external: External,
    drive_A: float | None = None,
    R_rival: float | None = None,
    R_outside: float | None = None,
) -> ExternalEstimate:
    """Threshold, power and locking of a chip with a reflector before its front.

    Parameters
    ----------
    chip : the chip; its gain law is taken at the wavelength of operation.
    front, rear : the facets alone at the locked wavelength; plain numbers.
    external : the reflector.
    drive_A : current of the bar [A]; ``chip.drive_A`` when None.
    R_rival : front alone at the rival's wavelength [1]; as at the locked one when None.
    R_outside : the front from outside [1]; its R when None.

    Raises
    ------
    ArrayError
        As ``estimate`` and ``with_external``.
    """
    both = with_external(front, external, R_outside=R_outside)
    laser = estimate(chip, both.light, rear, drive_A=drive_A)
    rival, locked = rival_nm(chip, external), external.locked_nm(chip)
    margin = None
    if rival is not None:
        own = front.R if R_rival is None else R_rival
        margin = float(
            locking_margin_per_cm(
                chip,
                R_locked=both.light.R,
                R_rival=own,
                R_rear=rear.R,
                locked_nm=locked,
                rival_nm=rival,
            )
        )
    return ExternalEstimate(
        laser=laser,
        R_effective=float(both.light.R),
        R_least=float(both.R_least),
        R_most=float(both.R_most),
        locked_nm=locked,
        rival_nm=rival,
        locking_margin_per_cm=margin,
        R_front_locks_below=highest_locking_R(chip, external, R_rear=float(rear.R)),
    )
