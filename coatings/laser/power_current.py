"""Light against current, ready for a plot."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.errors import ArrayError, Problem
from coatings.laser.checks import FloatArray, not_negative
from coatings.laser.chip import LaserChip
from coatings.laser.facets import FacetLight
from coatings.laser.operation import FieldModel, operate


@dataclass(frozen=True)
class PowerCurrent:
    """Light of both facets over current; arrays of one shape without gaps.

    ``rollover_A`` is the current of the greatest front power when the power falls beyond it;
    ``quenched_A`` the first current at which no lasing steady state is left; None where there is
    none. ``notes`` says both.
    """

    current_A: FloatArray
    front_W: FloatArray
    rear_W: FloatArray
    junction_C: FloatArray
    model: FieldModel
    rollover_A: float | None
    quenched_A: float | None

    @property
    def notes(self) -> tuple[str, ...]:
        """Rollover and loss of the lasing state, in sentences."""
        notes = []
        if self.rollover_A is not None:
            notes.append(f"Thermal rollover: the power falls beyond {self.rollover_A:.4g} A.")
        if self.quenched_A is not None:
            notes.append(
                f"From {self.quenched_A:.4g} A there is no steady state that lases: the chip's own "
                "heat keeps it below threshold."
            )
        return tuple(notes)


def power_current(
    chip: LaserChip,
    front: FacetLight,
    rear: FacetLight,
    *,
    current_A: FloatArray,
    model: FieldModel | None = None,
) -> PowerCurrent:
    """Front and rear power at rising currents, by the full model.

    Parameters
    ----------
    chip : the chip.
    front, rear : what each facet does with the light; plain numbers.
    current_A : currents [A], rising, shape (n,).
    model : field model; None takes the axial one for the whole curve where it matters anywhere.

    Raises
    ------
    ArrayError
        Facets given as arrays, or currents that are not a rising row of at least two.
    """
    if front.shape or rear.shape:
        raise ArrayError(Problem("front, rear", "hold arrays; give one facet a curve"))
    current = not_negative("current_A", current_A)
    if current.ndim != 1 or current.size < 2 or np.any(np.diff(current) <= 0.0):
        raise ArrayError(Problem("current_A", "is not a rising row; give two or more, rising"))
    working = operate(chip, front, rear, current_A=current, model=model)
    best = int(np.argmax(working.front_W))
    quenched = np.flatnonzero(working.quenched)
    return PowerCurrent(
        current_A=current,
        front_W=working.front_W,
        rear_W=working.rear_W,
        junction_C=working.junction_C,
        model=working.model,
        rollover_A=float(current[best]) if best < current.size - 1 else None,
        quenched_A=float(current[quenched[0]]) if quenched.size else None,
    )
