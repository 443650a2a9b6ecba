"""What the laser does over front reflectivity: one column a figure, one row a reflectance."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import TypeAlias

import numpy as np
from numpy.typing import NDArray

from coatings.errors import InputError, Problem
from coatings.laser import (
    Amplifier,
    External,
    FacetLight,
    FieldModel,
    LaserChip,
    Limits,
    Operation,
    facet_load_MW_per_cm2,
    keeps_limits,
    locking_margin_per_cm,
    operate,
    rival_nm,
    single_pass_gain,
    with_external,
)

FloatArray: TypeAlias = NDArray[np.float64]
Mask: TypeAlias = NDArray[np.bool_]
FrontOf: TypeAlias = Callable[[FloatArray], FacetLight]
"""The front facet for an array of reflectances: says what becomes of the rest."""

THRESHOLD, ROLLOVER = "threshold", "rollover"
LOAD, REAR, LOCKING, RIPPLE = "load", "rear power", "locking", "ripple"
_NO_LIMITS = Limits()
_WORDS = {"threshold_max_A": THRESHOLD, "rear_min_W": REAR, "facet_limit_MW_per_cm2": LOAD}


def lossy_front(*, absorbed: float = 0.0, scattered: float = 0.0) -> FrontOf:
    """A front whose coating absorbs and scatters the same share at every R: T = 1 - R - A - S.

    Parameters
    ----------
    absorbed, scattered : A and S [1].

    Raises
    ------
    InputError
        A negative share, or shares that leave no light.
    """
    if not (absorbed >= 0.0 and scattered >= 0.0 and absorbed + scattered < 1.0):
        raise InputError(
            Problem(
                "absorbed, scattered",
                f"are {absorbed:g} and {scattered:g}; give shares from 0 with a sum below 1",
            )
        )

    def front(R: FloatArray) -> FacetLight:
        every = np.ones_like(R)
        T = 1.0 - R - absorbed - scattered
        return FacetLight(R=R, T=T, A=absorbed * every, S=scattered * every)

    return front


@dataclass(frozen=True, kw_only=True)
class TradeCase:
    """What stays the same while the front's reflectance is varied.

    Attributes
    ----------
    chip : the chip; ``drive_A`` is its own unless given here [A].
    rear : the rear facet; plain numbers.
    limits : the product's limits.
    front_of : the front for an array of reflectances; lossless when not given.
    external : reflector before the front: watts, threshold and load are then those with it.
    amplifier : single-pass gain and ripple limit of the chip below threshold.

    Raises
    ------
    InputError
        No drive current above zero, or a rear given as an array.
    """

    chip: LaserChip
    rear: FacetLight
    drive_A: float | None = None
    limits: Limits = _NO_LIMITS
    front_of: FrontOf = FacetLight.lossless
    external: External | None = None
    amplifier: Amplifier | None = None

    def __post_init__(self) -> None:
        drive = self.chip.drive_A if self.drive_A is None else self.drive_A
        if drive is None:
            raise InputError(
                Problem("laser.drive_A", "is missing: watts are weighed at a current; add it")
            )
        if not 0.0 < drive < np.inf:
            raise InputError(
                Problem("laser.drive_A", f"is {drive:g}; give a current above 0 to weigh watts at")
            )
        if self.rear.shape:
            raise InputError(Problem("rear", "holds arrays; give one rear facet a trade"))

    @property
    def current_A(self) -> float:
        """The drive current [A]."""
        # One of the two is there and above zero: the door saw to it.
        return float(self.drive_A or self.chip.drive_A or 0.0)

    def at_current(self, current_A: float) -> TradeCase:
        """The same at another drive current."""
        return replace(self, drive_A=current_A)

    def at_length(self, length_um: float) -> TradeCase:
        """The same for another length; series and thermal resistance go with one over length."""
        shorter = self.chip.length_um / length_um
        chip = replace(
            self.chip,
            length_um=length_um,
            series_mohm=self.chip.series_mohm * shorter,
            thermal_K_per_W=self.chip.thermal_K_per_W * shorter,
        )
        return replace(self, chip=chip)


@dataclass(frozen=True, eq=False)
class Columns:
    """Figures over front reflectance; arrays of shape (n,), None where they are not known.

    ``locking_margin_per_cm`` with an external reflector that has a rival, ``ripple_dB`` with an
    amplifier (inf where the chip would lase). ``kept`` says by name where each limit is kept;
    being above the cold threshold ("threshold") and not put out by its own heat ("rollover") are
    always among them.
    """

    R_front: FloatArray
    threshold_A: FloatArray
    front_W: FloatArray
    rear_W: FloatArray
    facet_load_MW_per_cm2: FloatArray | None
    wall_plug_efficiency: FloatArray | None
    locking_margin_per_cm: FloatArray | None
    ripple_dB: FloatArray | None
    kept: dict[str, Mask]
    model: FieldModel

    @property
    def allowed(self) -> Mask:
        """Where every limit is kept."""
        return np.asarray(np.logical_and.reduce(list(self.kept.values())), dtype=np.bool_)

    def missed(self, row: int) -> tuple[str, ...]:
        """Limits that a row misses."""
        return tuple(name for name, kept in self.kept.items() if not kept[row])


def columns(case: TradeCase, R_front: FloatArray, model: FieldModel | None = None) -> Columns:
    """Every figure at the given front reflectances, at the case's drive current.

    Parameters
    ----------
    case : what stays the same.
    R_front : reflectances of the front [1], shape (n,).
    model : field model of the watts; None takes the axial one for all where it matters for one.
    """
    chip, current = case.chip, case.current_A
    own = case.front_of(R_front)
    front = own if case.external is None else with_external(own, case.external).light
    working = operate(chip, front, case.rear, current_A=current, model=model)
    load = facet_load_MW_per_cm2(chip, front_incident_W=working.front_incident_W, R_front=front.R)
    margin = _locking_margin(case, R_front, front)
    ripple = _ripple_dB(case, R_front)
    return Columns(
        R_front=R_front,
        threshold_A=working.threshold_A,
        front_W=working.front_W,
        rear_W=working.rear_W,
        facet_load_MW_per_cm2=load,
        wall_plug_efficiency=_efficiency(case, working),
        locking_margin_per_cm=margin,
        ripple_dB=ripple,
        kept=_kept(case, working, load, margin, ripple),
        model=working.model,
    )


def _efficiency(case: TradeCase, working: Operation) -> FloatArray | None:
    current = case.current_A
    voltage = case.chip.voltage_V(current)
    if voltage is None or current == 0.0:
        return None
    return working.front_W / (current * voltage)


def _locking_margin(case: TradeCase, R: FloatArray, front: FacetLight) -> FloatArray | None:
    rival = None if case.external is None else rival_nm(case.chip, case.external)
    if case.external is None or rival is None:
        return None
    return locking_margin_per_cm(
        case.chip,
        R_locked=front.R,
        R_rival=R,
        R_rear=case.rear.R,
        locked_nm=case.external.locked_nm(case.chip),
        rival_nm=rival,
    )


def _ripple_dB(case: TradeCase, R: FloatArray) -> FloatArray | None:
    if case.amplifier is None:
        return None
    x = single_pass_gain(case.amplifier.gain_dB) * np.sqrt(R * float(case.rear.R))
    # Beside ``ripple_dB`` of the laser room, because here some rows may lase: no ripple is enough.
    ripple = np.full(R.shape, np.inf)
    dark = x < 1.0
    ripple[dark] = 20.0 * np.log10((1.0 + x[dark]) / (1.0 - x[dark]))
    return ripple


def _kept(
    case: TradeCase,
    working: Operation,
    load: FloatArray | None,
    margin: FloatArray | None,
    ripple: FloatArray | None,
) -> dict[str, Mask]:
    kept = {THRESHOLD: case.current_A > working.threshold_A, ROLLOVER: ~working.quenched}
    own = keeps_limits(
        case.limits,
        threshold_A=working.threshold_A,
        rear_W=working.rear_W,
        facet_load_MW_per_cm2=load,
    )
    for name, mask in own.items():
        word = _WORDS[name]
        kept[word] = kept.get(word, np.ones_like(mask)) & mask
    if margin is not None:
        kept[LOCKING] = margin > 0.0
    if ripple is not None and case.amplifier is not None and case.amplifier.ripple_dB is not None:
        kept[RIPPLE] = ripple <= case.amplifier.ripple_dB
    return kept
