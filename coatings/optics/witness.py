"""What a spectrophotometer sees of a coated plate, and its exact derivatives.

The film lies on one face of a plate, see `plate` for how the two faces work together; light comes
from air onto the film. A ground back reflects nothing. The mean of s and p is taken last.

Layers are listed from the plate outward, in the order of deposition: light meets the last first.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Any, Literal

import numpy as np
from numpy.typing import ArrayLike

from coatings.errors import InputError, Problem
from coatings.optics.arrays import (
    Complexes,
    Reals,
    check_finite,
    check_shape,
    numbers,
    refuse,
)
from coatings.optics.batch import Batch
from coatings.optics.derivatives import derivatives
from coatings.optics.gradients import gradient, index_gradient
from coatings.optics.plate import Slab
from coatings.optics.scene import Scene
from coatings.optics.spectrum import respond_to

Back = Literal["polished", "ground"]
Polarization = Literal["s", "p", "mean"]
Quantity = Literal["R", "T"]

AIR = np.array(1.0 + 0j)
NM_PER_MM = 1e6


@dataclass(frozen=True, eq=False)
class WitnessPiece:
    """A plate to be coated on one face, in air, at P wavelengths.

    Parameters
    ----------
    wavelength_nm : array (P,)
        Vacuum wavelength [nm], above 0.
    plate : array (P,) or scalar
        Index of the plate [1], n + i k, k 0 or more.
    films : array (M, P)
        Index [1] of each film material.
    thickness_mm : float
        Of the plate [mm], above 0.
    back : "polished" or "ground"
        A ground back reflects nothing. T is then what would pass a smooth face: it scatters, and
        no instrument that wants a beam measures it.
    angle_deg : float
        Angle of incidence in air [degrees], from 0 to below 90.
    polarization : "s", "p" or "mean"

    Raises
    ------
    ArrayError
        Naming argument, place and value.
    InputError
        Naming the argument and the value.

    Notes
    -----
    The arrays are copied; the attributes are read-only.
    """

    wavelength_nm: Reals
    plate: Complexes
    films: Complexes
    thickness_mm: float
    back: Back = "polished"
    angle_deg: float = 0.0
    polarization: Polarization = "mean"
    _outer: Scene = field(init=False, repr=False)
    _inner: Scene = field(init=False, repr=False)
    _slab: Slab = field(init=False, repr=False)

    def __post_init__(self) -> None:
        _check_choice(self.back, "back", ("polished", "ground"))
        _check_choice(self.polarization, "polarization", ("s", "p", "mean"))
        if not 0.0 < self.thickness_mm < np.inf:
            raise InputError(Problem("thickness_mm", f"got {self.thickness_mm}; give more than 0"))
        if not 0.0 <= self.angle_deg < 90.0:
            problem = f"got {self.angle_deg}; give 0 or more and less than 90"
            raise InputError(Problem("angle_deg", problem))
        nm: Reals = numbers(self.wavelength_nm, "wavelength_nm", np.float64, 1)
        plate = _plate(self.plate, nm.size)
        films: Complexes = numbers(self.films, "films", np.complex128, 2)
        check_shape(films, "films", (len(films), nm.size))
        tm = np.array({"s": [False], "p": [True], "mean": [False, True]}[self.polarization])
        if self.angle_deg == 0.0:
            tm = tm[:1]
        times, tm = len(tm), np.repeat(tm, nm.size)
        nm, plate, films = np.tile(nm, times), np.tile(plate, times), np.tile(films, times)
        q = None if self.angle_deg == 0.0 else np.sin(np.radians(self.angle_deg))
        outer = Scene(nm, AIR, plate, films, q=q, tm=tm)
        inner = Scene(nm, plate, AIR, films, q=q, tm=tm)
        slab = Slab.of(inner, self.thickness_mm * NM_PER_MM, ground=self.back == "ground")
        points = slice(len(outer.wavelength_nm) // times)
        self._set(_outer=outer, _inner=inner, _slab=slab)
        self._set(wavelength_nm=outer.wavelength_nm[points], plate=outer.outside[points])
        self._set(films=outer.films[:, points])

    def _set(self, **values: Any) -> None:
        for name, value in values.items():
            object.__setattr__(self, name, value)


@dataclass(frozen=True, eq=False)
class WitnessSpectrum:
    """R and T of S witness pieces, arrays (S, P), or (S, Q) as readings of an instrument.

    A = 1 - R - T is what plate and film absorb (and what a ground back scatters).
    """

    R: Reals
    T: Reals

    @property
    def A(self) -> Reals:
        """1 - R - T, same shape."""
        return 1.0 - self.R - self.T


@dataclass(frozen=True, eq=False)
class WitnessGradient:
    """R or T with its derivatives; Q readings in place of P points with weights.

    Attributes
    ----------
    value : array (S, P)
    by_thickness : array (S, P, L)
        d value / d thickness_nm [1/nm].
    by_film : complex array (S, P, M)
        With respect to each film's index, all its layers together: real part d value/dn, imaginary
        part d value/dk [1]. None if not asked for.
    """

    value: Reals
    by_thickness: Reals
    by_film: Complexes | None


def witness_spectrum(
    piece: WitnessPiece,
    thickness_nm: ArrayLike,
    *,
    film: ArrayLike,
    film_shift: ArrayLike | None = None,
    weights: ArrayLike | None = None,
) -> WitnessSpectrum:
    """R and T of coated pieces as the spectrophotometer sees them, back face included.

    Parameters
    ----------
    piece : WitnessPiece
        The plate, and how it is measured.
    thickness_nm : array (S, L)
        Thickness of each layer on the piece [nm], 0 or more, plate outward; L may be 0.
    film : int array (L,) or (S, L)
        Which row of ``piece.films`` each layer is made of.
    film_shift : array (S, M), optional
        Added to the index of each film [1], stack by stack; may be complex.
    weights : array (Q, P), optional
        Slit of the instrument, as from `Slit.weights`; None sees single wavelengths.

    Returns
    -------
    WitnessSpectrum

    Raises
    ------
    ArrayError
        Naming the argument, the place and the value.
    """
    inner = Batch.of(piece._inner, thickness_nm, film, film_shift, None)
    readings = _weights(weights, piece)
    outside = respond_to(_from_air(piece, inner))
    seen = piece._slab.see(outside.R, outside.T, respond_to(inner).R)
    return WitnessSpectrum(*(_read(part, piece, readings) for part in seen))


def witness_gradient(
    piece: WitnessPiece,
    thickness_nm: ArrayLike,
    *,
    film: ArrayLike,
    film_shift: ArrayLike | None = None,
    weights: ArrayLike | None = None,
    of: Quantity = "R",
    by_film: bool = True,
) -> WitnessGradient:
    """R or T of coated pieces and its derivatives by every thickness and every film's index.

    Parameters
    ----------
    of : "R" or "T"
        Which quantity.
    by_film : bool
        False leaves out the derivatives by index, which take most of the time.
    piece, thickness_nm, film, film_shift, weights
        As for `witness_spectrum`.

    Returns
    -------
    WitnessGradient

    Raises
    ------
    ArrayError
        Naming the argument, the place and the value.
    InputError
        When ``of`` is neither.
    """
    _check_choice(of, "of", ("R", "T"))
    inner = Batch.of(piece._inner, thickness_nm, film, film_shift, None)
    readings = _weights(weights, piece)
    batches = (_from_air(piece, inner), inner)
    value, by_nm = _slopes(piece._slab, batches, of, by_index=False)
    value, by_nm = (_read(part, piece, readings) for part in (value, by_nm.real))
    if not by_film:
        return WitnessGradient(value, by_nm, None)
    _, by_index = _slopes(piece._slab, batches, of, by_index=True)
    made_of = inner.film[:, :, None] == np.arange(len(piece._inner.films))
    by_index = by_index @ made_of.astype(np.float64)
    return WitnessGradient(value, by_nm, _read(by_index, piece, readings))


def _from_air(piece: WitnessPiece, inner: Batch) -> Batch:
    """The same stacks seen from air: the last layer first."""
    thickness = np.ascontiguousarray(inner.thickness[:, ::-1])
    film = np.ascontiguousarray(inner.film[:, ::-1])
    return inner._replace(scene=piece._outer, thickness=thickness, film=film)


def _slopes(
    slab: Slab, batches: tuple[Batch, Batch], of: Quantity, *, by_index: bool
) -> tuple[Reals, Any]:
    """What is seen (S, P') and its derivatives by every layer (S, P', L), plate outward."""
    outer, inner = batches
    if of == "R" and not slab.tau2_R.any():
        R, slope = _reflectance_slope(outer, by_index=by_index)
        return R, slope[:, :, ::-1]
    front = derivatives(outer, by_index=by_index)
    R, T, r = front.response.R, front.response.T, front.response.r
    inner_R, inner_slope = _reflectance_slope(inner, by_index=by_index)
    by_T, by_inner = (slab.slopes_of_R if of == "R" else slab.slopes_of_T)(T, inner_R)
    slope = (2.0 * by_T * T)[:, :, None] * front.dlog_t.conj()
    if of == "R":
        slope += 2.0 * r[:, :, None] * front.dr.conj()
    seen_R, seen_T = slab.see(R, T, inner_R)
    return seen_R if of == "R" else seen_T, slope[:, :, ::-1] + by_inner[:, :, None] * inner_slope


def _reflectance_slope(batch: Batch, *, by_index: bool) -> tuple[Reals, Any]:
    """R and its slopes, real by thickness and complex by index."""
    shared = len(batch.film) == 1
    shift = batch.film_shift.view(np.complex128) if batch.film_shift.size else None
    film = batch.film[0] if shared else batch.film
    function = index_gradient if by_index else gradient
    return function(batch.scene, batch.thickness, film=film, film_shift=shift)


def _read(values: Any, piece: WitnessPiece, weights: Reals | None) -> Any:
    """Mean over the polarizations, then the slit; axis 1 counts the points."""
    stacks, both, *rest = values.shape
    points = len(piece.wavelength_nm)
    mean = values.reshape(stacks, both // points, points, *rest).mean(axis=1)
    return mean if weights is None else np.moveaxis(np.tensordot(weights, mean, (1, 1)), 0, 1)


def _weights(weights: ArrayLike | None, piece: WitnessPiece) -> Reals | None:
    if weights is None:
        return None
    array: Reals = numbers(weights, "weights", np.float64, 2)
    check_shape(array, "weights", (len(array), len(piece.wavelength_nm)))
    check_finite(array, "weights")
    return array


def _plate(plate: ArrayLike, points: int) -> Complexes:
    if np.ndim(plate) == 0:
        plate = np.repeat(np.asarray(plate), points)
    index: Complexes = numbers(plate, "plate", np.complex128, 1)
    check_shape(index, "plate", (points,))
    check_finite(index, "plate")
    bad = (index.real <= 0.0) | (index.imag < 0.0)
    if bad.any():
        p = int(np.argmax(bad))
        raise refuse(f"plate[{p}]", f"is {index[p]}; give n above 0 and k of 0 or more")
    return index


def _check_choice(value: str, where: str, known: tuple[str, ...]) -> None:
    if value not in known:
        raise InputError(Problem(where, f"got {value!r}; give one of {', '.join(known)}"))
