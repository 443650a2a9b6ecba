"""A recipe that has been read: sections with their defaults filled in, names made materials."""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coatings.errors import InputError, Problem, RecipeError
from coatings.recipe.chip import Chip
from coatings.recipe.facet import Facet, FacetName
from coatings.recipe.feedback import Amplifier, External
from coatings.recipe.laser import Laser
from coatings.recipe.own_materials import Shelf
from coatings.recipe.process import ProcessErrors, ProcessTable, process_errors
from coatings.recipe.window import Window
from coatings.recipe.witness import Witness
from materials import Material


@dataclass(frozen=True, eq=False)
class Recipe:
    """One product: the chip, its two facets, the run that coats them.

    ``text`` is the file as written, ``sha256`` of its bytes. ``notes`` and ``material_notes`` are
    sentences to be printed. ``laser``, ``external``, ``amplifier`` are None when absent; a facet
    that is absent is bare.
    """

    path: Path
    text: str
    sha256: str
    title: str
    revision: str
    chip: Chip
    laser: Laser | None
    external: External | None
    amplifier: Amplifier | None
    front: Facet
    rear: Facet
    process_table: ProcessTable | None
    witnesses: tuple[Witness, ...]
    notes: tuple[str, ...]
    shelf: Shelf = field(repr=False)

    @property
    def facets(self) -> dict[FacetName, Facet]:
        """Both facets by name."""
        return {"front": self.front, "rear": self.rear}

    @property
    def material_notes(self) -> tuple[str, ...]:
        """One sentence for every material of the recipe's own."""
        return self.shelf.notes()

    @property
    def table_paths(self) -> tuple[Path, ...]:
        """Files beside the recipe that its materials are read from."""
        return self.shelf.table_paths()

    def process_for(self, facet: str) -> ProcessErrors:
        """One-sigma errors of a facet's run, the method and the facet's overrides worked in.

        Raises
        ------
        InputError
            for a facet that is neither "front" nor "rear"
        """
        own = {"front": self.front, "rear": self.rear}.get(facet)
        if own is None:
            raise InputError(f"there is no facet {facet!r}; expected front or rear")
        return process_errors(self.process_table, own.table.process, films=own.films)

    def material(self, name: str) -> Material:
        """Material of a name: the recipe's own first, then the library's.

        Raises
        ------
        InputError
            when there is none of that name
        """
        return self.shelf.material(name)

    def index_of(self, reference: str | float, wavelength_nm: ArrayLike) -> NDArray[np.complex128]:
        """Complex index of a material, or of a number as of a material without dispersion.

        Parameters
        ----------
        reference : name of a material, or an index
        wavelength_nm : vacuum wavelengths [nm], any shape

        Returns
        -------
        ndarray of complex, of the wavelengths' shape
        """
        wavelength = np.asarray(wavelength_nm, dtype=float)
        if isinstance(reference, str):
            return np.asarray(self.material(reference).nk(wavelength), dtype=complex)
        return np.full(wavelength.shape, complex(reference))

    def chip_index(self, wavelength_nm: ArrayLike) -> NDArray[np.float64]:
        """Modal index of the chip.

        A material's index is its real part. A number n is constant, or with a group index ng
        tilted: n + (n - ng) (lambda - lambda0)/lambda0, lambda0 = chip.wavelength_nm.

        Parameters
        ----------
        wavelength_nm : vacuum wavelengths [nm], any shape

        Returns
        -------
        ndarray of float, of the wavelengths' shape

        Raises
        ------
        RecipeError
            when the chip is given by its guide
        """
        if self.chip.index is None:
            what = "is absent, the chip being given by its guide; there is no plane-wave index"
            raise RecipeError(Problem(f"{self.path}: chip.index", what))
        if isinstance(self.chip.index, str):
            return np.asarray(self.index_of(self.chip.index, wavelength_nm).real, dtype=float)
        return self._tilted(self.chip.index, wavelength_nm)

    def window_index(self, window: Window, wavelength_nm: ArrayLike) -> NDArray[np.float64]:
        """Modal index in a window: the sister chip's, tilted like the chip's own, or the chip's.

        Parameters
        ----------
        window : a window of this recipe
        wavelength_nm : vacuum wavelengths [nm], any shape

        Returns
        -------
        ndarray of float, of the wavelengths' shape
        """
        if window.index is None:
            return self.chip_index(wavelength_nm)
        return self.sister_index(window.index, wavelength_nm)

    def sister_index(self, index: float, wavelength_nm: ArrayLike) -> NDArray[np.float64]:
        """Modal index over wavelength of a chip that has ``index`` at the wavelength of operation.

        Parameters
        ----------
        index : modal index at chip.wavelength_nm
        wavelength_nm : vacuum wavelengths [nm], any shape

        Returns
        -------
        ndarray of float, of the wavelengths' shape
        """
        return self._tilted(index, wavelength_nm)

    def _tilted(self, index: float, wavelength_nm: ArrayLike) -> NDArray[np.float64]:
        wavelength = np.asarray(wavelength_nm, dtype=float)
        if self.chip.group_index is None:
            return np.full(wavelength.shape, index)
        centre = self.chip.wavelength_nm
        return np.asarray(
            index + (index - self.chip.group_index) * (wavelength - centre) / centre, dtype=float
        )
