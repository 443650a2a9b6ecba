"""``facetwright calibrate``: laser parameters from uncoated chips."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from coatings.cli.options import recipe_argument, shared_from, shared_options

if TYPE_CHECKING:
    from coatings.calibration import ChipCalibration
    from coatings.cli.screen import Row
    from coatings.recipe import Recipe


@click.command(epilog="Example: facetwright calibrate recipes/pump-976.toml chips.csv")
@recipe_argument
@click.argument("data", type=click.Path(path_type=Path), metavar="DATA")
@click.option("--keep-outliers", is_flag=True, help="Leave chips named as outliers in the fit.")
@shared_options
def calibrate(recipe: Path, data: Path, *, keep_outliers: bool, **options: Any) -> int:
    """Internal loss, efficiency, transparency and gain from uncoated chips of several lengths.

    DATA is CSV with the columns length_um, threshold_A and slope_W_per_A of both facets together (or
    front_slope_W_per_A of one), one row a chip. Writes laser.toml, a section to paste into RECIPE.
    """
    from coatings.calibration import chip_calibration
    from coatings.documents.laser_pictures import calibrate_picture
    from coatings.documents.laser_results import calibrate_result
    from coatings.documents.results import to_text
    from coatings.recipe import load_recipe

    shared = shared_from(options)
    loaded = load_recipe(recipe)
    folder = shared.folder(recipe)
    section = folder / "laser.toml"
    inputs = [recipe, data, *loaded.table_paths]
    shared.check_outputs({"--out": section}, folder=folder, inputs=inputs)
    found = chip_calibration(loaded, data, keep_outliers=keep_outliers)
    files = {
        section: found.found.laser_section().encode(),
        folder / "calibrate.png": calibrate_picture(loaded, found),
    }
    text = to_text(calibrate_result(loaded, found, seed=shared.seed))
    shared.deliver(files, text, calibrate_rows(loaded, found))
    return 0


def calibrate_rows(recipe: Recipe, calibrated: ChipCalibration) -> Iterator[Row]:
    """Summary: the four parameters by both ways, outliers and lengths in notes, the section to paste."""
    from rich.markup import escape

    from coatings.cli.words import counted, title
    from coatings.laser.calibrate_result import NAMES

    found = calibrated.found
    yield "", title(recipe)
    used, given = int(found.used.sum()), found.points.size
    chips = counted(given, "chip") if used == given else f"{used} of {given} chips"
    yield (
        "[bold]CHIPS[/bold]",
        f"{chips}; bare facets of R {float(calibrated.bare.R):.4g} +- {calibrated.R_sigma:.2g}",
    )
    head = "[bold]FOUND[/bold]"
    for name, quantity, line in zip(NAMES, found.quantities, found.by_lines, strict=True):
        interval = ""
        if quantity.low is not None and quantity.high is not None:
            interval = f" (95 %: {quantity.low:.4g} to {quantity.high:.4g})"
        yield head, f"{name} {quantity}{interval}; by straight lines {line}"
        head = ""
    for note in calibrated.notes:
        yield "", escape(note)
    yield "[bold]SECTION[/bold]", "to paste into the recipe:"
    for text in found.laser_section().splitlines():
        yield None, escape(text)
