"""Closed dispersion formulas, evaluated with the coefficients that the papers print.

Wavelengths lambda in um inside the formulas. Every formula returns n and dn/dlambda per um.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from materials.curves import Complexes, Floats
from materials.errors import TableError

Groups = tuple[tuple[float, ...], ...]
Formula = Callable[[Groups, Floats], tuple[Floats, Floats]]


@dataclass(frozen=True, eq=False)
class Closed:
    """n by a closed formula, k = 0."""

    formula: Formula
    groups: Groups

    def value(self, wavelength_nm: Floats) -> Complexes:
        """Complex index n + 0i."""
        n, _ = self.formula(self.groups, 1e-3 * wavelength_nm)
        return n.astype(np.complex128)

    def slope(self, wavelength_nm: Floats) -> Complexes:
        """Derivative [1/nm]."""
        _, slope = self.formula(self.groups, 1e-3 * wavelength_nm)
        return np.asarray(1e-3 * slope, dtype=np.complex128)


def _root(square: Floats, slope: Floats) -> tuple[Floats, Floats]:
    n = np.sqrt(square)
    return n, slope / (2.0 * n)


def sellmeier(groups: Groups, um: Floats) -> tuple[Floats, Floats]:
    """n^2 = c + sum B lambda^2/(lambda^2 - C^2); groups (c,), then (B, C [um])."""
    return sellmeier_squared((groups[0], *((b, c * c) for b, c in groups[1:])), um)


def sellmeier_squared(groups: Groups, um: Floats) -> tuple[Floats, Floats]:
    """n^2 = c + sum B lambda^2/(lambda^2 - D); groups (c,), then (B, D [um^2])."""
    square, slope = np.full_like(um, groups[0][0]), np.zeros_like(um)
    for strength, pole in groups[1:]:
        gap = um * um - pole
        square += strength * um * um / gap
        slope -= 2.0 * strength * pole * um / gap**2
    return _root(square, slope)


def poles_and_powers(groups: Groups, um: Floats) -> tuple[Floats, Floats]:
    """n^2 = c + sum B/(lambda^2 - D) + sum a lambda^p.

    Groups (c,), then (B, D [um^2], -) of length 3 for poles and (a, p) of length 2 for powers.
    """
    square, slope = np.full_like(um, groups[0][0]), np.zeros_like(um)
    for group in groups[1:]:
        if len(group) == 3:
            gap = um * um - group[1]
            square += group[0] / gap
            slope -= 2.0 * group[0] * um / gap**2
        else:
            square += group[0] * um ** group[1]
            slope += group[0] * group[1] * um ** (group[1] - 1.0)
    return _root(square, slope)


def cauchy(groups: Groups, um: Floats) -> tuple[Floats, Floats]:
    """n = c + sum a lambda^p; groups (c,), then (a, p)."""
    n, slope = np.full_like(um, groups[0][0]), np.zeros_like(um)
    for factor, power in groups[1:]:
        n += factor * um**power
        slope += factor * power * um ** (power - 1.0)
    return n, slope


def gas(groups: Groups, um: Floats) -> tuple[Floats, Floats]:
    """n - 1 = c + sum B/(C - lambda^-2); groups (c,), then (B [um^-2], C [um^-2])."""
    n, slope = np.full_like(um, 1.0 + groups[0][0]), np.zeros_like(um)
    for strength, pole in groups[1:]:
        gap = pole - um**-2.0
        n += strength / gap
        slope -= strength * 2.0 * um**-3.0 / gap**2
    return n, slope


FORMULAS: dict[str, Formula] = {
    "sellmeier": sellmeier,
    "sellmeier-squared": sellmeier_squared,
    "poles-and-powers": poles_and_powers,
    "cauchy": cauchy,
    "gas": gas,
}


def closed(formula: str, coefficients: str, where: str) -> Closed:
    """Curve from the head of an entry: name of the formula and 'c; B C; B C; ...'."""
    if formula not in FORMULAS:
        raise TableError(where, f"no formula {formula!r}; there are {', '.join(FORMULAS)}")
    try:
        groups = tuple(
            tuple(float(number) for number in group.split()) for group in coefficients.split(";")
        )
    except ValueError:
        raise TableError(where, f"the coefficients {coefficients!r} are not numbers") from None
    lengths = (2, 3) if formula == "poles-and-powers" else (2,)
    if len(groups[0]) != 1 or any(len(group) not in lengths for group in groups[1:]):
        raise TableError(where, "the coefficients must read 'c; B C; B C; ...'")
    return Closed(FORMULAS[formula], groups)
