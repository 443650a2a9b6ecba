"""Checks at the door of the laser room: each says what is wrong, none repairs anything."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coatings.errors import ArrayError, Problem

FloatArray: TypeAlias = NDArray[np.float64]
Real: TypeAlias = float | FloatArray


def out_of_range(
    where: str, value: float | None, *, low: float, high: float = np.inf, open_low: bool = False
) -> list[Problem]:
    """Problem of a number that is not finite or lies outside ``low`` ... ``high``; None passes."""
    if value is None:
        return []
    inside = (low < value if open_low else low <= value) and value <= high
    if inside and np.isfinite(value):
        return []
    least = f"above {low:g}" if open_low else f"{low:g} or more"
    most = "" if np.isinf(high) else f" and at most {high:g}"
    return [Problem(where, f"is {value:g}; give a number {least}{most}")]


def numbers(where: str, value: ArrayLike) -> FloatArray:
    """``value`` as an array of finite floats, or an ArrayError that names ``where``."""
    array: FloatArray = np.asarray(value, dtype=np.float64)
    if not np.all(np.isfinite(array)):
        raise ArrayError(Problem(where, "holds a value that is not finite; give finite numbers"))
    return array


def reflectances(where: str, value: ArrayLike) -> FloatArray:
    """Power reflectances that a resonator can use: above 0 and at most 1."""
    array = numbers(where, value)
    if np.any(array <= 0.0):
        raise ArrayError(
            Problem(
                where,
                "is zero or negative: a resonator without feedback has no threshold; "
                "give a reflectance above 0",
            )
        )
    if np.any(array > 1.0):
        raise ArrayError(
            Problem(where, f"reaches {array.max():g}; give fractions of at most 1, not percent")
        )
    return array


def not_negative(where: str, value: ArrayLike) -> FloatArray:
    """Finite numbers of at least zero."""
    array = numbers(where, value)
    if np.any(array < 0.0):
        raise ArrayError(Problem(where, f"falls to {array.min():g}; give 0 or more"))
    return array


def positive(where: str, value: ArrayLike) -> FloatArray:
    """Finite numbers above zero."""
    array = numbers(where, value)
    if np.any(array <= 0.0):
        raise ArrayError(Problem(where, f"falls to {array.min():g}; give numbers above 0"))
    return array


def same_shape(named: dict[str, Any]) -> tuple[FloatArray, ...]:
    """The named arrays broadcast to one shape, or an ArrayError with the shapes."""
    arrays: Iterable[FloatArray] = [np.asarray(value, dtype=np.float64) for value in named.values()]
    try:
        return tuple(np.broadcast_arrays(*arrays))
    except ValueError as error:
        shapes = ", ".join(f"{name} {np.shape(value)}" for name, value in named.items())
        raise ArrayError(
            Problem(shapes, "shapes do not match; give numbers or arrays of one shape")
        ) from error
