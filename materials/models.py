"""Published models of alloys below their gap, and of the index over temperature.

Each function takes the wavelength in um (real or complex: slopes come from a complex step) and
returns the refractive index, or its square where it says so. They check nothing; `materials.alloys`
keeps them inside their range.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from materials.curves import Complexes, Floats

Wave = NDArray[np.float64] | NDArray[np.complex128]

#: h c / e in eV um, exact by definition of the SI.
EV_UM = 1.239841984332003
#: Boltzmann constant in eV/K, exact by definition of the SI.
BOLTZMANN_EV = 8.617333262145179e-5
_STEP = 1e-30


class IndexLaw(Protocol):
    """n as an analytic function of the wavelength in um."""

    def __call__(self, um: Wave) -> Wave:
        """Refractive index."""
        ...


@dataclass(frozen=True, eq=False)
class Modelled:
    """n by an analytic law, k = 0."""

    law: IndexLaw

    def value(self, wavelength_nm: Floats) -> Complexes:
        """Complex index n + 0i."""
        return self.law(1e-3 * wavelength_nm).astype(np.complex128)

    def slope(self, wavelength_nm: Floats) -> Complexes:
        """Derivative [1/nm] by a complex step, exact to rounding."""
        um = np.asarray(1e-3 * wavelength_nm + 1j * _STEP, dtype=np.complex128)
        stepped = self.law(um)
        return np.asarray(1e-3 * stepped.imag / _STEP, dtype=np.complex128)


def gaas_gap_ev(celsius: float) -> float:
    """Gap of GaAs [eV] in the model of Gehrsitz et al.: two phonon terms.

    E = 1.5192 + 1.8 * 0.0159 (1 - coth(0.0159/2kT)) + 1.1 * 0.0336 (1 - coth(0.0336/2kT)).
    """
    kT2 = 2.0 * BOLTZMANN_EV * (celsius + 273.15)
    acoustic = 1.8 * 0.0159 * (1.0 - 1.0 / np.tanh(0.0159 / kT2))
    optical = 1.1 * 0.0336 * (1.0 - 1.0 / np.tanh(0.0336 / kT2))
    return float(1.5192 + acoustic + optical)


def algaas_gap_ev(x: float, celsius: float) -> float:
    """Direct gap of Al(x)Ga(1-x)As [eV] in the model of Gehrsitz et al."""
    return gaas_gap_ev(celsius) + 1.1308 * x + 0.1436 * x * x


def gehrsitz(um: Wave, *, x: float, celsius: float) -> Wave:
    """Index of Al(x)Ga(1-x)As below the gap.

    n^2 = A + C0/(E0^2 - E^2) + C1/(E1^2 - E^2)
          + (1-x) 1.55e-3/(0.724e-3 - E^2) + x 2.61e-3/(1.331e-3 - E^2),  E = 1/lambda in 1/um.

    References
    ----------
    S. Gehrsitz, F. K. Reinhart, C. Gourgon, N. Herres, A. Vonlanthen, H. Sigg, J. Appl. Phys. 87,
    7825-7837 (2000), doi:10.1063/1.373462; coefficients from memory, checked by the tests
    against GaAs, AlAs and tabulated compositions.
    """
    T = celsius + 273.15
    q = um**-2
    A = 5.9613 + 7.178e-4 * T - 0.953e-6 * T * T
    A += x * (-16.159 + x * (43.511 + x * (-71.317 + x * (57.535 - x * 17.451))))
    C0 = 1.0 / (50.535 + x * (-150.7 + x * (-62.209 + x * (797.16 + x * (-1125.0 + x * 503.79)))))
    C1 = 21.5647 + x * (113.74 + x * (-122.5 + x * (108.401 - x * 47.318)))
    E0 = algaas_gap_ev(x, celsius) / EV_UM
    E1_squared = 4.7171 - 3.237e-4 * T - 1.358e-6 * T * T + x * (11.006 - x * 3.08)
    lattice = (1.0 - x) * 1.55e-3 / (0.724e-3 - q) + x * 2.61e-3 / (1.331e-3 - q)
    return np.asarray(np.sqrt(A + C0 / (E0 * E0 - q) + C1 / (E1_squared - q) + lattice))


def skauli(um: Wave, *, celsius: float) -> Wave:
    """Index of GaAs from 0.97 to 17 um over temperature.

    n^2 = g0 + g1/(l1^-2 - q) + g2/(l2^-2 - q) + g3/(l3^-2 - q), q = lambda^-2, with the g and l
    [um] polynomials of T - 22 deg C.

    References
    ----------
    T. Skauli et al., J. Appl. Phys. 94, 6447-6455 (2003), doi:10.1063/1.1621740; the terms in
    temperature from memory, checked by the tests against the model of Gehrsitz et al.
    """
    t = celsius - 22.0
    q = um**-2
    l1 = 0.4431307 + 5.0564e-5 * t
    l2 = 0.8746453 + 1.913e-4 * t - 4.882e-7 * t * t
    l3 = 36.9166 - 0.011622 * t
    g2 = 0.031764 + 4.350e-5 * t + 4.664e-7 * t * t
    poles = 27.83972 / (l1**-2 - q) + g2 / (l2**-2 - q) + 0.00143636 / (l3**-2 - q)
    return np.asarray(np.sqrt(5.372514 + poles))


def ingaasp_gap_ev(y: float) -> float:
    """Gap of In(1-x)Ga(x)As(y)P(1-y) matched to InP [eV]: 1.35 - 0.72 y + 0.12 y^2.

    R. E. Nahory, M. A. Pollack, W. D. Johnston, R. L. Barns, Appl. Phys. Lett. 33, 659 (1978);
    from memory.
    """
    return 1.35 - 0.72 * y + 0.12 * y * y


def ingaasp_arsenic(gap_ev: float) -> float:
    """Share y of arsenic for a gap [eV]: the smaller root of `ingaasp_gap_ev`."""
    return float((0.72 - np.sqrt(0.72**2 - 4.0 * 0.12 * (1.35 - gap_ev))) / 0.24)


def broberg(um: Wave, *, y: float) -> Wave:
    """Index of InGaAsP matched to InP, below the gap; y = 0 is InP, y = 1 is In0.53Ga0.47As.

    n^2 = 1 + Ed/E0 + Ed E^2/E0^3 + (eta E^4/pi) ln((2 E0^2 - Eg^2 - E^2)/(Eg^2 - E^2)),
    eta = pi Ed/(2 E0^3 (E0^2 - Eg^2)), E0 = 3.391 - 1.652 y + 0.863 y^2 - 0.123 y^3,
    Ed = 28.91 - 9.278 y + 5.626 y^2 [eV].

    References
    ----------
    B. Broberg, S. Lindgren, J. Appl. Phys. 55, 3376-3381 (1984); coefficients from memory,
    checked by the tests against InP.
    """
    E2 = (EV_UM / um) ** 2
    Eg2 = ingaasp_gap_ev(y) ** 2
    E0 = 3.391 + y * (-1.652 + y * (0.863 - y * 0.123))
    Ed = 28.91 + y * (-9.278 + y * 5.626)
    eta = Ed / (2.0 * E0**3 * (E0 * E0 - Eg2))
    resonance = eta * E2 * E2 * np.log((2.0 * E0 * E0 - Eg2 - E2) / (Eg2 - E2))
    return np.asarray(np.sqrt(1.0 + Ed / E0 + Ed * E2 / E0**3 + resonance))


def mondry(um: Wave, *, x: float) -> Wave:
    """Index of (Al0.48In0.52As)x(Ga0.47In0.53As)1-x on InP, below the gap.

    n^2 = A + B lambda^2/(lambda^2 - C^2); A = 9.689 - 1.012 x, B = 1.590 - 0.376 x,
    C = 1.1024 - 0.7020 x + 0.3304 x^2 um.

    References
    ----------
    M. J. Mondry, D. I. Babic, J. E. Bowers, L. A. Coldren, IEEE Photon. Technol. Lett. 4,
    627-630 (1992); coefficients from memory.
    """
    C = 1.1024 + x * (-0.7020 + x * 0.3304)
    square = 9.689 - 1.012 * x + (1.590 - 0.376 * x) * um**2 / (um**2 - C * C)
    return np.asarray(np.sqrt(square))


def algainas_gap_ev(x: float) -> float:
    """Gap of AlGaInAs matched to InP [eV]: 0.76 + 0.49 x + 0.20 x^2.

    D. Olego, T. Y. Chang, E. Silberg, E. A. Caridi, A. Pinczuk, Appl. Phys. Lett. 41, 476 (1982);
    from memory.
    """
    return 0.76 + 0.49 * x + 0.20 * x * x


def algan_gap_ev(x: float) -> float:
    """Gap of Al(x)Ga(1-x)N at 300 K [eV]: 3.438 (1-x) + 6.158 x - 0.7 x (1-x).

    I. Vurgaftman, J. R. Meyer, J. Appl. Phys. 94, 3675-3696 (2003), doi:10.1063/1.1600519
    (gaps at 0 K, Varshni terms and bowing from memory).
    """
    return 3.438 * (1.0 - x) + 6.158 * x - 0.7 * x * (1.0 - x)


def algan(um: Wave, *, x: float) -> Wave:
    """Ordinary index of Al(x)Ga(1-x)N below the gap, between the two published binaries.

    eps(E) = (1-x) eps_GaN(E Eg_GaN/Eg(x)) + x eps_AlN(E Eg_AlN/Eg(x)): the dielectric functions
    of GaN and AlN at the same share of the gap, mixed by composition. Exact at x = 0 and x = 1.

    References
    ----------
    GaN: A. S. Barker, M. Ilegems, Phys. Rev. B 7, 743 (1973), doi:10.1103/PhysRevB.7.743;
    AlN: J. Pastrnak, L. Roskovcova, Phys. Status Solidi 14, K5 (1966); gap: `algan_gap_ev`.
    The interpolation is this library's own.
    """
    gap = algan_gap_ev(x)
    gan = (um * gap / algan_gap_ev(0.0)) ** 2
    aln = (um * gap / algan_gap_ev(1.0)) ** 2
    eps_gan = 3.60 + 1.75 * gan / (gan - 0.256**2) + 4.10 * gan / (gan - 17.86**2)
    eps_aln = 3.1399 + 1.3786 * aln / (aln - 0.1715**2) + 3.861 * aln / (aln - 15.03**2)
    return np.asarray(np.sqrt((1.0 - x) * eps_gan + x * eps_aln))
