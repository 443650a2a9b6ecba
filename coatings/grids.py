"""Wavelength grids."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from coatings.errors import InputError, Problem

MOST_POINTS = 100_000


def grid_nm(start: float, stop: float, step: float) -> NDArray[np.float64]:
    """Wavelengths [nm] from ``start`` to ``stop``, both included; one point where they are equal.

    Raises InputError, in the words of the option ``--nm``, for what is no rising grid in nm.
    """
    if not (0 < start <= stop < 1e6 and step > 0):
        raise InputError(
            Problem(
                "--nm",
                f"got {start:g} {stop:g} {step:g}; give FROM <= TO and a STEP above 0, in nm",
            )
        )
    steps = np.floor((stop - start) / step + 1e-9)
    if steps >= MOST_POINTS:
        raise InputError(
            Problem("--nm", f"asks for {steps + 1:.6g} points; give at most {MOST_POINTS}")
        )
    grid = np.asarray(start + step * np.arange(int(steps) + 1), dtype=np.float64)
    return grid if grid[-1] > stop - 1e-9 else np.append(grid, stop)
