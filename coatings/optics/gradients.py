"""Exact derivatives of R, T, A and of the amplitudes, and the group delay."""

from __future__ import annotations

from typing import Literal

import numpy as np
from numpy.typing import ArrayLike

from coatings.errors import InputError, Problem
from coatings.optics.arrays import Complexes, Reals, check_finite, check_shape, numbers
from coatings.optics.batch import Batch
from coatings.optics.derivatives import Derivatives, derivatives
from coatings.optics.scene import Scene
from coatings.optics.slopes import climb

Power = Literal["R", "T", "A"]
Amplitude = Literal["r", "t"]
Variable = Literal["thickness", "index"]


def weighted_gradient(
    scene: Scene,
    thickness_nm: ArrayLike,
    *,
    film: ArrayLike,
    weight: ArrayLike,
    film_shift: ArrayLike | None = None,
    incident_shift: ArrayLike | None = None,
) -> tuple[Reals, Reals]:
    """R and sum over points of weight dR/dd, without the derivatives of single points.

    Parameters
    ----------
    weight : array (S, P)
        Weight of each point of each stack, any sign. Weights that depend on R take two calls:
        `reflectance` first.
    scene, thickness_nm, film, film_shift, incident_shift
        As for `response`.

    Returns
    -------
    R : array (S, P)
    slope : array (S, L)
        sum_p weight[s, p] dR[s, p]/d thickness_nm[s, l], in [1/nm] times the weight's unit.

    Raises
    ------
    ArrayError
        Naming the argument, the place and the value.
    """
    batch = Batch.of(scene, thickness_nm, film, film_shift, incident_shift)
    stacks, points, layers = batch.shape
    weights = numbers(weight, "weight", np.float64, 2)
    check_shape(weights, "weight", (stacks, points))
    check_finite(weights, "weight")
    big_r, slope = np.empty((stacks, points)), np.zeros((stacks, layers))
    batch.run(climb, weights, big_r, slope, np.empty((stacks, layers, 0)))
    return big_r, slope


def gradient(
    scene: Scene,
    thickness_nm: ArrayLike,
    *,
    film: ArrayLike,
    film_shift: ArrayLike | None = None,
    incident_shift: ArrayLike | None = None,
    of: Power = "R",
) -> tuple[Reals, Reals]:
    """R, T or A and its derivative with respect to every thickness.

    Parameters
    ----------
    of : "R", "T" or "A"
        Which power. R costs about two forward passes, T and A some tens.
    scene, thickness_nm, film, film_shift, incident_shift
        As for `response`.

    Returns
    -------
    value : array (S, P)
    slope : array (S, P, L)
        d value / d thickness_nm [1/nm].

    Raises
    ------
    ArrayError
        Naming the argument, the place and the value.
    InputError
        When ``of`` is none of the three.
    """
    batch = Batch.of(scene, thickness_nm, film, film_shift, incident_shift)
    _check_of(of, ("R", "T", "A"))
    if of == "R":
        return _reflectance_gradient(batch)
    found = derivatives(batch, by_index=False)
    value, slope = _powers(found, of)
    return value, slope.real


def index_gradient(
    scene: Scene,
    thickness_nm: ArrayLike,
    *,
    film: ArrayLike,
    film_shift: ArrayLike | None = None,
    incident_shift: ArrayLike | None = None,
    of: Power = "R",
) -> tuple[Reals, Complexes]:
    """R, T or A and its derivative with respect to every layer's index n + i k, at fixed q.

    Parameters as for `gradient`.

    Returns
    -------
    value : array (S, P)
    slope : complex array (S, P, L)
        Real part d value/dn, imaginary part d value/dk. The derivative with respect to a film
        material is the sum over its layers.

    Raises
    ------
    ArrayError
        Naming the argument, the place and the value.
    InputError
        When ``of`` is none of the three.
    """
    batch = Batch.of(scene, thickness_nm, film, film_shift, incident_shift)
    _check_of(of, ("R", "T", "A"))
    return _powers(derivatives(batch, by_index=True), of)


def amplitude_gradient(
    scene: Scene,
    thickness_nm: ArrayLike,
    *,
    film: ArrayLike,
    film_shift: ArrayLike | None = None,
    incident_shift: ArrayLike | None = None,
    of: Amplitude = "r",
    by: Variable = "thickness",
) -> tuple[Complexes, Complexes]:
    """The amplitude r or t and its derivative with respect to every thickness or every index.

    Parameters
    ----------
    of : "r" or "t"
        Ratio of the reflected or of the transmitted tangential electric field.
    by : "thickness" or "index"
        Thickness [nm], or complex index n + i k at fixed q (r and t are analytic in it).
    scene, thickness_nm, film, film_shift, incident_shift
        As for `response`.

    Returns
    -------
    value : complex array (S, P)
    slope : complex array (S, P, L)
        [1/nm] or [1].

    Raises
    ------
    ArrayError
        Naming the argument, the place and the value.
    InputError
        When ``of`` or ``by`` is none of those named.
    """
    batch = Batch.of(scene, thickness_nm, film, film_shift, incident_shift)
    _check_of(of, ("r", "t"))
    _check_of(by, ("thickness", "index"), where="by")
    found = derivatives(batch, by_index=by == "index")
    if of == "r":
        return found.response.r, found.dr
    return found.response.t, found.response.t[:, :, None] * found.dlog_t


def _check_of(value: str, known: tuple[str, ...], where: str = "of") -> None:
    if value not in known:
        raise InputError(Problem(where, f"got {value!r}; give one of {', '.join(known)}"))


def _powers(found: Derivatives, of: Power) -> tuple[Reals, Complexes]:
    """Value, and slope whose parts are those along the real and the imaginary axis."""
    response = found.response
    by_r = 2.0 * response.r[:, :, None] * found.dr.conj()
    if of == "R":
        return response.R, by_r
    by_t = 2.0 * response.T[:, :, None] * found.dlog_t.conj()
    return (response.T, by_t) if of == "T" else (response.A, -by_r - by_t)


def _reflectance_gradient(batch: Batch) -> tuple[Reals, Reals]:
    stacks, points, layers = batch.shape
    big_r, slope = np.empty((stacks, points)), np.empty((stacks, layers, points))
    unwanted = np.empty((stacks, 0))
    batch.run(climb, unwanted, big_r, unwanted, slope)
    return big_r, slope.swapaxes(1, 2)
