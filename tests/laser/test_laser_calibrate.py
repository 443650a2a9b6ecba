"""Laser parameters from uncoated chips: back to the truth, and refusals of what can't be."""

from __future__ import annotations

import json
import tomllib

import numpy as np
import pytest
from uncoated_chips import BARE, PUMP, Truth, kind, perfect_chips, scattered_chips

from coatings.errors import ArrayError, InputError
from coatings.laser import Calibration, FacetLight, GainLaw, UncoatedChips, calibrate
from coatings.laser.calibrate_model import Points, derivatives, expected, joint_fit, straight_lines

LENGTHS = [600.0, 1000.0, 1500.0, 2200.0]
NAMES = [
    "internal_loss_per_cm", "injection_efficiency", "transparency_A_per_cm2", "modal_gain_per_cm",
]  # fmt: skip


def values(found: Calibration) -> np.ndarray:
    return np.array([quantity.value for quantity in found.quantities])


@pytest.mark.parametrize("law", GainLaw)
@pytest.mark.parametrize("truth", [PUMP, Truth(8.0, 0.6, 300.0, 60.0), Truth(0.0, 1.0, 50.0, 12.0)])
def test_perfect_chips_give_the_truth(law, truth):
    found = calibrate(perfect_chips(truth, LENGTHS, law=law), kind(gain_law=law))
    assert values(found) == pytest.approx(truth.row(), rel=1e-6, abs=1e-9)
    lines = [quantity.value for quantity in found.by_lines]
    assert lines == pytest.approx(truth.row(), rel=1e-6, abs=1e-9)
    assert found.outliers == ()
    assert found.notes == ()


def test_bars_cascades_and_scattering_facets():
    # A facet that throws 2 % back beside the mode emits less than it loses.
    bare = FacetLight(R=0.35, T=0.63, S=0.02)
    chips = perfect_chips(PUMP, LENGTHS, bare=bare, emitters=19, stages=1)
    found = calibrate(chips, kind(bare, emitters=19))
    assert values(found) == pytest.approx(PUMP.row(), rel=1e-6)
    chips = perfect_chips(PUMP, LENGTHS, stages=30)
    assert values(calibrate(chips, kind(stages=30))) == pytest.approx(PUMP.row(), rel=1e-6)


def test_slope_of_one_facet_is_half():
    both = perfect_chips(PUMP, LENGTHS)
    one = UncoatedChips(both.length_um, both.threshold_A, both.slope_W_per_A / 2, one_facet=True)
    assert values(calibrate(one, kind())) == pytest.approx(PUMP.row(), rel=1e-6)


TWELVE = {law: perfect_chips(PUMP, LENGTHS * 3, law=law) for law in GainLaw}


def points_of(rng: np.random.Generator, law: GainLaw) -> Points:
    chips = scattered_chips(TWELVE[law], rng, slope=0.02, threshold=0.03)
    return kind(gain_law=law, R_sigma=0.01).points(chips)


@pytest.mark.parametrize("law", GainLaw)
def test_joint_fit_against_a_general_least_squares(law):
    # Slow twin: scipy's curve fit of the same residuals with numerical derivatives.
    from scipy.optimize import least_squares

    points = points_of(np.random.default_rng(4), law)
    fit = joint_fit(points)
    target = np.concatenate([np.log(points.efficiency), np.log(points.density)])
    twin = least_squares(
        lambda p: np.concatenate(expected(points, p)) - target,
        np.array([1.0, np.log(0.9), np.log(100.0), np.log(20.0)]),
        xtol=1e-14, ftol=1e-14, gtol=1e-14, x_scale="jac",
    )  # fmt: skip
    assert fit.parameters == pytest.approx(twin.x, rel=1e-5)


@pytest.mark.parametrize("law", GainLaw)
def test_derivatives_are_those_of_the_expectation(law):
    points = points_of(np.random.default_rng(5), law)
    p = np.array([0.9, np.log(0.9), np.log(110.0), np.log(19.0)])
    for kind_, exact in enumerate(derivatives(points, p)):
        for k in range(4):
            step = np.zeros(4)
            step[k] = 1e-5
            ends = [expected(points, p + sign * step)[kind_] for sign in (1.0, -1.0)]
            assert exact[:, k] == pytest.approx((ends[0] - ends[1]) / 2e-5, rel=1e-6, abs=1e-9)


@pytest.mark.parametrize("law", GainLaw)
@pytest.mark.parametrize("fit", [joint_fit, straight_lines])
def test_covariance_is_the_spread_of_repeated_measurements(law, fit):
    rng = np.random.default_rng(6)
    fits = [fit(points_of(rng, law)) for _ in range(400)]
    spread = np.cov(np.array([each.parameters for each in fits]).T)
    # By R nothing was moved here: its part is left out.
    stated = np.mean([each.by_source[:3].sum(axis=0) for each in fits], axis=0)
    # 400 draws know a variance to 7 %; four standard errors.
    assert np.diagonal(stated) == pytest.approx(np.diagonal(spread), rel=0.3)
    assert stated[2, 3] / np.sqrt(stated[2, 2] * stated[3, 3]) == pytest.approx(
        spread[2, 3] / np.sqrt(spread[2, 2] * spread[3, 3]), abs=0.05
    )


def test_bare_reflectance_only_scales_loss_and_gain():
    chips = perfect_chips(PUMP, LENGTHS)
    one, other = calibrate(chips, kind()), calibrate(chips, kind(FacetLight.lossless(0.28)))
    scale = np.log(0.28) / np.log(0.31)
    assert values(other) == pytest.approx(values(one) * [scale, 1.0, 1.0, scale], rel=1e-9)


def test_uncertainty_of_the_bare_facet_is_carried():
    # Perfect chips: all that is left is R's own. a_i and G0 go with ln R, so sigma/value is
    # sigma_R/(R ln(1/R)).
    found = calibrate(perfect_chips(PUMP, LENGTHS), kind(R_sigma=0.01))
    relative = 0.01 / (0.31 * -np.log(0.31))
    loss, efficiency, transparency, gain = found.quantities
    assert loss.sigma == pytest.approx(0.8 * relative, rel=1e-6)
    assert gain.sigma == pytest.approx(18.0 * relative, rel=1e-6)
    assert efficiency.sigma == pytest.approx(0.0, abs=1e-9)
    assert transparency.sigma == pytest.approx(0.0, abs=1e-7)
    # Nothing of it was estimated from the chips: the interval is the normal one.
    assert loss.high - loss.value == pytest.approx(1.959964 * loss.sigma, rel=1e-5)


def chips_with(row: int, *, slope: float = 1.0, threshold: float = 1.0) -> UncoatedChips:
    chips = scattered_chips(
        perfect_chips(PUMP, LENGTHS * 4), np.random.default_rng(3), slope=0.01, threshold=0.01
    )
    slopes, thresholds = chips.slope_W_per_A.copy(), chips.threshold_A.copy()
    slopes[row] *= slope
    thresholds[row] *= threshold
    return UncoatedChips(chips.length_um, thresholds, slopes)


@pytest.mark.parametrize(
    ("changes", "quantity"), [({"slope": 0.8}, "slope"), ({"threshold": 1.3}, "threshold")]
)
def test_an_outlier_is_named_and_left_out(changes, quantity):
    found = calibrate(chips_with(6, **changes), kind())
    assert [(each.row, each.quantity) for each in found.outliers] == [(6, quantity)]
    assert found.outliers[0].deviation == pytest.approx(next(iter(changes.values())) - 1, abs=0.05)
    assert np.flatnonzero(~found.used).tolist() == [6]
    assert "chip 7 (1500 um)" in found.notes[0]
    sigmas = np.array([quantity.sigma for quantity in found.quantities])
    assert np.all(np.abs(values(found) - PUMP.row()) < 3.5 * sigmas)
    assert found.with_all is not None
    kept = calibrate(chips_with(6, **changes), kind(), keep_outliers=True)
    assert kept.used.all()
    assert kept.with_all is None
    assert kept.outliers[0].row == 6
    assert values(kept) == pytest.approx([each.value for each in found.with_all], rel=1e-9)


def test_two_outliers_do_not_hide_each_other():
    chips = chips_with(6, slope=0.8)
    slopes = chips.slope_W_per_A.copy()
    slopes[10] *= 0.8
    found = calibrate(UncoatedChips(chips.length_um, chips.threshold_A, slopes), kind())
    assert sorted(each.row for each in found.outliers) == [6, 10]


def test_an_outlier_that_turns_the_line_round_is_still_named():
    # A threshold in mA by mistake: ln J over 1/L would have the wrong sign.
    found = calibrate(chips_with(3, threshold=1000.0), kind())
    assert [(each.row, each.quantity) for each in found.outliers] == [(3, "threshold")]
    assert found.with_all is None


def test_few_false_outliers():
    # The test's own rate is 0.5 % a set; 200 sets: mean 1, so 5 leaves 4 sigmas.
    rng = np.random.default_rng(8)
    perfect = perfect_chips(PUMP, LENGTHS * 5)
    sets = [scattered_chips(perfect, rng, slope=0.02, threshold=0.02) for _ in range(200)]
    assert sum(bool(calibrate(chips, kind()).outliers) for chips in sets) <= 5


def test_leaving_out_lengths():
    chips = scattered_chips(
        perfect_chips(PUMP, LENGTHS * 4), np.random.default_rng(3), slope=0.01, threshold=0.01
    )
    found = calibrate(chips, kind())
    assert [row.length_um for row in found.lengths] == LENGTHS
    assert [row.chips for row in found.lengths] == [4] * 4
    assert not any(row.matters for row in found.lengths)
    rows = chips.length_um != 600.0
    part = UncoatedChips(chips.length_um[rows], chips.threshold_A[rows], chips.slope_W_per_A[rows])
    assert found.lengths[0].parameters == pytest.approx(values(calibrate(part, kind())), rel=1e-9)


def test_a_length_that_does_not_fit_is_said():
    chips = scattered_chips(
        perfect_chips(PUMP, LENGTHS * 6), np.random.default_rng(3), slope=0.01, threshold=0.01
    )
    # The longest chips were measured hot: 10 % less slope, all of them.
    slopes = np.where(chips.length_um == 2200.0, 0.9, 1.0) * chips.slope_W_per_A
    found = calibrate(UncoatedChips(chips.length_um, chips.threshold_A, slopes), kind())
    assert any("Without the 2200 um chips" in note for note in found.notes)


def test_two_chips_give_values_without_errors():
    found = calibrate(perfect_chips(PUMP, [600.0, 2200.0]), kind())
    assert values(found) == pytest.approx(PUMP.row(), rel=1e-9)
    assert [quantity.sigma for quantity in found.quantities] == [None] * 4
    assert any("no standard errors" in note for note in found.notes)
    assert any("Two lengths only" in note for note in found.notes)
    assert found.to_json_dict()["internal_loss_per_cm"]["sigma"] is None
    assert "spread unknown" in found.laser_section()
    assert str(found.internal_loss_per_cm) == "0.8"


def test_result_names_and_plain_numbers():
    found = calibrate(perfect_chips(PUMP, LENGTHS), kind(R_sigma=0.005))
    result = json.loads(json.dumps(found.to_json_dict()))
    assert list(result) == NAMES
    assert all(set(entry) == {"value", "sigma"} for entry in result.values())


def test_section_to_paste():
    chips = scattered_chips(
        perfect_chips(PUMP, LENGTHS * 4), np.random.default_rng(3), slope=0.01, threshold=0.01
    )
    found = calibrate(chips, kind())
    section = tomllib.loads(found.laser_section())["laser"]
    assert section.pop("gain_law") == "logarithmic"
    assert list(section) == NAMES
    for name, quantity in zip(NAMES, found.quantities, strict=True):
        assert abs(section[name] - quantity.value) <= 0.01 * quantity.sigma


def test_bounds_within_scatter_are_said_not_hidden():
    # No loss at all: scatter puts it below zero for about half of the draws.
    perfect = perfect_chips(Truth(0.0, 0.9, 120.0, 18.0), LENGTHS * 3)
    rng = np.random.default_rng(0)
    while True:
        found = calibrate(scattered_chips(perfect, rng, slope=0.02, threshold=0.02), kind())
        if found.internal_loss_per_cm.value < 0.0:
            break
    assert found.internal_loss_per_cm.high > 0.0
    assert any("past 0, but within the chips' scatter" in note for note in found.notes)
    assert tomllib.loads(found.laser_section())["laser"]["internal_loss_per_cm"] == 0.0
    assert "0 is the bound" in found.laser_section()
    # Efficiency one: above it for about half of the draws.
    perfect = perfect_chips(Truth(2.0, 1.0, 120.0, 18.0), LENGTHS * 3)
    while True:
        try:
            found = calibrate(scattered_chips(perfect, rng, slope=0.02, threshold=0.02), kind())
        except InputError:
            continue
        if found.injection_efficiency.value > 1.0:
            break
    assert tomllib.loads(found.laser_section())["laser"]["injection_efficiency"] == 1.0


def altered(**changes: np.ndarray) -> UncoatedChips:
    chips = perfect_chips(PUMP, LENGTHS)
    return UncoatedChips(
        chips.length_um,
        changes.get("threshold", chips.threshold_A),
        changes.get("slope", chips.slope_W_per_A),
    )


def test_slope_that_rises_with_length():
    with pytest.raises(InputError, match="internal loss would be negative"):
        calibrate(altered(slope=np.array([0.80, 0.85, 0.88, 0.9])), kind())


def test_more_than_one_photon_an_electron():
    chips = perfect_chips(PUMP, LENGTHS)
    with pytest.raises(InputError, match="more than one photon an electron"):
        calibrate(altered(slope=2.0 * chips.slope_W_per_A), kind())


def test_slope_that_falls_too_fast():
    with pytest.raises(InputError, match="infinite slope"):
        calibrate(altered(slope=np.array([1.2, 0.4, 0.2, 0.1])), kind())


def test_threshold_density_that_rises_with_length():
    with pytest.raises(InputError, match="modal gain would be negative"):
        calibrate(altered(threshold=np.array([0.1, 0.2, 0.35, 0.6])), kind())


def test_transparency_below_zero():
    with pytest.raises(InputError, match="transparency current of zero or less"):
        calibrate(
            altered(threshold=np.array([0.3, 0.31, 0.32, 0.33])), kind(gain_law=GainLaw.LINEAR)
        )


@pytest.mark.parametrize("lengths", [[1000.0], [1000.0] * 5, [1000.0, 1005.0, 1010.0, 1020.0]])
def test_one_length_only(lengths):
    n = len(lengths)
    with pytest.raises(ArrayError, match="one length only"):
        UncoatedChips(np.array(lengths), np.full(n, 0.3), np.full(n, 0.9))


def test_rows_of_different_size():
    with pytest.raises(ArrayError, match="not rows of one size"):
        UncoatedChips(np.array([600.0, 1000.0]), np.array([0.3]), np.array([0.9, 0.9]))


@pytest.mark.parametrize("name", ["length_um", "threshold_A", "slope_W_per_A"])
def test_measurements_above_zero(name):
    rows = {
        "length_um": np.array([600.0, 1000.0]),
        "threshold_A": np.array([0.3, 0.4]),
        "slope_W_per_A": np.array([0.9, 0.9]),
    }
    rows[name] = np.array([1.0, 0.0])
    with pytest.raises(ArrayError, match=f"{name}.*above 0"):
        UncoatedChips(**rows)


@pytest.mark.parametrize(
    ("changes", "match"),
    [
        ({"R_sigma": -0.1}, "R_sigma: is -0.1"),
        ({"emitters": 0}, "emitters: is 0"),
        ({"stages": 0}, "stages: is 0"),
        ({"bare": FacetLight(R=1.0, T=0.0)}, "not one facet that both"),
        ({"bare": FacetLight(R=np.array([0.3]), T=np.array([0.7]))}, "not one facet that both"),
    ],
)
def test_kinds_that_can_not_be(changes, match):
    with pytest.raises(InputError, match=match):
        kind(**{"bare": BARE} | changes)


def test_sizes_that_can_not_be():
    from coatings.laser import ChipKind

    with pytest.raises(InputError, match=r"(?s)wavelength_nm: is 0.*stripe_um: is -1"):
        ChipKind(wavelength_nm=0.0, stripe_um=-1.0, bare=BARE)
