"""A batch of stacks on a scene: checked at the door, laid out and shared out to the kernels."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import ArrayLike, NDArray

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
from coatings.optics.threads import share, worthwhile

_NO_PLANE: Reals = np.empty((0, 0))
_NO_LINE: Reals = np.empty(0)


class Batch(NamedTuple):
    """S stacks of L layers and what shifts their indices, as the kernels take them."""

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
        stacks, layers = self.thickness.shape
        return stacks, self.scene.points, layers

    @property
    def incident_index(self) -> Complexes:
        """Incident index of every stack, shift included, (1 or S, P)."""
        incident = self.scene.incident[None, :]
        if not self.incident_shift.size:
            return incident
        shifted: Complexes = incident + self.incident_shift[:, None]
        return shifted

    def run(
        self,
        kernel: Callable[..., None],
        *by_stack: NDArray[Any],
        flags: tuple[bool, ...] = (),
        effort: int = 1,
    ) -> None:
        """Call a kernel on all stacks, in threads when that is worth while.

        ``by_stack`` are its arrays with an axis of stacks first; ``flags`` its last arguments;
        ``effort`` its cost for a layer at a point, in forward passes.
        """
        scene_arrays = self.scene.kernel_arrays
        stacks, points, layers = self.shape
        cost_each = effort * points * (layers + 1)
        if worthwhile(stacks, cost_each) < 2:
            kernel(
                self.thickness,
                self.film,
                *scene_arrays,
                self.film_shift,
                self.incident_shift,
                *by_stack,
                *flags,
            )
            return

        def job(rows: slice) -> None:
            kernel(
                self.thickness[rows],
                self.film[rows] if len(self.film) > 1 else self.film,
                *scene_arrays,
                self.film_shift[rows],
                self.incident_shift[rows],
                *(array[rows] for array in by_stack),
                *flags,
            )

        share(stacks, cost_each, job)


def _film(film: ArrayLike, shape: tuple[int, ...]) -> Integers:
    axes = film.ndim if isinstance(film, np.ndarray) else np.ndim(film)
    axes = min(max(axes, 1), 2)
    kinds = numbers(film, "film", np.int64, axes)
    check_shape(kinds, "film", shape[-axes:])
    return kinds if axes == 2 else kinds[None, :]


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
