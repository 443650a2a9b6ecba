"""The slow, obvious twin of `ModalFacet`: one stack, one wavelength, no closed forms.

The mode's profile is summed over x by Gauss's rule at every q; y comes from the textbook matrices;
e, c and d are three sums along another contour than the product's, a plain parabola below the axis.
Thicknesses may be complex, for derivatives by Cauchy's integral.
"""

import numpy as np


def _root(square):
    root = np.sqrt(square.astype(complex))
    return np.where(root.imag + root.real < 0.0, -root, root)


def _pieces(mode):
    """Nodes, weights, profile and w at one wavelength, x in 1/k0, tails as far as they matter."""
    at = mode.guide.position[0]
    reach = 40.0 / mode.decay.real.min()
    ends = np.concatenate([[at[0] - reach], at, [at[-1] + reach]])
    x0, w0 = np.polynomial.legendre.leggauss(24)
    xs, ws, eps = [], [], []
    for j, (low, high) in enumerate(zip(ends[:-1], ends[1:], strict=True)):
        count = max(1, int(np.ceil((high - low) / 1.0)))
        edges = np.linspace(low, high, count + 1)
        half = 0.5 * np.diff(edges)[:, None]
        xs.append((0.5 * (edges[:-1] + edges[1:])[:, None] + half * x0).ravel())
        ws.append((half * w0).ravel())
        eps.append(np.full(xs[-1].size, mode.guide.index[j, 0] ** 2))
    x, weight, eps = map(np.concatenate, (xs, ws, eps))
    k0_per_um = 2e3 * np.pi / mode.guide.wavelength_nm[0]
    phi = mode.profile((x - at[0]) / k0_per_um)
    w = 1.0 / eps if mode.tm else np.ones_like(eps)
    return x, weight, phi / np.sqrt((weight * w * phi**2).sum()), w


def _path(top, depth):
    """Nodes and weights on a parabola from 0 to ``top`` and on the axis beyond."""
    x, w = np.polynomial.legendre.leggauss(400)
    s, ws = 0.5 * (x + 1.0), 0.5 * w
    t, dt = s**3, 3.0 * s**2
    arc = top * t - 4j * depth * t * (1 - t)
    arc_weight = (top - 4j * depth * (1 - 2 * t)) * dt * ws
    x, w = np.polynomial.legendre.leggauss(700)
    u, wu = 0.5 * (x + 1.0), 0.5 * w
    return np.concatenate([arc, top / u]), np.concatenate([arc_weight, top / u**2 * wu])


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
        x, dx, phi, w = _pieces(mode)
        forth = np.array([(np.exp(-1j * q * x) * dx * phi) @ np.stack([w**0, w]).T for q in self.q])
        back = np.array([(np.exp(1j * q * x) * dx * phi) @ np.stack([w**0, w]).T for q in self.q])
        self.f, self.g, self.f_back, self.g_back = *forth.T, *back.T
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
        for turn in np.exp(2j * np.pi * np.arange(16) / 16):
            nm = np.array(thickness_nm, complex)
            nm[layer] += radius_nm * turn
            total += self.reflection(films, nm, outside=outside) / turn
        return total / (16 * radius_nm)
