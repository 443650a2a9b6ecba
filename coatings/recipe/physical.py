"""What the schema can't see: keys that contradict each other, and data that do not reach."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field

import numpy as np

from coatings.errors import InputError
from coatings.recipe.chip import Chip, chip_conflicts
from coatings.recipe.facet import FacetTable, facet_conflicts, films_of
from coatings.recipe.feedback import Amplifier, External, external_conflicts
from coatings.recipe.laser import Laser, laser_conflicts, laser_on_chip_conflicts
from coatings.recipe.material_section import MaterialSection, material_conflicts
from coatings.recipe.own_materials import Shelf
from coatings.recipe.paths import Found, KeyPath
from coatings.recipe.process import BY_MATERIAL_KEYS, ProcessTable, stress_conflicts
from coatings.recipe.witness import Witness, witness_conflicts
from materials import Material

_TOP = KeyPath()
_FORMULA_POINTS = 101


@dataclass(frozen=True)
class Sections:
    """The sections of a recipe that could be read; None also for one that could not."""

    chip: Chip | None = None
    laser: Laser | None = None
    external: External | None = None
    amplifier: Amplifier | None = None
    front: FacetTable | None = None
    rear: FacetTable | None = None
    process: ProcessTable | None = None
    witness: tuple[Witness, ...] = ()
    materials: Mapping[str, MaterialSection] = field(default_factory=dict)

    @property
    def facets(self) -> dict[str, FacetTable]:
        """The facets that could be read, by name."""
        both = {"front": self.front, "rear": self.rear}
        return {name: table for name, table in both.items() if table is not None}


def conflicts(sections: Sections) -> Iterator[Found]:
    """Contradictions inside and between sections, without any material's data."""
    if sections.chip is not None:
        yield from chip_conflicts(sections.chip, _TOP / "chip")
    if sections.laser is not None:
        yield from laser_conflicts(sections.laser, _TOP / "laser")
        if sections.chip is not None:
            yield from laser_on_chip_conflicts(sections.laser, sections.chip, _TOP / "laser")
    if sections.external is not None:
        yield from external_conflicts(sections.external, _TOP / "external")
    for name, table in sections.facets.items():
        yield from facet_conflicts(table, _TOP / name)
        yield from _trade_conflicts(table, sections, _TOP / name)
        yield from _stress_conflicts(table, sections, name)
    yield from witness_conflicts(sections.witness, _TOP / "witness")
    for name, section in sections.materials.items():
        yield from material_conflicts(section, _TOP / "materials" / name)


def _trade_conflicts(table: FacetTable, sections: Sections, at: KeyPath) -> Iterator[Found]:
    has_drive = sections.laser is not None and sections.laser.drive_A is not None
    for place, window in enumerate(table.windows):
        if window.reflectance == "trade" and not has_drive:
            yield (
                at / "windows" / place / "reflectance",
                'is "trade", the best value for the operating current; it needs laser.drive_A',
            )


def _stress_conflicts(table: FacetTable, sections: Sections, name: str) -> Iterator[Found]:
    own = table.process
    is_own = own is not None and own.stress_max_N_per_m is not None
    at = _TOP / name / "process" if is_own else _TOP / "process"
    yield from stress_conflicts(sections.process, own, films=films_of(table), at=at)


@dataclass(frozen=True)
class Reference:
    """A material that a key names, and the wavelengths over which the recipe needs it."""

    name: str
    path: KeyPath
    spans_nm: tuple[tuple[KeyPath, tuple[float, float]], ...] = ()


def references(sections: Sections) -> Iterator[Reference]:
    """Every material the recipe names, but for [materials] itself."""
    chip = sections.chip
    if chip is not None:
        yield from _chip_references(chip, sections)
    for name, table in sections.facets.items():
        spans = _facet_spans(table, chip, _TOP / name)
        for material, path in _facet_names(table, _TOP / name):
            yield Reference(material, path, spans)
        yield from _process_references(table.process, _TOP / name / "process")
    yield from _process_references(sections.process, _TOP / "process")
    for place, witness in enumerate(sections.witness):
        if witness.substrate != "chip":
            yield Reference(witness.substrate, _TOP / "witness" / place / "substrate")


def material_problems(sections: Sections, shelf: Shelf) -> Iterator[Found]:
    """Unknown materials, own data that can't be used, and wavelengths that data do not reach."""
    yield from shelf.problems()
    seen: set[tuple[KeyPath, str]] = set()
    for reference in references(sections):
        try:
            material = shelf.material(reference.name)
        except InputError as error:
            # The recipe's own materials were blamed where they stand.
            if not shelf.is_own(reference.name):
                yield reference.path, error.problems[0].what
            continue
        for path, what in _unreached(material, reference):
            if (path, reference.name) not in seen:
                yield path, what
            seen.add((path, reference.name))
        own = shelf.sections.get(reference.name)
        if own is not None and own.cauchy is not None:
            yield from _impossible_formula(material, reference)


def _unreached(material: Material, reference: Reference) -> Iterator[Found]:
    low, high = material.range_nm
    for path, (first, last) in reference.spans_nm:
        if first < low or last > high:
            yield (
                path,
                f"{_asked(first, last)}, but {reference.name} ({reference.path}) is known "
                f"over {low:g} to {high:g} nm",
            )


def _impossible_formula(material: Material, reference: Reference) -> Iterator[Found]:
    """A formula of the recipe's own whose index falls to zero where it is used."""
    low, high = material.range_nm
    for _, (first, last) in reference.spans_nm:
        if first > high or last < low:
            continue
        used_nm = np.linspace(max(first, low), min(last, high), _FORMULA_POINTS)
        if material.nk(used_nm).real.min() <= 0.0:
            yield (
                _TOP / "materials" / reference.name / "cauchy",
                f"gives an index of 0 or less within {first:g} to {last:g} nm; "
                "check the coefficients (wavelengths are in um)",
            )


def _asked(first: float, last: float) -> str:
    return f"is {first:g}" if first == last else f"reaches over {first:g} to {last:g} nm"


def _chip_references(chip: Chip, sections: Sections) -> Iterator[Reference]:
    at = _TOP / "chip"
    spans = list(_chip_spans(chip))
    for name, table in sections.facets.items():
        spans += _window_spans(table, _TOP / name)
    if isinstance(chip.index, str):
        yield Reference(chip.index, at / "index", tuple(spans))
    for place, layer in enumerate(chip.guide.layers if chip.guide is not None else ()):
        if layer.material is not None:
            path = at / "guide" / "layers" / place / "material"
            yield Reference(layer.material, path, tuple(spans))


def _chip_spans(chip: Chip) -> Iterator[tuple[KeyPath, tuple[float, float]]]:
    at = _TOP / "chip"
    low, high = chip.band_nm
    if low <= high:
        yield at / "band_nm", (low, high)
    if not low <= chip.wavelength_nm <= high:
        yield at / "wavelength_nm", (chip.wavelength_nm, chip.wavelength_nm)


def _window_spans(table: FacetTable, at: KeyPath) -> Iterator[tuple[KeyPath, tuple[float, float]]]:
    for place, window in enumerate(table.windows):
        if window.band_nm is not None and window.band_nm[0] <= window.band_nm[1]:
            yield at / "windows" / place / "band_nm", window.band_nm


def _facet_spans(
    table: FacetTable, chip: Chip | None, at: KeyPath
) -> tuple[tuple[KeyPath, tuple[float, float]], ...]:
    own = tuple(_window_spans(table, at))
    return own if chip is None else (*_chip_spans(chip), *own)


def _facet_names(table: FacetTable, at: KeyPath) -> Iterator[tuple[str, KeyPath]]:
    if isinstance(table.outside, str):
        yield table.outside, at / "outside"
    for material in table.palette or ():
        yield material, at / "palette"
    for key in ("base", "layers", "cap"):
        for place, layer in enumerate(getattr(table, key) or ()):
            yield layer.material, at / key / place / "material"


def _process_references(table: ProcessTable | None, at: KeyPath) -> Iterator[Reference]:
    if table is None:
        return
    for key in BY_MATERIAL_KEYS:
        for material in getattr(table, key):
            yield Reference(material, at / key / material)
