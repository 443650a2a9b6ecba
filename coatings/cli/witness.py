"""What the terminal says of a witness piece."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING

import numpy as np

from coatings.cli.words import layers_text, percent, side_label, title

if TYPE_CHECKING:
    from coatings.cli.screen import Row
    from coatings.recipe import Recipe
    from coatings.witness import WitnessCurve


def witness_rows(recipe: Recipe, curve: WitnessCurve) -> Iterator[Row]:
    """The piece, how it is measured, and its extremes."""
    from rich.markup import escape

    piece = curve.witness
    yield "CURVE", title(recipe)
    plate = f"{piece.substrate}, {piece.thickness_mm:g} mm, {piece.back} back"
    seen = f"{piece.quantity} at {piece.angle_deg:g} degrees, {piece.polarization}"
    yield side_label(piece.facet), escape(f"witness {piece.name}: {plate}; {seen}")
    yield "", escape(layers_text(curve.stack))
    values = curve.R if piece.quantity == "R" else curve.T
    low, high = int(np.argmin(values)), int(np.argmax(values))
    nm = curve.wavelength_nm
    back = "back face included" if piece.back == "polished" else "nothing from the ground back"
    yield (
        "",
        f"{piece.quantity} from {percent(float(values[low]))} (at {nm[low]:g} nm) to "
        f"{percent(float(values[high]))} (at {nm[high]:g} nm), {back}",
    )
