"""Refinement of nominal stacks with exact gradients: least squares for many, minimax for the best.

Least squares is a projected Levenberg-Marquardt iteration over a whole batch of stacks. Minimax is the
epigraph form: maximise t subject to slack_q(d) >= t for every constraint q, by sequential quadratic
programming (Kraft, DFVLR-FB 88-28 (1988), as in scipy), with constraints added where the full
wavelength grid shows that the thin one missed them.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray
from scipy.optimize import minimize

from coatings.design.limits import RunLimits
from coatings.design.model import FacetModel
from coatings.facets import FloatArray, IntArray

NM_UNIT = 100.0  # thicknesses are searched in this unit: of order one


def least_squares(
    model: FacetModel, nm: FloatArray, *, film: IntArray, limits: RunLimits, iterations: int = 20
) -> FloatArray:
    """Stacks (S, L) [nm] moved towards the centres of all windows, inside the run's limits.

    The residual of a point is its distance from the centre of its bounds in units of their half-width.
    """
    low, high = limits.bounds(film)
    residual, jacobian = _residuals(model, nm, film)
    cost = np.einsum("sk,sk->s", residual, residual)
    damping = np.full(len(nm), 1e-2)
    for _ in range(iterations):
        step = _damped_step(
            residual, jacobian, damping, pinned=_pinned(nm, low, high, residual, jacobian)
        )
        trial = limits.inside(nm + step, film=film)
        trial_residual, trial_jacobian = _residuals(model, trial, film)
        trial_cost = np.einsum("sk,sk->s", trial_residual, trial_residual)
        better = trial_cost < cost
        nm = np.where(better[:, None], trial, nm)
        residual = np.where(better[:, None], trial_residual, residual)
        jacobian = np.where(better[:, None, None], trial_jacobian, jacobian)
        cost = np.where(better, trial_cost, cost)
        damping = np.clip(np.where(better, damping * 0.3, damping * 4.0), 1e-9, 1e9)
    return nm


def _residuals(model: FacetModel, nm: FloatArray, film: IntArray) -> tuple[FloatArray, FloatArray]:
    goal = model.goal
    on_R = goal.bounded
    residuals, jacobians = [], []
    if on_R.any():
        R, dR = model.reflectance(nm, film=film)
        width = goal.width[on_R]
        residuals.append((R[:, on_R] - goal.centre[on_R]) / width)
        jacobians.append(dR[:, on_R] / width[:, None])
    if goal.constraints.on_absorption:
        A, dA = model.absorptance(nm, film=film)
        capped = goal.absorption_high < 1.0
        scale = np.maximum(goal.absorption_high[capped], 1e-6)
        residuals.append(A[:, capped] / scale)
        jacobians.append(dA[:, capped] / scale[:, None])
    return np.hstack(residuals), np.concatenate(jacobians, axis=1)


def _pinned(
    nm: FloatArray, low: FloatArray, high: FloatArray, residual: FloatArray, jacobian: FloatArray
) -> NDArray[np.bool_]:
    downhill = -np.einsum("skl,sk->sl", jacobian, residual)
    pinned: NDArray[np.bool_] = ((nm <= low + 1e-9) & (downhill < 0)) | (
        (nm >= high - 1e-9) & (downhill > 0)
    )
    return pinned


def _damped_step(
    residual: FloatArray, jacobian: FloatArray, damping: FloatArray, *, pinned: NDArray[np.bool_]
) -> FloatArray:
    free = np.where(pinned[:, None, :], 0.0, jacobian)
    normal = np.einsum("skl,skm->slm", free, free)
    diagonal = np.einsum("sll->sl", normal)
    lift = damping[:, None] * (diagonal + 1e-6 * diagonal.max(axis=1, keepdims=True)) + 1e-14
    normal = normal + lift[:, :, None] * np.eye(normal.shape[1])
    step: FloatArray = np.linalg.solve(
        normal, -np.einsum("skl,sk->sl", free, residual)[:, :, None]
    )[:, :, 0]
    return step


def minimax(
    model: FacetModel, nm: FloatArray, *, film: IntArray, limits: RunLimits, exchanges: int = 3
) -> FloatArray:
    """One stack (L,) [nm] with the largest margin near ``nm``, over the whole grid of the goal.

    ``model`` is judged on all its points, but solved on a thinned set that grows by what it missed.
    """
    goal = model.goal
    thin = np.sort(np.concatenate([_spread_out(members, 9) for members in goal.window_members()]))
    best, best_margin = nm, float(model.margin(nm[None], film=film)[0])
    for _ in range(exchanges):
        nm = _epigraph(model.with_goal(goal.at(thin)), best, film, limits)
        slack = model.slack(nm[None], film=film)[0]
        if slack.min() > best_margin:
            best, best_margin = nm, float(slack.min())
        missed = goal.constraints.point[np.argsort(slack)[:4]]
        grown = np.union1d(thin, missed)
        if len(grown) == len(thin):
            break
        thin = grown
    return best


def _spread_out(members: IntArray, most: int) -> IntArray:
    picks = np.linspace(0, len(members) - 1, min(most, len(members))).round().astype(int)
    spread: IntArray = members[np.unique(picks)]
    return spread


def _epigraph(model: FacetModel, nm: FloatArray, film: IntArray, limits: RunLimits) -> FloatArray:
    # in units of the windows' width, or of the miss where that is larger: of order one
    miss = -float(model.margin(nm[None], film=film)[0])
    unit = max(float(np.median(model.goal.width)), miss)
    cache: dict[bytes, tuple[FloatArray, FloatArray]] = {}

    def slack(x: FloatArray) -> tuple[FloatArray, FloatArray]:
        key = x[:-1].tobytes()
        if key not in cache:
            cache.clear()
            value, slope = model.slack_gradient(x[None, :-1] * NM_UNIT, film=film)
            cache[key] = value[0] / unit, slope[0] * (NM_UNIT / unit)
        return cache[key]

    def above(x: FloatArray) -> FloatArray:
        gap: FloatArray = slack(x)[0] - x[-1]
        return gap

    def above_slope(x: FloatArray) -> FloatArray:
        slope = slack(x)[1]
        return np.hstack([slope, -np.ones((len(slope), 1))])

    constraints: list[dict[str, object]] = [{"type": "ineq", "fun": above, "jac": above_slope}]
    for row, room in limits.linear(film):
        constraints.append(linear_constraint(np.append(row, 0.0) * NM_UNIT, room))
    low, high = limits.bounds(film)
    start = np.append(nm / NM_UNIT, 0.0)
    start[-1] = slack(start)[0].min()
    towards = np.append(np.zeros(len(nm)), -1.0)
    result = minimize(
        lambda x: -x[-1],
        start,
        jac=lambda _x: towards,
        method="SLSQP",
        bounds=[*zip(low / NM_UNIT, high / NM_UNIT, strict=True), (None, None)],
        constraints=constraints,
        options={"maxiter": 60, "ftol": 1e-9},
    )
    found: FloatArray = limits.inside(result.x[None, :-1] * NM_UNIT, film=film)[0]
    return found


def linear_constraint(row: FloatArray, room: float) -> dict[str, object]:
    """``row . x <= room`` in the form that scipy's sequential quadratic programming takes."""
    size = max(abs(room), 1e-9)
    return {"type": "ineq", "fun": lambda x: (room - row @ x) / size, "jac": lambda _x: -row / size}
