"""[chip]: the laser chip as its facets see it."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Literal

from coatings.recipe.paths import Found, KeyPath
from coatings.recipe.section import (
    BAND,
    INDEX_OR_MATERIAL,
    MATERIAL,
    Band,
    IndexOrMaterial,
    Name,
    Section,
    entry,
    number,
)

MAX_GUIDE_LAYERS = 1000


class GuideLayer(Section):
    """One epitaxial layer."""

    material: Name | None = entry(
        "Material of the layer; this or index", default=None, expects=MATERIAL
    )
    index: float | None = number(
        "Refractive index of the layer; this or material",
        "1",
        default=None,
        noun="an index",
        ge=1.0,
        le=10.0,
    )
    um: float | None = number(
        "Thickness; every layer but the outer two has one",
        "um",
        default=None,
        otherwise="a half-space (outer two only)",
        gt=0.0,
        le=50.0,
    )


class Guide(Section):
    """[chip.guide]: the epitaxial waveguide, substrate side first."""

    layers: tuple[GuideLayer, ...] = entry(
        "Layers, substrate side first; the outer two are half-spaces",
        expects="a list of layers such as { index = 3.42, um = 0.012 }",
        max_length=MAX_GUIDE_LAYERS,
    )


class Chip(Section):
    """[chip]."""

    wavelength_nm: float = number(
        "Lasing wavelength in operation, in vacuum", "nm", noun="a wavelength", gt=0.0, le=1e6
    )
    band_nm: Band = entry(
        "Where the facets must serve: lot spread and drift with temperature",
        unit="nm",
        expects=BAND,
    )
    polarization: Literal["TE", "TM"] = entry(
        "Polarization of the chip's light; TE has its electric field along the epitaxial layers"
    )
    length_um: float = number("Length of the chip", "um", gt=0.0, le=1e6)
    stripe_um: float = number(
        "Pumped width, and width of the emitter at the facet", "um", gt=0.0, le=1e5
    )
    emitters: int = number(
        "Emitters on a bar; currents and powers are per bar", "1", default=1, ge=1, le=100000
    )
    index: IndexOrMaterial | None = entry(
        "Modal index: a number or a material; this or [chip.guide], never both",
        default=None,
        expects=INDEX_OR_MATERIAL,
        unit="1",
        otherwise="[chip.guide] gives it",
    )
    group_index: float | None = number(
        "Modal group index: spaces the modes, and tilts a numeric index",
        "1",
        default=None,
        noun="an index",
        otherwise="taken from the guide or the material; a numeric index is constant",
        ge=1.0,
        le=20.0,
    )
    tilt_deg: float = number(
        "Stripe against the facet normal, in the junction plane, inside the chip",
        "deg",
        default=0.0,
        ge=0.0,
        lt=90.0,
    )
    lateral_um: float | None = number(
        "1/e2 full width of the lateral mode intensity; needed when tilt_deg is above 0",
        "um",
        default=None,
        otherwise="not needed without a tilt",
        gt=0.0,
        le=1e5,
    )
    guide: Guide | None = entry(
        "The epitaxial waveguide, instead of index",
        default=None,
        otherwise="index gives the modal index",
    )


def chip_conflicts(chip: Chip, at: KeyPath) -> Iterator[Found]:
    """Keys of [chip] that contradict each other."""
    low, high = chip.band_nm
    if low > high:
        yield at / "band_nm", f"is [{low:g}, {high:g}], reversed; expected [low, high], in nm"
    elif not low <= chip.wavelength_nm <= high:
        yield (
            at / "wavelength_nm",
            f"is {chip.wavelength_nm:g}, outside band_nm [{low:g}, {high:g}]; "
            "expected a wavelength inside it",
        )
    if chip.index is None and chip.guide is None:
        yield at / "index", "is missing; expected index or [chip.guide]"
    if chip.index is not None and chip.guide is not None:
        yield at / "index", "stands beside [chip.guide]; expected one of the two, never both"
    if chip.tilt_deg > 0.0 and chip.lateral_um is None:
        yield at / "lateral_um", "is missing; a tilt_deg above 0 needs it"
    if chip.guide is not None:
        yield from guide_conflicts(chip.guide, at / "guide" / "layers")


def guide_conflicts(guide: Guide, at: KeyPath) -> Iterator[Found]:
    """A guide is two half-spaces with at least one layer of some thickness between them."""
    count = len(guide.layers)
    if count < 3:
        yield at, f"has {count} layers; expected at least 3, the outer two being half-spaces"
        return
    for place, layer in enumerate(guide.layers):
        if (layer.material is None) == (layer.index is None):
            fault = "neither" if layer.index is None else "both"
            yield at / place, f"gives {fault} of material and index; expected one of them"
        is_outer = place in (0, count - 1)
        if is_outer and layer.um is not None:
            yield (
                at / place / "um",
                f"is {layer.um:g}; the outer layers are half-spaces, leave um out",
            )
        if not is_outer and layer.um is None:
            yield at / place / "um", "is missing; every inner layer needs a thickness, in um"
