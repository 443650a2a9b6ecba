"""Spectra of the stacks in a recipe, with the margin of every window."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from coatings.design.model import FacetModel, facet_frame
from coatings.design.windows import facet_goal
from coatings.facets import (
    FacetSpectrum,
    FloatArray,
    View,
    chip_materials,
    chip_view,
    facet_spectrum,
    film_rows,
)
from coatings.grids import grid_nm
from coatings.recipe import FacetName, Recipe, Window
from coatings.stack import Stack

STEP_NM = 1.0


@dataclass(frozen=True)
class WindowMargin:
    """How far inside a window a stack is at its worst wavelength: distance in reflectance, negative
    outside, on a grid no coarser than 1 nm."""

    window: Window
    margin: float
    worst_nm: float


@dataclass(frozen=True)
class FacetCurve:
    """Spectrum of one facet and the margins of its windows.

    ``at_work`` is the facet at the wavelength of operation; ``others`` what the same stack is to other light
    there, by name: "plane" the plane wave where the model is a richer one, "coating" the film alone at the
    tilt angle. ``plane_spectrum`` is the plane wave's over the grid, None where that is the model.
    """

    side: FacetName
    spectrum: FacetSpectrum
    windows: tuple[WindowMargin, ...]
    at_work: FacetSpectrum
    others: dict[str, FacetSpectrum]
    plane_spectrum: FacetSpectrum | None

    @property
    def model(self) -> str:
        """Name of the model of the light."""
        return self.spectrum.model

    @property
    def meets(self) -> bool:
        """Whether every window is met."""
        return all(window.margin >= 0.0 for window in self.windows)


def facet_curve(
    recipe: Recipe,
    side: FacetName,
    *,
    wavelength_nm: FloatArray | None = None,
    searched: Stack | None = None,
    plane: bool = False,
) -> FacetCurve:
    """Curve of a facet over ``wavelength_nm`` (P,) [nm], by default its windows with a margin around.

    ``searched`` stands in for the recipe's own searched layers; ``plane`` takes the plane wave at the modal
    index even where the recipe has a guide or a tilt, for the windows too.
    """
    grid = default_grid_nm(recipe, side) if wavelength_nm is None else wavelength_nm

    def seen(where: FloatArray, view: View) -> FacetSpectrum:
        return facet_spectrum(recipe, side, wavelength_nm=where, searched=searched, view=view)

    own, flat = chip_view(recipe, plane=plane), chip_view(recipe, plane=True)
    spectrum, at = seen(grid, own), np.array([recipe.chip.wavelength_nm])
    others = {}
    if spectrum.model != "plane":
        others["plane"] = seen(at, flat)
    if spectrum.model == "tilted":
        others["coating"] = seen(at, replace(own, coating=True))
    return FacetCurve(
        side=side,
        spectrum=spectrum,
        windows=window_margins(recipe, side, searched, plane=plane),
        at_work=seen(at, own),
        others=others,
        plane_spectrum=None if spectrum.model == "plane" else seen(grid, flat),
    )


def window_margins(
    recipe: Recipe, side: FacetName, searched: Stack | None = None, *, plane: bool = False
) -> tuple[WindowMargin, ...]:
    """Margin of every window of a facet."""
    facet = recipe.facets[side]
    if not facet.windows:
        return ()
    goal = facet_goal(recipe, side, plane=plane)
    own = Stack.of([e.material for e in facet.layers or ()], [e.nm for e in facet.layers or ()])
    stack = own if searched is None else searched
    model = FacetModel(goal, facet_frame(facet))
    slack = model.slack(
        np.array(stack.nm).reshape(1, -1), film=film_rows(stack.materials, goal.films)
    )[0]
    margins = []
    for number, window in enumerate(facet.windows):
        members = np.flatnonzero(goal.window[goal.constraints.point] == number)
        worst = members[np.argmin(slack[members])]
        nm = goal.scene.wavelength_nm[goal.constraints.point[worst]]
        margins.append(WindowMargin(window, float(slack[worst]), float(nm)))
    return tuple(margins)


def default_grid_nm(recipe: Recipe, side: FacetName) -> FloatArray:
    """Wavelengths [nm] that show every window of a facet with a fifth of its span on either side, as far
    as the materials reach."""
    facet = recipe.facets[side]
    bands = [recipe.chip.band_nm, *(window.band_nm for window in facet.windows)]
    low, high = min(band[0] for band in bands), max(band[1] for band in bands)
    around = max(0.2 * (high - low), 10.0)
    names = [*facet.films, facet.outside, *chip_materials(recipe)]
    ranges = [recipe.material(name).range_nm for name in names if isinstance(name, str)]
    least = max([low - around, *(r[0] for r in ranges)])
    most = min([high + around, *(r[1] for r in ranges)])
    least, most = (
        np.ceil(min(least, low) / STEP_NM) * STEP_NM,
        np.floor(max(most, high) / STEP_NM) * STEP_NM,
    )
    return grid_nm(float(least), float(most), STEP_NM) if most > least else np.array([low, high])
