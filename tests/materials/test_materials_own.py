"""A recipe's own data: tables as people write them, numbers, scales, mixtures."""

from __future__ import annotations

import re

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import materials

GOOD = "wavelength_nm,n,k\n400,2.0,0.1\n500,1.9,0.05\n600,1.8,0\n"


def table(text: str):
    return materials.from_table_text(text, name="film", where="lot.csv")


def refused(what: str):
    return pytest.raises(materials.TableError, match=re.escape(what))


@pytest.mark.parametrize(
    "text",
    [
        GOOD,
        "\ufeff" + GOOD,
        GOOD.replace("\n", "\r\n"),
        "# lot 7\n\n" + GOOD,
        GOOD.replace(",", ";"),
        GOOD.replace(",", "\t"),
        GOOD.replace(",", ";").replace(".", ","),
        GOOD.replace(",", "\t").replace(".", ","),
        GOOD.replace("wavelength_nm", "Wavelength (nm)").replace("n,k", "N,K"),
        GOOD.replace("wavelength_nm", '"lambda [nm]"'),
        GOOD.replace("wavelength_nm", "wl nm"),
        "wavelength_um,n,k\n0.4,2.0,0.1\n0.5,1.9,0.05\n0.6,1.8,0\n",
        "Wavelength (µm);n;k\n0,4;2,0;0,1\n0,5;1,9;0,05\n0,6;1,8;0\n",
        "n,k,wavelength_nm\n2.0,0.1,400\n1.9,0.05,500\n1.8,0,600\n",
    ],
)
def test_sane_tables_are_understood(text):
    material = table(text)
    np.testing.assert_allclose(material.range_nm, (400.0, 600.0))
    np.testing.assert_allclose(material.nk([400.0, 500.0, 600.0]), [2 + 0.1j, 1.9 + 0.05j, 1.8])
    assert material.k_known
    assert material.info.use == "own"
    assert "lot.csv" in material.info.source


def test_k_may_be_left_out_and_is_then_unknown():
    material = table("wavelength_nm,n\n400,2.0\n600,1.8\n")
    assert not material.k_known
    assert material.nk(500.0) == 1.9


@pytest.mark.parametrize(
    ("text", "line", "what"),
    [
        ("", None, "is empty; write the header"),
        ("# only remarks\n", None, "is empty"),
        ("hello\n", 1, "'hello' is not a header"),
        ("400,2.0,0\n500,1.9,0\n", 1, "is not a header of these"),
        ("wavelength,n\n400,2\n500,2\n", 1, "lacks its unit (nm or um)"),
        ("wavelength (cm),n\n400,2\n500,2\n", 1, "lacks its unit"),
        ("wavelength_nm,n,n\n400,2,2\n500,2,2\n", 1, "is not a header of these"),
        ("wavelength_nm,R\n400,2\n500,2\n", 1, "is not a header of these"),
        (GOOD.replace("1.9", "high"), 3, "'high' is not a number"),
        (GOOD.replace("1.9", ""), 3, "a cell is empty"),
        (GOOD.replace("500,1.9,0.05", "500,1.9"), 3, "2 cells where the header has 3"),
        (GOOD.replace(".", ","), 2, "decimal commas need semicolons"),
        (GOOD.replace("500", "400"), 3, "is repeated"),
        (GOOD.replace("500", "300"), 3, "sort the table, rising"),
        ("wavelength_nm,n\n\n600,1.8\n400,2.0\n", 4, "sort the table, rising"),
        (GOOD.replace("1.9", "nan"), 3, "n is not a finite number"),
        (GOOD.replace("1.9", "-1.9"), 3, "n must be positive"),
        (GOOD.replace("0.05", "-0.05"), 3, "k is below zero"),
        (GOOD.replace("400", "0"), 2, "the wavelength must be positive"),
        ("wavelength_nm,n\n400,2\n", None, "fewer than two rows"),
        ("wavelength_nm,n\n", None, "fewer than two rows"),
        ("x" * 10_000_001, None, "more than 10 MB is refused"),
    ],
)
def test_bad_tables_are_refused_with_their_line(text, line, what):
    with refused(what) as caught:
        table(text)
    assert caught.value.line == line
    assert "\n" not in str(caught.value)


def test_bytes():
    def read(data: bytes):
        return materials.from_table_bytes(data, name="film", where="lot.csv")

    for encoding in ("utf-8", "utf-8-sig", "utf-16"):
        assert read(GOOD.encode(encoding)).nk(400.0) == 2 + 0.1j
    with refused("is not UTF-8 text; save the table as UTF-8") as caught:
        read("wavelength_nm,n\n400,2\n500,2 µ\n".encode("latin-1"))
    assert caught.value.line == 3
    with refused("is a binary file"):
        read(b"PK\x03\x04\0\0\0")
    with refused("12.0 MB; a table of more than 10 MB is refused"):
        read(b"1" * 12_000_000)


def test_constant():
    material = materials.constant("film", 2.1, 1e-3)
    np.testing.assert_array_equal(material.nk([300.0, 5000.0]), 2.1 + 1e-3j)
    assert not material.slope([300.0, 5000.0]).any()
    assert material.k_known


@pytest.mark.parametrize("n", [0.0, -2.0, np.nan, np.inf])
def test_index_that_cannot_be(n):
    with pytest.raises(materials.MaterialError, match="must be a positive number"):
        materials.constant("film", n)


@pytest.mark.parametrize("k", [-1e-3, np.nan, np.inf])
def test_absorption_that_cannot_be(k):
    with pytest.raises(materials.MaterialError, match=r"k .* must be zero or more"):
        materials.constant("film", 2.0, k)


def test_cauchy():
    material = materials.cauchy("film", [2.05, 0.018, 1e-4], 1e-4)
    assert material.nk(500.0) == pytest.approx(2.05 + 0.018 / 0.25 + 1e-4 / 0.0625 + 1e-4j)
    slope = (-2 * 0.018 / 0.125 - 4e-4 / 0.5**5) * 1e-3
    assert material.slope(500.0).real == pytest.approx(slope)
    assert materials.cauchy("film", [2.0]).nk(700.0) == 2.0


@pytest.mark.parametrize(
    ("coefficients", "what"),
    [
        ([], "needs one coefficient or more"),
        ([2.0, np.nan], "not a finite number"),
        ([-1.0], "must be a positive number"),
    ],
)
def test_cauchy_that_cannot_be(coefficients, what):
    with pytest.raises(materials.MaterialError, match=what):
        materials.cauchy("film", coefficients)


def test_scaled():
    base = materials.load("Ta2O5")
    material = materials.scaled(base, factor=0.985, name="lot")
    nm = np.array([405.0, 976.0])
    np.testing.assert_allclose(material.nk(nm).real, 0.985 * base.nk(nm).real)
    np.testing.assert_array_equal(material.nk(nm).imag, base.nk(nm).imag)
    np.testing.assert_allclose(material.slope(nm).real, 0.985 * base.slope(nm).real)
    assert material.name == "lot"
    assert "Ta2O5 times 0.985" in material.info.notes
    assert material.range_nm == base.range_nm


def test_scaled_still_warms():
    warm = materials.at_temperature(
        materials.scaled(materials.load("Si"), factor=0.99), celsius=60.0
    )
    plain = materials.at_temperature(materials.load("Si"), celsius=60.0)
    assert warm.nk(1550.0).real == pytest.approx(0.99 * plain.nk(1550.0).real, rel=1e-14)


@pytest.mark.parametrize("factor", [0.0, -1.0, np.nan, np.inf])
def test_scale_that_cannot_be(factor):
    with pytest.raises(materials.MaterialError, match="must be a positive number"):
        materials.scaled(materials.load("Ta2O5"), factor=factor)


def mixed(n1, n2, fraction):
    first, second = (materials.constant(f"m{i}", n.real, n.imag) for i, n in enumerate((n1, n2)))
    return complex(materials.mixture("mix", first, second, fraction=fraction).nk(500.0))


dense = st.floats(1.2, 4.0)


@settings(deadline=None)
@given(dense, dense, st.floats(0.0, 1.0))
def test_mixture_of_clear_media_solves_its_equation_within_its_bounds(n1, n2, f):
    """Bruggeman's equation; Wiener's and Hashin and Shtrikman's bounds."""
    n = mixed(complex(n1), complex(n2), f)
    e, e1, e2 = n.real**2, n1 * n1, n2 * n2
    assert n.imag == 0
    left = (1 - f) * (e1 - e) / (e1 + 2 * e) + f * (e2 - e) / (e2 + 2 * e)
    assert abs(left) < 1e-12
    assert 1 / ((1 - f) / e1 + f / e2) * (1 - 1e-12) <= e <= ((1 - f) * e1 + f * e2) * (1 + 1e-12)
    low, high = sorted((_maxwell(e1, e2, f), _maxwell(e2, e1, 1 - f)))
    assert low * (1 - 1e-12) <= e <= high * (1 + 1e-12)


def _maxwell(host, guest, share):
    """Maxwell Garnett's mixture, which is the bound of Hashin and Shtrikman."""
    ratio = share * (guest - host) / (guest + 2 * host)
    return host * (1 + 2 * ratio) / (1 - ratio)


@settings(deadline=None)
@given(st.floats(0.05, 4.0), st.floats(0.0, 12.0), dense, st.floats(0.0, 1.0))
def test_mixture_with_a_metal_stays_passive_and_solves_its_equation(n1, k1, n2, f):
    first = complex(n1, k1)
    n = mixed(first, complex(n2), f)
    e, e1, e2 = n * n, first * first, n2 * n2
    assert n.real >= 0
    assert n.imag >= -1e-9
    left = (1 - f) * (e1 - e) * (e2 + 2 * e) + f * (e2 - e) * (e1 + 2 * e)
    assert abs(left) <= 1e-9 * max(abs(e1), abs(e2), abs(e)) ** 2


@pytest.mark.parametrize(("n1", "n2"), [(1.46, 2.1), (0.2 + 6j, 1.46), (3.8 + 0.02j, 1.0)])
def test_mixture_ends_at_its_parts(n1, n2):
    assert mixed(complex(n1), complex(n2), 0.0) == pytest.approx(n1, rel=1e-12)
    assert mixed(complex(n1), complex(n2), 1.0) == pytest.approx(n2, rel=1e-12)


def test_mixture_is_symmetric():
    assert mixed(1.46 + 0j, 2.1 + 0.01j, 0.3) == pytest.approx(mixed(2.1 + 0.01j, 1.46 + 0j, 0.7))


def test_mixture_of_equal_parts_by_hand():
    """e1 = 1, e2 = 4, half each: 2 e^2 - 2.5 e - 4 = 0, e = (2.5 + sqrt(38.25))/4."""
    assert mixed(1.0 + 0j, 2.0 + 0j, 0.5) ** 2 == pytest.approx((2.5 + np.sqrt(38.25)) / 4)


def test_mixture_of_the_library():
    first, second = materials.load("SiO2"), materials.load("Ta2O5")
    material = materials.mixture("graded", first, second, fraction=0.3)
    assert material.range_nm == (350.0, 1800.0)
    nm = np.array([500.0, 976.0])
    assert (material.nk(nm).real > first.nk(nm).real).all()
    assert (material.nk(nm).real < second.nk(nm).real).all()
    assert "SiO2" in material.info.source
    assert material.k_known


def test_silicon_oxynitride_is_a_mixture():
    nm = np.array([400.0, 976.0, 1550.0])
    ends = [materials.load(name).nk(nm) for name in ("SiON:0", "SiON:1")]
    np.testing.assert_allclose(ends[0], materials.load("SiO2").nk(nm), rtol=1e-12)
    np.testing.assert_allclose(ends[1], materials.load("Si3N4").nk(nm), rtol=1e-12)
    assert 1.46 < materials.load("SiON:0.5").nk(976.0).real < 2.01


@pytest.mark.parametrize("fraction", [-0.1, 1.1, np.nan])
def test_mixture_of_an_impossible_share(fraction):
    with pytest.raises(materials.MaterialError, match="must lie between 0 and 1"):
        mixed(1.5 + 0j, 2.0 + 0j, fraction)


def test_mixture_without_common_range():
    with pytest.raises(materials.MaterialError, match="GaAs-absorbing and Ge have no common range"):
        materials.mixture("m", materials.load("GaAs-absorbing"), materials.load("Ge"), fraction=0.5)
