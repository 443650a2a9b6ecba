"""A numpy twin of the film formulas in which nothing but real analysis happens.

Every complex number is a pair (x, y) of separate arrays, and every operation on x and y is
analytic. So a thickness, a wavelength, n or k may itself be given an imaginary step of 1e-30, and
the derivative of every result appears, free of rounding, as imaginary part over step: the
complex-step method, kept apart from the imaginary unit of the fields.
"""

from dataclasses import dataclass
from typing import Any

import numpy as np

STEP = 1e-30


@dataclass(frozen=True)
class Pair:
    x: Any
    y: Any = 0.0

    def __add__(self, o):
        return Pair(self.x + o.x, self.y + o.y)

    def __sub__(self, o):
        return Pair(self.x - o.x, self.y - o.y)

    def __mul__(self, o):
        return Pair(self.x * o.x - self.y * o.y, self.x * o.y + self.y * o.x)

    def __truediv__(self, o):
        size = o.x * o.x + o.y * o.y
        return self * Pair(o.x / size, -o.y / size)

    def size_squared(self):
        return self.x * self.x + self.y * self.y

    def cos(self):
        return Pair(np.cos(self.x) * np.cosh(self.y), -np.sin(self.x) * np.sinh(self.y))

    def sin(self):
        return Pair(np.sin(self.x) * np.cosh(self.y), np.cos(self.x) * np.sinh(self.y))

    def outgoing_root(self):
        """Square root on the branch x + y >= 0."""
        size = np.sqrt(self.size_squared())
        if np.real(self.x) >= 0:
            a = np.sqrt(0.5 * (size + self.x))
            root = Pair(a, 0.5 * self.y / a)
        else:
            b = np.sqrt(0.5 * (size - self.x))
            root = Pair(0.5 * self.y / b, b)
        return Pair(-root.x, -root.y) if np.real(root.x + root.y) < 0 else root


def _of(value):
    return value if isinstance(value, Pair) else Pair(np.real(value), np.imag(value))


def amplitudes(*, wavelength_nm, incident, outside, films, thickness_nm, q=0.0, tm=False):
    """r, t (pairs) and R, T of one stack at one point."""
    q, k0 = _of(q), 2.0 * np.pi / wavelength_nm

    def admittance(index):
        vertical = (index * index - q * q).outgoing_root()
        return index * index / vertical if tm else vertical

    def one_way(index):
        return (index * index - q * q).outgoing_root()

    eta_in, eta_out = admittance(_of(incident)), admittance(_of(outside))
    b, c = Pair(1.0), eta_out
    for index, nm in zip(reversed(films), reversed(thickness_nm), strict=True):
        n = _of(index)
        delta = one_way(n) * Pair(k0 * nm)
        eta = admittance(n)
        cos, sin = delta.cos(), Pair(0.0, -1.0) * delta.sin()
        b, c = cos * b + sin / eta * c, sin * eta * b + cos * c
    r = (eta_in * b - c) / (eta_in * b + c)
    t = (eta_in + eta_in) / (eta_in * b + c)
    return r, t, r.size_squared(), eta_out.x / eta_in.x * t.size_squared()
