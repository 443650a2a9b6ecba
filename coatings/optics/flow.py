"""From relative figures of a field to those at work: power flow, field strength, heat."""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike
from scipy.constants import c as light
from scipy.constants import mu_0

from coatings.errors import InputError, Problem
from coatings.optics.arrays import Reals

VACUUM_OHM = mu_0 * light


def chip_flow_MW_per_cm2(*, leaving_W: float, T: float, area_um2: float) -> float:
    """Power flow of the wave arriving at the facet [MW/cm2] when ``leaving_W`` leaves it.

    Parameters
    ----------
    leaving_W : float
        Power that leaves through the coating [W], 0 or more.
    T : float
        Transmittance [1], above 0.
    area_um2 : float
        Area of the mode, stripe times effective height [um2], above 0.

    Returns
    -------
    float
        leaving_W / (T area) [MW/cm2].

    Raises
    ------
    InputError
        Naming the argument and the value.
    """
    check_amount(leaving_W, "leaving_W")
    check_amount(T, "T", least_allowed=False)
    check_amount(area_um2, "area_um2", least_allowed=False)
    return 100.0 * leaving_W / (T * area_um2)


def field_V_per_m(E2: ArrayLike, *, flow_MW_per_cm2: float, flow_index: ArrayLike) -> Reals:
    """Amplitude of the electric field [V/m]: sqrt(2 Z0 flow E2 / flow_index).

    Parameters
    ----------
    E2 : array
        Relative square [1], as from `standing_wave`.
    flow_MW_per_cm2 : float
        Power flow of the arriving wave through the facet [MW/cm2], 0 or more.
    flow_index : array
        ``StandingWave.flow_index`` [1]; shaped to go with ``E2``.

    Returns
    -------
    array
        Amplitude (peak in time) of the field [V/m]; 8.68e6 for 10 MW/cm2 in vacuum.

    Raises
    ------
    InputError
        When the flow is negative or no finite number.
    """
    check_amount(flow_MW_per_cm2, "flow_MW_per_cm2")
    relative = np.asarray(E2, np.float64) / np.asarray(flow_index, np.float64)
    amplitude: Reals = np.sqrt(2.0 * VACUUM_OHM * 1e10 * flow_MW_per_cm2 * relative)
    return amplitude


def absorbed_W_per_cm3(absorption_per_nm: ArrayLike, *, flow_MW_per_cm2: float) -> Reals:
    """Density of absorbed power [W/cm3] for a flow [MW/cm2] of the arriving wave.

    Parameters
    ----------
    absorption_per_nm : array
        Relative density [1/nm], as from `standing_wave`.
    flow_MW_per_cm2 : float
        Power flow of the arriving wave through the facet [MW/cm2], 0 or more.

    Returns
    -------
    array
        1e13 times the product [W/cm3].

    Raises
    ------
    InputError
        When the flow is negative or no finite number.
    """
    check_amount(flow_MW_per_cm2, "flow_MW_per_cm2")
    return 1e13 * flow_MW_per_cm2 * np.asarray(absorption_per_nm, np.float64)


def check_amount(value: float, where: str, *, least_allowed: bool = True) -> None:
    """Refuse what is no finite number, negative, or zero where that is not allowed."""
    if not np.isfinite(value) or value < 0.0 or (value == 0.0 and not least_allowed):
        least = "0 or more" if least_allowed else "more than 0"
        raise InputError(Problem(where, f"got {value}; give {least}"))
