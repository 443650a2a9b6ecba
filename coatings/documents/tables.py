"""Tables as CSV text."""

from __future__ import annotations

import csv
from collections.abc import Mapping
from io import StringIO

from coatings.curve import FacetCurve
from coatings.recipe import FacetName

CURVE_HEAD = ("facet", "wavelength_nm", "R", "T", "A", "S", "phase_rad")


def curve_csv(curves: Mapping[FacetName, FacetCurve]) -> str:
    """Spectra of one or both facets, one row a facet and wavelength; shares as fractions."""
    out = StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(CURVE_HEAD)
    for side, curve in curves.items():
        s = curve.spectrum
        for row in zip(s.wavelength_nm, s.R, s.T, s.A, s.S, s.phase_rad, strict=True):
            writer.writerow([side, *(f"{float(value):.12g}" for value in row)])
    return out.getvalue()
