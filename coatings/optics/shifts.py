"""A guide whose indices all rise by one number, stack by stack: interpolation over that number.

Effective index and transforms depend smoothly on a common shift of all indices (it scales the
guide's strength by shift/index, some thousandths), so four guides are solved, at Chebyshev's nodes of
a span that holds all shifts, and the polynomial of degree three through them serves every stack.
"""

from __future__ import annotations

import math

import numpy as np

from coatings.optics.arrays import Reals

NODES = 4
FINEST_SPAN = 1e-3


def span_of(shift: Reals) -> float:
    """The smallest 0.001 2^k, k = 0, 1, ..., that holds all shifts on both sides of zero."""
    largest = float(np.abs(shift).max())
    doublings = max(0, math.ceil(math.log2(largest / FINEST_SPAN))) if largest > 0.0 else 0
    return FINEST_SPAN * 2.0**doublings


def nodes_of(span: float) -> Reals:
    """Chebyshev's nodes on -span ... span, (V,)."""
    nodes: Reals = span * np.cos((2.0 * np.arange(NODES) + 1.0) * np.pi / (2.0 * NODES))
    return nodes


def mix_of(shift: Reals, nodes: Reals) -> Reals:
    """Lagrange's weights of the nodes for each shift, (S, V)."""
    mix = np.ones((shift.size, nodes.size))
    for v, node in enumerate(nodes):
        for other in np.delete(nodes, v):
            mix[:, v] *= (shift - other) / (node - other)
    return mix
