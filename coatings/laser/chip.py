"""The chip as the laser models see it: numbers with units, checked once."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum

import numpy as np
from scipy.constants import c, elementary_charge, h, zero_Celsius

from coatings.errors import InputError, Problem
from coatings.laser.checks import FloatArray, Real, out_of_range


class GainLaw(Enum):
    """How the modal gain grows with the terminal current density."""

    LOGARITHMIC = "logarithmic"
    LINEAR = "linear"


@dataclass(frozen=True)
class Gain:
    """Modal gain g [1/cm] against terminal current density J [A/cm2].

    Logarithmic: g = G0 ln(J/Jtr); linear: g = G0 (J/Jtr - 1). The injection efficiency is inside
    Jtr. The logarithmic law is the usual one for quantum wells: McIlroy, Kurobe and Uematsu,
    IEEE J. Quantum Electron. QE-21, 1958 (1985) (citation from memory).
    """

    law: GainLaw
    transparency_A_per_cm2: float
    modal_gain_per_cm: float

    def current_density_A_per_cm2(self, gain_per_cm: Real) -> FloatArray:
        """Terminal current density [A/cm2] that a modal gain [1/cm] takes; inf where it overflows.

        A logarithmic gain many hundred times G0 has no finite current: the answer is inf.
        """
        ratio = np.asarray(gain_per_cm, dtype=np.float64) / self.modal_gain_per_cm
        with np.errstate(over="ignore"):
            pumping = np.exp(ratio) if self.law is GainLaw.LOGARITHMIC else 1.0 + ratio
            density: FloatArray = self.transparency_A_per_cm2 * pumping
        return density


@dataclass(frozen=True, kw_only=True)
class LaserChip:
    """All numbers of a chip that threshold, power and resonator need.

    ``None`` means not given: ``drive_A`` (no watts), ``junction_V`` (no heat, no efficiency),
    ``t0_K`` / ``t1_K`` (no temperature dependence), ``mode_height_um`` (no facet load),
    ``reference_C`` (= ``heatsink_C``). Currents and powers are those of the whole bar of
    ``emitters``; ``stages`` is the number of photons an electron can make in a cascade.

    Raises
    ------
    InputError
        One problem for each number that can't be: what it is and what it should be.
    """

    wavelength_nm: float
    length_um: float
    stripe_um: float
    internal_loss_per_cm: float
    injection_efficiency: float
    transparency_A_per_cm2: float
    modal_gain_per_cm: float
    emitters: int = 1
    gain_law: GainLaw = GainLaw.LOGARITHMIC
    stages: int = 1
    drive_A: float | None = None
    spontaneous_factor: float = 0.0
    series_mohm: float = 0.0
    junction_V: float | None = None
    thermal_K_per_W: float = 0.0
    heatsink_C: float = 25.0
    reference_C: float | None = None
    t0_K: float | None = None
    t1_K: float | None = None
    mode_height_um: float | None = None
    gain_peak_nm: float | None = None
    gain_width_nm: float | None = None

    def __post_init__(self) -> None:
        problems = [*self._wrong_sizes(), *self._wrong_law(), *self._wrong_heat()]
        if problems:
            raise InputError(problems)

    def _wrong_sizes(self) -> list[Problem]:
        above_zero = (
            "wavelength_nm",
            "length_um",
            "stripe_um",
            "transparency_A_per_cm2",
            "modal_gain_per_cm",
            "junction_V",
            "mode_height_um",
            "gain_peak_nm",
            "gain_width_nm",
        )
        problems = []
        for name in above_zero:
            problems += out_of_range(name, getattr(self, name), low=0.0, open_low=True)
        for name in ("internal_loss_per_cm", "drive_A", "series_mohm", "thermal_K_per_W"):
            problems += out_of_range(name, getattr(self, name), low=0.0)
        problems += out_of_range(
            "injection_efficiency", self.injection_efficiency, low=0.0, high=1.0, open_low=True
        )
        problems += out_of_range("spontaneous_factor", self.spontaneous_factor, low=0.0, high=1.0)
        return problems

    def _wrong_law(self) -> list[Problem]:
        problems = []
        if not isinstance(self.gain_law, GainLaw):
            problems.append(
                Problem("gain_law", f"is {self.gain_law!r}; give GainLaw.LOGARITHMIC or LINEAR")
            )
        for name in ("emitters", "stages"):
            count = getattr(self, name)
            if count < 1 or count != int(count):
                problems.append(Problem(name, f"is {count}; give a whole number of 1 or more"))
        if (self.gain_peak_nm is None) != (self.gain_width_nm is None):
            problems.append(
                Problem("gain_peak_nm, gain_width_nm", "one is missing; give both or neither")
            )
        return problems

    def _wrong_heat(self) -> list[Problem]:
        problems = []
        for name in ("heatsink_C", "reference_C"):
            problems += out_of_range(name, getattr(self, name), low=-zero_Celsius, open_low=True)
        for name in ("t0_K", "t1_K"):
            for problem in out_of_range(name, getattr(self, name), low=0.0, open_low=True):
                mend = f"{problem.what}, or leave it out for no temperature dependence"
                problems.append(Problem(name, mend))
        return problems

    @property
    def gain(self) -> Gain:
        """The gain law with its two numbers, at the reference temperature."""
        return Gain(self.gain_law, self.transparency_A_per_cm2, self.modal_gain_per_cm)

    @property
    def length_cm(self) -> float:
        """Length of the resonator [cm]."""
        return self.length_um * 1e-4

    @property
    def pumped_cm2(self) -> float:
        """Pumped area of all emitters [cm2]."""
        return self.length_cm * self.stripe_um * 1e-4 * self.emitters

    @property
    def photon_V(self) -> float:
        """Photon energy over the electron's charge, h nu / q [V]."""
        return float(h * c / (elementary_charge * self.wavelength_nm * 1e-9))

    @property
    def cold_C(self) -> float:
        """Temperature at which the chip's figures hold [degree C]."""
        return self.heatsink_C if self.reference_C is None else self.reference_C

    @property
    def facet_cm2(self) -> float | None:
        """Area that the near fields of all emitters take on the facet [cm2]; None if unknown."""
        if self.mode_height_um is None:
            return None
        return self.emitters * self.stripe_um * self.mode_height_um * 1e-8

    def voltage_V(self, current_A: Real) -> FloatArray | None:
        """Terminal voltage, junction_V + I R_s [V]; None where junction_V is not given."""
        if self.junction_V is None:
            return None
        current: FloatArray = np.asarray(current_A, dtype=np.float64)
        return self.junction_V + current * self.series_mohm * 1e-3
