"""``facetwright plan``: the main job."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from coatings.cli.options import facet_option, recipe_argument, shared_from, shared_options, sides

if TYPE_CHECKING:
    from coatings.recipe import FacetName


@click.command(epilog="Example: facetwright plan recipes/pump-976.toml --out out/pump")
@recipe_argument
@facet_option
@click.option(
    "--take", type=click.IntRange(min=0), metavar="N",
    help="Take stack N of the shortlist (# in the summary); needs --facet when both are searched.",
)  # fmt: skip
@shared_options
def plan(recipe: Path, facet: FacetName | None, take: int | None, **options: Any) -> int:
    """Find stacks for every facet of RECIPE that has a palette and windows.

    They are toleranced under [process], rounded to what can be ordered and fed to the laser estimate.
    Writes result.json, chosen.toml (the recipe with the layers filled in) and pictures.
    Exit status 1 when a window can't be met.
    """
    from coatings.cli.planning import run_plan
    from coatings.recipe import check_available, load_recipe

    shared = shared_from(options)
    loaded = load_recipe(recipe)
    check_available(loaded, "plan")
    return run_plan(loaded, sides=sides(facet), take_number=take, shared=shared)
