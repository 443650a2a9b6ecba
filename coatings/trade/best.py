"""The best front reflectance within the limits, the range around it, and what limits it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TypeAlias

import numpy as np

from coatings.laser import FieldModel
from coatings.trade.columns import (
    ROLLOVER,
    Columns,
    FloatArray,
    Mask,
    TradeCase,
    columns,
)

NOTHING, AXIS = "none", "axis"
SHARE_OF_BEST = 0.99
_FINER, _ROUNDS = 33, 3
_NUDGE = 1.005
_DRIFTS = (0.5, 0.8, 1.25, 2.0)
_Inside: TypeAlias = Callable[[Columns], Mask]


@dataclass(frozen=True)
class BestFront:
    """The front reflectance of most front power that keeps every limit; None where none does.

    Attributes
    ----------
    R_front : the best; ``R_low`` ... ``R_high`` : the unbroken range around it that stays within
        1 % of its power and keeps every limit.
    front_W, threshold_A : at the best [W], [A].
    limited_by : "load", "threshold", "rear power", "locking" or "ripple" where a limit cuts the
        power off (joined by commas where several do, or where no reflectance keeps them all);
        "rollover" where more current would give less power; "axis" where power falls nowhere before an
        end of the axis; "none" where the best is the balance between threshold and slope.
    """

    R_front: float | None
    R_low: float | None
    R_high: float | None
    front_W: float | None
    threshold_A: float | None
    limited_by: str

    def to_json_dict(self) -> dict[str, float | str | None]:
        """The figures by name."""
        names = ("R_front", "R_low", "R_high", "front_W", "threshold_A", "limited_by")
        return {name: getattr(self, name) for name in names}


@dataclass(frozen=True)
class Drift:
    """What a drift of the front's reflectance does: at ``R_front`` = ``factor`` times the best.

    ``change_W`` of the front power [W], its ``threshold_A`` [A] and the limits ``missed`` there.
    """

    factor: float
    R_front: float
    change_W: float
    threshold_A: float
    missed: tuple[str, ...]


def find_best(case: TradeCase, axis: Columns) -> BestFront:
    """Best reflectance and range, refined between the rows of an axis (rising R)."""
    allowed = axis.allowed
    if not allowed.any():
        return BestFront(None, None, None, None, None, _never_kept(axis))
    at = _refined_best(case, axis, int(np.argmax(np.where(allowed, axis.front_W, -np.inf))))
    best_R, power = float(at.R_front[0]), float(at.front_W[0])

    def inside(here: Columns) -> Mask:
        return here.allowed & (here.front_W >= SHARE_OF_BEST * power)

    rows = inside(axis)
    low = _edge(case, axis, rows, best_R, inside, down=True)
    high = _edge(case, axis, rows, best_R, inside, down=False)
    return BestFront(
        R_front=best_R,
        R_low=low,
        R_high=high,
        front_W=power,
        threshold_A=float(at.threshold_A[0]),
        limited_by=_limit(case, axis, at),
    )


def _never_kept(axis: Columns) -> str:
    """The limits that no row keeps; where each is kept somewhere, all that are missed anywhere."""
    never = [name for name, kept in axis.kept.items() if not kept.any()]
    somewhere = [name for name, kept in axis.kept.items() if not kept.all()]
    return ", ".join(never or somewhere)


def _refined_best(case: TradeCase, axis: Columns, row: int) -> Columns:
    """One row: the most power that keeps the limits between the neighbours of a row."""
    here, at = axis.R_front, row
    low, high = here[max(at - 1, 0)], here[min(at + 1, here.size - 1)]
    best = here[at]
    for _ in range(_ROUNDS):
        # The best so far stays among the candidates: a limit's edge may lie between the others.
        fine = np.union1d(np.geomspace(low, high, _FINER), best)
        found = columns(case, fine, axis.model)
        at = int(np.argmax(np.where(found.allowed, found.front_W, -np.inf)))
        low, best, high = fine[max(at - 1, 0)], fine[at], fine[min(at + 1, fine.size - 1)]
    return columns(case, np.array([best]), axis.model)


def _edge(
    case: TradeCase,
    axis: Columns,
    rows: Mask,
    best_R: float,
    inside: _Inside,
    *,
    down: bool,
) -> float:
    """Last reflectance inside when walking from the best one way; an end of the axis may be it."""
    beyond = axis.R_front < best_R if down else axis.R_front > best_R
    walk = np.flatnonzero(beyond)[::-1] if down else np.flatnonzero(beyond)
    last = best_R
    for row in walk:
        if not rows[row]:
            return _last_inside(case, axis.model, last, float(axis.R_front[row]), inside)
        last = float(axis.R_front[row])
    return last


def _last_inside(
    case: TradeCase, model: FieldModel, good: float, bad: float, inside: _Inside
) -> float:
    for _ in range(_ROUNDS):
        fine = np.geomspace(good, bad, _FINER)
        out = np.flatnonzero(~inside(columns(case, fine, model))[1:])
        first = int(out[0]) + 1 if out.size else _FINER - 1
        good, bad = float(fine[first - 1]), float(fine[first])
    return good


def _limit(case: TradeCase, axis: Columns, at: Columns) -> str:
    """What keeps the power from being higher than at the best."""
    R = float(at.R_front[0])
    beside = columns(case, np.array([R / _NUDGE, R * _NUDGE]), axis.model)
    higher = beside.front_W > at.front_W[0]
    cut = [name for row in np.flatnonzero(higher) for name in beside.missed(int(row))]
    if not cut:
        # A limit met in passing, where the chip goes out at once.
        cut = [name for row in (0, 1) for name in beside.missed(row) if name == ROLLOVER]
    if cut:
        return ", ".join(dict.fromkeys(cut))
    if _rolls_over(case, at):
        return ROLLOVER
    if R in (axis.R_front[0], axis.R_front[-1]):
        return AXIS
    return NOTHING


def _rolls_over(case: TradeCase, at: Columns) -> bool:
    more = columns(case.at_current(case.current_A * _NUDGE), at.R_front, at.model)
    return bool(more.front_W[0] < at.front_W[0])


def drifts(case: TradeCase, best: BestFront, model: FieldModel) -> tuple[Drift, ...]:
    """What halving to doubling of the best reflectance does; empty where there is no best."""
    if best.R_front is None or best.front_W is None:
        return ()
    factors = [factor for factor in _DRIFTS if factor * best.R_front < 1.0]
    moved = columns(case, best.R_front * np.array(factors), model)
    return tuple(
        Drift(
            factor=factor,
            R_front=float(moved.R_front[row]),
            change_W=float(moved.front_W[row]) - best.front_W,
            threshold_A=float(moved.threshold_A[row]),
            missed=moved.missed(row),
        )
        for row, factor in enumerate(factors)
    )


def watts_per_ln_R(case: TradeCase, best: BestFront, model: FieldModel) -> float | None:
    """Slope of the front power over ln R at the best [W]: a hundredth of it a percent of R."""
    if best.R_front is None:
        return None
    ends = columns(case, best.R_front * np.array([1.0 / _NUDGE, _NUDGE]), model)
    return float(np.diff(ends.front_W)[0] / (2.0 * np.log(_NUDGE)))


def R_axis(*, low: float, high: float, points: int) -> FloatArray:
    """Reflectances evenly spaced in their logarithm, both ends exact [1]."""
    axis: FloatArray = np.geomspace(low, high, points)
    axis[0], axis[-1] = low, high
    return axis
