"""What the terminal says: one screen, answer first."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from rich.markup import escape

from coatings.documents.look import SIDE_COLOURS
from coatings.facets import facet_spectrum
from coatings.recipe import FacetName
from coatings.stack import Stack

if TYPE_CHECKING:
    from rich.console import Console

    from coatings.cli.planning import Planned
    from coatings.curve import FacetCurve
    from coatings.design.plan import FacetPlan
    from coatings.design.relax import Shortfall
    from coatings.laser import LaserEstimate
    from coatings.recipe import Recipe

MOST_LAYERS_SHOWN = 14
LASER = "[bold]LASER[/bold]"

Row = tuple[str, str]  # label and text, in console markup


def print_rows(console: Console, rows: Iterable[Row]) -> None:
    """Print labelled rows; long text wraps beside its label."""
    from rich.table import Table

    table = Table.grid(padding=(0, 1))
    table.add_column(min_width=5, no_wrap=True)
    table.add_column()
    for label, text in rows:
        table.add_row(label, text)
    console.print(table)


def plan_lines(planned: Planned) -> Iterator[Row]:
    """Summary of ``plan``: per facet layers, R, margin, yield and why; then the laser's line."""
    recipe = planned.recipe
    yield "", _title(recipe)
    yield from _note_lines(recipe)
    for side, plan in planned.plans.items():
        yield from _facet_lines(planned, side, plan)
    yield from laser_lines(planned.laser, recipe)
    for limit in planned.limits:
        if limit.kept is not True:
            yield "", f"[bold]{escape(str(limit))}[/bold]"
    kept = [limit for limit in planned.limits if limit.kept]
    if kept:
        yield "", f"limits kept: {', '.join(f'{j.name} {j.limit:g}' for j in kept)}"
    yield from _assumed_lines(planned)


def curve_lines(recipe: Recipe, curves: Mapping[FacetName, FacetCurve]) -> Iterator[Row]:
    """Summary of ``curve``: per facet the shares at the wavelength of operation and every margin."""
    yield "", _title(recipe)
    yield from _note_lines(recipe)
    at = np.array([recipe.chip.wavelength_nm])
    for side, curve in curves.items():
        light = facet_spectrum(recipe, side, wavelength_nm=at)
        shares = "   ".join(
            f"{name} {percent(float(value[0]))}"
            for name, value in (("R", light.R), ("T", light.T), ("A", light.A))
        )
        yield _side(side), f"at {at[0]:g} nm: {shares}   phase {light.phase_rad[0]:.3f} rad"
        for window in curve.windows:
            inside = "met with" if window.margin >= 0 else "[bold]MISSED by[/bold]"
            yield (
                "",
                f"{escape(window.window.label())}: {inside} {percent(abs(window.margin))}"
                f"{' to spare' if window.margin >= 0 else ''}, tightest at {window.worst_nm:g} nm",
            )
        if not curve.windows:
            yield "", "no windows"


def files_lines(files: list[Path]) -> Iterator[Row]:
    """Where the files are."""
    folders: dict[Path, list[str]] = {}
    for path in files:
        folders.setdefault(path.parent, []).append(path.name)
    for folder, names in folders.items():
        yield "FILES", f"{escape(str(folder))}/: {escape(', '.join(names))}"


def percent(share: float) -> str:
    """A share in percent with the digits that matter."""
    value = 100.0 * share
    if abs(value) < 1e-9:
        return "0 %"
    if abs(value) >= 0.1:
        return f"{value:.2f} %"
    return f"{value:.2g} %"


def laser_lines(laser: LaserEstimate | None, recipe: Recipe) -> Iterator[Row]:
    """The laser's lines: threshold, slopes and split, then what leaves at the drive current."""
    if laser is None:
        yield LASER, "not estimated: the recipe has no \\[laser] section"
        return
    threshold = "none" if laser.threshold_A is None else f"{laser.threshold_A:.3g} A"
    parts = [
        f"threshold {threshold}",
        f"slopes {laser.slope_front_W_per_A:.3g} front, {laser.slope_rear_W_per_A:.3g} rear W/A",
    ]
    if laser.front_fraction is not None:
        parts.append(f"front share {percent(laser.front_fraction)}")
    yield LASER, "   ".join(parts)
    if laser.front_W is not None and laser.rear_W is not None and recipe.laser is not None:
        parts = [f"{watts(laser.front_W)} front", f"{watts(laser.rear_W)} rear"]
        if laser.facet_load_MW_per_cm2 is not None:
            parts.append(f"load {laser.facet_load_MW_per_cm2:.3g} MW/cm2")
        if laser.wall_plug_efficiency is not None:
            parts.append(f"wall plug {percent(laser.wall_plug_efficiency)}")
        yield "", f"at {recipe.laser.drive_A:g} A: {', '.join(parts)} ({laser.model} model)"
    for note in laser.notes:
        yield "", f"{escape(note)}"


def watts(power_W: float) -> str:
    """A power in W, or in mW below half a watt."""
    return f"{power_W:.3g} W" if power_W >= 0.5 else f"{1e3 * power_W:.3g} mW"


def _title(recipe: Recipe) -> str:
    revision = f", revision {escape(recipe.revision)}" if recipe.revision else ""
    return f"[bold]{escape(recipe.title)}[/bold]{revision}"


def _note_lines(recipe: Recipe) -> Iterator[Row]:
    for note in (*recipe.notes, *recipe.material_notes):
        yield "", f"[dim]note: {escape(note)}[/dim]"


def _assumed_lines(planned: Planned) -> Iterator[Row]:
    """What was assumed of the run, each sentence once."""
    sides: dict[str, list[str]] = {}
    for side in planned.plans:
        for sentence in planned.recipe.process_for(side).assumed:
            sides.setdefault(sentence, []).append(side)
    for sentence, where in sides.items():
        yield "RUN", f"[dim]{' and '.join(where)}: {escape(sentence)}[/dim]"


def _side(side: FacetName) -> str:
    return f"[bold {SIDE_COLOURS[side]}]{side.upper():<5}[/]"


def _facet_lines(planned: Planned, side: FacetName, plan: FacetPlan) -> Iterator[Row]:
    recipe, taken, stack = planned.recipe, plan.taken, planned.stacks[side]
    facet = recipe.facets[side]
    yield _side(side), f"window {escape('; '.join(window.label() for window in facet.windows))}"
    around = "".join(
        f" ({name}: {', '.join(f'{e.material} {e.nm:g}' for e in part)})"
        for name, part in (("on base", facet.base), ("under cap", facet.cap))
        if part
    )
    yield "", f"{escape(layers_text(stack) + around)}"
    at = np.array([recipe.chip.wavelength_nm])
    R = float(facet_spectrum(recipe, side, wavelength_nm=at, searched=stack).R[0])
    y = taken.yields
    verb = "worst margin" if taken.margin >= 0 else "[bold]outside by[/bold]"
    yield "", f"R {percent(R)} at {at[0]:g} nm, {verb} {percent(abs(taken.margin))}"
    yield (
        "",
        f"[bold]yield {100 * y.chips:.1f} %[/bold] of chips "
        f"({100 * y.low:.1f} to {100 * y.high:.1f}), {100 * y.runs:.0f} % of runs good",
    )
    if plan.searched:
        yield "", f"{escape(why(plan))}"
        yield "", f"yield by layers, %: {_by_layers(plan)}"
    if side in planned.shortfalls:
        yield "", f"[bold]not met:[/bold] {escape(shortfall_text(planned.shortfalls[side], plan))}"
    if plan.cut_short:
        yield "", "[bold]cut short:[/bold] the best so far; run again for the full search"


def why(plan: FacetPlan) -> str:
    """One sentence: why this stack, and what the next layer would bring."""
    best = _best_by_count(plan)
    here = len(plan.taken.nm)
    number = plan.task.limits.most_layers
    if here + 1 in best:
        gain = 100 * (best[here + 1] - plan.taken.yields.chips)
        more = f"one more layer would change the yield by {gain:+.1f} %"
    else:
        more = f"max_layers = {number} allows no more"
    kind = "margin" if plan.task.errors.none else "yield"
    if plan.stacks[plan.chosen] is plan.stacks[0]:
        return f"taken for the highest {kind}; {more}"
    if (
        plan.taken.yields.chips
        >= plan.stacks[0].yields.chips - plan.stacks[0].yields.standard_error
    ):
        return f"taken as the simplest within sampling error of the highest {kind}; {more}"
    return f"taken by choice, not for the highest {kind}; {more}"


def layers_text(stack: Stack) -> str:
    """Layers chip outward on one line; a long stack is cut in the middle."""
    if len(stack) == 0:
        return "no searched layers"
    if len(set(zip(stack.materials, strict=True))) == 2 and len(stack) > 4:
        first, second = stack.materials[:2]
        numbers = " ".join(f"{nm:g}" for nm in stack.nm)
        return f"{len(stack)} layers, {stack.total_nm:g} nm, {first}/{second} in turn: {numbers}"
    parts = [f"{layer.material} {layer.nm:g}" for layer in stack]
    if len(parts) > MOST_LAYERS_SHOWN:
        parts = [*parts[:6], f"… {len(parts) - 12} more …", *parts[-6:]]
    return f"{len(stack)} layers, {stack.total_nm:g} nm: " + " | ".join(parts)


def _best_by_count(plan: FacetPlan) -> dict[int, float]:
    best: dict[int, float] = {}
    for found in plan.stacks:
        count = len(found.nm)
        best[count] = max(best.get(count, 0.0), found.yields.chips)
    return best


def _by_layers(plan: FacetPlan) -> str:
    best = _best_by_count(plan)
    counts = sorted(best)
    hopeless = [count for count in counts if best[count] < 5e-4]
    words = []
    if len(hopeless) > 1:
        words.append(f"{hopeless[0]}-{hopeless[-1]}: 0")
        counts = [count for count in counts if count not in hopeless]
    for count in counts:
        word = f"{count}: {100 * best[count]:.1f}"
        words.append(f"[bold]{word}[/bold]" if count == len(plan.taken.nm) else word)
    return "  ".join(words)


def shortfall_text(short: Shortfall, plan: FacetPlan) -> str:
    """By how much a window is missed and what would help."""
    help_with = [f"a window wider by {percent(short.miss)}"]
    if short.layers_that_meet is not None:
        help_with.insert(0, f"max_layers = {short.layers_that_meet}")
    elif plan.searched:
        help_with.append("another film in the palette, with a higher or lower index")
    return (
        f"{short.quantity} is {percent(short.reached)} at {short.wavelength_nm:g} nm, "
        f"{percent(short.miss)} outside {percent(short.bound)} (window {short.window + 1}); "
        f"would help: {', or '.join(help_with)}"
    )
