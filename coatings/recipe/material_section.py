"""[materials.NAME]: replace or add a material for this recipe."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Annotated

from pydantic import Field

from coatings.recipe.paths import Found, KeyPath
from coatings.recipe.section import MATERIAL, Name, Section, entry, number

KINDS = ("table", "index", "cauchy", "of", "mixture")
_ONE_KIND = "one of table, index, cauchy, of (with scale or temperature_C), mixture"
_COMPANIONS = {
    "k": ("index", "cauchy"),
    "scale": ("of",),
    "temperature_C": ("of",),
    "fraction": ("mixture",),
}


class MaterialSection(Section):
    """One material of the recipe's own, in exactly one of five ways."""

    table: str | None = entry(
        "Text table of wavelength, n and k beside the recipe",
        default=None,
        expects="a file name relative to the recipe's folder",
        min_length=1,
        max_length=1000,
    )
    index: float | None = number(
        "Constant refractive index", "1", default=None, noun="an index", gt=0.0, le=10.0
    )
    k: float | None = number(
        "Extinction coefficient, with index or cauchy",
        "1",
        default=None,
        noun="an extinction coefficient",
        otherwise="0",
        ge=0.0,
        le=20.0,
    )
    cauchy: tuple[Annotated[float, Field(ge=-1e3, le=1e3)], ...] | None = entry(
        "Coefficients of n = c0 + c1/L^2 + c2/L^4 + ..., L the wavelength in um",
        default=None,
        unit="1, um2, um4, ...",
        expects="a list of 1 to 6 numbers, for wavelengths in um",
        min_length=1,
        max_length=6,
    )
    of: Name | None = entry(
        "An existing material that is scaled or warmed", default=None, expects=MATERIAL
    )
    scale: float | None = number(
        "Factor on its index, with of", "1", default=None, noun="a factor", ge=0.5, le=2.0
    )
    temperature_C: float | None = number(
        "Temperature, with of, where dn/dT is known", "C", default=None, gt=-273.15, le=1000.0
    )
    mixture: tuple[Name, Name] | None = entry(
        "Two existing materials, mixed by Bruggeman's rule",
        default=None,
        expects="the names of two materials",
    )
    fraction: float | None = number(
        "Share of the second of the mixture, by volume", "fraction", default=None, ge=0.0, le=1.0
    )

    @property
    def references(self) -> tuple[str, ...]:
        """Materials that this one is made from."""
        if self.mixture is not None:
            return self.mixture
        return () if self.of is None else (self.of,)


def material_conflicts(section: MaterialSection, at: KeyPath) -> Iterator[Found]:
    """Exactly one kind, and what belongs to it."""
    kinds = [key for key in KINDS if getattr(section, key) is not None]
    if len(kinds) != 1:
        fault = f"gives {' and '.join(kinds)}" if kinds else "says nothing of what it is"
        yield at, f"{fault}; expected {_ONE_KIND}"
        return
    kind = kinds[0]
    for key, owners in _COMPANIONS.items():
        if getattr(section, key) is not None and kind not in owners:
            yield at / key, f"does not go with {kind}; it belongs to {' or '.join(owners)}"
    if kind == "of" and section.scale is None and section.temperature_C is None:
        yield at / "scale", "is missing; of needs scale or temperature_C"
    if kind == "mixture" and section.fraction is None:
        yield at / "fraction", "is missing; mixture needs the share of its second material"
