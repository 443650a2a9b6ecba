"""A facet of a recipe as a scene for film optics: its films, its surroundings, its layers."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from coatings.errors import InputError, Problem
from coatings.optics import Scene
from coatings.optics.facet import ModalFacet
from coatings.optics.guide import Guide, fundamental
from coatings.optics.guide_modes import GuidedMode
from coatings.optics.light import Light, ModeLight, PlaneLight
from coatings.optics.tilt import TiltedFacet, coating_scene
from coatings.recipe import Facet, FacetName, Recipe, Window
from coatings.stack import Stack
from materials.errors import MaterialError

SIDES: tuple[FacetName, ...] = ("front", "rear")

MOST_OUTSIDE_K = 1e-3  # water in the near infrared stays below it, a metal does not

FloatArray = NDArray[np.float64]
IntArray = NDArray[np.intp]


@dataclass(frozen=True)
class FacetSpectrum:
    """What a facet does to the chip's light at P wavelengths [nm]: shares R, T, A and S (P,), which add
    up to one, the phase of the reflected tangential electric field [rad], and the model of the light."""

    wavelength_nm: FloatArray
    R: FloatArray
    T: FloatArray
    A: FloatArray
    S: FloatArray
    phase_rad: FloatArray
    model: str


def film_rows(names: Sequence[str], films: Sequence[str]) -> IntArray:
    """Row of each name in a list of films."""
    rows = {name: row for row, name in enumerate(films)}
    return np.array([rows[name] for name in names], dtype=np.intp)


@dataclass(frozen=True)
class View:
    """How a facet is looked at: polarization of the chip, ``plane`` for the plane wave even when a guide is
    given, ``index`` the modal index of a sister chip at the wavelength of operation, ``coating`` for the film
    alone at the tilt angle instead of what returns into the mode."""

    tm: bool
    plane: bool = False
    index: float | None = None
    coating: bool = False


def chip_view(recipe: Recipe, *, plane: bool = False) -> View:
    """The chip's own light."""
    return View(tm=recipe.chip.polarization == "TM", plane=plane)


def window_views(window: Window, *, plane: bool = False) -> tuple[View, ...]:
    """The lights that a window judges: one, or one a polarization."""
    kinds = {"TE": (False,), "TM": (True,), "both": (False, True)}[window.polarization]
    alone = window.of == "coating"
    return tuple(View(tm=tm, plane=plane, index=window.index, coating=alone) for tm in kinds)


def light_on(recipe: Recipe, facet: Facet, *, wavelength_nm: FloatArray, view: View) -> Light:
    """What the facet does to light at ``wavelength_nm`` (P,) [nm], one row of films a name of ``facet.films``.

    The guided mode when the recipe has a guide, else the plane wave at the modal index. Raises InputError
    where a material does not reach a wavelength or the guide holds no mode.
    """
    try:
        return _light(recipe, facet, wavelength_nm, view)
    except MaterialError as error:
        raise InputError(Problem(f"{recipe.path}: {facet.name}", str(error))) from None
    except InputError as error:
        raise InputError([_placed(recipe, problem) for problem in error.problems]) from None


def _placed(recipe: Recipe, problem: Problem) -> Problem:
    """The problem with file and section where the optics named only a key of [chip]."""
    is_bare_key = problem.where in ("tilt_deg", "lateral_um")
    return Problem(f"{recipe.path}: chip.{problem.where}", problem.what) if is_bare_key else problem


def _light(recipe: Recipe, facet: Facet, wavelength_nm: FloatArray, view: View) -> Light:
    chip = recipe.chip
    films, outside = _films(recipe, facet, wavelength_nm)
    modal = None
    if chip.guide is not None and not view.plane:
        mode = chip_mode(recipe, wavelength_nm, tm=view.tm, index=view.index)
        modal = ModalFacet(mode, outside, films)
        if chip.tilt_deg == 0.0:
            return ModeLight(modal)
    incident = modal_index(recipe, wavelength_nm, view=view)
    plane = Scene(wavelength_nm, incident, outside, films, tm=view.tm)
    if chip.tilt_deg == 0.0 or view.plane:
        return PlaneLight(plane)
    if view.coating:
        return PlaneLight(coating_scene(plane, tilt_deg=chip.tilt_deg), "tilted")
    return ModeLight(TiltedFacet(plane, chip.tilt_deg, chip.lateral_um, modal))


def facet_scene(recipe: Recipe, facet: Facet, *, wavelength_nm: FloatArray) -> Scene:
    """The plane wave's scene of a facet at ``wavelength_nm`` (P,) [nm]; errors as for `light_on`."""
    light = light_on(recipe, facet, wavelength_nm=wavelength_nm, view=chip_view(recipe, plane=True))
    return light.plane


def modal_index(recipe: Recipe, wavelength_nm: FloatArray, *, view: View) -> NDArray[np.complex128]:
    """Modal index (P,) of the chip or its sister: the guide's effective index, or the recipe's own."""
    if recipe.chip.guide is not None:
        return chip_mode(recipe, wavelength_nm, tm=view.tm, index=view.index).n_eff
    if view.index is None:
        return recipe.chip_index(wavelength_nm).astype(complex)
    return recipe.sister_index(view.index, wavelength_nm).astype(complex)


def chip_materials(recipe: Recipe) -> tuple[str, ...]:
    """Names of the materials that the chip's index or guide is made of."""
    chip = recipe.chip
    if chip.guide is not None:
        return tuple(layer.material for layer in chip.guide.layers if layer.material is not None)
    return (chip.index,) if isinstance(chip.index, str) else ()


def chip_guide(recipe: Recipe, wavelength_nm: FloatArray) -> Guide:
    """The epitaxial guide of a recipe that has one, dispersion of its materials included."""
    guide = recipe.chip.guide
    if guide is None:
        raise InputError(Problem(f"{recipe.path}: chip.guide", "is missing; give its layers"))
    index, slope = [], []
    for layer in guide.layers:
        if layer.material is None:
            index.append(np.full(len(wavelength_nm), complex(layer.index or 0.0)))
            slope.append(np.zeros(len(wavelength_nm), dtype=complex))
        else:
            material = recipe.material(layer.material)
            index.append(material.nk(wavelength_nm))
            slope.append(material.slope(wavelength_nm))
    thickness = [layer.um for layer in guide.layers[1:-1]]
    return Guide(wavelength_nm, np.array(index), np.array(thickness), np.array(slope))


def chip_mode(
    recipe: Recipe, wavelength_nm: FloatArray, *, tm: bool, index: float | None = None
) -> GuidedMode:
    """Fundamental mode of the chip's guide. A sister chip's ``index`` is reached by adding the same to the
    index of every layer, so that the mode has it at the wavelength of operation."""
    try:
        guide = chip_guide(recipe, wavelength_nm)
        if index is not None:
            guide = guide.shifted(_sister_shift(recipe, index, tm=tm))
        return fundamental(guide, tm=tm)
    except InputError as error:
        raise InputError(
            [Problem(f"{recipe.path}: chip.guide", problem.what) for problem in error.problems]
        ) from None


def _sister_shift(recipe: Recipe, index: float, *, tm: bool) -> float:
    guide = chip_guide(recipe, np.array([recipe.chip.wavelength_nm]))
    shift = 0.0
    for _ in range(8):  # the effective index follows a common shift almost one to one
        found = float(fundamental(guide.shifted(shift), tm=tm).n_eff[0].real)
        shift += index - found
    return shift


def _films(
    recipe: Recipe, facet: Facet, wavelength_nm: FloatArray
) -> tuple[NDArray[np.complex128], NDArray[np.complex128]]:
    films = [recipe.material(name).nk(wavelength_nm) for name in facet.films]
    table = np.array(films, dtype=complex).reshape(len(films), len(wavelength_nm))
    outside = recipe.index_of(facet.outside, wavelength_nm)
    worst = int(np.argmax(outside.imag))
    if outside[worst].imag > MOST_OUTSIDE_K:
        what = (
            f"{facet.outside} absorbs, k = {outside[worst].imag:.3g} at {wavelength_nm[worst]:g} nm: no "
            "light leaves into it; give what lies beyond the coating, and metals as layers"
        )
        raise InputError(Problem(f"{recipe.path}: {facet.name}.outside", what))
    return table, outside


def stack_of(facet: Facet, searched: Stack | None = None) -> Stack:
    """Every layer of a facet, chip outward: base, searched layers (its own by default), cap."""
    own = Stack.of([e.material for e in facet.layers or ()], [e.nm for e in facet.layers or ()])
    base, cap = (
        Stack.of([entry.material for entry in part], [entry.nm for entry in part])
        for part in (facet.base, facet.cap)
    )
    return Stack(base.layers + (own if searched is None else searched).layers + cap.layers)


def facet_spectrum(
    recipe: Recipe,
    side: FacetName,
    *,
    wavelength_nm: FloatArray,
    searched: Stack | None = None,
    view: View | None = None,
) -> FacetSpectrum:
    """Spectrum of a facet with its own layers or with ``searched`` ones between base and cap.

    Parameters: ``wavelength_nm`` (P,) [nm]; ``view`` the chip's own light by default.
    """
    facet = recipe.facets[side]
    light = light_on(recipe, facet, wavelength_nm=wavelength_nm, view=view or chip_view(recipe))
    stack = stack_of(facet, searched)
    found = light.shares(
        np.array(stack.nm, dtype=float).reshape(1, len(stack)),
        film=film_rows(stack.materials, facet.films),
    )
    return FacetSpectrum(
        wavelength_nm=wavelength_nm,
        R=found.R[0],
        T=found.T[0],
        A=found.A[0],
        S=found.S[0],
        phase_rad=np.angle(found.r[0]),
        model=light.model,
    )
