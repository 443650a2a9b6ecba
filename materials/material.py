"""A material: complex index over wavelength, with its source."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field

import numpy as np
from numpy.typing import ArrayLike

from materials.curves import Complexes, Curve, Floats
from materials.errors import MaterialError, OutOfRange
from materials.index import reaching
from materials.info import Info

Thermal = Callable[[float], "Material"]


@dataclass(frozen=True, eq=False)
class Material:
    """Optical constants of one material.

    The sign is that of n + i k with k >= 0 for a medium that absorbs.
    """

    info: Info
    curve: Curve = field(repr=False)
    thermal: Thermal | None = field(default=None, repr=False)
    edge: str = field(default="", repr=False)

    @property
    def name(self) -> str:
        """Name in recipes."""
        return self.info.name

    @property
    def range_nm(self) -> tuple[float, float]:
        """First and last wavelength [nm]."""
        return self.info.range_nm

    @property
    def k_known(self) -> bool:
        """False where k is not known and counts as zero."""
        return self.info.k_known

    def nk(self, wavelength_nm: ArrayLike) -> Complexes:
        """Complex index n + i k.

        Parameters
        ----------
        wavelength_nm : vacuum wavelengths [nm], any shape.

        Returns
        -------
        Array of the same shape, complex128; k >= 0 where the material absorbs.

        Raises
        ------
        OutOfRange
            for a wavelength outside ``range_nm``; nothing is extrapolated.
        MaterialError
            for a wavelength that is not a finite number.
        """
        return self._evaluate(self.curve.value, wavelength_nm)

    def slope(self, wavelength_nm: ArrayLike) -> Complexes:
        """Derivative of the complex index with respect to wavelength [1/nm]; raises as `nk`."""
        return self._evaluate(self.curve.slope, wavelength_nm)

    def group_index(self, wavelength_nm: ArrayLike) -> Floats:
        """Group index n - lambda dn/dlambda of the real part; raises as `nk`."""
        wavelength = np.asarray(wavelength_nm, dtype=np.float64)
        n = self.nk(wavelength).real
        return np.asarray(n - wavelength * self.slope(wavelength).real, dtype=np.float64)

    def _evaluate(
        self, function: Callable[[Floats], Complexes], wavelength: ArrayLike
    ) -> Complexes:
        asked = np.asarray(wavelength, dtype=np.float64)
        flat = asked.reshape(-1)
        self._check(flat)
        return function(flat).reshape(asked.shape)

    def _check(self, wavelength: Floats) -> None:
        low, high = self.range_nm
        if wavelength.size == 0 or (wavelength.min() >= low and wavelength.max() <= high):
            return
        if not np.isfinite(wavelength).all():
            raise MaterialError(f"{self.name}: a wavelength is not a finite number; give nm")
        beyond = float(wavelength[(wavelength < low) | (wavelength > high)][0])
        others = reaching(self.info.compound, beyond, but=self.name)
        raise OutOfRange(self.name, beyond, self.range_nm, others, self.edge)
