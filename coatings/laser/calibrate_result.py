"""What a calibration found: four parameters with their errors, and the words that go with them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from coatings.errors import InputError, Problem
from coatings.laser.calibrate_model import Fitted, Points
from coatings.laser.calibrate_outliers import LeftOut, Outlier
from coatings.laser.checks import FloatArray
from coatings.laser.student import half_width

NAMES = (
    "internal_loss_per_cm",
    "injection_efficiency",
    "transparency_A_per_cm2",
    "modal_gain_per_cm",
)
_BEYOND_SIGMAS = 2.0
_ROUND_OFF = 1e-9


@dataclass(frozen=True)
class Quantity:
    """A parameter with its standard error; ``sigma``, ``low`` and ``high`` (95 %, Student's t
    with ``degrees`` of freedom) are None where no chip is left over to show the scatter."""

    value: float
    sigma: float | None
    degrees: float
    low: float | None
    high: float | None

    def __str__(self) -> str:
        spread = "" if self.sigma is None else f" +- {self.sigma:.2g}"
        return f"{self.value:.4g}{spread}"


@dataclass(frozen=True, eq=False)
class Calibration:
    """Laser parameters of a kind of chip.

    Attributes
    ----------
    internal_loss_per_cm, injection_efficiency, transparency_A_per_cm2, modal_gain_per_cm :
        from the joint fit. The power meter's own scale is not in the efficiency's sigma.
    covariance : of these four in this order, shape (4, 4); NaN without spare chips.
    by_lines : the same four by the two straight lines.
    with_all : the joint fit of all chips where outliers were left out, else None.
    slope_scatter, threshold_scatter : relative standard deviation chip to chip [1]; NaN unknown.
    correlation : of the two, chip by chip [1].
    outliers : chips that the fit leaves out (or, asked to keep them, that it keeps).
    lengths : the fit without each length in turn.
    points : the reduced measurements of all chips; ``used`` : mask of those in the fit.
    parameters : (a_i, ln eta_i, ln Jtr, ln G0) of the fit, for ``calibrate_model.expected``.
    notes : sentences for the reader.
    """

    internal_loss_per_cm: Quantity
    injection_efficiency: Quantity
    transparency_A_per_cm2: Quantity
    modal_gain_per_cm: Quantity
    covariance: FloatArray
    by_lines: tuple[Quantity, ...]
    with_all: tuple[Quantity, ...] | None
    slope_scatter: float
    threshold_scatter: float
    correlation: float
    outliers: tuple[Outlier, ...]
    lengths: tuple[LeftOut, ...]
    points: Points
    used: NDArray[np.bool_]
    parameters: FloatArray
    notes: tuple[str, ...]

    @property
    def quantities(self) -> tuple[Quantity, ...]:
        """The four parameters in the order of ``NAMES``."""
        return tuple(getattr(self, name) for name in NAMES)

    def to_json_dict(self) -> dict[str, dict[str, float | None]]:
        """Value and sigma by name; a sigma that is not known is None."""
        return {
            name: {"value": quantity.value, "sigma": quantity.sigma}
            for name, quantity in zip(NAMES, self.quantities, strict=True)
        }

    def laser_section(self) -> str:
        """A [laser] section to paste into a recipe; digits to a hundredth of sigma.

        A value that scatter has carried past what a recipe takes (a loss a little below zero, an
        efficiency a little above one) is written as the bound, with the value found beside it.
        """
        lines = ["[laser]", f'gain_law = "{self.points.law.value}"']
        for name, quantity in zip(NAMES, self.quantities, strict=True):
            value = quantity.value
            bound = bound_of(name, value)
            written = value if bound is None else bound
            found = f"+- {quantity.sigma:.2g}" if quantity.sigma is not None else "spread unknown"
            if bound is not None:
                found = f"found {value:.3g} {found}; {bound:g} is the bound"
            lines.append(f"{name} = {_digits(written, quantity.sigma)}  # {found}")
        return "\n".join(lines) + "\n"


def quantities(fit: Fitted) -> tuple[Quantity, Quantity, Quantity, Quantity]:
    """The four parameters of a fit in their own units, with standard errors and intervals."""
    values, degrees = natural(fit.parameters), fit.degrees()
    sigmas = np.sqrt(np.diagonal(natural_covariance(fit)))
    loss, efficiency, transparency, gain = (
        _quantity(float(value), float(sigma), float(dof))
        for value, sigma, dof in zip(values, sigmas, degrees, strict=True)
    )
    return loss, efficiency, transparency, gain


def natural(p: FloatArray) -> FloatArray:
    """(a_i, eta_i, Jtr, G0) of p = (a_i, ln eta_i, ln Jtr, ln G0)."""
    return np.concatenate([p[:1], np.exp(p[1:])])


def natural_covariance(fit: Fitted) -> FloatArray:
    """Covariance of (a_i, eta_i, Jtr, G0), shape (4, 4)."""
    scale = np.concatenate([[1.0], np.exp(fit.parameters[1:])])
    covariance: FloatArray = fit.covariance * np.outer(scale, scale)
    return covariance


def _quantity(value: float, sigma: float, degrees: float) -> Quantity:
    if not np.isfinite(sigma):
        return Quantity(value, None, 0.0, None, None)
    reach = half_width(sigma, degrees)
    return Quantity(value, sigma, degrees, value - reach, value + reach)


def refuse_unphysical(found: tuple[Quantity, ...]) -> None:
    """InputError where loss or efficiency lies outside what is possible beyond its scatter."""
    loss, efficiency = found[0], found[1]
    problems = []
    if loss.value < -_ROUND_OFF - _BEYOND_SIGMAS * (loss.sigma or 0.0):
        problems.append(
            Problem(
                "slope_W_per_A",
                f"rises with length, so the internal loss would be negative ({loss} /cm), which "
                "no chip has; check that slopes and lengths belong together and that the slope "
                "counts both facets on every chip",
            )
        )
    if efficiency.value > 1.0 + _ROUND_OFF + _BEYOND_SIGMAS * (efficiency.sigma or 0.0):
        problems.append(
            Problem(
                "slope_W_per_A",
                f"gives an injection efficiency of {efficiency}: more than one photon an electron "
                "and stage; check the power meter, whether the slope is of one facet or both, and "
                "chip.wavelength_nm",
            )
        )
    if problems:
        raise InputError(problems)


def bound_of(name: str, value: float) -> float | None:
    """The bound that a parameter has passed; None where it is possible as it is."""
    if name == "internal_loss_per_cm" and value < 0.0:
        return 0.0
    if name == "injection_efficiency" and value > 1.0:
        return 1.0
    return None


def calibration_notes(
    found: tuple[Quantity, ...],
    outliers: tuple[Outlier, ...],
    lengths: tuple[LeftOut, ...],
    *,
    kept: bool,
) -> tuple[str, ...]:
    """What a reader of the parameters has to know, in sentences."""
    notes = [f"Outlier {'kept' if kept else 'left out'}: {outlier}." for outlier in outliers]
    for name, quantity in zip(NAMES, found, strict=True):
        bound = bound_of(name, quantity.value)
        if bound is not None and abs(quantity.value - bound) > _ROUND_OFF:
            notes.append(
                f"{name} comes out at {quantity}: past {bound:g}, but within the chips' scatter "
                f"of it; the section to paste holds {bound:g}."
            )
    if found[0].sigma is None:
        notes.append("Two chips leave no scatter to see: no standard errors. Measure more chips.")
    if not lengths:
        notes.append("Two lengths only: whether the lines are straight can't be seen.")
    notes += [
        f"Without the {row.length_um:.0f} um chips the parameters move further than chance "
        "allows: these chips differ, or the lines are not straight (heating?)."
        for row in lengths
        if row.matters
    ]
    return tuple(notes)


def _digits(value: float, sigma: float | None) -> str:
    """Decimal text with digits down to a hundredth of sigma; seven figures without one."""
    if not sigma:
        return repr(float(f"{value:.7g}"))
    decimals = max(0, 2 - int(np.floor(np.log10(sigma))))
    return repr(round(value, decimals))
