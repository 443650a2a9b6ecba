"""Result and table of a witness piece's curve."""

from __future__ import annotations

import csv
from io import StringIO

from coatings.documents.results import Json, evidence, head
from coatings.recipe import Recipe
from coatings.witness import WitnessCurve


def witness_result(recipe: Recipe, curve: WitnessCurve, *, seed: int) -> Json:
    """What the spectrophotometer sees, in the form of a facet's curve; S is zero and there is no phase:
    the back face adds its light without one."""
    count = len(curve.wavelength_nm)
    return {
        **head(recipe, seed=seed),
        "facet": curve.witness.facet,
        "side": "witness",
        "witness": curve.witness.name,
        "model": curve.model,
        "wavelength_nm": curve.wavelength_nm.tolist(),
        "R": curve.R.tolist(),
        "T": curve.T.tolist(),
        "A": curve.A.tolist(),
        "S": [0.0] * count,
        "phase_rad": [None] * count,
        "windows": [],
        "layers": [{"material": layer.material, "nm": layer.nm} for layer in curve.stack],
        **evidence(recipe, {curve.witness.facet: None}),
    }


def witness_csv(curve: WitnessCurve) -> str:
    """R, T and A of a witness piece, one row a wavelength; shares as fractions."""
    out = StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(["witness", "wavelength_nm", "R", "T", "A"])
    for row in zip(curve.wavelength_nm, curve.R, curve.T, curve.A, strict=True):
        writer.writerow([curve.witness.name, *(f"{float(value):.12g}" for value in row)])
    return out.getvalue()
