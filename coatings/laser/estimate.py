"""The laser's line: what a chip with two given facets does at its drive current."""

from __future__ import annotations

from dataclasses import asdict, dataclass, replace

import numpy as np

from coatings.errors import ArrayError, Problem
from coatings.laser.axial import front_over_least
from coatings.laser.checks import FloatArray
from coatings.laser.chip import LaserChip
from coatings.laser.facets import FacetLight
from coatings.laser.notes import cold_notes, working_notes
from coatings.laser.operation import FieldModel, Operation, operate
from coatings.laser.power import (
    facet_load_MW_per_cm2,
    facet_output_MW_per_cm2,
    facet_split,
    total_slope_W_per_A,
)
from coatings.laser.threshold import (
    mirror_loss_per_cm,
    threshold_current_A,
    threshold_gain_per_cm,
)


@dataclass(frozen=True)
class LaserEstimate:
    """Figures of one chip; None where the chip's numbers do not say.

    ``threshold_A`` and the slopes are the uniform model's, at the reference temperature and above
    the knee; front and rear slope count what leaves, not what the coatings keep. Watts, loads and
    efficiency come from the full model at the drive current. ``axial_ratio`` is the density of the
    light inside at the front over the least along the chip, (1 + R1)/(2 sqrt R1).
    ``facet_output`` is what leaves the front over the near field; ``facet_load`` is the density
    inside at the front, both directions, output (1 + R)/T, formed from the light that runs onto
    the facet so that an opaque front has one too. ``notes`` says in sentences what was not given
    and what to mind; ``junction_C`` is None without a drive current.
    """

    R_front: float
    R_rear: float
    mirror_loss_per_cm: float
    threshold_gain_per_cm: float
    threshold_A: float | None
    slope_front_W_per_A: float
    slope_rear_W_per_A: float
    front_fraction: float | None
    axial_ratio: float
    front_W: float | None = None
    rear_W: float | None = None
    coating_absorbed_W: float | None = None
    facet_output_MW_per_cm2: float | None = None
    facet_load_MW_per_cm2: float | None = None
    wall_plug_efficiency: float | None = None
    model: str = FieldModel.UNIFORM.value
    junction_C: float | None = None
    notes: tuple[str, ...] = ()

    def to_json_dict(self) -> dict[str, float | str | None]:
        """The figures by name, without ``junction_C`` and the notes; plain numbers and None."""
        figures = asdict(self)
        del figures["junction_C"], figures["notes"]
        return figures


def estimate(
    chip: LaserChip,
    front: FacetLight,
    rear: FacetLight,
    *,
    drive_A: float | None = None,
    model: FieldModel | None = None,
) -> LaserEstimate:
    """Threshold, slopes, power, load and efficiency of a chip with the given facets.

    Parameters
    ----------
    chip : the chip.
    front, rear : what each facet does with the light; plain numbers.
    drive_A : current of the bar [A]; ``chip.drive_A`` when absent; without either no watts.
    model : field model; None takes the axial one where it changes power by more than 1 %.

    Raises
    ------
    ArrayError
        Facets given as arrays (use ``operate`` for draws), a facet without feedback, no facet
        that lets light out.
    InputError
        The numbers of the chip make more light than the electrical power.
    """
    if front.shape or rear.shape:
        raise ArrayError(Problem("front, rear", "hold arrays; give one facet, or call operate"))
    drive = chip.drive_A if drive_A is None else drive_A
    cold = _cold(chip, front, rear)
    if drive is None:
        taken = model or FieldModel.UNIFORM
        return replace(cold, model=taken.value, notes=cold_notes(chip, cold.threshold_A, None))
    working = operate(chip, front, rear, current_A=drive, model=model)
    return _at_work(chip, front, cold, working)


def _cold(chip: LaserChip, front: FacetLight, rear: FacetLight) -> LaserEstimate:
    """What holds without a drive current."""
    split = facet_split(front, rear)
    loss = mirror_loss_per_cm(front.R, rear.R, length_um=chip.length_um)
    need = threshold_gain_per_cm(loss, internal_loss_per_cm=chip.internal_loss_per_cm)
    slope = total_slope_W_per_A(chip, mirror_loss_per_cm=loss)
    return LaserEstimate(
        R_front=float(front.R),
        R_rear=float(rear.R),
        mirror_loss_per_cm=float(loss),
        threshold_gain_per_cm=float(need),
        threshold_A=_finite(threshold_current_A(chip, threshold_gain_per_cm=need)),
        slope_front_W_per_A=float(slope * split.front),
        slope_rear_W_per_A=float(slope * split.rear),
        front_fraction=_finite(split.front_fraction) if split.front + split.rear > 0 else None,
        axial_ratio=float(front_over_least(front.R)),
    )


def _at_work(
    chip: LaserChip, front: FacetLight, cold: LaserEstimate, working: Operation
) -> LaserEstimate:
    """The cold figures with those at the drive current."""
    output = facet_output_MW_per_cm2(chip, front_W=working.front_W)
    load = facet_load_MW_per_cm2(chip, front_incident_W=working.front_incident_W, R_front=front.R)
    notes = (
        *cold_notes(chip, cold.threshold_A, float(working.current_A)),
        *working_notes(chip, working),
    )
    return replace(
        cold,
        front_W=float(working.front_W),
        rear_W=float(working.rear_W),
        coating_absorbed_W=float(working.coating_absorbed_W),
        facet_output_MW_per_cm2=None if output is None else float(output),
        facet_load_MW_per_cm2=None if load is None else float(load),
        wall_plug_efficiency=_efficiency(chip, working),
        model=working.model.value,
        junction_C=None if chip.junction_V is None else float(working.junction_C),
        notes=notes,
    )


def _finite(value: FloatArray) -> float | None:
    return float(value) if np.isfinite(value) else None


def _efficiency(chip: LaserChip, working: Operation) -> float | None:
    """Front light over electrical power, P1/(I V); None without current or voltage."""
    voltage = chip.voltage_V(working.current_A)
    if voltage is None or working.current_A == 0.0:
        return None
    return float(working.front_W / (working.current_A * voltage))
