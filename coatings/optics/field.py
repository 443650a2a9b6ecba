"""Standing wave and absorbed power in a coating and on both sides of it.

Reference and units. The electric field squared, E2 [1], is relative to that of the wave that
travels in the chip towards the facet. Absorption is relative to the power which that wave carries
through the plane of the facet: a density in [1/nm], a fraction for a layer. Times
``StandingWave.per_leaving`` they are relative to what leaves the facet; `flow` has the figures at
work, in V/m and W/cm3.

The density of absorbed power is k0 Im(N^2) |E|^2 / Re(eta_in), the loss of a dielectric
(omega eps0/2) Im(N^2) |E|^2 over the flow Re(eta_in) |E_t|^2 / (2 Z0) of the arriving wave.
Positions z [nm] are counted from the chip's face outward. At an interface the field along the
normal jumps (TM), and so does the density: both have a value on either side.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import ArrayLike

from coatings.optics.arrays import Integers, Reals, numbers, refuse
from coatings.optics.batch import Batch
from coatings.optics.flow import check_amount
from coatings.optics.inside import Fields, Inside, Medium, fields_inside
from coatings.optics.scene import Scene
from coatings.optics.spectrum import respond_to


@dataclass(frozen=True, eq=False)
class Profile:
    """Samples of a standing wave, for plotting; every interface is there twice.

    Attributes
    ----------
    z_nm : array (Z,)
        Distance from the chip's face [nm], ascending; negative in the chip.
    medium : int array (Z,)
        -1 in the chip, 0 ... L-1 in a layer, L outside.
    E2 : array (P, Z)
        Electric field squared over that of the wave arriving in the chip [1].
    absorption_per_nm : array (P, Z)
        Density of absorbed power over the power arriving in the chip [1/nm].
    """

    z_nm: Reals
    medium: Integers
    E2: Reals
    absorption_per_nm: Reals


@dataclass(frozen=True, eq=False)
class StandingWave:
    """The field of one stack of L layers of M films at P points.

    Attributes
    ----------
    film : int array (L,)
        Which film each layer is made of.
    R, T, A : array (P,)
        Reflectance, transmittance, and what the coating absorbs: the net flow through the chip's
        face less T. A is 1 - R - T when the chip's index is real.
    face_nm : array (L + 1,)
        Positions of the interfaces [nm], from 0.
    face_E2, face_absorption_per_nm : array (P, L + 1, 2)
        On the chip's side and on the outer side of every interface; [1], [1/nm].
    layer_absorbed : array (P, L)
        Share of the arriving power that each layer absorbs, by closed form; they add up to A.
    layer_peak_E2, layer_peak_nm : array (P, L)
        Largest E2 in each layer [1], and where [nm].
    flow_index : array (P,)
        n cos(theta) of the arriving wave: E^2 [V^2/m^2] = 2 Z0 flow / flow_index.
    """

    film: Integers
    R: Reals
    T: Reals
    A: Reals
    face_nm: Reals
    face_E2: Reals
    face_absorption_per_nm: Reals
    layer_absorbed: Reals
    layer_peak_E2: Reals
    layer_peak_nm: Reals
    flow_index: Reals
    _films: int = field(repr=False)
    _inside: Inside = field(repr=False)

    @property
    def per_leaving(self) -> Reals:
        """1/T, array (P,): turns "per watt arriving" into "per watt leaving"; nan where T is 0."""
        dark = self.T == 0.0
        return np.where(dark, np.nan, 1.0 / np.where(dark, 1.0, self.T))

    @property
    def film_absorbed(self) -> Reals:
        """Share of the arriving power that each film's layers absorb, array (P, M)."""
        made_of = self.film[:, None] == np.arange(self._films)
        total: Reals = self.layer_absorbed @ made_of
        return total

    @property
    def film_peak_E2(self) -> Reals:
        """Largest E2 in the layers of each film, array (P, M); nan for a film that is in none."""
        peak = np.full((len(self.T), self._films), np.nan)
        for j, m in enumerate(self.film):
            peak[:, m] = np.fmax(peak[:, m], self.layer_peak_E2[:, j])
        return peak

    def profile(
        self, *, step_nm: float = 2.0, chip_nm: float = 500.0, outside_nm: float = 500.0
    ) -> Profile:
        """Sample the field through the stack and on both sides.

        Parameters
        ----------
        step_nm : float
            Largest distance of two samples [nm], above 0.
        chip_nm, outside_nm : float
            How far into the chip and beyond the film [nm], 0 or more.

        Returns
        -------
        Profile

        Raises
        ------
        InputError
            Naming the argument and the value.
        """
        check_amount(step_nm, "step_nm", least_allowed=False)
        check_amount(chip_nm, "chip_nm")
        check_amount(outside_nm, "outside_nm")
        inside, end = self._inside, self.face_nm[-1]
        chip = _samples(-chip_nm, 0.0, step_nm)
        beyond = _samples(0.0, outside_nm, step_nm)
        stretches, fields = [chip], [inside.in_chip(chip)]
        for layer, z0 in zip(inside.layers, self.face_nm[:-1], strict=True):
            depth = _samples(0.0, layer.nm, step_nm)
            stretches.append(z0 + depth)
            s = np.broadcast_to(layer.nm - depth, (len(self.T), depth.size))
            fields.append(layer.fields(s))
        stretches.append(end + beyond)
        fields.append(inside.beyond(beyond))
        pairs = list(zip(inside.media, fields, strict=True))
        E2 = [_relative(inside.chip, m.squared(f)) for m, f in pairs]
        density = [_density(inside.chip, m, m.squared(f)) for m, f in pairs]
        names = np.repeat(np.arange(-1, len(inside.layers) + 1), [z.size for z in stretches])
        return Profile(np.concatenate(stretches), names, np.hstack(E2), np.hstack(density))


def standing_wave(scene: Scene, thickness_nm: ArrayLike, *, film: ArrayLike) -> StandingWave:
    """Standing wave and absorbed power of one stack on the chip.

    Parameters
    ----------
    scene : Scene
        Points and indices; q must be real, and power must flow in the incident medium.
    thickness_nm : array (L,)
        Thickness of each layer [nm], 0 or more, chip outward; L may be 0.
    film : int array (L,)
        Which row of ``scene.films`` each layer is made of.

    Returns
    -------
    StandingWave

    Raises
    ------
    ArrayError
        Naming the argument, the place and the value.
    """
    nm = numbers(thickness_nm, "thickness_nm", np.float64, 1)
    kinds = numbers(film, "film", np.int64, 1)
    batch = Batch.of(scene, nm[None, :], kinds, None, None)
    _check_flow(scene)
    response = respond_to(batch)
    inside = fields_inside(scene, nm, kinds)
    chip, layers = inside.chip, inside.layers
    net = (inside.face.E[:, :1].conj() * inside.face.H[:, :1]).real / chip.eta.real
    T, shape = response.T[0], (scene.points, len(layers))
    absorbed, peak, depth = np.empty((3, *shape))
    face_nm = np.concatenate([[0.0], np.cumsum(nm)])
    for j, layer in enumerate(layers):
        absorbed[:, j] = _density(chip, layer.medium, layer.integral()[:, None])[:, 0]
        height, s = layer.peak()
        peak[:, j] = _relative(chip, height[:, None])[:, 0]
        depth[:, j] = face_nm[j] + (layer.nm - s)
    face_E2, face_density = _on_faces(inside)
    return StandingWave(
        film=kinds,
        R=response.R[0],
        T=T,
        A=net[:, 0] - T,
        face_nm=face_nm,
        face_E2=face_E2,
        face_absorption_per_nm=face_density,
        layer_absorbed=absorbed,
        layer_peak_E2=peak,
        layer_peak_nm=depth,
        flow_index=(chip.eta.real / _arriving(chip))[:, 0],
        _films=len(scene.films),
        _inside=inside,
    )


def _check_flow(scene: Scene) -> None:
    if scene.q is not None and scene.q.imag.any():
        p = int(np.argmax(scene.q.imag != 0.0))
        raise refuse(f"q[{p}]", f"is {scene.q[p]}; give a real one: power must not grow along x")
    eta = fields_inside(scene, np.empty(0), np.empty(0, np.int64)).chip.eta[:, 0]
    if eta.real.min() <= 0.0:
        p = int(np.argmax(eta.real <= 0.0))
        index = scene.incident[p]
        raise refuse(f"incident[{p}]", f"is {index}; no power flows to the facet at this q")


def _arriving(chip: Medium) -> Reals:
    """Electric field squared of the arriving wave over that of its tangential part, (P, 1)."""
    return chip.squared(Fields(np.ones_like(chip.eta), chip.eta))


def _relative(chip: Medium, squared: Reals) -> Reals:
    relative: Reals = squared / _arriving(chip)
    return relative


def _density(chip: Medium, medium: Medium, squared: Reals) -> Reals:
    density: Reals = medium.k0 * (medium.index**2).imag * squared / chip.eta.real
    return density


def _on_faces(inside: Inside) -> tuple[Reals, Reals]:
    """E2 and density on both sides of every interface, (P, L + 1, 2) each."""
    chip, media = inside.chip, inside.media
    sides = (media[:-1], media[1:])
    E2, density = np.empty((2, *inside.face.E.shape, 2))
    for side, on_side in enumerate(sides):
        for j, medium in enumerate(on_side):
            at = Fields(inside.face.E[:, j : j + 1], inside.face.H[:, j : j + 1])
            squared = medium.squared(at)
            E2[:, j, side] = _relative(chip, squared)[:, 0]
            density[:, j, side] = _density(chip, medium, squared)[:, 0]
    return E2, density


def _samples(low: float, high: float, step_nm: float) -> Reals:
    return np.linspace(low, high, 2 + int((high - low) / step_nm))
