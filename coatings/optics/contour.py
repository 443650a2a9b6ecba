"""The path in the plane of transverse wave numbers along which a mode's integrals are taken.

Every singularity of the integrands lies on the positive real axis or above it: branch points at the
indices of mode and outside, poles of the guided waves of film and coating. A path from 0 below the
axis to K1, beyond them all, and from there along the axis to infinity meets none of them, and a
function that is smooth on it is summed to high accuracy by few Gauss-Legendre nodes. With s and u
on (0, 1):

    arc    t = (sigma/K1) sinh(s asinh(K1/sigma)),    q = K1 t - 4 i h t (1 - t)
    tail   q = K1/u

sigma, the grading, goes down with the decay of the mode's tails, whose transform is narrow then;
h keeps exp(-i q x) tame over the whole guide. q, K1, h and sigma are in units of k0.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from coatings.optics.arrays import Complexes, Reals

BEYOND = 1.25
DEEPEST = 0.4
MOST_GROWTH = 3.0
GRADING = 3.0
NODES = {False: (48, 48), True: (64, 128)}
"""Nodes on arc and tail, by ``tm``; they hold 1e-6 in r."""
QUICK_NODES = {False: (32, 16), True: (32, 32)}
"""Nodes for a search; they hold 1e-5 in r."""
MORE_ON_ARC, QUICK_MORE_ON_ARC, STEP_ON_ARC = 32, 16, 16
"""A guide of thickness D makes exp(i q D) turn D times as q grows by one: 32 + D nodes at least."""


@dataclass(frozen=True)
class Contour:
    """Nodes and weights, both complex (W, K): an integral over q is sum(weight f(q))."""

    q: Complexes
    weight: Complexes


@lru_cache(maxsize=32)
def unit_nodes(n: int) -> tuple[Reals, Reals]:
    """Gauss-Legendre nodes and weights on (0, 1)."""
    x, w = np.polynomial.legendre.leggauss(n)
    return 0.5 * (x + 1.0), 0.5 * w


def nodes_for(guide_thickness: Reals, *, tm: bool, fine: int) -> tuple[int, int]:
    """How many nodes arc and tail take for guides of these thicknesses [1/k0].

    ``fine`` multiplies the numbers; 0 is for the quick ones.
    """
    arc, tail = NODES[tm] if fine else QUICK_NODES[tm]
    more = MORE_ON_ARC if fine else QUICK_MORE_ON_ARC
    steps = math.ceil((more + float(guide_thickness.max())) / STEP_ON_ARC)
    times = max(fine, 1)
    return times * max(arc, STEP_ON_ARC * steps), times * tail


def contour(
    highest_index: Reals, *, guide_thickness: Reals, decay: Reals, nodes: tuple[int, int]
) -> Contour:
    """Nodes along arc and tail.

    Parameters
    ----------
    highest_index : array (W,)
        Largest real index [1] among the mode's and the dielectric films'.
    guide_thickness : array (W,)
        Distance between the outermost interfaces of the guide [1/k0].
    decay : array (W,)
        The smaller decay constant of the mode's two tails [k0].
    nodes : (int, int)
        On the arc and on the tail.
    """
    top = BEYOND * highest_index[:, None]
    depth = np.minimum(DEEPEST, MOST_GROWTH / guide_thickness)[:, None]
    sigma = np.minimum(GRADING * decay[:, None], 0.5 * top)
    s, ws = unit_nodes(nodes[0])
    stretch = np.arcsinh(top / sigma)
    t = sigma / top * np.sinh(s * stretch)
    dt = sigma / top * stretch * np.cosh(s * stretch)
    arc = top * t - 4j * depth * t * (1.0 - t)
    arc_weight = (top - 4j * depth * (1.0 - 2.0 * t)) * dt * ws
    u, wu = unit_nodes(nodes[1])
    return Contour(
        np.concatenate([arc, top / u], axis=1),
        np.concatenate([arc_weight, top / u**2 * wu], axis=1),
    )
