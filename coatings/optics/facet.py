"""Reflection of a guided mode at a coated facet.

Model. The chip guides phi (E_y for TE, H_y for TM; w = 1 or 1/eps, g = w phi,
integral(w phi^2) = 1, lengths in 1/k0, N the effective index). All that is not the mode is taken as
the waves of a uniform medium of index N. Films and outside are uniform along x, so at a transverse
wave number q they answer a field F~ with the flux y F~, and the continuum answers with Y0 F~:

    y = C/B (TE), B/C (TM),    Y0 = kappa (TE), kappa/N^2 (TM),    kappa = sqrt(N^2 - q^2).

At the facet F = (1 + r) phi + psi. The rest psi has no part of the mode, <g|psi> = 0, and its flux,
lambda g~ - Y0 psi~ with the lambda that takes the mode's part out of it and puts N (1 - r) in, has
none either. With <f|h|g> = (1/2 pi) integral f~(-q) h(q) g~(q) dq (no conjugate) and D = y + Y0

    y F~ = lambda g~ - Y0 (F~ - (1 + r) phi~)    so    D F~ = lambda g~ + (1 + r) Y0 phi~,
    <g|F> = 1 + r                                so    lambda d = (1 + r) (1 - <g|Y0/D|phi>)
                                                                = (1 + r) c,
    c = <phi|y/D|g>,   d = <g|1/D|g>,   D F~ = (1 + r) [Y0 phi~ + (c/d) g~],
    N (1 - r) = <phi|y|F> = (1 + r) (e + c^2/d),      e = <phi|y Y0/D|phi>.

So the mode meets the admittance

    Y = e + c^2/d,      r = (N - Y)/(N + Y)     of E_y (TE), of H_y (TM).

With the plane wave's own r in the medium N and rho = r (TE) or -r (TM, whose r is that of E)
y/D = (1 - rho)/2 and 1/D = (1 + rho)/(2 Y0): the kernel's r, bounded where y has poles, summed
with weights. Nodes and weights: see `contour` and `modal_kernel`. The transforms are those of
`transforms`, once a guide.

Powers. T is what leaves at angles within |q| < n_out, S what returns outside the mode,
|q| < N, with t the plane wave's transmission of tangential E and a = 1 (TE) or Y0 (TM):

    X = phi~ + (c/d) g~/Y0,      P = Re integral N w |phi|^2
    T = |1 + r|^2/(2 pi P) integral Re(eta_out) |a t X/2|^2 dq
    S = |1 + r|^2/(2 pi P) integral Re(Y0) |(1 + rho)/2 (c/d) g~/Y0 - (1 - rho)/2 phi~|^2 dq

here r is that of E_y or H_y; A = 1 - R - T - S. In a stack without loss S = 1 - R - T.

Accuracy against a rigorous solution (tests/precision): |r| within 4e-4 for index steps in the guide
to 0.22 and 1e-4 to 0.1; 1.5e-3 beyond, to 0.4. R of an antireflection coating within 3 % at 1e-4.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal, NamedTuple

import numpy as np
from numpy.typing import ArrayLike

from coatings.errors import InputError, Problem
from coatings.optics.arrays import Complexes, Reals, check_finite, check_shape, numbers, parts
from coatings.optics.batch import Batch
from coatings.optics.contour import Contour
from coatings.optics.facet_arrays import Places, contour_of, products_of
from coatings.optics.guide import shifted_mode
from coatings.optics.guide_modes import GuidedMode
from coatings.optics.modal_kernel import modal
from coatings.optics.modal_response import Found, ModalResponse
from coatings.optics.power_slopes import share_gradient
from coatings.optics.radiated import sent_out, thrown_back
from coatings.optics.scene import Scene
from coatings.optics.shifts import mix_of, nodes_of, span_of
from coatings.optics.threads import share

Power = Literal["R", "T", "S", "A"]
R_ERRORS = ((0.1 + 1e-9, 1e-4), (0.22 + 1e-9, 4e-4))
WORST_R_ERROR = 1.5e-3


class Family(NamedTuple):
    """Guides of several shifts on one contour: the shifts (V,), n_eff (V, W), products."""

    shift: Reals
    n_eff: Complexes
    products: Reals


@dataclass(frozen=True, eq=False)
class ModalFacet:
    """A guided mode at its W wavelengths before films and an outside; built once, asked often.

    The methods mirror the functions of the plane wave (`response`, `reflection`, `reflectance`,
    `gradient`, `weighted_gradient`, `amplitude_gradient`), points being wavelengths.

    Parameters
    ----------
    mode : GuidedMode
        From `fundamental`, or a higher one.
    outside : array (W,) or scalar
        Index [1] of what lies beyond the film, n + i k.
    films : array (M, W)
        Index [1] of each distinct film material; M may be 0.
    fine : int
        Multiplies the nodes of the integrals; 1 holds 1e-6 in r. 0 holds 1e-5 in r with a half
        (TE) or a third (TM) of the nodes, for searches.

    Raises
    ------
    ArrayError
        Naming argument, place and value.
    InputError
        When ``fine`` is below zero.
    """

    mode: GuidedMode
    outside: Complexes
    films: Complexes
    fine: int = 1
    plane: Scene = field(init=False, repr=False)
    path: Contour = field(init=False, repr=False)
    places: Places = field(init=False, repr=False)
    _families: dict[float, Family] = field(init=False, repr=False)

    def __post_init__(self) -> None:
        mode = self.mode
        if self.fine < 0:
            raise InputError(Problem("fine", f"got {self.fine}; give 0 or more"))
        nm = mode.guide.wavelength_nm
        plane = Scene(nm, mode.n_eff, self.outside, self.films, tm=mode.tm)
        path = contour_of(mode, plane.films, plane.outside, fine=self.fine)
        self._fill(plane, path)

    def _fill(self, plane: Scene, path: Contour) -> None:
        places = Places.at(
            path.q,
            plane.wavelength_nm,
            films=plane.films,
            incident=np.zeros_like(plane.incident),
            outside=plane.outside,
            tm=self.mode.tm,
        )
        for name, value in (
            ("outside", plane.outside),
            ("films", plane.films),
            ("plane", plane),
            ("path", path),
            ("places", places),
            ("_families", {}),
        ):
            object.__setattr__(self, name, value)

    def reflection(
        self,
        thickness_nm: ArrayLike,
        *,
        film: ArrayLike,
        film_shift: ArrayLike | None = None,
        incident_shift: ArrayLike | None = None,
    ) -> Complexes:
        """r of the mode, complex array (S, W); parameters and errors as for `response`."""
        return self._run(self._batch(thickness_nm, film, film_shift, incident_shift), 0).r

    def reflectance(
        self,
        thickness_nm: ArrayLike,
        *,
        film: ArrayLike,
        film_shift: ArrayLike | None = None,
        incident_shift: ArrayLike | None = None,
    ) -> Reals:
        """R of the mode, array (S, W); parameters and errors as for `response`."""
        r = self._run(self._batch(thickness_nm, film, film_shift, incident_shift), 0).r
        return r.real**2 + r.imag**2

    def response(
        self,
        thickness_nm: ArrayLike,
        *,
        film: ArrayLike,
        film_shift: ArrayLike | None = None,
        incident_shift: ArrayLike | None = None,
    ) -> ModalResponse:
        """r and the powers R, T, S, A of the mode.

        Parameters
        ----------
        thickness_nm : array (S, L)
            Thickness of each layer [nm], chip outward; L may be 0.
        film : int array (L,) or (S, L)
            Which row of ``films`` each layer is made of.
        film_shift : array (S, M), optional
            Added to the index of each film [1], stack by stack; may be complex.
        incident_shift : array (S,), optional
            Added to the index of every layer of the guide [1], half-spaces included; interpolated
            by a cubic over guides that are solved anew (see `shifts`).

        Returns
        -------
        ModalResponse
            Arrays (S, W).

        Raises
        ------
        ArrayError
            Naming the argument, the place and the value.
        InputError
            When a shifted guide has no such mode.
        """
        batch = self._batch(thickness_nm, film, film_shift, incident_shift)
        if not batch.incident_shift.size:
            return self._respond(batch)
        found = self._run(batch, 0)
        nodes = nodes_of(span_of(batch.incident_shift))
        mix = mix_of(batch.incident_shift, nodes)[:, :, None]
        plain = batch._replace(incident_shift=np.empty(0))
        each = [self.shifted(by)._respond(plain) for by in nodes]
        out = np.stack([answer.T for answer in each], axis=1)

        def thrown() -> Reals:
            back = np.stack([answer.S for answer in each], axis=1)
            total: Reals = (mix * back).sum(axis=1)
            return total

        return ModalResponse(found.r, (mix * out).sum(axis=1), thrown)

    def gradient(
        self,
        thickness_nm: ArrayLike,
        *,
        film: ArrayLike,
        film_shift: ArrayLike | None = None,
        incident_shift: ArrayLike | None = None,
        of: Power = "R",
    ) -> tuple[Reals, Reals]:
        """R, T, S or A of the mode and its derivative with every thickness, exact.

        Parameters
        ----------
        of : "R", "T", "S" or "A"
            Which share. R costs less than two values; the others go stack by stack, some
            milliseconds each.
        thickness_nm, film, film_shift, incident_shift
            As for `response`.

        Returns
        -------
        value : array (S, W)
        slope : array (S, W, L)
            d value / d thickness_nm [1/nm].

        Raises
        ------
        ArrayError
            Naming the argument, the place and the value.
        InputError
            When ``of`` is none of the four, or a shifted guide has no such mode.
        """
        if of not in {"R", "T", "S", "A"}:
            raise InputError(Problem("of", f"got {of!r}; give one of R, T, S, A"))
        batch = self._batch(thickness_nm, film, film_shift, incident_shift)
        if of == "R":
            found = self._run(batch, 1)
            return found.r.real**2 + found.r.imag**2, found.slopes[:, 0]
        if not batch.incident_shift.size:
            return self._power_gradient(batch, of)
        nodes = nodes_of(span_of(batch.incident_shift))
        mix = mix_of(batch.incident_shift, nodes)
        plain = batch._replace(incident_shift=np.empty(0))
        each = [self.shifted(by)._power_gradient(plain, of) for by in nodes]
        value = np.einsum("sv,vsw->sw", mix, np.stack([answer[0] for answer in each]))
        slope = np.einsum("sv,vswl->swl", mix, np.stack([answer[1] for answer in each]))
        return value, slope

    def weighted_gradient(
        self,
        thickness_nm: ArrayLike,
        *,
        film: ArrayLike,
        weight: ArrayLike,
        film_shift: ArrayLike | None = None,
        incident_shift: ArrayLike | None = None,
    ) -> tuple[Reals, Reals]:
        """R (S, W) and the sum over wavelengths of weight (S, W) times d R / d thickness_nm (S, L).

        Other parameters and errors as for `response`.
        """
        batch = self._batch(thickness_nm, film, film_shift, incident_shift)
        weights = numbers(weight, "weight", np.float64, 2)
        check_shape(weights, "weight", batch.shape[:2])
        check_finite(weights, "weight")
        found = self._run(batch, 1)
        slope = np.einsum("sw,swl->sl", weights, found.slopes[:, 0])
        return found.r.real**2 + found.r.imag**2, slope

    def amplitude_gradient(
        self,
        thickness_nm: ArrayLike,
        *,
        film: ArrayLike,
        film_shift: ArrayLike | None = None,
        incident_shift: ArrayLike | None = None,
    ) -> tuple[Complexes, Complexes]:
        """r of the mode (S, W) and d r / d thickness_nm, complex (S, W, L) [1/nm], exact.

        Parameters and errors as for `response`.
        """
        found = self._run(self._batch(thickness_nm, film, film_shift, incident_shift), 4)
        return found.r, found.slopes[:, 0] + 1j * found.slopes[:, 1]

    @property
    def r_error(self) -> float:
        """Bound of the model's error in |r| [1], by the largest index step of the guide.

        1e-4 to a step of 0.1, 4e-4 to 0.22, 1.5e-3 beyond (held against a rigorous solution up to
        0.4, in tests/precision).
        """
        real = self.mode.guide.index.real
        step = float((real.max(axis=0) - real.min(axis=0)).max())
        return next((error for most, error in R_ERRORS if step <= most), WORST_R_ERROR)

    def shifted(self, by: float) -> ModalFacet:
        """The same facet with ``by`` added to the index of every layer of the guide.

        Raises
        ------
        InputError
            When the shifted guide has no such mode.
        """
        mode = shifted_mode(self.mode, by=float(by))
        return ModalFacet(mode, self.outside, self.films, self.fine)

    def _batch(
        self,
        thickness_nm: ArrayLike,
        film: ArrayLike,
        film_shift: ArrayLike | None,
        incident_shift: ArrayLike | None,
    ) -> Batch:
        return Batch.of(self.plane, thickness_nm, film, film_shift, incident_shift)

    def _respond(self, batch: Batch) -> ModalResponse:
        found = self._run(batch, 0)
        out = sent_out(self, batch, found)
        if self._lossless(batch):
            return ModalResponse(found.r, out, lambda: 1.0 - np.abs(found.r) ** 2 - out)
        return ModalResponse(found.r, out, lambda: thrown_back(self, batch, found))

    def _power_gradient(self, batch: Batch, of: Power) -> tuple[Reals, Reals]:
        found = self._run(batch, 4)
        return share_gradient(self, batch, found, of=of, lossless=self._lossless(batch))

    def _lossless(self, batch: Batch) -> bool:
        media = (self.films, self.outside, self.mode.n_eff)
        return not any(m.imag.any() for m in media) and not batch.film_shift[:, 1::2].any()

    def _family(self, span: float) -> Family:
        """Products and n_eff of this guide (span 0) or of guides over a span of shifts."""
        if span not in self._families:
            shift = nodes_of(span) if span else np.zeros(1)
            modes = [shifted_mode(self.mode, by=by) if span else self.mode for by in shift]
            products = [products_of(mode, self.path) for mode in modes]
            stacked = np.ascontiguousarray(np.stack(products, axis=1))
            n_eff = np.stack([mode.n_eff for mode in modes])
            self._families[span] = Family(shift, n_eff, parts(stacked))
        return self._families[span]

    def _run(self, batch: Batch, slope_parts: int) -> Found:
        stacks, points, layers = batch.shape
        shifts = batch.incident_shift
        family = self._family(span_of(shifts) if shifts.size else 0.0)
        mix = mix_of(shifts, family.shift) if shifts.size else np.ones((1, 1))
        r, tilt = np.empty((2, stacks, points), np.complex128)
        slopes = np.zeros((stacks, slope_parts, points, layers))

        def job(rows: slice) -> None:
            modal(
                batch.thickness[rows],
                batch.film[rows] if len(batch.film) > 1 else batch.film,
                self.places.around,
                self.places.points,
                batch.film_shift[rows],
                mix[rows] if len(mix) > 1 else mix,
                family.n_eff,
                family.products,
                r[rows],
                tilt[rows],
                slopes[rows],
            )

        share(stacks, (1 + slope_parts) * self.path.q.size * (layers + 1), job)
        return Found(r, tilt, slopes)
