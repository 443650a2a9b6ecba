"""Synthetic spectra of chips below threshold."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.laser import FringeSpectrum

AT_NM = 976.0
SPACING_NM = 0.1


@dataclass(frozen=True)
class Chip:
    """x at the middle, how it falls to both sides (``gain``: -ln x rises by so much at the ends),
    slope and curve of ln I, and drift of the mode spacing (radians at the ends)."""

    x: float
    gain: float = 0.02
    slope: float = 0.5
    curve: float = -0.2
    drift: float = 0.0

    def intensity(self, wavelength_nm: np.ndarray, half_nm: float) -> np.ndarray:
        """Airy's shape over a slow curve."""
        u = (wavelength_nm - AT_NM) / half_nm
        wave = 1e7 / wavelength_nm
        period = SPACING_NM * 1e7 / AT_NM**2
        theta = 0.7 + 2.0 * np.pi * (wave - 1e7 / AT_NM) / period + self.drift * u**2
        x = self.x * np.exp(-self.gain * u**2)
        return np.exp(self.slope * u + self.curve * u**2) / (1.0 + x**2 - 2.0 * x * np.cos(theta))


def spectrum(
    chip: Chip,
    *,
    fringes: float,
    points: int,
    noise: float = 0.0,
    resolution_nm: float = 0.0,
    rng: np.random.Generator | None = None,
) -> FringeSpectrum:
    """What an instrument sees, its Gaussian line summed up point by point, with relative noise."""
    half = 0.5 * fringes * SPACING_NM
    wavelength = np.linspace(AT_NM - half, AT_NM + half, points)
    if resolution_nm > 0.0:
        sigma = resolution_nm / 2.3548200450309493
        offsets = np.linspace(-6.0, 6.0, 241) * sigma
        weights = np.exp(-0.5 * (offsets / sigma) ** 2)
        seen = sum(
            weight * chip.intensity(wavelength + offset, half)
            for weight, offset in zip(weights / weights.sum(), offsets, strict=True)
        )
    else:
        seen = chip.intensity(wavelength, half)
    if rng is not None:
        seen = seen * np.exp(noise * rng.standard_normal(points))
    return FringeSpectrum(wavelength, seen)
