"""A costly light replaced by a cheap one near one stack.

The guided mode's amplitude differs from the plane wave's by an amount that changes slowly from stack to
stack. Near an ordered stack d0

    r(d, N) = r_plane(d, N) + gap + sum_l by_nm_l (d_l - d0_l) + sum_m by_film_m dN_m + by_incident dn

is exact to first order in every error of a run, and has the plane wave's curvature. gap and by_nm come
from exact values and derivatives at d0; by_film and by_incident from central differences.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from coatings.optics.arrays import Complexes, Integers, Reals
from coatings.optics.gradients import amplitude_gradient
from coatings.optics.light import FacetShares, ModalLight, PlaneLight, Share
from coatings.optics.scene import Scene
from coatings.optics.spectrum import reflection

INDEX_STEP = 1e-3


@dataclass(frozen=True, eq=False)
class NearbyLight:
    """A guided mode near one stack of L layers ``film`` (L,), ``nm`` (L,) [nm]; see the module.

    ``gap`` (P,), ``by_nm`` (P, L) [1/nm], ``by_film`` (P, M), ``by_incident`` (P,): the mode's amplitude less
    the plane wave's, and its slopes. T, A and S are not told apart: ``exact`` is asked for them.
    """

    exact: ModalLight
    scene: Scene
    film: Integers
    nm: Reals
    gap: Complexes
    by_nm: Complexes
    by_film: Complexes
    by_incident: Complexes

    @property
    def model(self) -> str:
        """The exact light's model."""
        return self.exact.model

    @property
    def plane(self) -> Scene:
        """The plane wave's scene."""
        return self.scene

    def shares(self, nm: Reals, *, film: Integers, **shifts: Any) -> FacetShares:
        """r, R, T, A, S of stacks, by the exact light."""
        return self.exact.shares(nm, film=film, **shifts)

    def reflectance(self, nm: Reals, *, film: Integers, **shifts: Any) -> Reals:
        """R (S, P) of stacks ``nm`` (S, L) [nm] of the same films as the stack here."""
        r = reflection(self.scene, nm, film=film, **shifts) + self._gap(nm, **shifts)
        return squared(r)

    def gradient(self, nm: Reals, *, film: Integers, of: Share = "R") -> tuple[Reals, Reals]:
        """R (S, P) and its derivative (S, P, L) [1/nm]; A by the exact light."""
        if of != "R":
            return self.exact.gradient(nm, film=film, of=of)
        return self._gradient(nm, film)

    def weighted_gradient(
        self, nm: Reals, *, film: Integers, weight: Reals, of: Share = "R", **shifts: Any
    ) -> Reals:
        """Sum over points of weight (S, P) times the derivative by thickness, (S, L) [1/nm]."""
        if of != "R":
            return self.exact.weighted_gradient(nm, film=film, weight=weight, of=of, **shifts)
        slope = self._gradient(nm, film, **shifts)[1]
        total: Reals = np.einsum("sp,spl->sl", weight, slope)
        return total

    def at(self, points: Integers) -> NearbyLight:
        """The same at a selection of the points; the exact light is kept whole until it is asked for."""
        return replace(
            self,
            exact=_Later(self.exact, points),
            scene=PlaneLight(self.scene).at(points).scene,
            gap=self.gap[points],
            by_nm=self.by_nm[points],
            by_film=self.by_film[points],
            by_incident=self.by_incident[points],
        )

    def _gap(
        self, nm: Reals, *, film_shift: Any = None, incident_shift: Any = None
    ) -> Complexes:
        gap: Complexes = self.gap + (nm - self.nm) @ self.by_nm.T
        if film_shift is not None:
            gap = gap + np.asarray(film_shift) @ self.by_film.T
        if incident_shift is not None:
            gap = gap + np.asarray(incident_shift)[:, None] * self.by_incident
        return gap

    def _gradient(self, nm: Reals, film: Integers, **shifts: Any) -> tuple[Reals, Reals]:
        r, slope = amplitude_gradient(self.scene, nm, film=film, **shifts)
        r = r + self._gap(nm, **shifts)
        return squared(r), 2.0 * (r.conj()[:, :, None] * (slope + self.by_nm)).real


class _Later(ModalLight):
    """A selection of a guided mode's points that is solved when something is asked of it."""

    def __init__(self, whole: ModalLight, points: Integers) -> None:
        object.__setattr__(self, "_whole", whole)
        object.__setattr__(self, "_points", points)
        object.__setattr__(self, "model", whole.model)

    def __getattr__(self, name: str) -> Any:
        if name != "facet":
            raise AttributeError(name)
        object.__setattr__(self, "facet", self._whole.at(self._points).facet)
        return self.facet


def nearby(light: ModalLight, nm: Reals, *, film: Integers) -> NearbyLight:
    """The light near a stack: ``nm`` (L,) [nm], ``film`` (L,) rows, every layer counted.

    One exact gradient and two evaluations for each film and for the chip.
    """
    scene = light.plane
    here = nm[None]
    r, slope = light.facet.amplitude_gradient(here, film=film)
    plane_r, plane_slope = amplitude_gradient(scene, here, film=film)
    films, shifts = len(scene.films), _probes(len(scene.films))
    many = np.repeat(here, len(shifts), axis=0)
    probe = {"film_shift": shifts[:, :films], "incident_shift": shifts[:, films]}
    gap = light.facet.reflection(many, film=film, **probe) - reflection(
        scene, many, film=film, **probe
    )
    half = len(shifts) // 2
    slopes = (gap[:half] - gap[half:]) / (2.0 * INDEX_STEP)
    return NearbyLight(
        exact=light,
        scene=scene,
        film=film,
        nm=nm,
        gap=(r - plane_r)[0],
        by_nm=(slope - plane_slope)[0],
        by_film=np.ascontiguousarray(slopes[:films].T),
        by_incident=slopes[films],
    )


def _probes(films: int) -> Reals:
    """Shifts (2 (M + 1), M + 1): every film's index, then the chip's, up and then down."""
    one: Reals = INDEX_STEP * np.eye(films + 1)
    return np.vstack([one, -one])


def squared(amplitude: NDArray[np.complex128]) -> Reals:
    """|amplitude|^2."""
    return amplitude.real**2 + amplitude.imag**2
