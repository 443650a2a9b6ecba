"""What a reader of the laser's figures has to know, in sentences."""

from __future__ import annotations

from coatings.laser.chip import LaserChip
from coatings.laser.operation import FieldModel, Operation

_FAR_BEYOND_MODAL_GAIN = 3.0
_NEAR_RUNAWAY = 0.5
_FAR_FROM_REFERENCE_K = 100.0


def cold_notes(
    chip: LaserChip, threshold_A: float | None, drive_A: float | None
) -> tuple[str, ...]:
    """Sentences on what is not given and on the threshold."""
    notes = []
    if threshold_A is None:
        notes.append(
            "The gain that threshold needs is so far beyond the modal gain that no current "
            "reaches it."
        )
    elif threshold_A > chip.pumped_cm2 * chip.gain.current_density_A_per_cm2(
        _FAR_BEYOND_MODAL_GAIN * chip.modal_gain_per_cm
    ):
        notes.append(
            f"Threshold needs more than {_FAR_BEYOND_MODAL_GAIN:g} times the modal gain constant: "
            f"{threshold_A:.4g} A is the gain law carried far beyond where such laws are measured."
        )
    if drive_A is None:
        return (*notes, "No drive current is given: no watts, loads or efficiency.")
    if chip.junction_V is None:
        notes.append("The junction voltage is not given: no efficiency, and no heating counted.")
    elif chip.thermal_K_per_W == 0.0:
        notes.append("No thermal resistance is given: the junction stays at the heat sink.")
    if chip.t0_K is None and chip.t1_K is None:
        notes.append("Neither T0 nor T1 is given: figures do not change with temperature.")
    if chip.mode_height_um is None:
        notes.append("The height of the near field is not given: no facet output or load.")
    return tuple(notes)


def working_notes(chip: LaserChip, working: Operation) -> tuple[str, ...]:
    """Sentences on the state of one chip at its drive current."""
    return (*_state(chip, working), *_warmth(chip, working), *_field(working))


def _state(chip: LaserChip, working: Operation) -> list[str]:
    drive, hot = float(working.current_A), float(working.hot_threshold_A)
    cold = float(working.threshold_A)
    if working.quenched:
        return [
            f"At {drive:.4g} A there is no steady state that lases: at the junction's "
            f"{float(working.junction_C):.0f} C the threshold of {cold:.4g} A has risen to "
            f"{hot:.4g} A. What leaves is spontaneous emission only."
        ]
    if not working.lasing:
        return [
            f"The drive of {drive:.4g} A is not above the threshold of {hot:.4g} A: what leaves "
            "is spontaneous emission only"
            + ("." if chip.spontaneous_factor > 0.0 else ", and its factor is zero.")
        ]
    feedback = float(working.thermal_feedback)
    if feedback > _NEAR_RUNAWAY:
        return [
            f"Near thermal runaway: a watt less light costs {feedback:.2f} W more by the heat it "
            "leaves behind; 1 is runaway."
        ]
    return []


def _warmth(chip: LaserChip, working: Operation) -> list[str]:
    rise = float(working.junction_C) - chip.cold_C
    if abs(rise) <= _FAR_FROM_REFERENCE_K:
        return []
    return [
        f"The junction is {rise:+.0f} K from the reference: T0 and T1 are carried far beyond where "
        "they are measured."
    ]


def _field(working: Operation) -> list[str]:
    if working.model is FieldModel.UNIFORM:
        return []
    change = 100.0 * (float(working.axial_power_ratio) - 1.0)
    return [f"The axial field changes the power by {change:+.1f} % against the uniform model."]
