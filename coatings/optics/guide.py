"""The epitaxial waveguide of a chip and its bound modes.

A slab guide is a row of layers between two half-spaces, substrate side first. Its modes
phi(x) exp(i beta z), beta = k0 N, are E_y (TE: the field lies along the layers) or H_y (TM) and obey

    TE  phi'' + (k0^2 eps - beta^2) phi = 0,                       phi, phi' continuous,
    TM  eps (phi'/eps)' + (k0^2 eps - beta^2) phi = 0,             phi, phi'/eps continuous,

eps = index^2. A bound mode decays on both sides: N lies between the larger index of the half-spaces
and the largest index within. How modes are counted, so that none is missed, and how N is found is
told in `guide_kernel`; N is good to 1e-10 and mostly to 1e-14. Indices are complex, n + i k, k > 0
absorbs; the mode is followed from the guide without loss and gain, so a guide that confines by gain
alone has none.

References: D. Marcuse, Theory of Dielectric Optical Waveguides (Academic Press, 1974), for the slab;
E. A. Coddington and N. Levinson, Theory of Ordinary Differential Equations (McGraw-Hill, 1955),
ch. 8, for the zeros of Sturm-Liouville solutions (both from memory).
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from coatings.errors import InputError, Problem
from coatings.optics.arrays import (
    Complexes,
    Integers,
    Reals,
    check_finite,
    check_shape,
    numbers,
    refuse,
)
from coatings.optics.guide_errors import check_metal, check_states, check_tails, check_thickness
from coatings.optics.guide_kernel import count, solve
from coatings.optics.guide_modes import GuidedMode


@dataclass(frozen=True, eq=False)
class Guide:
    """N layers at W wavelengths, the outer two without end.

    Parameters
    ----------
    wavelength_nm : array (W,)
        Vacuum wavelength [nm], above zero, in any order.
    index : array (N,) or (N, W)
        Index [1] of each layer, substrate side first; n + i k, k > 0 absorbs.
    thickness_um : array (N - 2,)
        Thickness of each inner layer [um].
    slope_per_nm : array (N,) or (N, W), optional
        d index / d wavelength [1/nm]; zero when absent. Enters the group index only.

    Raises
    ------
    ArrayError
        Naming argument, place and value: a shape that does not fit, nan or infinity, fewer than
        three layers, an index of zero, a wavelength of zero or less, a layer thinner than 0.1 nm.
    """

    wavelength_nm: Reals
    index: Complexes
    thickness_um: Reals
    slope_per_nm: Complexes | None = None
    slopes: Complexes = field(init=False, repr=False)
    position: Reals = field(init=False, repr=False)

    def __post_init__(self) -> None:
        nm = np.array(numbers(self.wavelength_nm, "wavelength_nm", np.float64, 1))
        check_finite(nm, "wavelength_nm")
        if not nm.size:
            raise refuse("wavelength_nm", "is empty; give one wavelength or more")
        if nm.min() <= 0.0:
            place = int(np.argmax(nm <= 0.0))
            raise refuse(f"wavelength_nm[{place}]", f"is {nm[place]} nm; give more than 0")
        index = _by_wavelength(self.index, "index", nm.size)
        if len(index) < 3:
            what = f"holds {len(index)} layers; give a half-space on each side and a layer between"
            raise refuse("index", what)
        if not index.all():
            place, column = np.argwhere(index == 0)[0]
            raise refuse(f"index[{place}, {column}]", "is 0; no medium has an index of 0")
        um = np.array(numbers(self.thickness_um, "thickness_um", np.float64, 1))
        check_shape(um, "thickness_um", (len(index) - 2,))
        check_thickness(um)
        given = self.slope_per_nm
        slopes = np.zeros_like(index)
        if given is not None:
            slopes = _by_wavelength(given, "slope_per_nm", nm.size)
            check_shape(slopes, "slope_per_nm", index.shape)
        ends = np.concatenate([[0.0], np.cumsum(um)])
        self._set(wavelength_nm=nm, index=index, thickness_um=um, slopes=slopes)
        position = 2e3 * np.pi / nm[:, None] * (ends - 0.5 * ends[-1])
        object.__setattr__(self, "position", position)

    def _set(self, **values: Any) -> None:
        for name, value in values.items():
            value.setflags(write=False)
            object.__setattr__(self, name, value)

    def shifted(self, by: float) -> Guide:
        """The same guide with ``by`` added to the index of every layer, half-spaces included."""
        return Guide(self.wavelength_nm, self.index + by, self.thickness_um, self.slope_per_nm)


def count_modes(guide: Guide, *, tm: bool) -> Integers:
    """How many bound modes the guide has at each wavelength, loss and gain left out, int (W,).

    Parameters
    ----------
    guide : Guide
    tm : bool
        True for TM, False for TE.

    Raises
    ------
    InputError
        For TM, when a layer is a metal (see `fundamental`).
    """
    check_metal(guide, tm)
    modes = np.empty(guide.wavelength_nm.size, np.int64)
    count(*_laid_out(guide), tm, modes)
    return modes


def fundamental(guide: Guide, *, tm: bool) -> GuidedMode:
    """The bound mode of largest effective index at every wavelength.

    Parameters
    ----------
    guide : Guide
    tm : bool
        True for TM, False for TE.

    Returns
    -------
    GuidedMode

    Raises
    ------
    InputError
        Saying why, with the wavelength: no bound mode, or none at some of the wavelengths; twin
        guides whose modes can't be told apart; a tail longer than 100 um; a metal in the guide
        with TM, where a wave bound to its surface would come first; a mode that loss or gain unbind.

    References
    ----------
    See the module.
    """
    return _mode(guide, tm=tm, order=0)


def modes(guide: Guide, *, tm: bool) -> tuple[GuidedMode, ...]:
    """Every mode that is bound at all wavelengths of the guide, largest effective index first.

    Parameters
    ----------
    guide : Guide
    tm : bool
        True for TM, False for TE.

    Returns
    -------
    tuple of GuidedMode
        Order 0, 1, ...; for one wavelength these are all its bound modes, next to cut-off too.

    Raises
    ------
    InputError
        As `fundamental`.
    """
    found = max(1, int(count_modes(guide, tm=tm).min()))
    return tuple(_mode(guide, tm=tm, order=order) for order in range(found))


def shifted_mode(mode: GuidedMode, *, by: float) -> GuidedMode:
    """The mode of the same order when ``by`` is added to the index of every layer.

    Raises
    ------
    InputError
        As `fundamental`, with the shift.
    """
    try:
        return _mode(mode.guide.shifted(by), tm=mode.tm, order=mode.order)
    except InputError as error:
        what = f"with {by:+.4g} on the index of every layer, {error.problems[0].what}"
        raise InputError(Problem(error.problems[0].where, what)) from None


def _mode(guide: Guide, *, tm: bool, order: int) -> GuidedMode:
    check_metal(guide, tm)
    eps, length = _laid_out(guide)
    points, layers = eps.shape
    square = np.zeros(points, np.complex128)
    phi, v = np.zeros((2, points, layers - 1), np.complex128)
    state = np.empty(points, np.int64)
    solve(eps, length, order, tm, square, phi, v, state)
    check_states(guide, state, "TM" if tm else "TE")
    mode = GuidedMode(guide, tm, order, np.sqrt(square), phi, v)
    if order == 0:
        check_tails(mode)
    return mode


def _by_wavelength(values: ArrayLike, where: str, points: int) -> Complexes:
    axes = np.ndim(values)
    array: Complexes = numbers(values, where, np.complex128, min(max(axes, 1), 2))
    check_finite(array, where)
    if axes == 1:
        return np.repeat(array[:, None], points, axis=1)
    check_shape(array, where, (len(array), points))
    return array.copy()


def _laid_out(guide: Guide) -> tuple[Complexes, Reals]:
    eps = np.ascontiguousarray(guide.index.T**2)
    return eps, np.ascontiguousarray(np.diff(guide.position, axis=1))
