"""What a guide can't be, and why: one line that names the place and the wavelength."""

import numpy as np
import pytest

from coatings.errors import ArrayError, InputError
from coatings.optics.far_field import far_field
from coatings.optics.guide import Guide, fundamental, shifted_mode

NAN = float("nan")
GOOD = {"wavelength_nm": [976.0, 980.0], "index": [3.3, 3.4, 3.3], "thickness_um": [0.3]}


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"wavelength_nm": []}, "wavelength_nm: is empty; give one wavelength or more"),
        ({"wavelength_nm": [976.0, -1.0]}, r"wavelength_nm\[1\]: is -1.0 nm; give more than 0"),
        ({"wavelength_nm": [NAN]}, r"wavelength_nm\[0\]: is nan; give a finite number"),
        ({"index": [3.3, 3.4]}, "index: holds 2 layers; give a half-space on each side"),
        ({"index": [3.3, 0.0, 3.3]}, r"index\[1, 0\]: is 0; no medium has an index of 0"),
        ({"index": [3.3, NAN, 3.3]}, r"index\[1\]: is \(nan\+0j\); give a finite number"),
        ({"index": [[3.3], [3.4], [3.3]]}, r"index: has shape \(3, 1\); expected \(3, 2\)"),
        ({"index": 3.3}, "index: has 0 axes"),
        ({"thickness_um": [0.3, 0.3]}, r"thickness_um: has shape \(2,\); expected \(1,\)"),
        ({"thickness_um": []}, r"thickness_um: has shape \(0,\); expected \(1,\)"),
        ({"thickness_um": [NAN]}, r"thickness_um\[0\]: is nan; give a finite number"),
        ({"thickness_um": [5e-5]}, r"thickness_um\[0\]: is 5e-05 um; a layer is 0.1 nm"),
        ({"thickness_um": [-0.3]}, r"thickness_um\[0\]: is -0.3 um; a layer is 0.1 nm"),
        ({"slope_per_nm": [0.0, 0.0]}, r"slope_per_nm: has shape \(2, 2\); expected \(3, 2\)"),
        ({"slope_per_nm": [0.0, NAN, 0.0]}, r"slope_per_nm\[1\]: is \(nan\+0j\)"),
    ],
)
def test_arrays(change, message):
    with pytest.raises(ArrayError, match=message):
        Guide(**{**GOOD, **change})


@pytest.mark.parametrize("tm", [False, True])
def test_no_core(tm):
    guide = Guide([976.0], [3.3, 3.2, 3.3], [0.3])
    with pytest.raises(InputError, match=r"guide: has no bound T. mode at 976 nm: no layer within"):
        fundamental(guide, tm=tm)


def test_too_thin_for_unequal_sides():
    # Cut-off of the asymmetric slab: V = atan(sqrt((n2^2 - n3^2)/(n1^2 - n2^2))).
    n1, n2, n3 = 3.4, 3.3, 1.0
    v = np.arctan(np.sqrt((n2**2 - n3**2) / (n1**2 - n2**2)))
    um = v * 0.976 / (2.0 * np.pi * np.sqrt(n1**2 - n2**2))
    with pytest.raises(InputError, match="too thin or too weak for its unequal sides"):
        fundamental(Guide([976.0], [n2, n1, n3], [0.9999 * um]), tm=False)
    assert fundamental(Guide([976.0], [n2, n1, n3], [1.03 * um]), tm=False).n_eff[0].real > n2
    with pytest.raises(InputError, match="it is next to cut-off; strengthen the core"):
        fundamental(Guide([976.0], [n2, n1, n3], [1.0001 * um]), tm=False)


def test_not_at_one_end_of_the_band():
    nm = np.array([960.0, 970.0, 980.0])
    index = np.array([[3.3] * 3, [3.4, 3.35, 3.29], [3.3] * 3])
    message = "guides TE at 970 nm but not at 980 nm: no layer within .*3.29.* narrow the band"
    with pytest.raises(InputError, match=message):
        fundamental(Guide(nm, index, [0.3]), tm=False)


def test_the_tail_of_a_weak_guide():
    message = "TE mode of order 0 so weakly at 1550 nm that a tail is .* um long"
    with pytest.raises(InputError, match=message):
        fundamental(Guide([1550.0], [3.17, 3.171, 3.17], [0.02]), tm=False)


@pytest.mark.parametrize("tm", [False, True])
def test_twins(tm):
    layers = [3.2, 3.4, 3.2, 3.4, 3.2]
    with pytest.raises(InputError, match=r"guide: has twin guides: .* at 976 nm.*give one of them"):
        fundamental(Guide([976.0], layers, [0.3, 6.0, 0.3]), tm=tm)
    assert fundamental(Guide([976.0], layers, [0.3, 1.0, 0.3]), tm=tm).n_eff[0].real > 3.2


def test_a_metal_in_tm():
    guide = Guide([1310.0, 1320.0], [3.2, 3.4, 3.2, 0.2 + 8j], [0.3, 0.5])
    message = r"guide layer 4: is 0.2 \+ 8i at 1310 nm, a metal: in TM .* bound to its surface"
    with pytest.raises(InputError, match=message):
        fundamental(guide, tm=True)
    assert fundamental(guide, tm=False).n_eff[0].real > 3.2


def test_a_mode_that_loss_unbinds():
    guide = Guide([1310.0], [3.351 - 0.011j, 3.447 - 0.027j, 3.379 - 0.373j], [0.189])
    with pytest.raises(InputError, match="keeps no TE mode at 1310 nm when loss and gain"):
        fundamental(guide, tm=False)


def test_a_shift_that_ends_the_mode_is_named():
    mode = fundamental(Guide([976.0], [3.3, 3.4, 1.0], [0.26]), tm=False)
    message = r"guide: with -0.7 on the index of every layer, has no bound TE mode at 976 nm"
    with pytest.raises(InputError, match=message):
        shifted_mode(mode, by=-0.7)


def test_positions_and_angles():
    mode = fundamental(Guide(**GOOD), tm=False)
    with pytest.raises(ArrayError, match=r"x_um\[1\]: is nan; give a finite number"):
        mode.profile([0.0, NAN])
    with pytest.raises(ArrayError, match=r"angle_deg\[0\]: is 91.0; give -90 to 90 degrees"):
        far_field(mode, [91.0])
