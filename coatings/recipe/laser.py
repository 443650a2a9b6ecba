"""[laser]: from mirror loss to threshold and power."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Literal

from coatings.recipe.chip import Chip
from coatings.recipe.paths import Found, KeyPath
from coatings.recipe.section import Section, entry, number

_NO_LIMIT = "no limit"


class Laser(Section):
    """[laser]."""

    internal_loss_per_cm: float = number(
        "Internal loss of the mode, for intensity", "1/cm", noun="a loss", ge=0.0, le=1e4
    )
    injection_efficiency: float = number(
        "Injection efficiency above threshold: slope and stimulated term only",
        "fraction",
        gt=0.0,
        le=1.0,
    )
    gain_law: Literal["logarithmic", "linear"] = entry(
        'Modal gain in 1/cm: "logarithmic" G0 ln(J/Jtr), "linear" G0 (J/Jtr - 1)',
        default="logarithmic",
    )
    transparency_A_per_cm2: float = number(
        "Terminal current density at transparency, injection efficiency included",
        "A/cm2",
        noun="a current density",
        gt=0.0,
        le=1e7,
    )
    modal_gain_per_cm: float = number(
        "G0 of the gain law, modal, for intensity", "1/cm", noun="a gain", gt=0.0, le=1e5
    )
    gain_peak_nm: float | None = number(
        "Wavelength of the gain's peak; with gain_width_nm",
        "nm",
        default=None,
        noun="a wavelength",
        otherwise="the gain does not depend on wavelength",
        gt=0.0,
        le=1e6,
    )
    gain_width_nm: float | None = number(
        "Full width at half maximum of the gain's parabola; with gain_peak_nm",
        "nm",
        default=None,
        otherwise="the gain does not depend on wavelength",
        gt=0.0,
        le=1e5,
    )
    stages: int = number("Cascaded stages: photons per electron", "1", default=1, ge=1, le=1000)
    drive_A: float | None = number(
        "Operating current",
        "A",
        default=None,
        otherwise="threshold and slopes only, no powers",
        gt=0.0,
        le=1e5,
    )
    spontaneous_factor: float = number(
        "Share of the spontaneous light that enters the mode; rounds the knee",
        "fraction",
        default=0.0,
        ge=0.0,
        le=1.0,
    )
    series_mohm: float = number(
        "Series resistance", "mohm", default=0.0, noun="a resistance", ge=0.0, le=1e7
    )
    junction_V: float | None = number(
        "Voltage of the junction",
        "V",
        default=None,
        otherwise="no heating and no efficiency are estimated",
        gt=0.0,
        le=100.0,
    )
    thermal_K_per_W: float = number(
        "Thermal resistance, junction to heat sink",
        "K/W",
        default=0.0,
        noun="a thermal resistance",
        ge=0.0,
        le=1e5,
    )
    heatsink_C: float = number("Heat sink", "C", default=25.0, gt=-273.15, le=500.0)
    reference_C: float | None = number(
        "Temperature at which the figures of this section hold",
        "C",
        default=None,
        otherwise="heatsink_C",
        gt=-273.15,
        le=500.0,
    )
    t0_K: float | None = number(
        "T0: transparency grows as exp(dT/T0)",
        "K",
        default=None,
        noun="a temperature",
        otherwise="no dependence on temperature",
        gt=0.0,
        le=1e6,
    )
    t1_K: float | None = number(
        "T1: injection efficiency falls as exp(-dT/T1)",
        "K",
        default=None,
        noun="a temperature",
        otherwise="no dependence on temperature",
        gt=0.0,
        le=1e6,
    )
    threshold_max_A: float | None = number(
        "Limit of the product: highest threshold current",
        "A",
        default=None,
        otherwise=_NO_LIMIT,
        gt=0.0,
        le=1e5,
    )
    rear_min_W: float = number(
        "Limit of the product: least rear power, what a monitor photodiode needs",
        "W",
        default=0.0,
        ge=0.0,
        le=1e5,
    )
    facet_limit_MW_per_cm2: float | None = number(
        "Own rating of the facet load: light inside the chip at the facet, both directions",
        "MW/cm2",
        default=None,
        noun="a power density",
        otherwise=_NO_LIMIT,
        gt=0.0,
        le=1e6,
    )
    mode_height_um: float | None = number(
        "Effective height of the near field, int |E|^2 dx / max |E|^2",
        "um",
        default=None,
        otherwise="taken from the guide; without a guide no facet load is given",
        gt=0.0,
        le=1000.0,
    )


def laser_conflicts(laser: Laser, at: KeyPath) -> Iterator[Found]:
    """Keys of [laser] that need each other."""
    if laser.gain_peak_nm is not None and laser.gain_width_nm is None:
        yield at / "gain_width_nm", "is missing; gain_peak_nm needs it"
    if laser.gain_width_nm is not None and laser.gain_peak_nm is None:
        yield at / "gain_peak_nm", "is missing; gain_width_nm needs it"
    if laser.junction_V is None:
        given = [key for key in ("thermal_K_per_W", "series_mohm") if getattr(laser, key) > 0.0]
        if given:
            yield at / "junction_V", f"is missing; needed by {' and '.join(given)}"


def laser_on_chip_conflicts(laser: Laser, chip: Chip, at: KeyPath) -> Iterator[Found]:
    """What [laser] needs and [chip] does not give."""
    if (
        laser.facet_limit_MW_per_cm2 is not None
        and laser.mode_height_um is None
        and chip.guide is None
    ):
        yield at / "mode_height_um", "is missing; facet_limit_MW_per_cm2 needs it or [chip.guide]"
