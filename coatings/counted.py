"""Facets as they count for the laser: by their layers, by their window where none are chosen, or bare."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.errors import InputError, Problem
from coatings.facets import chip_guide, chip_mode, chip_view, light_on
from coatings.laser import FacetLight
from coatings.product import facet_light
from coatings.recipe import Facet, FacetName, Recipe
from coatings.recipe.facet import FacetTable, resolve_facet
from coatings.recipe.window import Window, WindowTable

_STEP_OF_GOOD_MODE = 0.22
_MODE_R_SIGMA, _COARSE_MODE_R_SIGMA = 4e-4, 1.5e-3
"""Error of the mode's |r| up to that index step of the guide and beyond it, against a rigorous solution."""

_PLANE_WAVE_OFF = 0.2
"""A bare facet's plane wave is up to a fifth off the mode's R."""


@dataclass(frozen=True)
class CountedFacet:
    """A facet at the wavelength of operation: R, T, A, S; standard uncertainty of R [1]; ``by_layers``
    where its own layers give it; ``says`` where the value comes from."""

    light: FacetLight
    R_sigma: float
    by_layers: bool
    says: str
    is_bare: bool = False


def counted_facet(recipe: Recipe, side: FacetName) -> CountedFacet | None:
    """A facet by its layers; without layers by its window's value, lossless; without window bare.

    A window counts with its reflectance, with the middle of its range, or with its only bound; the first that
    holds the chip's light at the wavelength of operation is taken. None for one that waits for the trade.
    """
    facet = recipe.facets[side]
    if facet.layers is not None or (facet.palette is None and (facet.base or facet.cap)):
        return CountedFacet(facet_light(recipe, side), 0.0, True, "its layers")
    for window, table in zip(facet.windows, facet.table.windows, strict=True):
        if not _is_of_the_chip(recipe, window):
            continue
        if window.is_trade:
            return None
        R = _value(window, table)
        if R is not None:
            return CountedFacet(FacetLight.lossless(R), 0.0, False, f"its window {window.label()}")
    if facet.is_bare:
        light = bare_light(recipe, outside=facet.outside)
        return CountedFacet(light, bare_R_sigma(recipe, light), False, "cleaving: bare", True)
    raise InputError(
        Problem(
            f"{recipe.path}: {side}",
            "has neither layers nor a window for the reflectance at the wavelength of operation; add one",
        )
    )


def needed_facet(recipe: Recipe, side: FacetName) -> CountedFacet:
    """As `counted_facet`, but InputError for a facet that waits for the trade."""
    found = counted_facet(recipe, side)
    if found is None:
        raise InputError(
            Problem(
                f"{recipe.path}: {side}.windows",
                'takes "trade" as its target, but a value is needed here; give a reflectance',
            )
        )
    return found


def _is_of_the_chip(recipe: Recipe, window: Window) -> bool:
    low, high = window.band_nm
    return (
        window.of == "mode"
        and window.index is None
        and window.polarization in (recipe.chip.polarization, "both")
        and low <= recipe.chip.wavelength_nm <= high
    )


def _value(window: Window, table: WindowTable) -> float | None:
    if isinstance(table.reflectance, float):
        return table.reflectance
    if table.between is not None:
        return 0.5 * (table.between[0] + table.between[1])
    return window.low if window.high is None else window.high


def bare_facet(recipe: Recipe, *, outside: str | float = "air") -> Facet:
    """A cleaved facet of the recipe's chip."""
    return resolve_facet("front", FacetTable(outside=outside), recipe.chip)


def bare_light(recipe: Recipe, *, outside: str | float = "air") -> FacetLight:
    """R, T, A, S of the chip's cleaved facet at the wavelength of operation; the mode's with a guide."""
    at = np.array([recipe.chip.wavelength_nm])
    light = light_on(
        recipe, bare_facet(recipe, outside=outside), wavelength_nm=at, view=chip_view(recipe)
    )
    found = light.shares(np.zeros((1, 0)), film=np.zeros(0, dtype=np.intp))
    R, T, A, S = (float(part[0, 0]) for part in (found.R, found.T, found.A, found.S))
    return FacetLight(R=R, T=T, A=A, S=S)


def bare_R_sigma(recipe: Recipe, bare: FacetLight) -> float:
    """Standard uncertainty of a bare facet's calculated R [1], from the model of its light.

    2 |r| times the error of |r| with a guide. Without one, R lies within a fifth, any value alike:
    0.2 R/sqrt 3.
    """
    R = float(bare.R)
    if recipe.chip.guide is None:
        return _PLANE_WAVE_OFF * R / float(np.sqrt(3.0))
    index = chip_guide(recipe, np.array([recipe.chip.wavelength_nm])).index[:, 0].real
    coarse = float(index.max() - index.min()) > _STEP_OF_GOOD_MODE
    return 2.0 * float(np.sqrt(R)) * (_COARSE_MODE_R_SIGMA if coarse else _MODE_R_SIGMA)


def group_index(recipe: Recipe) -> float | None:
    """Group index of the chip's mode: the recipe's, the guide's or the material's; None where none is known."""
    chip = recipe.chip
    at = np.array([chip.wavelength_nm])
    if chip.group_index is not None:
        return chip.group_index
    if chip.guide is not None:
        return float(chip_mode(recipe, at, tm=chip.polarization == "TM").group_index[0])
    if isinstance(chip.index, str):
        return float(recipe.material(chip.index).group_index(at)[0])
    return None
