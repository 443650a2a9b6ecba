"""Where a search begins: quarter waves, exact solutions, equal thicknesses, chance.

The exact solutions use that a lossless layer turns the reflection seen inside it by exp(2 i delta)
and leaves its modulus alone. Everything between chip and that layer is a bilinear map of it,

    r = (a rho e^{i phi} + b) / (c rho e^{i phi} + d),

so |r|^2 = R is linear in cos(phi) and sin(phi) and has two solutions or none. With one layer this is
the exact one-layer coating; with the outer layers given it closes any stack exactly at one
wavelength (for two layers a one-parameter family that holds every V-coat).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from coatings.design.limits import RunLimits
from coatings.design.model import FacetModel
from coatings.design.windows import Goal
from coatings.facets import FloatArray, IntArray

ComplexArray = NDArray[np.complex128]

MOST_SPOTS = 3  # windows for which stacks are closed exactly
MOST_VARIED = 4  # layers at either end of a quarter-wave stack that are varied one by one


@dataclass(frozen=True)
class OneWavelength:
    """Real film indices (M,), incident and outside index, and the reflectance wanted at one wavelength."""

    wavelength_nm: float
    incident: complex
    outside: complex
    films: FloatArray
    reflectance: float

    @classmethod
    def of_window(cls, goal: Goal, members: IntArray) -> OneWavelength:
        """The middle of a window whose points are ``members``, wanting the middle of two bounds, a
        quarter of a ceiling alone or half-way from a floor alone to 1: what no layer can close is of
        no use, and R = 0 or 1 is closed at single thicknesses only."""
        p = int(members[len(members) // 2])
        low, high = float(goal.low[p]), float(goal.high[p])
        wanted = 0.5 * (low + high) if low > 0.0 else 0.25 * high
        scene = goal.scene
        return cls(
            wavelength_nm=float(scene.wavelength_nm[p]),
            incident=complex(scene.incident[p]),
            outside=complex(scene.outside[p]),
            films=scene.films[:, p].real.copy(),
            reflectance=wanted,
        )

    def quarter_nm(self, film: IntArray) -> FloatArray:
        """Quarter-wave thickness (L,) [nm] of each layer."""
        quarter: FloatArray = self.wavelength_nm / (4.0 * self.films[film])
        return quarter


def spots(goal: Goal) -> list[OneWavelength]:
    """One spot a window, for at most `MOST_SPOTS` windows; windows on the reflectance come first."""
    members = goal.window_members()
    on_R = [m for m in members if goal.bounded[m[0]]]
    return [OneWavelength.of_window(goal, m) for m in (on_R or members)[:MOST_SPOTS]]


def quarter_waves(spot: OneWavelength, *, film: IntArray) -> FloatArray:
    """Quarter waves and their variants (S, L) [nm]: all three quarters; one layer halved, doubled or
    half a wave thicker, at most `MOST_VARIED` layers at either end."""
    quarter = spot.quarter_nm(film)
    count = len(film)
    rows = [quarter, 3.0 * quarter]
    for j in range(count):
        if min(j, count - 1 - j) >= MOST_VARIED:
            continue
        for factor in (0.5, 2.0, 3.0):
            row = quarter.copy()
            row[j] *= factor
            rows.append(row)
    return np.array(rows)


def equal_thicknesses(spot: OneWavelength, *, film: IntArray, steps: int = 24) -> FloatArray:
    """Layers of one optical thickness, from 0.03 to 1 wave (S, L) [nm]."""
    waves = np.linspace(0.03, 1.0, steps)
    return waves[:, None] * 4.0 * spot.quarter_nm(film)[None, :]


def random_thicknesses(
    limits: RunLimits, *, film: IntArray, count: int, generator: np.random.Generator
) -> FloatArray:
    """Thicknesses (count, L) [nm] spread evenly over all that the run can hold."""
    low, high = limits.bounds(film)
    return limits.inside(generator.uniform(low, high, (count, len(film))), film=film)


def closed_by_first_layer(
    spot: OneWavelength, model: FacetModel, nm: FloatArray, *, film: IntArray
) -> FloatArray:
    """Stacks (S, L) [nm] with the first searched layer set so that R is met exactly at one wavelength.

    Both solutions of every stack that has them, each also one and two half waves thicker; stacks
    without a solution are left out, so the result has its own number of rows.
    """
    n = spot.films[film[0]]
    rho = _inward_reflection(spot, model, nm, film)
    a, b, c, d = _bilinear(spot, model, n)
    phases = _closing_phases(rho, (a, b, c, d), spot.reflectance)
    half_wave = spot.wavelength_nm / (2.0 * n)
    closed = []
    for phase in phases:
        found = np.isfinite(phase)
        thickness = np.mod(phase[found] - np.angle(rho[found]), 2 * np.pi) / (2 * np.pi) * half_wave
        for extra in range(3):
            row = nm[found].copy()
            row[:, 0] = thickness + extra * half_wave
            closed.append(row)
    return np.concatenate(closed)


def _closing_phases(
    rho: ComplexArray, bilinear: tuple[complex, complex, complex, complex], R: float
) -> tuple[FloatArray, FloatArray]:
    """Both phases of rho e^{i phi} with |r|^2 = R, nan where there is none."""
    a, b, c, d = bilinear
    modulus = np.abs(rho)
    constant = (abs(a) ** 2 - R * abs(c) ** 2) * modulus**2 + abs(b) ** 2 - R * abs(d) ** 2
    slant = 2.0 * modulus * (a * np.conj(b) - R * c * np.conj(d))
    with np.errstate(invalid="ignore", divide="ignore"):
        half = np.arccos(np.where(np.abs(slant) > 0, -constant / np.abs(slant), np.nan))
    return half - np.angle(slant), -half - np.angle(slant)


def _inward_reflection(
    spot: OneWavelength, model: FacetModel, nm: FloatArray, film: IntArray
) -> ComplexArray:
    """Reflection seen inside the first searched layer at its outer face (S,)."""
    frame = model.frame
    admittance = np.full(len(nm), spot.outside, dtype=complex)
    outer = [
        (spot.films[row], np.full(len(nm), t))
        for row, t in zip(frame.cap_film, frame.cap_nm, strict=True)
    ]
    inner = [(spot.films[row], nm[:, j]) for j, row in enumerate(film) if j > 0]
    for n, thickness in reversed(inner + outer):
        admittance = _through(admittance, n, 2 * np.pi * n * thickness / spot.wavelength_nm)
    n = spot.films[film[0]]
    reflection: ComplexArray = (n - admittance) / (n + admittance)
    return reflection


def _through(admittance: ComplexArray, n: float, delta: FloatArray) -> ComplexArray:
    cos, sin = np.cos(delta), np.sin(delta)
    seen: ComplexArray = (admittance * cos - 1j * n * sin) / (cos - 1j * admittance * sin / n)
    return seen


def _bilinear(
    spot: OneWavelength, model: FacetModel, n: float
) -> tuple[complex, complex, complex, complex]:
    """(a, b, c, d) of r as a map of the reflection at the inner face of the first searched layer."""
    # Admittance there is n (1 - rho)/(1 + rho): B and C before it are [1 + rho, n (1 - rho)].
    matrix = np.array([[1.0, 1.0], [-n, n]], dtype=complex)
    frame = model.frame
    for row, thickness in reversed(list(zip(frame.base_film, frame.base_nm, strict=True))):
        index = spot.films[row]
        delta = 2 * np.pi * index * thickness / spot.wavelength_nm
        layer = np.array(
            [
                [np.cos(delta), -1j * np.sin(delta) / index],
                [-1j * index * np.sin(delta), np.cos(delta)],
            ]
        )
        matrix = layer @ matrix
    top = spot.incident * matrix[0] - matrix[1]
    bottom = spot.incident * matrix[0] + matrix[1]
    return complex(top[0]), complex(top[1]), complex(bottom[0]), complex(bottom[1])
