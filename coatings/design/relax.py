"""What is missing when a window can't be met, and what would help.

Two remedies are computed: a window that is wider by the miss itself, and more layers of the same palette.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.design.plan import FacetPlan
from coatings.design.search import Task, search_count

MORE_LAYERS = 2
MIRROR_LAYERS = 60  # layers of a mirror that no more would improve
FIRST_LAYERS = 33  # thicknesses of its first layer that are tried, up to half a wave


@dataclass(frozen=True)
class Shortfall:
    """The nearest stack's miss: by how much reflectance, in which window (number), at which wavelength,
    above or below; and the layer count up to ``MORE_LAYERS`` more that meets the windows, if any.

    ``guide_limit`` is the reflectivity of the guided mode before a quarter-wave mirror without end of the same
    films, or what was reached where that is more; None where it is not below what the window asks for.
    """

    miss: float
    window: int
    wavelength_nm: float
    quantity: str
    bound: float
    reached: float
    layers_that_meet: int | None
    guide_limit: float | None = None


def shortfall(plan: FacetPlan) -> Shortfall:
    """How far the stack taken is outside its windows, and whether more layers would meet them."""
    task, taken = plan.task, plan.taken
    constraints = task.model.goal.constraints
    slack = task.model.slack(taken.nm[None], film=taken.film)[0]
    worst = int(np.argmin(slack))
    point = constraints.point[worst]
    bound, sign = float(constraints.bound[worst]), float(constraints.sign[worst])
    is_floor = sign < 0.0 and plan.searched
    reached = bound - sign * float(slack[worst])
    limit = _guide_limit(task, int(point), below=bound) if is_floor else None
    limit = None if limit is None else max(limit, reached)
    may_search = plan.searched and not plan.cut_short and limit is None
    return Shortfall(
        miss=-float(slack[worst]),
        window=int(task.model.goal.window[point]),
        wavelength_nm=float(task.model.goal.scene.wavelength_nm[point]),
        quantity="A" if constraints.absorption[worst] else "R",
        bound=bound,
        reached=reached,
        layers_that_meet=_layers_that_meet(task) if may_search else None,
        guide_limit=limit,
    )


def _layers_that_meet(task: Task) -> int | None:
    most = task.limits.most_layers
    for count in range(most + 1, most + MORE_LAYERS + 1):
        if any(found.margin >= 0.0 for found in search_count(task, count)):
            return count
    return None


def _guide_limit(task: Task, point: int, *, below: float) -> float | None:
    """R of the mode before an ideal mirror at one point, None for a plane wave or when not ``below``."""
    light = task.model.goal.light.at(np.array([point]))
    if light.model == "plane":
        return None
    plane = light.plane
    index = plane.films[list(task.limits.palette), 0].real
    low, high = (task.limits.palette[int(pick(index))] for pick in (np.argmin, np.argmax))
    best = 0.0
    for pair in ((low, high), (high, low)):
        film = np.resize(np.array(pair, dtype=np.intp), MIRROR_LAYERS)
        quarter = plane.wavelength_nm[0] / (4.0 * plane.films[film, 0].real)
        nm = np.tile(quarter, (FIRST_LAYERS, 1))
        nm[:, 0] *= np.linspace(0.0, 2.0, FIRST_LAYERS)
        frame = task.model.frame
        best = max(best, float(light.reflectance(frame.nm(nm), film=frame.film(film)).max()))
    return best if best < below else None
