"""What a catalogue says of an entry beyond the numbers, which come from the open data set."""

from __future__ import annotations

from dataclasses import dataclass, field

ROOM = "room"
UNSTATED = "not stated"


@dataclass(frozen=True)
class Spec:
    """One entry of the library: where its numbers are, and its provenance.

    ``key`` names shelf, book and page of the data set; a page may be given by its range in um.
    ``source``, ``doi`` and ``year`` come from the data set unless they stand here.
    ``thermal`` holds two (key, temperature) pairs of the same paper for dn/dT.
    """

    name: str
    key: tuple | None
    use: str
    compound: str
    sample: str
    process: str = UNSTATED
    temperature: str | float = UNSTATED
    k_status: str = "measured"
    accuracy: str = UNSTATED
    notes: str = ""
    limits_nm: tuple[float, float] = (220.0, 13000.0)
    formula: bool = False
    fixed_formula: tuple[str, str] | None = None
    k_used: bool = True
    model: str = ""
    source: str = ""
    doi: str = ""
    year: int | str = ""
    thermal: tuple = ()
    extra: dict[str, str] = field(default_factory=dict)


#: Names by which people ask for a compound.
COMMON = {
    "GaAs": "gallium arsenide",
    "AlAs": "aluminium arsenide",
    "AlGaAs": "aluminium gallium arsenide",
    "InP": "indium phosphide",
    "InGaAsP": "indium gallium arsenide phosphide",
    "InGaAs": "indium gallium arsenide",
    "AlGaInAs": "aluminium gallium indium arsenide",
    "AlInAs": "aluminium indium arsenide",
    "GaSb": "gallium antimonide",
    "AlGaSb": "aluminium gallium antimonide",
    "InAs": "indium arsenide",
    "GaN": "gallium nitride",
    "AlGaN": "aluminium gallium nitride",
    "AlN": "aluminium nitride",
    "ZnSe": "zinc selenide",
    "ZnS": "zinc sulfide",
    "Ge": "germanium",
    "Si": "silicon",
    "a-Si": "amorphous silicon",
    "SiO2": "silicon dioxide, silica, oxide",
    "SiO": "silicon monoxide, oxide",
    "Al2O3": "aluminium oxide, alumina",
    "Ta2O5": "tantalum pentoxide, tantala, oxide",
    "TiO2": "titanium dioxide, titania, oxide",
    "Nb2O5": "niobium pentoxide, oxide",
    "HfO2": "hafnium dioxide, hafnia, oxide",
    "ZrO2": "zirconium dioxide, zirconia, oxide",
    "Y2O3": "yttrium oxide, yttria",
    "Sc2O3": "scandium oxide, scandia",
    "Si3N4": "silicon nitride",
    "SiON": "silicon oxynitride",
    "MgF2": "magnesium fluoride",
    "YbF3": "ytterbium fluoride",
    "LaF3": "lanthanum fluoride",
    "GdF3": "gadolinium fluoride",
    "BaF2": "barium fluoride",
    "CaF2": "calcium fluoride",
    "MgO": "magnesium oxide, magnesia",
    "ITO": "indium tin oxide",
    "Au": "gold",
    "Ag": "silver",
    "Al": "aluminium",
    "Ti": "titanium",
    "Pt": "platinum",
    "Cr": "chromium",
    "Ni": "nickel",
    "Cu": "copper",
    "crown glass": "borosilicate crown glass",
    "soda-lime glass": "soda-lime glass, float glass",
    "As2S3": "arsenic trisulfide glass, chalcogenide",
    "air": "air",
    "vacuum": "vacuum",
    "N2": "nitrogen",
    "H2O": "water",
    "polydimethylsiloxane": "silicone",
}
