"""The recipe's chip below threshold: gain and ripple over its band from the mode's own complex reflections."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.interpolate import CubicSpline

from coatings.counted import CountedFacet, bare_facet, group_index, needed_facet
from coatings.errors import InputError, Problem
from coatings.facets import SIDES, chip_view, film_rows, light_on, modal_index, stack_of
from coatings.laser import (
    Amplifier,
    R_product_needed,
    Ripple,
    fringe_grid_nm,
    mode_spacing_GHz,
    ripple_spectrum,
    single_pass_gain,
)
from coatings.recipe import FacetName, Recipe

MOST_POINTS = 400_000
_KNOTS = 161
"""A facet's reflection is smooth beside the modes: it is calculated at so many points and splined."""


@dataclass(frozen=True)
class ChipRipple:
    """Ripple of the chip with the facets as they count.

    ``ripple`` is None where the chip lases at its gain. ``x`` is the largest G sqrt(R1 R2) over the band [1],
    at ``worst_nm`` with ``R_product`` = R1 R2; ``R_product_needed`` what the ripple limit demands, None
    without a limit.
    """

    amplifier: Amplifier
    facets: Mapping[FacetName, CountedFacet]
    ripple: Ripple | None
    x: float
    worst_nm: float
    R_product: float
    R_product_needed: float | None
    mode_spacing_GHz: float

    @property
    def kept(self) -> bool:
        """Whether the chip does not lase and its ripple keeps the recipe's limit, where there is one."""
        limit = self.amplifier.ripple_dB
        return self.ripple is not None and (limit is None or self.ripple.ripple_dB <= limit)

    @property
    def notes(self) -> tuple[str, ...]:
        """Sentences for the reader."""
        notes = () if self.ripple is None else self.ripple.notes
        if self.ripple is None:
            notes = (f"G sqrt(R1 R2) reaches {self.x:.3g}: the chip lases from 1 on.",)
        if all(facet.by_layers or facet.is_bare for facet in self.facets.values()):
            return notes
        return (*notes, "A window's value counts over the whole band, without phase.")


def chip_amplifier(recipe: Recipe) -> Amplifier:
    """The chip below threshold, from a recipe that has [amplifier] and a group index.

    Raises InputError where one of them is missing.
    """
    chip, laser = recipe.chip, recipe.laser
    spaced = group_index(recipe)
    if recipe.amplifier is None:
        what = "is missing; add an [amplifier] section with gain_dB, the gain of a single pass"
        raise InputError(Problem(f"{recipe.path}: amplifier", what))
    if spaced is None:
        what = (
            "is missing: neither a guide nor a material gives it, and the modes' spacing needs it"
        )
        raise InputError(Problem(f"{recipe.path}: chip.group_index", f"{what}; add it"))
    at = np.array([chip.wavelength_nm])
    return Amplifier(
        wavelength_nm=chip.wavelength_nm,
        length_um=chip.length_um,
        index=float(modal_index(recipe, at, view=chip_view(recipe))[0].real),
        group_index=spaced,
        gain_dB=recipe.amplifier.gain_dB,
        ripple_dB=recipe.amplifier.ripple_dB,
        internal_loss_per_cm=0.0 if laser is None else laser.internal_loss_per_cm,
        gain_peak_nm=None if laser is None else laser.gain_peak_nm,
        gain_width_nm=None if laser is None else laser.gain_width_nm,
    )


def chip_ripple(recipe: Recipe) -> ChipRipple:
    """Gain spectrum and ripple over chip.band_nm. A facet without layers counts with its window's value.

    Raises InputError for a recipe without [amplifier] or group index, or a band of too many modes or of none.
    """
    amplifier = chip_amplifier(recipe)
    facets = {side: needed_facet(recipe, side) for side in SIDES}
    grid = _grid(recipe, amplifier)
    front, rear = (_reflection(recipe, side, facets[side], grid) for side in SIDES)
    gain_dB = amplifier.gain_at_dB(grid)
    product = np.abs(front[0] * rear[0]) ** 2
    x = single_pass_gain(gain_dB) * np.sqrt(product)
    worst, limit = int(np.argmax(x)), amplifier.ripple_dB
    found = None
    if x[worst] < 1.0:
        found = ripple_spectrum(
            amplifier,
            wavelength_nm=grid,
            r_front=front[0],
            r_rear=rear[0],
            T_front=front[1],
            T_rear=rear[1],
        )
    return ChipRipple(
        amplifier=amplifier,
        facets=facets,
        ripple=found,
        x=float(x[worst]),
        worst_nm=float(grid[worst]),
        R_product=float(product[worst]),
        R_product_needed=None
        if limit is None
        else float(R_product_needed(limit, gain_dB=np.max(gain_dB))),
        mode_spacing_GHz=float(
            mode_spacing_GHz(group_index=amplifier.group_index, length_um=amplifier.length_um)
        ),
    )


def _grid(recipe: Recipe, amplifier: Amplifier) -> NDArray[np.float64]:
    low, high = recipe.chip.band_nm
    where = f"{recipe.path}: chip.band_nm"
    if low == high:
        raise InputError(Problem(where, "is one wavelength only; widen it to see the ripple"))
    grid = fringe_grid_nm(amplifier, band_nm=(low, high))
    if grid.size > MOST_POINTS:
        what = f"holds too many modes: {grid.size} points, at most {MOST_POINTS}; narrow it"
        raise InputError(Problem(where, what))
    return grid


def _reflection(
    recipe: Recipe, side: FacetName, counted: CountedFacet, wavelength_nm: NDArray[np.float64]
) -> tuple[NDArray[np.complex128], NDArray[np.float64]]:
    """Complex r of the mode and T over wavelength; a window's value without phase."""
    every = np.ones(wavelength_nm.size)
    facet = recipe.facets[side]
    if not counted.by_layers and not counted.is_bare:
        return np.sqrt(counted.light.R) * every.astype(complex), counted.light.T * every
    if counted.is_bare:
        facet = bare_facet(recipe, outside=facet.outside)
    knots = np.linspace(wavelength_nm[0], wavelength_nm[-1], _KNOTS)
    light = light_on(recipe, facet, wavelength_nm=knots, view=chip_view(recipe))
    stack = stack_of(facet)
    shares = light.shares(
        np.array(stack.nm, dtype=float).reshape(1, len(stack)),
        film=film_rows(stack.materials, facet.films),
    )
    r = np.asarray(CubicSpline(knots, shares.r[0])(wavelength_nm), dtype=np.complex128)
    T = np.asarray(CubicSpline(knots, shares.T[0])(wavelength_nm), dtype=np.float64)
    return r, T
