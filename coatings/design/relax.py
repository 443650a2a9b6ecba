"""What is missing when a window can't be met, and what would help.

Two remedies are computed: a window that is wider by the miss itself, and more layers of the same palette.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.design.plan import FacetPlan
from coatings.design.search import Task, search_count

MORE_LAYERS = 2


@dataclass(frozen=True)
class Shortfall:
    """The nearest stack's miss: by how much reflectance, in which window (number), at which wavelength,
    above or below; and the layer count up to ``MORE_LAYERS`` more that meets the windows, if any."""

    miss: float
    window: int
    wavelength_nm: float
    quantity: str
    bound: float
    reached: float
    layers_that_meet: int | None


def shortfall(plan: FacetPlan) -> Shortfall:
    """How far the stack taken is outside its windows, and whether more layers would meet them."""
    task, taken = plan.task, plan.taken
    constraints = task.model.goal.constraints
    slack = task.model.slack(taken.nm[None], film=taken.film)[0]
    worst = int(np.argmin(slack))
    point = constraints.point[worst]
    bound, sign = float(constraints.bound[worst]), float(constraints.sign[worst])
    return Shortfall(
        miss=-float(slack[worst]),
        window=int(task.model.goal.window[point]),
        wavelength_nm=float(task.model.goal.scene.wavelength_nm[point]),
        quantity="A" if constraints.absorption[worst] else "R",
        bound=bound,
        reached=bound - sign * float(slack[worst]),
        layers_that_meet=_layers_that_meet(task) if plan.searched and not plan.cut_short else None,
    )


def _layers_that_meet(task: Task) -> int | None:
    most = task.limits.most_layers
    for count in range(most + 1, most + MORE_LAYERS + 1):
        if any(found.margin >= 0.0 for found in search_count(task, count)):
            return count
    return None
