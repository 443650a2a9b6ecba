"""The guided mode at its facet: values, identities, derivatives and a slow twin."""

import numpy as np
import pytest
from facets import GUIDES, SILICA, STACKS, TANTALA, facet
from hypothesis import given, settings
from hypothesis import strategies as st
from modal_in_numpy import Twin

from coatings.errors import ArrayError, InputError
from coatings.optics import reflection
from coatings.optics.facet import ModalFacet
from coatings.optics.guide import Guide, modes
from coatings.optics.radiated import thrown_back

BOTH = pytest.mark.parametrize("tm", [False, True])
NONE = np.empty((1, 0))
NO_FILM = np.empty(0, int)


def bare(index, um, nm, *, tm):
    return facet(index, um, nm, tm=tm, films=(1.8,)).response(NONE, film=NO_FILM)


# Computed for this project by independent code (two rigorous methods agreeing to the digits shown);
# the model of `facet` is allowed its own error, 4e-4 in |r| and 1.5e-3 at the step of 0.36.
@pytest.mark.parametrize(
    ("core", "clad", "um", "nm", "te", "tm", "error"),
    [
        (3.38, 3.17, 0.1, 1550.0, 0.284990, 0.264045, 4e-4),
        (3.38, 3.17, 0.2, 1550.0, 0.312124, 0.253338, 4e-4),
        (3.38, 3.17, 0.4, 1550.0, 0.348762, 0.245055, 4e-4),
        (3.60, 3.385, 0.2, 850.0, 0.376376, 0.268153, 4e-4),
        (3.60, 3.24, 0.3, 860.0, 0.415837, 0.264193, 1.5e-3),
    ],
)
def test_bare_facets(core, clad, um, nm, te, tm, error):
    for is_tm, expected in ((False, te), (True, tm)):
        found = bare([clad, core, clad], [um], nm, tm=is_tm)
        assert np.abs(found.r[0, 0]) == pytest.approx(np.sqrt(expected), abs=error)


def test_model_values_of_the_tight_guide():
    # The same model by other code: 0.41612 (TE), 0.26454 (TM).
    for tm, expected in ((False, 0.41612), (True, 0.26454)):
        assert bare([3.24, 3.6, 3.24], [0.3], 860.0, tm=tm).R[0, 0] == pytest.approx(
            expected, abs=6e-6
        )


@pytest.mark.parametrize(
    ("factor", "te", "tm"), [(1.0, 1.31603e-3, 1.43224e-4), (1.05, 1.8307e-4, 1.5751e-3)]
)
def test_single_layer_on_the_0_2_um_guide(factor, te, tm):
    # Computed by independent rigorous code; the model is to be within 3 % at R = 1e-4.
    nm = np.array([[1550.0 / (4.0 * 1.8) * factor]])
    for is_tm, expected in ((False, te), (True, tm)):
        one = facet([3.17, 3.38, 3.17], [0.2], 1550.0, tm=is_tm, films=(1.8,))
        assert one.reflectance(nm, film=[0])[0, 0] == pytest.approx(expected, rel=0.01)


def _best_layer(tm):
    """Index and thickness of the layer of least R, by the mode's own gradient over d."""
    best = (1.0, 0.0, 0.0)
    nm = np.linspace(180.0, 260.0, 801)[:, None]
    for index in np.arange(1.70, 1.92, 0.005):
        one = facet([3.17, 3.38, 3.17], [0.2], 1550.0, tm=tm, films=(index,))
        big_r = one.reflectance(nm, film=[0])[:, 0]
        best = min(best, (big_r.min(), index, nm[big_r.argmin(), 0]))
    return best


def test_the_best_single_layer_differs_from_the_plane_wave_s_and_by_polarization():
    # TE: index near 1.80 and about 223 nm, computed by independent code.
    least, index, nm = _best_layer(False)
    assert index == pytest.approx(1.80, abs=0.011)
    assert nm == pytest.approx(223.0, abs=1.5)
    assert least < 1e-5
    least, tm_index, tm_nm = _best_layer(True)
    assert least < 1e-5
    assert abs(tm_index - 1.80) > 0.02 or abs(tm_nm - 223.0) > 3.0
    n = 3.207772
    assert abs(np.sqrt(n) - index) < 0.02
    assert abs(1550.0 / (4.0 * np.sqrt(n)) - nm) > 5.0


@BOTH
def test_a_very_wide_core_reflects_as_its_index(tm):
    found = bare([3.2, 3.4, 3.2], [40.0], 1310.0, tm=tm)
    assert found.r[0, 0] == pytest.approx(2.4 / 4.4, abs=2e-4)
    assert found.S[0, 0] < 1e-4


@BOTH
def test_a_vanishing_step_reflects_as_the_modal_index(tm):
    errors = []
    for step in (0.04, 0.01):
        one = facet([3.3, 3.3 + step, 3.3], [0.5], 1310.0, tm=tm)
        nm = np.array([[180.0, 90.0, 100.0]])
        modal = one.reflection(nm, film=[0, 1, 0])
        errors.append(np.abs(modal - reflection(one.plane, nm, film=[0, 1, 0])).max())
    assert errors[1] < 0.3 * errors[0]
    assert errors[1] < 2e-3


@BOTH
@pytest.mark.parametrize("guide", GUIDES)
def test_against_the_slow_twin(guide, tm):
    one = facet(*GUIDES[guide], 1310.0, tm=tm)
    twin = Twin(one.mode, highest_index=one.mode.n_eff[0].real)
    for film, nm in STACKS.values():
        found = one.reflection(np.reshape(nm, (1, -1)), film=np.array(film, int))[0, 0]
        films = [(SILICA, TANTALA)[kind] for kind in film]
        assert abs(found - twin.reflection(films, np.ravel(nm))) < 1e-6


@BOTH
@pytest.mark.parametrize("guide", ["weak", "tight", "unequal"])
@pytest.mark.parametrize("stack", STACKS)
def test_powers_add_up_with_t_and_s_on_their_own(stack, guide, tm):
    film, nm = STACKS[stack]
    one = facet(*GUIDES[guide], [1280.0, 1310.0], tm=tm)
    nm = np.reshape(nm, (1, -1)).astype(float)
    film = np.array(film, int)
    found = one.response(nm, film=film)
    batch = one._batch(nm, film, None, None)
    back = thrown_back(one, batch, one._run(batch, 0))
    np.testing.assert_allclose(found.R + found.T + back, 1.0, atol=1e-6)
    np.testing.assert_allclose(found.S, back, atol=1e-6)
    np.testing.assert_allclose(found.A, 0.0, atol=1e-15)
    assert found.S.min() > -1e-9


@BOTH
def test_absorption_tends_to_zero_with_the_films_own(tm):
    nm, film = np.array([[225.0, 155.0, 225.0, 155.0]]), [0, 1, 0, 1]
    index, um = GUIDES["unequal"]
    clear = facet(index, um, 1310.0, tm=tm).response(nm, film=film)
    absorbed = []
    for k in (1e-4, 2e-4):
        lossy = facet(index, um, 1310.0, tm=tm, films=(SILICA, TANTALA + 1j * k))
        found = lossy.response(nm, film=film)
        assert found.A[0, 0] > 0.0
        assert found.S[0, 0] == pytest.approx(clear.S[0, 0], abs=30.0 * k)
        absorbed.append(found.A[0, 0])
    assert absorbed[1] == pytest.approx(2.0 * absorbed[0], rel=5e-3)


@BOTH
def test_a_thick_metal_lets_nothing_through(tm):
    gold = 0.4 + 8.0j
    one = facet(*GUIDES["unequal"], 1310.0, tm=tm, films=(SILICA, gold))
    found = one.response(np.array([[60.0, 50_000.0]]), film=[0, 1])
    assert found.T[0, 0] == 0.0
    assert found.R[0, 0] > 0.8
    assert 0.0 < found.A[0, 0] < 0.1
    assert found.S[0, 0] > 0.0


@BOTH
def test_split_layers_and_layers_of_no_thickness_change_nothing(tm):
    one = facet(*GUIDES["tight"], 1310.0, tm=tm)
    whole = one.reflection(np.array([[120.0, 200.0]]), film=[1, 0])
    split = one.reflection(np.array([[50.0, 70.0, 0.0, 200.0]]), film=[1, 1, 1, 0])
    np.testing.assert_allclose(split, whole, rtol=0, atol=1e-13)


@BOTH
def test_a_turned_guide_reflects_alike(tm):
    index, um = GUIDES["unequal"]
    nm, film = np.array([[120.0, 200.0]]), [1, 0]
    one = facet(index, um, 1310.0, tm=tm).response(nm, film=film)
    turned = facet(index[::-1], um[::-1], 1310.0, tm=tm).response(nm, film=film)
    assert abs(one.r[0, 0] - turned.r[0, 0]) < 1e-11
    assert one.T[0, 0] == pytest.approx(turned.T[0, 0], abs=1e-11)


@BOTH
def test_lengths_scale_with_the_wavelength(tm):
    index, um = GUIDES["unequal"]
    nm = np.array([[120.0, 200.0]])
    one = facet(index, um, 1310.0, tm=tm).response(nm, film=[1, 0])
    two = facet(index, np.multiply(um, 2), 2620.0, tm=tm).response(2.0 * nm, film=[1, 0])
    assert abs(one.r[0, 0] - two.r[0, 0]) < 1e-12
    assert one.S[0, 0] == pytest.approx(two.S[0, 0], abs=1e-11)


@BOTH
@pytest.mark.parametrize(("fine", "error"), [(0, 1e-5), (1, 1e-6)])
def test_more_nodes_change_no_more_than_what_is_promised(fine, error, tm):
    others = {
        "wide": ([3.2, 3.4, 3.2], [10.0]),
        "wide and tight": ([3.2, 3.6, 3.2], [3.0]),
        "thin and tight": ([3.2, 3.6, 3.2], [0.1]),
        "very wide": ([3.2, 3.4, 3.2], [40.0]),
    }
    for index, um in (*GUIDES.values(), *others.values()):
        coarse, better = (facet(index, um, 1310.0, tm=tm, fine=n) for n in (fine, 3))
        for film, nm in STACKS.values():
            stack, kinds = np.reshape(nm, (1, -1)).astype(float), np.array(film, int)
            r = coarse.reflection(stack, film=kinds)
            assert np.abs(r - better.reflection(stack, film=kinds)).max() < error


@BOTH
@settings(max_examples=15, deadline=None)
@given(
    core=st.floats(0.05, 3.0),
    step=st.floats(0.02, 0.4),
    thickness=st.lists(st.floats(0.0, 500.0), min_size=0, max_size=8),
)
def test_quadrature_and_balance_over_guides_and_stacks(core, step, thickness, tm):
    index = [3.2, 3.2 + step, 3.2]
    film = np.arange(len(thickness)) % 2
    nm = np.reshape(thickness, (1, -1)).astype(float)
    coarse, fine = (facet(index, [core], 980.0, tm=tm, fine=n) for n in (1, 3))
    r = coarse.reflection(nm, film=film)
    assert np.abs(r - fine.reflection(nm, film=film)).max() < 1e-6
    found = coarse.response(nm, film=film)
    assert -1e-7 < found.S[0, 0] < 1.0
    assert found.T[0, 0] > 0.0


@BOTH
def test_a_mirror_of_200_pairs(tm):
    one = facet(*GUIDES["unequal"], 1310.0, tm=tm)
    nm = 1310.0 / 4.0 / np.array([SILICA, TANTALA])
    some = one.reflectance(np.tile(nm, (1, 20)), film=[0, 1] * 20)[0, 0]
    many = one.reflectance(np.tile(nm, (1, 200)), film=[0, 1] * 200)[0, 0]
    value, slope = one.gradient(np.tile(nm, (1, 200)), film=[0, 1] * 200)
    assert many == pytest.approx(some, abs=1e-5)
    assert value[0, 0] == many
    assert np.isfinite(slope).all()
    assert np.abs(slope[0, 0, -10:]).max() < 1e-12


# Ceilings computed by independent code; 12 pairs whose indices were not recorded: 0.946 and 0.850
# for the two guides. What holds for any pairs is that the guide sets a limit well below one.
@pytest.mark.parametrize(
    ("index", "um", "nm", "low", "high"),
    [([3.17, 3.38, 3.17], 0.2, 1550.0, 0.92, 0.97), ([3.24, 3.6, 3.24], 0.3, 860.0, 0.80, 0.90)],
)
def test_the_guide_limits_a_mirror(index, um, nm, low, high):
    one = facet(index, [um], nm, tm=False, films=(1.45, 2.2))
    quarter = nm / 4.0 / np.array([1.45, 2.2])
    found = one.response(np.tile(quarter, (1, 12)), film=[0, 1] * 12)
    assert low < found.R[0, 0] < high
    assert found.T[0, 0] < 2e-3
    assert found.S[0, 0] == pytest.approx(1.0 - found.R[0, 0], abs=2e-3)


@BOTH
def test_higher_modes_and_many_wavelengths_are_as_one_by_one(tm):
    nm = np.array([960.0, 980.0])
    index, um = [3.2, 3.4, 3.2], [1.5]
    films = np.full((1, 2), 1.8)
    stack = np.array([[130.0]])
    for order, mode in enumerate(modes(Guide(nm, index, um), tm=tm)):
        together = ModalFacet(mode, 1.0, films).response(stack, film=[0])
        for place in range(2):
            alone = modes(Guide(nm[place : place + 1], index, um), tm=tm)[order]
            expected = ModalFacet(alone, 1.0, films[:, :1]).response(stack, film=[0])
            assert abs(together.r[0, place] - expected.r[0, 0]) < 1e-14
            assert together.T[0, place] == pytest.approx(expected.T[0, 0], abs=1e-9)


def test_what_the_result_says_of_its_own_error():
    for step, error in ((0.1, 1e-4), (0.22, 4e-4), (0.3, 1.5e-3)):
        assert facet([3.2, 3.2 + step, 3.2], [0.3], 980.0, tm=False).r_error == error


def test_bad_arrays_are_named():
    one = facet(*GUIDES["tight"], [1290.0, 1310.0], tm=False)
    with pytest.raises(ArrayError, match=r"thickness_nm\[0, 1\]: is -1.0 nm"):
        one.response([[10.0, -1.0]], film=[0, 1])
    with pytest.raises(ArrayError, match=r"film\[1\]: is 2; the scene has 2 films"):
        one.gradient([[10.0, 1.0]], film=[0, 2])
    with pytest.raises(ArrayError, match=r"weight: has shape \(1, 1\); expected \(1, 2\)"):
        one.weighted_gradient([[10.0]], film=[0], weight=[[1.0]])
    with pytest.raises(ArrayError, match=r"films: has shape \(1, 1\); expected \(1, 2\)"):
        ModalFacet(one.mode, 1.0, [[1.45]])
    with pytest.raises(ArrayError, match=r"outside\[0\]: is 0; no medium"):
        ModalFacet(one.mode, 0.0, [[1.45, 1.45]])
    with pytest.raises(InputError, match="fine: got -1; give 0 or more"):
        ModalFacet(one.mode, 1.0, [[1.45, 1.45]], -1)


@BOTH
def test_phase_is_that_of_the_tangential_electric_field(tm):
    found = bare([3.2, 3.4, 3.2], [0.3], 1310.0, tm=tm)
    assert found.r[0, 0].real > 0.4
    assert found.phase_rad[0, 0] == pytest.approx(np.angle(found.r[0, 0]))
