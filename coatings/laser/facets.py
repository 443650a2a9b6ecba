"""What a facet does with the light that reaches it from inside the chip."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

from coatings.errors import ArrayError, Problem
from coatings.laser.checks import FloatArray, Real, numbers, same_shape

_ROUND_OFF = 1e-6
_LOOSE_SUM = 1e-3


@dataclass(frozen=True, eq=False)
class FacetLight:
    """Shares of the guided light that meets a facet from inside; numbers or arrays of one shape.

    T is what the caller says it is: it is never made from the others here, because scattering
    and opaque mirrors (T = 0) are part of the laser's balance.

    Attributes
    ----------
    R : reflected into the same mode [1].
    T : leaves the chip [1].
    A : absorbed in the coating [1].
    S : thrown back into the chip outside the mode [1].

    Raises
    ------
    ArrayError
        A share outside 0 ... 1, shapes that do not match, or R + T + A + S further than 0.001
        from 1. Round-off of up to 1e-6 below zero passes and is not repaired.
    """

    R: Real
    T: Real
    A: Real = 0.0
    S: Real = 0.0

    def __post_init__(self) -> None:
        names = [field.name for field in fields(self)]
        given = {name: numbers(f"facet {name}", getattr(self, name)) for name in names}
        shares = dict(zip(names, same_shape(given), strict=True))
        for name, share in shares.items():
            _refuse_outside(name, share)
            object.__setattr__(self, name, float(share) if share.ndim == 0 else share)
        total = sum(shares.values())
        worst = float(np.max(np.abs(np.asarray(total) - 1.0), initial=0.0))
        if worst > _LOOSE_SUM:
            raise ArrayError(
                Problem(
                    "facet", f"R + T + A + S misses 1 by {worst:.4g}; give shares that add up to 1"
                )
            )

    @classmethod
    def lossless(cls, R: Real) -> FacetLight:
        """Facet that neither absorbs nor scatters: T = 1 - R."""
        return cls(R=R, T=1.0 - numbers("facet R", R))

    @property
    def shape(self) -> tuple[int, ...]:
        """Shape of the shares; () for plain numbers."""
        return np.shape(self.R)

    def arrays(self) -> tuple[FloatArray, FloatArray, FloatArray, FloatArray]:
        """R, T, A, S as arrays."""
        R, T, A, S = (np.asarray(getattr(self, field.name)) for field in fields(self))
        return R, T, A, S


def _refuse_outside(name: str, share: FloatArray) -> None:
    low = float(np.min(share, initial=0.0))
    high = float(np.max(share, initial=0.0))
    if low < -_ROUND_OFF:
        raise ArrayError(Problem(f"facet {name}", f"falls to {low:g}; give fractions from 0 to 1"))
    if high > 1.0 + _ROUND_OFF:
        hint = f"; did you mean {high / 100:g} ({high:g} %)?" if high <= 100.0 else ""
        raise ArrayError(
            Problem(f"facet {name}", f"reaches {high:g}; give fractions from 0 to 1{hint}")
        )
