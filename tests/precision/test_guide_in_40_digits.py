"""Effective indices against 40-digit arithmetic, over guides of many kinds."""

import numpy as np
import pytest
from guide_in_40_digits import effective_index, newton_correction

from coatings.optics.guide import Guide, fundamental, modes

GUIDES = {
    "weak": ([3.30, 3.32, 3.30], [0.3], 976.0),
    "symmetric": ([3.17, 3.38, 3.17], [0.2], 1550.0),
    "tight": ([3.24, 3.6, 3.24], [0.3], 860.0),
    "unequal": ([3.17, 3.38, 3.28], [0.3], 1310.0),
    "violet": ([2.48, 2.50, 2.53, 2.50, 2.47], [0.12, 0.06, 0.12], 405.0),
    "well in a wide guide": ([3.35, 3.40, 3.55, 3.40, 3.35], [0.6, 0.008, 0.4], 976.0),
    "thick cladding": ([3.30, 3.31, 3.45, 3.31, 3.30], [3.0, 0.2, 3.0], 976.0),
    "unequal twins": ([3.2, 3.4, 3.2, 3.41, 3.2], [0.3, 1.0, 0.3], 1310.0),
    "wide": ([3.1, 3.3, 3.1], [6.0], 4600.0),
    "lossy": ([3.2, 3.4 + 0.01j, 3.2 + 0.002j], [0.3], 1310.0),
    "gain": ([3.2, 3.4 - 0.02j, 3.25], [0.3], 1310.0),
    "much gain": ([3.2, 3.4 - 0.2j, 3.25 + 0.05j], [0.4], 1310.0),
}


@pytest.mark.parametrize("tm", [False, True])
@pytest.mark.parametrize("name", GUIDES)
def test_effective_index(name, tm):
    index, um, nm = GUIDES[name]
    guide = {"index": index, "thickness_um": um, "wavelength_nm": nm, "tm": tm}
    for mode in modes(Guide([nm], index, um), tm=tm):
        found = complex(mode.n_eff[0])
        assert newton_correction(found, **guide) < 1e-13
        assert abs(complex(effective_index(found, **guide)) - found) < 1e-13


def test_a_metal_in_te():
    index, um = [3.2, 3.4, 3.2, 0.2 + 8j, 1.0], [0.3, 0.2, 50.0]
    found = complex(fundamental(Guide([1310.0], index, um), tm=False).n_eff[0])
    thinner = {"index": index, "thickness_um": [0.3, 0.2, 2.0], "wavelength_nm": 1310.0}
    assert newton_correction(found, tm=False, **thinner) < 1e-13


@pytest.mark.parametrize("tm", [False, True])
def test_group_index_is_the_derivative_of_the_dispersion_relation(tm):
    nm, um = 1310.0, [0.1, 0.2, 0.3]
    index = np.array([3.17, 3.25, 3.4, 3.3 + 0.001j, 3.2])
    slope = np.array([-2e-4, -3e-4, -4e-4, -3.5e-4 + 1e-6j, -2.5e-4])
    mode = fundamental(Guide([nm], index, um, slope), tm=tm)
    step = 0.1

    def at(by):
        twin = {"index": index + slope * by, "thickness_um": um, "wavelength_nm": nm + by}
        return effective_index(mode.n_eff[0], tm=tm, **twin)

    by_nm = (8 * (at(step) - at(-step)) - (at(2 * step) - at(-2 * step))) / (12 * step)
    expected = complex(mode.n_eff[0]) - nm * complex(by_nm)
    assert mode.group_index[0] == pytest.approx(expected.real, abs=1e-10)
