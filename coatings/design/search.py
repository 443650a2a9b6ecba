"""All of one layer count: starts, refinement, robust finishing, rounding, judgement.

One call does one layer count of one facet and depends on nothing but its arguments, so that calls can
run anywhere in any order and give the same answer.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from coatings.design import starts
from coatings.design.climb import STAGES, SmoothYield, climb, slack_scale
from coatings.design.limits import RunLimits
from coatings.design.model import FacetModel
from coatings.design.ordered import best_ordered
from coatings.design.polish import least_squares, minimax
from coatings.design.spread import Draws, RunErrors, Yield, draw_mirrored, sampled_yield
from coatings.facets import FloatArray, IntArray
from coatings.recipe import FacetName

SEARCH_POINTS = 13  # wavelengths a window while searching
JUDGE_POINTS = 61  # and while sampling the final yield; margins use every one
ALIKE_NM = 3.0  # starts no further apart than this in every layer would end at one place
APART_WAVES = 1 / 16  # designs further apart than this in one layer's optical thickness differ


@dataclass(frozen=True)
class Task:
    """Everything that the search of one facet needs; plain data, so that it can be sent to a worker."""

    side: FacetName
    model: FacetModel
    limits: RunLimits
    errors: RunErrors
    seed: int


@dataclass(frozen=True)
class Found:
    """A judged stack: film rows and ordered thicknesses (L,), margin over the full grid, yield."""

    film: IntArray
    nm: FloatArray
    margin: float
    yields: Yield

    @property
    def rank(self) -> tuple[float, float]:
        """Order of merit: yield, then margin."""
        return self.yields.chips, self.margin


@dataclass(frozen=True)
class _Candidate:
    film: IntArray
    nm: FloatArray
    score: float


@dataclass(frozen=True)
class _Effort:
    starts: int  # random starts an order of films
    keep: int  # candidates an order that go on
    finish: int  # candidates a layer count that reach robust finishing
    draws: int  # drawn chips while finishing
    fine_draws: int  # and in the last stage


def _effort(count: int) -> _Effort:
    if count <= 3:
        return _Effort(starts=240, keep=6, finish=16, draws=512, fine_draws=8192)
    if count <= 4:
        return _Effort(starts=240, keep=6, finish=16, draws=512, fine_draws=4096)
    if count <= 8:
        return _Effort(starts=80, keep=3, finish=6, draws=384, fine_draws=2048)
    # fewer draws than this, and the many layers of a mirror fit themselves to them
    return _Effort(starts=32, keep=2, finish=4, draws=1024, fine_draws=2048)


SCREENED = 12  # orders of films that get the full search where there are more
SCREEN_STARTS = 24  # random starts an order while screening
SCREEN_POINTS = 7  # and wavelengths a window
LISTED = 3  # designs a layer count that are finished with many draws and judged
CLOSELY = {"breadth": 12, "sweeps": 12}  # how the grid of ordered thicknesses is searched
CURSORILY = {"breadth": 1, "sweeps": 2}
FINE_LOSS = 0.1  # and how much less yield than the best they may have
FINE_STAGES = (0.15, 0.05)


def search_count(task: Task, count: int) -> list[Found]:
    """The best few designs with ``count`` searched layers, best first; none where no stack fits."""
    generator = np.random.default_rng([task.seed, _side_number(task.side), count])
    thin = task.model.with_goal(task.model.goal.thinned(SEARCH_POINTS))
    candidates: list[_Candidate] = []
    for film in _screened(task, thin, task.limits.orders(count, generator), generator):
        candidates += _candidates(task, thin, film, generator)
    leaders = _distinct(candidates, most=_effort(count).finish)
    if task.errors.none:
        ordered = [_by_margin(task, c) for c in leaders]
    else:
        first = [_by_yield(task, thin, c, stages=STAGES[:1]) for c in leaders]
        better = _distinct(first, most=(2 * len(first) + 2) // 3)
        finished = [_by_yield(task, thin, c, stages=STAGES[1:]) for c in better]
        listed = _distinct(finished, most=LISTED, apart_nm=_apart_nm(task))
        ordered = [
            _ordered_by_yield(task, thin, c)
            for c in listed
            if c.score >= listed[0].score - FINE_LOSS
        ]
        if leaders:  # where few chips fail the flattest stack may well be the one that most meet
            ordered.append(_by_margin(task, max(leaders, key=lambda c: _margin(task, c))))
    judged = [judge(task, c.film, c.nm) for c in ordered if c is not None]
    return _different(task, sorted(judged, key=lambda f: f.rank, reverse=True))


def _screened(
    task: Task, thin: FacetModel, orders: list[IntArray], generator: np.random.Generator
) -> list[IntArray]:
    """The orders of films that are worth the full search: all of a few, else those that give the largest
    margins among some quickly refined starts."""
    if len(orders) <= SCREENED:
        return orders
    coarse = task.model.with_goal(task.model.goal.thinned(SCREEN_POINTS).rough)
    best = []
    for film in orders:
        nm = _starts(task, film, SCREEN_STARTS, generator)
        nm = least_squares(coarse, nm, film=film, limits=task.limits, iterations=6)
        best.append(float(coarse.margin(nm, film=film).max()))
    return [orders[i] for i in sorted(np.argsort(best)[-SCREENED:])]


def _side_number(side: FacetName) -> int:
    return ("front", "rear").index(side)


def _candidates(
    task: Task, thin: FacetModel, film: IntArray, generator: np.random.Generator
) -> list[_Candidate]:
    effort = _effort(len(film))
    nm = _starts(task, film, effort.starts, generator)
    quick = thin.with_goal(thin.goal.rough)
    refined = _apart(least_squares(quick, nm, film=film, limits=task.limits))
    merit = _merit(task, thin, film)
    tops = _distinct(_scored(film, refined, merit(refined)), most=effort.keep)
    by_margin = _scored(film, refined, quick.margin(refined, film=film))
    flattest = [
        minimax(task.model, c.nm, film=film, limits=task.limits)
        for c in _distinct(by_margin, most=max(effort.keep // 2, 1))
    ]
    return tops + _scored(film, np.array(flattest), merit(np.array(flattest)))


def _margin(task: Task, candidate: _Candidate) -> float:
    return float(task.model.margin(candidate.nm[None], film=candidate.film)[0])


def _apart(nm: FloatArray) -> FloatArray:
    """Stacks (S, L) without those that ended at one place, one of each kept, in their order."""
    _, first = np.unique(np.round(nm / ALIKE_NM), axis=0, return_index=True)
    apart: FloatArray = nm[np.sort(first)]
    return apart


def _scored(film: IntArray, nm: FloatArray, scores: FloatArray) -> list[_Candidate]:
    return [_Candidate(film, row, float(score)) for row, score in zip(nm, scores, strict=True)]


def _starts(task: Task, film: IntArray, count: int, generator: np.random.Generator) -> FloatArray:
    by_chance = starts.random_thicknesses(task.limits, film=film, count=count, generator=generator)
    spots = starts.spots(task.model.goal)
    every = [by_chance]
    for spot in spots:
        closed = starts.closed_by_first_layer(spot, task.model, by_chance, film=film)
        most = count // len(spots)
        if len(closed) > most:
            closed = closed[np.sort(generator.choice(len(closed), most, replace=False))]
        every += [
            starts.quarter_waves(spot, film=film),
            starts.equal_thicknesses(spot, film=film, steps=max(most // 8, 6)),
            closed,
        ]
    return task.limits.inside(np.vstack(every), film=film)


def _draws(task: Task, rows: IntArray, count: int) -> Draws:
    """``count`` drawn chips; all stacks of as many layers ``rows`` (L,) are compared under the same luck."""
    generator = np.random.default_rng([task.seed, _side_number(task.side), len(rows), count])
    return draw_mirrored(task.errors, film=rows, count=count, generator=generator)


def _merit(task: Task, model: FacetModel, film: IntArray) -> Callable[[FloatArray], FloatArray]:
    """Score of stacks (S, L): smooth yield under a few draws, or the margin when nothing errs."""
    if task.errors.none:
        return lambda nm: model.margin(nm, film=film)
    rows = model.frame.film(film)
    smooth = SmoothYield(model, film, _draws(task, rows, 48))
    tau = 0.2 * float(model.goal.width.min())
    return lambda nm: np.array([smooth.near(row).merit(row, tau=tau) for row in nm])


def _by_margin(task: Task, candidate: _Candidate) -> _Candidate | None:
    """The flattest ordered stack near a candidate, None where the grid holds none."""
    film, limits = candidate.film, task.limits

    def score(stacks: FloatArray) -> FloatArray:
        return task.model.margin(stacks, film=film)

    flattest = minimax(task.model, candidate.nm, film=film, limits=limits)
    nm = best_ordered(flattest, film=film, limits=limits, score=score, **CLOSELY)
    return None if nm is None else _Candidate(film, nm, float(score(nm[None])[0]))


def _by_yield(
    task: Task,
    thin: FacetModel,
    candidate: _Candidate,
    *,
    stages: tuple[float, ...],
) -> _Candidate:
    """The stack near a candidate that most drawn chips meet, not yet rounded."""
    film = candidate.film
    draws = _draws(task, thin.frame.film(film), _effort(len(film)).draws)
    smooth = SmoothYield(thin, film, draws).near(candidate.nm)
    if (smooth.slack(candidate.nm) < 0.0).all() and candidate.score < 0.0:
        nm = minimax(task.model, candidate.nm, film=film, limits=task.limits)
    else:
        nm = climb(smooth, candidate.nm, limits=task.limits, stages=stages)
    smooth = smooth.near(nm)
    return _Candidate(film, nm, smooth.merit(nm, tau=0.05 * slack_scale(smooth, nm)))


def _ordered_by_yield(task: Task, thin: FacetModel, candidate: _Candidate) -> _Candidate | None:
    """A finished stack climbed once more under many draws and put on the grid of ordered thicknesses;
    None where the grid holds none."""
    film, limits = candidate.film, task.limits
    draws = _draws(task, thin.frame.film(film), _effort(len(film)).fine_draws)
    smooth = SmoothYield(thin, film, draws).near(candidate.nm)
    if not (smooth.slack(candidate.nm) >= 0.0).any():
        return _by_margin(task, candidate)
    finest = climb(smooth, candidate.nm, limits=limits, stages=FINE_STAGES)
    smooth = smooth.near(finest)
    tau = FINE_STAGES[-1] * slack_scale(smooth, finest)

    def score(stacks: FloatArray) -> FloatArray:
        return np.array([smooth.merit(row, tau=tau) for row in stacks])

    # where a run errs by more than a step, the yield hardly changes from step to step
    errs_nm = task.errors.thickness_nm(finest)
    effort = CURSORILY if limits.step_nm < 0.5 * errs_nm else CLOSELY
    nm = best_ordered(finest, film=film, limits=limits, score=score, **effort)
    return None if nm is None else _Candidate(film, nm, float(score(nm[None])[0]))


def judge(task: Task, film: IntArray, nm: FloatArray) -> Found:
    """Margin over the full grid and sampled yield of one ordered stack."""
    judged = task.model.with_goal(task.model.goal.thinned(JUDGE_POINTS))
    # One stream for all designs of a facet: their yields are compared under the same luck.
    generator = np.random.default_rng([task.seed, _side_number(task.side), 1 << 20])
    return Found(
        film=film,
        nm=nm,
        margin=float(task.model.margin(nm[None], film=film)[0]),
        yields=sampled_yield(judged, nm, film=film, errors=task.errors, generator=generator),
    )


def _apart_nm(task: Task) -> FloatArray:
    """Thickness (M,) [nm] of each film by which two designs must differ in some layer."""
    scene = task.model.goal.scene
    middle = scene.points // 2
    apart: FloatArray = APART_WAVES * scene.wavelength_nm[middle] / scene.films[:, middle].real
    return apart


def _distinct(
    candidates: list[_Candidate], *, most: int, apart_nm: FloatArray | None = None
) -> list[_Candidate]:
    """The best by score, no two alike."""
    kept: list[_Candidate] = []
    for candidate in sorted(candidates, key=lambda c: -c.score):
        if len(kept) == most:
            break
        apart = ALIKE_NM if apart_nm is None else apart_nm[candidate.film]
        if not any(_alike(candidate, other, apart) for other in kept):
            kept.append(candidate)
    return kept


def _alike(
    one: _Candidate | Found, other: _Candidate | Found, apart_nm: FloatArray | float
) -> bool:
    return (
        len(one.film) == len(other.film)
        and bool(np.all(one.film == other.film))
        and bool(np.all(np.abs(one.nm - other.nm) < apart_nm))
    )


def _different(task: Task, judged: list[Found]) -> list[Found]:
    """The first few of judged stacks, best first, that are truly different designs."""
    apart = _apart_nm(task)
    kept: list[Found] = []
    for found in judged:
        if len(kept) < LISTED and not any(
            _alike(found, other, apart[found.film]) for other in kept
        ):
            kept.append(found)
    return kept
