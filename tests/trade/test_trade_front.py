"""The trade of front reflectivity: best value, range, limits, against brute force and identities."""

from __future__ import annotations

import json
import tomllib
from dataclasses import replace
from time import perf_counter

import numpy as np
import pytest
from scipy.optimize import minimize_scalar

from coatings.errors import ArrayError, InputError
from coatings.laser import (
    Amplifier,
    External,
    FacetLight,
    FieldModel,
    LaserChip,
    Limits,
    estimate,
    estimate_external,
    highest_locking_R,
    ripple_dB,
)
from coatings.trade import BestFront, Trade, TradeCase, lossy_front, trade, window_text
from coatings.trade.window import rounded_inward

REAR = FacetLight.lossless(0.97)
PUMP = LaserChip(
    wavelength_nm=976.0,
    length_um=4000.0,
    stripe_um=95.0,
    internal_loss_per_cm=0.8,
    injection_efficiency=0.95,
    transparency_A_per_cm2=120.0,
    modal_gain_per_cm=18.0,
    drive_A=12.0,
    spontaneous_factor=1e-5,
    series_mohm=14.0,
    junction_V=1.31,
    thermal_K_per_W=2.0,
    t0_K=170.0,
    t1_K=600.0,
    mode_height_um=0.8,
)
GRATING = External(reflectance=0.05, coupling=0.8, wavelength_nm=976.0, band_nm=(975.5, 976.5))
KEYS = [
    "R_front", "threshold_A", "front_W", "rear_W", "facet_load_MW_per_cm2",
    "wall_plug_efficiency", "length_um", "drive_A", "best", "laser",
]  # fmt: skip


def pump_trade(**changes: object) -> Trade:
    return trade(TradeCase(chip=PUMP, rear=REAR, **changes))


def watts(R: float, chip: LaserChip = PUMP) -> float:
    figures = estimate(chip, FacetLight.lossless(R), REAR, model=FieldModel.AXIAL)
    assert figures.front_W is not None
    return figures.front_W


def test_rows_are_the_estimates_of_single_chips():
    found = pump_trade()
    here = found.columns
    assert here.model is FieldModel.AXIAL
    for row in range(0, here.R_front.size, 30):
        R = float(here.R_front[row])
        one = estimate(PUMP, FacetLight.lossless(R), REAR, model=FieldModel.AXIAL)
        assert here.threshold_A[row] == pytest.approx(one.threshold_A, rel=1e-12)
        # Two orders of the same iteration: they settle within 1e-8.
        assert here.front_W[row] == pytest.approx(one.front_W, rel=1e-7)
        assert here.rear_W[row] == pytest.approx(one.rear_W, rel=1e-7)
        assert here.facet_load_MW_per_cm2[row] == pytest.approx(one.facet_load_MW_per_cm2, rel=1e-7)
        assert here.wall_plug_efficiency[row] == pytest.approx(one.wall_plug_efficiency, rel=1e-7)


def test_axis_is_even_in_the_logarithm_and_reaches_beyond_the_bare_facet():
    R = pump_trade().columns.R_front
    assert R[0] == 1e-5
    assert R[-1] == 0.9
    assert np.diff(np.log(R)) == pytest.approx(np.log(0.9 / 1e-5) / (R.size - 1))
    case = TradeCase(chip=PUMP, rear=REAR)
    wide = trade(case, present=FacetLight.lossless(1e-7), R_bare=0.85).columns.R_front
    assert wide[0] == 1e-7
    assert wide[-1] > 0.9
    own = trade(case, R_range=(1e-3, 0.5), points=11, present=FacetLight.lossless(0.9))
    assert own.columns.R_front[[0, -1]].tolist() == [1e-3, 0.5]
    assert 0.03 in trade(case, present=FacetLight.lossless(0.03)).columns.R_front


def test_best_is_that_of_a_plain_search():
    # Slow twin: one estimate a step.
    twin = minimize_scalar(
        lambda ln_R: -watts(np.exp(ln_R)), bounds=(np.log(1e-4), np.log(0.3)), method="bounded",
        options={"xatol": 1e-6},
    )  # fmt: skip
    best = pump_trade().best
    assert best.front_W == pytest.approx(-twin.fun, rel=1e-9)
    # The top is flat: R itself is known to the square root of that.
    assert best.R_front == pytest.approx(np.exp(twin.x), rel=1e-2)
    assert best.limited_by == "none"
    one = estimate(PUMP, FacetLight.lossless(best.R_front), REAR)
    assert best.threshold_A == pytest.approx(one.threshold_A, rel=1e-12)


def test_range_ends_where_one_percent_is_lost():
    best = pump_trade().best
    for edge in (best.R_low, best.R_high):
        assert watts(edge) == pytest.approx(0.99 * best.front_W, rel=1e-6)
        assert watts(edge) >= 0.99 * best.front_W * (1.0 - 1e-8)
    assert best.R_low < best.R_front < best.R_high


def test_best_of_the_uniform_model_without_heat_and_loss_of_power():
    # Without heat, knee and field the best front follows from dP1/dR1 = 0 of
    # P1 = slope(R) (I - I_th(R)) T1 sqrt(R2)/[...]: solved here on its own, uniform model.
    chip = replace(
        PUMP, length_um=500.0, series_mohm=0.0, thermal_K_per_W=0.0, spontaneous_factor=0.0,
        t0_K=None, t1_K=None, internal_loss_per_cm=5.0, drive_A=0.5,
    )  # fmt: skip

    def lost(R: float) -> float:
        mirror = np.log(1.0 / (R * 0.97)) / (2.0 * 0.05)
        threshold = 120.0 * np.exp((5.0 + mirror) / 18.0) * 0.05 * 95e-4
        slope = 0.95 * chip.photon_V * mirror / (5.0 + mirror)
        share = (1 - R) * np.sqrt(0.97) / ((1 - R) * np.sqrt(0.97) + 0.03 * np.sqrt(R))
        return -float(slope * (0.5 - threshold) * share)

    twin = minimize_scalar(lost, bounds=(1e-3, 0.8), method="bounded", options={"xatol": 1e-9})
    uniform = trade(TradeCase(chip=chip, rear=REAR))
    assert uniform.columns.model is FieldModel.UNIFORM
    assert uniform.best.front_W == pytest.approx(-twin.fun, rel=1e-9)
    assert uniform.best.R_front == pytest.approx(twin.x, rel=1e-3)


@pytest.mark.parametrize(
    ("limits", "word"),
    [
        (Limits(threshold_max_A=0.6), "threshold"),
        (Limits(rear_min_W=0.2), "rear power"),
    ],
)
def test_a_limit_that_binds_is_met_exactly_and_named(limits, word):
    found = pump_trade(limits=limits)
    best = found.best
    at = estimate(PUMP, FacetLight.lossless(best.R_front), REAR, model=FieldModel.AXIAL)
    if word == "threshold":
        assert at.threshold_A == pytest.approx(0.6, rel=1e-4)
        assert at.threshold_A <= 0.6
    else:
        assert at.rear_W == pytest.approx(0.2, rel=1e-4)
        assert at.rear_W >= 0.2
    assert best.limited_by == word
    assert f"limited by {word}" in found.notes[0]
    assert best.R_low == pytest.approx(best.R_front, rel=1e-4)
    assert best.R_low <= best.R_front < best.R_high


def test_load_cuts_the_power():
    # Load grows with R at nearly even output: more power than the load allows lies below.
    free = pump_trade()
    row = int(np.argmin(np.abs(free.columns.R_front - free.best.R_front)))
    load = float(free.columns.facet_load_MW_per_cm2[row])
    found = pump_trade(limits=Limits(facet_limit_MW_per_cm2=0.97 * load))
    assert found.best.limited_by == "load"
    assert found.best.R_front < free.best.R_front
    at = estimate(PUMP, FacetLight.lossless(found.best.R_front), REAR, model=FieldModel.AXIAL)
    assert at.facet_load_MW_per_cm2 == pytest.approx(0.97 * load, rel=1e-4)
    assert at.facet_load_MW_per_cm2 <= 0.97 * load
    assert found.best.front_W < free.best.front_W


def test_limits_that_do_not_bind_change_nothing():
    free = pump_trade().best
    loose = pump_trade(limits=Limits(threshold_max_A=0.9, facet_limit_MW_per_cm2=30.0)).best
    assert loose == free
    # One that only shortens the range is not what limits the best.
    shorter = pump_trade(limits=Limits(threshold_max_A=0.72)).best
    assert shorter.R_front == pytest.approx(free.R_front, rel=1e-9)
    assert shorter.limited_by == "none"
    assert shorter.R_low > free.R_low
    assert shorter.R_high == pytest.approx(free.R_high, rel=1e-9)


def test_limits_that_leave_nothing():
    found = pump_trade(limits=Limits(facet_limit_MW_per_cm2=1.0))
    assert found.best == BestFront(None, None, None, None, None, "load")
    assert found.window is None
    assert found.laser is None
    assert found.drift == ()
    assert found.watts_per_ln_R is None
    assert "No front reflectance keeps every limit: load" in found.notes[0]
    both = pump_trade(limits=Limits(threshold_max_A=0.55, facet_limit_MW_per_cm2=14.0))
    assert both.best.limited_by == "threshold, load"
    present = trade(
        TradeCase(chip=PUMP, rear=REAR, limits=Limits(facet_limit_MW_per_cm2=1.0)),
        present=FacetLight.lossless(0.03),
    )
    assert present.laser is not None


def test_a_drive_below_every_threshold():
    found = pump_trade(drive_A=0.1)
    assert found.best.R_front is None
    assert found.best.limited_by == "threshold"


def test_rollover_is_named():
    # A chip on a poor heat sink, driven past the current of its greatest power.
    chip = replace(PUMP, thermal_K_per_W=8.0, t0_K=60.0, t1_K=150.0)
    found = trade(TradeCase(chip=chip, rear=REAR))
    assert found.best.limited_by == "rollover"
    R = found.best.R_front
    assert watts(R, replace(chip, drive_A=12.5)) < watts(R, chip)
    assert "past thermal rollover" in found.notes[0]


def test_heat_that_leaves_no_lasing_state():
    hot = replace(PUMP, thermal_K_per_W=12.0, t0_K=60.0, t1_K=200.0)
    found = trade(TradeCase(chip=hot, rear=REAR))
    assert found.best.R_front is None
    assert found.best.limited_by == "rollover"
    # A little better, and only some fronts lase: the rows say which.
    warm = trade(TradeCase(chip=replace(hot, thermal_K_per_W=10.0, t1_K=150.0), rear=REAR))
    lit = warm.columns.kept["rollover"]
    assert lit.any()
    assert not lit.all()
    assert warm.best.limited_by == "rollover"


def test_axis_that_ends_too_early():
    found = trade(TradeCase(chip=PUMP, rear=REAR), R_range=(0.05, 0.9))
    assert found.best.limited_by == "axis"
    assert found.best.R_front == 0.05
    assert found.best.R_low == 0.05
    assert "the end of the axis" in found.notes[0]


def test_coating_that_takes_its_share():
    front_of = lossy_front(absorbed=0.01, scattered=0.02)
    found = pump_trade(front_of=front_of)
    R = found.best.R_front
    facet = FacetLight(R=R, T=0.97 - R, A=0.01, S=0.02)
    one = estimate(PUMP, facet, REAR, model=FieldModel.AXIAL)
    assert found.best.front_W == pytest.approx(one.front_W, rel=1e-7)
    assert found.best.front_W < 0.98 * pump_trade().best.front_W
    # Without a present front the laser is that of the best.
    assert found.laser.R_front == R
    assert found.laser.coating_absorbed_W == pytest.approx(one.coating_absorbed_W, rel=1e-3)


def test_present_front_lies_on_the_rows():
    present = FacetLight.lossless(0.03)
    found = trade(TradeCase(chip=PUMP, rear=REAR), present=present)
    assert found.laser == estimate(PUMP, present, REAR)
    row = int(np.flatnonzero(found.columns.R_front == 0.03)[0])
    # A regression value, not truth: 12 A, R 0.03/0.97, uniform model 11.2858 W, times 0.97687 of
    # the axial field, less what the heat of the missing light costs.
    assert found.columns.front_W[row] == pytest.approx(11.2858 * 0.97687, rel=2e-3)


def test_grating_counts_in_watts_and_locks():
    found = pump_trade(external=GRATING)
    here = found.columns
    R = float(here.R_front[100])
    one = estimate_external(PUMP, FacetLight.lossless(R), REAR, external=GRATING)
    assert here.threshold_A[100] == pytest.approx(one.laser.threshold_A, rel=1e-12)
    assert here.front_W[100] == pytest.approx(one.laser.front_W, rel=0.01)
    assert here.locking_margin_per_cm[100] == pytest.approx(one.locking_margin_per_cm, rel=1e-12)
    assert found.external is not None
    assert found.to_json_dict()["laser"]["external"]["locks"] is True
    assert any("external reflector" in note for note in found.notes)


def test_locking_limits_the_range():
    # A gain peak 8 nm away: only fronts below a certain R follow the grating.
    chip = replace(PUMP, gain_peak_nm=984.0, gain_width_nm=40.0)
    limit = highest_locking_R(chip, GRATING, R_rear=0.97)
    assert 1e-4 < limit < 0.1
    case = TradeCase(chip=chip, rear=REAR, external=GRATING, limits=Limits(threshold_max_A=0.9))
    found = trade(case)
    kept = found.columns.kept["locking"]
    assert np.array_equal(kept, found.columns.R_front < limit)
    assert found.best.R_high <= limit * (1.0 + 1e-9)
    # A weak grating holds fewer fronts than the power asks for: then locking is what limits.
    weak = replace(GRATING, reflectance=0.001)
    bound = trade(TradeCase(chip=chip, rear=REAR, external=weak)).best
    assert bound.limited_by == "locking"
    assert bound.R_front == pytest.approx(highest_locking_R(chip, weak, R_rear=0.97), rel=1e-3)


def test_mirror_that_reflects_everywhere_has_no_rival():
    found = pump_trade(external=External(reflectance=0.05, coupling=0.8))
    assert found.columns.locking_margin_per_cm is None
    assert "locking" not in found.columns.kept


def test_ripple_of_an_amplifier():
    amplifier = Amplifier(
        wavelength_nm=976.0, length_um=4000.0, index=3.3, group_index=3.75, gain_dB=10.0,
        ripple_dB=2.0,
    )  # fmt: skip
    found = pump_trade(amplifier=amplifier)
    here = found.columns
    lit = np.isinf(here.ripple_dB)
    assert np.array_equal(lit, 10.0 * np.sqrt(here.R_front * 0.97) >= 1.0)
    assert here.ripple_dB[~lit] == pytest.approx(ripple_dB(here.R_front[~lit] * 0.97, gain_dB=10.0))
    assert np.array_equal(here.kept["ripple"], here.ripple_dB <= 2.0)
    assert found.best.limited_by == "ripple"
    assert float(ripple_dB(found.best.R_front * 0.97, gain_dB=10.0)) == pytest.approx(2.0, rel=1e-4)
    free = pump_trade(amplifier=replace(amplifier, ripple_dB=None))
    assert "ripple" not in free.columns.kept
    assert any("not judged" in note for note in free.notes)


def test_drift_of_the_reflectance():
    found = pump_trade(limits=Limits(threshold_max_A=0.6))
    best = found.best
    assert [row.factor for row in found.drift] == [0.5, 0.8, 1.25, 2.0]
    for row in found.drift:
        assert row.R_front == pytest.approx(row.factor * best.R_front)
        assert row.change_W == pytest.approx(watts(row.R_front) - best.front_W, abs=1e-6)
    assert found.drift[0].missed == ("threshold",)
    assert found.drift[-1].missed == ()
    step = 1e-3
    slope = (watts(best.R_front * np.exp(step)) - watts(best.R_front * np.exp(-step))) / (2 * step)
    assert found.watts_per_ln_R == pytest.approx(slope, rel=1e-4)
    # At a free maximum a drift costs nothing at first.
    assert pump_trade().watts_per_ln_R == pytest.approx(0.0, abs=1e-4)


def test_names_and_plain_numbers():
    found = trade(TradeCase(chip=PUMP, rear=REAR), present=FacetLight.lossless(0.03))
    result = json.loads(json.dumps(found.to_json_dict(), allow_nan=False))
    assert list(result) == KEYS
    assert {len(result[key]) for key in KEYS[:6]} == {found.columns.R_front.size}
    assert list(result["best"]) == [
        "R_front", "R_low", "R_high", "front_W", "threshold_A", "limited_by",
    ]  # fmt: skip
    assert result["length_um"] == 4000.0
    assert result["drive_A"] == 12.0
    assert result["laser"]["R_front"] == 0.03


def test_what_is_not_known_is_none():
    chip = replace(PUMP, junction_V=None, mode_height_um=None, modal_gain_per_cm=0.01)
    found = trade(
        TradeCase(chip=chip, rear=REAR, limits=Limits(facet_limit_MW_per_cm2=20.0)), points=5
    )
    result = json.loads(json.dumps(found.to_json_dict(), allow_nan=False))
    assert result["wall_plug_efficiency"] == [None] * 5
    assert result["facet_load_MW_per_cm2"] == [None] * 5
    assert result["threshold_A"][0] is None  # no current reaches it
    assert any("can't be judged" in note for note in found.notes)


def test_window_to_paste():
    found = pump_trade()
    window = tomllib.loads(found.window)["front"]["windows"][0]
    low = window["reflectance"] - window["tolerance"]
    high = window["reflectance"] + window["tolerance"]
    assert found.best.R_low <= low < high <= found.best.R_high
    assert high - low > 0.95 * (found.best.R_high - found.best.R_low)


@pytest.mark.parametrize(
    ("low", "high"),
    [
        (0.00086556, 0.0175225),
        (0.131537, 0.1429436),
        (1e-5, 0.0113488),
        (0.5, 0.5000001),
        (0.1, 0.9),
    ],
)
def test_window_is_rounded_inward(low, high):
    middle, half = rounded_inward(low, high)
    assert low <= float(middle - half)
    assert float(middle + half) <= high
    assert float(2 * half) > 0.75 * (high - low)
    assert len(half.normalize().as_tuple().digits) <= 4


def test_range_too_narrow_to_write():
    assert rounded_inward(0.1, 0.1) is None
    assert window_text(BestFront(0.1, 0.1, 0.1, 1.0, 1.0, "load, threshold"), drive_A=1.0) is None


def test_speed():
    case = TradeCase(chip=PUMP, rear=REAR, limits=Limits(threshold_max_A=0.6))
    trade(case)
    start = perf_counter()
    trade(case)
    # Aim: 0.5 s; the bound leaves room for a busy machine.
    assert perf_counter() - start < 2.0


def test_cases_that_can_not_be():
    with pytest.raises(InputError, match=r"laser\.drive_A: is missing"):
        TradeCase(chip=replace(PUMP, drive_A=None), rear=REAR)
    with pytest.raises(InputError, match=r"laser\.drive_A: is 0"):
        TradeCase(chip=PUMP, rear=REAR, drive_A=0.0)
    with pytest.raises(InputError, match="rear: holds arrays"):
        TradeCase(chip=PUMP, rear=FacetLight.lossless(np.array([0.9, 0.97])))
    for shares in ((-0.1, 0.0), (0.5, 0.5)):
        with pytest.raises(InputError, match="give shares from 0 with a sum below 1"):
            lossy_front(absorbed=shares[0], scattered=shares[1])


@pytest.mark.parametrize(
    ("changes", "match"),
    [
        ({"R_range": (0.5, 0.1)}, r"R_range: is 0\.5 to 0\.1"),
        ({"R_range": (0.0, 0.1)}, "R_range: is 0 to"),
        ({"points": 4}, "points: is 4"),
        ({"R_bare": 1.2}, r"R_bare: is 1\.2"),
    ],
)
def test_axes_that_can_not_be(changes, match):
    with pytest.raises(InputError, match=match):
        trade(TradeCase(chip=PUMP, rear=REAR), **changes)


def test_facets_that_take_more_than_all():
    with pytest.raises(ArrayError, match="facet T: falls to"):
        pump_trade(front_of=lossy_front(absorbed=0.2))
    with pytest.raises(ArrayError, match="present: holds arrays"):
        trade(TradeCase(chip=PUMP, rear=REAR), present=FacetLight.lossless(np.array([0.1, 0.2])))
