"""A coated facet's reflectivity from what was measured on the laser itself."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from coatings.counted import (
    CountedFacet,
    bare_light,
    bare_R_sigma,
    counted_facet,
    group_index,
    needed_facet,
)
from coatings.datafiles import DataFile, named, read_data
from coatings.errors import InputError, Problem
from coatings.laser import (
    FringeSpectrum,
    Reflectivity,
    RippleReading,
    Side,
    SlopeRatio,
    TwoSidedSweep,
    mode_spacing_GHz,
    read_ripple,
    reflectivity_from_bare,
    reflectivity_from_ripple,
    reflectivity_from_slopes,
    slope_ratio,
)
from coatings.recipe import FacetName, Recipe

TWO_SIDED = ("current_A", "front_W", "rear_W")
FRINGES = ("wavelength_nm", "intensity")


@dataclass(frozen=True)
class ChipReflectivity:
    """R of the facet ``side``, the other facet that it rests on, what was read from the data, and notes."""

    side: FacetName
    found: Reflectivity
    known: CountedFacet
    reading: SlopeRatio | RippleReading
    notes: tuple[str, ...]


def chip_reflectivity(
    recipe: Recipe,
    data: Path,
    *,
    side: FacetName,
    bare: Path | None = None,
    resolution_nm: float = 0.0,
) -> ChipReflectivity:
    """R of a facet from slopes of both sides or from the ripple below threshold, by the file's columns.

    Parameters
    ----------
    recipe : chip and the other facet.
    data : CSV of ``current_A, front_W, rear_W`` or of ``wavelength_nm, intensity``.
    side : the facet that is asked for.
    bare : spectrum of the same chip before coating, at the same current; else [amplifier] gain_dB counts.
    resolution_nm : full width of the instrument's line at half maximum [nm].

    Raises
    ------
    InputError
        Files that can't be used, options that do not fit the data, data from which no R follows.
    """
    file = read_data(data, layouts=(TWO_SIDED, FRINGES))
    known = needed_facet(recipe, "rear" if side == "front" else "front")
    notes = () if known.by_layers else (f"The other facet counts by {known.says}.",)
    if file.layout == FRINGES:
        return _from_ripple(recipe, file, (side, known, notes), bare, resolution_nm)
    for option, given in (("--bare", bare is not None), ("--resolution", resolution_nm > 0.0)):
        if given:
            what = f"goes with a spectrum, but {data} holds powers over current; leave it out"
            raise InputError(Problem(option, what))
    return _from_slopes(recipe, file, (side, known, notes))


_Task = tuple[FacetName, CountedFacet, tuple[str, ...]]


def _from_slopes(recipe: Recipe, file: DataFile, task: _Task) -> ChipReflectivity:
    side, known, notes = task
    with named(file.path):
        sweep = TwoSidedSweep(*(file.columns[name] for name in TWO_SIDED))
        slopes = slope_ratio(sweep, unknown=Side(side))
        found = reflectivity_from_slopes(
            slopes, known=known.light, loss=_loss(recipe, side), known_R_sigma=known.R_sigma
        )
    one_scale = "Both power meters are taken to have one scale."
    return ChipReflectivity(side, found, known, slopes, (*notes, *found.notes, one_scale))


def _loss(recipe: Recipe, side: FacetName) -> float:
    """What the recipe's own layers of the facet absorb and scatter; nothing where it has none."""
    own = counted_facet(recipe, side)
    return 0.0 if own is None or not own.by_layers else float(own.light.A) + float(own.light.S)


def _from_ripple(
    recipe: Recipe, file: DataFile, task: _Task, bare: Path | None, resolution_nm: float
) -> ChipReflectivity:
    side, known, notes = task
    coated = _reading(recipe, file, resolution_nm)
    if bare is not None:
        before = _reading(recipe, read_data(bare, layouts=(FRINGES,)), resolution_nm)
        cleaved = bare_light(recipe)
        R = float(cleaved.R)
        with named(file.path):
            found = reflectivity_from_bare(
                coated,
                before,
                R_product_bare=R**2,
                R_known=float(known.light.R),
                R_product_bare_sigma=2.0 * R * bare_R_sigma(recipe, cleaved),
                R_known_sigma=known.R_sigma,
            )
        return ChipReflectivity(side, found, known, coated, (*notes, *found.notes))
    if recipe.amplifier is None:
        what = "is missing: a ripple needs the gain; add [amplifier] gain_dB, or give --bare FILE"
        raise InputError(Problem(f"{recipe.path}: amplifier", what))
    with named(file.path):
        found = reflectivity_from_ripple(
            coated,
            gain_dB=recipe.amplifier.gain_dB,
            R_known=float(known.light.R),
            R_known_sigma=known.R_sigma,
        )
    exact = "The gain is taken as given, without error."
    return ChipReflectivity(side, found, known, coated, (*notes, *found.notes, exact))


def _reading(recipe: Recipe, file: DataFile, resolution_nm: float) -> RippleReading:
    spaced = group_index(recipe)
    spacing = None
    if spaced is not None:
        spacing = float(mode_spacing_GHz(group_index=spaced, length_um=recipe.chip.length_um))
    with named(file.path):
        return read_ripple(
            FringeSpectrum(*(file.columns[name] for name in FRINGES)),
            at_nm=recipe.chip.wavelength_nm,
            resolution_nm=resolution_nm,
            mode_spacing_GHz=spacing,
        )
