"""A reflector outside the front: a grating, a fibre end or a mirror that feeds light back.

In power, with c the one-way coupling, Re the reflector and R1' the front from outside:

    R = R1 + T1^2 c^2 Re/(1 - R1' c^2 Re).

This adds powers: it is the mean over the phase of the path outside, right where that path is long
against the coherence length or wanders by a wavelength. A coherent feedback moves between

    |r| = sqrt R1 +- T1 rho/(1 +- sqrt(R1') rho),   rho = c sqrt Re,

the signs together. That holds for a coating whose t^2 is opposite in phase to r r', as of every
lossless one; both ends are reported beside the mean.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.errors import ArrayError, InputError, Problem
from coatings.laser.checks import FloatArray, Real, numbers, out_of_range
from coatings.laser.chip import LaserChip
from coatings.laser.facets import FacetLight


@dataclass(frozen=True, kw_only=True)
class External:
    """The reflector: ``reflectance`` and one-way power ``coupling`` [1]; where it reflects.

    ``wavelength_nm`` is where it locks, ``band_nm`` where it reflects; both None means everywhere.

    Raises
    ------
    InputError
        A fraction outside 0 ... 1, or a band that does not rise or misses its wavelength.
    """

    reflectance: float
    coupling: float = 1.0
    wavelength_nm: float | None = None
    band_nm: tuple[float, float] | None = None

    def __post_init__(self) -> None:
        problems = [
            *out_of_range("external reflectance", self.reflectance, low=0.0, high=1.0),
            *out_of_range("external coupling", self.coupling, low=0.0, high=1.0),
            *out_of_range("external wavelength_nm", self.wavelength_nm, low=0.0, open_low=True),
            *self._wrong_band(),
        ]
        if problems:
            raise InputError(problems)

    def _wrong_band(self) -> list[Problem]:
        if self.band_nm is None:
            return []
        low, high = self.band_nm
        if not 0.0 < low < high < float("inf"):
            return [Problem("external band_nm", f"is {low:g} to {high:g}; give two rising values")]
        if self.wavelength_nm is not None and not low <= self.wavelength_nm <= high:
            where = f"{low:g} to {high:g} misses wavelength_nm = {self.wavelength_nm:g}"
            return [Problem("external band_nm", f"{where}; widen the band")]
        return []

    @property
    def everywhere(self) -> bool:
        """Whether it reflects at every wavelength alike."""
        return self.wavelength_nm is None and self.band_nm is None

    @property
    def fed_back(self) -> float:
        """Share of the light out of the front that comes back to it, c^2 Re."""
        return self.coupling**2 * self.reflectance

    def locked_nm(self, chip: LaserChip) -> float:
        """Wavelength that it holds: its own, its band's middle, or the chip's [nm]."""
        if self.wavelength_nm is not None:
            return self.wavelength_nm
        return chip.wavelength_nm if self.band_nm is None else 0.5 * sum(self.band_nm)


@dataclass(frozen=True)
class FedBackFacet:
    """Front and reflector taken as one facet.

    ``light``: the incoherent mean; its T is what passes the reflector, its A what the coating
    absorbs, its S all that is lost beside (coupling, scattering). ``R_least``, ``R_most``: the
    range of a coherent feedback.
    """

    light: FacetLight
    R_least: FloatArray
    R_most: FloatArray


def with_external(
    front: FacetLight, external: External, *, R_outside: Real | None = None
) -> FedBackFacet:
    """The front with a reflector before it, taken as one facet, where the reflector reflects.

    Parameters
    ----------
    front : the coated front alone; numbers or arrays.
    external : the reflector.
    R_outside : R1', the front's reflectance from outside [1]; R of the front when None, which is
        exact for a lossless coating and a plane wave.

    Raises
    ------
    ArrayError
        R_outside + T above 1, or a reflector and front that let no light out between them.
    """
    R, T, A, _ = front.arrays()
    outside = R if R_outside is None else numbers("R_outside", R_outside)
    if np.any(outside < 0.0) or np.any(outside + T > 1.0 + 1e-6):
        raise ArrayError(
            Problem("R_outside", "is negative or more than 1 - T; give the front's from outside")
        )
    back = external.fed_back
    trips = 1.0 - outside * back
    if np.any(trips <= 0.0):
        raise ArrayError(
            Problem("external", "front and reflector both reflect all; lower one of them")
        )
    mean = R + T**2 * back / trips
    passed = T * external.coupling * (1.0 - external.reflectance) / trips
    absorbed = A + T * back * (1.0 - outside - T) / trips
    light = FacetLight(R=mean, T=passed, A=absorbed, S=1.0 - mean - passed - absorbed)
    least, most = _coherent_range(R, T, outside, np.sqrt(back))
    return FedBackFacet(light, least, most)


def _coherent_range(
    R: FloatArray, T: FloatArray, R_outside: FloatArray, rho: float
) -> tuple[FloatArray, FloatArray]:
    """Least and most power reflectance over the phase of the path outside."""
    most = (np.sqrt(R) + T * rho / (1.0 + np.sqrt(R_outside) * rho)) ** 2
    least = (np.sqrt(R) - T * rho / (1.0 - np.sqrt(R_outside) * rho)) ** 2
    # Where the feedback outweighs the front, r circles the origin and the ends change places.
    return np.minimum(least, most), np.maximum(least, most)
