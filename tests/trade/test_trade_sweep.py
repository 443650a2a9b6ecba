"""Best front over length and current."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from coatings.errors import InputError
from coatings.laser import FacetLight, LaserChip, Limits
from coatings.trade import TradeCase, sweep_current, sweep_length, trade

CASE = TradeCase(
    chip=LaserChip(
        wavelength_nm=976.0,
        length_um=4000.0,
        stripe_um=95.0,
        internal_loss_per_cm=0.8,
        injection_efficiency=0.95,
        transparency_A_per_cm2=120.0,
        modal_gain_per_cm=18.0,
        drive_A=12.0,
        series_mohm=14.0,
        junction_V=1.31,
        thermal_K_per_W=2.0,
        t0_K=170.0,
        t1_K=600.0,
    ),
    rear=FacetLight.lossless(0.97),
)


def test_each_current_is_a_trade_of_its_own():
    currents = np.array([4.0, 12.0, 20.0])
    found = sweep_current(CASE, current_A=currents)
    assert found.quantity == "current_A"
    for row, current in enumerate(currents):
        one = trade(replace(CASE, drive_A=float(current)))
        assert found.front_W[row] == pytest.approx(one.best.front_W, rel=1e-6)
        assert found.R_front[row] == pytest.approx(one.best.R_front, rel=0.02)
        at = found.best[row].front_W / (current * (1.31 + 0.014 * current))
        assert found.wall_plug_efficiency[row] == pytest.approx(at, rel=1e-12)
    # More drive affords more threshold: the best front falls.
    assert np.all(np.diff(found.R_front) < 0.0)


def test_each_length_is_a_chip_of_its_own():
    lengths = np.array([2000.0, 4000.0, 6000.0])
    found = sweep_length(CASE, length_um=lengths)
    shorter = replace(CASE.chip, length_um=2000.0, series_mohm=28.0, thermal_K_per_W=4.0)
    one = trade(replace(CASE, chip=shorter))
    assert found.front_W[0] == pytest.approx(one.best.front_W, rel=1e-6)
    assert found.front_W[1] == pytest.approx(trade(CASE).best.front_W, rel=1e-6)
    assert np.all(np.diff(found.R_front) < 0.0)
    assert "scaled" in found.notes[0]


def test_values_where_nothing_serves_are_nan():
    dark = sweep_current(replace(CASE, limits=Limits()), current_A=np.array([0.1, 12.0]))
    assert np.isnan(dark.R_front).tolist() == [True, False]
    assert np.isnan(dark.front_W).tolist() == [True, False]
    assert np.isnan(dark.wall_plug_efficiency).tolist() == [True, False]
    assert dark.best[0].limited_by == "threshold"


@pytest.mark.parametrize("values", [[], [0.0], [1.0, np.nan], [[1.0]]])
def test_values_that_can_not_be(values):
    with pytest.raises(InputError, match="current_A: is not a row of numbers above 0"):
        sweep_current(CASE, current_A=np.array(values))
    with pytest.raises(InputError, match="length_um: is not a row of numbers above 0"):
        sweep_length(CASE, length_um=np.array(values))
