"""Result of ``trade`` as plain data."""

from __future__ import annotations

import numpy as np

from coatings.documents.results import Json, evidence, head
from coatings.facets import FloatArray
from coatings.recipe import FacetName, Recipe
from coatings.trade import Sweep
from coatings.trading import ProductTrade


def trade_result(recipe: Recipe, found: ProductTrade, *, seed: int) -> Json:
    """Everything that ``trade`` found: columns over front R, the best, the laser as it is now, the sweeps."""
    trade = found.trade
    body = trade.to_json_dict()
    if isinstance(body["laser"], dict):
        body["laser"].setdefault("external", None)
    sides: dict[FacetName, None] = {s: None for s, f in found.facets.items() if f.by_layers}
    return {
        **head(recipe, seed=seed),
        **body,
        "locking_margin_per_cm": listed(trade.columns.locking_margin_per_cm),
        "ripple_dB": listed(trade.columns.ripple_dB),
        "model": trade.columns.model.value,
        "drift": [
            {
                "factor": drift.factor,
                "R_front": drift.R_front,
                "change_W": drift.change_W,
                "threshold_A": finite(drift.threshold_A),
                "missed": list(drift.missed),
            }
            for drift in trade.drift
        ],
        "watts_per_ln_R": trade.watts_per_ln_R,
        "window": trade.window,
        "facets": {s: {"R": float(f.light.R), "by": f.says} for s, f in found.facets.items()},
        "over_length": _sweep(found.lengths),
        "over_current": _sweep(found.currents),
        **evidence(recipe, sides, *trade.notes),
    }


def _sweep(sweep: Sweep | None) -> Json | None:
    if sweep is None:
        return None
    return {
        sweep.quantity: sweep.values.tolist(),
        **{
            name: [getattr(best, name) for best in sweep.best]
            for name in ("R_front", "R_low", "R_high", "front_W", "threshold_A", "limited_by")
        },
        "wall_plug_efficiency": listed(sweep.wall_plug_efficiency),
        "notes": list(sweep.notes),
    }


def listed(values: FloatArray | None) -> list[float | None] | None:
    """A row of numbers; None for one that is not finite, or for no row."""
    return None if values is None else [finite(value) for value in values.tolist()]


def finite(value: float) -> float | None:
    """The number, or None where it is not finite."""
    return value if np.isfinite(value) else None
