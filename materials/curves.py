"""Complex index as a function of wavelength: the shapes that it can take.

Every curve answers ``value`` (n + i k) and ``slope`` (its derivative per nm) for an array of
wavelengths in nm. Curves check nothing: `Material` does that at the door.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Complexes = NDArray[np.complex128]


class Curve(Protocol):
    """What `Material` needs of a dispersion curve."""

    def value(self, wavelength_nm: Floats) -> Complexes:
        """Complex index n + i k."""
        ...

    def slope(self, wavelength_nm: Floats) -> Complexes:
        """Derivative of the complex index [1/nm]."""
        ...


@dataclass(frozen=True, eq=False)
class Constant:
    """The same index at every wavelength."""

    index: complex

    def value(self, wavelength_nm: Floats) -> Complexes:
        """Complex index n + i k."""
        return np.full(wavelength_nm.shape, self.index, dtype=np.complex128)

    def slope(self, wavelength_nm: Floats) -> Complexes:
        """Derivative [1/nm]: zero."""
        return np.zeros(wavelength_nm.shape, dtype=np.complex128)


@dataclass(frozen=True, eq=False)
class Tabulated:
    """Monotone cubic interpolation of a table (see `materials.interpolation`)."""

    wavelength_nm: Floats
    index: Complexes
    tangents: Complexes = field(repr=False)

    def _interval(self, wavelength_nm: Floats) -> NDArray[np.intp]:
        last = len(self.wavelength_nm) - 2
        return np.minimum(np.searchsorted(self.wavelength_nm, wavelength_nm, "right") - 1, last)

    def value(self, wavelength_nm: Floats) -> Complexes:
        """Complex index n + i k."""
        i = self._interval(wavelength_nm)
        width = self.wavelength_nm[i + 1] - self.wavelength_nm[i]
        t = (wavelength_nm - self.wavelength_nm[i]) / width
        s = 1.0 - t
        left = self.index[i] * (1.0 + 2.0 * t) + self.tangents[i] * (width * t)
        right = self.index[i + 1] * (1.0 + 2.0 * s) - self.tangents[i + 1] * (width * s)
        return np.asarray(left * (s * s) + right * (t * t), dtype=np.complex128)

    def slope(self, wavelength_nm: Floats) -> Complexes:
        """Derivative [1/nm] of the interpolating cubic."""
        i = self._interval(wavelength_nm)
        width = self.wavelength_nm[i + 1] - self.wavelength_nm[i]
        t = (wavelength_nm - self.wavelength_nm[i]) / width
        chord = (self.index[i + 1] - self.index[i]) / width
        return np.asarray(
            6.0 * t * (1.0 - t) * chord
            + self.tangents[i] * (1.0 - t) * (1.0 - 3.0 * t)
            + self.tangents[i + 1] * t * (3.0 * t - 2.0),
            dtype=np.complex128,
        )


@dataclass(frozen=True, eq=False)
class Scaled:
    """An index multiplied by a factor, k left alone: a film that is denser or less dense."""

    base: Curve
    factor: float

    def value(self, wavelength_nm: Floats) -> Complexes:
        """Complex index n + i k."""
        index = self.base.value(wavelength_nm)
        return np.asarray(self.factor * index.real + 1j * index.imag, dtype=np.complex128)

    def slope(self, wavelength_nm: Floats) -> Complexes:
        """Derivative [1/nm]."""
        slope = self.base.slope(wavelength_nm)
        return np.asarray(self.factor * slope.real + 1j * slope.imag, dtype=np.complex128)


@dataclass(frozen=True, eq=False)
class Sum:
    """The sum of two curves, the second times a weight: a table and its share of dn/dT."""

    base: Curve
    other: Curve
    weight: complex = 1.0

    def value(self, wavelength_nm: Floats) -> Complexes:
        """Complex index n + i k."""
        return self.base.value(wavelength_nm) + self.weight * self.other.value(wavelength_nm)

    def slope(self, wavelength_nm: Floats) -> Complexes:
        """Derivative [1/nm]."""
        return self.base.slope(wavelength_nm) + self.weight * self.other.slope(wavelength_nm)


@dataclass(frozen=True, eq=False)
class Window:
    """A curve inside its own range and zero outside: k where only part of it was measured."""

    base: Curve
    range_nm: tuple[float, float]

    def _inside(self, wavelength_nm: Floats) -> NDArray[np.bool_]:
        return (wavelength_nm >= self.range_nm[0]) & (wavelength_nm <= self.range_nm[1])

    def value(self, wavelength_nm: Floats) -> Complexes:
        """The curve's value, or zero."""
        inside = self._inside(wavelength_nm)
        result = np.zeros(wavelength_nm.shape, dtype=np.complex128)
        result[inside] = self.base.value(wavelength_nm[inside])
        return result

    def slope(self, wavelength_nm: Floats) -> Complexes:
        """The curve's derivative [1/nm], or zero."""
        inside = self._inside(wavelength_nm)
        result = np.zeros(wavelength_nm.shape, dtype=np.complex128)
        result[inside] = self.base.slope(wavelength_nm[inside])
        return result
