"""The field inside the layers of one stack: states on the interfaces, integrals, samples. No checks.

Signs as in `kernel`: E and H are the tangential fields, H in units of an admittance, both relative
to the tangential field of the wave that arrives from the chip. At the distance s from the outer
face of a layer, where the fields are B and C,

    E(s) = cos(delta) B - i sin(delta)/eta C,   H(s) = cos(delta) C - i eta sin(delta) B,

delta = kz s. TE has |E|^2 for the electric field squared; TM adds the part along the normal,
|q/N^2|^2 |H|^2. With delta = u + iv,

    |cos|^2 = (cosh 2v + cos 2u)/2,  |sin|^2 = (cosh 2v - cos 2u)/2,
    cos* sin = (sin 2u + i sinh 2v)/2,

so the integral of |E|^2 over a layer has a closed form; it is even in kz. The root with Im kz >= 0
is taken, exp(Im delta) of every layer is left out of cos and sin and put back as a falling factor on
the way outward: thick metals and evanescent layers can't overflow, what lies behind them fades to
zero.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from coatings.optics.arrays import Complexes, Integers, Reals
from coatings.optics.scene import Scene

SMALLEST = 1e-30  # stands for kz = 0, as in the kernel
CLOSE = 0.5  # |delta| below which differences that cancel are taken from their series
TERMS = 12
SAMPLES_PER_PERIOD = 16
HALVINGS = 26  # of a sixteenth of a period: leaves the height of a maximum right to 1e-16


class Fields(NamedTuple):
    """Tangential electric and magnetic field, arrays of one shape."""

    E: Complexes
    H: Complexes


@dataclass(frozen=True, eq=False)
class Medium:
    """A homogeneous medium at P points; every array (P, 1)."""

    k0: Reals
    q: Reals
    tm: NDArray[np.bool_]
    index: Complexes
    kappa: Complexes

    @property
    def eta(self) -> Complexes:
        """Admittance."""
        eta: Complexes = np.where(self.tm, self.index**2 / self.kappa, self.kappa)
        return eta

    def squared(self, fields: Fields) -> Reals:
        """Square of the electric field, the part along the normal included."""
        normal = np.where(self.tm, abs(self.q / self.index**2) ** 2, 0.0)
        squared: Reals = abs(fields.E) ** 2 + normal * abs(fields.H) ** 2
        return squared

    def slope(self, fields: Fields) -> Reals:
        """Derivative of `squared` inward [1/nm]: dE/ds = -i k0 (kz/eta) H, dH/ds = -i kz eta E."""
        cross = fields.E.conj() * fields.H
        by_e = np.where(self.tm, self.kappa**2 / self.index**2, 1.0)
        by_h = np.where(self.tm, abs(self.q / self.index**2) ** 2, 0.0)
        slope: Reals = 2.0 * self.k0 * (by_e * cross + by_h * cross.conj() * self.index**2).imag
        return slope


@dataclass(frozen=True, eq=False)
class Layer:
    """One layer with the field in it.

    ``outer`` (P, 1): fields on the outer face at some scale; the true fields at s are
    scale exp(-Im kz thickness) times those that follow from ``outer``.
    """

    medium: Medium
    nm: float
    outer: Fields
    scale: Complexes

    def fields(self, s_nm: Reals) -> Fields:
        """At the distances ``s_nm`` (P, n) from the outer face."""
        m = self.medium
        delta = m.k0 * m.kappa * s_nm
        cos, sin = turn(delta)
        whole = (m.k0 * m.kappa * self.nm).imag
        factor = self.scale * np.exp(np.minimum(delta.imag - whole, 0.0))
        b, c = self.outer
        return Fields(
            factor * (cos * b - 1j * (sin / m.eta) * c), factor * (cos * c - 1j * (sin * m.eta) * b)
        )

    def integral(self) -> Reals:
        """Integral of the squared electric field over the layer [nm], (P,)."""
        m = self.medium
        cc, ss, ss_over, cross, cross_over = products(m.k0 * m.kappa * self.nm, m.k0 * self.nm)
        b, c = self.outer
        b2, c2, bc = abs(b) ** 2, abs(c) ** 2, b.conj() * c
        square = m.index**2
        te = cc * b2 + ss_over * c2 + 2.0 * (bc * cross_over).imag
        tm = cc * b2 + ss * abs(m.kappa**2 / square**2) * c2
        tm += 2.0 * (bc * cross * m.kappa / square).imag
        normal = cc * c2 + ss_over * abs(square) ** 2 * b2
        normal += 2.0 * (bc.conj() * cross_over * square).imag
        whole: Reals = np.where(m.tm, tm + abs(m.q / square) ** 2 * normal, te)
        integral: Reals = (abs(self.scale) ** 2 * self.nm * whole)[:, 0]
        return integral

    def peak(self) -> tuple[Reals, Reals]:
        """Largest squared field in the layer and its distance from the outer face [nm], (P,) each.

        A face, or a place where the slope changes sign, found between samples 16 a period and then
        by halving. There is at most one maximum a period; where Im kz exceeds |Re kz| there is none.
        """
        m = self.medium
        periods = float(abs((m.k0 * m.kappa).real).max()) * self.nm / math.pi
        s = np.linspace(0.0, self.nm, 2 + math.ceil(SAMPLES_PER_PERIOD * periods))
        within = self.fields(np.broadcast_to(s, (len(m.k0), s.size)))
        heights, rises = m.squared(within)[:, [0, -1]], m.slope(within) > 0.0
        top = heights.argmax(axis=1)
        best, where = heights.max(axis=1), s[-1] * top
        point, start = np.nonzero(rises[:, :-1] & ~rises[:, 1:])
        found, place = self.of(point).climb(s[start], s[start + 1])
        for p, height, at in zip(point, found, place, strict=True):
            if height > best[p]:
                best[p], where[p] = height, at
        return best, where

    def of(self, point: Integers) -> Layer:
        """The same layer at some of its points, repeats allowed."""
        m = self.medium
        medium = Medium(m.k0[point], m.q[point], m.tm[point], m.index[point], m.kappa[point])
        outer = Fields(self.outer.E[point], self.outer.H[point])
        return Layer(medium, self.nm, outer, self.scale[point])

    def climb(self, low: Reals, high: Reals) -> tuple[Reals, Reals]:
        """Height and place of the maximum between ``low`` and ``high`` (P,) of each point."""
        a, b = low[:, None], high[:, None]
        for _ in range(HALVINGS):
            middle = 0.5 * (a + b)
            rises = self.medium.slope(self.fields(middle)) > 0.0
            a, b = np.where(rises, middle, a), np.where(rises, b, middle)
        return self.medium.squared(self.fields(a))[:, 0], a[:, 0]


@dataclass(frozen=True, eq=False)
class Inside:
    """The field of one stack: ``face`` are the true fields on the interfaces, (P, L + 1) each."""

    chip: Medium
    layers: tuple[Layer, ...]
    outside: Medium
    face: Fields

    @property
    def media(self) -> tuple[Medium, ...]:
        """Chip, layers, outside."""
        return (self.chip, *(layer.medium for layer in self.layers), self.outside)

    def in_chip(self, z_nm: Reals) -> Fields:
        """Arriving and reflected wave at ``z_nm`` (Z,), 0 or less."""
        chip = self.chip
        phase = 1j * chip.k0 * chip.kappa * z_nm
        there, back = np.exp(phase), (self.face.E[:, :1] - 1.0) * np.exp(-phase)
        return Fields(there + back, chip.eta * (there - back))

    def beyond(self, depth_nm: Reals) -> Fields:
        """The leaving wave at ``depth_nm`` (Z,) beyond the film, 0 or more."""
        m = self.outside
        wave = self.face.E[:, -1:] * np.exp(1j * m.k0 * m.kappa * depth_nm)
        return Fields(wave, m.eta * wave)


def fields_inside(scene: Scene, nm: Reals, film: Integers) -> Inside:
    """Fields of the stack ``nm`` (L,) of films ``film`` (L,), chip outward."""
    chip = _medium(scene, scene.incident, outgoing=True)
    outside = _medium(scene, scene.outside, outgoing=True)
    kinds = {m: _medium(scene, scene.films[m], outgoing=False) for m in set(film.tolist())}
    media = [kinds[m] for m in film.tolist()]
    states, sizes = _inward(media, nm, outside)
    eta_in = chip.eta
    scale = 2.0 * eta_in / (eta_in * states[0].E + states[0].H)
    faces, layers = [Fields(scale * states[0].E, scale * states[0].H)], []
    for j, medium in enumerate(media):
        within = scale / sizes[j]
        layers.append(Layer(medium, float(nm[j]), states[j + 1], within))
        scale = within * np.exp(-(medium.k0 * medium.kappa * nm[j]).imag)
        faces.append(Fields(scale * states[j + 1].E, scale * states[j + 1].H))
    electric, magnetic = (np.hstack(part) for part in zip(*faces, strict=True))
    return Inside(chip, tuple(layers), outside, Fields(electric, magnetic))


def _inward(media: list[Medium], nm: Reals, outside: Medium) -> tuple[list[Fields], list[Reals]]:
    """States of size one on all interfaces, and by what each was divided."""
    b, c = np.ones_like(outside.eta), outside.eta
    size = np.hypot(abs(b), abs(c))
    states, sizes = [Fields(b / size, c / size)], []
    for medium, d in zip(reversed(media), reversed(nm), strict=True):
        b, c = states[-1]
        cos, sin = turn(medium.k0 * medium.kappa * d)
        b, c = cos * b - 1j * (sin / medium.eta) * c, cos * c - 1j * (sin * medium.eta) * b
        size = np.hypot(abs(b), abs(c))
        states.append(Fields(b / size, c / size))
        sizes.append(size)
    return states[::-1], sizes[::-1]


def _medium(scene: Scene, index: Complexes, *, outgoing: bool) -> Medium:
    q = np.zeros(scene.points) if scene.q is None else scene.q.real
    root = np.sqrt((index - q) * (index + q))
    kappa = np.where(root.imag + (root.real if outgoing else 0.0) < 0.0, -root, root)
    kappa = np.where(abs(kappa) < SMALLEST, SMALLEST, kappa)
    tm = np.broadcast_to(scene.tm, q.shape)
    k0 = 2.0 * np.pi / scene.wavelength_nm
    return Medium(k0[:, None], q[:, None], tm[:, None], index[:, None], kappa[:, None])


def turn(delta: Complexes) -> tuple[Complexes, Complexes]:
    """cos and sin of ``delta``, Im delta >= 0, without exp(Im delta)."""
    spin = np.exp(-1j * delta.real)
    away = spin * np.expm1(2j * delta)
    return spin + 0.5 * away, -0.5j * away


def products(delta: Complexes, length: Reals) -> tuple[Reals, Reals, Reals, Complexes, Complexes]:
    """Means over a layer of |cos|^2, |sin|^2, |sin/kappa|^2, cos* sin, cos* sin/kappa.

    delta = length kappa; exp(2 Im delta) is left out of all five.
    """
    u, v = delta.real, delta.imag
    faded = np.exp(-2.0 * v)
    some_v = np.where(v > 0.0, v, 1.0)
    cosh = np.where(v > 0.0, -np.expm1(-4.0 * some_v) / (4.0 * some_v), 1.0)
    cos = faded * np.sinc(2.0 * u / np.pi)
    sinh = np.where(v > 0.0, np.expm1(-2.0 * some_v) ** 2 / (4.0 * some_v), 0.0)
    sin = faded * u * np.sinc(u / np.pi) ** 2
    cross: Complexes = 0.5 * (sin + 1j * sinh)
    size: Reals = np.abs(delta)
    some = np.where(size > 0.0, delta, 1.0)
    over: Reals = np.where(size > CLOSE, 0.5 * (cosh - cos) / abs(some) ** 2, faded * _near(u, v))
    cross_over: Complexes = np.where(size > 0.0, cross / some, 0.5)
    cc: Reals = 0.5 * (cosh + cos)
    return cc, size**2 * over, length**2 * over, cross, length * cross_over


def _near(u: Reals, v: Reals) -> Reals:
    """Mean of |sin|^2 / |delta|^2 by its series, (a^k - (-b)^k)/(a + b) summed, a = 4v^2, b = 4u^2."""
    a, b = 4.0 * np.minimum(v, CLOSE) ** 2, 4.0 * np.minimum(abs(u), CLOSE) ** 2
    term, power, total = np.ones_like(a), np.ones_like(a), np.zeros_like(a)
    for k in range(1, TERMS):
        total += 2.0 * term / math.factorial(2 * k + 1)
        power = power * -b
        term = term * a + power
    return total
