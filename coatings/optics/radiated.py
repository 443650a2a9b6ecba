"""Shares of a mode's power that leave the chip or stay in it outside the mode: see `facet`."""

from __future__ import annotations

from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from numpy.typing import NDArray

from coatings.optics.arrays import Complexes, Integers, Reals
from coatings.optics.batch import Batch
from coatings.optics.contour import unit_nodes
from coatings.optics.facet_arrays import Places
from coatings.optics.far_field import transforms
from coatings.optics.guide_modes import GuidedMode
from coatings.optics.radiated_kernel import radiate
from coatings.optics.threads import share

if TYPE_CHECKING:
    from coatings.optics.facet import ModalFacet
    from coatings.optics.modal_response import Found

NODES = 16
TOLERANCE = 1e-9
MOST_HALVINGS = 16


class Panels(NamedTuple):
    """Pieces of the integrals: wavelength, side of n_out (0 below, 1 above), ends on (0, 1)."""

    place: Integers
    side: Integers
    low: Reals
    high: Reals

    def halves(self, chosen: NDArray[np.bool_]) -> Panels:
        """The two halves of the chosen panels, all lower ones first."""
        place, side = np.tile(self.place[chosen], 2), np.tile(self.side[chosen], 2)
        low, high = self.low[chosen], self.high[chosen]
        middle = 0.5 * (low + high)
        return Panels(place, side, np.concatenate([low, middle]), np.concatenate([middle, high]))


def sent_out(facet: ModalFacet, batch: Batch, found: Found) -> Reals:
    """T of every stack, (S, W)."""
    return integrate(facet, batch, found, back=False)[0]


def thrown_back(facet: ModalFacet, batch: Batch, found: Found) -> Reals:
    """S of every stack, (S, W), by its own integral."""
    return integrate(facet, batch, found, back=True)[0]


def integrate(facet: ModalFacet, batch: Batch, found: Found, *, back: bool) -> tuple[Reals, Panels]:
    """Power sent out or, ``back``, thrown back, (S, W), and the panels that it took.

    The films of a mirror hold sharp resonances beyond n_out, where nothing leaves: panels are
    halved where halving changes anything.
    """
    stacks, points, _ = batch.shape
    sides = 2 if back else 1
    count = sides * points
    place, side = np.tile(np.arange(points), sides), np.repeat(np.arange(sides), points)
    panels = Panels(place, side, np.zeros(count), np.ones(count))
    power, settled = np.zeros((stacks, points)), []
    whole = _integrals(facet, batch, found, panels, back=back)
    for halving in range(MOST_HALVINGS):
        both = panels.halves(np.ones(panels.place.size, np.bool_))
        parts = _integrals(facet, batch, found, both, back=back)
        lower, upper = np.split(parts, 2, axis=1)
        change = np.abs(lower + upper - whole).max(axis=0)
        unsettled = (change > TOLERANCE) & (halving < MOST_HALVINGS - 1)
        settled.append(panels.halves(~unsettled))
        np.add.at(power.T, panels.place[~unsettled], (lower + upper)[:, ~unsettled].T)
        if not unsettled.any():
            break
        panels = panels.halves(unsettled)
        whole = np.concatenate([lower[:, unsettled], upper[:, unsettled]], axis=1)
    columns = zip(*settled, strict=True)
    return power, Panels(*(np.concatenate(column) for column in columns))


def _integrals(
    facet: ModalFacet, batch: Batch, found: Found, panels: Panels, *, back: bool
) -> Reals:
    """Integral over each panel, (S, P)."""
    mode, place = facet.mode, panels.place
    q, weight = real_nodes(mode, facet.outside, panels)
    places = Places.at(
        q,
        facet.plane.wavelength_nm[place],
        films=facet.films[:, place],
        incident=mode.n_eff[place],
        outside=facet.outside[place],
        tm=mode.tm,
    )
    products = real_products(mode, q, weight, place)
    r, tilt = found.r[:, place], found.tilt[:, place]
    power = np.zeros(r.shape)

    def job(rows: slice) -> None:
        radiate(
            batch.thickness[rows],
            batch.film[rows] if len(batch.film) > 1 else batch.film,
            places.around,
            places.points,
            batch.film_shift[rows],
            products,
            r[rows],
            tilt[rows],
            power[rows],
            back,
        )

    share(len(r), q.size * (batch.shape[2] + 1), job)
    return power


def real_nodes(mode: GuidedMode, outside: Complexes, panels: Panels) -> tuple[Complexes, Reals]:
    """Nodes q and weights (P, NODES): from 0 to n_out or, on the other side of it, to N.

    q = n_out sin(theta), and n_out to N by the cosine: the integrand has square roots at n_out and
    at N, and the substitution smooths them.
    """
    x, w = unit_nodes(NODES)
    width = (panels.high - panels.low)[:, None]
    s = panels.low[:, None] + width * x
    top = mode.n_eff.real[panels.place][:, None]
    end = outside.real[panels.place][:, None]
    below = (panels.side == 0)[:, None]
    gap = np.maximum(top - end, 0.0)
    q = np.where(below, end * np.sin(0.5 * np.pi * s), end + 0.5 * gap * (1.0 - np.cos(np.pi * s)))
    slope = np.where(
        below, end * 0.5 * np.pi * np.cos(0.5 * np.pi * s), 0.5 * np.pi * gap * np.sin(np.pi * s)
    )
    return q.astype(np.complex128), slope * width * w


def real_products(mode: GuidedMode, q: Complexes, weight: Reals, place: Integers) -> Reals:
    """Phi, G, Re H, Im H of `radiated_kernel` with weight and 1/(2 pi P), (P, 4, NODES)."""
    f, f_back, g, g_back = transforms(mode, q, place)
    mixed = f * g.conj() + f_back * g_back.conj()
    factor = weight / (2.0 * np.pi * mode.flow[place][:, None])
    rows = [
        np.abs(f) ** 2 + np.abs(f_back) ** 2,
        np.abs(g) ** 2 + np.abs(g_back) ** 2,
        mixed.real,
        mixed.imag,
    ]
    return np.ascontiguousarray(np.stack([factor * row for row in rows], axis=1))
