"""Names of materials: the recipe's own first, then the library's."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, field
from pathlib import Path

import materials
from coatings.errors import InputError, Problem
from coatings.recipe.files import MEGABYTE, ReadError, inside, read_bytes
from coatings.recipe.material_section import MaterialSection
from coatings.recipe.paths import Found, KeyPath, shown
from coatings.recipe.problems import nearest
from materials.errors import MaterialError, UnknownMaterial

DEEPEST = 8
_TABLE_LIMIT = 10 * MEGABYTE
_ROOT = KeyPath(("materials",))


class OwnMaterialError(InputError):
    """A material of the recipe's own can't be made; blames one key of its section."""

    def __init__(self, path: KeyPath, what: str) -> None:
        self.path = path
        self.what = what
        super().__init__(Problem(str(path), what))


@dataclass(eq=False)
class Shelf:
    """Every material that a recipe can name.

    Parameters
    ----------
    sections : [materials] of the recipe
    folder : the recipe's folder, the only one that tables are read from
    broken : materials of the recipe's own that it does not describe well enough to be made
    """

    sections: Mapping[str, MaterialSection]
    folder: Path
    broken: frozenset[str] = frozenset()
    _made: dict[str, materials.Material] = field(default_factory=dict)

    def material(self, name: str) -> materials.Material:
        """Material of a name.

        Raises
        ------
        InputError
            when there is none, or when the recipe's own data for it can't be used
        """
        try:
            return self._get(name, ())
        except OwnMaterialError as fault:
            raise InputError(Problem(str(fault.path), fault.what)) from None
        except MaterialError as error:
            raise InputError(self._said(error)) from None

    def is_own(self, name: str) -> bool:
        """Whether the recipe describes this material, well or not."""
        return name in self.sections or name in self.broken

    def problems(self) -> Iterator[Found]:
        """What is wrong with the recipe's own materials, each section on its own."""
        for name in (name for name in self.sections if name not in self.broken):
            try:
                self._get(name, ())
            except OwnMaterialError as fault:
                if fault.path.parts[:2] == ("materials", name):
                    yield fault.path, fault.what

    def notes(self) -> tuple[str, ...]:
        """One sentence for every material of the recipe's own, to be printed."""
        return tuple(self._note(name, section) for name, section in self.sections.items())

    def table_paths(self) -> tuple[Path, ...]:
        """Files that the recipe's own materials are read from, as the recipe names them."""
        names = [own.table for own in self.sections.values() if own.table is not None]
        return tuple(self.folder / name for name in dict.fromkeys(names))

    def _note(self, name: str, section: MaterialSection) -> str:
        low, high = self.material(name).range_nm
        is_everywhere = section.index is not None or section.cauchy is not None
        reach = "" if is_everywhere else f", {low:g}-{high:g} nm"
        replaces = " instead of the library's" if name in materials.names() else ""
        return f"{name}: the recipe's own ({_kind_in_words(section)}{reach}){replaces}"

    def _get(self, name: str, below: tuple[str, ...]) -> materials.Material:
        """``below``: own materials that are being made from this one."""
        # An own material may be made from the library's of the same name.
        if not self.is_own(name) or (below and below[-1] == name):
            return materials.load(name)
        if name in self.broken:
            raise OwnMaterialError(_ROOT / name, "is not described well enough to be used")
        if name in below:
            circle = " -> ".join((*below[below.index(name) :], name))
            raise OwnMaterialError(_ROOT / name, f"refers to itself: {circle}")
        if len(below) >= DEEPEST:
            raise OwnMaterialError(_ROOT / below[0], f"is made through more than {DEEPEST} others")
        if name not in self._made:
            self._made[name] = self._make(name, self.sections[name], (*below, name))
        return self._made[name]

    def _make(
        self, name: str, section: MaterialSection, below: tuple[str, ...]
    ) -> materials.Material:
        at = _ROOT / name
        try:
            if section.table is not None:
                return self._from_table(name, section.table, at / "table")
            if section.index is not None:
                return materials.constant(name, section.index, section.k or 0.0)
            if section.cauchy is not None:
                return materials.cauchy(name, section.cauchy, section.k or 0.0)
            parts = [self._get(part, below) for part in section.references]
            if len(parts) == 2:
                return materials.mixture(name, *parts, fraction=section.fraction or 0.0)
            return _scaled(name, parts[0], section)
        except MaterialError as error:
            raise OwnMaterialError(at / _blamed(section, error), self._said(error)) from None

    def _from_table(self, name: str, file_name: str, at: KeyPath) -> materials.Material:
        try:
            path = inside(self.folder, file_name)
            content = read_bytes(path, at_most=_TABLE_LIMIT)
        except ReadError as fault:
            said = str(fault)
            named = said if said.startswith('is "') else f"{shown(file_name)} {said}"
            raise OwnMaterialError(at, named) from None
        return materials.from_table_bytes(content, name=name, where=shown(file_name))

    def _said(self, error: MaterialError) -> str:
        if isinstance(error, UnknownMaterial):
            guess = nearest(error.name, self.sections)
            if guess is not None and guess != error.name:
                return f"no material {shown(error.name)}; did you mean {shown(guess)}?"
        return str(error)


def _scaled(name: str, base: materials.Material, section: MaterialSection) -> materials.Material:
    if section.temperature_C is not None:
        base = materials.at_temperature(base, celsius=section.temperature_C)
    factor = 1.0 if section.scale is None else section.scale
    return materials.scaled(base, factor=factor, name=name)


def _blamed(section: MaterialSection, error: MaterialError) -> str:
    if section.temperature_C is not None and not isinstance(error, UnknownMaterial):
        return "temperature_C"
    for key in ("table", "index", "cauchy", "mixture"):
        if getattr(section, key) is not None:
            return key
    return "of"


def _kind_in_words(section: MaterialSection) -> str:
    if section.table is not None:
        return f"table {section.table}"
    if section.index is not None:
        return f"index {section.index:g}"
    if section.cauchy is not None:
        return "dispersion formula"
    if section.mixture is not None:
        return f"{section.mixture[0]} with {section.fraction:g} of {section.mixture[1]}"
    scale = "" if section.scale is None else f", index times {section.scale:g}"
    warm = "" if section.temperature_C is None else f", at {section.temperature_C:g} C"
    return f"{section.of}{scale}{warm}"
