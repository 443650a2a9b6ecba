"""Finds the best stacks of `design_problems` by brute force and stores them in best_known.json.

    PYTHONPATH=tests/design python tests/benchmarks/find_best_known.py [NAME...]

It shares the film kernel with the product, for speed, and nothing of its search: scipy's differential
evolution over all thicknesses of every order of films, from several seeds, on the smoothed yield
under 512 drawn chips (on the margin when nothing errs), then Nelder and Mead's simplex under 4096.
The stored yield is judged by the slow twin on one common set of 100 000 chips. Some minutes a problem.
"""

from __future__ import annotations

import json
import sys
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from itertools import pairwise, product
from pathlib import Path

import numpy as np
from design_problems import PROBLEMS, DesignProblem
from films_in_numpy import Chips, Reals, Twin
from scipy.optimize import differential_evolution, minimize
from scipy.special import expit

from coatings.optics import Scene, reflectance, response

STORE = Path(__file__).with_name("best_known.json")
JUDGES = 100_000
JUDGES_SEED = 2024
RESTARTS = 2


def common_yield(twin: Twin, nm: Reals) -> float:
    """Yield on the one common set of chips."""
    return float(twin.inside(nm, twin.chips(runs=JUDGES, seed=JUDGES_SEED)).mean())


@dataclass(frozen=True)
class Objective:
    """Merit of searched layers of one order of films, on a grid of at most 15 points a window."""

    twin: Twin
    chips: Chips | None
    tau: float

    def __call__(self, nm: Reals) -> float:
        if self.chips is None:
            return -float(self._slack(self.twin.every_nm(nm[None]), None, None)[0])
        slack = self._slack(*self.twin.deposited(nm, self.chips))
        return -float(expit(slack / self.tau).mean() + 1e-3 * np.tanh(slack.mean()))

    def _slack(self, every_nm: Reals, shift: Reals | None, chip: Reals | None) -> Reals:
        least = np.full(len(every_nm), np.inf)
        twin = self.twin
        facet = twin.recipe.facets[twin.side]
        film = np.arange(len(twin.names))
        for window, grid in zip(facet.windows, twin.grids, strict=True):
            scene = Scene(
                grid,
                twin.recipe.window_index(window, grid).astype(complex),
                twin.recipe.index_of(facet.outside, grid),
                np.array([twin.recipe.material(name).nk(grid) for name in twin.names]),
            )
            shifts = {"film": film, "film_shift": shift, "incident_shift": chip}
            if window.absorption_at_most is None:
                big_r = reflectance(scene, every_nm, **shifts)
            else:
                seen = response(scene, every_nm, **shifts)
                big_r = seen.R
                least = np.minimum(least, (window.absorption_at_most - seen.A).min(axis=1))
            if window.low is not None:
                least = np.minimum(least, (big_r - window.low).min(axis=1))
            if window.high is not None:
                least = np.minimum(least, (window.high - big_r).min(axis=1))
        return least


def orders(problem: DesignProblem, count: int) -> Iterator[tuple[str, ...]]:
    """Every order of the palette's films without equal neighbours."""
    palette = problem.recipe.front.palette or ()
    for names in product(palette, repeat=count):
        if all(a != b for a, b in pairwise(names)):
            yield names


def half_width(problem: DesignProblem) -> float:
    """Scale of the smoothing: the smallest half-width of a window."""
    widths = []
    for window in problem.recipe.front.windows:
        low = 0.0 if window.low is None else window.low
        high = 1.0 if window.high is None else window.high
        both = window.low is not None and window.high is not None
        widths.append((high - low) / (2 if both else 1))
    return min(widths)


def errs(problem: DesignProblem) -> bool:
    """Whether any thickness errs: then the yield counts, else the margin."""
    process = problem.recipe.process_for("front")
    return bool(process.run_percent or process.layer_percent or process.thickness_sigma_nm)


def best_of_order(problem: DesignProblem, names: tuple[str, ...], seed: int) -> tuple[float, Reals]:
    """The best stack of one order of films from one seed; the score is the merit under 4096 chips."""
    facet, count = problem.recipe.front, len(names)
    widest = max((w.band_nm[1] - w.band_nm[0]) for w in facet.windows)
    limits = [facet.layer_limits_nm(name) for name in names]
    total = facet.total_nm or np.inf
    draws = 512 if count <= 4 else 128
    rough = Twin.of(problem.recipe, names, step_nm=max(widest / 14, 1.0))
    close = Twin.of(problem.recipe, names, step_nm=2.0 if errs(problem) else 1.0)
    coarse, fine = (
        Objective(
            twin,
            twin.chips(runs=runs, seed=seed) if errs(problem) else None,
            share * half_width(problem),
        )
        for twin, runs, share in ((rough, draws, 0.1), (close, 8 * draws, 0.03))
    )

    def inside_total(score: Objective) -> Callable[[Reals], float]:
        return lambda nm: score(nm) + 10.0 * max(nm.sum() / total - 1.0, 0.0)

    found = differential_evolution(
        inside_total(coarse),
        limits,
        rng=seed,
        popsize=18 if count <= 4 else 8,
        maxiter=70 + 60 * min(count, 6),
        tol=1e-7,
        polish=False,
        init="sobol",
        mutation=(0.4, 0.9),
        recombination=0.8,
    )
    best = minimize(
        inside_total(fine),
        found.x,
        method="Nelder-Mead",
        bounds=limits,
        options={
            "maxiter": (120 if errs(problem) else 600) * count,
            "adaptive": count > 4,
            "xatol": 1e-3,
            "fatol": 1e-7,
        },
    )
    low, high = np.array(limits).T
    nm = np.clip(best.x, low, high)
    return -fine(nm), nm


def best_known(problem: DesignProblem, count: int) -> dict[str, object]:
    """The best over all orders and restarts, with margin on a fine grid and yield on the common set."""
    found = []
    for names in orders(problem, count):
        for seed in range(RESTARTS):
            score, nm = best_of_order(problem, names, seed)
            found.append((score, names, nm))
    found.sort(key=lambda each: -each[0])
    judged = []
    for _, names, nm in found[:3]:
        twin = Twin.of(problem.recipe, names)
        judged.append(
            {
                "films": names,
                "nm": [round(float(t), 3) for t in nm],
                "margin": float(twin.margin(nm[None])[0]),
                "yield": common_yield(twin, nm) if errs(problem) else None,
            }
        )
    return max(judged, key=lambda one: one["margin"] if one["yield"] is None else one["yield"])


def main(names: list[str]) -> None:
    """Add or replace problems in the store."""
    store = json.loads(STORE.read_text()) if STORE.exists() else {}
    for name in names or list(PROBLEMS):
        counts = store.setdefault(name, {})
        for count in PROBLEMS[name].counts:
            start = time.perf_counter()
            counts[str(count)] = best_known(PROBLEMS[name], count)
            print(
                name, count, counts[str(count)], f"{time.perf_counter() - start:.0f} s", flush=True
            )
            STORE.write_text(json.dumps(store, indent=1) + "\n")


if __name__ == "__main__":
    main(sys.argv[1:])
