"""What the kernels of a guided mode's facet are given: nodes, transforms, surroundings."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.optics.arrays import Complexes, Reals, parts
from coatings.optics.contour import Contour, contour, nodes_for
from coatings.optics.far_field import transforms
from coatings.optics.guide_modes import GuidedMode

PLASMON_LIMIT = 2.0


@dataclass(frozen=True, eq=False)
class Places:
    """Films and nodes of all wavelengths one after the other, as the kernels take them.

    Attributes
    ----------
    around : array (M + 2, 2 W K)
        Index of the films, of the incident side and of the outside, re and im in turn.
    points : array (4, W K)
        Wavelength [nm], Re q, Im q, 1 for TM.
    """

    around: Reals
    points: Reals

    @classmethod
    def at(
        cls,
        q: Complexes,
        wavelength_nm: Reals,
        *,
        films: Complexes,
        incident: Complexes,
        outside: Complexes,
        tm: bool,
    ) -> Places:
        """Lay out q (W, K), films (M, W), incident and outside (W,)."""
        nodes = q.shape[1]
        media = np.repeat(np.vstack([films, incident, outside]), nodes, axis=1)
        nm = np.repeat(wavelength_nm, nodes)
        rows = [nm, q.real.ravel(), q.imag.ravel(), np.full(nm.size, float(tm))]
        return cls(parts(media), np.array(rows))


def contour_of(mode: GuidedMode, films: Complexes, outside: Complexes, *, fine: int = 1) -> Contour:
    """The contour of a mode in front of these films; ``fine`` as in `contour.nodes_for`."""
    position = mode.guide.position
    thickness = position[:, -1] - position[:, 0]
    return contour(
        _highest_index(mode, films, outside),
        guide_thickness=thickness,
        decay=mode.decay.real.min(axis=0),
        nodes=nodes_for(thickness, tm=mode.tm, fine=fine),
    )


def products_of(mode: GuidedMode, path: Contour) -> Complexes:
    """Products of transforms with weight and 1/(2 pi), complex (W, 1 or 3, K).

    f~(q) f~(-q) for TE; for TM also those of f and g, taken both ways, and of g and g.
    """
    f, f_back, g, g_back = transforms(mode, path.q)
    weight = path.weight / (2.0 * np.pi)
    if not mode.tm:
        return np.ascontiguousarray((weight * f * f_back)[:, None, :])
    mixed = 0.5 * (f * g_back + f_back * g)
    return np.stack([weight * f * f_back, weight * mixed, weight * g * g_back], axis=1)


def _highest_index(mode: GuidedMode, films: Complexes, outside: Complexes) -> Reals:
    """Beyond the real parts of all indices nothing is guided by a film or left by a wave.

    A metal counts by the wave that it binds to its surface in TM.
    """
    media = np.vstack([films, mode.n_eff[None, :], outside[None, :]])
    eps = media**2
    metal = eps.real < 0.0
    highest: Reals = np.where(metal, 0.0, media.real).max(axis=0)
    if not (mode.tm and metal.any()):
        return highest
    both = eps[:, None, :] + eps[None, :, :]
    bound = metal[:, None, :] & ~metal[None, :, :] & (both.real < 0.0)
    safe = np.where(bound, both, 1.0)
    surface = np.where(bound, np.sqrt(eps[:, None, :] * eps[None, :, :] / safe).real, 0.0)
    most: Reals = np.maximum(highest, np.minimum(surface.max(axis=(0, 1)), PLASMON_LIMIT * highest))
    return most
