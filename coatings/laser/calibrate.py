"""Laser parameters from uncoated chips of several lengths.

The inverse of threshold and slope: internal loss and injection efficiency from the slopes, modal
gain and transparency from the thresholds, by the usual straight lines and by one joint fit
(``calibrate_model`` has the equations). The scatter of the chips is estimated from the chips
themselves, so intervals are Student's t. Pulsed or cold figures are meant: heat bends both lines.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy.constants import c, elementary_charge, h

from coatings.errors import ArrayError, InputError, Problem
from coatings.laser.calibrate_model import Points, joint_fit, straight_lines
from coatings.laser.calibrate_outliers import find_outliers, leave_one_length_out, length_groups
from coatings.laser.calibrate_result import (
    Calibration,
    Quantity,
    calibration_notes,
    natural_covariance,
    quantities,
    refuse_unphysical,
)
from coatings.laser.checks import FloatArray, out_of_range, positive, reflectances
from coatings.laser.chip import GainLaw
from coatings.laser.facets import FacetLight


@dataclass(frozen=True, eq=False)
class UncoatedChips:
    """What was measured, one row a chip; arrays of one shape (n,).

    Attributes
    ----------
    length_um : length [um].
    threshold_A : threshold current of the chip or bar [A].
    slope_W_per_A : slope above threshold [W/A]: of both facets together, or of one where
        ``one_facet`` is set (half, because bare facets are alike).

    Raises
    ------
    ArrayError
        Values that are not above zero or rows that differ in number, fewer than two chips, or
        lengths that are all the same within 2 %.
    """

    length_um: FloatArray
    threshold_A: FloatArray
    slope_W_per_A: FloatArray
    one_facet: bool = False

    def __post_init__(self) -> None:
        names = ("length_um", "threshold_A", "slope_W_per_A")
        for name in names:
            object.__setattr__(self, name, positive(name, getattr(self, name)))
        sizes = {np.shape(getattr(self, name)) for name in names}
        if len(sizes) > 1 or len(next(iter(sizes))) != 1:
            raise ArrayError(
                Problem(", ".join(names), "are not rows of one size; give one value a chip each")
            )
        if self.length_um.size < 2 or np.unique(length_groups(self.length_um)).size < 2:
            raise ArrayError(
                Problem(
                    "length_um",
                    "holds one length only: loss and efficiency can't be told apart, nor gain and "
                    "transparency; add chips of at least one other length",
                )
            )


@dataclass(frozen=True, kw_only=True)
class ChipKind:
    """What all the uncoated chips share.

    ``bare``: the cleaved facet (R and T; S where the guide throws light back beside the mode),
    the same at both ends; ``R_sigma`` its standard uncertainty [1], carried into loss and gain.

    Raises
    ------
    InputError
        Sizes not above zero, counts below one, or a bare facet that reflects all or nothing.
    """

    wavelength_nm: float
    stripe_um: float
    bare: FacetLight
    R_sigma: float = 0.0
    emitters: int = 1
    stages: int = 1
    gain_law: GainLaw = GainLaw.LOGARITHMIC

    def __post_init__(self) -> None:
        problems = [
            *out_of_range("wavelength_nm", self.wavelength_nm, low=0.0, open_low=True),
            *out_of_range("stripe_um", self.stripe_um, low=0.0, open_low=True),
            *out_of_range("R_sigma", self.R_sigma, low=0.0),
            *out_of_range("emitters", self.emitters, low=1.0),
            *out_of_range("stages", self.stages, low=1.0),
        ]
        if problems:
            raise InputError(problems)
        reflectances("bare R", self.bare.R)
        if self.bare.shape or not (self.bare.T > 0.0 and self.bare.R < 1.0):
            raise InputError(
                Problem("bare", "is not one facet that both reflects and transmits; give R and T")
            )

    def points(self, chips: UncoatedChips) -> Points:
        """The chips' measurements in the variables of the two lines."""
        length_cm = chips.length_um * 1e-4
        photon_V = h * c / (elementary_charge * self.wavelength_nm * 1e-9)
        R, T = float(self.bare.R), float(self.bare.T)
        out = chips.slope_W_per_A * (2.0 if chips.one_facet else 1.0)
        return Points(
            length_cm=length_cm,
            efficiency=out * (1.0 - R) / (T * self.stages * photon_V),
            density=chips.threshold_A / (length_cm * self.stripe_um * 1e-4 * self.emitters),
            rho=-float(np.log(R)),
            rho_sigma=self.R_sigma / R,
            law=self.gain_law,
        )


def calibrate(chips: UncoatedChips, kind: ChipKind, *, keep_outliers: bool = False) -> Calibration:
    """Internal loss, injection efficiency, transparency and modal gain from uncoated chips.

    Parameters
    ----------
    chips : the measurements.
    kind : what the chips share, with the bare facet.
    keep_outliers : leave named outliers in the fit.

    Raises
    ------
    InputError
        What the chips say is unphysical beyond their scatter (two standard errors; at all without
        spare chips): a slope that rises with length (negative loss), an efficiency above one, a
        threshold density that does not fall with length.
    """
    every = kind.points(chips)
    outliers = find_outliers(every)
    used = np.ones(every.size, dtype=bool)
    if not keep_outliers:
        used[[outlier.row for outlier in outliers]] = False
    points = every.at(used)
    fit = joint_fit(points)
    found = quantities(fit)
    refuse_unphysical(found)
    lengths = leave_one_length_out(points, fit)
    return Calibration(
        *found,
        covariance=natural_covariance(fit),
        by_lines=quantities(straight_lines(points)),
        with_all=None if used.all() else _with_all(every),
        slope_scatter=fit.scatter[0],
        threshold_scatter=fit.scatter[1],
        correlation=fit.scatter[2],
        outliers=outliers,
        lengths=lengths,
        points=every,
        used=used,
        parameters=fit.parameters,
        notes=calibration_notes(found, outliers, lengths, kept=keep_outliers),
    )


def _with_all(every: Points) -> tuple[Quantity, ...] | None:
    """The fit with its outliers; None where they leave the lines without meaning."""
    try:
        return quantities(joint_fit(every))
    except InputError:
        return None
