"""[external] and [amplifier]: the chip inside a longer cavity, and the chip below threshold."""

from __future__ import annotations

from collections.abc import Iterator

from coatings.recipe.paths import Found, KeyPath
from coatings.recipe.section import BAND, Band, Section, entry, number


class External(Section):
    """[external]: a grating, fibre or mirror that feeds light back through the front."""

    reflectance: float = number(
        "Power reflectance of the external reflector", "fraction", ge=0.0, le=1.0
    )
    coupling: float = number(
        "Power coupled between chip and reflector, one way", "fraction", ge=0.0, le=1.0
    )
    wavelength_nm: float | None = number(
        "Centre of its reflection",
        "nm",
        default=None,
        noun="a wavelength",
        otherwise="the middle of its band; without a band it reflects everywhere",
        gt=0.0,
        le=1e6,
    )
    band_nm: Band | None = entry(
        "Where it reflects", default=None, unit="nm", expects=BAND, otherwise="everywhere"
    )


class Amplifier(Section):
    """[amplifier]: for amplifiers and gain chips, below threshold."""

    gain_dB: float = number("Gain of a single pass", "dB", noun="a gain", gt=0.0, le=100.0)
    ripple_dB: float | None = number(
        "The most ripple that the facets may cause",
        "dB",
        default=None,
        noun="a ripple",
        otherwise="no limit",
        gt=0.0,
        le=100.0,
    )


def external_conflicts(external: External, at: KeyPath) -> Iterator[Found]:
    """A reversed band, or a wavelength outside it."""
    if external.band_nm is None:
        return
    low, high = external.band_nm
    if low > high:
        yield at / "band_nm", f"is [{low:g}, {high:g}], reversed; expected [low, high], in nm"
    elif external.wavelength_nm is not None and not low <= external.wavelength_nm <= high:
        yield (
            at / "wavelength_nm",
            f"is {external.wavelength_nm:g}, outside band_nm [{low:g}, {high:g}]; "
            "expected a wavelength inside it",
        )
