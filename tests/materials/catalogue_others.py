"""Witness pieces, and what lies outside the coating."""

from __future__ import annotations

from catalogue import Spec

_CLEAR = {"formula": True, "k_used": False, "k_status": "unknown"}
_BY_DEFINITION = {
    "key": None, "formula": True, "k_status": "below detection", "limits_nm": (100.0, 100000.0),
    "fixed_formula": ("cauchy", "1"),
}  # fmt: skip

SPECS = (
    Spec("fused-silica", ("main", "SiO2", "Malitson"), "witness", "SiO2",
         "bulk, fused silica", temperature=20.0, **_CLEAR,
         accuracy="mean residual of the formula 4.3e-6 (from memory)",
         notes="Paper: 0.21 to 3.71 um; the second paper confirms the formula to 6.7 um."),
    Spec("borosilicate-crown", ("popular_glass", "BK7", (0.3, 2.5)), "witness", "crown glass",
         "bulk, optical glass of code 517642", formula=True,
         source="Maker's catalogue of optical glass, type with nd = 1.51680 and Abbe number "
         "64.17 (code 517642), January 2017", year=2017,
         notes="k from the internal transmittance that the catalogue lists."),
    Spec("soda-lime", ("glass", "soda-lime", "Rubin-clear"), "witness", "soda-lime glass",
         "bulk, clear window glass", formula=True),
    Spec("sapphire", ("main", "Al2O3", "Malitson-o"), "witness", "Al2O3",
         "bulk, synthetic sapphire, ordinary ray", temperature=20.0, **_CLEAR),
    Spec("arsenic-sulfide-glass", ("main", "As2S3", "Rodney"), "witness", "As2S3",
         "bulk, glass for the infrared", temperature=25.0, **_CLEAR),
    Spec("air", compound="air", use="ambient", sample="taken as n = 1", temperature=15.0,
         source="P. E. Ciddor. Refractive index of air: new equations for the visible and near "
         "infrared. Appl. Opt. 35, 1566-1573 (1996)", doi="10.1364/AO.35.001566", year=1996,
         notes="n is 1.00027 in the visible and varies with pressure; taken as 1 because the "
         "difference moves a reflectance by less than 0.0005 of itself and films are far less "
         "certain. air-standard has the dispersion.", **_BY_DEFINITION),
    Spec("air-standard", ("other", "air", "Ciddor"), "ambient", "air",
         "dry air, 101.325 kPa, 450 ppm carbon dioxide", temperature=15.0, **_CLEAR),
    Spec("vacuum", compound="vacuum", use="ambient", sample="n = 1", year="not stated",
         source="definition of the refractive index", **_BY_DEFINITION),
    Spec("nitrogen", ("main", "N2", "Peck-15C"), "ambient", "N2", "gas, 101.325 kPa",
         temperature=15.0, **_CLEAR),
    Spec("water", ("main", "H2O", "Hale"), "ambient", "H2O", "liquid", temperature=25.0),
    Spec("silicone-gel", ("organic", "polydimethylsiloxane", "Gupta"), "ambient",
         "polydimethylsiloxane", "elastomer, ten parts to one of hardener",
         k_used=False, k_status="unknown", temperature="not stated",
         notes="For fibre coupling. Another published sample (doi 10.1364/AO.383831) lies 0.017 "
         "lower at 976 nm: measure your own."),
)  # fmt: skip
