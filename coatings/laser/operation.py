"""The chip at work: light, heat and field together, for one chip or thousands of draws at once."""

from __future__ import annotations

from dataclasses import dataclass, replace
from enum import Enum

import numpy as np
from numpy.typing import NDArray

from coatings.errors import InputError, Problem
from coatings.laser.axial import axial_ratio_kernel
from coatings.laser.checks import FloatArray, Real, not_negative, same_shape
from coatings.laser.chip import LaserChip
from coatings.laser.facets import FacetLight
from coatings.laser.heat import Index, lowest_junction_C
from coatings.laser.power import (
    FacetSplit,
    cooled_slope_W_per_A,
    excess_current_kernel_A,
    facet_split,
    total_slope_W_per_A,
)
from coatings.laser.threshold import (
    mirror_loss_per_cm,
    threshold_current_A,
    threshold_gain_per_cm,
    warmed_threshold_A,
)

AXIAL_MATTERS = 0.01
"""Change of power beyond which the axial model is taken by itself."""

_ROUNDS = 8
_SETTLED_K = 1e-5


class FieldModel(Enum):
    """How the light is taken to fill the chip."""

    UNIFORM = "uniform"
    AXIAL = "axial"


@dataclass(frozen=True)
class Operation:
    """State of each case at its current; arrays of one shape, powers of the whole bar.

    Attributes
    ----------
    current_A : current [A].
    front_W, rear_W : light that leaves each facet [W].
    coating_absorbed_W : absorbed in both coatings [W]; ``scattered_W`` : thrown back beside the
        mode at both facets [W].
    front_incident_W : light that runs onto the front facet from inside [W].
    junction_C : junction temperature [degree C].
    threshold_A, slope_W_per_A : cold (at the reference), the slope of all light lost at both
        facets.
    hot_threshold_A : threshold at the junction temperature [A].
    axial_power_ratio : factor of the axial field on the power [1]; 1 with the uniform model.
    thermal_feedback : R_th times the fall of the light with temperature [1]; 1 is runaway.
    model : the field model behind the watts.
    """

    current_A: FloatArray
    front_W: FloatArray
    rear_W: FloatArray
    coating_absorbed_W: FloatArray
    scattered_W: FloatArray
    front_incident_W: FloatArray
    junction_C: FloatArray
    threshold_A: FloatArray
    slope_W_per_A: FloatArray
    hot_threshold_A: FloatArray
    axial_power_ratio: FloatArray
    thermal_feedback: FloatArray
    model: FieldModel

    @property
    def lasing(self) -> NDArray[np.bool_]:
        """Cases above their threshold at the junction temperature."""
        return self.current_A > self.hot_threshold_A

    @property
    def quenched(self) -> NDArray[np.bool_]:
        """Cases that would lase cold but that their own heat holds below threshold."""
        return (self.current_A > self.threshold_A) & ~self.lasing


@dataclass(frozen=True)
class _Cases:
    """Cases in one row: what the light depends on; arrays of shape (n,)."""

    chip: LaserChip
    current: FloatArray
    threshold: FloatArray
    slope: FloatArray
    leaving: FloatArray
    R_front: FloatArray
    R_rear: FloatArray
    factor: FloatArray
    follows_heat: bool = False

    def coupled(self, index: Index) -> _Cases:
        """The cases at ``index``, their axial factor taken at each temperature they are asked."""
        return _Cases(
            chip=self.chip,
            current=self.current[index],
            threshold=self.threshold[index],
            slope=self.slope[index],
            leaving=self.leaving[index],
            R_front=self.R_front[index],
            R_rear=self.R_rear[index],
            factor=np.ones(index.size),
            follows_heat=True,
        )

    def axial_ratio(self, junction_C: FloatArray) -> FloatArray:
        """Factor that the axial field has on the power at a junction temperature."""
        rise = junction_C - self.chip.cold_C
        return axial_ratio_kernel(self.chip, self.current, self.R_front, self.R_rear, rise)

    def lost_W(self, junction_C: FloatArray, index: Index) -> FloatArray:
        """All light lost at both facets at a junction temperature."""
        rise = junction_C - self.chip.cold_C
        threshold = warmed_threshold_A(self.chip, self.threshold[index], rise)
        slope = cooled_slope_W_per_A(self.chip, self.slope[index], rise)
        knee = np.full(rise.shape, self.chip.spontaneous_factor)
        excess = excess_current_kernel_A(self.current[index], threshold, knee)
        factor = self.factor[index]
        if self.follows_heat:
            at = (self.current[index], self.R_front[index], self.R_rear[index])
            factor = axial_ratio_kernel(self.chip, *at, rise)
        return factor * slope * excess

    def leaving_W(self, junction_C: FloatArray, index: Index) -> FloatArray:
        """Light that leaves both facets at a junction temperature."""
        return self.leaving[index] * self.lost_W(junction_C, index)

    def junction_C(self) -> FloatArray:
        """Lowest steady junction temperature; the heat sink's where the voltage is not known."""
        chip = self.chip
        voltage = chip.voltage_V(self.current)
        cold = np.full(self.current.shape, chip.heatsink_C)
        if voltage is None:
            return cold
        electrical = self.current * voltage
        self._refuse_free_light(electrical, cold)
        if chip.thermal_K_per_W == 0.0:
            return cold
        return lowest_junction_C(
            self.leaving_W,
            heatsink_C=chip.heatsink_C,
            thermal_K_per_W=chip.thermal_K_per_W,
            electrical_W=electrical,
        )

    def _refuse_free_light(self, electrical_W: FloatArray, cold_C: FloatArray) -> None:
        light = self.leaving_W(cold_C, np.arange(cold_C.size))
        excess = light - electrical_W
        if np.any(excess > 0.0):
            worst = int(np.argmax(excess))
            raise InputError(
                Problem(
                    "junction_V, injection_efficiency, stages",
                    f"at {self.current[worst]:g} A the chip would emit {light[worst]:.4g} W from "
                    f"{electrical_W[worst]:.4g} W electrical, so there is no steady state; raise "
                    "junction_V or lower the efficiency",
                )
            )


def operate(
    chip: LaserChip,
    front: FacetLight,
    rear: FacetLight,
    *,
    current_A: Real,
    model: FieldModel | None = None,
) -> Operation:
    """Light and heat of the chip at a current, by the full model: heat, knee and axial field.

    Parameters
    ----------
    chip : the chip.
    front, rear : what the facets do with the light; numbers or arrays of draws.
    current_A : current of the bar [A]; a number or an array of the facets' shape.
    model : field model; None takes the axial one for all cases as soon as it changes the power of
        one of them by more than 1 % (one model for all keeps curves without steps).

    Returns
    -------
    Operation
        Arrays of the common shape. Without ``junction_V`` the junction is at the heat sink.

    Raises
    ------
    ArrayError
        Shapes that do not match, a negative current, facets without feedback or without loss.
    InputError
        The numbers of the chip make more light than the electrical power.
    """
    split = facet_split(front, rear)
    current, R_front, R_rear, leaving = same_shape(
        {
            "current_A": not_negative("current_A", current_A),
            "front R": front.R,
            "rear R": rear.R,
            "facets": split.front + split.rear,
        }
    )
    loss = mirror_loss_per_cm(R_front, R_rear, length_um=chip.length_um)
    need = threshold_gain_per_cm(loss, internal_loss_per_cm=chip.internal_loss_per_cm)
    threshold = threshold_current_A(chip, threshold_gain_per_cm=need)
    slope = total_slope_W_per_A(chip, mirror_loss_per_cm=loss)
    cases = _Cases(
        chip=chip,
        current=np.ravel(current),
        threshold=np.ravel(threshold),
        slope=np.ravel(slope),
        leaving=np.ravel(leaving),
        R_front=np.ravel(R_front),
        R_rear=np.ravel(R_rear),
        factor=np.ones(current.size),
    )
    cases, junction, taken = _settle(cases, model)
    return _operation(cases, split, junction, taken, current.shape)


def _settle(cases: _Cases, model: FieldModel | None) -> tuple[_Cases, FloatArray, FieldModel]:
    """Cases with the axial factor that belongs to their temperature, and that temperature.

    The factor hardly moves with temperature (1e-6 a kelvin), so two or three rounds with the
    factor of the round before are enough. Where heat is about to put the laser out they may swing
    between lit and dark: there the field is solved anew at every step of the climb.
    """
    junction = cases.junction_C()
    if model is FieldModel.UNIFORM:
        return cases, junction, FieldModel.UNIFORM
    factor = cases.axial_ratio(junction)
    if model is None and np.all(np.abs(factor - 1.0) <= AXIAL_MATTERS):
        return cases, junction, FieldModel.UNIFORM
    for _ in range(_ROUNDS):
        cases = replace(cases, factor=factor)
        before, junction = junction, cases.junction_C()
        open_ = np.flatnonzero(np.abs(junction - before) > _SETTLED_K)
        if open_.size == 0:
            break
        factor = cases.axial_ratio(junction)
    else:
        junction[open_] = cases.coupled(open_).junction_C()
        cases = replace(cases, factor=cases.axial_ratio(junction))
    return cases, junction, FieldModel.AXIAL


def _operation(
    cases: _Cases,
    split: FacetSplit,
    junction: FloatArray,
    model: FieldModel,
    shape: tuple[int, ...],
) -> Operation:
    chip = cases.chip
    index = np.arange(junction.size)
    lost = cases.lost_W(junction, index).reshape(shape)
    rise = junction - chip.cold_C
    hot = warmed_threshold_A(chip, cases.threshold, rise)
    return Operation(
        current_A=cases.current.reshape(shape),
        front_W=split.front * lost,
        rear_W=split.rear * lost,
        coating_absorbed_W=split.absorbed * lost,
        scattered_W=split.scattered * lost,
        front_incident_W=split.front_incident * lost,
        junction_C=junction.reshape(shape),
        threshold_A=cases.threshold.reshape(shape),
        slope_W_per_A=cases.slope.reshape(shape),
        hot_threshold_A=hot.reshape(shape),
        axial_power_ratio=cases.factor.reshape(shape),
        thermal_feedback=_feedback(cases, junction, hot).reshape(shape),
        model=model,
    )


def _feedback(cases: _Cases, junction: FloatArray, hot_threshold: FloatArray) -> FloatArray:
    """R_th (P/T1 + slope I_th/T0) of the light that leaves; the second term only while lasing."""
    chip = cases.chip
    if chip.junction_V is None:
        return np.zeros_like(junction)
    fall = np.zeros_like(junction)
    if chip.t1_K is not None:
        fall += cases.leaving_W(junction, np.arange(junction.size)) / chip.t1_K
    if chip.t0_K is not None:
        lit = np.flatnonzero(cases.current > hot_threshold)
        slope = cooled_slope_W_per_A(chip, cases.slope[lit], junction[lit] - chip.cold_C)
        fall[lit] += cases.factor[lit] * cases.leaving[lit] * slope * hot_threshold[lit] / chip.t0_K
    feedback: FloatArray = chip.thermal_K_per_W * fall
    return feedback
