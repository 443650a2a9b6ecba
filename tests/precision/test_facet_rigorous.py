"""The modal facet against its rigorous twin, over guides and coatings of many kinds."""

from functools import cache

import numpy as np
import pytest
from rigorous_facet import Mesh, RigorousGuide

from coatings.optics.facet import ModalFacet
from coatings.optics.guide import Guide, fundamental

GUIDES = {
    "976 weak": ([3.45, 3.47, 3.45], [0.4], 976.0),
    "405 weak": ([2.48, 2.52, 2.48], [0.3], 405.0),
    "1064 thin": ([3.30, 3.40, 3.30], [0.12], 1064.0),
    "976 middle": ([3.40, 3.50, 3.40], [0.3], 976.0),
    "405 steps": ([2.42, 2.50, 2.55, 2.50, 2.45], [0.1, 0.04, 0.1], 405.0),
    "1550 thin": ([3.17, 3.38, 3.17], [0.05], 1550.0),
    "1550": ([3.17, 3.38, 3.17], [0.2], 1550.0),
    "1550 wide": ([3.17, 3.38, 3.17], [1.0], 1550.0),
    "1550 very wide": ([3.17, 3.38, 3.17], [3.0], 1550.0),
    "850": ([3.385, 3.60, 3.385], [0.2], 850.0),
    "1310 steps": ([3.17, 3.20, 3.38, 3.20, 3.17], [0.15, 0.1, 0.15], 1310.0),
    "1310 unequal": ([3.17, 3.38, 3.28], [0.3], 1310.0),
    "860 tight": ([3.24, 3.60, 3.24], [0.3], 860.0),
    "980 unequal and tight": ([3.20, 3.60, 3.30], [0.2], 980.0),
    "1310 tight": ([3.10, 3.50, 3.10], [0.15], 1310.0),
}
UNMARKED = {"1550", "1310 unequal"}
EVERY_GUIDE = [
    pytest.param(name, marks=[] if name in UNMARKED else [pytest.mark.slow]) for name in GUIDES
]
BOTH = pytest.mark.parametrize("tm", [False, True])


@cache
def both(name, tm):
    """The mode and its twin."""
    index, um, nm = GUIDES[name]
    mode = fundamental(Guide([nm], index, um), tm=tm)
    return mode, RigorousGuide(index, um, wavelength_nm=nm, tm=tm, n_eff=mode.n_eff[0])


def coatings(n_eff, nm):
    """Bare, one layer near its best, two layers, three pairs: indices and thicknesses."""
    one, quarter = np.sqrt(n_eff), nm / 4.0
    pairs = [quarter / 1.45, quarter / 2.2]
    return {
        "bare": ([], []),
        "one": ([one], [1.03 * quarter / one]),
        "two": ([2.1, 1.45], [0.06 * nm, 0.14 * nm]),
        "mirror": ([1.45, 2.2] * 3, pairs * 3),
    }


def model(mode, films, nm):
    table = np.array(films, complex)[:, None].reshape(len(films), 1)
    facet = ModalFacet(mode, 1.0, table)
    stack = np.reshape(nm, (1, -1)).astype(float)
    return facet.reflection(stack, film=np.arange(len(films)))[0, 0], facet.r_error


@BOTH
@pytest.mark.parametrize("name", EVERY_GUIDE)
def test_the_model_holds_what_it_promises(name, tm):
    mode, twin = both(name, tm)
    nm = GUIDES[name][2]
    assert abs(twin.n_eff - mode.n_eff[0]) < 1e-7
    for films, thickness in coatings(mode.n_eff[0].real, nm).values():
        expected = twin.reflection(films, thickness)
        found, error = model(mode, films, thickness)
        assert abs(abs(found) - abs(expected)) < error
        if abs(expected) ** 2 > 1e-4:
            allowed = 0.03 if error < 1e-3 else 0.2
            assert abs(found) ** 2 == pytest.approx(abs(expected) ** 2, rel=allowed)


def best_single_layer(mode):
    """Thickness of the layer of index sqrt(n_eff) that the model likes best."""
    films = [np.sqrt(mode.n_eff[0].real)]
    nm = np.linspace(0.9, 1.3, 2001) * mode.guide.wavelength_nm[0] / (4.0 * films[0])
    facet = ModalFacet(mode, 1.0, np.array([films], complex))
    big_r = facet.reflectance(nm[:, None], film=[0])[:, 0]
    away = nm[big_r.argmin() :][np.argmax(big_r[big_r.argmin() :] > 1e-4)]
    return films, [away]


@BOTH
@pytest.mark.parametrize("name", EVERY_GUIDE)
def test_antireflection_coatings_at_a_ten_thousandth(name, tm):
    mode, twin = both(name, tm)
    films, thickness = best_single_layer(mode)
    found, error = model(mode, films, thickness)
    expected = abs(twin.reflection(films, thickness)) ** 2
    allowed = 0.03 if error < 1e-3 else 0.2
    assert abs(found) ** 2 == pytest.approx(expected, rel=allowed)


# Metals beyond a dielectric and on the chip itself: no other check has a surface wave in it.
@BOTH
@pytest.mark.parametrize(
    ("index", "um", "nm", "films", "thickness"),
    [
        ([3.09, 3.20, 3.09], [2.5], 4600.0, [1.6, 2.7 + 31.0j], [300.0, 150.0]),
        ([3.20, 3.38, 3.20], [0.3], 980.0, [1.65, 0.15 + 6.0j], [80.0, 200.0]),
        ([3.20, 3.38, 3.20], [0.3], 980.0, [0.15 + 6.0j], [200.0]),
        ([2.48, 2.53, 2.48], [0.2], 405.0, [1.78, 0.05 + 2.2j], [60.0, 100.0]),
    ],
)
def test_metals(index, um, nm, films, thickness, tm):
    mode = fundamental(Guide([nm], index, um), tm=tm)
    twin = RigorousGuide(index, um, wavelength_nm=nm, tm=tm, n_eff=mode.n_eff[0])
    found, _ = model(mode, films, thickness)
    assert abs(found) == pytest.approx(abs(twin.reflection(films, thickness)), abs=1e-4)


# Computed by independent code, to the digits shown: the twin itself is held by them.
@pytest.mark.parametrize(
    ("core", "clad", "um", "nm", "te", "tm"),
    [
        (3.38, 3.17, 0.1, 1550.0, 0.284990, 0.264045),
        (3.38, 3.17, 0.2, 1550.0, 0.312124, 0.253338),
        (3.38, 3.17, 0.4, 1550.0, 0.348762, 0.245055),
        (3.60, 3.385, 0.2, 850.0, 0.376376, 0.268153),
        (3.60, 3.24, 0.3, 860.0, 0.415837, 0.264193),
    ],
)
def test_the_twin_against_figures_of_other_code(core, clad, um, nm, te, tm):
    index = [clad, core, clad]
    for is_tm, expected in ((False, te), (True, tm)):
        n_eff = fundamental(Guide([nm], index, [um]), tm=is_tm).n_eff[0]
        twin = RigorousGuide(index, [um], wavelength_nm=nm, tm=is_tm, n_eff=n_eff)
        assert abs(twin.reflection()) ** 2 == pytest.approx(expected, abs=2e-6)


@pytest.mark.slow
@BOTH
def test_the_twin_s_own_convergence(tm):
    index, um, nm = GUIDES["860 tight"]
    n_eff = fundamental(Guide([nm], index, um), tm=tm).n_eff[0]
    films, thickness = coatings(n_eff.real, nm)["mirror"]
    meshes = (
        Mesh(),
        Mesh(order=6),
        Mesh(largest=0.7, smallest=0.02),
        Mesh(clear=4.0, absorber=4.0),
        Mesh(damping=1.5),
    )
    found = []
    for mesh in meshes:
        twin = RigorousGuide(index, um, wavelength_nm=nm, tm=tm, n_eff=n_eff, mesh=mesh)
        found.append([twin.reflection(), twin.reflection(films, thickness)])
    assert np.abs(np.array(found) - found[0]).max() < 2e-6
