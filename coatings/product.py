"""The laser that a recipe's facets make: joins film optics and laser models."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from coatings.errors import InputError, Problem
from coatings.facets import SIDES, chip_mode, facet_spectrum
from coatings.laser import (
    FacetLight,
    GainLaw,
    Judgement,
    LaserChip,
    LaserEstimate,
    Limits,
    estimate,
    judge_limits,
)
from coatings.recipe import FacetName, Recipe
from coatings.stack import Stack


def laser_chip(recipe: Recipe) -> LaserChip:
    """The chip's numbers for the laser models, from a recipe that has [laser].

    Raises InputError for a recipe without [laser].
    """
    chip, laser = recipe.chip, recipe.laser
    if laser is None:
        raise InputError(
            Problem(f"{recipe.path}: laser", "is missing; add a [laser] section to estimate power")
        )
    return LaserChip(
        wavelength_nm=chip.wavelength_nm,
        length_um=chip.length_um,
        stripe_um=chip.stripe_um,
        emitters=chip.emitters,
        internal_loss_per_cm=laser.internal_loss_per_cm,
        injection_efficiency=laser.injection_efficiency,
        gain_law=GainLaw(laser.gain_law),
        transparency_A_per_cm2=laser.transparency_A_per_cm2,
        modal_gain_per_cm=laser.modal_gain_per_cm,
        stages=laser.stages,
        drive_A=laser.drive_A,
        spontaneous_factor=laser.spontaneous_factor,
        series_mohm=laser.series_mohm,
        junction_V=laser.junction_V,
        thermal_K_per_W=laser.thermal_K_per_W,
        heatsink_C=laser.heatsink_C,
        reference_C=laser.reference_C,
        t0_K=laser.t0_K,
        t1_K=laser.t1_K,
        mode_height_um=mode_height_um(recipe),
    )


def mode_height_um(recipe: Recipe) -> float | None:
    """Effective height of the near field [um], int |E|^2 dx / max |E|^2: the guide's, else the recipe's own."""
    if recipe.chip.guide is not None:
        at = np.array([recipe.chip.wavelength_nm])
        mode = chip_mode(recipe, at, tm=recipe.chip.polarization == "TM")
        return float(mode.near_field_height_um[0])
    return None if recipe.laser is None else recipe.laser.mode_height_um


def facet_light(recipe: Recipe, side: FacetName, searched: Stack | None = None) -> FacetLight:
    """R, T, A, S of a facet at the wavelength of operation."""
    at = np.array([recipe.chip.wavelength_nm])
    light = facet_spectrum(recipe, side, wavelength_nm=at, searched=searched)
    return FacetLight(
        R=float(light.R[0]), T=float(light.T[0]), A=float(light.A[0]), S=float(light.S[0])
    )


def product_estimate(
    recipe: Recipe, searched: Mapping[FacetName, Stack] | None = None
) -> LaserEstimate | None:
    """Laser estimate with the recipe's own layers, or ``searched`` ones by side; None without [laser]."""
    if recipe.laser is None:
        return None
    stacks = searched or {}
    front, rear = (facet_light(recipe, side, stacks.get(side)) for side in SIDES)
    return estimate(laser_chip(recipe), front, rear)


def product_limits(recipe: Recipe, figures: LaserEstimate) -> tuple[Judgement, ...]:
    """The product's own limits in [laser], judged against an estimate."""
    laser = recipe.laser
    if laser is None:
        return ()
    limits = Limits(
        threshold_max_A=laser.threshold_max_A,
        rear_min_W=laser.rear_min_W,
        facet_limit_MW_per_cm2=laser.facet_limit_MW_per_cm2,
    )
    return judge_limits(limits, figures)
