"""Derivatives of the amplitudes of a batch, all layers and points: what the public ones share."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.optics.arrays import Complexes
from coatings.optics.batch import Batch
from coatings.optics.pointwise import differentiate
from coatings.optics.spectrum import Response, respond_to


@dataclass(frozen=True, eq=False)
class Derivatives:
    """The response with dr/dx and d ln t/dx, complex (S, P, L), x thickness [nm] or index.

    ``edge``: dr by the incident and by the outside admittance, each (S, P).
    """

    response: Response
    dr: Complexes
    dlog_t: Complexes
    edge: tuple[Complexes, Complexes]


def derivatives(batch: Batch, *, by_index: bool) -> Derivatives:
    """Differentiate every stack at every point."""
    stacks, points, layers = batch.shape
    dr, dt = np.empty((2, stacks, layers, points), np.complex128)
    edge = np.empty((stacks, 2, points), np.complex128)
    batch.run(differentiate, dr, dt, edge, flags=(by_index,), effort=10)
    return Derivatives(
        respond_to(batch), dr.swapaxes(1, 2), dt.swapaxes(1, 2), (edge[:, 0], edge[:, 1])
    )
