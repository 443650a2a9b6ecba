"""Materials that are not in the library: a recipe's own numbers, and what is made of others."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from materials.curves import Complexes, Constant, Curve, Floats, Scaled, Sum
from materials.dispersion import Closed
from materials.dispersion import cauchy as cauchy_formula
from materials.errors import MaterialError, TemperatureError
from materials.info import Info
from materials.material import Material

#: Range of an index given as a number: the user vouches for it.
ANYWHERE_NM = (100.0, 100000.0)
_OWN = "the recipe"


def own_info(name: str, kind: str, sample: str, k_status: str) -> Info:
    """Provenance of a recipe's own numbers."""
    return Info(
        name=name,
        use="own",
        kind=kind,
        compound=name,
        common=name,
        sample=sample,
        process="as the recipe's author knows",
        temperature_C=None,
        range_nm=ANYWHERE_NM,
        k_status=k_status,
        accuracy=None,
        source=_OWN,
        doi=None,
        year=None,
    )


def constant(name: str, n: float, k: float = 0.0) -> Material:
    """Material of one complex index n + i k at every wavelength."""
    _check_index(name, n, k)
    info = own_info(name, "constant", f"index {n:g}, k {k:g} at every wavelength", "measured")
    return Material(info, Constant(complex(n, k)))


def cauchy(name: str, coefficients: Sequence[float], k: float = 0.0) -> Material:
    """Material with n = A + B/lambda^2 + C/lambda^4 + ... (lambda in um) and one k.

    Parameters
    ----------
    coefficients : A, B [um^2], C [um^4], ...; one or more.
    k : extinction coefficient at every wavelength.
    """
    if not len(coefficients):
        raise MaterialError(f"{name}: cauchy needs one coefficient or more: A, B, C")
    if not all(math.isfinite(c) for c in coefficients):
        raise MaterialError(f"{name}: a cauchy coefficient is not a finite number")
    _check_index(name, coefficients[0], k)
    groups = (
        (float(coefficients[0]),),
        *((float(c), -2.0 * i) for i, c in enumerate(coefficients[1:], start=1)),
    )
    text = ", ".join(f"{c:g}" for c in coefficients)
    info = own_info(name, "formula", f"Cauchy coefficients {text} (um), k {k:g}", "measured")
    curve: Curve = Closed(cauchy_formula, groups)
    return Material(info, Sum(curve, Constant(complex(0.0, k))))


def scaled(material: Material, *, factor: float, name: str | None = None) -> Material:
    """A material with its n multiplied by a factor; k stays."""
    if not (math.isfinite(factor) and factor > 0.0):
        raise MaterialError(f"{material.name}: the scale {factor:g} must be a positive number")
    note = f"n of {material.name} times {factor:g}. {material.info.notes}".strip()
    info = replace(material.info, name=name or material.name, notes=note)
    thermal = material.thermal
    warm = None if thermal is None else (lambda t: scaled(thermal(t), factor=factor))
    return Material(info, Scaled(material.curve, factor), warm, material.edge)


def at_temperature(material: Material, *, celsius: float, name: str | None = None) -> Material:
    """The same material at another temperature [deg C], where a source gives dn/dT.

    k stays as at the temperature of the table; the range of an alloy moves with its gap.

    Raises
    ------
    TemperatureError
        where no source gives dn/dT, or outside the temperatures that it covers.
    """
    info = material.info
    known = f"{info.temperature_C:g} deg C" if info.temperature_C is not None else "not stated"
    if material.thermal is None or info.thermal_C is None:
        raise TemperatureError(
            f"{material.name}: no source in the library gives dn/dT; "
            f"its index holds at the temperature of the table ({known})"
        )
    low, high = info.thermal_C
    if not low <= celsius <= high:
        raise TemperatureError(
            f"{material.name}: dn/dT is known from {low:g} to {high:g} deg C, not at {celsius:g}"
        )
    warmed = material.thermal(float(celsius))
    return replace(warmed, info=replace(warmed.info, name=name or material.name))


@dataclass(frozen=True, eq=False)
class Bruggeman:
    """Effective index of two media, both as inclusions in the mixture itself.

    f1 (e1 - e)/(e1 + 2 e) + f2 (e2 - e)/(e2 + 2 e) = 0, that is
    2 e^2 - b e - e1 e2 = 0 with b = (3 f1 - 1) e1 + (3 f2 - 1) e2. With z = e/sqrt(e1 e2) the
    product of the two roots is -1/2: one of them has a positive real part, and it is the
    physical one (G. E. Jansson, H. Arwin, Opt. Commun. 106, 133 (1994); from memory).
    """

    first: Curve
    second: Curve
    fraction: float

    def _shares(self) -> tuple[float, float]:
        return 2.0 - 3.0 * self.fraction, 3.0 * self.fraction - 1.0

    def _square(self, n1: Complexes, n2: Complexes) -> Complexes:
        b1, b2 = self._shares()
        ratio = n1 / n2
        beta = b1 * ratio + b2 / ratio
        root = np.sqrt(beta * beta + 8.0)
        root = np.where((beta + root).real > 0.0, root, -root)
        return np.asarray(0.25 * (beta + root) * n1 * n2, dtype=np.complex128)

    def value(self, wavelength_nm: Floats) -> Complexes:
        """Complex index n + i k."""
        n1, n2 = self.first.value(wavelength_nm), self.second.value(wavelength_nm)
        return np.asarray(np.sqrt(self._square(n1, n2)), dtype=np.complex128)

    def slope(self, wavelength_nm: Floats) -> Complexes:
        """Derivative [1/nm], from the implicit equation."""
        n1, n2 = self.first.value(wavelength_nm), self.second.value(wavelength_nm)
        e, e1, e2 = self._square(n1, n2), n1 * n1, n2 * n2
        d1 = 2.0 * n1 * self.first.slope(wavelength_nm)
        d2 = 2.0 * n2 * self.second.slope(wavelength_nm)
        b1, b2 = self._shares()
        de = ((b1 * d1 + b2 * d2) * e + d1 * e2 + e1 * d2) / (4.0 * e - b1 * e1 - b2 * e2)
        return np.asarray(de / (2.0 * np.sqrt(e)), dtype=np.complex128)


def mixture(name: str, first: Material, second: Material, *, fraction: float) -> Material:
    """Homogeneous mixture of two materials, by Bruggeman's effective medium.

    Parameters
    ----------
    fraction : share of the volume that is the second material, 0 to 1.

    References
    ----------
    D. A. G. Bruggeman, Ann. Phys. 416, 636-664 (1935), doi:10.1002/andp.19354160705.
    """
    if not 0.0 <= fraction <= 1.0:
        raise MaterialError(f"{name}: the fraction {fraction:g} must lie between 0 and 1")
    low = max(first.range_nm[0], second.range_nm[0])
    high = min(first.range_nm[1], second.range_nm[1])
    if not low < high:
        raise MaterialError(f"{name}: {first.name} and {second.name} have no common range")
    known = first.k_known and second.k_known
    info = Info(
        name=name,
        use="film",
        kind="mixture",
        compound=name,
        common=name,
        sample=f"{first.name} with {100 * fraction:g} % by volume of {second.name}",
        process="computed by Bruggeman's effective medium",
        temperature_C=first.info.temperature_C,
        range_nm=(low, high),
        k_status="model" if known else "unknown",
        accuracy=None,
        source=f"{first.name}: {first.info.source} {second.name}: {second.info.source}",
        doi=None,
        year=None,
    )
    return Material(info, Bruggeman(first.curve, second.curve, fraction))


def _check_index(name: str, n: float, k: float) -> None:
    if not (math.isfinite(n) and n > 0.0):
        raise MaterialError(f"{name}: index {n:g} must be a positive number")
    if not (math.isfinite(k) and k >= 0.0):
        raise MaterialError(f"{name}: k {k:g} must be zero or more; below zero means gain")
