"""The limits of the product, judged and named."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from coatings.errors import InputError
from coatings.laser.checks import FloatArray, Real, out_of_range
from coatings.laser.estimate import LaserEstimate


@dataclass(frozen=True, kw_only=True)
class Limits:
    """What the product may not pass; None sets no limit.

    Raises
    ------
    InputError
        A limit that is negative (rear power) or not above zero (the others).
    """

    threshold_max_A: float | None = None
    rear_min_W: float | None = None
    facet_limit_MW_per_cm2: float | None = None

    def __post_init__(self) -> None:
        problems = [
            *out_of_range("threshold_max_A", self.threshold_max_A, low=0.0, open_low=True),
            *out_of_range("rear_min_W", self.rear_min_W, low=0.0),
            *out_of_range(
                "facet_limit_MW_per_cm2", self.facet_limit_MW_per_cm2, low=0.0, open_low=True
            ),
        ]
        if problems:
            raise InputError(problems)


@dataclass(frozen=True)
class Judgement:
    """One limit: its ``name``, ``limit``, the ``value`` and whether it is kept; None = unknown."""

    name: str
    limit: float
    value: float | None
    kept: bool | None

    def __str__(self) -> str:
        if self.kept is None or self.value is None:
            return f"{self.name} {self.limit:g}: can't be judged, the figure is not known"
        word = "kept" if self.kept else "missed"
        return f"{self.name} {self.limit:g}: {word} at {self.value:.4g}"


def keeps_limits(
    limits: Limits,
    *,
    threshold_A: Real,
    rear_W: Real | None,
    facet_load_MW_per_cm2: Real | None,
) -> dict[str, NDArray[np.bool_]]:
    """Where each limit that is set is kept, by name; a figure given as None is left out.

    Parameters
    ----------
    limits : the limits.
    threshold_A : threshold [A]; ``rear_W`` : rear power [W].
    facet_load_MW_per_cm2 : density inside at the front [MW/cm2].
    """
    kept: dict[str, NDArray[np.bool_]] = {}
    if limits.threshold_max_A is not None:
        kept["threshold_max_A"] = _array(threshold_A) <= limits.threshold_max_A
    if limits.rear_min_W is not None and rear_W is not None:
        kept["rear_min_W"] = _array(rear_W) >= limits.rear_min_W
    if limits.facet_limit_MW_per_cm2 is not None and facet_load_MW_per_cm2 is not None:
        kept["facet_limit_MW_per_cm2"] = (
            _array(facet_load_MW_per_cm2) <= limits.facet_limit_MW_per_cm2
        )
    return kept


def judge_limits(limits: Limits, figures: LaserEstimate) -> tuple[Judgement, ...]:
    """Every limit that is set, against the figures of one chip."""
    values = {
        "threshold_max_A": figures.threshold_A,
        "rear_min_W": figures.rear_W,
        "facet_limit_MW_per_cm2": figures.facet_load_MW_per_cm2,
    }
    # A threshold of None is one that no current reaches.
    threshold = np.inf if figures.threshold_A is None else figures.threshold_A
    kept = keeps_limits(
        limits,
        threshold_A=threshold,
        rear_W=figures.rear_W,
        facet_load_MW_per_cm2=figures.facet_load_MW_per_cm2,
    )
    return tuple(
        Judgement(name, limit, value, bool(kept[name]) if name in kept else None)
        for name, value in values.items()
        if (limit := getattr(limits, name)) is not None
    )


def _array(value: Real) -> FloatArray:
    return np.asarray(value, dtype=np.float64)
