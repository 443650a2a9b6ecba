"""Materials as plain data for the screen and for JSON."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from coatings import __version__
from coatings.errors import InputError, Problem
from materials import Info, Material

Json = dict[str, Any]

ROWS = 11


def list_result(infos: Sequence[Info]) -> Json:
    """Every entry with range, sample and source."""
    return {
        **_head(),
        "materials": [_provenance(info) for info in infos],
    }


def load_shown(name: str) -> Material:
    """The material of a name; InputError with the nearest name or the alloy's range otherwise."""
    import materials
    from materials.errors import MaterialError

    try:
        return materials.load(name)
    except MaterialError as error:
        raise InputError(Problem("materials", str(error))) from None


def shown_result(material: Material, nm: tuple[float, float, float] | None) -> Json:
    """One material: provenance, n and k at chosen wavelengths, distance to its siblings."""
    import numpy as np

    import materials
    from coatings.grids import grid_nm
    from materials.errors import MaterialError

    wavelength = np.geomspace(*material.range_nm, ROWS) if nm is None else grid_nm(*nm)
    try:
        values = material.nk(np.clip(wavelength, *material.range_nm) if nm is None else wavelength)
    except MaterialError as error:
        raise InputError(Problem("--nm", str(error))) from None
    others = [] if ":" in material.name else materials.compare(material.name)
    return {
        **_head(),
        **_provenance(material.info),
        "wavelength_nm": [float(w) for w in wavelength],
        "n": [float(v) for v in values.real],
        "k": [float(v) for v in values.imag],
        "others": [
            {
                "name": o.name,
                "range_nm": list(o.range_nm),
                "mean_n": o.mean_n,
                "worst_n": o.worst_n,
                "worst_nm": o.worst_nm,
                "worst_k": o.worst_k,
            }
            for o in others
        ],
    }


def _head() -> Json:
    """What every result carries; no recipe and no chance are in these."""
    return {"tool": "facetwright", "version": __version__, "recipe_sha256": None, "seed": None}


def _provenance(info: Info) -> Json:
    return {
        "name": info.name,
        "use": info.use,
        "compound": info.compound,
        "sample": info.sample,
        "process": info.process,
        "temperature": info.temperature,
        "range_nm": list(info.range_nm),
        "k_status": info.k_status,
        "accuracy": info.accuracy,
        "source": info.source,
        "doi": info.doi,
        "year": info.year,
        "notes": info.notes,
    }
