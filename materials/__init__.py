"""Optical constants with their sources.

``names``, ``entries``, ``search`` and ``nearest`` read one list and need no numpy; ``load`` reads
the one table that it is asked for. Materials of a recipe's own come from ``constant``, ``cauchy``,
``scaled``, ``mixture``, ``at_temperature``, ``from_table_text`` and ``from_table_bytes``.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from materials.errors import (
    CompositionError,
    MaterialError,
    OutOfRange,
    TableError,
    TemperatureError,
    UnknownMaterial,
)
from materials.index import entries, names, nearest, search
from materials.info import Info

if TYPE_CHECKING:
    from materials.builders import at_temperature, cauchy, constant, mixture, scaled
    from materials.library import Difference, compare, load, self_check
    from materials.material import Material
    from materials.owndata import from_table_bytes, from_table_text

_LATE = {
    "at_temperature": "builders",
    "cauchy": "builders",
    "constant": "builders",
    "mixture": "builders",
    "scaled": "builders",
    "Difference": "library",
    "compare": "library",
    "load": "library",
    "self_check": "library",
    "Material": "material",
    "from_table_bytes": "owndata",
    "from_table_text": "owndata",
}

__all__ = [
    "CompositionError",
    "Difference",
    "Info",
    "Material",
    "MaterialError",
    "OutOfRange",
    "TableError",
    "TemperatureError",
    "UnknownMaterial",
    "at_temperature",
    "cauchy",
    "compare",
    "constant",
    "entries",
    "from_table_bytes",
    "from_table_text",
    "load",
    "mixture",
    "names",
    "nearest",
    "scaled",
    "search",
    "self_check",
]


def __getattr__(name: str) -> Any:
    """Import the parts that need numpy when they are first asked for."""
    if name not in _LATE:
        raise AttributeError(f"module 'materials' has no attribute {name!r}")
    from importlib import import_module

    value = getattr(import_module(f"materials.{_LATE[name]}"), name)
    globals()[name] = value
    return value
