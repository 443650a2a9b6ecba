"""What the run can deposit: bounds of every layer, of the sum and of the stress; orders of materials."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from itertools import pairwise, product

import numpy as np
from numpy.typing import NDArray

from coatings.facets import FloatArray, IntArray
from coatings.recipe import Facet, FacetName, ProcessErrors, Recipe

WAVES_WITHOUT_LIMIT = (
    1.25  # optical thickness searched where the recipe sets no upper limit, in waves
)
MOST_ORDERS = 96  # orders of materials tried at one layer count; beyond it they are drawn by chance


@dataclass(frozen=True)
class RunLimits:
    """Limits of the searched layers.

    ``thinnest_nm``, ``thickest_nm`` (M,) by film row; ``palette`` film rows that may be deposited;
    ``first``, ``last`` film row or None; ``most_layers``; ``total_nm`` or None; ``decimals`` of an
    ordered thickness; ``stress_MPa`` (M,) with ``stress_room_N_per_m`` = (least, most) sum of
    stress x thickness that base and cap leave to the searched layers, or None.
    """

    palette: tuple[int, ...]
    first: int | None
    last: int | None
    most_layers: int
    thinnest_nm: FloatArray
    thickest_nm: FloatArray
    total_nm: float | None
    decimals: int
    stress_MPa: FloatArray
    stress_room_N_per_m: tuple[float, float] | None

    @property
    def step_nm(self) -> float:
        """Distance of two ordered thicknesses [nm]."""
        return float(10.0**-self.decimals)

    def bounds(self, film: IntArray) -> tuple[FloatArray, FloatArray]:
        """Thinnest and thickest (L,) [nm] of each layer of an order of films."""
        return self.thinnest_nm[film], self.thickest_nm[film]

    def possible(self, film: IntArray) -> bool:
        """Whether any stack in this order of films keeps the total."""
        return self.total_nm is None or float(self.thinnest_nm[film].sum()) <= self.total_nm

    def held(self, nm: FloatArray, *, film: IntArray) -> NDArray[np.bool_]:
        """Which stacks (S, L) keep every limit, within a billionth of a nanometre."""
        low, high = self.bounds(film)
        inside: NDArray[np.bool_] = np.all((nm >= low - 1e-9) & (nm <= high + 1e-9), axis=1)
        for rows, room in self.linear(film):
            inside &= room - nm @ rows >= -1e-9
        return inside

    def linear(self, film: IntArray) -> list[tuple[FloatArray, float]]:
        """Linear limits as (coefficients (L,), room): coefficients . nm <= room."""
        limits: list[tuple[FloatArray, float]] = []
        if self.total_nm is not None:
            limits.append((np.ones(len(film)), self.total_nm))
        if self.stress_room_N_per_m is not None:
            per_nm = self.stress_MPa[film] * 1e-3  # MPa nm = 1e-3 N/m
            least, most = self.stress_room_N_per_m
            limits += [(per_nm, most), (-per_nm, -least)]
        return limits

    def inside(self, nm: FloatArray, *, film: IntArray) -> FloatArray:
        """Starts (S, L) [nm] moved into the bounds and, by thinning all layers alike, under the total."""
        low, high = self.bounds(film)
        moved = np.clip(nm, low, high)
        if self.total_nm is None:
            return moved
        spare = moved - low
        excess = np.maximum(moved.sum(axis=1) - self.total_nm, 0.0)
        share = excess / np.maximum(spare.sum(axis=1), 1e-12)
        shrunk: FloatArray = low + spare * np.maximum(1.0 - share, 0.0)[:, None]
        return shrunk

    def rounded(self, nm: FloatArray, *, film: IntArray) -> FloatArray:
        """Thicknesses (…, L) [nm] on the grid that can be ordered, inside each layer's bounds."""
        low, high = self.bounds(film)
        scale = 10.0**self.decimals
        least, most = np.ceil(low * scale - 1e-9), np.floor(high * scale + 1e-9)
        return np.round(np.clip(np.round(nm * scale), least, most) / scale, max(self.decimals, 0))

    def orders(self, count: int, generator: np.random.Generator) -> Iterator[IntArray]:
        """Orders of films with ``count`` layers, no two neighbours alike, first and last as asked."""
        free = len(self.palette)
        if free * max(free - 1, 1) ** (count - 1) <= 4096:
            every = [order for order in product(self.palette, repeat=count) if self._allowed(order)]
            if len(every) > MOST_ORDERS:
                chosen = generator.choice(len(every), MOST_ORDERS, replace=False)
                every = [every[i] for i in sorted(chosen)]
            yield from (np.array(order, dtype=np.intp) for order in every)
        else:
            yield from self._drawn_orders(count, generator)

    def _allowed(self, order: tuple[int, ...]) -> bool:
        return (
            all(a != b for a, b in pairwise(order))
            and self.first in (None, order[0])
            and self.last in (None, order[-1])
            and self.possible(np.array(order, dtype=np.intp))
        )

    def _drawn_orders(self, count: int, generator: np.random.Generator) -> Iterator[IntArray]:
        seen: set[tuple[int, ...]] = set()
        pairs = [(a, b) for a in self.palette for b in self.palette if a != b]
        for a, b in pairs:  # two films in turn come first: mirrors
            seen.add(tuple(a if i % 2 == 0 else b for i in range(count)))
        for _ in range(20 * MOST_ORDERS):
            if len(seen) >= MOST_ORDERS:
                break
            order = [int(generator.choice(self.palette))]
            while len(order) < count:
                order.append(int(generator.choice([f for f in self.palette if f != order[-1]])))
            seen.add(tuple(order))
        yield from (np.array(o, dtype=np.intp) for o in sorted(seen) if self._allowed(o))


def run_limits(recipe: Recipe, side: FacetName) -> RunLimits:
    """Limits of a facet's run from its recipe; ``side`` is "front" or "rear"."""
    facet = recipe.facets[side]
    process = recipe.process_for(side)
    films = facet.films
    step = 10.0**-process.decimals_nm
    limits = [facet.layer_limits_nm(name) for name in films]
    thinnest = np.array([step if low is None else low for low, _ in limits])
    thickest = np.array(
        [
            _free_thickness_nm(recipe, name) if high is None else high
            for name, (_, high) in zip(films, limits, strict=True)
        ]
    )
    rows = {name: row for row, name in enumerate(films)}
    stress = np.array([process.stress_MPa.get(name, 0.0) for name in films])
    return RunLimits(
        palette=tuple(rows[name] for name in facet.palette or ()),
        first=None if facet.first is None else rows[facet.first],
        last=None if facet.last is None else rows[facet.last],
        most_layers=facet.max_layers or 0,
        thinnest_nm=thinnest,
        thickest_nm=np.maximum(thickest, thinnest),
        total_nm=facet.total_nm,
        decimals=process.decimals_nm,
        stress_MPa=stress,
        stress_room_N_per_m=_stress_room(facet, process),
    )


def _free_thickness_nm(recipe: Recipe, film: str) -> float:
    wavelength = recipe.chip.wavelength_nm
    return (
        WAVES_WITHOUT_LIMIT
        * wavelength
        / float(recipe.material(film).nk(np.array([wavelength])).real[0])
    )


def _stress_room(facet: Facet, process: ProcessErrors) -> tuple[float, float] | None:
    if process.stress_max_N_per_m is None:
        return None
    fixed = sum(
        process.stress_MPa.get(layer.material, 0.0) * layer.nm * 1e-3
        for part in (facet.base, facet.cap)
        for layer in part
    )
    return -process.stress_max_N_per_m - fixed, process.stress_max_N_per_m - fixed
