"""What the terminal says of ``plan`` and ``curve``: one screen, answer first."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import TYPE_CHECKING

import numpy as np
from rich.markup import escape

from coatings.cli.laser_summary import laser_rows
from coatings.cli.words import layers_text, percent, side_label, title, window_text
from coatings.documents.notes import result_notes
from coatings.facets import facet_spectrum
from coatings.recipe.process import process_errors
from coatings.stack import Stack

OTHER_LIGHT = {
    "plane": "as a plane wave at the modal index",
    "coating": "the film alone at the tilt angle",
}

if TYPE_CHECKING:
    from coatings.cli.planning import Planned
    from coatings.cli.screen import Row
    from coatings.curve import FacetCurve
    from coatings.design.plan import FacetPlan
    from coatings.design.relax import Shortfall
    from coatings.guide import GuideFigures
    from coatings.recipe import Facet, FacetName, Recipe

HOPELESS = 5e-4


def plan_rows(planned: Planned) -> Iterator[Row]:
    """Summary of ``plan``: per facet layers, R, margin, yield and why; the laser; what was assumed."""
    recipe = planned.recipe
    yield "PLAN", title(recipe)
    for side, plan in planned.plans.items():
        yield from _facet_rows(planned, side, plan)
    yield from _other_rows(planned)
    yield from laser_rows(planned.laser, recipe, planned.limits)
    yield from _run_rows(planned)
    yield from note_rows(recipe, planned.stacks)


def curve_rows(
    recipe: Recipe, curves: Mapping[FacetName, FacetCurve], guide: GuideFigures | None
) -> Iterator[Row]:
    """Summary of ``curve``: per facet the shares at the wavelength of operation and every margin."""
    yield "CURVE", title(recipe)
    at = recipe.chip.wavelength_nm
    if guide is not None:
        yield "GUIDE", guide_text(guide)
    for side, curve in curves.items():
        light = curve.at_work
        kinds = [("R", light.R), ("T", light.T), ("A", light.A)]
        kinds += [("S", light.S)] if light.model != "plane" else []
        shares = ", ".join(f"{name} {percent(float(value[0]))}" for name, value in kinds)
        yield side_label(side), f"{shares} at {at:g} nm, phase {light.phase_rad[0]:.3f} rad"
        for name, other in curve.others.items():
            yield "", f"{OTHER_LIGHT[name]}: R {percent(float(other.R[0]))}"
        yield "", escape(_own_layers(recipe.facets[side]))
        for window in curve.windows:
            inside = window.margin >= 0
            verdict = (
                f"met, {percent(window.margin)} to spare"
                if inside
                else f"[bold]MISSED by {percent(-window.margin)}[/bold]"
            )
            yield (
                "",
                f"{escape(window_text(window.window))}: {verdict} (at {window.worst_nm:g} nm)",
            )
        if not curve.windows:
            yield "", "no windows to meet"
    yield from note_rows(recipe, dict.fromkeys(curves))


def guide_text(guide: GuideFigures) -> str:
    """The chip's mode in one line."""
    width = guide.far_field_fwhm_deg
    far = "far field wider than 90 degrees" if width is None else f"far field {width:.3g} degrees"
    return (
        f"{guide.polarization} mode: effective index {guide.effective_index:.4f}, group index "
        f"{guide.group_index:.3f}, height {guide.near_field_height_um:.3g} um, {far}"
    )


def note_rows(recipe: Recipe, stacks: Mapping[FacetName, Stack | None]) -> Iterator[Row]:
    """What must be said with the result, one row a sentence."""
    for number, note in enumerate(result_notes(recipe, stacks)):
        yield "NOTE" if number == 0 else "", f"[dim]{escape(note)}[/dim]"


def why(plan: FacetPlan) -> str:
    """One sentence: why this stack, and what the next layer would bring."""
    top, by_margin = plan.stacks[0].yields, plan.task.errors.none
    is_nearest = top.chips == 0.0 or by_margin
    if is_nearest and plan.taken.margin >= max(found.margin for found in plan.stacks):
        reason = "the largest margin" if plan.meets else "no stack meets the windows; the nearest"
    elif plan.chosen == 0:
        reason = "the highest yield"
    elif not is_nearest and plan.taken.yields.chips >= top.chips - top.standard_error:
        reason = "the simplest within sampling error of the highest yield"
    else:
        reason = "taken by choice"
    return f"{reason}; {_next_layer(plan, by_margin=by_margin)}"


def _next_layer(plan: FacetPlan, *, by_margin: bool) -> str:
    """What more layers would bring, as far as they were searched."""
    here, most = len(plan.taken.nm), plan.task.limits.most_layers
    more = {count: number for count, number in _best_by_count(plan).items() if count > here}
    if not more:
        return f"max_layers = {most} allows no more" if here == most else "more bring no more"
    count = min(more)
    found = plan.stacks[more[count]]
    value = f"margin {percent(found.margin)}" if by_margin else f"{100 * found.yields.chips:.1f} %"
    return f"with {count} layers: {value}"


def shortfall_text(short: Shortfall, plan: FacetPlan) -> str:
    """By how much a window is missed and what would help."""
    from coatings.design.relax import MORE_LAYERS

    wider = f"a window wider by {percent(short.miss)}"
    if short.guide_limit is not None:
        help_with = (
            f"the guide limits R to {percent(short.guide_limit)} or so: the rest leaves the mode, and more "
            f"layers do not bring it back; a wider mode, or {wider}"
        )
    elif short.layers_that_meet is not None:
        help_with = f"max_layers = {short.layers_that_meet}, or {wider}"
    elif plan.searched and not plan.cut_short:
        tried = plan.task.limits.most_layers + MORE_LAYERS
        help_with = f"films that differ more in index, more than {tried} layers, or {wider}"
    else:
        help_with = wider
    direction = "above" if short.reached > short.bound else "below"
    return (
        f"{short.quantity} is {percent(short.reached)} at {short.wavelength_nm:g} nm, "
        f"{percent(short.miss)} {direction} the {percent(short.bound)} of window "
        f"{short.window + 1}; what would help: {help_with}"
    )


def _other_rows(planned: Planned) -> Iterator[Row]:
    """Facets without windows: they are taken as they are, and the laser sees them."""
    recipe = planned.recipe
    at = np.array([recipe.chip.wavelength_nm])
    for side, facet in recipe.facets.items():
        if side not in planned.plans and not facet.windows:
            R = float(facet_spectrum(recipe, side, wavelength_nm=at).R[0])
            yield side_label(side), f"no windows, taken as given: R {percent(R)} at {at[0]:g} nm"
            yield "", escape(_own_layers(facet))


def _facet_rows(planned: Planned, side: FacetName, plan: FacetPlan) -> Iterator[Row]:
    recipe, taken, stack = planned.recipe, plan.taken, planned.stacks[side]
    facet = recipe.facets[side]
    at = np.array([recipe.chip.wavelength_nm])
    R = float(facet_spectrum(recipe, side, wavelength_nm=at, searched=stack).R[0])
    margin = percent(abs(taken.margin))
    spare = f"{margin} to spare" if taken.margin >= 0 else f"[bold]OUTSIDE by {margin}[/bold]"
    light = f"R {percent(R)} at {at[0]:g} nm, {spare}"
    windows = [escape(window_text(window)) for window in facet.windows]
    if len(windows) == 1:
        yield side_label(side), f"{windows[0]}: {light}"
    else:
        yield from zip([side_label(side), *[""] * len(windows)], [*windows, light], strict=True)
    yield "", escape(layers_text(stack) + _around(facet))
    y = taken.yields
    if not plan.task.errors.none:
        yield (
            "",
            f"[bold]yield {100 * y.chips:.1f} %[/bold] of chips ({100 * y.low:.1f} to "
            f"{100 * y.high:.1f} by sampling), {100 * y.runs:.0f} % of runs good",
        )
    if plan.searched:
        yield "", escape(why(plan))
        if plan.task.errors.none or plan.stacks[0].yields.chips >= HOPELESS:
            yield "", _by_layers(plan)
    if side in planned.shortfalls:
        yield "", f"[bold]NOT MET:[/bold] {escape(shortfall_text(planned.shortfalls[side], plan))}"
    if plan.cut_short:
        yield "", "[bold]CUT SHORT:[/bold] the best so far; run again for the full search"


def _around(facet: Facet) -> str:
    """Base and cap of a facet."""
    return "".join(
        f" ({name} {', '.join(f'{layer.material} {layer.nm:g}' for layer in part)})"
        for name, part in (("on base", facet.base), ("under cap", facet.cap))
        if part
    )


def _own_layers(facet: Facet) -> str:
    """The layers that a recipe gives a facet."""
    if facet.layers is None and facet.is_searchable:
        return "no layers chosen yet: 'facetwright plan' finds them" + _around(facet)
    layers = facet.layers or ()
    stack = Stack.of([layer.material for layer in layers], [layer.nm for layer in layers])
    return "bare cleaved facet" if facet.is_bare else layers_text(stack) + _around(facet)


def _best_by_count(plan: FacetPlan) -> dict[int, int]:
    """Index in the shortlist of the best stack of each layer count."""
    best: dict[int, int] = {}
    for number, found in enumerate(plan.stacks):  # best first
        best.setdefault(len(found.nm), number)
    return dict(sorted(best.items()))


def _by_layers(plan: FacetPlan) -> str:
    """Yield of the best stack of each layer count, with its number in the shortlist."""
    by_margin = plan.task.errors.none
    best = _best_by_count(plan)
    hopeless = (
        []
        if by_margin
        else [
            count for count, number in best.items() if plan.stacks[number].yields.chips < HOPELESS
        ]
    )
    words = [f"{hopeless[0]}-{hopeless[-1]}:0"] if len(hopeless) > 1 else []
    for count, number in best.items():
        if count in hopeless and len(hopeless) > 1:
            continue
        found = plan.stacks[number]
        value = f"{100 * found.margin:.2f}" if by_margin else f"{100 * found.yields.chips:.1f}"
        word = escape(f"{count}:{value}[{number}]")
        words.append(f"[bold]{word}[/bold]" if number == plan.chosen else word)
    kind = "margin" if by_margin else "yield"
    return f"{kind} % by layers \\[--take N]: {' '.join(words)}"


def _run_rows(planned: Planned) -> Iterator[Row]:
    """What was assumed of the run; once where both facets share it."""
    recipe = planned.recipe
    if all(plan.task.errors.none for plan in planned.plans.values()):
        yield "RUN", "no errors of the run are given: stacks are chosen by margin, not by yield"
        return
    films = list(dict.fromkeys(f for side in planned.plans for f in recipe.facets[side].films))
    said = {
        side: process_errors(recipe.process_table, recipe.facets[side].table.process, films=films)
        for side in planned.plans
    }
    sentences = {side: " ".join(errors.assumed) for side, errors in said.items()}
    is_shared = len(set(sentences.values())) == 1
    for number, (side, sentence) in enumerate(sentences.items()):
        if sentence and not (is_shared and number > 0):
            where = "" if is_shared else f"{side}: "
            yield "RUN" if number == 0 else "", f"[dim]{where}{escape(sentence)}[/dim]"
