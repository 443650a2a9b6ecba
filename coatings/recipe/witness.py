"""[[witness]]: the pieces that the vendor measures."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from typing import Literal

from coatings.recipe.paths import Found, KeyPath, shown
from coatings.recipe.section import Name, Section, entry, number


class Witness(Section):
    """One witness piece and the instrument that measures it."""

    name: str = entry(
        "Name of the piece, as used on the command line",
        expects="a name of 1 to 40 characters without =, / and backslash",
        min_length=1,
        max_length=40,
        pattern=r"^[\p{L}\p{M}\p{N}\p{P}\p{S} --[=/\\]]+$",
    )
    facet: Literal["front", "rear"] = entry("Facet whose coating run the piece went through")
    substrate: Name = entry(
        'Material of the piece, or "chip" for a coated bar of the chip\'s own material',
        expects='the name of a material, or "chip"',
    )
    thickness_mm: float = number("Thickness of the piece", "mm", default=1.0, gt=0.0, le=1000.0)
    back: Literal["polished", "ground"] = entry('Back face; "ground" sends no reflection back')
    quantity: Literal["R", "T"] = entry("What is measured: reflectance or transmittance")
    angle_deg: float = number("Angle of incidence in air", "deg", default=0.0, ge=0.0, lt=90.0)
    polarization: Literal["s", "p", "mean"] = entry(
        "Polarization of the instrument", default="mean"
    )
    tooling: float = number(
        "Thickness on the witness over thickness on the facet",
        "1",
        default=1.0,
        noun="a ratio",
        gt=0.0,
        le=10.0,
    )
    tooling_sigma: float = number("One-sigma error of tooling", "1", default=0.0, ge=0.0, le=1.0)
    bandwidth_nm: float = number(
        "Full width at half maximum of the instrument's slit, triangular; 0 sees single wavelengths",
        "nm",
        default=0.0,
        ge=0.0,
        le=1000.0,
    )
    noise: float = number("One-sigma noise of each point", "fraction", default=0.0, ge=0.0, le=1.0)
    scale_sigma: float = number(
        "One-sigma error of the photometer's common factor", "1", default=0.0, ge=0.0, le=1.0
    )
    offset_sigma: float = number("One-sigma common offset", "fraction", default=0.0, ge=0.0, le=1.0)
    wavelength_sigma_nm: float = number(
        "One-sigma error of the wavelength scale", "nm", default=0.0, ge=0.0, le=1000.0
    )


def witness_conflicts(witnesses: Sequence[Witness], at: KeyPath) -> Iterator[Found]:
    """Equal names; transmittance through a ground back."""
    seen: set[str] = set()
    for place, witness in enumerate(witnesses):
        if witness.name in seen:
            yield at / place / "name", f"is {shown(witness.name)} again; expected another name"
        seen.add(witness.name)
        if witness.quantity == "T" and witness.back == "ground":
            yield (
                at / place / "quantity",
                'is "T", but a ground back scatters what passes; expected "R", or back "polished"',
            )
