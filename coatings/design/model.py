"""A facet as the search sees it: searched layers between fixed ones, judged against a goal."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from coatings.design.windows import Goal
from coatings.facets import FloatArray, IntArray, film_rows
from coatings.recipe import Facet


@dataclass(frozen=True)
class Frame:
    """The layers that are always there: film rows and thicknesses [nm] of base and cap, chip outward."""

    base_film: IntArray
    base_nm: FloatArray
    cap_film: IntArray
    cap_nm: FloatArray

    def film(self, film: IntArray) -> IntArray:
        """Film rows (L,) of the searched layers with base and cap around them."""
        return np.concatenate([self.base_film, film, self.cap_film]).astype(np.intp)

    def nm(self, nm: FloatArray) -> FloatArray:
        """Thicknesses (S, L) [nm] of the searched layers with base and cap around them."""
        rows = len(nm)
        return np.ascontiguousarray(
            np.hstack([np.tile(self.base_nm, (rows, 1)), nm, np.tile(self.cap_nm, (rows, 1))])
        )

    @property
    def searched(self) -> slice:
        """Where the searched layers stand among all, given the frame around them."""
        return slice(len(self.base_nm), -len(self.cap_nm) or None)


@dataclass(frozen=True)
class FacetModel:
    """Slacks of searched layers and their exact derivatives, many stacks at once.

    Stacks of one call share their film rows ``film`` (L,); ``nm`` is (S, L).
    """

    goal: Goal
    frame: Frame

    def with_goal(self, goal: Goal) -> FacetModel:
        """The same facet judged elsewhere."""
        return replace(self, goal=goal)

    def near(self, nm: FloatArray, *, film: IntArray) -> FacetModel:
        """The same facet, quick near one stack of searched layers (L,) [nm]; itself for a plane wave."""
        rows = self.frame.film(film)
        return self.with_goal(self.goal.near(self.frame.nm(nm[None])[0], film=rows))

    def slack(self, nm: FloatArray, *, film: IntArray) -> FloatArray:
        """Slack (S, Q) of every constraint."""
        return self.goal.slack(self.frame.nm(nm), film=self.frame.film(film))

    def margin(self, nm: FloatArray, *, film: IntArray) -> FloatArray:
        """Least slack (S,) of each stack."""
        slack = self.slack(nm, film=film)
        least: FloatArray = slack.min(axis=1)
        return least

    def reflectance(self, nm: FloatArray, *, film: IntArray) -> tuple[FloatArray, FloatArray]:
        """R (S, P) and its derivative (S, P, L) with respect to the searched thicknesses [1/nm]."""
        return self._gradient(nm, film, "R")

    def absorptance(self, nm: FloatArray, *, film: IntArray) -> tuple[FloatArray, FloatArray]:
        """A (S, P) and its derivative (S, P, L) with respect to the searched thicknesses [1/nm]."""
        return self._gradient(nm, film, "A")

    def slack_gradient(self, nm: FloatArray, *, film: IntArray) -> tuple[FloatArray, FloatArray]:
        """Slack (S, Q) and its derivative (S, Q, L) [1/nm]."""
        constraints = self.goal.constraints
        R, dR = self.reflectance(nm, film=film)
        quantity, slope = R[:, constraints.point], dR[:, constraints.point]
        if constraints.on_absorption:
            A, dA = self.absorptance(nm, film=film)
            on = constraints.absorption
            quantity = np.where(on, A[:, constraints.point], quantity)
            slope = np.where(on[:, None], dA[:, constraints.point], slope)
        sign = constraints.sign
        return sign * (constraints.bound - quantity), -sign[:, None] * slope

    def _gradient(
        self, nm: FloatArray, film: IntArray, of: Literal["R", "A"]
    ) -> tuple[FloatArray, FloatArray]:
        value, slope = self.goal.light.gradient(
            self.frame.nm(nm), film=self.frame.film(film), of=of
        )
        return value, slope[:, :, self.frame.searched]


def facet_frame(facet: Facet) -> Frame:
    """Base and cap of a facet with their film rows."""
    return Frame(
        base_film=film_rows([layer.material for layer in facet.base], facet.films),
        base_nm=np.array([layer.nm for layer in facet.base], dtype=float),
        cap_film=film_rows([layer.material for layer in facet.cap], facet.films),
        cap_nm=np.array([layer.nm for layer in facet.cap], dtype=float),
    )
