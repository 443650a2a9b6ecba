"""Front reflectivity against threshold and power: which value serves the drive current best."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.errors import ArrayError, InputError, Problem
from coatings.laser import FacetLight, FieldModel, LaserEstimate, estimate, estimate_external
from coatings.laser.checks import out_of_range
from coatings.trade.best import (
    AXIS,
    NOTHING,
    BestFront,
    Drift,
    R_axis,
    drifts,
    find_best,
    watts_per_ln_R,
)
from coatings.trade.columns import ROLLOVER, Columns, FloatArray, TradeCase, columns
from coatings.trade.window import window_text

_LOWEST_R, _HIGHEST_R, _POINTS = 1e-5, 0.9, 241


@dataclass(frozen=True, eq=False)
class Trade:
    """Front reflectivity traded against everything else.

    Attributes
    ----------
    columns : the figures over ``R_front``, at the chip's length and the drive current.
    length_um, drive_A : of the chip.
    best : the best front with its range.
    laser : figures of the laser with the present front (with the best where none was given).
    external : what the reflector before that front does; None without one.
    drift : what a drift of the best reflectance does; ``watts_per_ln_R`` its slope [W].
    window : table to paste into a recipe; None where there is no range.
    notes : sentences for the reader.
    """

    columns: Columns
    length_um: float
    drive_A: float
    best: BestFront
    laser: LaserEstimate | None
    external: dict[str, float | bool | None] | None
    drift: tuple[Drift, ...]
    watts_per_ln_R: float | None
    window: str | None
    notes: tuple[str, ...]

    def to_json_dict(self) -> dict[str, object]:
        """Rows, best and laser by name; None where a figure is not known or not finite."""
        here = self.columns
        laser: dict[str, object] | None = None
        if self.laser is not None:
            laser = dict(self.laser.to_json_dict())
            if self.external is not None:
                laser["external"] = self.external
        return {
            "R_front": here.R_front.tolist(),
            "threshold_A": _listed(here.threshold_A, here.R_front.size),
            "front_W": _listed(here.front_W, here.R_front.size),
            "rear_W": _listed(here.rear_W, here.R_front.size),
            "facet_load_MW_per_cm2": _listed(here.facet_load_MW_per_cm2, here.R_front.size),
            "wall_plug_efficiency": _listed(here.wall_plug_efficiency, here.R_front.size),
            "length_um": self.length_um,
            "drive_A": self.drive_A,
            "best": self.best.to_json_dict(),
            "laser": laser,
        }


def _listed(column: FloatArray | None, size: int) -> list[float | None]:
    if column is None:
        return [None] * size
    return [value if np.isfinite(value) else None for value in column.tolist()]


def trade(
    case: TradeCase,
    *,
    present: FacetLight | None = None,
    R_bare: float | None = None,
    R_range: tuple[float, float] | None = None,
    points: int = _POINTS,
) -> Trade:
    """Threshold, power, load and efficiency over front reflectivity, and the best of them.

    Parameters
    ----------
    case : chip, rear, limits and what else stays the same.
    present : the front as it is now, for the ``laser`` figures; its R is always on the axis.
    R_bare : reflectance of the bare facet [1]; the axis reaches beyond it.
    R_range : ends of the axis [1]; 1e-5 to 0.9 when None, wider where present or bare ask for it.
    points : rows of the axis, evenly spaced in ln R; 5 or more.

    Raises
    ------
    InputError
        Ends that do not rise within 0 ... 1, too few points, or chip numbers that make more light
        than the electrical power.
    ArrayError
        A present front given as an array, or a front that reflects and absorbs more than all.
    """
    axis = columns(case, _axis(present, R_bare, R_range, points))
    best = find_best(case, axis)
    front = present
    if front is None and best.R_front is not None:
        front = _one(case.front_of(np.array([best.R_front])))
    laser, external = _laser(case, front)
    return Trade(
        columns=axis,
        length_um=case.chip.length_um,
        drive_A=case.current_A,
        best=best,
        laser=laser,
        external=external,
        drift=drifts(case, best, axis.model),
        watts_per_ln_R=watts_per_ln_R(case, best, axis.model),
        window=window_text(best, drive_A=case.current_A),
        notes=_notes(case, axis, best),
    )


def _axis(
    present: FacetLight | None,
    R_bare: float | None,
    R_range: tuple[float, float] | None,
    points: int,
) -> FloatArray:
    problems = out_of_range("R_bare", R_bare, low=0.0, high=0.99, open_low=True)
    if points < 5:
        problems.append(Problem("points", f"is {points}; give 5 or more"))
    low, high = (_LOWEST_R, _HIGHEST_R) if R_range is None else R_range
    if not 0.0 < low < high < 1.0:
        problems.append(Problem("R_range", f"is {low:g} to {high:g}; give two rising in 0 ... 1"))
    if problems:
        raise InputError(problems)
    if present is not None and present.shape:
        raise ArrayError(Problem("present", "holds arrays; give one front"))
    marks = [] if present is None or not 0.0 < float(present.R) < 1.0 else [float(present.R)]
    if R_range is None:
        low = min([low, *marks])
        high = max([high, *marks, *([] if R_bare is None else [0.5 + 0.5 * R_bare])])
    axis = R_axis(low=low, high=high, points=points)
    return np.union1d(axis, [mark for mark in marks if low <= mark <= high])


def _one(facet: FacetLight) -> FacetLight:
    """A facet of arrays of one row as plain numbers."""
    R, T, A, S = (float(part[0]) for part in facet.arrays())
    return FacetLight(R=R, T=T, A=A, S=S)


def _laser(
    case: TradeCase, front: FacetLight | None
) -> tuple[LaserEstimate | None, dict[str, float | bool | None] | None]:
    if front is None:
        return None, None
    laser = estimate(case.chip, front, case.rear, drive_A=case.current_A)
    if case.external is None:
        return laser, None
    fed_back = estimate_external(
        case.chip, front, case.rear, external=case.external, drive_A=case.current_A
    )
    return laser, fed_back.to_json_dict()


def _notes(case: TradeCase, axis: Columns, best: BestFront) -> tuple[str, ...]:
    notes = [_limited(case, best)]
    if axis.model is FieldModel.AXIAL:
        notes.append("The axial field is counted for all reflectances.")
    if case.limits.facet_limit_MW_per_cm2 is not None and axis.facet_load_MW_per_cm2 is None:
        notes.append("facet_limit_MW_per_cm2 can't be judged: the near field's height is unknown.")
    if case.external is not None:
        notes.append(
            "Threshold, power and load are those with the external reflector, powers added; where "
            "the locking margin is not positive the chip does not follow it."
        )
    if case.amplifier is not None and case.amplifier.ripple_dB is None:
        notes.append("No ripple limit is given: ripple is listed, not judged.")
    return tuple(notes)


def _limited(case: TradeCase, best: BestFront) -> str:
    if best.R_front is None:
        return f"No front reflectance keeps every limit: {best.limited_by}."
    at = f"Best front R {best.R_front:.3g} for {case.current_A:g} A"
    if best.limited_by == NOTHING:
        return f"{at}: the balance of threshold against slope; no limit binds."
    if best.limited_by == ROLLOVER:
        return f"{at}: past thermal rollover, more current gives less power."
    if best.limited_by == AXIS:
        return f"{at}: the end of the axis; beyond it the power is no less."
    return f"{at}: limited by {best.limited_by}."
