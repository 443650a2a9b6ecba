"""A bound mode and its figures: indices, confinement, near and far field.

With w = 1 (TE) or 1/eps (TM) and lengths in 1/k0 the mode makes the functional

    N^2 integral(w phi^2) = integral(w eps phi^2 - w phi'^2)

stationary, so a change of the layers changes N through the fields as they are:

    TE  N dN = sum_j n_j dn_j integral_j phi^2
    TM  N dN = sum_j n_j dn_j / eps_j^2 integral_j (N^2 phi^2 + phi'^2)

when integral(w phi^2) = 1. With d/dk0 of n_j from its slope and of the scale of lengths this is the
group index, exactly: n_g = d(k0 N)/dk0.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike

from coatings.optics.arrays import Complexes, Reals, check_finite, numbers
from coatings.optics.far_field import full_width
from coatings.optics.mode_kernel import integrals, sizes, values

if TYPE_CHECKING:
    from coatings.optics.guide import Guide


@dataclass(frozen=True, eq=False)
class GuidedMode:
    """One bound mode of a guide at its W wavelengths.

    Attributes
    ----------
    guide : Guide
    tm : bool
        True: phi is H_y; False: phi is E_y.
    order : int
        0 for the fundamental: the number of its zeros in a guide without loss.
    n_eff : complex array (W,)
        Effective index N.
    phi, flux : complex array (W, N - 1)
        phi and w phi' at the interfaces, to integral(w phi^2) = 1, lengths in 1/k0.
    """

    guide: Guide
    tm: bool
    order: int
    n_eff: Complexes
    phi: Complexes = field(repr=False)
    flux: Complexes = field(repr=False)

    @cached_property
    def eps(self) -> Complexes:
        """Permittivity of the layers, (W, N)."""
        return np.ascontiguousarray(self.guide.index.T**2)

    @cached_property
    def _k0_per_um(self) -> Reals:
        return 2e3 * np.pi / self.guide.wavelength_nm

    @cached_property
    def decay(self) -> Complexes:
        """Decay constants of the two tails [k0], (2, W), Re > 0."""
        root = np.sqrt(self.n_eff**2 - self.eps[:, [0, -1]].T)
        return np.where(root.real < 0.0, -root, root)

    @cached_property
    def tail_um(self) -> Reals:
        """Length over which each tail falls to 1/e in amplitude [um], (2, W)."""
        with np.errstate(divide="ignore"):
            tail: Reals = 1.0 / (self.decay.real * self._k0_per_um)
        return tail

    @cached_property
    def _moments(self) -> tuple[Complexes, Complexes]:
        """Integrals of phi^2 and phi'^2 over each layer, (N, W)."""
        out = np.empty((2, *self.eps.shape), np.complex128)
        integrals(self.eps, self.n_eff**2, self.guide.position, self.phi, self.flux, self.tm, out)
        return out[0].T, out[1].T

    @cached_property
    def index_slopes(self) -> Complexes:
        """dN / d index of each layer [1], complex (N, W): what a gain or loss in it does to N."""
        square, slope = self._moments
        index = self.guide.index
        if self.tm:
            square = (self.n_eff**2 * square + slope) / self.eps.T**2
        slopes: Complexes = index * square / self.n_eff
        return slopes

    @cached_property
    def group_index(self) -> Reals:
        """n_g = N - wavelength dN/d wavelength, with the layers' own dispersion, (W,)."""
        square, _ = self._moments
        stiff = square.sum(axis=0) if self.tm else (self.eps.T * square).sum(axis=0)
        by_index = self.index_slopes * self.guide.slopes
        dispersion = self.guide.wavelength_nm * by_index.sum(axis=0)
        result: Reals = (stiff / self.n_eff - dispersion).real
        return result

    @cached_property
    def confinement(self) -> Reals:
        """Share of the mode's power that flows in each layer [1], (N, W); its sum is 1."""
        flow, _, _ = self._sizes
        share: Reals = flow / flow.sum(axis=0)
        return share

    @cached_property
    def flow(self) -> Reals:
        """Power of the mode, Re integral N w |phi|^2, in the units of its norm, (W,)."""
        flow, _, _ = self._sizes
        total: Reals = flow.sum(axis=0)
        return total

    @cached_property
    def near_field_height_um(self) -> Reals:
        """integral |E|^2 dx / max |E|^2 [um], (W,); TM counts both components of E."""
        _, energy, peak = self._sizes
        height: Reals = energy / peak / self._k0_per_um
        return height

    @cached_property
    def _sizes(self) -> tuple[Reals, Reals, Reals]:
        flow = np.empty(self.eps.shape)
        energy, peak = np.empty((2, self.n_eff.size))
        sizes(
            self.eps,
            self.n_eff,
            self.guide.position,
            self.phi,
            self.flux,
            self.tm,
            flow,
            energy,
            peak,
        )
        return flow.T, energy, peak

    @cached_property
    def far_field_fwhm_deg(self) -> Reals:
        """Full width at half maximum of the far field in air [deg], (W,).

        nan where the field does not fall to half within 90 degrees. See `far_field`.
        """
        return full_width(self)

    def profile(self, x_um: ArrayLike, *, place: int = 0) -> Complexes:
        """phi at positions across the layers, at one wavelength.

        Parameters
        ----------
        x_um : array (X,)
            Position [um]; 0 is where the substrate ends, the layers follow upward.
        place : int
            Which of the guide's wavelengths.

        Returns
        -------
        complex array (X,)
            E_y (TE) or H_y (TM), 1 where the largest interface value of its modulus is.

        Raises
        ------
        ArrayError
            When a position is no finite number.
        """
        x = numbers(x_um, "x_um", np.float64, 1)
        check_finite(x, "x_um")
        out = np.empty(x.size, np.complex128)
        start = self.guide.position[place]
        values(
            x * self._k0_per_um[place] + start[0],
            self.eps[place],
            self.n_eff[place] ** 2,
            start,
            self.phi[place],
            self.flux[place],
            self.tm,
            out,
        )
        edge = self.phi[place]
        out /= edge[np.argmax(np.abs(edge))]
        return out
