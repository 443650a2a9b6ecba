"""The main job: for every facet the stack that most chips of most runs will meet.

``plan_facets`` searches every useful layer count of every facet with a palette and windows, and judges the
stacks of facets that are already chosen. The shortlist holds the best stack of each layer count.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from coatings.design.counts import count_steps, is_enough
from coatings.design.limits import RunLimits, run_limits
from coatings.design.model import FacetModel, facet_frame
from coatings.design.search import Found, Task, judge, search_count
from coatings.design.spread import run_errors
from coatings.design.windows import facet_goal
from coatings.errors import InputError, Problem
from coatings.executors import Workers
from coatings.facets import SIDES, film_rows
from coatings.recipe import Facet, FacetName, Recipe
from coatings.stack import Stack

SECOND_DESIGN_LOSS = 0.05  # a second design of a layer count is listed if it loses no more yield

Progress = Callable[[str, int, Found | None], None]


@dataclass(frozen=True)
class FacetPlan:
    """Shortlist of one facet, best yield first, and the stack taken.

    ``task`` holds the facet's model, limits and errors; ``searched`` tells a search from the judgement
    of given layers; ``cut_short`` that the search was interrupted.
    """

    side: FacetName
    task: Task
    stacks: tuple[Found, ...]
    chosen: int
    searched: bool
    cut_short: bool = False

    @property
    def taken(self) -> Found:
        """The stack taken."""
        return self.stacks[self.chosen]

    @property
    def meets(self) -> bool:
        """Whether the stack taken is inside every window."""
        return self.taken.margin >= 0.0

    def stack(self, found: Found) -> Stack:
        """The searched layers of a stack by name."""
        films = self.task.model.goal.films
        return Stack.of([films[row] for row in found.film], [float(nm) for nm in found.nm])


def facet_task(recipe: Recipe, side: FacetName, *, seed: int) -> Task:
    """Task of a facet that has windows; ``side`` is "front" or "rear"."""
    facet = recipe.facets[side]
    return Task(
        side=side,
        model=FacetModel(facet_goal(recipe, side), facet_frame(facet)),
        limits=run_limits(recipe, side),
        errors=run_errors(recipe, side),
        seed=seed,
    )


def plan_facets(
    recipe: Recipe,
    *,
    sides: tuple[FacetName, ...] = SIDES,
    seed: int,
    workers: int,
    progress: Progress | None = None,
) -> dict[FacetName, FacetPlan]:
    """Plans of the facets with windows, by side.

    A facet of which an interrupted search has found nothing yet is left out. Raises InputError when a facet's
    limits leave no stack to search, or when the interrupted search has found nothing at all.
    """
    tasks = {s: facet_task(recipe, s, seed=seed) for s in sides if recipe.facets[s].windows}
    searched = {s: t for s, t in tasks.items() if recipe.facets[s].is_searchable}
    found, cut_short = _search(searched, workers, progress)
    plans = {}
    for side, task in tasks.items():
        if side in found:
            plans[side] = _shortlist(task, found[side], cut_short=cut_short)
        elif side not in searched:
            plans[side] = _judged_as_given(task, recipe.facets[side])
    return plans


def _search(
    tasks: dict[FacetName, Task], workers: int, progress: Progress | None
) -> tuple[dict[FacetName, list[Found]], bool]:
    steps: dict[FacetName, list[list[Found]]] = {side: [] for side in tasks}
    left = {side: count_steps(task.limits.most_layers) for side, task in tasks.items()}
    cut_short = False
    with Workers(workers) as crew:
        while any(left.values()) and not cut_short:
            pieces = [
                (tasks[side], count) for side in tasks if left[side] for count in left[side][0]
            ]
            designs, cut_short = _search_pieces(crew, pieces, progress)
            for side in [side for side in tasks if left[side]]:
                steps[side].append(designs[side])
                enough = is_enough(tasks[side], steps[side])
                left[side] = [] if enough else left[side][1:]
    found = {side: [design for step in each for design in step] for side, each in steps.items()}
    empty = [side for side, designs in found.items() if not designs]
    if empty and not (cut_short and len(empty) < len(found)):
        raise InputError(_nothing_found(empty[0], tasks[empty[0]].limits, cut_short))
    return {side: designs for side, designs in found.items() if designs}, cut_short


def _search_pieces(
    crew: Workers, pieces: list[tuple[Task, int]], progress: Progress | None
) -> tuple[dict[FacetName, list[Found]], bool]:
    """Designs of each facet, and whether the search was cut short."""
    pieces = sorted(pieces, key=lambda piece: -piece[1])  # long ones first: workers end together

    def on_done(piece: tuple[Task, int], found: list[Found]) -> None:
        if progress is not None:
            progress(piece[0].side, piece[1], found[0] if found else None)

    outcome = crew.run_all(_search_piece, pieces, on_done=on_done)
    found: dict[FacetName, list[Found]] = {task.side: [] for task, _ in pieces}
    for (task, _), result in zip(pieces, outcome.results, strict=True):
        found[task.side] += result or []
    return found, outcome.cut_short


def _search_piece(piece: tuple[Task, int]) -> list[Found]:
    return search_count(*piece)


def _nothing_found(side: FacetName, limits: RunLimits, cut_short: bool) -> Problem:
    if cut_short:
        return Problem(side, "stopped before the first stack was found; nothing was written")
    thinnest = min(limits.thinnest_nm[list(limits.palette)])
    return Problem(
        side,
        f"no stack fits the limits of the run (thinnest layer {thinnest:g} nm, total_nm "
        f"{limits.total_nm}, first and last as asked); widen layer_nm, total_nm or stress_max_N_per_m",
    )


def _shortlist(task: Task, found: list[Found], *, cut_short: bool) -> FacetPlan:
    kept: list[Found] = []
    for count in sorted({len(f.nm) for f in found}):
        designs = sorted(
            (f for f in found if len(f.nm) == count), key=lambda f: f.rank, reverse=True
        )
        kept.append(designs[0])
        kept += [
            f
            for f in designs[1:2]
            if f.yields.chips >= designs[0].yields.chips - SECOND_DESIGN_LOSS
        ]
    kept = ranked(kept, by_margin=task.errors.none)
    return FacetPlan(task.side, task, tuple(kept), choose(kept, task), True, cut_short)


def ranked(stacks: list[Found], *, by_margin: bool) -> list[Found]:
    """Best first: by yield then margin, or by margin when nothing errs."""
    return sorted(stacks, key=lambda f: (f.margin,) if by_margin else f.rank, reverse=True)


def choose(stacks: list[Found], task: Task) -> int:
    """Index of the stack to take: the highest yield; within one standard error of it a stack that meets the
    windows as ordered, then the fewest layers, then the least thickness. By margin when nothing errs or
    nothing passes."""
    best = stacks[0]
    if task.errors.none or best.yields.chips == 0.0:
        return max(range(len(stacks)), key=lambda i: stacks[i].margin)
    good_enough = best.yields.chips - best.yields.standard_error
    level = [i for i, f in enumerate(stacks) if f.yields.chips >= good_enough]
    meeting = [i for i in level if stacks[i].margin >= 0.0]
    return min(meeting or level, key=lambda i: (len(stacks[i].nm), float(stacks[i].nm.sum())))


def _judged_as_given(task: Task, facet: Facet) -> FacetPlan:
    layers = facet.layers or ()
    film = film_rows([layer.material for layer in layers], task.model.goal.films)
    nm = np.array([layer.nm for layer in layers], dtype=float)
    return FacetPlan(task.side, task, (judge(task, film, nm),), 0, searched=False)


def take(plan: FacetPlan, number: int) -> FacetPlan:
    """The plan with another stack of its shortlist taken (counted from 0)."""
    if not 0 <= number < len(plan.stacks):
        raise InputError(
            Problem("--take", f"is {number}; {plan.side} has stacks 0 to {len(plan.stacks) - 1}")
        )
    return replace(plan, chosen=number)
