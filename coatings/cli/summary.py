"""What the terminal says: one screen, answer first."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np
from rich.markup import escape
from rich.text import Text

from coatings.documents.look import SIDE_COLOURS
from coatings.facets import facet_spectrum
from coatings.stack import Stack

if TYPE_CHECKING:
    from coatings.cli.planning import Planned
    from coatings.curve import FacetCurve
    from coatings.design.plan import FacetPlan
    from coatings.design.relax import Shortfall
    from coatings.laser import LaserEstimate
    from coatings.recipe import Recipe

MOST_LAYERS_SHOWN = 14


def plan_lines(planned: Planned) -> Iterator[str]:
    """Summary of ``plan``: per facet layers, R, margin, yield and why; then the laser's line."""
    recipe = planned.recipe
    yield _title(recipe)
    for note in recipe.material_notes:
        yield f"  {escape(note)}"
    for side, plan in planned.plans.items():
        yield ""
        yield from _facet_lines(planned, side, plan)
    yield ""
    yield from laser_lines(planned.laser)
    for limit in planned.limits:
        yield f"       {'[bold]' if limit.kept is False else ''}{escape(str(limit))}{'[/bold]' if limit.kept is False else ''}"


def curve_lines(recipe: Recipe, curves: Mapping[str, FacetCurve]) -> Iterator[str]:
    """Summary of ``curve``: per facet the shares at the wavelength of operation and every margin."""
    yield _title(recipe)
    at = np.array([recipe.chip.wavelength_nm])
    for side, curve in curves.items():
        light = facet_spectrum(recipe, side, wavelength_nm=at)
        shares = "  ".join(
            f"{name} {percent(float(value[0]))}" for name, value in (("R", light.R), ("T", light.T), ("A", light.A))
        )
        yield f"{_side(side)}  at {at[0]:g} nm: {shares}  phase {light.phase_rad[0]:.3f} rad"
        for window in curve.windows:
            inside = "inside by" if window.margin >= 0 else "[bold]MISSED by[/bold]"
            yield (
                f"       {escape(window.window.label())}: {inside} {percent(abs(window.margin))}"
                f" (worst at {window.worst_nm:g} nm)"
            )
        if not curve.windows:
            yield "       no windows"


def files_line(files: list[Path]) -> str:
    """Where the files are."""
    if not files:
        return "no files written"
    folders: dict[Path, list[str]] = {}
    for path in files:
        folders.setdefault(path.parent, []).append(path.name)
    return "\n".join(
        f"[dim]in {escape(str(folder))}/:[/dim] {escape(', '.join(names))}" for folder, names in folders.items()
    )


def percent(share: float) -> str:
    """A share in percent with the digits that matter."""
    value = 100.0 * share
    if value == 0.0 or abs(value) >= 0.1:
        return f"{value:.2f} %"
    return f"{value:.2g} %"


def laser_lines(laser: LaserEstimate | None) -> Iterator[str]:
    """The laser's line."""
    if laser is None:
        yield "LASER  not estimated: the recipe has no \\[laser] section"
        return
    yield (
        f"[bold]LASER[/bold]  threshold {laser.threshold_A:.3g} A   slope front {laser.slope_front_W_per_A:.3g} W/A"
        f"   rear {laser.slope_rear_W_per_A:.3g} W/A   front share {percent(laser.front_fraction)}"
    )
    if laser.front_W is not None and laser.rear_W is not None:
        parts = [f"front {laser.front_W:.3g} W", f"rear {laser.rear_W:.3g} W"]
        if laser.wall_plug_efficiency is not None:
            parts.append(f"wall plug {percent(laser.wall_plug_efficiency)}")
        if laser.facet_load_MW_per_cm2 is not None:
            parts.append(f"facet load {laser.facet_load_MW_per_cm2:.3g} MW/cm2")
        yield f"       at the drive current: {', '.join(parts)}   ({laser.model} model)"
    for note in laser.notes:
        yield f"       {escape(note)}"


def _title(recipe: Recipe) -> str:
    revision = f"  revision {escape(recipe.revision)}" if recipe.revision else ""
    return f"[bold]{escape(recipe.title)}[/bold]{revision}  {recipe.chip.wavelength_nm:g} nm"


def _side(side: str) -> str:
    return f"[bold {SIDE_COLOURS[side]}]{side.upper():<5}[/]"


def _facet_lines(planned: Planned, side: str, plan: FacetPlan) -> Iterator[str]:
    taken = plan.taken
    windows = "; ".join(window.label() for window in getattr(planned.recipe, side).windows)
    yield f"{_side(side)}  {escape(windows)}"
    yield f"       {escape(layers_text(planned.stacks[side]))}"
    at = np.array([planned.recipe.chip.wavelength_nm])
    R = facet_spectrum(planned.recipe, side, wavelength_nm=at, searched=planned.stacks[side]).R[0]
    y = taken.yields
    yield (
        f"       R {percent(float(R))} at {at[0]:g} nm   worst margin {percent(taken.margin)}   "
        f"yield {100 * y.chips:.1f} % ({100 * y.low:.1f} to {100 * y.high:.1f})   good runs {100 * y.runs:.0f} %"
    )
    if plan.searched:
        yield f"       {_by_layers(plan)}"
    for sentence in planned.recipe.process_for(side).assumed:  # type: ignore[arg-type]
        yield f"       [dim]{escape(sentence)}[/dim]"
    if side in planned.shortfalls:
        yield f"       [bold]not met:[/bold] {escape(shortfall_text(planned.shortfalls[side], plan))}"
    if plan.cut_short:
        yield "       [bold]cut short:[/bold] the best so far; run again for the full search"


def layers_text(stack: Stack) -> str:
    """Layers chip outward on one line; a long stack is cut in the middle."""
    parts = [f"{layer.material} {layer.nm:g}" for layer in stack]
    if not parts:
        return "no searched layers"
    if len(parts) > MOST_LAYERS_SHOWN:
        parts = [*parts[:6], f"… {len(parts) - 12} more …", *parts[-6:]]
    return f"{len(stack)} layers, {stack.total_nm:g} nm: " + " | ".join(parts)


def _by_layers(plan: FacetPlan) -> str:
    best: dict[int, float] = {}
    for found in plan.stacks:
        best[len(found.nm)] = max(best.get(len(found.nm), 0.0), found.yields.chips)
    here = len(plan.taken.nm)
    words = [
        f"[bold]{count}: {100 * best[count]:.1f}[/bold]" if count == here else f"{count}: {100 * best[count]:.1f}"
        for count in sorted(best)
    ]
    return "yield by layers, %:  " + "  ".join(words)


def shortfall_text(short: Shortfall, plan: FacetPlan) -> str:
    """By how much a window is missed and what would help."""
    help_with = [f"a window wider by {percent(short.miss)}"]
    if short.layers_that_meet is not None:
        help_with.insert(0, f"max_layers = {short.layers_that_meet}")
    elif plan.searched:
        help_with.append("another film in the palette, with a higher or lower index")
    return (
        f"{short.quantity} is {percent(short.reached)} at {short.wavelength_nm:g} nm, {percent(short.miss)} outside "
        f"{percent(short.bound)} (window {short.window + 1}); would help: {', or '.join(help_with)}"
    )
