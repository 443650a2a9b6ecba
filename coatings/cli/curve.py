"""``facetwright curve``: the spectra of the stacks in a recipe."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Any

import click

from coatings.cli.options import facet_option, recipe_argument, shared_from, shared_options, sides

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import NDArray

    from coatings.cli.options import Shared
    from coatings.recipe import FacetName, Recipe


@click.command(
    epilog="Example: facetwright curve out/pump-976/chosen.toml --nm 940 1010 0.5 --csv spectra.csv"
)
@recipe_argument
@facet_option
@click.option(
    "--nm", nargs=3, type=float, metavar="FROM TO STEP",
    help="Wavelengths in nm; FROM = TO gives one point. Default: all windows with some room around.",
)  # fmt: skip
@click.option(
    "--csv", type=click.Path(path_type=Path), metavar="FILE", help="Write the spectra as CSV."
)
@click.option(
    "--witness",
    metavar="NAME",
    help="What the spectrophotometer sees of this witness piece instead.",
)
@click.option(
    "--plane",
    is_flag=True,
    help="Take the plane wave at the modal index even when a guide is given.",
)
@shared_options
def curve(
    recipe: Path,
    *,
    facet: FacetName | None,
    nm: tuple[float, float, float] | None,
    csv: Path | None,
    witness: str | None,
    plane: bool,
    **options: Any,
) -> int:
    """Spectra (R, T, A, phase) of the stacks in RECIPE on the chip, with the margin of every window.

    With --witness what the spectrophotometer reads of that piece, back face included. Exit status 1 when a
    window is missed.
    """
    from coatings.cli.summary import curve_rows
    from coatings.curve import facet_curve
    from coatings.documents.results import curve_result, to_text
    from coatings.documents.tables import curve_csv
    from coatings.grids import grid_nm
    from coatings.guide import guide_figures, guide_profile
    from coatings.recipe import check_available, load_recipe

    shared = shared_from(options)
    loaded = load_recipe(recipe)
    check_available(loaded, "curve")
    grid = None if nm is None else grid_nm(*nm)
    folder = shared.folder(recipe)
    outputs = {} if csv is None else {"--csv": csv}
    shared.check_outputs(outputs, folder=folder, inputs=[recipe, *loaded.table_paths])
    if witness is not None:
        _refuse_beside_witness(facet, plane)
        return _deliver_witness(loaded, witness, grid=grid, csv=csv, shared=shared)
    curves = {s: facet_curve(loaded, s, wavelength_nm=grid, plane=plane) for s in sides(facet)}
    figures = guide_figures(loaded)
    files = {} if csv is None else {csv: curve_csv(curves).encode()}
    if grid is None or len(grid) > 1:
        from coatings.documents.pictures import spectrum_picture

        files[folder / "curve.png"] = spectrum_picture(loaded, curves, stacks={}, bands={})
    if figures is not None:
        from coatings.documents.guide_picture import guide_picture

        profile = guide_profile(loaded)
        files[folder / "guide.png"] = guide_picture(figures, profile, title=loaded.title)
    text = to_text(curve_result(loaded, curves, figures, seed=shared.seed, flat=facet is not None))
    shared.deliver(files, text, curve_rows(loaded, curves, figures))
    return 0 if all(c.meets for c in curves.values()) else 1


def _refuse_beside_witness(facet: FacetName | None, plane: bool) -> None:
    from coatings.errors import InputError, Problem

    if facet is not None or plane:
        given = "--facet" if facet is not None else "--plane"
        mend = "leave it out: the piece has its facet, and light from air is a plane wave"
        raise InputError(Problem("--witness", f"does not go with {given}; {mend}"))


def _deliver_witness(
    recipe: Recipe, name: str, *, grid: NDArray[np.float64] | None, csv: Path | None, shared: Shared
) -> int:
    from coatings.cli.witness import witness_rows
    from coatings.documents.results import to_text
    from coatings.documents.witness_picture import witness_picture
    from coatings.documents.witness_result import witness_csv, witness_result
    from coatings.witness import default_witness_grid_nm, find_witness, witness_curve

    piece = find_witness(recipe, name)
    wavelength = default_witness_grid_nm(recipe, piece) if grid is None else grid
    found = witness_curve(recipe, piece, wavelength_nm=wavelength)
    files = {} if csv is None else {csv: witness_csv(found).encode()}
    if len(wavelength) > 1:
        folder = shared.folder(recipe.path)
        files[folder / "witness.png"] = witness_picture(recipe, found)
    text = to_text(witness_result(recipe, found, seed=shared.seed))
    shared.deliver(files, text, witness_rows(recipe, found))
    return 0
