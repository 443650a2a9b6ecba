"""The ratio of both facets' slopes from a measured power over current.

Front and rear power are regressed on each other, not each on the current: their ratio is the same
at all currents above threshold, so heat, rollover and steps of the drive fall out.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum

import numpy as np
from numpy.typing import NDArray

from coatings.errors import ArrayError, InputError, Problem
from coatings.laser.checks import FloatArray, not_negative, numbers
from coatings.laser.student import t_probability

_FEWEST = 4
_MOST_KNEES = 120
_CLEAR_OF_KNEE = 1.1
_FLAT_BEFORE_KNEE = 0.2
_RISE_TOGETHER = 0.5
_SURE = 1e-3
_MATTERS = 0.01


class Side(Enum):
    """A facet of the chip."""

    FRONT = "front"
    REAR = "rear"


@dataclass(frozen=True, eq=False)
class TwoSidedSweep:
    """Power of both facets over current; arrays of shape (n,): [A], [W], [W].

    Raises
    ------
    ArrayError
        Rows of different size, values that are not finite, a negative current.
    """

    current_A: FloatArray
    front_W: FloatArray
    rear_W: FloatArray

    def __post_init__(self) -> None:
        object.__setattr__(self, "current_A", not_negative("current_A", self.current_A))
        for name in ("front_W", "rear_W"):
            object.__setattr__(self, name, numbers(name, getattr(self, name)))
        shapes = {self.current_A.shape, self.front_W.shape, self.rear_W.shape}
        if len(shapes) > 1 or self.current_A.ndim != 1:
            raise ArrayError(
                Problem(
                    "current_A, front_W, rear_W",
                    "are not rows of one size; give one value of each at every current",
                )
            )


@dataclass(frozen=True)
class SlopeRatio:
    """Slope of the unknown facet over that of the known one.

    ``ratio_sigma`` is relative [1] with ``degrees`` of freedom; ``from_A``, ``to_A`` the currents
    used and ``points`` how many; ``knee_A`` where the light sets in, None if no point lies before.
    """

    ratio: float
    ratio_sigma: float
    degrees: float
    from_A: float
    to_A: float
    points: int
    knee_A: float | None
    notes: tuple[str, ...]


def slope_ratio(
    sweep: TwoSidedSweep, *, unknown: Side, range_A: tuple[float, float] | None = None
) -> SlopeRatio:
    """Ratio of the two slopes above threshold, unknown over known.

    The line through both powers is the one that treats them alike (the ratio of their standard
    deviations, signed); its error is the jackknife's, which holds for noise that grows with power.

    Parameters
    ----------
    sweep : the measurement.
    unknown : the facet whose reflectivity is asked for.
    range_A : currents to use [A]; None takes all from 10 % above the knee.

    Raises
    ------
    InputError
        Fewer than four points above threshold, or powers that do not rise together.
    """
    knee = _knee_A(sweep) if range_A is None else None
    used = _used(sweep, knee, range_A)
    front, rear = sweep.front_W[used], sweep.rear_W[used]
    over, under = (front, rear) if unknown is Side.FRONT else (rear, front)
    _refuse_not_together(over, under)
    ratio, sigma, degrees = _alike_line(over, under)
    current = sweep.current_A[used]
    return SlopeRatio(
        ratio=ratio,
        ratio_sigma=sigma,
        degrees=degrees,
        from_A=float(current.min()),
        to_A=float(current.max()),
        points=int(current.size),
        knee_A=knee,
        notes=_drift_note(over, under),
    )


def _used(
    sweep: TwoSidedSweep, knee: float | None, range_A: tuple[float, float] | None
) -> NDArray[np.bool_]:
    current = sweep.current_A
    if range_A is not None:
        used = (current >= range_A[0]) & (current <= range_A[1])
    elif knee is not None:
        used = current >= _CLEAR_OF_KNEE * knee
    else:
        used = np.ones(current.shape, dtype=bool)
    if np.count_nonzero(used) < _FEWEST:
        onset = "" if knee is None else f" (the light sets in at {knee:.4g} A)"
        raise InputError(
            Problem(
                "current_A",
                f"holds {np.count_nonzero(used)} points clear of threshold{onset}; give at least "
                f"{_FEWEST}",
            )
        )
    return used


def _knee_A(sweep: TwoSidedSweep) -> float | None:
    """Current of the bend from flat to steep that fits best; None if there is none."""
    current = sweep.current_A
    light = sum(power / np.ptp(power) for power in _moving(sweep))
    inner = np.unique(current)[1:-2]
    if inner.size > _MOST_KNEES:
        inner = inner[np.linspace(0, inner.size - 1, _MOST_KNEES).astype(int)]
    best, knee = np.inf, None
    for bend in inner:
        design = np.stack([np.ones_like(current), current, np.maximum(current - bend, 0.0)], axis=1)
        line = np.linalg.lstsq(design, light, rcond=None)[0]
        rest = light - design @ line
        flat = abs(line[1]) < _FLAT_BEFORE_KNEE * (line[1] + line[2])
        if flat and rest @ rest < best:
            best, knee = float(rest @ rest), float(bend)
    return knee


def _moving(sweep: TwoSidedSweep) -> tuple[FloatArray, FloatArray]:
    for name in ("front_W", "rear_W"):
        power = getattr(sweep, name)
        if power.size < _FEWEST or np.ptp(power) == 0.0:
            raise InputError(
                Problem(name, "does not change with current; give a sweep across threshold")
            )
    return sweep.front_W, sweep.rear_W


def _refuse_not_together(over: FloatArray, under: FloatArray) -> None:
    u, v = over - over.mean(), under - under.mean()
    spread = np.sqrt((u @ u) * (v @ v))
    if not u @ v > _RISE_TOGETHER * spread:
        raise InputError(
            Problem(
                "front_W, rear_W",
                "do not rise together above threshold; check that both columns are of one sweep",
            )
        )


def _alike_line(over: FloatArray, under: FloatArray) -> tuple[float, float, float]:
    """Ratio of the standard deviations, the jackknife's relative standard error, its degrees.

    The degrees are those of a sum of squares as uneven as the jackknife's own terms: noise that
    grows with power leaves the error to few points.
    """
    n = over.size
    left = np.stack([_without_each(over), _without_each(under)])
    if np.any(left <= 1e-9 * np.max(left, axis=1, keepdims=True)):
        raise InputError(
            Problem("front_W, rear_W", "hang on a single point above threshold; give more currents")
        )
    each = 0.5 * np.log(left[0] / left[1])
    square = (each - each.mean()) ** 2
    total = float(np.sum(square))
    uneven = 3.0 * total**2 / float(np.sum(square**2)) - 2.0 if total > 0.0 else np.inf
    ratio = float(np.std(over) / np.std(under))
    return ratio, float(np.sqrt((n - 1) / n * total)), float(min(n - 2.0, max(uneven, 1.0)))


def _without_each(power: FloatArray) -> FloatArray:
    """Sum of squares about the mean without each point in turn."""
    off = power - power.mean()
    left: FloatArray = off @ off - off**2 * power.size / (power.size - 1)
    return left


def _drift_note(over: FloatArray, under: FloatArray) -> tuple[str, ...]:
    """Says where the ratio changes over the range, which no laser model explains."""
    n = over.size
    if n < _FEWEST + 1:
        return ()
    s = (under - under.mean()) / np.ptp(under)
    design = np.stack([np.ones(n), s, s**2], axis=1)
    line = np.linalg.lstsq(design, over, rcond=None)[0]
    rest = over - design @ line
    error = np.sqrt(rest @ rest / (n - 3) * np.linalg.pinv(design.T @ design)[2, 2])
    change = 2.0 * line[2] / line[1]
    sure = error == 0.0 or 2.0 * t_probability(-abs(line[2]) / error, n - 3) < _SURE
    if not (sure and abs(change) > _MATTERS):
        return ()
    return (
        f"The slopes' ratio drifts by {100.0 * change:+.2g} % over the range: the meters saturate, "
        "or a lateral mode changes.",
    )
