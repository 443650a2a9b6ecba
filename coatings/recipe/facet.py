"""[front] and [rear]: what a facet carries, what its run may deposit, and what it must do."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from typing import Literal

from coatings.recipe.chip import Chip
from coatings.recipe.paths import Found, KeyPath, shown
from coatings.recipe.process import ProcessTable
from coatings.recipe.section import (
    INDEX_OR_MATERIAL,
    MATERIAL,
    IndexOrMaterial,
    Name,
    Section,
    ThicknessLimits,
    entry,
    number,
)
from coatings.recipe.window import Window, WindowTable, resolve_window, window_conflicts

MOST_LAYERS = 400
_MOST_GIVEN = 1000
_LAYER_LIST = 'a list of layers such as { material = "Al2O3", nm = 118.0 }'


class LayerEntry(Section):
    """One film of base, cap or layers."""

    material: Name = entry("Material of the film", expects=MATERIAL)
    nm: float = number("Physical thickness", "nm", gt=0.0, le=1e6)
    on_witness: bool = entry("Whether the witness pieces get it too", default=True)


class FacetTable(Section):
    """[front] or [rear] as written."""

    outside: IndexOrMaterial = entry(
        "What lies beyond the coating: a material or an index",
        default="air",
        expects=INDEX_OR_MATERIAL,
    )
    palette: tuple[Name, ...] | None = entry(
        "Materials that this run may deposit",
        default=None,
        expects='a list of materials such as ["Al2O3", "Ta2O5"]',
        otherwise="nothing is searched",
        min_length=1,
        max_length=20,
    )
    base: tuple[LayerEntry, ...] = entry(
        "Always there, on the facet (passivation, adhesion); outside the limits of the search",
        default=(),
        expects=_LAYER_LIST,
        max_length=_MOST_GIVEN,
    )
    cap: tuple[LayerEntry, ...] = entry(
        "Always there, outermost; outside the limits of the search",
        default=(),
        expects=_LAYER_LIST,
        max_length=_MOST_GIVEN,
    )
    first: Name | None = entry(
        "Material that the searched layers begin with, chip side",
        default=None,
        expects=MATERIAL,
        otherwise="any of the palette",
    )
    last: Name | None = entry(
        "Material that the searched layers end with",
        default=None,
        expects=MATERIAL,
        otherwise="any of the palette",
    )
    layers: tuple[LayerEntry, ...] | None = entry(
        "A searched part that is already chosen, chip outward; [] means no layers",
        default=None,
        expects=_LAYER_LIST,
        otherwise="nothing is chosen yet",
        max_length=_MOST_GIVEN,
    )
    max_layers: int | None = number(
        "Most searched layers",
        "1",
        default=None,
        otherwise="needed with palette and windows",
        ge=1,
        le=MOST_LAYERS,
    )
    layer_nm: ThicknessLimits | None = entry(
        "Thinnest and thickest layer the run can hold, for all films or by material",
        default=None,
        unit="nm",
        expects="two lengths [thinnest, thickest] in nm, or a table of such pairs by material",
        item="two lengths [thinnest, thickest], in nm",
        otherwise="no limit",
    )
    total_nm: float | None = number(
        "Most thickness of the searched layers together",
        "nm",
        default=None,
        otherwise="no limit",
        gt=0.0,
        le=1e6,
    )
    windows: tuple[WindowTable, ...] = entry(
        "What the facet must do",
        default=(),
        expects="at most 100 tables in double brackets, such as [[front.windows]]",
        max_length=100,
    )
    process: ProcessTable | None = entry(
        "Overrides [process] for this facet, key by key", default=None, otherwise="[process]"
    )


_SEARCH_KEYS = ("first", "last", "max_layers", "layer_nm", "total_nm")

FacetName = Literal["front", "rear"]


@dataclass(frozen=True)
class Facet:
    """A facet with its defaults filled in."""

    name: FacetName
    outside: str | float
    palette: tuple[str, ...] | None
    base: tuple[LayerEntry, ...]
    cap: tuple[LayerEntry, ...]
    layers: tuple[LayerEntry, ...] | None
    first: str | None
    last: str | None
    max_layers: int | None
    total_nm: float | None
    windows: tuple[Window, ...]
    table: FacetTable = field(repr=False)

    @property
    def is_searchable(self) -> bool:
        """Whether there is something to search: a palette and windows."""
        return self.palette is not None and bool(self.windows)

    @property
    def is_bare(self) -> bool:
        """Whether it is a bare cleaved facet: no palette, layers, base or cap."""
        return self.palette is None and not (self.layers or self.base or self.cap)

    @property
    def films(self) -> tuple[str, ...]:
        """Materials of base, palette, layers and cap, each once, in that order."""
        return films_of(self.table)

    def layer_limits_nm(self, material: str) -> tuple[float | None, float | None]:
        """Thinnest and thickest searched layer of a material [nm]; None where no limit is given."""
        limits = self.table.layer_nm
        pair = limits.get(material) if isinstance(limits, dict) else limits
        return (None, None) if pair is None else pair


def films_of(table: FacetTable) -> tuple[str, ...]:
    """Materials of every film a facet has or may get, each once."""
    given = [*table.base, *(table.layers or ()), *table.cap]
    names = [*(table.palette or ()), *(layer.material for layer in given)]
    return tuple(dict.fromkeys(names))


def resolve_facet(name: FacetName, table: FacetTable, chip: Chip) -> Facet:
    """The facet with the chip's band and polarization in its windows."""
    return Facet(
        name=name,
        outside=table.outside,
        palette=table.palette,
        base=table.base,
        cap=table.cap,
        layers=table.layers,
        first=table.first,
        last=table.last,
        max_layers=table.max_layers,
        total_nm=table.total_nm,
        windows=tuple(resolve_window(window, chip) for window in table.windows),
        table=table,
    )


def facet_conflicts(table: FacetTable, at: KeyPath) -> Iterator[Found]:
    """Keys of a facet that contradict each other, and limits that no stack can meet."""
    for place, window in enumerate(table.windows):
        yield from window_conflicts(window, at / "windows" / place)
    yield from _limit_conflicts(table, at)
    if table.palette is None:
        yield from _needs_palette(table, at)
        return
    yield from _palette_conflicts(table, table.palette, at)
    yield from _search_conflicts(table, table.palette, at)


def _limit_conflicts(table: FacetTable, at: KeyPath) -> Iterator[Found]:
    for path, (thinnest, thickest) in _limit_pairs(table, at):
        if thinnest > thickest or thickest == 0.0:
            yield (
                path,
                f"is [{thinnest:g}, {thickest:g}]; expected [thinnest, thickest] in nm, "
                "the thickest above 0 and not below the thinnest",
            )


def _limit_pairs(table: FacetTable, at: KeyPath) -> Iterator[tuple[KeyPath, tuple[float, float]]]:
    if isinstance(table.layer_nm, dict):
        for material, pair in table.layer_nm.items():
            yield at / "layer_nm" / material, pair
    elif table.layer_nm is not None:
        yield at / "layer_nm", table.layer_nm


def _needs_palette(table: FacetTable, at: KeyPath) -> Iterator[Found]:
    given = [key for key in _SEARCH_KEYS if getattr(table, key) is not None]
    if given:
        yield at / "palette", f"is missing; {' and '.join(given)} would limit a search in it"


def _palette_conflicts(table: FacetTable, palette: Sequence[str], at: KeyPath) -> Iterator[Found]:
    offered = f"expected one of {', '.join(dict.fromkeys(palette))}"
    for place, material in enumerate(palette):
        if material in palette[:place]:
            yield at / "palette", f"names {material} twice; expected every material once"
    for key in ("first", "last"):
        material = getattr(table, key)
        if material is not None and material not in palette:
            yield at / key, f"is {shown(material)}, which is not in the palette; {offered}"
    for path, _ in _limit_pairs(table, at):
        if isinstance(table.layer_nm, dict) and path.parts[-1] not in palette:
            yield path, f"limits a material that is not in the palette; {offered}"


def _search_conflicts(table: FacetTable, palette: Sequence[str], at: KeyPath) -> Iterator[Found]:
    if table.max_layers is None:
        if table.windows:
            yield at / "max_layers", f"is missing; a palette needs it, from 1 to {MOST_LAYERS}"
        return
    ends_differ = None not in (table.first, table.last) and table.first != table.last
    if ends_differ and table.max_layers == 1:
        yield (
            at / "max_layers",
            f"is 1, but first {table.first} and last {table.last} need 2 layers",
        )
    least = thinnest_total_nm(table, palette)
    if table.total_nm is not None and table.total_nm < least:
        yield (
            at / "total_nm",
            f"is {table.total_nm:g}, below {least:g} nm, the thinnest stack that first, last "
            "and layer_nm allow",
        )


def thinnest_total_nm(table: FacetTable, palette: Sequence[str]) -> float:
    """Thickness of the thinnest stack with at least one layer that the limits allow [nm]."""
    thinnest = {material: _thinnest_nm(table, material) for material in palette}
    ends = {end for end in (table.first, table.last) if end in thinnest}
    if ends:
        return sum(thinnest[end] for end in ends)
    return min(thinnest.values())


def _thinnest_nm(table: FacetTable, material: str) -> float:
    limits = table.layer_nm
    pair = limits.get(material) if isinstance(limits, dict) else limits
    return 0.0 if pair is None else pair[0]


def facet_notes(table: FacetTable, at: KeyPath) -> Iterator[str]:
    """What a reader should know about limits that can be met, but not as far as they say."""
    if table.palette is not None and not table.windows and table.layers is None:
        yield f"{at}: a palette without windows: no stack is searched, the facet counts as it is"
    if table.palette is not None and len(table.palette) == 1 and (table.max_layers or 0) > 1:
        yield (
            f"{at}.max_layers: with one material in the palette a stack has one layer at most "
            "(neighbours are of different materials); max_layers says more"
        )
