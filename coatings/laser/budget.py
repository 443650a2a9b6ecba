"""Where the electrical watts of a chip at work go.

Of the current I a part dI makes stimulated photons; the rest recombines otherwise, with
and without light. With eta_i the injection efficiency, V_j the junction voltage:

    I V = I^2 R_s + (I - dI) V_j + (1 - eta_i) dI V_j + eta_i dI (V_j - stages h nu/q)
          + inner loss + front + rear + absorbed in the coatings + scattered,

where eta_i dI stages h nu/q is the stimulated light, all lost inside or at the facets.
"""

from __future__ import annotations

from dataclasses import astuple, dataclass, fields

import numpy as np

from coatings.errors import ArrayError, Problem
from coatings.laser.axial import axial_profile
from coatings.laser.chip import LaserChip
from coatings.laser.facets import FacetLight
from coatings.laser.operation import FieldModel, Operation, operate
from coatings.laser.power import cooled_slope_W_per_A
from coatings.laser.threshold import mirror_loss_per_cm


@dataclass(frozen=True)
class PowerBudget:
    """Watts of the whole bar; all but ``front_W`` and ``rear_W`` heat the chip.

    Attributes
    ----------
    front_W, rear_W : light that leaves [W].
    coating_absorbed_W, scattered_W : light lost at the facets without leaving [W].
    internal_loss_W : light absorbed along the chip [W].
    spontaneous_W : carriers that recombine without stimulated light [W].
    leakage_W : carriers that the injection efficiency loses above threshold [W].
    excess_voltage_W : what the junction takes beyond the photons' energy [W]; negative where the
        junction voltage is given below it.
    series_W : series resistance [W].
    """

    front_W: float
    rear_W: float
    coating_absorbed_W: float
    scattered_W: float
    internal_loss_W: float
    spontaneous_W: float
    leakage_W: float
    excess_voltage_W: float
    series_W: float

    @property
    def electrical_W(self) -> float:
        """Sum of all, I V [W]."""
        return float(sum(astuple(self)))

    @property
    def heat_W(self) -> float:
        """All that stays in the chip [W]."""
        return self.electrical_W - self.front_W - self.rear_W

    def to_json_dict(self) -> dict[str, float]:
        """Watts by name."""
        return {field.name: getattr(self, field.name) for field in fields(self)}


def power_budget(
    chip: LaserChip,
    front: FacetLight,
    rear: FacetLight,
    *,
    current_A: float,
    model: FieldModel | None = None,
) -> PowerBudget:
    """Divides the electrical power of one chip at work.

    Parameters
    ----------
    chip : the chip, with ``junction_V``.
    front, rear : what each facet does with the light; plain numbers.
    current_A : current of the bar [A].
    model : field model; None takes the axial one where it changes power by more than 1 %.

    Raises
    ------
    ArrayError
        A chip without junction voltage, or facets given as arrays.
    """
    if chip.junction_V is None:
        raise ArrayError(Problem("junction_V", "is not given: the watts are not known; give it"))
    if front.shape or rear.shape:
        raise ArrayError(Problem("front, rear", "hold arrays; give one facet a budget"))
    working = operate(chip, front, rear, current_A=current_A, model=model)
    shares = ("front_W", "rear_W", "coating_absorbed_W", "scattered_W")
    light = {name: float(getattr(working, name)) for name in shares}
    lost = sum(light.values())
    internal = lost * _inner_over_lost(chip, front, rear, working)
    rise = working.junction_C - chip.cold_C
    efficiency = float(cooled_slope_W_per_A(chip, np.asarray(chip.injection_efficiency), rise))
    photons_V = chip.stages * chip.photon_V
    stimulated_A = (lost + internal) / (efficiency * photons_V)
    return PowerBudget(
        **light,
        internal_loss_W=internal,
        spontaneous_W=(current_A - stimulated_A) * chip.junction_V,
        leakage_W=(1.0 - efficiency) * stimulated_A * chip.junction_V,
        excess_voltage_W=efficiency * stimulated_A * (chip.junction_V - photons_V),
        series_W=current_A**2 * chip.series_mohm * 1e-3,
    )


def _inner_over_lost(
    chip: LaserChip, front: FacetLight, rear: FacetLight, working: Operation
) -> float:
    """Light absorbed along the chip over light lost at the facets."""
    R_front, R_rear = float(front.R), float(rear.R)
    if working.model is FieldModel.AXIAL and working.axial_power_ratio != 1.0:
        field = axial_profile(
            chip,
            current_A=float(working.current_A),
            R_front=R_front,
            R_rear=R_rear,
            rise_K=float(working.junction_C) - chip.cold_C,
        )
        return field.internal_loss_W / field.lost_W
    mirror = mirror_loss_per_cm(R_front, R_rear, length_um=chip.length_um)
    return chip.internal_loss_per_cm / float(mirror)
