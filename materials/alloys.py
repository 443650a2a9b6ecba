"""Alloys by composition: which model, over which compositions, how near to the gap.

A model of the index below the gap diverges at the gap or has no meaning there. Each alloy
therefore ends at a photon energy ``margin_ev`` below its gap; beyond is an error, not a guess.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from materials.curves import Curve
from materials.errors import CompositionError
from materials.info import Info
from materials.material import Material
from materials.models import (
    EV_UM,
    IndexLaw,
    Modelled,
    Wave,
    algaas_gap_ev,
    algainas_gap_ev,
    algan,
    algan_gap_ev,
    broberg,
    gehrsitz,
    ingaasp_arsenic,
    ingaasp_gap_ev,
    mondry,
    skauli,
)

#: Where the model's paper does not state a temperature.
ROOM_C = 23.0

Gap = Callable[[float, float], float]
Law = Callable[[float, float], IndexLaw]


@dataclass(frozen=True)
class Model:
    """An index law by composition and temperature, its gap, and where it ends."""

    law: Law
    gap_ev: Gap
    margin_ev: float
    longest_nm: float
    shortest_nm: float = 0.0


def _gehrsitz(x: float, celsius: float) -> IndexLaw:
    return lambda um: gehrsitz(um, x=x, celsius=celsius)


def _broberg(gap_um: float, celsius: float) -> IndexLaw:
    y = ingaasp_arsenic(EV_UM / gap_um)
    return lambda um: broberg(um, y=y)


def _broberg_ingaas(_: float, celsius: float) -> IndexLaw:
    return lambda um: broberg(um, y=1.0)


def _mondry(x: float, celsius: float) -> IndexLaw:
    return lambda um: mondry(um, x=x)


def _mondry_alinas(_: float, celsius: float) -> IndexLaw:
    return lambda um: mondry(um, x=1.0)


def _algan(x: float, celsius: float) -> IndexLaw:
    return lambda um: algan(um, x=x)


MODELS: dict[str, Model] = {
    "gehrsitz": Model(_gehrsitz, algaas_gap_ev, 0.01, 10000.0),
    "broberg": Model(_broberg, lambda gap_um, _: EV_UM / gap_um, 0.03, 2500.0, 950.0),
    "broberg-ingaas": Model(_broberg_ingaas, lambda *_: ingaasp_gap_ev(1.0), 0.03, 2500.0),
    "mondry-alinas": Model(_mondry_alinas, lambda *_: algainas_gap_ev(1.0), 0.03, 2000.0),
    "mondry": Model(_mondry, lambda x, _: algainas_gap_ev(x), 0.03, 2000.0),
    "algan": Model(_algan, lambda x, _: algan_gap_ev(x), 0.05, 5000.0, 220.0),
}


def _skauli(celsius: float) -> Curve:
    def law(um: Wave) -> Wave:
        return skauli(um, celsius=celsius)

    return Modelled(law)


#: Laws of the index over temperature, for entries that are not alloys.
THERMAL: dict[str, Callable[[float], Curve]] = {"skauli": _skauli}


def alloy(info: Info, model: str, composition: float) -> Material:
    """Material of an alloy entry at a composition that its model covers."""
    return _material(info, MODELS[model], composition, info.temperature_C)


def fixed(info: Info, model: str) -> Material:
    """Material of an entry that is one composition of a model."""
    return _material(info, MODELS[model], 0.0, info.temperature_C)


def _material(info: Info, model: Model, composition: float, stated_C: float | None) -> Material:
    celsius = ROOM_C if stated_C is None else stated_C
    gap = model.gap_ev(composition, celsius)
    nearest_nm = float(np.ceil(1e3 * EV_UM / (gap - model.margin_ev)))
    named = replace(
        info,
        range_nm=(max(nearest_nm, model.shortest_nm), model.longest_nm),
        temperature_C=stated_C,
    )
    return Material(
        named,
        Modelled(model.law(composition, celsius)),
        (lambda t: _material(info, model, composition, t)) if info.thermal_C else None,
        f"below the gap at {1e3 * EV_UM / gap:.0f} nm, less a margin of {model.margin_ev:g} eV",
    )


def composition_of(name: str, info: Info) -> float:
    """The 0.30 of 'AlGaAs:0.30', checked against the compositions of the entry."""
    stem, _, text = name.partition(":")
    low, high = info.composition or (0.0, 1.0)
    try:
        composition = float(text)
    except ValueError:
        raise CompositionError(
            f"{name!r} needs a composition, for example {stem}:{0.5 * (low + high):.2f}, the "
            f"number being {info.composition_meaning}"
        ) from None
    if not low <= composition <= high:
        raise CompositionError(
            f"{name}: {info.composition_meaning} must lie between {low:g} and {high:g}"
        )
    return composition
