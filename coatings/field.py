"""The standing wave in a recipe's coatings, in relative figures and at the operating current.

A facet's relative field is that of ``optics.field``: E squared over that of the wave which travels in
the chip towards this facet. What arrives at the rear per watt that leaves the front follows from the
split of the power between the facets: sqrt(R_front/R_rear)/T_front; at the front it is 1/T_front.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np

from coatings.facets import FloatArray, facet_scene, film_rows, stack_of
from coatings.laser import LaserEstimate
from coatings.optics.field import Profile, StandingWave, standing_wave
from coatings.optics.flow import chip_flow_MW_per_cm2, field_V_per_m
from coatings.product import facet_light, mode_height_um, product_estimate
from coatings.recipe import FacetName, Recipe
from coatings.stack import Stack

NM_A_SAMPLE = 1.0
CHIP_WAVES = 1.25  # how much of the chip is sampled, in waves of light there
OUTSIDE_WAVES = 0.3  # and how much of the outside


@dataclass(frozen=True)
class AtWork:
    """Figures at the operating current: power that arrives at the facet in the chip [W], power that each
    layer absorbs [W] (L,), amplitude of the electric field at the peak of each layer [V/m] (L,) and at the
    chip's face [V/m]. The fields are None where the recipe has no height of the near field."""

    drive_A: float
    arriving_W: float
    absorbed_W: FloatArray
    peak_V_per_m: FloatArray | None
    face_V_per_m: float | None


@dataclass(frozen=True)
class FacetField:
    """Standing wave of one facet at the wavelength of operation.

    ``arriving_per_front_W``: power that runs onto this facet in the chip per watt that leaves the front, None
    where the front lets nothing out. ``work`` is None without [laser] or operating current.
    """

    side: FacetName
    wavelength_nm: float
    stack: Stack
    wave: StandingWave
    profile: Profile
    arriving_per_front_W: float | None
    work: AtWork | None


def facet_fields(recipe: Recipe, sides: tuple[FacetName, ...]) -> dict[FacetName, FacetField]:
    """Fields of the asked facets with the recipe's own layers, by side."""
    estimate = product_estimate(recipe)
    arriving = _arriving_per_front_watt(recipe)
    return {side: _facet_field(recipe, side, arriving[side], estimate) for side in sides}


def _facet_field(
    recipe: Recipe, side: FacetName, arriving: float | None, estimate: LaserEstimate | None
) -> FacetField:
    facet = recipe.facets[side]
    nm = recipe.chip.wavelength_nm
    scene = facet_scene(recipe, facet, wavelength_nm=np.array([nm]))
    stack = stack_of(facet)
    wave = standing_wave(scene, np.array(stack.nm), film=film_rows(stack.materials, facet.films))
    profile = wave.profile(
        step_nm=NM_A_SAMPLE,
        chip_nm=CHIP_WAVES * nm / float(scene.incident[0].real),
        outside_nm=OUTSIDE_WAVES * nm / max(float(scene.outside[0].real), 1.0),
    )
    return FacetField(
        side, nm, stack, wave, profile, arriving, _at_work(recipe, wave, arriving, estimate)
    )


def _arriving_per_front_watt(recipe: Recipe) -> Mapping[FacetName, float | None]:
    front, rear = (facet_light(recipe, side) for side in ("front", "rear"))
    T, R_front, R_rear = float(front.T), float(front.R), float(rear.R)
    if T <= 0.0:
        return {"front": None, "rear": None}
    return {
        "front": 1.0 / T,
        "rear": None if R_rear <= 0.0 else float(np.sqrt(R_front / R_rear)) / T,
    }


def _at_work(
    recipe: Recipe, wave: StandingWave, arriving: float | None, estimate: LaserEstimate | None
) -> AtWork | None:
    laser = recipe.laser
    if laser is None or laser.drive_A is None or estimate is None:
        return None
    if estimate.front_W is None or arriving is None:
        return None
    power = estimate.front_W * arriving
    peak = face = None
    height = mode_height_um(recipe)
    if height is not None:
        area = recipe.chip.emitters * recipe.chip.stripe_um * height
        flow = chip_flow_MW_per_cm2(leaving_W=power, T=1.0, area_um2=area)
        peak = field_V_per_m(
            wave.layer_peak_E2[0], flow_MW_per_cm2=flow, flow_index=wave.flow_index[0]
        )
        face = float(
            field_V_per_m(
                wave.face_E2[0, 0, 0], flow_MW_per_cm2=flow, flow_index=wave.flow_index[0]
            )
        )
    return AtWork(laser.drive_A, power, power * wave.layer_absorbed[0], peak, face)
