"""A plate too thick for interference, one face coated: how the powers of its reflections add up.

With Rf, Tf of the film from air, Rf', Tf' from inside the plate, Rb, Tb of the back face and
tau = exp(-2 Im(kz) D) for one crossing of the plate,

    R = Rf + Tf Tf' tau^2 Rb / (1 - Rf' Rb tau^2),   T = tau Tf Tb / (1 - Rf' Rb tau^2).

These are the means of the coherent results over the phase of the plate, absorbing plates included:
the amplitudes are geometric series in exp(2 i kz D), of which the mean keeps the squares of the
terms. By reciprocity Tf' = Tf |eta/Re eta|^2 with eta the plate's admittance.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np

from coatings.optics.arrays import Reals, refuse
from coatings.optics.scene import Scene
from coatings.optics.spectrum import response


class Slab(NamedTuple):
    """A plate at each point of the scene in it: tau, |eta/Re eta|^2, tau^2 Rb, Tb; each (P,)."""

    tau: Reals
    reciprocal: Reals
    tau2_R: Reals
    T: Reals

    @classmethod
    def of(cls, inner: Scene, nm: float, *, ground: bool) -> Slab:
        """From the scene of light inside the plate that meets air, and the thickness."""
        index = inner.incident
        q = 0.0 if inner.q is None else inner.q
        kappa = np.sqrt((index - q) * (index + q))
        dark = kappa.real == 0.0
        if dark.any():
            p = int(np.argmax(dark))
            raise refuse("angle_deg", f"lets no light into a plate of index {index[p]}; give less")
        eta = np.where(inner.tm, index**2 / kappa, kappa)
        tau = np.exp(-4.0 * np.pi * kappa.imag * nm / inner.wavelength_nm)
        back = response(inner, np.empty((1, 0)), film=np.empty(0, np.int64))
        reflected = 0.0 if ground else back.R[0]
        return cls(tau, abs(eta / eta.real) ** 2, tau**2 * reflected, back.T[0])

    def see(self, R: Reals, T: Reals, inner_R: Reals) -> tuple[Reals, Reals]:
        """R and T of the piece from Rf, Tf and Rf' of its film, (S, P) each."""
        left = 1.0 - inner_R * self.tau2_R
        back = self.reciprocal * T**2 * self.tau2_R / left
        return R + back, self.tau * T * self.T / left

    def slopes_of_R(self, T: Reals, inner_R: Reals) -> tuple[Reals, Reals]:
        """Derivatives of the piece's R by Tf and by Rf'; that by Rf is 1."""
        passed = T * self.tau2_R / (1.0 - inner_R * self.tau2_R)
        return 2.0 * self.reciprocal * passed, self.reciprocal * passed**2

    def slopes_of_T(self, T: Reals, inner_R: Reals) -> tuple[Reals, Reals]:
        """Derivatives of the piece's T by Tf and by Rf'; that by Rf is 0."""
        left = 1.0 - inner_R * self.tau2_R
        by_T = self.tau * self.T / left
        return by_T, by_T * T * self.tau2_R / left
