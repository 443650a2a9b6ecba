"""Every array that can't be used is answered with its name, its place and its value."""

import numpy as np
import pytest

from coatings.errors import ArrayError
from coatings.optics import Scene, response, weighted_gradient

GOOD = {
    "wavelength_nm": [900.0, 950.0],
    "incident": 3.3,
    "outside": 1.0,
    "films": [[1.45, 1.45], [2.1, 2.1]],
}
NAN = float("nan")


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ({"wavelength_nm": []}, "wavelength_nm: is empty; give one point or more"),
        ({"wavelength_nm": [900.0, NAN]}, r"wavelength_nm\[1\]: is nan; give a finite number"),
        ({"wavelength_nm": [900.0, 0.0]}, r"wavelength_nm\[1\]: is 0.0 nm; give more than 0"),
        ({"wavelength_nm": [-900.0, 950.0]}, r"wavelength_nm\[0\]: is -900.0 nm"),
        ({"wavelength_nm": 900.0}, r"wavelength_nm: has 0 axes \(shape \(\)\); give 1"),
        ({"wavelength_nm": [900.0 + 1j, 950.0]}, "wavelength_nm: holds complex128; give float64"),
        ({"incident": [3.3, 3.3, 3.3]}, r"incident: has shape \(3,\); expected \(2,\)"),
        ({"incident": [3.3, np.inf]}, r"incident\[1\]: is \(inf\+0j\); give a finite number"),
        ({"outside": 0.0}, r"outside\[0\]: is 0; no medium has an index of 0"),
        ({"outside": ["a", "b"]}, "outside: holds <U1; give complex128"),
        ({"films": [[1.45, 1.45], [2.1]]}, "films: is no rectangular array"),
        ({"films": [[1.45], [2.1]]}, r"films: has shape \(2, 1\); expected \(2, 2\)"),
        ({"films": [[1.45, 1.45], [2.1, 0.0]]}, r"films\[1, 1\]: is 0"),
        ({"films": [[1.45, NAN], [2.1, 2.1]]}, r"films\[0, 1\]: is \(nan\+0j\)"),
        ({"q": [0.5]}, r"q: has shape \(1,\); expected \(2,\)"),
        ({"q": [0.5, NAN]}, r"q\[1\]: is \(nan\+0j\)"),
        ({"tm": [True]}, r"tm: has shape \(1,\); expected \(2,\)"),
        ({"tm": "TM"}, r"tm: holds <U2; give True \(TM\) or False \(TE\)"),
    ],
)
def test_scene(change, message):
    with pytest.raises(ArrayError, match=message):
        Scene(**{**GOOD, **change})


SHIFTS = [[0.0, 0.0]]


@pytest.mark.parametrize(
    ("thickness", "change", "message"),
    [
        ([[100.0, -1.0]], {}, r"thickness_nm\[0, 1\]: is -1.0 nm; give 0 or more"),
        ([[100.0, NAN]], {}, r"thickness_nm\[0, 1\]: is nan nm"),
        ([[100.0, np.inf]], {}, r"thickness_nm\[0, 1\]: is inf nm"),
        ([100.0, 80.0], {}, r"thickness_nm: has 1 axes \(shape \(2,\)\); give 2"),
        (np.empty((0, 2)), {}, "thickness_nm: holds no stack; give one row or more"),
        ([[100.0, "x"]], {}, "thickness_nm: holds <U"),
        ([[100.0]], {}, r"film: has shape \(2,\); expected \(1,\)"),
        ([[100.0, 80.0]], {"film": [0, 2]}, r"film\[1\]: is 2; the scene has 2 films"),
        ([[100.0, 80.0]], {"film": [-1, 1]}, r"film\[0\]: is -1"),
        ([[1.0, 1.0]] * 2, {"film": [[0, 1], [1, 7]]}, r"film\[1, 1\]: is 7"),
        ([[100.0, 80.0]], {"film": [0.0, 1.0]}, "film: holds float64; give int64"),
        ([[1.0, 1.0]] * 3, {"film": [[0, 1]] * 2}, r"film: has shape \(2, 2\); expected \(3, 2\)"),
        ([[1.0, 1.0]], {"film_shift": [[0.1]]}, r"film_shift: has shape \(1, 1\); expected"),
        ([[1.0, 1.0]], {"film_shift": [[0.1, NAN]]}, r"film_shift\[0, 1\]: is \(nan\+0j\)"),
        ([[1.0, 1.0]], {"incident_shift": [0.1, 0.1]}, r"incident_shift: has shape \(2,\)"),
        ([[1.0, 1.0]], {"incident_shift": [NAN]}, r"incident_shift\[0\]: is nan"),
    ],
)
def test_stacks(thickness, change, message):
    arguments = {"film": [0, 1], **change}
    with pytest.raises(ArrayError, match=message):
        response(Scene(**GOOD), thickness, **arguments)
    with pytest.raises(ArrayError, match=message):
        weighted_gradient(Scene(**GOOD), thickness, weight=[[1.0, 1.0]], **arguments)


def test_what_was_given_is_neither_changed_nor_shared():
    nm = np.array([900.0, 950.0])
    films = np.full((1, 2), 1.45 + 0j)
    scene = Scene(nm, 3.3, 1.0, films)
    nm[:] = 1.0
    films[:] = 9.0
    np.testing.assert_array_equal(scene.wavelength_nm, [900.0, 950.0])
    np.testing.assert_array_equal(scene.films, [[1.45, 1.45]])
    with pytest.raises(ValueError, match="read-only"):
        scene.wavelength_nm[0] = 1.0


def test_read_only_and_strided_arrays_serve():
    scene = Scene(**GOOD)
    thickness = np.array([[100.0, 80.0], [50.0, 40.0]])
    expected = response(scene, thickness, film=[0, 1]).r
    fixed = thickness.copy()
    fixed.setflags(write=False)
    np.testing.assert_array_equal(response(scene, fixed, film=[0, 1]).r, expected)
    strided = np.repeat(thickness, 2, axis=1)[:, ::2]
    np.testing.assert_array_equal(response(scene, strided, film=[0, 1]).r, expected)
    np.testing.assert_array_equal(response(scene, [[100, 80], [50, 40]], film=[0, 1]).r, expected)
