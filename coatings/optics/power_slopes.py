"""Exact derivatives of the mode's T, S and A with the thicknesses.

With A and Z of `radiated_kernel`, each share is |1 + r|^2 sum flow p,
p = |A|^2 Phi + |Z|^2 G + 2 Re(A conj(Z) H), and

    dp = 2 Re[(conj(A) Phi + conj(Z) H) dA + (conj(Z) G + conj(A) conj(H)) dZ]

is put together from d r and d(c/d) of the mode, which the contour gives, and d t or d rho of the
plane waves at the panels' nodes. In complex arrays, stack by stack: meant for few stacks.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from coatings.optics.arrays import Complexes, Reals
from coatings.optics.batch import Batch
from coatings.optics.derivatives import Derivatives, derivatives
from coatings.optics.radiated import Panels, integrate, real_nodes, real_products
from coatings.optics.scene import Scene

if TYPE_CHECKING:
    from coatings.optics.facet import ModalFacet
    from coatings.optics.modal_response import Found


def share_gradient(
    facet: ModalFacet, batch: Batch, found: Found, *, of: str, lossless: bool
) -> tuple[Reals, Reals]:
    """T, S or A (S, W) and its slopes with thickness (S, W, L); found with four parts."""
    if of == "T":
        return power_gradient(facet, batch, found, back=False)
    if of == "S" and not lossless:
        return power_gradient(facet, batch, found, back=True)
    out, out_slope = power_gradient(facet, batch, found, back=False)
    r, dr = found.r, found.slopes[:, 0] + 1j * found.slopes[:, 1]
    rest = 1.0 - out - np.abs(r) ** 2
    rest_slope = -out_slope - 2.0 * (r.conj()[:, :, None] * dr).real
    if of == "S":
        return rest, rest_slope
    if lossless:
        return np.zeros_like(rest), np.zeros_like(rest_slope)
    back, back_slope = power_gradient(facet, batch, found, back=True)
    return rest - back, rest_slope - back_slope


def power_gradient(
    facet: ModalFacet, batch: Batch, found: Found, *, back: bool
) -> tuple[Reals, Reals]:
    """T or, ``back``, S and its slopes by their integrals."""
    power, panels = integrate(facet, batch, found, back=back)
    place = panels.place
    q, weight = real_nodes(facet.mode, facet.outside, panels)
    products = real_products(facet.mode, q, weight, place).swapaxes(0, 1)
    phi, g, h = products[0], products[1], products[2] + 1j * products[3]
    scene = _scene(facet, panels, q)
    sign = -1.0 if facet.mode.tm else 1.0
    slopes = np.zeros(found.slopes.shape[:1] + found.slopes.shape[2:])
    for s in range(len(power)):
        one = batch._replace(
            scene=scene,
            thickness=batch.thickness[s : s + 1],
            film=batch.film[s : s + 1] if len(batch.film) > 1 else batch.film,
            film_shift=batch.film_shift[s : s + 1],
        )
        waves = derivatives(one, by_index=False)
        parts = found.slopes[s]
        dr, dtilt = parts[0] + 1j * parts[1], sign * (parts[2] + 1j * parts[3])
        tilt = found.tilt[s][place, None]
        a, da, y0, flow = _amplitudes(scene, waves, q.shape, sign=sign, back=back)
        z, dz = _beside(a, da, back=back)
        dz = (dz * tilt[..., None] + z[..., None] * dtilt[place, None]) / y0[..., None]
        z = z * tilt / y0
        share = np.abs(a) ** 2 * phi + np.abs(z) ** 2 * g + 2.0 * (a * z.conj() * h).real
        by_a = 2.0 * (a.conj() * phi + z.conj() * h)
        by_z = 2.0 * (z.conj() * g + a.conj() * h.conj())
        steep = (by_a[..., None] * da + by_z[..., None] * dz).real
        factor = 1.0 + sign * found.r[s]
        total, slope = np.zeros(len(factor)), np.zeros(dr.shape)
        np.add.at(total, place, (flow * share).sum(axis=1))
        np.add.at(slope, place, (flow[..., None] * steep).sum(axis=1))
        turn = 2.0 * sign * (factor.conj()[:, None] * dr).real
        slopes[s] = np.abs(factor[:, None]) ** 2 * slope + turn * total[:, None]
    return power, slopes


def _scene(facet: ModalFacet, panels: Panels, q: Complexes) -> Scene:
    nodes, place = q.shape[1], panels.place
    return Scene(
        np.repeat(facet.plane.wavelength_nm[place], nodes),
        np.repeat(facet.mode.n_eff[place], nodes),
        np.repeat(facet.outside[place], nodes),
        np.repeat(facet.films[:, place], nodes, axis=1),
        q=q.ravel(),
        tm=facet.mode.tm,
    )


def _admittance(index: Complexes, q: Complexes, *, tm: bool) -> Complexes:
    root = np.exp(0.25j * np.pi) * np.sqrt(-1j * (index - q) * (index + q))
    eta: Complexes = index**2 / root if tm else root
    return eta


def _amplitudes(
    scene: Scene, waves: Derivatives, shape: tuple[int, ...], *, sign: float, back: bool
) -> tuple[Complexes, Complexes, Complexes, Reals]:
    """A, dA (with layers), Y0 and the real admittance at the nodes, (P, NODES)."""
    tm = sign < 0.0
    q = scene.q if scene.q is not None else np.zeros(scene.points, np.complex128)
    eta = _admittance(scene.incident, q, tm=tm)
    y0 = (1.0 / eta if tm else eta).reshape(shape)
    if back:
        a = -0.5 * (1.0 - sign * waves.response.r[0])
        da = 0.5 * sign * waves.dr[0]
        flow = y0.real
    else:
        scale = 0.5 / eta if tm else 0.5
        a = scale * waves.response.t[0]
        da = a[:, None] * waves.dlog_t[0]
        flow = _admittance(scene.outside, q, tm=tm).real.reshape(shape)
    return a.reshape(shape), da.reshape(*shape, -1), y0, flow


def _beside(a: Complexes, da: Complexes, *, back: bool) -> tuple[Complexes, Complexes]:
    """Z Y0/(c/d) and its slopes: t a/2 again, or (1 + rho)/2 = 1 + A."""
    return (1.0 + a, da) if back else (a, da)
