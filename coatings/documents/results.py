"""Results as plain data for ``--json`` and ``result.json``: pure functions of what was computed."""

from __future__ import annotations

import json
from collections.abc import Mapping, Sequence
from typing import TYPE_CHECKING, Any

from coatings import __version__
from coatings.documents.notes import material_sources, result_notes

if TYPE_CHECKING:  # searching and laser models are slow to import, and curve needs neither
    from coatings.curve import FacetCurve
    from coatings.design.plan import FacetPlan
    from coatings.design.search import Found
    from coatings.facets import FloatArray
    from coatings.guide import GuideFigures
    from coatings.laser import Judgement, LaserEstimate
    from coatings.recipe import FacetName, Recipe
    from coatings.stack import Stack

TOOL = "facetwright"

Json = dict[str, Any]


def head(recipe: Recipe, *, seed: int) -> Json:
    """What every result carries: tool, version, hash of the recipe's bytes, seed."""
    return {
        "tool": TOOL,
        "version": __version__,
        "recipe_sha256": recipe.sha256,
        "seed": seed,
    }


def to_text(result: Json) -> str:
    """A result as JSON text; non-finite numbers are refused, not written."""
    return json.dumps(result, indent=1, allow_nan=False, ensure_ascii=False) + "\n"


def curve_result(
    recipe: Recipe,
    curves: Mapping[FacetName, FacetCurve],
    guide: GuideFigures | None,
    *,
    seed: int,
    flat: bool,
) -> Json:
    """Result of ``curve``: one facet ``flat``, or both by side; the guide's table where there is one."""
    parts: Json = {side: _curve(curve) for side, curve in curves.items()}
    body: Json = next(iter(parts.values())) if flat else parts
    if guide is not None:
        body["guide"] = guide_table(guide)
    return {**head(recipe, seed=seed), **body, **evidence(recipe, dict.fromkeys(curves))}


def evidence(
    recipe: Recipe, stacks: Mapping[FacetName, Stack | None], *more: str
) -> dict[str, Json | list[Any]]:
    """What a result rests on: notes, ``more`` of them by the models, and the sources of its materials."""
    return {
        "notes": [*result_notes(recipe, stacks), *more],
        "materials": material_sources(recipe, stacks),
    }


def guide_table(guide: GuideFigures) -> Json:
    """Figures of the chip's mode."""
    return {
        "polarization": guide.polarization,
        "wavelength_nm": guide.wavelength_nm,
        "effective_index": guide.effective_index,
        "group_index": guide.group_index,
        "modal_loss_per_cm": guide.modal_loss_per_cm,
        "confinement": [
            {"layer": layer, "share": float(share)}
            for layer, share in zip(guide.layers, guide.confinement, strict=True)
        ],
        "near_field_height_um": guide.near_field_height_um,
        "far_field_fwhm_deg": guide.far_field_fwhm_deg,
    }


def _curve(curve: FacetCurve) -> Json:
    spectrum = curve.spectrum
    return {
        "facet": curve.side,
        "side": "chip",
        "model": curve.model,
        "wavelength_nm": _plain(spectrum.wavelength_nm),
        "R": _plain(spectrum.R),
        "T": _plain(spectrum.T),
        "A": _plain(spectrum.A),
        "S": _plain(spectrum.S),
        "phase_rad": _plain(spectrum.phase_rad),
        "R_at_wavelength": {
            curve.model: float(curve.at_work.R[0]),
            **{name: float(other.R[0]) for name, other in curve.others.items()},
        },
        "windows": [
            {"band_nm": list(w.window.band_nm), "margin": w.margin, "worst_nm": w.worst_nm}
            for w in curve.windows
        ],
    }


def plan_result(
    recipe: Recipe,
    plans: Mapping[FacetName, FacetPlan],
    laser: LaserEstimate | None,
    *,
    limits: Sequence[Judgement],
    reflectance: Mapping[FacetName, list[float]],
    seed: int,
) -> Json:
    """Result of ``plan``.

    ``limits`` of the product as judged; ``reflectance`` R at the wavelength of operation of each listed
    stack.
    """
    result = head(recipe, seed=seed)
    for side, plan in plans.items():
        result[side] = _facet_plan(recipe, plan, reflectance[side])
    stacks = {side: plan.stack(plan.taken) for side, plan in plans.items()}
    said = () if laser is None else laser.notes
    return {
        **result,
        # No reflector outside is counted: a recipe with [external] is refused by this version.
        "laser": None if laser is None else {**laser.to_json_dict(), "external": None},
        "limits": [_limit(judgement) for judgement in limits],
        "cut_short": any(plan.cut_short for plan in plans.values()),
        **evidence(recipe, stacks, *said),
    }


def _limit(judgement: Judgement) -> Json:
    return {
        "name": judgement.name,
        "limit": judgement.limit,
        "value": judgement.value,
        "kept": judgement.kept,
    }


def _facet_plan(recipe: Recipe, plan: FacetPlan, reflectance: list[float]) -> Json:
    facet = recipe.facets[plan.side]
    return {
        "stacks": [_stack(plan, f, R) for f, R in zip(plan.stacks, reflectance, strict=True)],
        "chosen": plan.chosen,
        "searched": plan.searched,
        "base": [{"material": e.material, "nm": e.nm} for e in facet.base],
        "cap": [{"material": e.material, "nm": e.nm} for e in facet.cap],
        "assumed": list(recipe.process_for(plan.side).assumed),
    }


def _stack(plan: FacetPlan, found: Found, R: float) -> Json:
    stack = plan.stack(found)
    return {
        "layers": [{"material": layer.material, "nm": layer.nm} for layer in stack],
        "meets": found.margin >= 0.0,
        "margin": found.margin,
        "yield": found.yields.chips,
        "yield_low": found.yields.low,
        "yield_high": found.yields.high,
        "run_yield": found.yields.runs,
        "total_nm": stack.total_nm,
        "R": R,
    }


def _plain(values: FloatArray) -> list[float]:
    return [float(value) for value in values]
