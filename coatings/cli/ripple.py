"""``facetwright ripple``: the chip below threshold."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from coatings.cli.options import recipe_argument, shared_from, shared_options

if TYPE_CHECKING:
    from coatings.below_threshold import ChipRipple
    from coatings.cli.screen import Row
    from coatings.recipe import Recipe


@click.command(epilog="Example: facetwright ripple out/gain-1550/chosen.toml --json -")
@recipe_argument
@shared_options
def ripple(recipe: Path, **options: Any) -> int:
    """Gain spectrum, mode spacing and ripple of the chip of RECIPE below threshold, over chip.band_nm.

    Needs [amplifier]; a facet without layers counts with its window's value. Exit status 1 when the ripple
    passes the limit, or the chip lases.
    """
    from coatings.below_threshold import chip_ripple
    from coatings.documents.laser_pictures import ripple_picture
    from coatings.documents.laser_results import ripple_result
    from coatings.documents.results import to_text
    from coatings.recipe import load_recipe

    shared = shared_from(options)
    loaded = load_recipe(recipe)
    folder = shared.folder(recipe)
    shared.check_outputs({}, folder=folder, inputs=[recipe, *loaded.table_paths])
    found = chip_ripple(loaded)
    files = {}
    if found.ripple is not None:
        files[folder / "ripple.png"] = ripple_picture(loaded, found.amplifier, found.ripple)
    text = to_text(ripple_result(loaded, found, seed=shared.seed))
    shared.deliver(files, text, ripple_rows(loaded, found))
    return 0 if found.kept else 1


def ripple_rows(recipe: Recipe, found: ChipRipple) -> Iterator[Row]:
    """Summary: facets, gain and ripple, what the limit demands."""
    from rich.markup import escape

    from coatings.cli.words import side_label, title

    amplifier = found.amplifier
    yield "", title(recipe)
    for side, facet in found.facets.items():
        yield side_label(side), f"R {float(facet.light.R):.3g} by {escape(facet.says)}"
    ripple = "[bold]the chip lases[/bold], most"
    if found.ripple is not None:
        ripple = f"{found.ripple.ripple_dB:.3g} dB at worst,"
    yield (
        "[bold]RIPPLE[/bold]",
        f"{ripple} at {found.worst_nm:.6g} nm, R1 R2 {found.R_product:.3g}",
    )
    yield (
        "",
        f"single pass {amplifier.gain_dB:g} dB at {amplifier.wavelength_nm:g} nm; "
        f"modes {found.mode_spacing_GHz:.4g} GHz apart (group index {amplifier.group_index:.4g})",
    )
    if found.R_product_needed is not None:
        word = "kept" if found.kept else "[bold]MISSED[/bold]"
        yield (
            "",
            f"limit of {amplifier.ripple_dB:g} dB {word}: it takes R1 R2 of at most "
            f"{found.R_product_needed:.3g}, {found.R_product_needed**0.5:.3g} on both facets alike",
        )
    for note in found.notes:
        yield "", escape(note)
