"""What a facet does to the chip's light, whichever model holds: one face for design, curves and laser.

A *light* answers for P points (wavelengths) and many stacks at once. `PlaneLight` is the plane wave at
the modal index, `ModeLight` what returns into a guided or a tilted mode, `JointLight` several of them side
by side, for windows that see the facet in different ways.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any, Literal, Protocol

import numpy as np
from numpy.typing import NDArray

from coatings.optics.arrays import Complexes, Integers, Reals
from coatings.optics.facet import ModalFacet
from coatings.optics.gradients import gradient, weighted_gradient
from coatings.optics.guide import fundamental
from coatings.optics.scene import Scene
from coatings.optics.spectrum import reflectance, response
from coatings.optics.tilt import TiltedFacet, lateral_overlap

Share = Literal["R", "A"]


@dataclass(frozen=True, eq=False)
class FacetShares:
    """Amplitude r of the tangential electric field and the shares R, T, A, S of the arriving power,
    arrays (S, P): reflected, leaving, absorbed in the coating, thrown back outside the mode."""

    r: Complexes
    R: Reals
    T: Reals
    A: Reals
    S: Reals


class Light(Protocol):
    """The facet at P points. ``model`` names the model; ``plane`` is the scene of the plane wave at the same
    points, close enough to start a search from. ``film``, ``film_shift`` and ``incident_shift`` are those of
    `optics.response`."""

    @property
    def model(self) -> str:
        """Name of the model: "plane", "modal" or "tilted"."""

    @property
    def plane(self) -> Scene:
        """The plane wave's scene at the same points."""

    def shares(self, nm: Reals, *, film: Integers, **shifts: Any) -> FacetShares:
        """r, R, T, A, S of stacks ``nm`` (S, L) [nm]."""

    def reflectance(self, nm: Reals, *, film: Integers, **shifts: Any) -> Reals:
        """R (S, P) of stacks ``nm`` (S, L) [nm]."""

    def absorbed(self, nm: Reals, *, film: Integers, **shifts: Any) -> tuple[Reals, Reals]:
        """R and A (S, P) of stacks ``nm`` (S, L) [nm]."""

    def gradient(self, nm: Reals, *, film: Integers, of: Share = "R") -> tuple[Reals, Reals]:
        """R or A (S, P) and its derivative (S, P, L) by thickness [1/nm]."""

    def weighted_gradient(
        self, nm: Reals, *, film: Integers, weight: Reals, of: Share = "R", **shifts: Any
    ) -> Reals:
        """Sum over points of weight (S, P) times the derivative of R or A by thickness, (S, L) [1/nm]."""

    def at(self, points: Integers) -> Light:
        """The same facet at a selection of its points."""


@dataclass(frozen=True, eq=False)
class PlaneLight:
    """A plane wave at the modal index; ``scene`` may be oblique (a film at the tilt angle)."""

    scene: Scene
    model: str = "plane"

    @property
    def plane(self) -> Scene:
        """The scene itself."""
        return self.scene

    def shares(self, nm: Reals, *, film: Integers, **shifts: Any) -> FacetShares:
        """r, R, T, A, S of stacks ``nm`` (S, L) [nm]; a plane wave has no S."""
        found = response(self.scene, nm, film=film, **shifts)
        return FacetShares(found.r, found.R, found.T, found.A, np.zeros_like(found.T))

    def reflectance(self, nm: Reals, *, film: Integers, **shifts: Any) -> Reals:
        """R (S, P) of stacks ``nm`` (S, L) [nm]."""
        return reflectance(self.scene, nm, film=film, **shifts)

    def absorbed(self, nm: Reals, *, film: Integers, **shifts: Any) -> tuple[Reals, Reals]:
        """R and A (S, P) of stacks ``nm`` (S, L) [nm]."""
        found = self.shares(nm, film=film, **shifts)
        return found.R, found.A

    def gradient(self, nm: Reals, *, film: Integers, of: Share = "R") -> tuple[Reals, Reals]:
        """R or A (S, P) and its derivative (S, P, L) by thickness [1/nm]."""
        return gradient(self.scene, nm, film=film, of=of)

    def weighted_gradient(
        self, nm: Reals, *, film: Integers, weight: Reals, of: Share = "R", **shifts: Any
    ) -> Reals:
        """Sum over points of weight (S, P) times the derivative of R or A by thickness, (S, L) [1/nm]."""
        if of == "R":
            return weighted_gradient(self.scene, nm, film=film, weight=weight, **shifts)[1]
        slope = gradient(self.scene, nm, film=film, of=of, **shifts)[1]
        total: Reals = np.einsum("sp,spl->sl", weight, slope)
        return total

    def at(self, points: Integers) -> PlaneLight:
        """The same facet at a selection of its points."""
        return replace(self, scene=scene_at(self.scene, points))


@dataclass(frozen=True, eq=False)
class ModeLight:
    """What returns into a mode. Derivatives of A are those of the plane wave: a direction to search in."""

    facet: ModalFacet | TiltedFacet

    @property
    def model(self) -> str:
        """Name of the model."""
        return "modal" if isinstance(self.facet, ModalFacet) else "tilted"

    @property
    def scale(self) -> Reals:
        """Share (P,) of the plane wave's amplitude that the mode takes back to first order: one, or the
        overlap of a tilted mode with its image by an ideal mirror."""
        facet = self.facet
        if isinstance(facet, ModalFacet) or facet.lateral_um is None:
            return np.ones(self.plane.points)
        plane = facet.plane
        tilt: dict[str, float] = {"tilt_deg": facet.tilt_deg, "lateral_um": facet.lateral_um}
        return lateral_overlap(plane.wavelength_nm, plane.incident, **tilt)

    @property
    def plane(self) -> Scene:
        """The plane wave at the mode's effective index."""
        return self.facet.plane

    def shares(self, nm: Reals, *, film: Integers, **shifts: Any) -> FacetShares:
        """r, R, T, A, S of stacks ``nm`` (S, L) [nm]."""
        found = self.facet.response(nm, film=film, **shifts)
        return FacetShares(found.r, found.R, found.T, found.A, found.S)

    def reflectance(self, nm: Reals, *, film: Integers, **shifts: Any) -> Reals:
        """R (S, P) of stacks ``nm`` (S, L) [nm]."""
        return self.facet.reflectance(nm, film=film, **shifts)

    def absorbed(self, nm: Reals, *, film: Integers, **shifts: Any) -> tuple[Reals, Reals]:
        """R and A (S, P) of stacks ``nm`` (S, L) [nm]."""
        found = self.shares(nm, film=film, **shifts)
        return found.R, found.A

    def gradient(self, nm: Reals, *, film: Integers, of: Share = "R") -> tuple[Reals, Reals]:
        """R or A (S, P) and its derivative (S, P, L) by thickness [1/nm]."""
        if of == "R":
            return self.facet.gradient(nm, film=film)
        return self.shares(nm, film=film).A, gradient(self.plane, nm, film=film, of="A")[1]

    def weighted_gradient(
        self, nm: Reals, *, film: Integers, weight: Reals, of: Share = "R", **shifts: Any
    ) -> Reals:
        """Sum over points of weight (S, P) times the derivative of R or A by thickness, (S, L) [1/nm]."""
        if of == "R":
            return self.facet.weighted_gradient(nm, film=film, weight=weight, **shifts)[1]
        return PlaneLight(self.plane).weighted_gradient(
            nm, film=film, weight=weight, of=of, **shifts
        )

    def at(self, points: Integers) -> ModeLight:
        """The same facet at a selection of its points; a guided mode is solved anew there."""
        here = self.facet
        if isinstance(here, ModalFacet):
            return ModeLight(modal_facet_at(here, points))
        modal = None if here.modal is None else modal_facet_at(here.modal, points)
        plane = scene_at(here.plane, points)
        return ModeLight(TiltedFacet(plane, here.tilt_deg, here.lateral_um, modal))


def modal_facet_at(facet: ModalFacet, points: Integers) -> ModalFacet:
    """A guided mode's facet at a selection of its wavelengths."""
    guide = facet.mode.guide
    part = replace(
        guide,
        wavelength_nm=guide.wavelength_nm[points],
        index=guide.index[:, points],
        slope_per_nm=guide.slopes[:, points],
    )
    mode = fundamental(part, tm=facet.mode.tm)
    return ModalFacet(mode, facet.outside[points], facet.films[:, points], facet.fine)


@dataclass(frozen=True, eq=False)
class JointLight:
    """Several lights side by side: points of the first, then of the second, and so on."""

    parts: tuple[Light, ...]

    @property
    def model(self) -> str:
        """The parts' models, the richest first."""
        names = {part.model for part in self.parts}
        return next(name for name in ("tilted", "modal", "plane") if name in names)

    @property
    def plane(self) -> Scene:
        """The plane waves of all parts."""
        scenes = [part.plane for part in self.parts]
        q = None
        if any(scene.q is not None for scene in scenes):
            q = np.concatenate([np.zeros(s.points) if s.q is None else s.q for s in scenes])
        return Scene(
            wavelength_nm=np.concatenate([s.wavelength_nm for s in scenes]),
            incident=np.concatenate([s.incident for s in scenes]),
            outside=np.concatenate([s.outside for s in scenes]),
            films=np.hstack([s.films for s in scenes]),
            q=q,
            tm=np.concatenate([np.broadcast_to(s.tm, s.points) for s in scenes]),
        )

    def shares(self, nm: Reals, *, film: Integers, **shifts: Any) -> FacetShares:
        """r, R, T, A, S of stacks ``nm`` (S, L) [nm]."""
        found = [part.shares(nm, film=film, **shifts) for part in self.parts]
        return FacetShares(
            *(np.hstack([getattr(f, name) for f in found]) for name in ("r", "R", "T", "A", "S"))
        )

    def reflectance(self, nm: Reals, *, film: Integers, **shifts: Any) -> Reals:
        """R (S, P) of stacks ``nm`` (S, L) [nm]."""
        return np.hstack([part.reflectance(nm, film=film, **shifts) for part in self.parts])

    def absorbed(self, nm: Reals, *, film: Integers, **shifts: Any) -> tuple[Reals, Reals]:
        """R and A (S, P) of stacks ``nm`` (S, L) [nm]."""
        found = [part.absorbed(nm, film=film, **shifts) for part in self.parts]
        R, A = zip(*found, strict=True)
        return np.hstack(R), np.hstack(A)

    def gradient(self, nm: Reals, *, film: Integers, of: Share = "R") -> tuple[Reals, Reals]:
        """R or A (S, P) and its derivative (S, P, L) by thickness [1/nm]."""
        found = [part.gradient(nm, film=film, of=of) for part in self.parts]
        values, slopes = zip(*found, strict=True)
        return np.hstack(values), np.concatenate(slopes, axis=1)

    def weighted_gradient(
        self, nm: Reals, *, film: Integers, weight: Reals, of: Share = "R", **shifts: Any
    ) -> Reals:
        """Sum over points of weight (S, P) times the derivative of R or A by thickness, (S, L) [1/nm]."""
        ends = np.cumsum([part.plane.points for part in self.parts])[:-1]
        weights = np.split(weight, ends, axis=1)
        total: Reals = sum(
            (
                part.weighted_gradient(nm, film=film, weight=w, of=of, **shifts)
                for part, w in zip(self.parts, weights, strict=True)
                if w.any()
            ),
            start=np.zeros_like(nm),
        )
        return total

    def at(self, points: Integers) -> JointLight:
        """The same facet at a selection of its points, which must not go back from part to part."""
        ends = np.cumsum([part.plane.points for part in self.parts])
        starts = np.concatenate([[0], ends[:-1]])
        parts = []
        for part, start, end in zip(self.parts, starts, ends, strict=True):
            inside = points[(points >= start) & (points < end)] - start
            if len(inside):
                parts.append(part.at(inside))
        return JointLight(tuple(parts))


def joined(lights: Sequence[Light]) -> Light:
    """One light of several; a single one is itself."""
    return lights[0] if len(lights) == 1 else JointLight(tuple(lights))


def scene_at(scene: Scene, points: Integers) -> Scene:
    """A plane wave's scene at a selection of its points."""
    tm: NDArray[np.bool_] = np.broadcast_to(scene.tm, scene.points)
    return Scene(
        wavelength_nm=scene.wavelength_nm[points],
        incident=scene.incident[points],
        outside=scene.outside[points],
        films=scene.films[:, points],
        q=None if scene.q is None else scene.q[points],
        tm=tm[points],
    )
