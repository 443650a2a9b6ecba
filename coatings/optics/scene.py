"""What surrounds a film at each point: one wavelength at one incidence and polarization."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coatings.optics.arrays import (
    Complexes,
    Reals,
    check_finite,
    check_shape,
    numbers,
    parts,
    place_in,
    refuse,
)


@dataclass(frozen=True, eq=False)
class Scene:
    """Indices around and inside the film at each of P points.

    Parameters
    ----------
    wavelength_nm : array (P,)
        Vacuum wavelength [nm], above zero, in any order, repeats allowed.
    incident, outside : array (P,) or scalar
        Index [1] of the chip side and of what lies beyond the film; n + i k, k > 0 absorbs.
    films : array (M, P)
        Index [1] of each distinct film material; M may be 0 (a bare facet).
    q : array (P,), scalar or None
        Transverse wave number [k0], n_in sin(theta) for a plane wave; may be complex.
        None is normal incidence. q stays when an index is shifted.
    tm : array (P,) of bool, or bool
        Polarization: True for TM (p), False for TE (s).

    Raises
    ------
    ArrayError
        Naming argument, place and value: a shape that does not fit, nan or infinity, a wavelength
        of zero or less, no points, an index of zero.

    Notes
    -----
    The arrays are copied; the attributes are contiguous and read-only.
    """

    wavelength_nm: Reals
    incident: Complexes
    outside: Complexes
    films: Complexes
    q: Complexes | None = None
    tm: NDArray[np.bool_] | bool = False
    kernel_arrays: tuple[Reals, Reals] = field(init=False, repr=False)

    def __post_init__(self) -> None:
        nm = np.array(numbers(self.wavelength_nm, "wavelength_nm", np.float64, 1))
        _check_wavelengths(nm)
        incident = _per_point(self.incident, "incident", nm.size, is_index=True)
        outside = _per_point(self.outside, "outside", nm.size, is_index=True)
        films = np.array(numbers(self.films, "films", np.complex128, 2))
        check_shape(films, "films", (len(films), nm.size))
        _check_index(films, "films")
        q = None if self.q is None else _per_point(self.q, "q", nm.size, is_index=False)
        tm = _polarizations(self.tm, nm.size)
        around = parts(np.vstack([films, incident, outside]))
        rows = [nm] if q is None else [nm, q.real, q.imag, tm]
        for array in (nm, incident, outside, films, q, tm):
            if array is not None:
                array.setflags(write=False)
        self._set(wavelength_nm=nm, incident=incident, outside=outside, films=films, q=q, tm=tm)
        self._set(kernel_arrays=(around, np.array(rows, np.float64)))

    def _set(self, **values: Any) -> None:
        for name, value in values.items():
            object.__setattr__(self, name, value)

    @property
    def points(self) -> int:
        """P, the number of points."""
        return int(self.wavelength_nm.size)


def _check_wavelengths(nm: Reals) -> None:
    if nm.size == 0:
        raise refuse("wavelength_nm", "is empty; give one point or more")
    check_finite(nm, "wavelength_nm")
    if nm.min() <= 0.0:
        place = int(np.argmax(nm <= 0.0))
        raise refuse(f"wavelength_nm[{place}]", f"is {nm[place]} nm; give more than 0")


def _per_point(values: ArrayLike, where: str, points: int, *, is_index: bool) -> Complexes:
    if np.ndim(values) == 0:
        values = np.repeat(np.asarray(values), points)
    array = np.array(numbers(values, where, np.complex128, 1))
    check_shape(array, where, (points,))
    if is_index:
        _check_index(array, where)
    else:
        check_finite(array, where)
    return array


def _check_index(array: Complexes, where: str) -> None:
    check_finite(array, where)
    if not array.all():
        place = place_in(int(np.argmin(array != 0)), array.shape)
        raise refuse(f"{where}{place}", "is 0; no medium has an index of 0")


def _polarizations(tm: ArrayLike, points: int) -> NDArray[np.bool_]:
    flags = np.asarray(tm)
    if flags.dtype != np.bool_:
        raise refuse("tm", f"holds {flags.dtype}; give True (TM) or False (TE)")
    if flags.ndim == 0:
        return np.full(points, bool(flags))
    check_shape(flags, "tm", (points,))
    return flags.copy()
