"""A batch of stacks on a scene: checked at the door, laid out as the kernels take it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from coatings.optics.arrays import (
    Complexes,
    Integers,
    Reals,
    check_finite,
    check_shape,
    numbers,
    parts,
    place_in,
    refuse,
)
from coatings.optics.kernel import first_bad
from coatings.optics.scene import Scene

KernelArguments = tuple[Reals, Integers, Reals, Reals, Reals, Reals, Reals, Reals, Reals]

_NO_PLANE: Reals = np.empty((0, 0))
_NO_LINE: Reals = np.empty(0)


@dataclass(frozen=True, eq=False)
class Batch:
    """S stacks of L layers and what shifts their indices, ready for the kernels."""

    scene: Scene
    thickness: Reals
    film: Integers
    film_shift: Reals
    incident_shift: Reals

    @classmethod
    def of(
        cls,
        scene: Scene,
        thickness_nm: ArrayLike,
        film: ArrayLike,
        film_shift: ArrayLike | None,
        incident_shift: ArrayLike | None,
    ) -> Batch:
        """Check and lay out; raises ArrayError with the argument, the place and the value."""
        thickness = numbers(thickness_nm, "thickness_nm", np.float64, 2)
        if not len(thickness):
            raise refuse("thickness_nm", "holds no stack; give one row or more")
        kinds = _film(film, thickness.shape)
        _check_layers(thickness, kinds, len(scene.films))
        by_film, by_incident = _NO_PLANE, _NO_LINE
        if film_shift is not None:
            by_film = _film_shift(film_shift, (len(thickness), len(scene.films)))
        if incident_shift is not None:
            by_incident = numbers(incident_shift, "incident_shift", np.float64, 1)
            check_shape(by_incident, "incident_shift", (len(thickness),))
            check_finite(by_incident, "incident_shift")
        return cls(scene, thickness, kinds, by_film, by_incident)

    @property
    def shape(self) -> tuple[int, int, int]:
        """S, P, L: stacks, points, layers."""
        return self.thickness.shape[0], self.scene.points, self.thickness.shape[1]

    @property
    def cost_each(self) -> int:
        """Layers times points of one stack, the bare facet counted as a layer."""
        _, points, layers = self.shape
        return (layers + 1) * points

    @property
    def incident_index(self) -> Complexes:
        """Incident index of every stack, shift included, (1 or S, P)."""
        incident = self.scene.incident[None, :]
        if not self.incident_shift.size:
            return incident
        shifted: Complexes = incident + self.incident_shift[:, None]
        return shifted

    def arguments(self, rows: slice) -> KernelArguments:
        """What every kernel takes first, for the stacks in ``rows``."""
        around = self.scene.kernel_arrays
        return (
            self.thickness[rows],
            self.film[rows] if len(self.film) > 1 else self.film,
            around["films"],
            self.film_shift[rows],
            around["media"],
            self.incident_shift[rows],
            around["q"],
            around["tm"],
            around["nm"],
        )


def _film(film: ArrayLike, shape: tuple[int, ...]) -> Integers:
    axes = min(max(np.ndim(film), 1), 2)
    kinds = numbers(film, "film", np.int64, axes)
    check_shape(kinds, "film", shape[-axes:])
    return kinds.reshape(-1, shape[-1]) if shape[-1] else kinds.reshape(1, 0)


def _check_layers(thickness: Reals, kinds: Integers, films: int) -> None:
    bad, unknown = first_bad(thickness, kinds, films)
    if bad >= 0:
        at = place_in(bad, thickness.shape)
        raise refuse(f"thickness_nm{at}", f"is {thickness[tuple(at)]} nm; give 0 or more")
    if unknown >= 0:
        at = place_in(unknown, kinds.shape)
        value = kinds[tuple(at)]
        if len(kinds) == 1:
            at = at[1:]
        raise refuse(f"film{at}", f"is {value}; the scene has {films} films, counted from 0")


def _film_shift(shift: ArrayLike, shape: tuple[int, int]) -> Reals:
    array = numbers(shift, "film_shift", np.complex128, 2)
    check_shape(array, "film_shift", shape)
    check_finite(array, "film_shift")
    return parts(array)
