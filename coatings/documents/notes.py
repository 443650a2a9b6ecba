"""What must be said with a result: what was assumed, replaced or not known, and whose data it rests on."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

import numpy as np

from coatings.facets import chip_guide, facet_spectrum, stack_of
from coatings.optics.tilt import OPTIMISTIC_R
from coatings.recipe import Facet, FacetName, Recipe
from coatings.stack import Stack

Json = dict[str, Any]

WIDEST_STEP = 0.22
"""Index step of a guide up to which its mode's |r| is held to 4e-4 against a rigorous solution."""

PLANE_WAVE_ENOUGH = 0.005
"""Below this reflectance a plane wave says little about a guided mode (common practice, no source)."""


def result_notes(recipe: Recipe, stacks: Mapping[FacetName, Stack | None]) -> tuple[str, ...]:
    """Sentences that go with every result of a recipe.

    ``stacks``: searched layers of the facets that the result is about; None takes the recipe's own.
    """
    return (
        *recipe.notes,
        *recipe.material_notes,
        *_unknown_k(recipe, stacks),
        *_low_reflectance(recipe, stacks),
        *_coarse_guide(recipe),
        *_optimistic_tilt(recipe, stacks),
    )


def material_sources(recipe: Recipe, stacks: Mapping[FacetName, Stack | None]) -> list[Json]:
    """Sample, source and temperature of every material that a result rests on."""
    infos = (recipe.material(name).info for name in _used(recipe, stacks))
    return [
        {
            "name": info.name,
            "sample": info.sample,
            "process": info.process,
            "temperature": info.temperature,
            "k_status": info.k_status,
            "source": info.source,
            "doi": info.doi,
        }
        for info in infos
    ]


def _unknown_k(recipe: Recipe, stacks: Mapping[FacetName, Stack | None]) -> Iterator[str]:
    infos = [recipe.material(name).info for name in _films(recipe, stacks)]
    names = [f"{info.name} ({info.k_status})" for info in infos if not info.k_known]
    at = np.array([recipe.chip.wavelength_nm])
    names += [
        f"{info.name} (0 in its table here)"
        for info in infos
        if info.k_known and info.use != "own" and recipe.material(info.name).nk(at)[0].imag == 0.0
    ]
    if names:
        yield f"absorption counted as zero for want of a measured k: {', '.join(names)}"


def _low_reflectance(recipe: Recipe, stacks: Mapping[FacetName, Stack | None]) -> Iterator[str]:
    for side in stacks:
        bounds = [w.high for w in recipe.facets[side].windows if w.high is not None]
        if recipe.chip.guide is None and bounds and min(bounds) <= PLANE_WAVE_ENOUGH:
            yield (
                f"{side}: calculated for a plane wave; at so low a reflectance the guided mode's own "
                "can differ by a large factor"
            )


def _coarse_guide(recipe: Recipe) -> Iterator[str]:
    guide = recipe.chip.guide
    if guide is None:
        return
    at = np.array([recipe.chip.wavelength_nm])
    index = chip_guide(recipe, at).index[:, 0].real
    if float(index.max() - index.min()) > WIDEST_STEP:
        yield (
            f"the guide's index steps by {index.max() - index.min():.2g}: the model of its mode is good to "
            "1.5e-3 in |r| there, and to a fifth of R for an antireflection coating"
        )


def _optimistic_tilt(recipe: Recipe, stacks: Mapping[FacetName, Stack | None]) -> Iterator[str]:
    at = np.array([recipe.chip.wavelength_nm])
    for side, searched in stacks.items():
        seen = facet_spectrum(recipe, side, wavelength_nm=at, searched=searched)
        if seen.model == "tilted" and float(seen.R[0]) < OPTIMISTIC_R:
            yield (
                f"{side}: an R below {OPTIMISTIC_R:g} into the tilted mode is optimistic, a real lateral "
                "mode has wider tails than a Gaussian"
            )


def _films(recipe: Recipe, stacks: Mapping[FacetName, Stack | None]) -> list[str]:
    """Films of the facets' stacks, each once."""
    layers = [
        layer.material
        for side, searched in stacks.items()
        for layer in stack_of(recipe.facets[side], searched)
    ]
    return list(dict.fromkeys(layers))


def _used(recipe: Recipe, stacks: Mapping[FacetName, Stack | None]) -> list[str]:
    """Films, surroundings and the chip's material, where they go by name."""
    facets: list[Facet] = [recipe.facets[side] for side in stacks]
    named = [recipe.chip.index, *(facet.outside for facet in facets)]
    around = [name for name in named if isinstance(name, str)]
    return list(dict.fromkeys([*_films(recipe, stacks), *around]))
