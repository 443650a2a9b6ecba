"""What the run can deposit: bounds of every layer, of the sum and of the stress; orders of materials."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import linprog

from coatings.design.orders import Orders, rows
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
        """Whether any stack in this order of films keeps every limit."""
        low, high = self.bounds(film)
        if bool(np.any(low > high)) or (
            self.total_nm is not None and float(low.sum()) > self.total_nm + 1e-9
        ):
            return False
        return self.stress_room_N_per_m is None or self.middle(film) is not None

    def middle(self, film: IntArray) -> FloatArray | None:
        """A stack (L,) [nm] as far inside all limits as there is one, None where there is none.

        Farthest in shares of each layer's range and of each linear limit's: a linear programme.
        """
        low, high = self.bounds(film)
        count, span = len(film), high - low
        limits = self.linear(film)
        matrix = [np.append(row, np.abs(row) @ span) for row, _ in limits]
        cap = [room for _, room in limits]
        found = linprog(
            np.append(np.zeros(count), -1.0),
            A_ub=np.vstack(
                [
                    *matrix,
                    np.column_stack([np.eye(count), span / 2.0]),
                    np.column_stack([-np.eye(count), span / 2.0]),
                ]
            ),
            b_ub=np.concatenate([cap, high, -low]),
            bounds=[*zip(low, high, strict=True), (0.0, 1.0)],
        )
        if not found.success:
            return None
        stack: FloatArray = np.clip(found.x[:count], low, high)
        return stack

    def held(self, nm: FloatArray, *, film: IntArray) -> NDArray[np.bool_]:
        """Which stacks (S, L) keep every limit, within a billionth of a nanometre."""
        low, high = self.bounds(film)
        inside: NDArray[np.bool_] = np.all((nm >= low - 1e-9) & (nm <= high + 1e-9), axis=1)
        for row, room in self.linear(film):
            inside &= room - nm @ row >= -1e-9
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
        """Starts (S, L) [nm] moved into the bounds and, by thinning all layers alike, under the total;
        then, where the stress asks for it, towards the `middle` of what is allowed."""
        low, high = self.bounds(film)
        moved = np.clip(nm, low, high)
        if self.total_nm is not None:
            spare = moved - low
            excess = np.maximum(moved.sum(axis=1) - self.total_nm, 0.0)
            share = excess / np.maximum(spare.sum(axis=1), 1e-12)
            moved = low + spare * np.maximum(1.0 - share, 0.0)[:, None]
        if self.stress_room_N_per_m is None or bool(self.held(moved, film=film).all()):
            return moved
        return self._towards_middle(moved, film)

    def _towards_middle(self, nm: FloatArray, film: IntArray) -> FloatArray:
        middle = self.middle(film)
        if middle is None:
            return nm
        share = np.ones(len(nm))
        for row, room in self.linear(film):
            outward = (nm - middle) @ row
            spare = max(room - float(middle @ row), 0.0)
            over = outward > spare
            share[over] = np.minimum(share[over], spare / outward[over])
        moved: FloatArray = middle + share[:, None] * (nm - middle)
        return moved

    def rounded(self, nm: FloatArray, *, film: IntArray) -> FloatArray:
        """Thicknesses (…, L) [nm] on the grid that can be ordered, inside each layer's bounds."""
        low, high = self.bounds(film)
        scale = 10.0**self.decimals
        least, most = np.ceil(low * scale - 1e-9), np.floor(high * scale + 1e-9)
        return np.round(np.clip(np.round(nm * scale), least, most) / scale, max(self.decimals, 0))

    def orders(self, count: int, generator: np.random.Generator) -> list[IntArray]:
        """Orders of films with ``count`` layers that some stack can hold: all, or `MOST_ORDERS`."""
        allowed = Orders(self.palette, count, self.first, self.last)
        drawn = [rows(order) for order in allowed.some(MOST_ORDERS, generator)]
        return [film for film in drawn if self.possible(film)]


def run_limits(recipe: Recipe, side: FacetName) -> RunLimits:
    """Limits of a facet's run from its recipe; ``side`` is "front" or "rear"."""
    facet = recipe.facets[side]
    process = recipe.process_for(side)
    films = facet.films
    step = 10.0**-process.decimals_nm
    limits = [facet.layer_limits_nm(name) for name in films]
    # a layer of nothing is no layer: the thinnest is one step of what can be ordered
    thinnest = np.array([step if low is None else max(low, step) for low, _ in limits])
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
        thickest_nm=thickest,
        total_nm=facet.total_nm,
        decimals=process.decimals_nm,
        stress_MPa=stress,
        stress_room_N_per_m=_stress_room(facet, process),
    )


def _free_thickness_nm(recipe: Recipe, film: str) -> float:
    """Thickness beyond which nothing new is expected; the modulus of the index, at least 1, keeps a
    metal or an index near 0 from making it absurd."""
    wavelength = recipe.chip.wavelength_nm
    index = complex(recipe.material(film).nk(np.array([wavelength]))[0])
    return WAVES_WITHOUT_LIMIT * wavelength / max(abs(index), 1.0)


def _stress_room(facet: Facet, process: ProcessErrors) -> tuple[float, float] | None:
    if process.stress_max_N_per_m is None:
        return None
    fixed = sum(
        process.stress_MPa.get(layer.material, 0.0) * layer.nm * 1e-3
        for part in (facet.base, facet.cap)
        for layer in part
    )
    return -process.stress_max_N_per_m - fixed, process.stress_max_N_per_m - fixed
