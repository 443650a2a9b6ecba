"""The work of ``plan`` between a loaded recipe and an exit status: search, estimate, write, say."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import numpy as np

from coatings.cli.options import Shared
from coatings.cli.progress import shown_progress
from coatings.cli.summary import plan_rows
from coatings.curve import FacetCurve, default_grid_nm, facet_curve
from coatings.design.plan import FacetPlan, plan_facets, take
from coatings.design.relax import Shortfall, shortfall
from coatings.design.spread import draw_chips, reflectance_quantiles, run_errors
from coatings.documents.chosen import chosen_recipe
from coatings.documents.pictures import power_picture, spectrum_picture, yield_picture
from coatings.documents.plots import Band
from coatings.documents.results import plan_result, to_text
from coatings.errors import InputError, Problem
from coatings.executors import default_workers
from coatings.facets import chip_view, facet_spectrum, film_rows, light_on, stack_of
from coatings.laser import FacetLight, Judgement, LaserEstimate, estimate, power_current
from coatings.product import facet_light, laser_chip, product_estimate, product_limits
from coatings.recipe import FacetName, Recipe
from coatings.stack import Stack

BAND_DRAWS = 2000
POWER_POINTS = 121

RESULT, CHOSEN = "result.json", "chosen.toml"
SPECTRA, YIELDS, POWER = "spectra.png", "layers-yield.png", "power.png"
FILES = (RESULT, CHOSEN, SPECTRA, YIELDS, POWER)


@dataclass(frozen=True)
class Planned:
    """Everything that ``plan`` found, ready to be written and said."""

    recipe: Recipe
    plans: dict[FacetName, FacetPlan]
    stacks: dict[FacetName, Stack]
    curves: dict[FacetName, FacetCurve]
    laser: LaserEstimate | None
    limits: tuple[Judgement, ...]
    shortfalls: dict[FacetName, Shortfall]


def run_plan(
    recipe: Recipe, *, sides: tuple[FacetName, ...], take_number: int | None, shared: Shared
) -> int:
    """Search, write every file and print the summary; returns the exit status."""
    folder = shared.folder(recipe.path)
    outputs = {f"--out: {name}": folder / name for name in FILES}
    shared.check_outputs(outputs, folder=folder, inputs=[recipe.path, *recipe.table_paths])
    _check_task(recipe, sides, take_number)
    tables = _own_tables(recipe, folder)
    planned = planned_product(recipe, sides=sides, take_number=take_number, shared=shared)
    text = to_text(
        plan_result(
            recipe,
            planned.plans,
            planned.laser,
            limits=planned.limits,
            reflectance=_reflectances(planned),
            seed=shared.seed,
        )
    )
    documents = plan_documents(planned, folder, seed=shared.seed)
    files = {folder / RESULT: text.encode(), **documents, **tables}
    shared.deliver(files, text, plan_rows(planned))
    cut_short = any(plan.cut_short for plan in planned.plans.values())
    return 0 if all(plan.meets for plan in planned.plans.values()) and not cut_short else 1


def _check_task(recipe: Recipe, sides: tuple[FacetName, ...], take_number: int | None) -> None:
    """Refuse before the search what would only show after it."""
    if not any(recipe.facets[side].windows for side in sides):
        raise InputError(
            Problem(
                f"{recipe.path}",
                f"no windows on {' or '.join(sides)}; add [[{sides[0]}.windows]] to say what to reach",
            )
        )
    searched = [side for side in sides if recipe.facets[side].is_searchable]
    if take_number is not None and len(searched) != 1:
        what = "both facets are searched" if searched else "nothing is searched"
        raise InputError(
            Problem("--take", f"needs one facet that is searched, but {what}; name it with --facet")
        )
    if recipe.laser is not None:  # numbers that contradict each other do so with any facets
        estimate(laser_chip(recipe), FacetLight(R=0.1, T=0.9), FacetLight(R=0.9, T=0.1))


def planned_product(
    recipe: Recipe, *, sides: tuple[FacetName, ...], take_number: int | None, shared: Shared
) -> Planned:
    """Plans of the facets, the stacks taken, their curves and the laser they make."""
    with shown_progress(recipe, sides, quiet=shared.quiet) as progress:
        plans = plan_facets(
            recipe,
            sides=sides,
            seed=shared.seed,
            workers=shared.workers or default_workers(),
            progress=progress,
        )
    if take_number is not None:
        plans = {
            side: take(plan, take_number) if plan.searched else plan for side, plan in plans.items()
        }
    stacks = {side: plan.stack(plan.taken) for side, plan in plans.items()}
    laser = product_estimate(recipe, stacks)
    return Planned(
        recipe=recipe,
        plans=plans,
        stacks=stacks,
        curves={side: facet_curve(recipe, side, searched=stacks.get(side)) for side in plans},
        laser=laser,
        limits=() if laser is None else product_limits(recipe, laser),
        shortfalls={s: shortfall(p) for s, p in plans.items() if not p.meets},
    )


def _reflectances(planned: Planned) -> dict[FacetName, list[float]]:
    at = np.array([planned.recipe.chip.wavelength_nm])
    return {
        side: [
            float(
                facet_spectrum(planned.recipe, side, wavelength_nm=at, searched=plan.stack(f)).R[0]
            )
            for f in plan.stacks
        ]
        for side, plan in planned.plans.items()
    }


def plan_documents(planned: Planned, folder: Path, *, seed: int) -> dict[Path, bytes]:
    """The recipe with its layers, and the pictures."""
    recipe = planned.recipe
    searched = {s: st for s, st in planned.stacks.items() if planned.plans[s].searched}
    files = {
        folder / CHOSEN: chosen_recipe(recipe, searched).encode(),
        folder / SPECTRA: spectrum_picture(
            recipe,
            planned.curves,
            stacks=planned.stacks,
            bands={side: _band(planned, side, seed) for side in planned.curves},
        ),
    }
    if searched:
        files[folder / YIELDS] = yield_picture(
            {side: plan for side, plan in planned.plans.items() if plan.searched}
        )
    if recipe.laser is not None:
        files[folder / POWER] = _power_picture(planned)
    return files


def _own_tables(recipe: Recipe, folder: Path) -> dict[Path, bytes]:
    """Copies of the recipe's own tables, so that the chosen recipe finds them beside itself."""
    copies = {folder / path.relative_to(recipe.path.parent): path for path in recipe.table_paths}
    return {
        copy: path.read_bytes()
        for copy, path in copies.items()
        if not (copy.exists() and copy.samefile(path))
    }


def _band(planned: Planned, side: FacetName, seed: int) -> Band:
    recipe = planned.recipe
    facet = recipe.facets[side]
    grid = default_grid_nm(recipe, side)
    stack = stack_of(facet, planned.stacks[side])
    film = film_rows(stack.materials, facet.films)
    draws = draw_chips(
        run_errors(recipe, side),
        film=film,
        count=BAND_DRAWS,
        generator=np.random.default_rng([seed, 7]),
    )
    light = light_on(recipe, facet, wavelength_nm=grid, view=chip_view(recipe))
    low, middle, high = reflectance_quantiles(light, np.array(stack.nm), film=film, draws=draws)
    return Band(grid, low, middle, high)


def _power_picture(planned: Planned) -> bytes:
    recipe = planned.recipe
    chip = laser_chip(recipe)
    threshold = None if planned.laser is None else planned.laser.threshold_A
    most = 1.15 * max(chip.drive_A or 0.0, 2.0 * (threshold or 0.0)) or 1.0
    current = np.linspace(0.0, most, POWER_POINTS)[1:]
    lights = [facet_light(recipe, side, planned.stacks.get(side)) for side in ("front", "rear")]
    power = power_current(chip, *lights, current_A=current)
    return power_picture(power, drive_A=chip.drive_A, title=recipe.title)
