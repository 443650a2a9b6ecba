"""A rigorous twin of the guided mode's facet: all the guide's own waves, no uniform continuum.

The field across the layers is held by spectral elements (Lagrange polynomials on Gauss-Lobatto
points, which make the mass matrices diagonal; an edge on every interface, finer elements next to it)
between absorbing layers made by complex stretching of x. On that basis the guide's operator
d^2/dx^2 + k0^2 eps and the plain d^2/dx^2 of the uniform films have full sets of eigenvectors; so the
admittances of the guide, B, and of coating and outside, Y, are matrices, and continuity of field and
flux is one linear system:

    (B + Y) F = 2 B phi,    1 + r = <phi|F>.

Lengths are in 1/k0; F is E_y (TE) or H_y (TM), whose fluxes carry 1 or 1/eps; time goes as
exp(-i w t). Too fine a mesh within the absorbing layers makes their eigenvectors useless; what is
used here is converged to 2e-6 in r, which a test shows.
"""

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.polynomial import Legendre


@dataclass(frozen=True)
class Mesh:
    """Element sizes and distances in wavelengths within the densest layer; tails: see `_reach`."""

    order: int = 8
    largest: float = 0.9
    smallest: float = 0.05
    growth: float = 3.0
    clear: float = 3.0
    absorber: float = 3.0
    damping: float = 2.0
    tail: float = 8.0


@dataclass(frozen=True)
class Basis:
    """Diagonal masses with weights 1, 1/eps and eps, stiffnesses with 1 and 1/eps."""

    mass: np.ndarray
    mass_by_eps: np.ndarray
    mass_times_eps: np.ndarray
    stiff: np.ndarray
    stiff_by_eps: np.ndarray


def forward_root(z):
    return np.exp(0.25j * np.pi) * np.sqrt(-1j * z)


def lobatto(order):
    """Weights and the matrix of derivatives of the rule on -1 ... 1."""
    p = Legendre.basis(order)
    x = np.concatenate([[-1.0], np.sort(p.deriv().roots().real), [1.0]])
    values = p(x)
    d = np.zeros((order + 1, order + 1))
    for i, j in np.ndindex(d.shape):
        if i != j:
            d[i, j] = values[i] / values[j] / (x[i] - x[j])
    d[0, 0] = -order * (order + 1) / 4
    d[-1, -1] = -d[0, 0]
    return 2.0 / (order * (order + 1) * values**2), d


def _graded(low, high, fine_low, fine_high, smallest, largest, growth):
    """Element edges from low to high, small next to the ends that ask for it."""
    left, right = [low], [high]
    h = smallest if fine_low else largest
    k = smallest if fine_high else largest
    while right[-1] - left[-1] > max(h + k, 1.5 * min(max(h, k), largest)):
        if h <= k:
            left.append(left[-1] + h)
            h = min(h * growth, largest)
        else:
            right.append(right[-1] - k)
            k = min(k * growth, largest)
    pieces = max(1, int(np.ceil((right[-1] - left[-1]) / largest)))
    between = list(np.linspace(left[-1], right[-1], pieces + 1)[1:-1])
    return left + between + right[::-1]


def _basis(index, at, decay, mesh):
    wave = 2.0 * np.pi / max(np.real(index))
    reach, absorber = mesh.clear * wave, mesh.absorber * wave
    # The mode's tail has to die out too: the absorber is stretched along the real axis for it.
    real_stretch = max(1.0, (mesh.tail / decay - reach) / absorber)
    stretch = real_stretch + 1j * mesh.damping
    marks = [at[0] - reach - absorber, at[0] - reach, *at, at[-1] + reach]
    marks.append(marks[-1] + absorber)
    fine = [m in at for m in marks]
    edges = [marks[0]]
    for k, (low, high) in enumerate(pairwise(marks)):
        sizes = (mesh.smallest * wave, mesh.largest * wave, mesh.growth)
        edges += _graded(low, high, fine[k], fine[k + 1], *sizes)[1:]
    w, d = lobatto(mesh.order)
    count = (len(edges) - 1) * mesh.order + 1
    masses = np.zeros((3, count), complex)
    stiffs = np.zeros((2, count, count), complex)
    for k, (low, high) in enumerate(pairwise(edges)):
        middle, h = 0.5 * (low + high), 0.5 * (high - low)
        eps = index[np.searchsorted(at, middle)] ** 2
        s = 1.0 if marks[1] < middle < marks[-2] else stretch
        part = slice(k * mesh.order, (k + 1) * mesh.order + 1)
        for row, weight in zip(masses, (1.0, 1.0 / eps, eps), strict=True):
            row[part] += w * h * s * weight
        local = d.T @ np.diag(w / h / s) @ d
        for matrix, weight in zip(stiffs, (1.0, 1.0 / eps), strict=True):
            matrix[part, part] += local * weight
    inner = slice(1, -1)
    return Basis(*masses[:, inner], *stiffs[:, inner, inner])


def _eigen(matrix, mass):
    """Eigenpairs of mass^-1 matrix in the variable mass^(1/2) F; vectors with V^T V = 1."""
    half = 1.0 / np.sqrt(mass)
    values, vectors = np.linalg.eig(matrix * half[:, None] * half[None, :])
    return values, vectors / np.sqrt((vectors * vectors).sum(axis=0))


def film_admittance(films, thickness, outside, kx_squared, tm):
    """C/B (TE) or B/C (TM) of coating and outside at each kx^2."""
    kz = forward_root(outside**2 - kx_squared)
    b, c = np.ones_like(kx_squared), outside**2 / kz if tm else kz
    for index, d in zip(films[::-1], thickness[::-1], strict=True):
        kz = forward_root(index**2 - kx_squared)
        kz = np.where(kz.imag < 0.0, -kz, kz)
        eta = index**2 / kz if tm else kz
        twice = np.exp(2j * kz * d)
        cos, sin = 0.5 * (1.0 + twice), -0.5j * (twice - 1.0)
        b, c = cos * b - 1j * sin / eta * c, cos * c - 1j * sin * eta * b
        size = np.abs(b) + np.abs(c)
        b, c = b / size, c / size
    return b / c if tm else c / b


class RigorousGuide:
    """Guide and mesh at one wavelength, its waves computed once."""

    def __init__(self, index, thickness_um, *, wavelength_nm, tm, n_eff, mesh=None):
        index = np.asarray(index, complex)
        self.tm, self.k0_per_nm = tm, 2.0 * np.pi / wavelength_nm
        at = np.concatenate([[0.0], np.cumsum(thickness_um)]) * 1e3 * self.k0_per_nm
        ends = np.sqrt(n_eff**2 - index[[0, -1]] ** 2).real
        basis = _basis(index, list(at - 0.5 * at[-1]), ends.min(), mesh or Mesh())
        self.metric = basis.mass_by_eps if tm else basis.mass
        if tm:
            operator = np.diag(basis.mass) - basis.stiff_by_eps
        else:
            operator = np.diag(basis.mass_times_eps) - basis.stiff
        square, self.waves = _eigen(operator, self.metric)
        self.mode = int(np.argmin(np.abs(square - n_eff**2)))
        self.beta = forward_root(square)
        self.n_eff = self.beta[self.mode]
        self.kx_squared, flat = _eigen(basis.stiff, basis.mass)
        self.flat = np.sqrt(basis.mass / self.metric)[:, None] * flat
        self.guide_admittance = (self.waves * self.beta) @ self.waves.T

    def reflection(self, films=(), thickness_nm=(), *, outside=1.0):
        """r of the mode, ratio of the tangential electric fields; film indices chip outward."""
        d = np.asarray(thickness_nm, float) * self.k0_per_nm
        films = [complex(index) for index in films]
        y = film_admittance(films, d, complex(outside), self.kx_squared, self.tm)
        film = (self.flat * y) @ self.flat.T
        phi = self.waves[:, self.mode]
        field = np.linalg.solve(self.guide_admittance + film, 2.0 * self.n_eff * phi)
        r = phi @ field - 1.0
        return complex(-r if self.tm else r)
