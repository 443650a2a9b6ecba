"""The far field of a guided mode: what a detector on a wide arc around the facet sees.

A field over the facet plane with the tangential E of the mode radiates (with q = sin(theta), lengths
in 1/k0, eta = cos(theta) for TE and 1/cos(theta) for TM, and d q = cos(theta) d theta)

    I(theta) ~ eta cos(theta) |E~(q)|^2 = cos(theta)^2 |phi~(q)|^2   (TE),
                                          |g~(q)|^2, g = phi/eps     (TM).

The coating's own dependence on angle is left out; within the half width it is slight.

Reference: H. C. Casey and M. B. Panish, Heterostructure Lasers, part A (Academic Press, 1978),
sec. 2.7, for the transform and the obliquity (from memory).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike

from coatings.optics.arrays import Complexes, Integers, Reals, numbers, refuse
from coatings.optics.transforms import transform

if TYPE_CHECKING:
    from coatings.optics.guide_modes import GuidedMode

EDGE_DEG = 90.0
FIRST_LOOK = 721


def transforms(mode: GuidedMode, q: Complexes, place: Integers | None = None) -> Complexes:
    """f~(q), f~(-q), g~(q), g~(-q), complex (4, W, K), f = phi and g = w phi.

    q (W, K) belongs to the mode's wavelengths or, q (P, K), to those at ``place`` (P,).
    """
    out = np.empty((4, *q.shape), np.complex128)
    at = slice(None) if place is None else place
    transform(
        q,
        mode.eps[at],
        mode.n_eff[at] ** 2,
        mode.guide.position[at],
        mode.phi[at],
        mode.flux[at],
        mode.tm,
        out,
    )
    return out


def far_field(mode: GuidedMode, angle_deg: ArrayLike, *, place: int = 0) -> Reals:
    """Intensity of the mode's far field across the layers, at one wavelength.

    Parameters
    ----------
    mode : GuidedMode
    angle_deg : array (K,)
        Angle to the facet normal [deg], from -90 to 90, positive towards the last layer.
    place : int
        Which of the mode's wavelengths.

    Returns
    -------
    array (K,)
        Intensity [1], 1 where it is largest among the angles given.

    Raises
    ------
    ArrayError
        When an angle is outside -90 ... 90 degrees.
    """
    angle = numbers(angle_deg, "angle_deg", np.float64, 1)
    outside = ~(np.abs(angle) <= EDGE_DEG)
    if outside.any():
        at = int(np.argmax(outside))
        raise refuse(f"angle_deg[{at}]", f"is {angle[at]}; give -90 to 90 degrees")
    intensity = _intensity(mode, angle, place)
    intensity /= intensity.max()
    return intensity


def full_width(mode: GuidedMode) -> Reals:
    """Full width at half maximum [deg], (W,), between the outermost half-way angles.

    nan where the intensity at 90 degrees is still above half.
    """
    return np.array([_full_width(mode, place) for place in range(mode.n_eff.size)])


def _intensity(mode: GuidedMode, angle_deg: Reals, place: int) -> Reals:
    theta = np.radians(angle_deg)
    q = np.sin(theta)[None, :].astype(np.complex128)
    f, _, g, _ = transforms(mode, q, np.array([place]))[:, 0]
    if mode.tm:
        seen: Reals = np.abs(g) ** 2
    else:
        seen = np.cos(theta) ** 2 * np.abs(f) ** 2
    return seen


def _full_width(mode: GuidedMode, place: int) -> float:
    angle = np.linspace(-EDGE_DEG, EDGE_DEG, FIRST_LOOK)
    intensity = _intensity(mode, angle, place)
    peak = _peak(mode, place, angle, intensity)
    above = np.flatnonzero(intensity > 0.5 * peak)
    first, last = int(above[0]), int(above[-1])
    if first == 0 or last == angle.size - 1:
        return float("nan")

    def excess(at_deg: float) -> float:
        return float(_intensity(mode, np.array([at_deg]), place)[0] - 0.5 * peak)

    from scipy.optimize import brentq  # slow to import, and most uses of a mode need no width

    low = brentq(excess, angle[first - 1], angle[first], xtol=1e-10)
    high = brentq(excess, angle[last], angle[last + 1], xtol=1e-10)
    return float(high - low)


def _peak(mode: GuidedMode, place: int, angle: Reals, intensity: Reals) -> float:
    """The top of the parabola through the three highest neighbours, on a tenth of the grid."""

    top = int(np.clip(np.argmax(intensity), 1, angle.size - 2))
    near = np.linspace(angle[top - 1], angle[top + 1], 41)
    fine = _intensity(mode, near, place)
    at = int(np.clip(np.argmax(fine), 1, near.size - 2))
    a, b, c = fine[at - 1 : at + 2]
    bend = a - 2.0 * b + c
    return float(b - 0.125 * (a - c) ** 2 / bend) if bend < 0.0 else float(fine.max())
