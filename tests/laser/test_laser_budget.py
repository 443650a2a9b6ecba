"""Watts in = watts out + heat, absorbed, scattered, spontaneous."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from coatings.errors import ArrayError
from coatings.laser import FacetLight, FieldModel, operate, power_budget

FRONT = FacetLight(R=0.03, T=0.94, A=0.02, S=0.01)
REAR = FacetLight(R=0.95, T=0.0, A=0.05)


@pytest.mark.parametrize("model", FieldModel)
@pytest.mark.parametrize("current", [0.3, 2.0, 12.0, 18.0])
def test_watts_in_are_watts_out(pump, model, current):
    budget = power_budget(pump, FRONT, REAR, current_A=current, model=model)
    assert budget.electrical_W == pytest.approx(current * (1.31 + 0.014 * current), rel=1e-12)
    working = operate(pump, FRONT, REAR, current_A=current, model=model)
    assert working.junction_C == pytest.approx(25.0 + 2.0 * budget.heat_W, abs=1e-4)
    assert min(budget.to_json_dict().values()) >= 0.0


def test_uniform_chip_recombines_its_threshold_current(pump):
    chip = replace(pump, spontaneous_factor=0.0)
    budget = power_budget(chip, FRONT, REAR, current_A=12.0, model=FieldModel.UNIFORM)
    working = operate(chip, FRONT, REAR, current_A=12.0, model=FieldModel.UNIFORM)
    assert budget.spontaneous_W == pytest.approx(1.31 * working.hot_threshold_A, rel=1e-10)


def test_hole_burning_takes_more_spontaneous_current(pump):
    chip = replace(pump, spontaneous_factor=0.0)
    axial = power_budget(chip, FRONT, REAR, current_A=12.0, model=FieldModel.AXIAL)
    uniform = power_budget(chip, FRONT, REAR, current_A=12.0, model=FieldModel.UNIFORM)
    # With photons crowded at one end the same light meets more loss and more idle carriers.
    assert axial.internal_loss_W + axial.spontaneous_W > (
        uniform.internal_loss_W + uniform.spontaneous_W
    )
    assert np.isclose(axial.electrical_W, uniform.electrical_W, rtol=1e-12)


def test_refusals(pump):
    with pytest.raises(ArrayError, match="junction_V: is not given"):
        power_budget(replace(pump, junction_V=None), FRONT, REAR, current_A=1.0)
    many = FacetLight.lossless(np.array([0.1, 0.2]))
    with pytest.raises(ArrayError, match="give one facet a budget"):
        power_budget(pump, many, REAR, current_A=1.0)
