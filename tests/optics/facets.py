"""Guides, stacks and the facet between them that the tests of the guided mode share."""

import numpy as np

from coatings.optics.facet import ModalFacet
from coatings.optics.guide import Guide, fundamental

SILICA, TANTALA = 1.45, 2.10

STACKS = {
    "bare": ([], []),
    "one layer": ([0], [[231.0]]),
    "two layers": ([1, 0], [[80.0, 190.0]]),
    "mirror": ([0, 1] * 3, [[225.0, 155.0] * 3]),
}
GUIDES = {
    "weak": ([3.30, 3.32, 3.30], [0.3]),
    "tight": ([3.20, 3.55, 3.20], [0.3]),
    "unequal": ([3.17, 3.25, 3.40, 3.30, 3.20], [0.10, 0.20, 0.15]),
    "lossy": ([3.2, 3.4 + 0.01j, 3.2 + 0.002j], [0.3]),
}


def facet(index, um, nm, *, tm, films=(SILICA, TANTALA), outside=1.0, fine=1):
    nm = np.atleast_1d(np.asarray(nm, float))
    mode = fundamental(Guide(nm, index, um), tm=tm)
    table = np.repeat(np.array(films, complex)[:, None], nm.size, axis=1)
    return ModalFacet(mode, outside, table, fine)
