"""A witness piece of a recipe as the spectrophotometer sees it."""

from __future__ import annotations

from dataclasses import dataclass, field
from math import ceil, floor

import numpy as np
from numpy.typing import NDArray

from coatings.errors import InputError, Problem
from coatings.facets import FloatArray, chip_materials, chip_view, film_rows, modal_index
from coatings.grids import grid_nm
from coatings.optics.slit import Slit
from coatings.optics.witness import WitnessPiece, WitnessSpectrum, witness_spectrum
from coatings.recipe import Facet, Recipe, Witness
from coatings.stack import Layer, Stack
from materials.errors import MaterialError

CHIP = "chip"
SAMPLES_A_SLIT = 12


@dataclass(frozen=True)
class WitnessCurve:
    """R and T of a witness piece at P wavelengths [nm], back face included; ``stack`` is what lies on it."""

    witness: Witness
    stack: Stack
    wavelength_nm: FloatArray
    R: FloatArray
    T: FloatArray
    A: FloatArray
    model: str = field(default="plane", init=False)


def find_witness(recipe: Recipe, name: str) -> Witness:
    """The witness piece of that name; InputError lists the names there are."""
    for witness in recipe.witnesses:
        if witness.name == name:
            return witness
    known = ", ".join(witness.name for witness in recipe.witnesses)
    mend = f"the recipe has {known}" if known else "the recipe has no [[witness]] table; add one"
    raise InputError(Problem("--witness", f"{name!r} is not a witness piece; {mend}"))


def witness_stack(recipe: Recipe, witness: Witness) -> Stack:
    """Layers on a witness piece, plate outward: those of its facet that reach it, times the tooling."""
    facet = recipe.facets[witness.facet]
    entries = [*facet.base, *(facet.layers or ()), *facet.cap]
    return Stack(tuple(Layer(e.material, e.nm * witness.tooling) for e in entries if e.on_witness))


def witness_curve(recipe: Recipe, witness: Witness, *, wavelength_nm: FloatArray) -> WitnessCurve:
    """What the instrument reads of a piece at ``wavelength_nm`` (P,) [nm].

    With a slit the spectrum is calculated on a finer grid that reaches half a slit beyond both ends.
    Raises InputError where a material does not reach.
    """
    facet = recipe.facets[witness.facet]
    stack = witness_stack(recipe, witness)
    grid, weights = _seen_through_slit(witness, wavelength_nm)
    try:
        piece = WitnessPiece(
            wavelength_nm=grid,
            plate=_plate(recipe, witness, grid),
            films=_films(recipe, facet, grid),
            thickness_mm=witness.thickness_mm,
            back=witness.back,
            angle_deg=witness.angle_deg,
            polarization=witness.polarization,
        )
    except MaterialError as error:
        raise InputError(Problem(f"{recipe.path}: witness {witness.name}", str(error))) from None
    seen: WitnessSpectrum = witness_spectrum(
        piece,
        np.array(stack.nm, dtype=float).reshape(1, -1),
        film=film_rows(stack.materials, facet.films),
        weights=weights,
    )
    return WitnessCurve(witness, stack, wavelength_nm, seen.R[0], seen.T[0], seen.A[0])


def witness_range_nm(recipe: Recipe, witness: Witness) -> tuple[float, float]:
    """Wavelengths [nm] that plate and films reach, a slit's width inside."""
    facet = recipe.facets[witness.facet]
    plate = chip_materials(recipe) if witness.substrate == CHIP else (witness.substrate,)
    names = (*facet.films, *plate)
    ranges = [recipe.material(name).range_nm for name in names]
    reach = Slit("triangular", witness.bandwidth_nm).reach_nm if witness.bandwidth_nm else 0.0
    least = max((r[0] for r in ranges), default=1.0) + reach
    most = min((r[1] for r in ranges), default=1e6) - reach
    return least, most


def default_witness_grid_nm(recipe: Recipe, witness: Witness) -> FloatArray:
    """Wavelengths [nm] that show the piece: from two thirds to half as long again of the wavelength of
    operation, as far as plate and films reach."""
    least, most = witness_range_nm(recipe, witness)
    centre = recipe.chip.wavelength_nm
    low, high = ceil(max(centre / 1.5, least)), floor(min(1.5 * centre, most))
    if low >= high:
        raise InputError(
            Problem(
                f"{recipe.path}: witness {witness.name}",
                f"plate and films have no range in common around {centre:g} nm; give --nm or "
                "another substrate",
            )
        )
    return grid_nm(float(low), float(high), max(1.0, float(round((high - low) / 500))))


def _seen_through_slit(
    witness: Witness, wavelength_nm: FloatArray
) -> tuple[FloatArray, FloatArray | None]:
    if witness.bandwidth_nm == 0.0:
        return wavelength_nm, None
    slit = Slit("triangular", witness.bandwidth_nm)
    grid = slit.grid_nm(wavelength_nm, step_nm=witness.bandwidth_nm / SAMPLES_A_SLIT)
    return grid, slit.weights(wavelength_nm, grid)


def _plate(recipe: Recipe, witness: Witness, grid: FloatArray) -> NDArray[np.complex128]:
    if witness.substrate == CHIP:
        return modal_index(recipe, grid, view=chip_view(recipe))
    return recipe.material(witness.substrate).nk(grid)


def _films(recipe: Recipe, facet: Facet, grid: FloatArray) -> NDArray[np.complex128]:
    rows = [recipe.material(name).nk(grid) for name in facet.films]
    return np.array(rows, dtype=complex).reshape(len(rows), len(grid))
