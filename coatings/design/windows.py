"""A facet's windows as constraints on the spectrum.

Every window becomes points (one wavelength, one incident index each) with bounds on the reflectance
and, where asked, on the absorptance. A *constraint* is one finite bound at one point; its slack is the
distance inside the bound in reflectance, negative outside. The margin of a stack is its least slack.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from math import ceil

import numpy as np
from numpy.typing import NDArray

from coatings.facets import FloatArray, IntArray, light_on, window_views
from coatings.optics import Scene
from coatings.optics.light import Light, PlaneLight, joined
from coatings.optics.nearby import near, rough
from coatings.recipe import FacetName, Recipe, Window

GRID_STEP_NM = 1.0
ROUNDING = 1e-9  # an absorptance below this is rounding, or the error of an integral
LEAST_WIDTH = 1e-6  # reflectance; finer than any facet is made or measured


def window_grid_nm(band_nm: tuple[float, float], *, step_nm: float = GRID_STEP_NM) -> FloatArray:
    """Wavelengths [nm] over a band, both ends included, no coarser than ``step_nm``."""
    low, high = band_nm
    steps = max(1, ceil((high - low) / step_nm - 1e-9))
    return np.linspace(low, high, steps + 1) if high > low else np.array([low])


@dataclass(frozen=True)
class Constraints:
    """Finite bounds, flattened: slack = sign * (bound - quantity at the point).

    ``point`` (Q,) index into the scene; ``sign`` (Q,) +1 for an upper and -1 for a lower bound;
    ``bound`` (Q,); ``absorption`` (Q,) true where the bound is on A instead of R.
    """

    point: IntArray
    sign: FloatArray
    bound: FloatArray
    absorption: NDArray[np.bool_]

    @classmethod
    def of(cls, low: FloatArray, high: FloatArray, absorption_high: FloatArray) -> Constraints:
        """Constraints from bounds (P,) each; a lower bound at or below 0 and an upper one at or above 1
        can't be missed and make none."""
        groups = [
            (np.flatnonzero(low > 0.0), -1.0, low, False),
            (np.flatnonzero(high < 1.0), 1.0, high, False),
            (np.flatnonzero(absorption_high < 1.0), 1.0, absorption_high, True),
        ]
        return cls(
            point=np.concatenate([where for where, *_ in groups]),
            sign=np.concatenate([np.full(len(where), sign) for where, sign, _, _ in groups]),
            bound=np.concatenate([bound[where] for where, _, bound, _ in groups]),
            absorption=np.concatenate([np.full(len(where), a) for where, _, _, a in groups]),
        )

    def slack(self, R: FloatArray, A: FloatArray | None) -> FloatArray:
        """Slack (S, Q) from R and, when a bound on absorption is among them, A (S, P)."""
        quantity = R[:, self.point]
        if A is not None and self.absorption.any():
            absorbed = np.where(np.abs(A) < ROUNDING, 0.0, A)
            quantity = np.where(self.absorption, absorbed[:, self.point], quantity)
        return self.sign * (self.bound - quantity)

    @property
    def on_absorption(self) -> bool:
        """Whether any bound is on the absorptance."""
        return bool(self.absorption.any())


@dataclass(frozen=True)
class Goal:
    """What a facet must do: a light at P points and the bounds that hold there.

    ``low``, ``high``, ``absorption_high`` (P,) reflectance and absorptance bounds; ``window`` (P,) the
    number of the window that a point belongs to.
    """

    light: Light
    films: tuple[str, ...]
    low: FloatArray
    high: FloatArray
    absorption_high: FloatArray
    window: IntArray
    constraints: Constraints

    @property
    def scene(self) -> Scene:
        """The plane wave's scene at the same points."""
        return self.light.plane

    def near(self, nm: FloatArray, *, film: IntArray) -> Goal:
        """The same goal with a light that is quick near one stack: ``nm`` (L,) [nm], ``film`` (L,) rows, every
        layer counted."""
        return replace(self, light=near(self.light, nm, film=film))

    @property
    def rough(self) -> Goal:
        """The same goal with a light that is quick for many stacks at once."""
        return replace(self, light=rough(self.light))

    def at(self, points: IntArray) -> Goal:
        """The same goal on a selection of its points, in the order given."""
        low, high = self.low[points], self.high[points]
        absorption_high = self.absorption_high[points]
        return Goal(
            light=self.light.at(points),
            films=self.films,
            low=low,
            high=high,
            absorption_high=absorption_high,
            window=self.window[points],
            constraints=Constraints.of(low, high, absorption_high),
        )

    def slack(
        self,
        nm: FloatArray,
        *,
        film: IntArray,
        film_shift: FloatArray | None = None,
        incident_shift: FloatArray | None = None,
    ) -> FloatArray:
        """Slack (S, Q) of stacks with every layer given: ``nm`` (S, L) [nm], ``film`` (L,) rows.

        ``film_shift`` (S, M) and ``incident_shift`` (S,) are added to the indices.
        """
        shifts = {"film_shift": film_shift, "incident_shift": incident_shift}
        if not self.constraints.on_absorption:
            R = self.light.reflectance(nm, film=film, **shifts)
            return self.constraints.slack(R, None)
        return self.constraints.slack(*self.light.absorbed(nm, film=film, **shifts))

    def thinned(self, most: int) -> Goal:
        """At most ``most`` points a window, evenly spread, ends kept."""
        keep = [
            members[np.unique(np.linspace(0, len(members) - 1, most).round().astype(int))]
            for members in self.window_members()
        ]
        return self.at(np.concatenate(keep))

    def window_members(self) -> list[IntArray]:
        """Point numbers of each window."""
        return [np.flatnonzero(self.window == number) for number in np.unique(self.window)]

    @property
    def bounded(self) -> NDArray[np.bool_]:
        """Where (P,) the reflectance is bounded at all; a window may bound the absorptance alone."""
        bounded: NDArray[np.bool_] = (self.low > 0.0) | (self.high < 1.0)
        return bounded

    @property
    def centre(self) -> FloatArray:
        """Reflectance (P,) in the middle of two bounds; 0 under a ceiling alone, 1 above a floor alone."""
        floored, capped = self.low > 0.0, self.high < 1.0
        middle = 0.5 * (self.low + self.high)
        return np.where(
            floored & capped, middle, np.where(capped, 0.0, np.where(floored, 1.0, middle))
        )

    @property
    def width(self) -> FloatArray:
        """Distance (P,) from the centre to the nearest bound: the scale of a miss. A bound that only the
        centre itself meets (at most 0, at least 1) has the scale `LEAST_WIDTH`."""
        floored, capped = self.low > 0.0, self.high < 1.0
        half = 0.5 * (self.high - self.low)
        one_sided = np.where(capped, self.high, np.where(floored, 1.0 - self.low, 1.0))
        return np.maximum(np.where(floored & capped, half, one_sided), LEAST_WIDTH)


def facet_goal(recipe: Recipe, side: FacetName, *, plane: bool = False) -> Goal:
    """Goal of a facet over all its windows, on the full grid; both polarizations of a window that asks for
    them.

    Parameters: ``recipe``; ``side`` "front" or "rear"; ``plane`` for the plane wave even where the recipe has a
    guide. The facet must have at least one window.
    """
    facet = recipe.facets[side]
    lights, counts, numbers = [], [], []
    for number, window in enumerate(facet.windows):
        grid = window_grid_nm(window.band_nm)
        for view in window_views(window, plane=plane):
            lights.append(light_on(recipe, facet, wavelength_nm=grid, view=view))
            counts.append(len(grid))
            numbers.append(number)
    limits = np.array([bounds(facet.windows[number]) for number in numbers])
    low, high, absorption_high = np.repeat(limits, counts, axis=0).T.copy()
    return Goal(
        light=_in_one(joined(lights)),
        films=facet.films,
        low=low,
        high=high,
        absorption_high=absorption_high,
        window=np.repeat(np.array(numbers, dtype=np.intp), counts),
        constraints=Constraints.of(low, high, absorption_high),
    )


def _in_one(light: Light) -> Light:
    """Plane waves of several windows in one scene: one call of the kernel for all of them."""
    return PlaneLight(light.plane) if light.model == "plane" else light


def bounds(window: Window) -> tuple[float, float, float]:
    """(low, high, absorption_high) of a window, open ends as 0, 1 and 1."""
    low = 0.0 if window.low is None else max(window.low, 0.0)
    high = 1.0 if window.high is None else min(window.high, 1.0)
    absorption = 1.0 if window.absorption_at_most is None else window.absorption_at_most
    return low, high, absorption
