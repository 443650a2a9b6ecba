"""From real numbers to thicknesses that can be ordered: round, then search the grid around."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from coatings.design.limits import RunLimits
from coatings.facets import FloatArray, IntArray

Score = Callable[[FloatArray], FloatArray]  # stacks (S, L) [nm] -> (S,), higher is better


def best_ordered(
    nm: FloatArray, *, film: IntArray, limits: RunLimits, score: Score, breadth: int, sweeps: int
) -> FloatArray | None:
    """Best stack (L,) [nm] on the grid of ordered thicknesses around ``nm``. None where no stack of the
    grid around keeps the limits.

    The ``breadth`` best roundings are moved on together, by single steps of every layer and opposite and
    equal steps of every two, for as long as one of their neighbours is among the ``breadth`` best, and at
    most ``sweeps`` times.
    """
    best = _kept(_starting(nm, film, limits), limits, film)
    if not len(best):
        return None
    best, scores = _leading(best, score(best), breadth)
    moves = _moves(len(nm)) * limits.step_nm
    fresh = best
    for _ in range(sweeps):
        near = _kept(limits.rounded(_around(fresh, moves), film=film), limits, film)
        near = near[~(near[:, None] == best[None]).all(axis=2).any(axis=1)]
        if not len(near):
            break
        found, found_scores = _leading(
            np.vstack([best, near]), np.append(scores, score(near)), breadth
        )
        fresh = found[~(found[:, None] == best[None]).all(axis=2).any(axis=1)]
        best, scores = found, found_scores
        if not len(fresh):
            break
    leader: FloatArray = best[0]
    return leader


def _around(stacks: FloatArray, moves: FloatArray) -> FloatArray:
    near: FloatArray = (stacks[:, None] + moves[None]).reshape(-1, stacks.shape[1])
    return near


def _starting(nm: FloatArray, film: IntArray, limits: RunLimits) -> FloatArray:
    """Roundings of a stack, and of two that lie further inside the linear limits: a total or a stress
    that the exact stack keeps to the last digit may not survive the rounding of its layers."""
    rows = [limits.rounded(_corners(nm, limits.step_nm), film=film)]
    middle = limits.middle(film) if limits.linear(film) else None
    if middle is not None:
        steps = len(nm) * limits.step_nm / max(float(np.abs(middle - nm).sum()), limits.step_nm)
        for share in (min(steps, 1.0), 1.0):
            rows.append(limits.rounded(nm + share * (middle - nm), film=film)[None])
    return np.vstack(rows)


def _leading(stacks: FloatArray, scores: FloatArray, breadth: int) -> tuple[FloatArray, FloatArray]:
    """The ``breadth`` best, best first; among equals the one that came first."""
    top = np.argsort(-scores, kind="stable")[:breadth]
    return stacks[top], scores[top]


def _kept(stacks: FloatArray, limits: RunLimits, film: IntArray) -> FloatArray:
    unique = np.unique(stacks, axis=0)
    kept: FloatArray = unique[limits.held(unique, film=film)]
    return kept


def _corners(nm: FloatArray, step_nm: float) -> FloatArray:
    """All roundings up and down of up to six layers, nearest for the rest; at least the nearest."""
    count = len(nm)
    loose = np.argsort(-np.abs(nm / step_nm - np.round(nm / step_nm)))[: min(count, 6)]
    corners = np.tile(nm, (2 ** len(loose) + 1, 1))
    for bit, layer in enumerate(loose):
        up = (np.arange(2 ** len(loose)) >> bit) & 1
        corners[1:, layer] = (np.floor(nm[layer] / step_nm) + up) * step_nm
    return corners


def _moves(count: int) -> FloatArray:
    single = np.vstack([np.eye(count), -np.eye(count)])
    if count > 6:  # pairs grow with the square of the count and no longer pay
        return single
    pairs = []
    for i in range(count):
        for j in range(i + 1, count):
            for a, b in ((1.0, 1.0), (1.0, -1.0), (-1.0, 1.0), (-1.0, -1.0)):
                move = np.zeros(count)
                move[i], move[j] = a, b
                pairs.append(move)
    return np.vstack([single, *pairs])
