"""Crystals of the chip: substrates, claddings, alloys."""

from __future__ import annotations

from catalogue import ROOM, Spec

_MEMORY = "Coefficients from memory, checked"


def _crystal(name: str, page: str, sample: str, **more) -> Spec:
    compound = more.pop("compound", name.partition("-")[0])
    key = more.pop("key", ("main", compound, page))
    return Spec(name, key, "semiconductor", compound, sample, **more)


def _clear(name: str, page: str, sample: str, **more) -> Spec:
    more = {"formula": True, "k_used": False, "k_status": "unknown", **more}
    return _crystal(name, page, sample, **more)


def _alloy(name: str, model: str, sample: str, limits_nm, **more) -> Spec:
    return Spec(
        name, None, "semiconductor", more.pop("compound", name.partition(":")[0]), sample,
        model=model, limits_nm=limits_nm, k_status="below detection", **more,
    )  # fmt: skip


SPECS = (
    _clear("GaAs", "Skauli", "bulk crystal", temperature=22.0,
           extra={"thermal_model": "skauli", "thermal_C": "15 100"}, limits_nm=(970.0, 13000.0),
           notes="From 0.876 to 0.97 um take GaAs-near-gap. Terms in temperature from memory, "
           "checked against the model of Gehrsitz et al. (2000)."),
    _alloy("GaAs-near-gap", "gehrsitz", "epitaxial layers of high purity", (876.0, 10000.0),
           compound="GaAs", temperature=23.0,
           source="S. Gehrsitz, F. K. Reinhart, C. Gourgon, N. Herres, A. Vonlanthen, H. Sigg. "
           "The refractive index of AlxGa1-xAs below the band gap: accurate determination and "
           "empirical modeling. J. Appl. Phys. 87, 7825-7837 (2000)",
           doi="10.1063/1.373462", year=2000,
           notes=f"{_MEMORY} against GaAs of Skauli et al. within 0.005.",
           extra={"model": "gehrsitz", "thermal_C": "0 100"}),
    _crystal("GaAs-absorbing", "Aspnes", "bulk crystal, n-type 1.7e17 cm-3", compound="GaAs",
             temperature=ROOM),
    _clear("GaAs-epitaxial", "Perner", "epitaxial layer of a crystalline mirror",
           temperature=22.0, accuracy="relative standard uncertainty 3.3e-4 or less"),
    _clear("AlAs", "Fern", "crystal; not described in the open data set"),
    _alloy("AlGaAs:x", "gehrsitz", "epitaxial layers of high purity", (461.0, 10000.0),
           temperature=23.0,
           source="S. Gehrsitz, F. K. Reinhart, C. Gourgon, N. Herres, A. Vonlanthen, H. Sigg. "
           "The refractive index of AlxGa1-xAs below the band gap: accurate determination and "
           "empirical modeling. J. Appl. Phys. 87, 7825-7837 (2000)",
           doi="10.1063/1.373462", year=2000,
           notes=f"{_MEMORY} against GaAs, AlAs and tabulated compositions. Ends 0.01 eV below "
           "the direct gap; from x = 0.45 the indirect gap lies below it and absorbs weakly.",
           extra={"model": "gehrsitz", "composition": "0 1", "thermal_C": "0 100",
                  "composition_meaning": "share x of aluminium in Al(x)Ga(1-x)As"}),
    _clear("InP", "Pettit", "bulk crystal", temperature=ROOM),
    _crystal("InP-absorbing", "Aspnes", "bulk crystal, undoped", compound="InP",
             temperature=ROOM),
    _alloy("InGaAsP:x", "broberg", "layers matched to InP", (950.0, 2500.0),
           source="B. Broberg, S. Lindgren. Refractive index of In1-xGaxAsyP1-y layers and InP in "
           "the transparent wavelength region. J. Appl. Phys. 55, 3376-3381 (1984)", year=1984,
           notes=f"{_MEMORY} against InP. Ends 0.03 eV below the gap; no lattice absorption.",
           extra={"model": "broberg", "composition": "0.9184 1.653",
                  "composition_meaning": "wavelength of the gap in um (0.92 is InP, 1.65 InGaAs)"}),
    _alloy("InGaAs", "broberg-ingaas", "In0.53Ga0.47As matched to InP", (1723.0, 2500.0),
           source="B. Broberg, S. Lindgren. Refractive index of In1-xGaxAsyP1-y layers and InP in "
           "the transparent wavelength region. J. Appl. Phys. 55, 3376-3381 (1984)", year=1984,
           notes=f"{_MEMORY} against InP; the arsenic end of that model. Ends 0.03 eV below the "
           "gap.", extra={"model": "broberg-ingaas"}),
    _crystal("InGaAs-absorbing", "Adachi", "In0.52Ga0.48As, dispersion model",
             key=("other", "GaAs-InAs", "Adachi"), compound="InGaAs", k_status="model",
             limits_nm=(600.0, 1600.0),
             notes="From 600 nm on: at its critical points the model has spikes."),
    _alloy("AlGaInAs:x", "mondry", "layers matched to InP", (874.0, 2000.0),
           source="M. J. Mondry, D. I. Babic, J. E. Bowers, L. A. Coldren. Refractive indexes of "
           "(Al,Ga,In)As epilayers on InP for optoelectronic applications. IEEE Photon. Technol. "
           "Lett. 4, 627-630 (1992)", year=1992,
           notes="Coefficients from memory. Ends 0.03 eV below the gap.",
           extra={"model": "mondry", "composition": "0.3 1",
                  "composition_meaning": "share x of Al0.48In0.52As against Ga0.47In0.53As"}),
    _alloy("AlInAs", "mondry-alinas", "Al0.48In0.52As matched to InP", (874.0, 2000.0),
           source="M. J. Mondry, D. I. Babic, J. E. Bowers, L. A. Coldren. Refractive indexes of "
           "(Al,Ga,In)As epilayers on InP for optoelectronic applications. IEEE Photon. Technol. "
           "Lett. 4, 627-630 (1992)", year=1992,
           notes="Coefficients from memory. Ends 0.03 eV below the gap.",
           extra={"model": "mondry-alinas"}),
    _crystal("GaSb", "Ferrini", "epitaxial layer", process="molecular beam epitaxy"),
    _crystal("GaSb-ir", "Adachi", "dispersion model", compound="GaSb", k_status="unknown",
             k_used=False, limits_nm=(2000.0, 12398.0),
             notes="k of the model below the gap is an artefact and left out."),
    _crystal("AlGaSb-0.10", "Ferrini-10", "epitaxial layer on GaSb, 10 % aluminium",
             key=("other", "AlSb-GaSb", "Ferrini-10"), compound="AlGaSb",
             process="molecular beam epitaxy"),
    _crystal("AlGaSb-0.30", "Ferrini-30", "epitaxial layer on GaSb, 30 % aluminium",
             key=("other", "AlSb-GaSb", "Ferrini-30"), compound="AlGaSb",
             process="molecular beam epitaxy"),
    _crystal("AlGaSb-0.50", "Ferrini-50", "epitaxial layer on GaSb, 50 % aluminium",
             key=("other", "AlSb-GaSb", "Ferrini-50"), compound="AlGaSb",
             process="molecular beam epitaxy"),
    _clear("InAs", "Lorimor", "bulk crystal", temperature=ROOM, limits_nm=(3700.0, 13000.0)),
    _crystal("InAs-absorbing", "Aspnes", "bulk crystal, n-type 2.7e16 cm-3", compound="InAs",
             temperature=ROOM),
    _clear("GaN", "Barker-o", "crystal, wurtzite, ordinary ray", temperature=27.0,
           limits_nm=(366.0, 10000.0),
           notes="The formula of the paper from 350 nm; here from the gap on. Below 400 nm it lies "
           "0.01 to 0.03 under the films of M. E. Lin et al., Electron. Lett. 29, 1759 (1993)."),
    _clear("GaN-extraordinary", "Barker-e", "crystal, wurtzite, extraordinary ray",
           compound="GaN", temperature=27.0, limits_nm=(366.0, 10000.0),
           notes="One infrared pole: no dispersion towards the gap; for the infrared."),
    _alloy("AlGaN:x", "algan", "interpolation, ordinary ray", (220.0, 5000.0),
           source="GaN: A. S. Barker Jr., M. Ilegems. Phys. Rev. B 7, 743-750 (1973); AlN: "
           "J. Pastrnak, L. Roskovcova. Phys. Stat. Sol. 14, K5-K8 (1966); gap: I. Vurgaftman, "
           "J. R. Meyer. J. Appl. Phys. 94, 3675-3696 (2003)",
           doi="10.1103/PhysRevB.7.743", year=2003, temperature=27.0,
           notes="Not a measured alloy: the two published binaries at equal shares of the gap, "
           "mixed by composition; its accuracy is not known. Ends 0.05 eV below the gap.",
           extra={"model": "algan", "composition": "0 1",
                  "composition_meaning": "share x of aluminium in Al(x)Ga(1-x)N"}),
    _clear("AlN-crystal", "Pastrnak-o", "crystal, ordinary ray", compound="AlN"),
    _clear("ZnSe", "Connolly", "bulk", process="chemical vapour deposition", temperature=23.0),
    _clear("ZnS-crystal", "Debenham", "bulk, cubic", compound="ZnS", temperature=20.0),
    _crystal("Ge", "Li-293K", "bulk crystal, critical review of many samples",
             temperature=19.85, k_used=False, k_status="unknown", year=1980,
             source="H. H. Li. Refractive index of silicon and germanium and its wavelength and "
             "temperature derivatives. J. Phys. Chem. Ref. Data 9, 561-658 (1980)",
             thermal=((("main", "Ge", "Li-293K"), 19.85), (("main", "Ge", "Li-350K"), 76.85)),
             extra={"thermal_C": "19 77"},
             notes="Also a witness. dn/dT from the review's tables at 293 and 350 K."),
    _clear("Ge-prism", "Burnett", "bulk crystal", compound="Ge",
           accuracy="standard uncertainty 2e-5 near 2 um to 8e-5 near 14 um",
           notes="Minimum deviation in a prism."),
    _crystal("Ge-absorbing", "Nunley", "bulk crystal", compound="Ge", temperature=26.85),
    _crystal("Si", "Franta-25C", "bulk crystal, float zone", k_status="model", temperature=25.0,
             doi="10.1016/j.apsusc.2017.02.021",
             thermal=((("main", "Si", "Franta-25C"), 25.0), (("main", "Si", "Franta-350K"), 76.85)),
             extra={"thermal_C": "19 77"},
             notes="Also a witness. dn/dT from the paper's tables at 25 deg C and 350 K; k stays."),
    _clear("Si-infrared", "Salzberg", "bulk crystal, purity not known", compound="Si",
           temperature=26.0),
    _crystal("Si-intrinsic", "Schinke", "bulk crystal", compound="Si", temperature=21.85,
             accuracy="of the absorption coefficient: 0.4 % at 250 nm, 11 % at 600 nm, 1.4 % at "
             "1000 nm, 12 % at 1200 nm, 180 % at 1450 nm"),
)  # fmt: skip
