"""The trade of a recipe: what its front reflectivity should be, from chip, rear, limits and drive current."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from coatings.counted import CountedFacet, bare_light, counted_facet, needed_facet
from coatings.errors import InputError, Problem
from coatings.laser import Amplifier, External, FacetLight, LaserChip, Limits
from coatings.product import laser_chip
from coatings.recipe import FacetName, Recipe
from coatings.trade import Sweep, Trade, TradeCase, lossy_front, sweep_current, sweep_length, trade

Three = tuple[float, float, float]

MOST_STEPS = 50
_LOWEST_R, _HIGHEST_R = 1e-5, 0.9
_MUCH_LOST = 0.05


@dataclass(frozen=True)
class ProductTrade:
    """The trade with the facets that went into it (no front where the trade is to find it), and the best
    front over length and current where they were asked for."""

    trade: Trade
    facets: Mapping[FacetName, CountedFacet]
    lengths: Sweep | None
    currents: Sweep | None


def product_trade(
    recipe: Recipe, *, length_um: Three | None = None, current_A: Three | None = None
) -> ProductTrade:
    """Front reflectivity against everything else; ``length_um`` and ``current_A`` as (from, to, step).

    Raises InputError for a recipe without [laser] or drive current, or a range that is none.
    """
    lengths = None if length_um is None else steps("--length", length_um, unit="um")
    currents = None if current_A is None else steps("--current", current_A, unit="A")
    front, rear = counted_facet(recipe, "front"), needed_facet(recipe, "rear")
    case = trade_case(recipe, front, rear)
    found = trade(
        case,
        present=None if front is None else front.light,
        R_bare=float(bare_light(recipe, outside=recipe.front.outside).R),
        R_range=_range(front),
    )
    facets: dict[FacetName, CountedFacet] = {} if front is None else {"front": front}
    return ProductTrade(
        found,
        {**facets, "rear": rear},
        None if lengths is None else sweep_length(case, length_um=lengths),
        None if currents is None else sweep_current(case, current_A=currents),
    )


def trade_case(recipe: Recipe, front: CountedFacet | None, rear: CountedFacet) -> TradeCase:
    """What stays the same while the front's reflectance is varied; its coating's losses stay too."""
    chip = _chip(recipe)
    lost = 0.0 if front is None else float(front.light.A) + float(front.light.S)
    return TradeCase(
        chip=chip,
        rear=rear.light,
        limits=_limits(recipe),
        front_of=FacetLight.lossless
        if front is None or lost <= 0.0
        else lossy_front(
            absorbed=max(float(front.light.A), 0.0), scattered=max(float(front.light.S), 0.0)
        ),
        external=_external(recipe),
        amplifier=_amplifier(recipe, chip),
    )


def steps(option: str, given: Three, *, unit: str) -> NDArray[np.float64]:
    """Values from, to, step of an option, both ends included; InputError in the words of the option."""
    start, stop, step = given
    if not (0.0 < start < stop < np.inf and 0.0 < step < np.inf):
        what = f"got {start:g} {stop:g} {step:g}; give FROM < TO and a STEP above 0, in {unit}"
        raise InputError(Problem(option, what))
    count = np.floor((stop - start) / step + 1e-9) + 1
    if count > MOST_STEPS:
        raise InputError(Problem(option, f"asks for {count:.6g} values; give at most {MOST_STEPS}"))
    values = np.asarray(start + step * np.arange(int(count)), dtype=np.float64)
    return values if values[-1] > stop - 1e-6 * step else np.append(values, stop)


def _range(front: CountedFacet | None) -> tuple[float, float] | None:
    """Ends of the axis where a lossy coating leaves no room for the usual ones."""
    lost = 0.0 if front is None else float(front.light.A) + float(front.light.S)
    if front is None or lost <= _MUCH_LOST:
        return None
    present = float(front.light.R)
    low = min(_LOWEST_R, present) if present > 0.0 else _LOWEST_R
    return low, max(_HIGHEST_R * (1.0 - lost), present)


def _chip(recipe: Recipe) -> LaserChip:
    chip = laser_chip(recipe)
    if recipe.laser is None:
        return chip
    peak = {name: getattr(recipe.laser, name) for name in ("gain_peak_nm", "gain_width_nm")}
    return replace(chip, **peak)


def _limits(recipe: Recipe) -> Limits:
    laser = recipe.laser
    if laser is None:
        return Limits()
    return Limits(
        threshold_max_A=laser.threshold_max_A,
        rear_min_W=laser.rear_min_W,
        facet_limit_MW_per_cm2=laser.facet_limit_MW_per_cm2,
    )


def _external(recipe: Recipe) -> External | None:
    given = recipe.external
    if given is None:
        return None
    return External(
        reflectance=given.reflectance,
        coupling=given.coupling,
        wavelength_nm=given.wavelength_nm,
        band_nm=given.band_nm,
    )


def _amplifier(recipe: Recipe, chip: LaserChip) -> Amplifier | None:
    if recipe.amplifier is None:
        return None
    return Amplifier(
        wavelength_nm=chip.wavelength_nm,
        length_um=chip.length_um,
        index=1.0,  # where the modes lie plays no part in how deep their ripple is
        group_index=1.0,
        gain_dB=recipe.amplifier.gain_dB,
        ripple_dB=recipe.amplifier.ripple_dB,
    )
