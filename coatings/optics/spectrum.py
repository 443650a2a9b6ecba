"""R, T, A and phase of stacks on the chip.

Signs and symbols: time factor exp(-i w t), index n + i k, k > 0 absorbs. r is the ratio of the
tangential electric fields for both polarizations. Layers are listed chip outward.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike

from coatings.optics.arrays import Complexes, Reals, parts
from coatings.optics.batch import Batch
from coatings.optics.kernel import respond
from coatings.optics.scene import Scene


@dataclass(frozen=True, eq=False)
class Response:
    """What S stacks do to the light at P points.

    Attributes
    ----------
    r, t : complex array (S, P)
        Ratio of the reflected and of the transmitted tangential electric field to the incident one.
    T : array (S, P)
        Transmittance Re(eta_out) / Re(eta_in) |t|^2; nan where no power flows in the incident
        medium (a real index below q).
    """

    r: Complexes
    t: Complexes
    T: Reals

    @property
    def R(self) -> Reals:
        """Reflectance |r|^2, array (S, P)."""
        return self.r.real**2 + self.r.imag**2

    @property
    def A(self) -> Reals:
        """Absorptance 1 - R - T, array (S, P); meant for a real incident index."""
        return 1.0 - self.R - self.T

    @property
    def phase_rad(self) -> Reals:
        """Phase of r [rad], array (S, P), in (-pi, pi]."""
        return np.angle(self.r)


def response(
    scene: Scene,
    thickness_nm: ArrayLike,
    *,
    film: ArrayLike,
    film_shift: ArrayLike | None = None,
    incident_shift: ArrayLike | None = None,
) -> Response:
    """Amplitudes and powers of stacks by characteristic matrices.

    Parameters
    ----------
    scene : Scene
        Points and indices.
    thickness_nm : array (S, L)
        Thickness of each layer [nm], 0 or more, chip outward; L may be 0.
    film : int array (L,) or (S, L)
        Which row of ``scene.films`` each layer is made of.
    film_shift : array (S, M), optional
        Added to the index of each film [1], stack by stack; may be complex.
    incident_shift : array (S,), optional
        Added to the incident index [1]; q stays.

    Returns
    -------
    Response
        With r, t, R, T, A and phase_rad, all (S, P).

    Raises
    ------
    ArrayError
        Naming the argument, the place and the value.

    References
    ----------
    F. Abeles, Ann. Phys. (Paris) 12, 596 (1950), for the matrices (from memory).
    """
    return respond_to(Batch.of(scene, thickness_nm, film, film_shift, incident_shift))


def respond_to(batch: Batch) -> Response:
    """`response` of a batch that is checked already."""
    stacks, points, _ = batch.shape
    r, t = np.empty((stacks, points), np.complex128), np.empty((stacks, points), np.complex128)
    big_t = np.empty((stacks, points))
    batch.run(respond, parts(r), parts(t), big_t, np.empty((stacks, 0)))
    return Response(r, t, big_t)


def reflection(
    scene: Scene,
    thickness_nm: ArrayLike,
    *,
    film: ArrayLike,
    film_shift: ArrayLike | None = None,
    incident_shift: ArrayLike | None = None,
) -> Complexes:
    """r alone, complex array (S, P): `response`'s r for less time and memory.

    Parameters, errors and reference as for `response`.
    """
    batch = Batch.of(scene, thickness_nm, film, film_shift, incident_shift)
    stacks, points, _ = batch.shape
    r, unwanted = np.empty((stacks, points), np.complex128), np.empty((stacks, 0))
    batch.run(respond, parts(r), unwanted, unwanted, unwanted)
    return r


def reflectance(
    scene: Scene,
    thickness_nm: ArrayLike,
    *,
    film: ArrayLike,
    film_shift: ArrayLike | None = None,
    incident_shift: ArrayLike | None = None,
) -> Reals:
    """R alone, array (S, P): `response`'s R for a fraction of its memory.

    Parameters, errors and reference as for `response`.
    """
    batch = Batch.of(scene, thickness_nm, film, film_shift, incident_shift)
    stacks, points, _ = batch.shape
    big_r, unwanted = np.empty((stacks, points)), np.empty((stacks, 0))
    batch.run(respond, unwanted, unwanted, unwanted, big_r)
    return big_r
