"""Films, and the bulk oxides and fluorides that stand in where no film is published."""

from __future__ import annotations

from catalogue import ROOM, Spec

_WIDE = "ellipsometry and photometry fitted together by a dispersion model"
_BULK = "Bulk, no film: no film data in the open data set; a deposited film is less dense."


def _film(name: str, page: str, sample: str, process: str, **more) -> Spec:
    compound = more.pop("compound", name.partition("-")[0])
    key = more.pop("key", ("main", more.pop("book", compound), page))
    return Spec(name, key, more.pop("use", "film"), compound, f"film, {sample}", process, **more)


def _bulk(name: str, page: str, sample: str, **more) -> Spec:
    compound = more.pop("compound", name.partition("-")[0])
    more.setdefault("k_status", "unknown")
    more["notes"] = f"{_BULK} {more.get('notes', '')}".strip()
    return Spec(
        name, ("main", compound, page), "film", compound, f"bulk, {sample}",
        formula=True, k_used=False, **more,
    )  # fmt: skip


def _model(**more):
    return {"temperature": ROOM, "k_status": "model", **more}


SPECS = (
    _film("SiO2", "Franta-300C", "801.9 nm on silicon, dense amorphous",
          "electron-beam evaporation at 300 deg C", notes=_WIDE, **_model()),
    _film("SiO2-evaporated-cold", "Franta-25C", "878.4 nm on silicon, water in its pores",
          "electron-beam evaporation at 25 deg C",
          notes=f"{_WIDE}; absorbs near 3 um by the water it takes up", **_model()),
    _film("SiO2-ion-assisted", "Gao", "300 nm on fused silica",
          "electron-beam evaporation with ion assistance"),
    _film("SiO2-sputtered", "Lemarchand", "580 nm on borosilicate crown", "magnetron sputtering"),
    _film("SiO2-sputtered-ir", "Kischkat", "510 nm on silicon",
          "reactive sputtering at room temperature, Si target", temperature=ROOM,
          limits_nm=(1500.0, 7300.0), notes="Ends before n falls below 1 at the lattice band."),
    _film("SiO", "Hass", "evaporated silicon monoxide", "thermal evaporation",
          notes="Read from a figure of the paper; k is below detection from 1 um to 8 um."),
    _film("Al2O3", "Franta", "121.5 nm on silicon, amorphous", "electron-beam evaporation",
          notes=_WIDE, **_model()),
    _film("Al2O3-ald", "Zhukovsky", "20 nm on silicon", "atomic layer deposition at 120 deg C"),
    _film("Al2O3-ald-plasma", "Rodriguez_de_Marcos", "on silicon and magnesium fluoride",
          "plasma-enhanced atomic layer deposition at 300 deg C",
          source="L. V. Rodriguez de Marcos, M. Christophersen, M. F. Batkis, J. G. del Hoyo, "
          "J. Patel, E. J. Wollack, J. A. Christodoulides, J. I. Larruquert, M. A. Quijada. "
          "Self-consistent optical properties of PEALD-Al2O3 thin films. "
          "Opt. Mater. Express 15 (2025)", year=2025,
          notes="k of 1e-4 to 1e-3 where the film is clear comes from the Kramers-Kronig analysis "
          "of the paper; it bounds k, it does not measure it.", limits_nm=(220.0, 12000.0)),
    _film("Al2O3-sputtered-ir", "Kischkat", "497 nm on silicon",
          "reactive sputtering at room temperature, Al target", temperature=ROOM),
    _film("Al2O3-laser-ablated", "Boidin", "amorphous", "pulsed laser deposition in vacuum",
          k_status="unknown", k_used=False, limits_nm=(300.0, 8000.0)),
    _film("Ta2O5", "Gao", "400 nm on borosilicate crown",
          "electron-beam evaporation with ion assistance"),
    _film("Ta2O5-evaporated", "Franta-2015", "208.4 nm on silicon, amorphous",
          "electron-beam evaporation", notes=_WIDE, **_model()),
    _film("Ta2O5-polycrystalline", "Franta-2025", "five of 20 to 250 nm on silicon",
          "electron-beam evaporation", notes=_WIDE, **_model()),
    _film("Ta2O5-sputtered", "Cheikh-amorphous-3.28-12-25", "amorphous, as deposited",
          "magnetron sputtering, 3.28 W/cm2, 12 sccm oxygen"),
    _film("TiO2", "Franta", "99.6 nm on silicon, amorphous", "electron-beam evaporation",
          notes=_WIDE, **_model()),
    _film("TiO2-ald", "Siefke", "350 nm", "atomic layer deposition", k_status="model", notes=_WIDE),
    _film("TiO2-ald-cold", "Zhukovsky", "20 nm on silicon",
          "atomic layer deposition at 120 deg C"),
    _film("TiO2-sputtered-ir", "Kischkat", "352 nm on silicon",
          "reactive sputtering at room temperature, TiO2 target", temperature=ROOM),
    _film("Nb2O5", "Franta", "five of 20 to 250 nm", "magnetron sputtering", notes=_WIDE,
          **_model()),
    _film("Nb2O5-annealed", "Horcholle-800", "rapidly annealed at 800 deg C",
          "reactive magnetron sputtering"),
    _film("HfO2", "Bright", "180 to 500 nm on silicon", "reactive magnetron sputtering",
          k_status="model", notes="Computed from the dispersion model of the paper."),
    _film("HfO2-evaporated", "Franta", "112.7 nm on silicon, amorphous",
          "electron-beam evaporation", notes=_WIDE, **_model()),
    _film("HfO2-porous", "Al-Kuhaili", "low density", "electron-beam evaporation",
          formula=True, k_used=False, k_status="below detection"),
    _bulk("ZrO2", "Wood", "cubic zirconia with 12.0 mol % yttria", temperature=25.0),
    _bulk("Y2O3", "Nigara", "sample not described in the open data set"),
    _film("Sc2O3", "Belosludtsev", "270 nm on silica, stoichiometric",
          "reactive magnetron sputtering"),
    _film("Si3N4", "Luke", "340 nm on thermal oxide",
          "low-pressure chemical vapour deposition (from memory)",
          formula=True, k_used=False, k_status="unknown"),
    _film("Si3N4-visible", "Philipp", "stoichiometric", "not stated in the open data set",
          formula=True, k_used=False, k_status="unknown"),
    _film("SiN-plasma", "Beliaev", "100 nm, not stoichiometric",
          "plasma-enhanced chemical vapour deposition", compound="Si3N4"),
    _film("SiN-low-index", "Vogt-1.91", "105 nm on silicon, n = 1.91 at 633 nm",
          "not stated in the open data set", compound="Si3N4", temperature=ROOM),
    _film("SiN-low-stress", "Vogt-2.13", "85 nm on silicon, silicon-rich, n = 2.13 at 633 nm",
          "not stated in the open data set", compound="Si3N4", temperature=ROOM,
          notes="Films called low-stress are silicon-rich as this one is; the stress of this "
          "sample is not stated."),
    _film("SiN-sputtered-ir", "Kischkat", "437 nm on silicon, silicon-rich",
          "reactive sputtering at room temperature, Si target", compound="Si3N4",
          temperature=ROOM),
    Spec("SiON:x", None, "film", "SiON", "homogeneous mixture of SiO2 and Si3N4",
         process="computed by Bruggeman's effective medium", k_status="unknown", model="bruggeman",
         limits_nm=(310.0, 5504.0), source="SiO2: D. Franta, D. Necas, I. Ohlidal, A. Giglia. "
         "Proc. SPIE 9890, 989014 (2016); Si3N4: K. Luke, Y. Okawachi, M. R. E. Lamont, "
         "A. L. Gaeta, M. Lipson. Opt. Lett. 40, 4823-4826 (2015); mixing: D. A. G. Bruggeman. "
         "Ann. Phys. 416, 636-664 (1935)", doi="10.1002/andp.19354160705", year=1935,
         notes="Not a measured film; the share follows from the index that the run reaches.",
         extra={"mixture": "SiO2 Si3N4", "composition": "0 1",
                "composition_meaning": "share of the volume that is Si3N4"}),
    _film("AlN", "Beliaev1", "303 nm, not stoichiometric", "reactive sputtering",
          notes="k is that of this film; less absorbing ones are made. Its infrared table is "
          "left out: n there lies 0.1 above the near infrared."),
    _film("AlN-sputtered-ir", "Kischkat", "297 nm on silicon, not stoichiometric",
          "reactive sputtering at room temperature, Al target", temperature=ROOM),
    _film("MgF2", "Franta", "134.2 nm on silicon, polycrystalline", "electron-beam evaporation",
          notes=f"{_WIDE}; bands of absorbed water near 2 and 3 um",
          limits_nm=(220.0, 12800.0), **_model()),
    _film("YbF3", "Amotchkina", "1.95 um on zinc selenide",
          "electron-beam evaporation at 120 deg C", formula=True,
          notes="k measured from 9.0 um on; below that it is below detection and taken as zero."),
    _film("LaF3", "Amotchkina", "1.368 um on zinc selenide",
          "electron-beam evaporation at 120 deg C", formula=True, limits_nm=(400.0, 11970.0),
          notes="k measured from 9.5 um on; below that it is below detection and taken as zero."),
    _film("GdF3", "Franta", "five of 20 to 600 nm on silicon", "thermal evaporation",
          notes=f"{_WIDE}; constants of the thinnest film", **_model()),
    _bulk("BaF2", "Malitson", "synthetic crystal", temperature=25.0),
    _bulk("CaF2", "Malitson", "crystal", temperature=24.0),
    _bulk("MgO", "Stephens", "crystal", temperature=23.3),
    _film("ZnS", "Amotchkina", "1.008 um on germanium", "electron-beam evaporation at 120 deg C",
          formula=True, notes="k measured up to 1.0 um; beyond it is taken as zero."),
    _film("ITO", "Minenkov-glass", "110 nm on glass", "not stated; bought coated",
          key=("other", "In2O3-SnO2", "Minenkov-glass")),
    _film("a-Si", "Karaman-20C", "100 nm on fused silica, not hydrogenated",
          "not stated in the open data set", book="Si", compound="a-Si", temperature=20.0,
          thermal=((("main", "Si", "Karaman-20C"), 20.0), (("main", "Si", "Karaman-70C"), 70.0)),
          extra={"thermal_C": "19 70"}, notes="dn/dT from the tables at 20 and 70 deg C; k stays."),
    _film("a-Si-evaporated", "Pierce", "60 nm, not hydrogenated",
          "electron-beam evaporation (from memory)",
          book="Si", compound="a-Si"),
    _film("a-Si-H", "Franta", "several, on silicon and glass, hydrogenated",
          "plasma-enhanced chemical vapour deposition (from memory)", book="Si", compound="a-Si",
          notes=f"{_WIDE}; Si-H bands near 5 um", **_model()),
    _film("Ge-film", "Amotchkina-film", "0.42 um on zinc selenide",
          "electron-beam evaporation at 120 deg C", book="Ge", compound="Ge",
          notes="k of 0.005 from 2 um on is the floor of the paper's model, not a measured band; "
          "its two parts join at 2.6 um with a step of 0.004 in n."),
)  # fmt: skip
