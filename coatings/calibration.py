"""Laser parameters of a recipe's chip from a file of uncoated chips."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from coatings.counted import bare_light, bare_R_sigma
from coatings.datafiles import named, read_data
from coatings.laser import Calibration, ChipKind, FacetLight, GainLaw, UncoatedChips, calibrate
from coatings.recipe import Recipe

BOTH = ("length_um", "threshold_A", "slope_W_per_A")
ONE = ("length_um", "threshold_A", "front_slope_W_per_A")


@dataclass(frozen=True)
class ChipCalibration:
    """The parameters, with the bare facet that they rest on, its uncertainty, and words on both."""

    found: Calibration
    bare: FacetLight
    R_sigma: float
    one_facet: bool
    notes: tuple[str, ...]


def chip_calibration(recipe: Recipe, data: Path, *, keep_outliers: bool = False) -> ChipCalibration:
    """Internal loss, injection efficiency, transparency and modal gain of the recipe's kind of chip.

    ``data``: CSV of ``length_um``, ``threshold_A`` and ``slope_W_per_A`` of both facets together (or
    ``front_slope_W_per_A`` of one), one row a chip. Stripe, emitters, wavelength, stages and gain law are the
    recipe's; the bare facets face air. Raises InputError naming the file for what can't be.
    """
    file = read_data(data, layouts=(BOTH, ONE))
    laser = recipe.laser
    bare = bare_light(recipe)
    sigma = bare_R_sigma(recipe, bare)
    kind = ChipKind(
        wavelength_nm=recipe.chip.wavelength_nm,
        stripe_um=recipe.chip.stripe_um,
        bare=bare,
        R_sigma=sigma,
        emitters=recipe.chip.emitters,
        stages=1 if laser is None else laser.stages,
        gain_law=GainLaw.LOGARITHMIC if laser is None else GainLaw(laser.gain_law),
    )
    with named(data):
        length, threshold, slope = (file.columns[name] for name in file.layout)
        chips = UncoatedChips(length, threshold, slope, one_facet=file.layout == ONE)
        found = calibrate(chips, kind, keep_outliers=keep_outliers)
    return ChipCalibration(found, bare, sigma, file.layout == ONE, _notes(recipe, found))


def _notes(recipe: Recipe, found: Calibration) -> tuple[str, ...]:
    notes = [*found.notes]
    if recipe.chip.guide is None:
        notes.append(
            "The bare facet's R is a plane wave's, up to a fifth off the mode's: give [chip.guide] for better."
        )
    if recipe.laser is None:
        notes.append("Without [laser] in the recipe: one stage and the logarithmic gain law.")
    return tuple(notes)
