"""Results of ``ripple``, ``calibrate`` and ``reflectivity`` as plain data."""

from __future__ import annotations

import numpy as np

from coatings.below_threshold import ChipRipple
from coatings.calibration import ChipCalibration
from coatings.documents.results import Json, evidence, head
from coatings.documents.trade_result import finite, listed
from coatings.laser import SlopeRatio
from coatings.laser.calibrate_result import NAMES
from coatings.recipe import FacetName, Recipe
from coatings.reflectivity import ChipReflectivity


def ripple_result(recipe: Recipe, found: ChipRipple, *, seed: int) -> Json:
    """Everything that ``ripple`` found; gains as factors, no spectrum where the chip lases."""
    ripple = found.ripple
    sides: dict[FacetName, None] = {s: None for s, f in found.facets.items() if f.by_layers}
    return {
        **head(recipe, seed=seed),
        "gain_dB": found.amplifier.gain_dB,
        "ripple_dB": None if ripple is None else ripple.ripple_dB,
        "mode_spacing_GHz": found.mode_spacing_GHz,
        "R_product_needed": found.R_product_needed,
        "wavelength_nm": [] if ripple is None else ripple.wavelength_nm.tolist(),
        "gain": [] if ripple is None else ripple.gain.tolist(),
        "reflected": [] if ripple is None else ripple.reflected.tolist(),
        "kept": found.kept,
        "round_trip": found.x,
        "worst_nm": found.worst_nm,
        "R_product": found.R_product,
        "ripple_limit_dB": found.amplifier.ripple_dB,
        "group_index": found.amplifier.group_index,
        "facets": {s: {"R": float(f.light.R), "by": f.says} for s, f in found.facets.items()},
        **evidence(recipe, sides, *found.notes),
    }


def calibrate_result(recipe: Recipe, calibrated: ChipCalibration, *, seed: int) -> Json:
    """Everything that ``calibrate`` found: the joint fit, the straight lines, chips and lengths left out."""
    found = calibrated.found
    by_lines = zip(NAMES, found.by_lines, strict=True)
    return {
        **head(recipe, seed=seed),
        **found.to_json_dict(),
        "interval": {
            name: [quantity.low, quantity.high]
            for name, quantity in zip(NAMES, found.quantities, strict=True)
        },
        "covariance": [listed(row) for row in found.covariance],
        "by_lines": {name: {"value": q.value, "sigma": q.sigma} for name, q in by_lines},
        "slope_scatter": finite(found.slope_scatter),
        "threshold_scatter": finite(found.threshold_scatter),
        "outliers": [
            {"row": o.row, "length_um": o.length_um, "quantity": o.quantity, "says": str(o)}
            for o in found.outliers
        ],
        "without_length": [
            {"length_um": row.length_um, "matters": row.matters} for row in found.lengths
        ],
        "bare": {"R": float(calibrated.bare.R), "sigma": calibrated.R_sigma},
        "section": found.laser_section(),
        **evidence(recipe, {}, *calibrated.notes),
    }


def reflectivity_result(recipe: Recipe, measured: ChipReflectivity, *, seed: int) -> Json:
    """R of the facet with its interval, and what was read from the data."""
    degrees = measured.found.degrees
    known: dict[FacetName, None] = {}
    if measured.known.by_layers:
        known["rear" if measured.side == "front" else "front"] = None
    return {
        **head(recipe, seed=seed),
        **measured.found.to_json_dict(),
        "facet": measured.side,
        "degrees": degrees if np.isfinite(degrees) else None,
        "known_R": float(measured.known.light.R),
        "reading": _reading(measured),
        **evidence(recipe, known, *measured.notes),
    }


def _reading(measured: ChipReflectivity) -> Json:
    read = measured.reading
    names: tuple[str, ...]
    if isinstance(read, SlopeRatio):
        names = ("ratio", "ratio_sigma", "from_A", "to_A", "points", "knee_A")
    else:
        names = ("at_nm", "x", "ln_x_sigma", "contrast", "spacing_nm", "spacing_GHz", "fringes")
    return {name: getattr(read, name) for name in names}
