"""What must be said with a result: what was assumed, replaced or not known, and whose data it rests on."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import Any

from coatings.facets import stack_of
from coatings.recipe import Facet, FacetName, Recipe
from coatings.stack import Stack

Json = dict[str, Any]

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
