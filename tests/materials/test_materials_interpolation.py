"""The interpolating cubic: against scipy, monotone, with a continuous and true slope."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.interpolate import PchipInterpolator

import materials
from materials.interpolation import monotone

NAMES = [name for name in materials.names() if not name.endswith(":x")]
SOME = ["Ta2O5", "SiO2", "a-Si-evaporated", "Au", "Ge-film", "Si", "GaSb"]
tables = st.lists(st.floats(0.1, 10.0), min_size=2, max_size=12)


def curve_of(values):
    nm = np.cumsum(1.0 + np.arange(len(values)) % 3)
    return nm, monotone(nm, np.asarray(values).astype(complex))


@settings(deadline=None)
@given(tables)
def test_equals_scipy(values):
    nm, curve = curve_of(values)
    at = np.linspace(nm[0], nm[-1], 97)
    twin = PchipInterpolator(nm, values)
    np.testing.assert_allclose(curve.value(at).real, twin(at), rtol=1e-12, atol=1e-12)
    np.testing.assert_allclose(curve.slope(at).real, twin(at, 1), rtol=1e-9, atol=1e-9)


@pytest.mark.parametrize("name", SOME)
def test_equals_scipy_on_the_library(name):
    curve = materials.load(name).curve
    table = getattr(curve, "base", curve)
    at = np.geomspace(table.wavelength_nm[0] * (1 + 1e-9), table.wavelength_nm[-1] * 0.999999, 3000)
    for part in ("real", "imag"):
        twin = PchipInterpolator(table.wavelength_nm, getattr(table.index, part))
        np.testing.assert_allclose(getattr(table.value(at), part), twin(at), rtol=1e-11, atol=1e-12)


@settings(deadline=None)
@given(tables)
def test_monotone_data_stay_monotone(values):
    nm, curve = curve_of(np.sort(values))
    assert (np.diff(curve.value(np.linspace(nm[0], nm[-1], 301)).real) >= -1e-12).all()


@settings(deadline=None)
@given(tables)
def test_passes_through_the_table_and_stays_between_neighbours(values):
    nm, curve = curve_of(values)
    np.testing.assert_allclose(curve.value(nm).real, values, rtol=1e-13)
    for i in range(len(nm) - 1):
        inside = curve.value(np.linspace(nm[i], nm[i + 1], 9)).real
        assert inside.min() >= min(values[i], values[i + 1]) - 1e-12
        assert inside.max() <= max(values[i], values[i + 1]) + 1e-12


@settings(deadline=None)
@given(tables)
def test_slope_has_no_jump_at_the_rows(values):
    nm, curve = curve_of(values)
    step = 1e-9
    inner = nm[1:-1]
    np.testing.assert_allclose(
        curve.slope(inner - step).real, curve.slope(inner + step).real, atol=1e-5
    )


@pytest.mark.parametrize("name", NAMES)
def test_slope_is_the_derivative(name):
    """Central differences over the whole range, between the rows of a table."""
    material = materials.load(name)
    low, high = material.range_nm
    nm = np.geomspace(low * 1.001, high * 0.999, 57)
    step = 1e-5 * nm
    ahead, behind = material.nk(nm + step), material.nk(nm - step)
    difference = (ahead - behind) / (2 * step)
    np.testing.assert_allclose(
        material.slope(nm), difference, rtol=2e-3, atol=2e-6 * np.abs(ahead).max()
    )


@pytest.mark.parametrize(
    ("name", "nm", "group"), [("fused-silica", 1550.0, 1.4626), ("fused-silica", 800.0, 1.4671)]
)
def test_group_index(name, nm, group):
    """Group index of fused silica at 1550 and 800 nm: figures of fibre optics, from memory."""
    assert materials.load(name).group_index(nm) == pytest.approx(group, abs=1e-4)
