"""A stripe that meets its facet at an angle, in the junction plane.

The lateral mode is a Gaussian exp(-x^2/w^2) of amplitude, w half the full width at 1/e^2 of
intensity, in a medium of the modal index n; on the facet, tilted by theta, it is w' = w/cos(theta)
wide and carries the phase b x, b = k0 n sin(theta). The reflected beam leaves at twice the angle, and
the mode that it is asked for carries -b:

    r = integral f~(kx - b) r_pw(kx) f~(-kx - b) dkx / integral |f~|^2
      = exp(-(k0 n w tan(theta))^2 / 2)  <r_pw>,
    <r_pw> = w'/sqrt(2 pi) integral r_pw(kx) exp(-(kx w')^2 / 2) dkx.

So r_pw counts around NORMAL incidence, not around theta, and the factor, squared
exp(-(2 pi n w tan(theta)/lambda)^2), is what the tilt does. Light polarized along the layers (the
chip's TE) lies in the plane of incidence here: TE is p, TM is s.

With a guide the film meets the spread of the mode's waves across the layers too. For small angles
r_pw(kx, ky) = r_pw(0, 0) + [r_pw(kx, 0) - r_pw(0, 0)] + [r_pw(0, ky) - r_pw(0, 0)] + ..., so

    r = exp(...) (r_modal + <r_pw> - r_pw(0)).

Left out: the term in kx^2 ky^2 that follows, the turn of the polarization of waves oblique in both
planes, and light that scatters out of the mode and back into it. A Gaussian's spectrum falls faster
than a real mode's: an R below 1e-5 is optimistic.

What leaves and what is absorbed is taken for a plane wave at the tilt angle (`coating_scene`); what
the film reflects there and the mode does not take back is S.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from coatings.errors import InputError, Problem
from coatings.optics.arrays import Complexes, Reals, check_finite, check_shape, numbers
from coatings.optics.batch import Batch
from coatings.optics.contour import unit_nodes
from coatings.optics.derivatives import derivatives
from coatings.optics.facet import ModalFacet, Power
from coatings.optics.gradients import gradient
from coatings.optics.modal_response import ModalResponse
from coatings.optics.scene import Scene
from coatings.optics.spectrum import reflection, response

OPTIMISTIC_R = 1e-5
"""Below this R of a tilted mode is optimistic."""
NODES = 24
WIDEST = 8.5


def lateral_overlap(
    wavelength_nm: ArrayLike, n_eff: ArrayLike, *, tilt_deg: float, lateral_um: float
) -> Reals:
    """Amplitude of the mode's image that lies in the mode, exp(-(k0 n w tan(theta))^2 / 2).

    Parameters
    ----------
    wavelength_nm, n_eff : arrays that broadcast
        Vacuum wavelength [nm] and modal index [1], whose real part counts.
    tilt_deg : float
        Angle theta between stripe and facet normal [deg], inside the chip.
    lateral_um : float
        Full width of the lateral mode at 1/e^2 of its intensity [um], 2 w.

    Returns
    -------
    array
        Between 0 and 1; its square multiplies R.

    Raises
    ------
    InputError
        When the angle is not from 0 to 90 degrees, or the width not above zero.
    """
    _check(tilt_deg, lateral_um)
    k0_per_um = 2e3 * np.pi / np.asarray(wavelength_nm, np.float64)
    shift = k0_per_um * np.real(n_eff) * 0.5 * lateral_um * np.tan(np.radians(tilt_deg))
    overlap: Reals = np.exp(-0.5 * shift**2)
    return overlap


def coating_scene(plane: Scene, *, tilt_deg: float) -> Scene:
    """The film alone at the tilt angle: a plane wave of the chip's polarization.

    Parameters
    ----------
    plane : Scene
        The facet at normal incidence: chip's modal index, films, outside, chip's polarization.
    tilt_deg : float
        Angle between stripe and facet normal [deg], inside the chip.

    Returns
    -------
    Scene
        With q = n sin(tilt), and TM (p) for a chip's TE.

    Raises
    ------
    InputError
        When the angle is not from 0 to 90 degrees, or beyond total reflection (with the wavelength).
    """
    _check_tilt(tilt_deg)
    q = plane.incident.real * np.sin(np.radians(tilt_deg))
    beyond = q >= plane.outside.real
    if beyond.any():
        place = int(np.argmax(beyond))
        limit = np.degrees(np.arcsin(plane.outside[place].real / plane.incident[place].real))
        what = (
            f"is {tilt_deg:g} degrees, beyond total reflection at {plane.wavelength_nm[place]:g} nm "
            f"({limit:.4g} degrees): nothing would leave; give less"
        )
        raise InputError(Problem("tilt_deg", what))
    return Scene(
        plane.wavelength_nm, plane.incident, plane.outside, plane.films, q=q, tm=~_tm(plane)
    )


@dataclass(frozen=True, eq=False)
class TiltedFacet:
    """A tilted stripe before films and an outside: what returns into its mode.

    The methods mirror those of `ModalFacet`; arrays (S, W). Without tilt it answers as ``modal``
    does or, without a guide, as the plane wave.

    Parameters
    ----------
    plane : Scene
        The facet at normal incidence: chip's modal index, films, outside, chip's polarization;
        without q.
    tilt_deg : float
        Angle between stripe and facet normal [deg], inside the chip, in the junction plane.
    lateral_um : float or None
        Full width of the lateral mode at 1/e^2 of its intensity [um]; needed with a tilt.
    modal : ModalFacet, optional
        The same facet for the guided mode: adds what the spread across the layers does.

    Raises
    ------
    InputError
        A tilt without lateral width, an angle not from 0 to 90 degrees or beyond total reflection.
    """

    plane: Scene
    tilt_deg: float
    lateral_um: float | None = None
    modal: ModalFacet | None = None
    coating: Scene = field(init=False, repr=False)
    around_normal: Scene = field(init=False, repr=False)
    weight: Reals = field(init=False, repr=False)

    def __post_init__(self) -> None:
        _check(self.tilt_deg, self.lateral_um)
        object.__setattr__(self, "coating", coating_scene(self.plane, tilt_deg=self.tilt_deg))
        plane = self.plane
        q, weight = self._spread()
        nodes = q.shape[1]
        scene = Scene(
            np.repeat(plane.wavelength_nm, nodes),
            np.repeat(plane.incident, nodes),
            np.repeat(plane.outside, nodes),
            np.repeat(plane.films, nodes, axis=1),
            q=q.ravel().astype(np.complex128),
            tm=np.repeat(~_tm(plane), nodes),
        )
        object.__setattr__(self, "around_normal", scene)
        object.__setattr__(self, "weight", weight)

    def reflection(
        self,
        thickness_nm: ArrayLike,
        *,
        film: ArrayLike,
        film_shift: ArrayLike | None = None,
        incident_shift: ArrayLike | None = None,
    ) -> Complexes:
        """r into the mode, complex array (S, W); parameters and errors as `ModalFacet.response`.

        A shift of the guide's indices counts as a shift of the modal index in overlap and waves.
        """
        shifts = {"film_shift": film_shift, "incident_shift": incident_shift}
        each = reflection(self.around_normal, thickness_nm, film=film, **shifts)
        r = self._mean(each)
        if self.modal is not None:
            r += self.modal.reflection(thickness_nm, film=film, **shifts)
            r -= reflection(self.plane, thickness_nm, film=film, **shifts)
        return r * self._overlap(incident_shift)

    def reflectance(
        self,
        thickness_nm: ArrayLike,
        *,
        film: ArrayLike,
        film_shift: ArrayLike | None = None,
        incident_shift: ArrayLike | None = None,
    ) -> Reals:
        """R into the mode, array (S, W); parameters and errors as for `ModalFacet.response`."""
        r = self.reflection(
            thickness_nm, film=film, film_shift=film_shift, incident_shift=incident_shift
        )
        return r.real**2 + r.imag**2

    def response(
        self,
        thickness_nm: ArrayLike,
        *,
        film: ArrayLike,
        film_shift: ArrayLike | None = None,
        incident_shift: ArrayLike | None = None,
    ) -> ModalResponse:
        """r into the mode, T and A of the film at the tilt angle, S the rest.

        Parameters and errors as for `ModalFacet.response`. Without tilt as ``modal``'s.
        """
        shifts = {"film_shift": film_shift, "incident_shift": incident_shift}
        if self.tilt_deg == 0.0 and self.modal is not None:
            return self.modal.response(thickness_nm, film=film, **shifts)
        r = self.reflection(thickness_nm, film=film, **shifts)
        leaving = response(self.coating, thickness_nm, film=film, **shifts)
        rest = leaving.R - np.abs(r) ** 2
        return ModalResponse(r, leaving.T, lambda: rest)

    def amplitude_gradient(
        self,
        thickness_nm: ArrayLike,
        *,
        film: ArrayLike,
        film_shift: ArrayLike | None = None,
        incident_shift: ArrayLike | None = None,
    ) -> tuple[Complexes, Complexes]:
        """r (S, W) and d r / d thickness_nm, complex (S, W, L) [1/nm], exact.

        Parameters and errors as for `ModalFacet.response`.
        """
        shifts = {"film_shift": film_shift, "incident_shift": incident_shift}
        r, slope = self._plane_gradient(self.around_normal, thickness_nm, film, shifts)
        r, slope = self._mean(r), self._mean(slope)
        if self.modal is not None:
            more, steeper = self.modal.amplitude_gradient(thickness_nm, film=film, **shifts)
            less, flatter = self._plane_gradient(self.plane, thickness_nm, film, shifts)
            r, slope = r + more - less, slope + steeper - flatter
        overlap = self._overlap(incident_shift)
        return r * overlap, slope * overlap[:, :, None]

    def gradient(
        self,
        thickness_nm: ArrayLike,
        *,
        film: ArrayLike,
        film_shift: ArrayLike | None = None,
        incident_shift: ArrayLike | None = None,
        of: Power = "R",
    ) -> tuple[Reals, Reals]:
        """R, T, S or A (S, W) and its derivative with every thickness (S, W, L) [1/nm], exact.

        Parameters and errors as for `ModalFacet.gradient`; T and A are the film's at the tilt.
        """
        shifts = {"film_shift": film_shift, "incident_shift": incident_shift}
        if of not in {"R", "T", "S", "A"}:
            raise InputError(Problem("of", f"got {of!r}; give one of R, T, S, A"))
        if self.tilt_deg == 0.0 and self.modal is not None:
            return self.modal.gradient(thickness_nm, film=film, of=of, **shifts)
        if of in {"T", "A"}:
            share: Literal["T", "A"] = "T" if of == "T" else "A"
            return gradient(
                self.coating,
                thickness_nm,
                film=film,
                film_shift=film_shift,
                incident_shift=incident_shift,
                of=share,
            )
        r, by_r = self.amplitude_gradient(thickness_nm, film=film, **shifts)
        big_r, slope = np.abs(r) ** 2, 2.0 * (r.conj()[:, :, None] * by_r).real
        if of == "R":
            return big_r, slope
        alone, steep = gradient(
            self.coating,
            thickness_nm,
            film=film,
            film_shift=film_shift,
            incident_shift=incident_shift,
        )
        return alone - big_r, steep - slope

    def weighted_gradient(
        self,
        thickness_nm: ArrayLike,
        *,
        film: ArrayLike,
        weight: ArrayLike,
        film_shift: ArrayLike | None = None,
        incident_shift: ArrayLike | None = None,
    ) -> tuple[Reals, Reals]:
        """R (S, W) and the sum over wavelengths of weight (S, W) times d R / d thickness (S, L)."""
        big_r, slope = self.gradient(
            thickness_nm, film=film, film_shift=film_shift, incident_shift=incident_shift
        )
        weights = numbers(weight, "weight", np.float64, 2)
        check_shape(weights, "weight", big_r.shape)
        check_finite(weights, "weight")
        return big_r, np.einsum("sw,swl->sl", weights, slope)

    def _plane_gradient(
        self,
        scene: Scene,
        thickness_nm: ArrayLike,
        film: ArrayLike,
        shifts: dict[str, ArrayLike | None],
    ) -> tuple[Complexes, Complexes]:
        batch = Batch.of(scene, thickness_nm, film, shifts["film_shift"], shifts["incident_shift"])
        found = derivatives(batch, by_index=False)
        return found.response.r, found.dr

    def _mean(self, each: Complexes) -> Complexes:
        """Mean over the waves of each wavelength, (S, W K, ...) to (S, W, ...)."""
        shape = (len(each), *self.weight.shape, *each.shape[2:])
        mean: Complexes = np.einsum("swk...,wk->sw...", each.reshape(shape), self.weight)
        return mean

    def _overlap(self, incident_shift: ArrayLike | None) -> Reals:
        plane = self.plane
        if self.lateral_um is None:
            return np.ones((1, plane.points))
        by = np.zeros(1) if incident_shift is None else np.asarray(incident_shift)
        return lateral_overlap(
            plane.wavelength_nm,
            plane.incident + by[:, None],
            tilt_deg=self.tilt_deg,
            lateral_um=self.lateral_um,
        )

    def _spread(self) -> tuple[Reals, Reals]:
        """Waves around normal incidence: q and normalised weights (W, K); one without tilt.

        Broken at n_out, where r has a square root.
        """
        plane = self.plane
        if self.tilt_deg == 0.0 or self.lateral_um is None:
            return np.zeros((plane.points, 1)), np.ones((plane.points, 1))
        width = 0.5 * self.lateral_um / np.cos(np.radians(self.tilt_deg))
        kw = (2e3 * np.pi / plane.wavelength_nm * width)[:, None]
        top = WIDEST / kw
        middle = np.minimum(plane.outside.real[:, None], top)
        x, w = unit_nodes(NODES)
        theta = 0.5 * np.pi * x
        q = np.concatenate([middle * np.sin(theta), middle + (top - middle) * x**2], axis=1)
        dq = np.concatenate(
            [middle * np.cos(theta) * 0.5 * np.pi * w, (top - middle) * 2.0 * x * w], axis=1
        )
        return q, dq * kw * np.sqrt(2.0 / np.pi) * np.exp(-0.5 * (q * kw) ** 2)


def _tm(plane: Scene) -> NDArray[np.bool_]:
    return np.asarray(plane.tm)


def _check_tilt(tilt_deg: float) -> None:
    if not 0.0 <= tilt_deg < 90.0:
        raise InputError(Problem("tilt_deg", f"is {tilt_deg}; give 0 to below 90 degrees"))


def _check(tilt_deg: float, lateral_um: float | None) -> None:
    _check_tilt(tilt_deg)
    if lateral_um is None and tilt_deg > 0.0:
        what = (
            f"is missing with a tilt of {tilt_deg:g} degrees; give the lateral mode's full width "
            "at 1/e2 of its intensity"
        )
        raise InputError(Problem("lateral_um", what))
    if lateral_um is not None and not 0.0 < lateral_um < np.inf:
        raise InputError(Problem("lateral_um", f"is {lateral_um} um; give more than 0"))
