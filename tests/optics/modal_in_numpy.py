"""The slow, obvious twin of `ModalFacet`: one stack, one wavelength, no closed forms.

The mode's profile is summed over x by Gauss's rule at every q, its two tails apart; y comes from the
textbook matrices; e, c and d are three sums along another contour than the product's, a plain
parabola below the axis.
Thicknesses may be complex, for derivatives by Cauchy's integral.
"""

from itertools import pairwise

import numpy as np

LONGEST_PIECE = 0.4
FARTHEST = 60.0


def _root(square):
    root = np.sqrt(square.astype(complex))
    return np.where(root.imag + root.real < 0.0, -root, root)


def _pieces(mode):
    """Nodes, weights, profile and w between the outermost interfaces, x in 1/k0."""
    at = mode.guide.position[0]
    x0, w0 = np.polynomial.legendre.leggauss(24)
    xs, ws, eps = [], [], []
    for j, (low, high) in enumerate(pairwise(at)):
        edges = np.linspace(low, high, max(1, int(np.ceil((high - low) / LONGEST_PIECE))) + 1)
        half = 0.5 * np.diff(edges)[:, None]
        xs.append((0.5 * (edges[:-1] + edges[1:])[:, None] + half * x0).ravel())
        ws.append((half * w0).ravel())
        eps.append(np.full(xs[-1].size, mode.guide.index[j + 1, 0] ** 2))
    x, weight, eps = map(np.concatenate, (xs, ws, eps))
    return x, weight, 1.0 / eps if mode.tm else np.ones_like(eps)


def _path(top, depth):
    """Nodes and weights on a parabola from 0 to ``top`` and on the axis as far as it matters."""
    x, w = np.polynomial.legendre.leggauss(300)
    s, ws = 0.5 * (x + 1.0), 0.5 * w
    t, dt = s**3, 3.0 * s**2
    arc = top * t - 4j * depth * t * (1 - t)
    arc_weight = (top - 4j * depth * (1 - 2 * t)) * dt * ws
    x, w = np.polynomial.legendre.leggauss(300)
    half = 0.5 * (FARTHEST - top)
    return np.concatenate([arc, top + half * (x + 1.0)]), np.concatenate([arc_weight, half * w])


def _admittance(q, films, nm, outside, k0_per_nm, tm):
    """y in units of k0: C/B or B/C; exp(i kz d) is taken out of every layer."""
    kz = _root(outside**2 - q**2)
    b, c = np.ones_like(q), outside**2 / kz if tm else kz
    for index, d in zip(films[::-1], nm[::-1], strict=True):
        kz = _root(index**2 - q**2)
        kz = np.where(kz.imag < 0.0, -kz, kz)
        eta = index**2 / kz if tm else kz
        twice = np.exp(2j * kz * d * k0_per_nm)
        cos, sin = 0.5 * (1.0 + twice), -0.5j * (twice - 1.0)
        b, c = cos * b - 1j * sin / eta * c, cos * c - 1j * sin * eta * b
    return b / c if tm else c / b


class Twin:
    """A mode and its transforms; ``reflection`` of any stack."""

    def __init__(self, mode, *, highest_index, depth=0.25):
        self.tm, self.n_eff = mode.tm, mode.n_eff[0]
        self.k0_per_nm = 2.0 * np.pi / mode.guide.wavelength_nm[0]
        self.q, weight = _path(1.3 * highest_index, depth)
        x, dx, w = _pieces(mode)
        at, gamma = mode.guide.position[0], mode.decay[:, 0]
        k0_per_um = 2e3 * np.pi / mode.guide.wavelength_nm[0]
        phi = mode.profile((x - at[0]) / k0_per_um)
        edge = mode.profile((at[[0, -1]] - at[0]) / k0_per_um)
        outer = 1.0 / mode.guide.index[[0, -1], 0] ** 2 if self.tm else np.ones(2)
        square = (dx * w * phi**2).sum() + (outer * edge**2 / (2.0 * gamma)).sum()
        phi, edge = phi / np.sqrt(square), edge / np.sqrt(square)

        def transforms(q):
            wave = np.exp(-1j * np.outer(q, x)) * (dx * phi)
            left = edge[0] * np.exp(-1j * q * at[0]) / (gamma[0] - 1j * q)
            right = edge[1] * np.exp(-1j * q * at[-1]) / (gamma[1] + 1j * q)
            f = wave.sum(axis=1) + left + right
            return f, wave @ w + outer[0] * left + outer[1] * right

        self.f, self.g = transforms(self.q)
        self.f_back, self.g_back = transforms(-self.q)
        self.weight = weight / np.pi

    def reflection(self, films, thickness_nm, *, outside=1.0):
        n, q = self.n_eff, self.q
        y = _admittance(q, films, thickness_nm, outside, self.k0_per_nm, self.tm)
        y0 = _root(n**2 - q**2) / (n**2 if self.tm else 1.0)
        d = y + y0
        mixed = 0.5 * (self.f * self.g_back + self.f_back * self.g)
        e = (self.weight * self.f * self.f_back * y * y0 / d).sum()
        c = (self.weight * mixed * y / d).sum()
        d = (self.weight * self.g * self.g_back / d).sum()
        total = e + c * c / d
        r = (n - total) / (n + total)
        return -r if self.tm else r

    def slope(self, films, thickness_nm, layer, *, radius_nm=3.0, outside=1.0):
        """dr/d thickness by Cauchy's integral over a circle of complex thicknesses."""
        total = 0.0
        for turn in np.exp(2j * np.pi * np.arange(8) / 8):
            nm = np.array(thickness_nm, complex)
            nm[layer] += radius_nm * turn
            total += self.reflection(films, nm, outside=outside) / turn
        return total / (8 * radius_nm)
