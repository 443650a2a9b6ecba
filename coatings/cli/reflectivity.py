"""``facetwright reflectivity``: a coated facet's reflectivity from the laser itself."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from coatings.cli.options import recipe_argument, shared_from, shared_options

if TYPE_CHECKING:
    from coatings.cli.screen import Row
    from coatings.recipe import FacetName, Recipe
    from coatings.reflectivity import ChipReflectivity


@click.command(
    epilog="Example: facetwright reflectivity out/pump-976/chosen.toml sweep.csv --facet front"
)
@recipe_argument
@click.argument("data", type=click.Path(path_type=Path), metavar="DATA")
@click.option(
    "--facet", type=click.Choice(["front", "rear"]), required=True,
    help="The facet that is asked for; the other comes from the recipe.",
)  # fmt: skip
@click.option(
    "--bare", type=click.Path(path_type=Path), metavar="FILE",
    help="Spectrum of the same chip before coating, at the same current.",
)  # fmt: skip
@click.option(
    "--resolution", type=click.FloatRange(min=0.0), default=0.0, metavar="NM",
    help="Full width at half maximum of the instrument's line, in nm.",
)  # fmt: skip
@shared_options
def reflectivity(
    recipe: Path,
    data: Path,
    *,
    facet: FacetName,
    bare: Path | None,
    resolution: float,
    **options: Any,
) -> int:
    """Reflectivity of a coated facet, with its interval, from what was measured on the laser.

    DATA is CSV with the columns current_A, front_W, rear_W (slopes of both sides) or wavelength_nm, intensity
    (ripple below threshold; the gain is [amplifier] gain_dB, or comes from --bare FILE).
    """
    from coatings.documents.laser_results import reflectivity_result
    from coatings.documents.results import to_text
    from coatings.recipe import load_recipe
    from coatings.reflectivity import chip_reflectivity

    shared = shared_from(options)
    loaded = load_recipe(recipe)
    inputs = [recipe, data, *loaded.table_paths, *([] if bare is None else [bare])]
    shared.check_outputs({}, folder=None, inputs=inputs)
    found = chip_reflectivity(loaded, data, side=facet, bare=bare, resolution_nm=resolution)
    text = to_text(reflectivity_result(loaded, found, seed=shared.seed))
    shared.deliver({}, text, reflectivity_rows(loaded, found))
    return 0


def reflectivity_rows(recipe: Recipe, measured: ChipReflectivity) -> Iterator[Row]:
    """Summary: R with its interval, what it was read from."""
    from rich.markup import escape

    from coatings.cli.words import side_label, title
    from coatings.laser import SlopeRatio

    found, read = measured.found, measured.reading
    yield "", title(recipe)
    yield (
        side_label(measured.side),
        f"R {found.R:.4g} (95 %: {found.R_low:.4g} to {found.R_high:.4g}), "
        f"method: {found.method.value}",
    )
    yield (
        "",
        f"the other facet: R {float(measured.known.light.R):.4g} by {escape(measured.known.says)}",
    )
    if isinstance(read, SlopeRatio):
        said = f"slopes {read.ratio:.4g} to 1, {read.points} points from {read.from_A:g} to {read.to_A:g} A"
    else:
        said = (
            f"at {read.at_nm:g} nm contrast {read.contrast:.4g} from {read.fringes:.0f} fringes "
            f"{read.spacing_nm:.4g} nm apart"
        )
    yield "", said
    for note in measured.notes:
        yield "", escape(note)
