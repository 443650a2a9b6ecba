"""``facetwright field``: the standing wave and the absorbed power through the stacks."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from coatings.cli.options import facet_option, recipe_argument, shared_from, shared_options, sides

if TYPE_CHECKING:
    from coatings.cli.screen import Row
    from coatings.field import FacetField
    from coatings.recipe import FacetName, Recipe


@click.command(epilog="Example: facetwright field out/pump-976/chosen.toml --facet front")
@recipe_argument
@facet_option
@shared_options
def field(recipe: Path, facet: FacetName | None, **options: Any) -> int:
    """Standing wave and absorbed power through the stacks of RECIPE, at the wavelength of operation.

    Per watt that leaves the front, and at the operating current where [laser] gives one.
    """
    from coatings.documents.field_picture import field_picture
    from coatings.documents.field_result import field_result
    from coatings.documents.results import to_text
    from coatings.field import facet_fields
    from coatings.recipe import check_available, load_recipe

    shared = shared_from(options)
    loaded = load_recipe(recipe)
    check_available(loaded, "field")
    folder = shared.folder(recipe)
    shared.check_outputs({}, folder=folder, inputs=[recipe, *loaded.table_paths])
    fields = facet_fields(loaded, sides(facet))
    files = {folder / "field.png": field_picture(loaded, fields)}
    text = to_text(field_result(loaded, fields, seed=shared.seed))
    shared.deliver(files, text, field_rows(loaded, fields))
    return 0


def field_rows(recipe: Recipe, fields: Mapping[FacetName, FacetField]) -> Iterator[Row]:
    """Summary: per facet a line a layer with its peak, and what the coating absorbs."""
    from coatings.cli.words import side_label, title

    yield "FIELD", title(recipe)
    for side, found in fields.items():
        yield from _facet_rows(side_label(side), found)
    yield "", "E2: electric field squared over that of the wave running onto the facet in the chip"
    if recipe.chip.guide is not None or recipe.chip.tilt_deg > 0.0:
        yield (
            "",
            "field and absorption are those of a plane wave at the modal index, along the normal",
        )


def _facet_rows(label: str, found: FacetField) -> Iterator[Row]:
    from rich.markup import escape

    from coatings.cli.words import percent, watts

    wave, work = found.wave, found.work
    face = float(wave.face_E2[0, 0, 0])
    at_face = f"E2 {face:.3f} at the chip's face"
    if work is not None and work.face_V_per_m is not None:
        at_face += f", {1e-6 * work.face_V_per_m:.3g} MV/m at {work.drive_A:g} A"
    yield label, f"at {found.wavelength_nm:g} nm, {at_face}"
    if not len(found.stack):
        yield "", "no layers: a bare facet"
        return
    for line in _columns(found):
        yield "", f"[bold]{escape(line)}[/bold]" if line.startswith("layer") else escape(line)
    per_front = found.arriving_per_front_W
    total = f"the coating absorbs {percent(float(wave.A[0]))} of the arriving light"
    if per_front is not None:
        total += f", {watts(float(wave.A[0]) * per_front)} per watt leaving the front"
    if work is not None:
        total += f", {watts(float(work.absorbed_W.sum()))} at {work.drive_A:g} A"
    yield "", total


def _columns(found: FacetField) -> Iterator[str]:
    """A line a layer under a head: peak and absorption, field and watts where they are known."""
    from coatings.cli.words import percent

    wave, work = found.wave, found.work
    names = [f"{layer.material} {layer.nm:g}" for layer in found.stack]
    columns = {"layer": names, "peak E2": [f"{v:.3f}" for v in wave.layer_peak_E2[0]]}
    if work is not None and work.peak_V_per_m is not None:
        columns["MV/m"] = [f"{1e-6 * v:.3g}" for v in work.peak_V_per_m]
    columns["absorbs"] = [percent(float(v)) for v in wave.layer_absorbed[0]]
    if work is not None:
        columns["mW"] = [f"{1e3 * v:.2g}" for v in work.absorbed_W]
    widths = {head: max(len(head), *map(len, cells)) for head, cells in columns.items()}
    for row in (list(columns), *zip(*columns.values(), strict=True)):
        cells = list(zip(row, widths.values(), strict=True))
        yield "  ".join([cells[0][0].ljust(cells[0][1]), *(c.rjust(w) for c, w in cells[1:])])
