"""The laser's lines of a summary."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

from rich.markup import escape

from coatings.cli.words import amperes, watts

if TYPE_CHECKING:
    from coatings.cli.screen import Row
    from coatings.laser import Judgement, LaserEstimate
    from coatings.recipe import Recipe

LASER = "[bold]LASER[/bold]"
LIMITS = {
    "threshold_max_A": ("threshold", "A"),
    "rear_min_W": ("rear power", "W"),
    "facet_limit_MW_per_cm2": ("facet load", "MW/cm2"),
}


def laser_rows(
    laser: LaserEstimate | None, recipe: Recipe, limits: Sequence[Judgement]
) -> Iterator[Row]:
    """Threshold, slopes and split; what leaves at the drive current; what limits."""
    if laser is None:
        yield LASER, "not estimated: the recipe has no \\[laser] section"
        return
    yield LASER, _cold(laser)
    if laser.front_W is not None and laser.rear_W is not None and recipe.laser is not None:
        yield "", _working(laser, laser.front_W, laser.rear_W, recipe.laser.drive_A)
    if judged := [_judged(judgement) for judgement in limits if judgement.limit > 0]:
        yield "", f"limits: {', '.join(judged)}"
    for note in laser.notes:
        yield "", escape(note)


def _cold(laser: LaserEstimate) -> str:
    threshold = "none" if laser.threshold_A is None else amperes(laser.threshold_A)
    parts = [
        f"threshold {threshold}",
        f"slopes {laser.slope_front_W_per_A:.3g} front, {laser.slope_rear_W_per_A:.3g} rear W/A",
    ]
    if laser.front_fraction is not None:
        parts.append(f"front share {100 * laser.front_fraction:.1f} %")
    return "; ".join(parts)


def _working(laser: LaserEstimate, front_W: float, rear_W: float, drive_A: float | None) -> str:
    parts = [f"{watts(front_W)} front, {watts(rear_W)} rear"]
    if laser.facet_load_MW_per_cm2 is not None:
        parts.append(f"load {laser.facet_load_MW_per_cm2:.3g} MW/cm2")
    if laser.wall_plug_efficiency is not None:
        parts.append(f"wall plug {100 * laser.wall_plug_efficiency:.1f} %")
    if laser.coating_absorbed_W is not None and laser.coating_absorbed_W > 0.01 * front_W:
        parts.append(f"[bold]coatings absorb {watts(laser.coating_absorbed_W)}[/bold]")
    where = "" if drive_A is None else f"at {amperes(drive_A)}: "
    return f"{where}{'; '.join(parts)}"


def _judged(judgement: Judgement) -> str:
    name, unit = LIMITS[judgement.name]
    if judgement.value is None and judgement.kept is None:
        return f"{name} of {judgement.limit:g} {unit} can't be judged"
    value = "none" if judgement.value is None else f"{judgement.value:.3g}"
    text = f"{name} {value} of {judgement.limit:g} {unit}"
    return f"{text} kept" if judgement.kept else f"[bold]{text} MISSED[/bold]"
