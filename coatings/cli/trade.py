"""``facetwright trade``: what reflectivity the front should have."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from coatings.cli.options import recipe_argument, shared_from, shared_options

if TYPE_CHECKING:
    from coatings.cli.screen import Row
    from coatings.recipe import Recipe
    from coatings.trade import Columns, Drift, Sweep
    from coatings.trading import ProductTrade

MOST_ROWS = 12


@click.command(epilog="Example: facetwright trade recipes/pump-976.toml --current 8 16 2")
@recipe_argument
@click.option(
    "--length", nargs=3, type=float, metavar="FROM TO STEP",
    help="The best front over the chip's length too, in um.",
)  # fmt: skip
@click.option(
    "--current", nargs=3, type=float, metavar="FROM TO STEP",
    help="The best front over the drive current too, in A.",
)  # fmt: skip
@shared_options
def trade(
    recipe: Path,
    *,
    length: tuple[float, float, float] | None,
    current: tuple[float, float, float] | None,
    **options: Any,
) -> int:
    """Front power against threshold over the front's reflectivity, and a window to paste into RECIPE.

    Needs no layers: a facet without layers counts with its window's value. Exit status 1 when no
    reflectivity keeps every limit.
    """
    from coatings.documents.results import to_text
    from coatings.documents.trade_picture import trade_picture
    from coatings.documents.trade_result import trade_result
    from coatings.recipe import load_recipe
    from coatings.trading import product_trade

    shared = shared_from(options)
    loaded = load_recipe(recipe)
    folder = shared.folder(recipe)
    shared.check_outputs({}, folder=folder, inputs=[recipe, *loaded.table_paths])
    found = product_trade(loaded, length_um=length, current_A=current)
    files = {folder / "trade.png": trade_picture(loaded, found)}
    text = to_text(trade_result(loaded, found, seed=shared.seed))
    shared.deliver(files, text, trade_rows(loaded, found))
    return 0 if found.trade.best.R_front is not None else 1


def trade_rows(recipe: Recipe, found: ProductTrade) -> Iterator[Row]:
    """Summary: the best front and its range, the laser now, drifts, the window to paste."""
    from rich.markup import escape

    from coatings.cli.laser_summary import laser_rows
    from coatings.cli.words import amperes, side_label, title
    from coatings.product import product_limits

    trade = found.trade
    yield "", title(recipe)
    for side, facet in found.facets.items():
        yield side_label(side), f"R {float(facet.light.R):.4g} by {escape(facet.says)}"
    if "front" not in found.facets:
        yield side_label("front"), "the trade's to find"
    best = trade.best
    yield "[bold]BEST[/bold]", escape(trade.notes[0])
    if best.R_front is not None and best.front_W is not None and best.threshold_A is not None:
        yield (
            "",
            f"{best.front_W:.4g} W front, threshold {amperes(best.threshold_A)}; "
            f"within 1 %: R {best.R_low:.3g} to {best.R_high:.3g}",
        )
        if beside := ", ".join(_at_best(trade.columns, best.R_front)):
            yield "", beside
    for drift in trade.drift:
        yield "", _drift(drift)
    if trade.laser is not None:
        yield from laser_rows(trade.laser, recipe, product_limits(recipe, trade.laser))
    if trade.external is not None:
        yield "[bold]REFLECTOR[/bold]", _fed_back(trade.external)
    for sweep in (found.lengths, found.currents):
        if sweep is not None:
            yield from _sweep_rows(sweep)
    for note in trade.notes[1:]:
        yield "", escape(note)
    if trade.window is not None:
        yield "[bold]WINDOW[/bold]", "to paste into the recipe:"
        for line in trade.window.splitlines():
            yield None, escape(line)


def _fed_back(external: Mapping[str, float | bool | None]) -> str:
    """The laser with the reflector before its present front."""
    from coatings.cli.words import amperes, watts

    parts = [
        f"front with it R {external['R_effective']:.3g} ({external['R_least']:.3g} to "
        f"{external['R_most']:.3g} if coherent)"
    ]
    for name, label, unit in (("threshold_A", "threshold", amperes), ("front_W", "front", watts)):
        value = external[name]
        if value is not None:
            parts.append(f"{label} {unit(value)}")
    if external["locks"] is not None:
        parts.append("locks" if external["locks"] else "[bold]does not lock[/bold]")
    if external["R_front_locks_below"] is not None:
        parts.append(f"locks below a front R of {external['R_front_locks_below']:.3g}")
    return "; ".join(parts)


def _at_best(columns: Columns, R_best: float) -> Iterator[str]:
    """Locking margin and ripple at the best front, between the rows of the axis."""
    import numpy as np

    for name, label, unit in (
        ("locking_margin_per_cm", "locking margin", "/cm"),
        ("ripple_dB", "ripple below threshold", "dB"),
    ):
        column = getattr(columns, name)
        if column is None:
            continue
        value = float(np.interp(np.log(R_best), np.log(columns.R_front), column))
        yield f"{label} {value:.3g} {unit}" if np.isfinite(value) else f"no {label}: it lases"


def _drift(drift: Drift) -> str:
    missed = f", misses {', '.join(drift.missed)}" if drift.missed else ""
    return f"R times {drift.factor:g}: {1e3 * drift.change_W:+.3g} mW{missed}"


def _sweep_rows(sweep: Sweep) -> Iterator[Row]:
    from coatings.cli.words import amperes

    label, unit = {"length_um": ("LENGTH", "um"), "current_A": ("CURRENT", "A")}[sweep.quantity]
    head = f"[bold]{label}[/bold]"
    every = -(-len(sweep.best) // MOST_ROWS)
    rows = list(zip(sweep.values, sweep.best, strict=True))[::every]
    for value, best in rows:
        text = f"{value:g} {unit}: no front keeps the limits ({best.limited_by})"
        if best.R_front is not None and best.threshold_A is not None:
            text = (
                f"{value:g} {unit}: best front R {best.R_front:.3g}, {best.front_W:.4g} W, "
                f"threshold {amperes(best.threshold_A)}, limit: {best.limited_by}"
            )
        yield head, text
        head = ""
    if every > 1:
        yield "", f"one value in {every} is shown; all are in the result"
