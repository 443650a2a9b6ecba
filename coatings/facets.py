"""A facet of a recipe as a scene for film optics: its films, its surroundings, its layers."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from coatings.errors import InputError, Problem
from coatings.optics import Response, Scene, response
from coatings.recipe import Facet, FacetName, Recipe
from coatings.stack import Stack
from materials.errors import MaterialError

SIDES: tuple[FacetName, ...] = ("front", "rear")

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.intp]


@dataclass(frozen=True)
class FacetSpectrum:
    """What a facet does to the chip's light at P wavelengths [nm]: shares R, T, A and S (P,), which add
    up to one, and the phase of the reflected tangential electric field [rad]."""

    wavelength_nm: FloatArray
    R: FloatArray
    T: FloatArray
    A: FloatArray
    S: FloatArray
    phase_rad: FloatArray


def film_rows(names: Sequence[str], films: Sequence[str]) -> IntArray:
    """Row of each name in a list of films."""
    rows = {name: row for row, name in enumerate(films)}
    return np.array([rows[name] for name in names], dtype=np.intp)


def facet_scene(
    recipe: Recipe,
    facet: Facet,
    *,
    wavelength_nm: FloatArray,
    incident: FloatArray | None = None,
) -> Scene:
    """Scene of a facet on the chip, one row of films a name of ``facet.films``.

    Parameters: ``wavelength_nm`` (P,) [nm]; ``incident`` (P,) modal index, the chip's own by default.
    Raises InputError where a material does not reach a wavelength.
    """
    try:
        films = [recipe.material(name).nk(wavelength_nm) for name in facet.films]
        own = recipe.chip_index(wavelength_nm)
        return Scene(
            wavelength_nm=wavelength_nm,
            incident=(own if incident is None else incident).astype(complex),
            outside=outside_index(recipe, facet, wavelength_nm),
            films=np.array(films, dtype=complex).reshape(len(films), len(wavelength_nm)),
        )
    except MaterialError as error:
        raise InputError(Problem(f"{recipe.path}: {facet.name}", str(error))) from None


def outside_index(
    recipe: Recipe, facet: Facet, wavelength_nm: FloatArray
) -> NDArray[np.complex128]:
    """Index (P,) of what lies beyond the coating."""
    if isinstance(facet.outside, str):
        return recipe.material(facet.outside).nk(wavelength_nm)
    return np.full(len(wavelength_nm), facet.outside, dtype=complex)


def stack_of(facet: Facet, searched: Stack | None = None) -> Stack:
    """Every layer of a facet, chip outward: base, searched layers (its own by default), cap."""
    own = Stack.of([e.material for e in facet.layers or ()], [e.nm for e in facet.layers or ()])
    base, cap = (
        Stack.of([entry.material for entry in part], [entry.nm for entry in part])
        for part in (facet.base, facet.cap)
    )
    return Stack(base.layers + (own if searched is None else searched).layers + cap.layers)


def facet_spectrum(
    recipe: Recipe, side: FacetName, *, wavelength_nm: FloatArray, searched: Stack | None = None
) -> FacetSpectrum:
    """Spectrum of a facet with its own layers or with ``searched`` ones between base and cap.

    Parameters: ``side`` "front" or "rear"; ``wavelength_nm`` (P,) [nm].
    """
    facet = recipe.facets[side]
    scene = facet_scene(recipe, facet, wavelength_nm=wavelength_nm)
    stack = stack_of(facet, searched)
    light: Response = response(
        scene,
        np.array(stack.nm, dtype=float).reshape(1, len(stack)),
        film=film_rows(stack.materials, facet.films),
    )
    return FacetSpectrum(
        wavelength_nm=wavelength_nm,
        R=light.R[0],
        T=light.T[0],
        A=light.A[0],
        S=np.zeros(len(wavelength_nm)),  # a plane wave has nowhere else to go
        phase_rad=light.phase_rad[0],
    )
