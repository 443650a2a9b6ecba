"""Group delay on reflection."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.constants import speed_of_light

from coatings.optics.arrays import Complexes, Reals, check_finite, check_shape, numbers
from coatings.optics.batch import Batch
from coatings.optics.derivatives import derivatives
from coatings.optics.scene import Scene

LIGHT_NM_PER_FS = speed_of_light * 1e-6


@dataclass(frozen=True, eq=False)
class Dispersion:
    """Slopes of the indices of a scene with wavelength [1/nm]; what is not given is zero.

    Attributes
    ----------
    films : array (M, P) or None
    incident, outside : array (P,) or None
    """

    films: ArrayLike | None = None
    incident: ArrayLike | None = None
    outside: ArrayLike | None = None


def group_delay(
    scene: Scene,
    thickness_nm: ArrayLike,
    *,
    film: ArrayLike,
    film_shift: ArrayLike | None = None,
    incident_shift: ArrayLike | None = None,
    dispersion: Dispersion | None = None,
) -> Reals:
    """Delay of a pulse on reflection, d phase / d omega, from exact derivatives at fixed q.

    Parameters
    ----------
    dispersion : Dispersion, optional
        Slopes of the indices with wavelength; None takes them as constant.
    scene, thickness_nm, film, film_shift, incident_shift
        As for `response`.

    Returns
    -------
    array (S, P)
        Group delay [fs], -(wavelength^2 / 2 pi c) Im(dr/d wavelength / r); nan where r is 0.

    Raises
    ------
    ArrayError
        Naming the argument, the place and the value.
    """
    batch = Batch.of(scene, thickness_nm, film, film_shift, incident_shift)
    found = derivatives(batch, by_index=False)
    nm = scene.wavelength_nm
    slope = -np.einsum("spl,sl->sp", found.dr, batch.thickness) / nm
    if dispersion is not None:
        slope = slope + _through_indices(batch, dispersion, found.edge)
    dark = found.response.r == 0.0
    ratio = np.where(dark, complex(np.nan, np.nan), slope / np.where(dark, 1.0, found.response.r))
    delay: Reals = -(nm**2) / (2.0 * np.pi * LIGHT_NM_PER_FS) * ratio.imag
    return delay


def _through_indices(
    batch: Batch, dispersion: Dispersion, edge: tuple[Complexes, Complexes]
) -> Complexes:
    """The part of dr/d wavelength that comes through the indices."""
    scene = batch.scene
    stacks, points, _ = batch.shape
    slope = np.zeros((stacks, points), np.complex128)
    if dispersion.films is not None:
        by_nm = _slopes(dispersion.films, "dispersion.films", scene.films.shape)
        found = derivatives(batch, by_index=True)
        slope += (found.dr * by_nm[batch.film].swapaxes(1, 2)).sum(axis=2)
    sides = (
        (dispersion.incident, "dispersion.incident", batch.incident_index),
        (dispersion.outside, "dispersion.outside", scene.outside[None, :]),
    )
    for (given, where, index), by_admittance in zip(sides, edge, strict=True):
        if given is not None:
            by_nm = _slopes(given, where, (points,))
            slope += by_admittance * _admittance_slope(scene, index) * by_nm
    return slope


def _slopes(values: ArrayLike, where: str, shape: tuple[int, ...]) -> Complexes:
    array: Complexes = numbers(values, where, np.complex128, len(shape))
    check_shape(array, where, shape)
    check_finite(array, where)
    return array


def _admittance_slope(scene: Scene, index: Complexes) -> Complexes:
    """d eta/dN of a half-space at fixed q: N/kappa (TE), 2 N/kappa - N^3/kappa^3 (TM)."""
    if scene.q is None:
        return np.ones_like(index)
    root = np.exp(0.25j * np.pi) * np.sqrt(-1j * (index - scene.q) * (index + scene.q))
    steepness = index / root
    slope: Complexes = np.where(scene.tm, 2.0 * steepness - steepness**3, steepness)
    return slope
