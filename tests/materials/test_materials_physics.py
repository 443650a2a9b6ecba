"""What any passive medium must obey, over the whole library."""

from __future__ import annotations

import make_tables
import numpy as np
import pytest

import materials

TABLES = [spec for spec in make_tables.SPECS if spec.key and not spec.formula]
NAMES = [name for name in materials.names() if not name.endswith(":x")]


def sampled(name: str, count: int = 4001):
    material = materials.load(name)
    low, high = material.range_nm
    nm = np.geomspace(low, high, count)
    nm[0], nm[-1] = low, high
    return nm, material.nk(nm)


@pytest.mark.parametrize("name", NAMES)
def test_passive_everywhere(name):
    _, index = sampled(name)
    assert (index.imag >= 0).all()
    assert (index.real > 0).all()


@pytest.mark.parametrize("name", [n for n in NAMES if n not in ("air", "vacuum")])
def test_clear_media_slow_light_down(name):
    _, index = sampled(name)
    assert (index.real[index.imag < 0.01] > 1.0).all()


@pytest.mark.parametrize("name", NAMES)
def test_unknown_absorption_is_zero(name):
    material = materials.load(name)
    _, index = sampled(name)
    if material.info.k_status in ("unknown", "below detection"):
        assert not index.imag.any()
        assert not material.k_known
    else:
        assert material.k_known


#: Steps that a note of the entry owns up to: wavelength [nm] where they are.
KNOWN_STEPS = {"Ge-film": 2600.0}


@pytest.mark.parametrize("spec", TABLES, ids=[spec.name for spec in TABLES])
def test_no_row_stands_out_from_its_neighbours(spec):
    """Every row of the data is where a cubic through the four rows around it says.

    It may be off by the largest change among them, plus 0.1 % of itself.
    """
    nm, n, k = make_tables.table_rows(spec)
    for values in (n, k):
        off = np.abs(values[2:-2] - _cubic_without(np.log(nm), values))
        change = np.abs(np.diff(values))
        explained = np.max([change[:-3], change[1:-2], change[2:-1], change[3:]], axis=0)
        bad = nm[2:-2][off > explained + 1e-3 * values[2:-2] + 1e-4]
        known = KNOWN_STEPS.get(spec.name, np.inf)
        assert all(abs(at - known) < 30.0 for at in bad)
    assert spec.name not in KNOWN_STEPS or "step" in spec.notes


def _cubic_without(x, y):
    """Lagrange cubic at row i through rows i-2, i-1, i+1, i+2."""
    size = len(x)
    near = [slice(2 + shift, size - 2 + shift) for shift in (-2, -1, 1, 2)]
    at, total = x[2:-2], 0.0
    for one in near:
        weight = np.ones(size - 4)
        for other in near:
            if other is not one:
                weight *= (at - x[other]) / (x[one] - x[other])
        total = total + weight * y[one]
    return total


@pytest.mark.parametrize(
    ("name", "tolerance"),
    [("Si", 0.002), ("a-Si", 0.002), ("a-Si-H", 0.002), ("TiO2", 0.01), ("Nb2O5", 0.01)],
)
def test_kramers_kronig(name, tolerance):
    """n follows from k: loose, because the table ends in the ultraviolet.

    n(E) - 1 = (2/pi) P int E' k(E')/(E'^2 - E^2) dE' over the table, and what lies beyond its
    short end acts far below as a + b E^2. With a and b fitted, the rest must be within the
    tolerance of n from 0.5 to 2.4 eV while n itself changes by much more.
    """
    nm, index = sampled(name, 20001)
    energy = (1239.84198 / nm)[::-1]
    k = index.imag[::-1]
    at = np.linspace(0.5, 2.4, 40)
    from_k = np.array([_dispersion(energy, k, e) for e in at])
    n = np.interp(at, energy, index.real[::-1])
    rest = n - 1.0 - from_k
    fit = np.polynomial.Polynomial.fit(at**2, rest, 1)
    assert np.abs(rest - fit(at**2)).max() <= tolerance * n.mean()
    assert np.ptp(n) > 5.0 * np.abs(rest - fit(at**2)).max()


def _dispersion(energy, k, at):
    """Principal value by subtracting the singular part, whose integral has a closed form."""
    k_at = np.interp(at, energy, k)
    with np.errstate(divide="ignore", invalid="ignore"):
        smooth = (energy * k - at * k_at) / (energy**2 - at**2)
    smooth[~np.isfinite(smooth)] = 0.0
    a, b = energy[0], energy[-1]
    log = 0.5 * (np.log((b - at) / (b + at)) - np.log((at - a) / (a + at)))
    return 2.0 / np.pi * (np.trapezoid(smooth, energy) + k_at * log)


@pytest.mark.parametrize("name", ["Au", "Ag", "Cu", "Al"])
def test_metals_obey_the_law_of_free_electrons(name):
    """Far in the infrared k nears wp/w: within 15 % of the plasma energies of textbooks.

    Au 8.5 to 9.0, Ag 8.9 to 9.2, Cu 8.9, Al 12.5 to 15 eV; from memory.
    """
    plasma = {"Au": 8.7, "Ag": 9.0, "Cu": 8.8, "Al": 13.0}[name]
    photon = 1239.84198 / 5000.0
    square = materials.load(name).nk(5000.0) ** 2
    assert np.sqrt(1.0 - square.real) * photon == pytest.approx(plasma, rel=0.15)
