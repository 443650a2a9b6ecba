"""Result of ``field`` as plain data."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

import numpy as np

from coatings.documents.results import Json, evidence, head
from coatings.field import AtWork, FacetField
from coatings.recipe import FacetName, Recipe


def field_result(recipe: Recipe, fields: Mapping[FacetName, FacetField], *, seed: int) -> Json:
    """Everything that ``field`` found, by side.

    E2 is relative to the wave that travels in the chip towards the facet; shares are of its power.
    """
    parts: Json = {side: _facet(field) for side, field in fields.items()}
    return {**head(recipe, seed=seed), **parts, **evidence(recipe, dict.fromkeys(fields))}


def _facet(field: FacetField) -> Json:
    wave, profile = field.wave, field.profile
    work = field.work
    result: Json = {
        "wavelength_nm": field.wavelength_nm,
        "R": float(wave.R[0]),
        "T": float(wave.T[0]),
        "A": float(wave.A[0]),
        "arriving_per_front_W": field.arriving_per_front_W,
        "layers": [_layer(field, j) for j in range(len(field.stack))],
        "interfaces": [_interface(field, j) for j in range(len(field.stack) + 1)],
        "peak_E2_by_material": _peaks(field),
        "profile": {
            "z_nm": profile.z_nm.tolist(),
            "layer": profile.medium.tolist(),
            "E2": profile.E2[0].tolist(),
            "absorption_per_nm": profile.absorption_per_nm[0].tolist(),
        },
        "work": None if work is None else _work(work),
    }
    return result


def _layer(field: FacetField, j: int) -> Json:
    wave, layer, work = field.wave, field.stack.layers[j], field.work
    per_front = field.arriving_per_front_W
    share = float(wave.layer_absorbed[0, j])
    found: dict[str, Any] = {
        "material": layer.material,
        "nm": layer.nm,
        "absorbed": share,
        "absorbed_per_front_W": None if per_front is None else share * per_front,
        "peak_E2": float(wave.layer_peak_E2[0, j]),
        "peak_E2_per_front_W": None
        if per_front is None
        else float(wave.layer_peak_E2[0, j]) * per_front,
        "peak_nm": float(wave.layer_peak_nm[0, j]),
        "absorbed_W": None if work is None else float(work.absorbed_W[j]),
        "peak_V_per_m": None
        if work is None or work.peak_V_per_m is None
        else float(work.peak_V_per_m[j]),
    }
    return found


def _interface(field: FacetField, j: int) -> Json:
    wave = field.wave
    return {
        "z_nm": float(wave.face_nm[j]),
        "E2": [float(v) for v in wave.face_E2[0, j]],
        "absorption_per_nm": [float(v) for v in wave.face_absorption_per_nm[0, j]],
    }


def _peaks(field: FacetField) -> dict[str, float]:
    materials = np.array(field.stack.materials)
    return {
        name: float(field.wave.layer_peak_E2[0, materials == name].max())
        for name in dict.fromkeys(field.stack.materials)
    }


def _work(work: AtWork) -> Json:
    return {
        "drive_A": work.drive_A,
        "arriving_W": work.arriving_W,
        "absorbed_W": float(work.absorbed_W.sum()),
        "face_V_per_m": work.face_V_per_m,
    }
