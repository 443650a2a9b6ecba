"""Chips that do not belong to the others, and what each length contributes."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from coatings.errors import InputError
from coatings.laser.calibrate_model import (
    Fitted,
    Points,
    derivatives,
    joint_fit,
    residuals,
    scatter_of,
)
from coatings.laser.checks import FloatArray
from coatings.laser.student import t_quantile

_FALSE_ALARM = 0.005
_MOST_OUTLIERS = 0.2
# Below this a deviation is no matter, however small the others' scatter: digits of the file.
_LEAST_DEVIATION = 1e-3
_FEWEST_CHIPS = 5
_SAME_LENGTH = 0.02

_Pair: TypeAlias = tuple[FloatArray, FloatArray]


@dataclass(frozen=True)
class Outlier:
    """A chip outside the scatter of the others.

    ``row`` counts from 0 in the chips as given; ``quantity`` is "slope" or "threshold";
    ``deviation`` is measured over expected less 1 [1]; ``sigmas`` the same over its standard error
    as the other chips show it.
    """

    row: int
    length_um: float
    quantity: str
    deviation: float
    sigmas: float

    def __str__(self) -> str:
        return (
            f"chip {self.row + 1} ({self.length_um:g} um): {self.quantity} "
            f"{100.0 * self.deviation:+.3g} % off, {abs(self.sigmas):.1f} standard errors"
        )


def length_groups(length_cm: FloatArray) -> NDArray[np.intp]:
    """Number of the nominal length that each chip belongs to: lengths closer than 2 % are one."""
    order = np.argsort(length_cm, kind="stable")
    rising = length_cm[order]
    jumps = np.concatenate([[0], np.cumsum(np.diff(rising) > _SAME_LENGTH * rising[:-1])])
    group = np.empty(length_cm.size, dtype=np.intp)
    group[order] = jumps
    return group


def find_outliers(points: Points) -> tuple[Outlier, ...]:
    """Outlying chips by the generalised extreme deviate test, false alarm 0.5 % a set of chips.

    The worst chip is put aside, the rest fitted anew, up to a fifth of the chips; every one put
    aside up to the last that fails its test is an outlier. Going on past a chip that passes is
    what finds two that hide each other. Rosner, Technometrics 25, 165 (1983) (from memory).
    """
    kept = np.ones(points.size, dtype=bool)
    aside: list[Outlier] = []
    found = 0
    for _ in range(int(_MOST_OUTLIERS * points.size)):
        if np.count_nonzero(kept) < _FEWEST_CHIPS or not _has_two_lengths(points, kept):
            break
        worst, limit = _worst(points, kept)
        aside.append(worst)
        kept[worst.row] = False
        if abs(worst.sigmas) > limit and abs(worst.deviation) > _LEAST_DEVIATION:
            found = len(aside)
    outliers = aside[:found]
    without = np.ones(points.size, dtype=bool)
    without[[outlier.row for outlier in outliers]] = False
    return tuple(outliers) if _has_two_lengths(points, without) else ()


def _has_two_lengths(points: Points, kept: NDArray[np.bool_]) -> bool:
    return np.unique(length_groups(points.length_cm[kept])).size >= 2


def _worst(points: Points, kept: NDArray[np.bool_]) -> tuple[Outlier, float]:
    """The most deviant of the kept chips and the limit it may reach by chance."""
    rows = np.flatnonzero(kept)
    rests, slopes = _against_line(points.at(kept))
    deviants = [_deleted(*pair) for pair in zip(rests, slopes, strict=True)]
    both = np.abs(np.stack(deviants))
    kind, place = np.unravel_index(int(np.argmax(both)), both.shape)
    row = int(rows[place])
    # Deviation from the line that the other chips make: the chip's own pull taken out.
    rest = rests[kind][place] / (1.0 - _leverage(slopes[kind])[place])
    outlier = Outlier(
        row=row,
        length_um=float(points.length_cm[row] * 1e4),
        quantity=("slope", "threshold")[kind],
        deviation=float(np.expm1(rest)),
        sigmas=float(deviants[kind][place]),
    )
    dof = rows.size - 3
    return outlier, t_quantile(1.0 - 0.5 * _FALSE_ALARM / (2.0 * rows.size), dof)


def _against_line(points: Points) -> tuple[_Pair, _Pair]:
    """Residuals of slope and threshold, and the directions of the fit that they come from."""
    try:
        p = joint_fit(points).parameters
    except InputError:
        # A gross outlier can turn a line round: plain lines of the logarithms exist always.
        return _plain_lines(points)
    return residuals(points, p), derivatives(points, p)


def _plain_lines(points: Points) -> tuple[_Pair, _Pair]:
    rests, designs = [], []
    for over, measured in (
        (points.length_cm, points.efficiency),
        (1.0 / points.length_cm, points.density),
    ):
        design = np.stack([np.ones(points.size), over], axis=1)
        target = np.log(measured)
        rests.append(target - design @ np.linalg.lstsq(design, target, rcond=None)[0])
        designs.append(design)
    return (rests[0], rests[1]), (designs[0], designs[1])


def _leverage(slopes: FloatArray) -> FloatArray:
    """Share of each chip in its own expectation, from the directions that this kind can see."""
    basis, sizes, _ = np.linalg.svd(slopes, full_matrices=False)
    seen = basis[:, sizes > 1e-10 * sizes[0]]
    share: FloatArray = np.sum(seen**2, axis=1)
    return np.minimum(share, 1.0 - 1e-9)


def _deleted(rest: FloatArray, slopes: FloatArray) -> FloatArray:
    """Residuals over their standard errors, each estimated from the other chips (Student's t)."""
    free = 1.0 - _leverage(slopes)
    dof = rest.size - 3
    others = np.maximum(rest @ rest - rest**2 / free, 0.0) / dof
    error = np.sqrt(others * free)
    # A perfect rest: whatever deviates does so without bound.
    bound = np.select([rest > 0.0, rest < 0.0], [np.inf, -np.inf], 0.0)
    sigmas: FloatArray = np.divide(rest, error, out=bound, where=error > 0.0)
    return sigmas


@dataclass(frozen=True)
class LeftOut:
    """The fit without one length.

    ``length_um`` mean of the chips left out, ``chips`` how many; ``parameters`` p without them
    (a_i, eta_i, Jtr, G0 in their units); ``shift_sigmas`` how far each moved over the standard
    error of such a move; ``matters`` where one moved further than chance allows (0.5 % for all).
    """

    length_um: float
    chips: int
    parameters: tuple[float, float, float, float]
    shift_sigmas: tuple[float, float, float, float]
    matters: bool


def leave_one_length_out(points: Points, full: Fitted) -> tuple[LeftOut, ...]:
    """The joint fit without each length in turn; empty with fewer than three lengths.

    The move's variance is that of the smaller set less that of the full one (the full fit is the
    efficient one): Hausman, Econometrica 46, 1251 (1978) (from memory). The scatter is that of
    chips of one length where there are such chips, because a length that does not fit widens the
    scatter about the lines. Lengths whose absence leaves lines without meaning are passed over.
    """
    groups = length_groups(points.length_cm)
    numbers = np.unique(groups)
    if numbers.size < 3 or full.dof < 1:
        return ()
    scatter, dof = _own_scatter(points, full, groups)
    limit = t_quantile(1.0 - 0.5 * _FALSE_ALARM / (4 * numbers.size), dof)
    rows = []
    for number in numbers:
        out = groups == number
        try:
            rest = joint_fit(points.at(~out))
        except InputError:
            continue
        moved = rest.parameters - full.parameters
        without, all_in = (
            _variance(part, full.parameters, scatter) for part in (points.at(~out), points)
        )
        sigmas = _over_sigma(moved, without - all_in, tiny=1e-9 * without)
        rows.append(
            LeftOut(
                length_um=float(points.length_cm[out].mean() * 1e4),
                chips=int(np.count_nonzero(out)),
                parameters=_four(_natural(rest.parameters)),
                shift_sigmas=_four(sigmas),
                matters=bool(np.any((np.abs(sigmas) > limit) & (np.abs(moved) > _LEAST_DEVIATION))),
            )
        )
    return tuple(rows)


def _over_sigma(moved: FloatArray, variance: FloatArray, *, tiny: FloatArray) -> FloatArray:
    """Moves over their standard errors; zero where nothing could move."""
    seen = variance > tiny
    return np.divide(moved, np.sqrt(np.abs(variance)), out=np.zeros_like(moved), where=seen)


def _own_scatter(
    points: Points, full: Fitted, groups: NDArray[np.intp]
) -> tuple[tuple[float, float, float], int]:
    """Scatter of chips about the mean of their length, and its degrees of freedom."""
    members = np.bincount(groups)
    dof = points.size - members.size
    if dof < 2:
        return full.scatter, full.dof
    slope, threshold = (
        rest - (np.bincount(groups, rest) / members)[groups]
        for rest in residuals(points, full.parameters)
    )
    return scatter_of(slope, threshold, dof), dof


def _variance(
    points: Points, parameters: FloatArray, scatter: tuple[float, float, float]
) -> FloatArray:
    """Variance of p for these chips with a given scatter; R left out."""
    inverse = np.linalg.pinv(np.concatenate(derivatives(points, parameters)))
    S, T = inverse[:, : points.size], inverse[:, points.size :]
    slope, threshold, correlation = scatter
    variance: FloatArray = (
        slope**2 * np.sum(S * S, axis=1)
        + threshold**2 * np.sum(T * T, axis=1)
        + 2.0 * correlation * slope * threshold * np.sum(S * T, axis=1)
    )
    return variance


def _natural(p: FloatArray) -> FloatArray:
    return np.concatenate([p[:1], np.exp(p[1:])])


def _four(values: FloatArray) -> tuple[float, float, float, float]:
    a, b, c, d = (float(value) for value in values)
    return a, b, c, d
