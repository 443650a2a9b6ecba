"""Checks at the door: arrays of the right kind, shape and values, or an error naming the place."""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coatings.errors import ArrayError, Problem

Reals = NDArray[np.float64]
Complexes = NDArray[np.complex128]
Integers = NDArray[np.int64]

_KINDS = {"f": "buif", "c": "buifc", "i": "ui"}


def refuse(where: str, what: str) -> ArrayError:
    """The error about argument ``where``."""
    return ArrayError(Problem(where, what))


def numbers(values: ArrayLike, where: str, dtype: type[np.generic], axes: int) -> NDArray[Any]:
    """``values`` as a contiguous and writable array; the same one when it is that already."""
    if type(values) is np.ndarray and values.dtype == dtype and values.ndim == axes:
        flags = values.flags
        if flags.c_contiguous and flags.writeable:
            return values
    try:
        raw = np.asarray(values)
    except ValueError as error:
        raise refuse(where, f"is no rectangular array ({error})") from None
    if raw.ndim != axes:
        raise refuse(where, f"has {raw.ndim} axes (shape {raw.shape}); give {axes}")
    kind = np.dtype(dtype).kind
    if raw.size and raw.dtype.kind not in _KINDS[kind]:
        raise refuse(where, f"holds {raw.dtype}; give {np.dtype(dtype).name}")
    array = np.ascontiguousarray(raw, dtype=dtype)
    # Compiled code takes a read-only array for another type, and would be compiled anew.
    return array if array.flags.writeable else array.copy()


def check_shape(array: NDArray[Any], where: str, shape: tuple[int, ...]) -> None:
    """Refuse a shape other than ``shape``."""
    if array.shape != shape:
        raise refuse(where, f"has shape {array.shape}; expected {shape}")


def check_finite(array: NDArray[Any], where: str) -> None:
    """Refuse nan and infinities, naming the first."""
    finite = np.isfinite(array)
    if not finite.all():
        place = place_in(int(np.argmin(finite)), array.shape)
        raise refuse(f"{where}{place}", f"is {array[tuple(place)]}; give a finite number")


def place_in(flat: int, shape: tuple[int, ...]) -> list[int]:
    """Indices of the element ``flat`` counts to; prints as [2, 5]."""
    return [int(index) for index in np.unravel_index(flat, shape)]


def parts(array: Complexes) -> Reals:
    """The same memory as float64, real and imaginary parts side by side on the last axis."""
    return array.view(np.float64)
