"""One root for the field along the chip: the equations of ``axial`` without units.

Inside, lengths are in 1/G0 and powers in Jtr/(K G0): y = g/G0, a = a_i/G0, j = J/Jtr, l = G0 L,
p = (P+ + P-) K G0/Jtr, c = sqrt C K G0/Jtr. Spontaneous emission is left out here.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.laser.checks import FloatArray
from coatings.laser.chip import GainLaw, LaserChip

_NEWTON = 100
# A Newton step of this relative size leaves an error of about its square.
_LAST_STEP = 3e-8


@dataclass(frozen=True)
class Mesh:
    """Nodes between 0 (rear) and 1 (front) of the span in v, and their weights."""

    nodes: FloatArray
    weights: FloatArray


def gauss_mesh(edges: FloatArray, order: int) -> Mesh:
    """Gauss-Legendre nodes of the given order on each panel between ``edges``."""
    x, w = np.polynomial.legendre.leggauss(order)
    width = np.diff(edges)[:, None]
    nodes = edges[:-1, None] + width * (0.5 + 0.5 * x)
    return Mesh(nodes.ravel(), (0.5 * width * w).ravel())


# 32 nodes hold 1e-11 of the power up to a_i L = 3 and 6e-5 at a_i L = 10 with R 0.01/0.99.
GAUSS = gauss_mesh(np.array([0.0, 1.0]), 32)


def gain_over_modal(
    law: GainLaw, pumping: FloatArray, density: FloatArray, *, guess: FloatArray | None = None
) -> FloatArray:
    """y of j - jsp(y) = y p: the local gain that is left beside a photon density. No checks.

    Logarithmic: e^y + y p = j by Newton's method, whose steps on this rising convex function come
    from the right after the first; ln j and (j - 1)/(1 + p) both bound y from above.
    """
    linear: FloatArray = (pumping - 1.0) / (1.0 + density)
    if law is GainLaw.LINEAR:
        return linear
    most = np.minimum(np.log(pumping), linear)
    y = most if guess is None else np.minimum(guess, most)
    for _ in range(_NEWTON):
        spontaneous = np.exp(y)
        step = (spontaneous + y * density - pumping) / (spontaneous + density)
        y = np.minimum(y - step, most)
        if np.max(np.abs(step), initial=0.0) <= _LAST_STEP:
            break
    return y


@dataclass(frozen=True)
class Cavity:
    """Dimensionless chips above threshold, one a row; arrays of shape (n,)."""

    law: GainLaw
    loss: float
    length: float
    pumping: FloatArray
    R_front: FloatArray
    R_rear: FloatArray

    @property
    def v_rear(self) -> FloatArray:
        return 0.5 * np.log(self.R_rear)

    @property
    def v_front(self) -> FloatArray:
        return -0.5 * np.log(self.R_front)

    @property
    def lost_over_root(self) -> FloatArray:
        """Power lost at both facets over sqrt C."""
        lost: FloatArray = 2.0 * (np.sinh(self.v_front) - np.sinh(self.v_rear))
        return lost

    def spontaneous(self, y: FloatArray) -> FloatArray:
        """Pumping that holds a gain without light, jsp(y)."""
        return np.exp(y) if self.law is GainLaw.LOGARITHMIC else 1.0 + y

    def uniform_root(self) -> FloatArray:
        """sqrt C that gives the power of the uniform model."""
        mirror = (self.v_front - self.v_rear) / self.length
        y = self.loss + mirror
        density = (self.pumping - self.spontaneous(y)) / y
        root: FloatArray = density * mirror * self.length / self.lost_over_root
        return root

    def highest_root(self) -> FloatArray:
        """A sqrt C above the solution: by the carriers that there are, and by g > a_i."""
        a = np.asarray(self.loss)
        left = self.pumping - self.spontaneous(a)
        high: FloatArray = left * self.length / self.lost_over_root
        if self.loss == 0.0:
            return high
        bound = self.loss * 2.0 * np.cosh(np.maximum(self.v_front, -self.v_rear))
        binds = high * bound > left  # left / bound may overflow where it does not bind
        return np.where(binds, left / np.where(binds, bound, 1.0), high)

    def root(self, mesh: Mesh = GAUSS) -> FloatArray:
        """sqrt C of each chip, by Newton's method kept inside a bracket."""
        low, high = np.zeros_like(self.pumping), self.highest_root()
        root = np.minimum(self.uniform_root(), 0.5 * high)
        pumping, span, waves = self.pumping[:, None], self.v_front - self.v_rear, self.waves(mesh)
        y = None
        for _ in range(_NEWTON):
            density = root[:, None] * waves
            y = gain_over_modal(self.law, pumping, density, guess=y)
            mean, growth = self._inverse_gain(y, density, mesh.weights)
            error, slope = span * mean - self.length, span * growth / root
            low = np.where(error < 0.0, root, low)
            high = np.where(error < 0.0, high, root)
            step = root - error / slope
            ahead = np.where((step > low) & (step < high), step, 0.5 * (low + high))
            still = np.abs(ahead - root) > _LAST_STEP * root
            root = ahead
            if not np.any(still):
                break
        return root

    def waves(self, mesh: Mesh) -> FloatArray:
        """(P+ + P-)/sqrt C at the nodes, shape (n, nodes)."""
        span = (self.v_front - self.v_rear)[:, None]
        waves: FloatArray = 2.0 * np.cosh(self.v_rear[:, None] + span * mesh.nodes)
        return waves

    def _inverse_gain(
        self, y: FloatArray, density: FloatArray, weights: FloatArray
    ) -> tuple[FloatArray, FloatArray]:
        """Mean of 1/(y - a) over v, and sqrt C times its derivative with respect to sqrt C."""
        rate = (np.exp(y) if self.law is GainLaw.LOGARITHMIC else 1.0) + density
        inverse = 1.0 / (y - self.loss)
        return inverse @ weights, (y * density * inverse**2 / rate) @ weights


def cavity_above(
    chip: LaserChip, pumping: FloatArray, R_front: FloatArray, R_rear: FloatArray
) -> Cavity:
    """Dimensionless cavities of a chip at j = J/Jtr; each must be above threshold."""
    gain = chip.modal_gain_per_cm
    loss, length = chip.internal_loss_per_cm / gain, chip.length_cm * gain
    return Cavity(chip.gain_law, loss, length, pumping, R_front, R_rear)
