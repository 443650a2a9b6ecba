"""A costly light replaced by a cheap one near one stack.

The guided mode's amplitude differs from the plane wave's by an amount that changes slowly from stack to
stack. Near an ordered stack d0

    r(d, N) = scale r_plane(d, N) + gap + sum_l by_nm_l (d_l - d0_l) + sum_m by_film_m dN_m + by_incident dn

is exact to first order in every error of a run, and has the plane wave's curvature. The scale is 1, for a
tilted stripe its lateral overlap. gap and by_nm come from exact values and derivatives at d0, by_film and
by_incident from central differences.
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from functools import cached_property
from typing import Any

import numpy as np
from numpy.typing import NDArray

from coatings.optics.arrays import Complexes, Integers, Reals
from coatings.optics.facet import ModalFacet
from coatings.optics.gradients import amplitude_gradient
from coatings.optics.light import (
    FacetShares,
    JointLight,
    Light,
    ModeLight,
    PlaneLight,
    Share,
    scene_at,
)
from coatings.optics.scene import Scene
from coatings.optics.spectrum import reflection

INDEX_STEP = 1e-3


@dataclass(frozen=True, eq=False)
class NearbyLight:
    """A guided mode near one stack of L layers ``film`` (L,), ``nm`` (L,) [nm]; see the module.

    ``gap`` (P,), ``by_nm`` (P, L) [1/nm], ``by_film`` (P, M), ``by_incident`` (P,): the mode's amplitude less
    the plane wave's, and its slopes. T, A and S are not told apart: ``exact`` is asked for them.
    """

    exact: ModeLight
    scene: Scene
    scale: Reals
    film: Integers
    nm: Reals
    gap: Complexes
    by_nm: Complexes
    by_film: Complexes
    by_incident: Complexes
    _alone: dict[int, NearbyLight] = field(init=False, repr=False, default_factory=dict)

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
        r = self.scale * reflection(self.scene, nm, film=film, **shifts) + self._gap(nm, **shifts)
        return squared(r)

    def absorbed(self, nm: Reals, *, film: Integers, **shifts: Any) -> tuple[Reals, Reals]:
        """R and A (S, P); A is the plane wave's with what the mode absorbs more at the stack here."""
        flat = PlaneLight(self.scene).shares(nm, film=film, **shifts).A
        return self.reflectance(nm, film=film, **shifts), flat + self._more_absorbed

    @cached_property
    def _more_absorbed(self) -> Reals:
        here = self.nm[None]
        exact = self.exact.shares(here, film=self.film).A
        more: Reals = (exact - PlaneLight(self.scene).shares(here, film=self.film).A)[0]
        return more

    def gradient(self, nm: Reals, *, film: Integers, of: Share = "R") -> tuple[Reals, Reals]:
        """R or A (S, P) and its derivative (S, P, L) [1/nm]; for A the plane wave's."""
        if of != "R":
            A, slope = PlaneLight(self.scene).gradient(nm, film=film, of=of)
            return A + self._more_absorbed, slope
        return self._gradient(nm, film)

    def weighted_gradient(
        self, nm: Reals, *, film: Integers, weight: Reals, of: Share = "R", **shifts: Any
    ) -> Reals:
        """Sum over points of weight (S, P) times the derivative by thickness, (S, L) [1/nm]."""
        if of != "R":
            return PlaneLight(self.scene).weighted_gradient(
                nm, film=film, weight=weight, of=of, **shifts
            )
        total = np.zeros_like(nm)
        for point in np.flatnonzero(weight.any(axis=0)):  # a search weighs few points of each chip
            rows = np.flatnonzero(weight[:, point])
            part = {name: values[rows] for name, values in shifts.items() if values is not None}
            slope = self._at_one(int(point))._gradient(nm[rows], film, **part)[1]
            total[rows] += weight[rows, point, None] * slope[:, 0]
        return total

    def at(self, points: Integers) -> NearbyLight:
        """The same at a selection of the points; the exact light is kept whole until it is asked for."""
        return replace(
            self,
            exact=_Later(self.exact, points),
            scene=scene_at(self.scene, points),
            scale=self.scale[points],
            gap=self.gap[points],
            by_nm=self.by_nm[points],
            by_film=self.by_film[points],
            by_incident=self.by_incident[points],
        )

    def _at_one(self, point: int) -> NearbyLight:
        if point not in self._alone:
            self._alone[point] = self.at(np.array([point]))
        return self._alone[point]

    def _gap(
        self, nm: Reals, *, film_shift: Reals | None = None, incident_shift: Reals | None = None
    ) -> Complexes:
        """Amplitude (S, P) by which the mode differs from the plane wave; one real product does it."""
        films = len(self.scene.films)
        off = np.zeros((len(nm), nm.shape[1] + films + 1))
        off[:, : nm.shape[1]] = nm - self.nm
        if film_shift is not None:
            off[:, nm.shape[1] : -1] = film_shift
        if incident_shift is not None:
            off[:, -1] = incident_shift
        slopes = np.ascontiguousarray(
            np.vstack([self.by_nm.T, self.by_film.T, self.by_incident[None]])
        )
        gap = np.ascontiguousarray(off @ slopes.view(np.float64)).view(np.complex128)
        gap += self.gap
        return gap

    def _gradient(self, nm: Reals, film: Integers, **shifts: Any) -> tuple[Reals, Reals]:
        r, slope = amplitude_gradient(self.scene, nm, film=film, **shifts)
        r = self.scale * r + self._gap(nm, **shifts)
        slope = self.scale[:, None] * slope + self.by_nm
        return squared(r), 2.0 * (r.conj()[:, :, None] * slope).real


@dataclass(frozen=True, eq=False)
class RoughLight:
    """A tilted mode as its lateral overlap times the plane wave: where many stacks are compared at once."""

    exact: ModeLight
    scene: Scene
    square: Reals

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
        """R (S, P) of stacks ``nm`` (S, L) [nm]."""
        return self.square * PlaneLight(self.scene).reflectance(nm, film=film, **shifts)

    def absorbed(self, nm: Reals, *, film: Integers, **shifts: Any) -> tuple[Reals, Reals]:
        """R and A (S, P); A is the plane wave's."""
        A = PlaneLight(self.scene).shares(nm, film=film, **shifts).A
        return self.reflectance(nm, film=film, **shifts), A

    def gradient(self, nm: Reals, *, film: Integers, of: Share = "R") -> tuple[Reals, Reals]:
        """R (S, P) and its derivative (S, P, L) [1/nm]; A by the exact light."""
        if of != "R":
            return self.exact.gradient(nm, film=film, of=of)
        R, slope = PlaneLight(self.scene).gradient(nm, film=film)
        return self.square * R, self.square[:, None] * slope

    def weighted_gradient(
        self, nm: Reals, *, film: Integers, weight: Reals, of: Share = "R", **shifts: Any
    ) -> Reals:
        """Sum over points of weight (S, P) times the derivative by thickness, (S, L) [1/nm]."""
        square = self.square if of == "R" else np.ones(len(self.square))
        return PlaneLight(self.scene).weighted_gradient(
            nm, film=film, weight=weight * square, of=of, **shifts
        )

    def at(self, points: Integers) -> RoughLight:
        """The same at a selection of the points."""
        return RoughLight(
            _Later(self.exact, points), scene_at(self.scene, points), self.square[points]
        )


class _Later(ModeLight):
    """A selection of a mode's points that is worked out when something is asked of it."""

    def __init__(self, whole: ModeLight, points: Integers) -> None:
        object.__setattr__(self, "_whole", whole)
        object.__setattr__(self, "_points", points)

    def __getattr__(self, name: str) -> Any:
        if name != "facet":
            raise AttributeError(name)
        object.__setattr__(self, "facet", self._whole.at(self._points).facet)
        return self.facet


def nearby(light: ModeLight, nm: Reals, *, film: Integers) -> NearbyLight:
    """The light near a stack: ``nm`` (L,) [nm], ``film`` (L,) rows, every layer counted.

    One exact gradient and two evaluations for each film and for the chip.
    """
    scene, scale = light.plane, light.scale
    here = nm[None]
    r, slope = light.facet.amplitude_gradient(here, film=film)
    plane_r, plane_slope = amplitude_gradient(scene, here, film=film)
    films, shifts = len(scene.films), _probes(len(scene.films))
    many = np.repeat(here, len(shifts), axis=0)
    probe = {"film_shift": shifts[:, :films], "incident_shift": shifts[:, films]}
    gap = light.facet.reflection(many, film=film, **probe) - scale * reflection(
        scene, many, film=film, **probe
    )
    half = len(shifts) // 2
    slopes = (gap[:half] - gap[half:]) / (2.0 * INDEX_STEP)
    return NearbyLight(
        exact=light,
        scene=scene,
        scale=scale,
        film=film,
        nm=nm,
        gap=(r - scale * plane_r)[0],
        by_nm=(slope - scale[:, None] * plane_slope)[0],
        by_film=np.ascontiguousarray(slopes[:films].T),
        by_incident=slopes[films],
    )


def near(light: Light, nm: Reals, *, film: Integers) -> Light:
    """A light that is quick near one stack and exact there to first order; a plane wave is itself."""
    if isinstance(light, JointLight):
        return JointLight(tuple(near(part, nm, film=film) for part in light.parts))
    if isinstance(light, NearbyLight | RoughLight):
        return near(light.exact, nm, film=film)
    return nearby(light, nm, film=film) if isinstance(light, ModeLight) else light


def rough(light: Light) -> Light:
    """A light for comparing many stacks: a guided mode on fewer nodes, a tilted one by its overlap; a plane
    wave is itself."""
    if isinstance(light, JointLight):
        return JointLight(tuple(rough(part) for part in light.parts))
    if not isinstance(light, ModeLight):
        return light
    if isinstance(light.facet, ModalFacet):
        return ModeLight(replace(light.facet, fine=0))
    return RoughLight(light, light.plane, light.scale**2)


def _probes(films: int) -> Reals:
    """Shifts (2 (M + 1), M + 1): every film's index, then the chip's, up and then down."""
    one: Reals = INDEX_STEP * np.eye(films + 1)
    return np.vstack([one, -one])


def squared(amplitude: NDArray[np.complex128]) -> Reals:
    """|amplitude|^2."""
    return amplitude.real**2 + amplitude.imag**2
