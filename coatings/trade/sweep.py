"""The best front reflectance over length or current."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.errors import InputError, Problem
from coatings.trade.best import BestFront, R_axis, find_best
from coatings.trade.columns import FloatArray, TradeCase, columns

_LOWEST_R, _HIGHEST_R, _POINTS = 1e-5, 0.9, 61


@dataclass(frozen=True, eq=False)
class Sweep:
    """Best front for each value of ``length_um`` or ``current_A``, shape (n,).

    ``best`` one a value; ``wall_plug_efficiency`` at the best [1], NaN where it is not known or
    no front keeps the limits.
    """

    quantity: str
    values: FloatArray
    best: tuple[BestFront, ...]
    wall_plug_efficiency: FloatArray
    notes: tuple[str, ...]

    @property
    def R_front(self) -> FloatArray:
        """Best reflectance at each value [1]; NaN where no front keeps the limits."""
        return _column([row.R_front for row in self.best])

    @property
    def front_W(self) -> FloatArray:
        """Front power at the best [W]; NaN where no front keeps the limits."""
        return _column([row.front_W for row in self.best])


def _column(values: list[float | None]) -> FloatArray:
    return np.array([np.nan if value is None else value for value in values])


def sweep_length(case: TradeCase, *, length_um: FloatArray) -> Sweep:
    """Best front over the chip's length, at the same drive current.

    Series and thermal resistance go with one over length, as contact and heat path do.

    Parameters
    ----------
    case : what stays the same.
    length_um : lengths [um], above zero, shape (n,).

    Raises
    ------
    InputError
        Lengths that are not above zero.
    """
    note = "Series and thermal resistance are scaled with one over length."
    lengths = _above_zero("length_um", length_um)
    return _sweep("length_um", lengths, [case.at_length(float(x)) for x in lengths], (note,))


def sweep_current(case: TradeCase, *, current_A: FloatArray) -> Sweep:
    """Best front over the drive current.

    Parameters
    ----------
    case : what stays the same.
    current_A : currents [A], above zero, shape (n,).

    Raises
    ------
    InputError
        Currents that are not above zero.
    """
    currents = _above_zero("current_A", current_A)
    return _sweep("current_A", currents, [case.at_current(float(x)) for x in currents], ())


def _above_zero(name: str, values: FloatArray) -> FloatArray:
    array = np.asarray(values, dtype=np.float64)
    if array.ndim != 1 or array.size == 0 or not np.all((array > 0.0) & np.isfinite(array)):
        raise InputError(Problem(name, "is not a row of numbers above 0; give one or more"))
    return array


def _sweep(
    quantity: str, values: FloatArray, cases: list[TradeCase], notes: tuple[str, ...]
) -> Sweep:
    R = R_axis(low=_LOWEST_R, high=_HIGHEST_R, points=_POINTS)
    best = tuple(find_best(case, columns(case, R)) for case in cases)
    efficiency = [_efficiency(case, row) for case, row in zip(cases, best, strict=True)]
    return Sweep(quantity, values, best, np.array(efficiency), notes)


def _efficiency(case: TradeCase, best: BestFront) -> float:
    voltage = case.chip.voltage_V(case.current_A)
    if best.front_W is None or voltage is None:
        return float("nan")
    return float(best.front_W / (case.current_A * voltage))
