"""The committed tables are those that the script makes from the open data set."""

from __future__ import annotations

import json

import make_tables
import numpy as np
import pytest

import materials
from materials.index import FOLDER

TABLES = [spec for spec in make_tables.SPECS if spec.key and not spec.formula]


@pytest.fixture(scope="module")
def made() -> dict[str, str]:
    return make_tables.made()


def test_committed_tables_equal_those_made_anew(made):
    assert set(made) == {path.name for path in FOLDER.iterdir()}
    for name, text in made.items():
        assert (FOLDER / name).read_text(encoding="utf-8") == text, name


def test_tables_stay_small():
    assert sum(path.stat().st_size for path in FOLDER.iterdir()) < 700_000


@pytest.mark.parametrize("spec", TABLES, ids=[spec.name for spec in TABLES])
def test_thinning_and_rounding_lose_nothing_that_matters(spec):
    """Every row of the data set comes back from the committed table."""
    nm, n, k = make_tables.table_rows(spec)
    material = materials.load(spec.name)
    low, high = material.range_nm
    inside = (nm >= low) & (nm <= high)
    index = material.nk(nm[inside])
    # six printed digits of n and four of k on top of the thinning
    np.testing.assert_allclose(index.real, n[inside], rtol=1e-6, atol=2e-5)
    np.testing.assert_allclose(index.imag, k[inside] * spec.k_used, rtol=2e-3, atol=2e-6)


def test_index_lists_what_the_heads_say():
    listed = json.loads((FOLDER / "index.json").read_text(encoding="utf-8"))
    assert [head["name"] for head in listed] == list(materials.names())
    for info in materials.entries():
        if info.composition is None:
            assert materials.load(info.name).info == info, info.name


def test_coverage_of_the_trade():
    assert len(materials.names()) >= 45
    compounds = {info.compound for info in materials.entries()}
    assert compounds >= {
        "GaAs", "AlAs", "AlGaAs", "InP", "InGaAsP", "InGaAs", "AlInAs", "GaSb", "AlGaSb", "InAs",
        "GaN", "AlGaN", "AlN", "ZnSe", "Ge", "Si", "a-Si", "SiO2", "SiO", "Al2O3", "Ta2O5",
        "TiO2", "Nb2O5", "HfO2", "ZrO2", "Y2O3", "Sc2O3", "LaF3", "Si3N4", "SiON", "MgF2", "CaF2",
        "YbF3", "BaF2", "ZnS", "MgO", "ITO", "Au", "Ag", "Al", "Ti", "Pt", "Cr", "Ni", "Cu",
        "As2S3", "air", "vacuum", "N2", "H2O",
    }  # fmt: skip


@pytest.mark.parametrize(
    ("names", "low", "high"),
    [
        (["Al2O3", "Ta2O5", "SiO2", "AlGaAs:0.30"], 780.0, 1000.0),
        (["InP", "Al2O3", "SiO2", "TiO2", "Ta2O5", "a-Si", "Si3N4", "Nb2O5"], 1300.0, 1600.0),
        (["GaN", "Al2O3", "SiO2", "Ta2O5", "HfO2", "ZrO2", "AlN", "MgF2"], 390.0, 450.0),
        (["InP", "Al2O3", "HfO2", "Y2O3", "Ge-film", "Au", "air", "YbF3"], 4300.0, 4900.0),
        (["GaSb", "Al2O3", "SiO2", "a-Si", "Ta2O5-evaporated"], 1900.0, 2400.0),
    ],
)
def test_defaults_cover_the_lasers_of_the_trade(names, low, high):
    for name in names:
        assert np.isfinite(materials.load(name).nk([low, high])).all()


@pytest.mark.parametrize(
    ("name", "nm", "bound"),
    [
        ("Ta2O5", 976.0, 1e-6),
        ("Ta2O5", 405.0, 1e-3),
        ("Al2O3", 405.0, 1e-6),
        ("Al2O3", 4600.0, 1e-6),
        ("SiO2", 405.0, 1e-4),
        ("SiO2", 1550.0, 1e-6),
        ("TiO2", 976.0, 1e-6),
        ("HfO2", 405.0, 1e-4),
        ("Nb2O5", 976.0, 1e-4),
        ("a-Si", 1310.0, 1e-6),
        ("MgF2", 976.0, 1e-6),
    ],
)
def test_films_are_clear_where_the_trade_uses_them(name, nm, bound):
    """Common practice: these films serve there with losses of far below a percent a layer."""
    assert materials.load(name).nk(nm).imag <= bound


def test_no_brands_in_the_tables():
    """Samples and processes are described, not their makers."""
    for info in materials.entries():
        text = f"{info.sample} {info.process} {info.notes}".casefold()
        for word in ("inc.", "gmbh", "ltd", "corp", "®", "™"):
            assert word not in text, info.name
