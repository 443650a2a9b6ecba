"""The slit: moments, fading of fringes, edges of the grid."""

import numpy as np
import pytest

from coatings.errors import ArrayError, InputError
from coatings.optics.slit import Slit

SHAPES = ("triangular", "rectangular", "gaussian")
SIGMA = 1 / np.sqrt(8 * np.log(2))


def _uneven(low, high, count, seed=0):
    steps = np.random.default_rng(seed).uniform(0.2, 1.0, count)
    return low + (high - low) * np.concatenate([[0.0], np.cumsum(steps) / steps.sum()])


@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("fwhm_nm", [0.01, 2.0, 15.0])
def test_a_straight_line_stays(shape, fwhm_nm):
    """Of any grid, even or not, finer or coarser than the slit."""
    grid = _uneven(900.0, 1000.0, 60)
    readings = np.array([935.0, 950.3, 964.9])
    weights = Slit(shape, fwhm_nm).weights(readings, grid)
    assert weights.shape == (3, 61)
    assert weights.min() > -1e-12
    np.testing.assert_allclose(weights.sum(axis=1), 1.0, rtol=1e-14)
    np.testing.assert_allclose(weights @ grid, readings, rtol=1e-12)


@pytest.mark.parametrize("shape", SHAPES)
def test_fringes_fade_by_the_transform_of_the_slit(shape):
    """sinc^2(b f), sinc(b f), exp(-2 (pi sigma f)^2) for triangle, rectangle, Gaussian (textbook)."""
    b, f = 6.0, 1 / 11.0
    expected = {
        "triangular": np.sinc(b * f) ** 2,
        "rectangular": np.sinc(b * f),
        "gaussian": np.exp(-2 * (np.pi * SIGMA * b * f) ** 2),
    }[shape]
    grid = np.linspace(900.0, 1000.0, 8001)
    readings = np.array([930.0, 941.7, 960.0])
    found = Slit(shape, b).weights(readings, grid) @ np.cos(2 * np.pi * f * grid)
    np.testing.assert_allclose(found, expected * np.cos(2 * np.pi * f * readings), atol=2e-5)


@pytest.mark.parametrize(
    ("shape", "variance"),
    [("triangular", 1 / 6), ("rectangular", 1 / 12), ("gaussian", SIGMA**2)],
)
def test_variance(shape, variance):
    """b^2/6, b^2/12, b^2/(8 ln 2) (textbook); the Gaussian's cut tails cost 6e-5 of it."""
    grid = np.linspace(-20.0, 20.0, 16001) + 950.0
    weights = Slit(shape, 5.0).weights([950.0], grid)
    assert weights @ (grid - 950.0) ** 2 == pytest.approx(variance * 25.0, rel=1e-4)


@pytest.mark.parametrize("shape", SHAPES)
def test_light_from_elsewhere_has_no_weight(shape):
    slit = Slit(shape, 3.0)
    grid = np.linspace(900.0, 1000.0, 201)
    weights = slit.weights([950.0], grid)[0]
    outside = abs(grid - 950.0) >= slit.reach_nm + 0.5
    np.testing.assert_array_equal(weights[outside], 0.0)
    assert (weights[abs(grid - 950.0) < slit.reach_nm - 0.5] > 0.0).all()


def test_a_narrow_slit_interpolates():
    grid, spectrum = np.array([900.0, 910.0, 920.0]), np.array([0.1, 0.3, 0.2])
    found = Slit("rectangular", 1e-3).weights([905.0, 912.0], grid) @ spectrum
    np.testing.assert_allclose(found, [0.2, 0.28], rtol=1e-8)


@pytest.mark.parametrize("shape", SHAPES)
def test_the_grid_it_asks_for_serves(shape):
    slit = Slit(shape, 2.5)
    readings = [960.0, 950.0, 955.5]
    grid = slit.grid_nm(readings, step_nm=0.4)
    assert np.diff(grid).max() <= 0.4
    assert grid[0] == pytest.approx(950.0 - slit.reach_nm)
    assert grid[-1] == pytest.approx(960.0 + slit.reach_nm)
    np.testing.assert_allclose(slit.weights(readings, grid).sum(axis=1), 1.0)


def test_nothing_is_assumed_beyond_the_grid():
    grid = np.linspace(900.0, 1000.0, 101)
    slit = Slit("triangular", 5.0)
    slit.weights([905.0, 995.0], grid)
    message = (
        r"reading_nm\[1\]: is 997.0 nm; its slit needs the spectrum from 992 to 1002 nm, which"
    )
    with pytest.raises(ArrayError, match=message):
        slit.weights([950.0, 997.0], grid)
    with pytest.raises(ArrayError, match=r"reading_nm\[0\]: is 904.0 nm; its slit needs"):
        slit.weights([904.0], grid)


@pytest.mark.parametrize(
    ("reading_nm", "wavelength_nm", "message"),
    [
        ([], [900.0, 1000.0], r"reading_nm: is empty; give one reading or more"),
        ([np.nan], [900.0, 1000.0], r"reading_nm\[0\]: is nan"),
        ([950.0], [900.0], r"wavelength_nm: has 1 points; a slit needs 2 or more"),
        ([950.0], [1000.0, 900.0], r"wavelength_nm\[1\]: is 900.0 nm; must be above 1000.0 nm"),
        ([950.0], [900.0, np.inf], r"wavelength_nm\[1\]: is inf"),
        ([[950.0]], [900.0, 1000.0], r"reading_nm: has 2 axes"),
    ],
)
def test_bad_arrays(reading_nm, wavelength_nm, message):
    with pytest.raises(ArrayError, match=message):
        Slit("triangular", 5.0).weights(reading_nm, wavelength_nm)


def test_bad_slits():
    with pytest.raises(InputError, match=r"slit.shape: got 'round'; give one of triangular, rect"):
        Slit("round", 1.0)
    with pytest.raises(InputError, match=r"slit.fwhm_nm: got 0.0; give more than 0, or no slit"):
        Slit("gaussian", 0.0)
    with pytest.raises(InputError, match=r"step_nm: got -1.0; give more than 0"):
        Slit("gaussian", 1.0).grid_nm([950.0], step_nm=-1.0)
