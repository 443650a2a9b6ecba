"""The chip's own heat: the junction temperature that its losses hold up.

T_j = T_sink + R_th (I V - P1 - P2), where the light P falls as the junction warms. So the right
side rises with T_j, and repeating it from the heat sink climbs to the LOWEST root and never past
it (a rising map that starts below its least fixed point stays below it). Near runaway the climb is
slow; what is left then lies between the climb's last rung and T_sink + R_th I V and is bracketed.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from coatings.laser.checks import FloatArray

Index: TypeAlias = NDArray[np.intp]
ByCase: TypeAlias = Callable[[FloatArray, Index], FloatArray]
"""A quantity at the junction temperatures [degree C] of the cases at the given indices."""

_RUNGS = 60
_SCAN = 257
_HALVINGS = 60
_TOLERANCE_K = 1e-10


def lowest_junction_C(
    light_W: ByCase, *, heatsink_C: float, thermal_K_per_W: float, electrical_W: FloatArray
) -> FloatArray:
    """Lowest steady junction temperature of each case [degree C].

    Parameters
    ----------
    light_W : light that leaves [W], falling with temperature, at most the electrical power.
    heatsink_C : temperature of the heat sink [degree C].
    thermal_K_per_W : thermal resistance junction to heat sink [K/W].
    electrical_W : I V of each case [W], shape (n,).
    """

    def settled(junction_C: FloatArray, index: Index) -> FloatArray:
        heat_W: FloatArray = electrical_W[index] - light_W(junction_C, index)
        return heatsink_C + thermal_K_per_W * heat_W

    junction = np.full(electrical_W.shape, heatsink_C)
    index = np.arange(electrical_W.size, dtype=np.intp)
    for _ in range(_RUNGS):
        higher = settled(junction[index], index)
        moving = np.abs(higher - junction[index]) > _TOLERANCE_K
        junction[index] = higher
        index = index[moving]
        if index.size == 0:
            return junction
    top = heatsink_C + thermal_K_per_W * electrical_W[index]
    junction[index] = _first_crossing(settled, junction[index], top, index)
    return junction


def _first_crossing(settled: ByCase, low: FloatArray, high: FloatArray, index: Index) -> FloatArray:
    """Lowest root of T - settled(T) between ``low`` (not above it) and ``high`` (not below it)."""
    steps = np.linspace(0.0, 1.0, _SCAN)
    open_ = np.ones(low.shape, dtype=bool)
    left, right = low.copy(), high.copy()
    for step in steps[1:]:
        here = low + step * (high - low)
        crossed = open_ & (here >= settled(here, index))
        right[crossed] = here[crossed]
        open_ &= ~crossed
        left[open_] = here[open_]
    for _ in range(_HALVINGS):
        middle = 0.5 * (left + right)
        over = middle >= settled(middle, index)
        right = np.where(over, middle, right)
        left = np.where(over, left, middle)
    return right
