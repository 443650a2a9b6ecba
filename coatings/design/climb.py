"""Robust finishing: the share of drawn chips inside the windows is climbed, not only computed.

The count of chips inside is a staircase; its smooth stand-in is the mean over the draws of
1 / (1 + exp(-slack / tau)) with the least slack of each chip. tau is lowered in stages, the draws stay
the same (common random numbers), the gradient is exact: one backward pass a chip at its worst point.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import minimize
from scipy.special import expit

from coatings.design.limits import RunLimits
from coatings.design.model import FacetModel
from coatings.design.polish import NM_UNIT, linear_constraint
from coatings.design.spread import Draws, drawn_slack
from coatings.facets import FloatArray, IntArray

STAGES = (0.6, 0.25, 0.1)  # tau in units of the spread of the chips' slack
TAIL = 1e-3


@dataclass(frozen=True)
class SmoothYield:
    """The stand-in for the yield of one order of films under fixed draws."""

    model: FacetModel
    film: IntArray
    draws: Draws

    def slack(self, nm: FloatArray) -> FloatArray:
        """Least slack (S,) of every drawn chip."""
        return drawn_slack(self.model, nm, film=self.film, draws=self.draws)

    def value(self, nm: FloatArray, *, tau: float) -> float:
        """Smooth yield of a stack (L,) [nm]; ``tau`` in reflectance."""
        return float(expit(self.slack(nm) / tau).mean())

    def merit(self, nm: FloatArray, *, tau: float) -> float:
        """Smooth yield with a small share of the mean slack, which orders stacks whose yields are all
        0 or all 1."""
        slack = self.slack(nm)
        return float(expit(slack / tau).mean()) + TAIL * float(np.tanh(slack.mean()))

    def gradient(self, nm: FloatArray, *, tau: float) -> tuple[float, FloatArray]:
        """Smooth yield and its derivative (L,) [1/nm]."""
        frame, constraints, draws = self.model.frame, self.model.goal.constraints, self.draws
        ordered, rows = frame.nm(nm[None])[0], frame.film(self.film)
        deposited = draws.nm(ordered)
        slack = self.model.goal.slack(
            deposited, film=rows, film_shift=draws.film_shift, incident_shift=draws.incident_shift
        )
        worst = slack.argmin(axis=1)
        share = expit(slack[np.arange(len(slack)), worst] / tau)
        push = -constraints.sign[worst] * share * (1.0 - share) / (tau * len(slack))
        weight = np.zeros((len(slack), len(self.model.goal.low)))
        weight[np.arange(len(slack)), constraints.point[worst]] = push
        slope = self._pushed(deposited, rows, weight, constraints.absorption[worst])
        slope = (slope * np.where(deposited > 0.0, draws.factor, 0.0)).sum(axis=0)
        return float(share.mean()), slope[frame.searched]

    def _pushed(
        self, deposited: FloatArray, rows: IntArray, weight: FloatArray, absorbed: NDArray[np.bool_]
    ) -> FloatArray:
        """Sum over points of weight times the slope of R, or of A for the chips in ``absorbed``."""
        light, draws = self.model.goal.light, self.draws
        shifts: dict[str, Any] = {
            "film_shift": draws.film_shift,
            "incident_shift": draws.incident_shift,
        }
        on_R = np.where(absorbed[:, None], 0.0, weight)
        slope = light.weighted_gradient(deposited, film=rows, weight=on_R, **shifts)
        if absorbed.any():
            slope = slope + light.weighted_gradient(
                deposited, film=rows, weight=weight - on_R, of="A", **shifts
            )
        return slope

    def near(self, nm: FloatArray) -> SmoothYield:
        """The same with a light that is quick near one stack (L,) [nm]."""
        return replace(self, model=self.model.near(nm, film=self.film))


def climb(
    smooth: SmoothYield,
    nm: FloatArray,
    *,
    limits: RunLimits,
    stages: tuple[float, ...] = STAGES,
    iterations: int = 25,
) -> FloatArray:
    """A stack (L,) [nm] near ``nm`` with the largest smooth yield inside the run's limits."""
    low, high = limits.bounds(smooth.film)
    bounds = list(zip(low / NM_UNIT, high / NM_UNIT, strict=True))
    constraints = [
        linear_constraint(row * NM_UNIT, room) for row, room in limits.linear(smooth.film)
    ]
    for stage in stages:
        local = smooth.near(nm)
        tau = stage * slack_scale(local, nm)

        def downhill(
            x: FloatArray, tau: float = tau, local: SmoothYield = local
        ) -> tuple[float, FloatArray]:
            value, slope = local.gradient(x * NM_UNIT, tau=tau)
            return -value, -slope * NM_UNIT

        result = minimize(
            downhill,
            nm / NM_UNIT,
            jac=True,
            method="SLSQP",
            bounds=bounds,
            constraints=constraints,
            options={"maxiter": iterations, "ftol": 1e-5},
        )
        found = limits.inside(result.x[None] * NM_UNIT, film=smooth.film)[0]
        if smooth.near(found).value(found, tau=tau) > local.value(nm, tau=tau):
            nm = found
    return nm


def slack_scale(smooth: SmoothYield, nm: FloatArray) -> float:
    """Spread of the chips' slack, or their common miss where that is larger [reflectance]."""
    slack = smooth.slack(nm)
    return max(float(slack.std()), -0.3 * float(slack.mean()), 1e-9)
