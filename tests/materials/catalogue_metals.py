"""Metals of mirrors, contacts and adhesion layers."""

from __future__ import annotations

from catalogue import ROOM, Spec

_FIT = "Model fitted by its authors to measurements of several sources."


def _metal(name: str, page: str, sample: str, process: str = "not stated", **more) -> Spec:
    compound = name.partition("-")[0]
    return Spec(name, ("main", compound, page), "metal", compound, sample, process, **more)


SPECS = (
    _metal("Au", "Olmon-ev", "film, thick enough to be opaque", "evaporation"),
    _metal("Au-template-stripped", "Olmon-ts", "film, opaque", "template-stripped"),
    _metal("Ag", "Yang", "film, opaque", "template-stripped",
           limits_nm=(270.0, 13000.0)),
    _metal("Al", "Rakic", "evaporated films, critical analysis of several sources", "evaporation",
           k_status="model"),
    _metal("Ti", "Rakic-BB", "metal, several sources", k_status="model", notes=_FIT),
    _metal("Ti-evaporated", "Johnson", "film", "evaporation in high vacuum", temperature=ROOM),
    _metal("Pt", "Rakic-BB", "metal, several sources", k_status="model", notes=_FIT),
    _metal("Pt-evaporated", "Tselin", "film, 80 nm on quartz", "electron-beam evaporation"),
    _metal("Cr", "Rakic-BB", "metal, several sources", k_status="model", notes=_FIT),
    _metal("Cr-evaporated", "Johnson", "film", "evaporation in high vacuum", temperature=ROOM),
    _metal("Ni", "Ordal", "metal"),
    _metal("Ni-evaporated", "Johnson", "film", "evaporation in high vacuum", temperature=ROOM),
    _metal("Cu", "Babar", "metal; not described in the open data set"),
)  # fmt: skip
