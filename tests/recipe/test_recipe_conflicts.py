"""Keys that contradict each other, and limits that no stack can meet."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from recipe_texts import document, front, laser, only, problems, read, window, witness

from coatings.recipe import parse_recipe

GUIDE = "[chip.guide]\nlayers = [{ index = 3.2 }, { index = 3.4, um = 0.5 }, { index = 3.2 }]"


def guide(*layers: str) -> str:
    return f"[chip.guide]\nlayers = [{', '.join(layers)}]"


CONTRADICTIONS = {
    # chip
    "reversed band": (
        document(band_nm="[988.0, 964.0]"),
        r"^chip\.band_nm: is \[988, 964\], reversed; expected \[low, high\], in nm$",
    ),
    "wavelength outside the band": (
        document(wavelength_nm="990.0"),
        r"^chip\.wavelength_nm: is 990, outside band_nm \[964, 988\]; expected a wavelength inside",
    ),
    "neither index nor guide": (
        document(index=None),
        r"^chip\.index: is missing; expected index or \[chip\.guide\]$",
    ),
    "index and guide": (
        document(GUIDE),
        r"^chip\.index: stands beside \[chip\.guide\]; expected one of the two, never both$",
    ),
    "tilt without width": (
        document(tilt_deg="7.0"),
        r"^chip\.lateral_um: is missing; a tilt_deg above 0 needs it$",
    ),
    "guide of two": (
        document(guide("{ index = 3.2 }", "{ index = 3.4 }"), index=None),
        r"^chip\.guide\.layers: has 2 layers; expected at least 3, the outer two being half-spac",
    ),
    "outer layer with thickness": (
        document(
            guide("{ index = 3, um = 1 }", "{ index = 3, um = 1 }", "{ index = 3 }"), index=None
        ),
        r"^chip\.guide\.layers#1\.um: is 1; the outer layers are half-spaces, leave um out$",
    ),
    "inner layer without": (
        document(guide("{ index = 3 }", "{ index = 3 }", "{ index = 3 }"), index=None),
        r"^chip\.guide\.layers#2\.um: is missing; every inner layer needs a thickness, in um$",
    ),
    "guide layer of nothing": (
        document(guide("{}", "{ index = 3, um = 1 }", "{ index = 3 }"), index=None),
        r"^chip\.guide\.layers#1: gives neither of material and index; expected one of them$",
    ),
    "guide layer of both": (
        document(
            guide(
                "{ index = 3, material = 'AlGaAs:0.30' }", "{ index = 3, um = 1 }", "{ index = 3 }"
            ),
            index=None,
        ),
        r"^chip\.guide\.layers#1: gives both of material and index; expected one of them$",
    ),
    # laser
    "gain peak without width": (
        document(laser(gain_peak_nm="976.0")),
        r"^laser\.gain_width_nm: is missing; gain_peak_nm needs it$",
    ),
    "gain width without peak": (
        document(laser(gain_width_nm="40.0")),
        r"^laser\.gain_peak_nm: is missing; gain_width_nm needs it$",
    ),
    "heat without voltage": (
        document(laser(junction_V=None, thermal_K_per_W="2.0")),
        r"^laser\.junction_V: is missing; needed by thermal_K_per_W$",
    ),
    "load without height": (
        document(laser(facet_limit_MW_per_cm2="20.0")),
        r"^laser\.mode_height_um: is missing; facet_limit_MW_per_cm2 needs it or \[chip\.guide\]$",
    ),
    # external
    "external band": (
        document("[external]\nreflectance = 0.05\ncoupling = 0.8\nband_nm = [977.0, 975.0]"),
        r"^external\.band_nm: is \[977, 975\], reversed",
    ),
    "external wavelength": (
        document(
            "[external]\nreflectance = 0.05\ncoupling = 0.8\nband_nm = [975.0, 977.0]\n"
            "wavelength_nm = 980.0"
        ),
        r"^external\.wavelength_nm: is 980, outside band_nm \[975, 977\]",
    ),
    # windows
    "no target": (
        document(front(only(band_nm="[964.0, 988.0]"))),
        r"^front\.windows#1: has no target; expected one of reflectance \(with tolerance\), betw",
    ),
    "two targets": (
        document(front(window(at_most="0.1"))),
        r"^front\.windows#1: has reflectance and at_most; expected one of reflectance",
    ),
    "at_most and at_least": (
        document(front(only(at_most="0.1", at_least="0.05"))),
        r"^front\.windows#1: has at_most and at_least; expected one of",
    ),
    "no tolerance": (
        document(front(window(tolerance=None))),
        r"^front\.windows#1\.tolerance: is missing; reflectance needs it \(or use between, at_most",
    ),
    "tolerance alone": (
        document(front(only(at_most="0.1", tolerance="0.01"))),
        r"^front\.windows#1\.tolerance: stands without reflectance; leave it out or give reflect",
    ),
    "between reversed": (
        document(front(only(between="[0.06, 0.04]"))),
        r"^front\.windows#1\.between: is \[0\.06, 0\.04\]; expected \[low, high\] with low below",
    ),
    "between nothing": (
        document(front(only(between="[0.05, 0.05]"))),
        r"^front\.windows#1\.between: is \[0\.05, 0\.05\]; expected",
    ),
    "window band reversed": (
        document(front(window(band_nm="[1070.0, 1060.0]"))),
        r"^front\.windows#1\.band_nm: is \[1070, 1060\], reversed; expected \[low, high\], in nm$",
    ),
    "at_least nothing": (
        document(front(only(at_least="0.0"))),
        r"^front\.windows#1\.at_least: lets every reflectance pass; tighten it or leave the window",
    ),
    "reflectance of anything": (
        document(front(window(reflectance="0.5", tolerance="0.5"))),
        r"^front\.windows#1\.reflectance: lets every reflectance pass",
    ),
    "trade without laser": (
        document(front(only(reflectance='"trade"'))),
        r'^front\.windows#1\.reflectance: is "trade", the best value for the operating current; it '
        r"needs laser\.drive_A$",
    ),
    "trade without current": (
        document(laser(drive_A=None), front(only(reflectance='"trade"'))),
        r"it needs laser\.drive_A$",
    ),
    # search
    "palette without max_layers": (
        document(front(max_layers=None)),
        r"^front\.max_layers: is missing; a palette needs it, from 1 to 400$",
    ),
    "limits without palette": (
        document(front(palette=None, total_nm="500.0")),
        r"^front\.palette: is missing; max_layers and total_nm would limit a search in it$",
    ),
    "material twice": (
        document(front(palette='["Al2O3", "Ta2O5", "Al2O3"]')),
        r"^front\.palette: names Al2O3 twice; expected every material once$",
    ),
    "first": (
        document(front(first='"SiO2"')),
        r'^front\.first: is "SiO2", which is not in the palette; expected one of Al2O3, Ta2O5$',
    ),
    "last": (document(front(last='"SiO2"')), r'^front\.last: is "SiO2", which is not in the pal'),
    "two ends in one layer": (
        document(front(first='"Al2O3"', last='"Ta2O5"', max_layers="1")),
        r"^front\.max_layers: is 1, but first Al2O3 and last Ta2O5 need 2 layers$",
    ),
    "limits crossed": (
        document(front(layer_nm="[400.0, 15.0]")),
        r"^front\.layer_nm: is \[400, 15\]; expected \[thinnest, thickest\] in nm, the thickest",
    ),
    "limits crossed for one": (
        document(front(layer_nm="{ Al2O3 = [400.0, 15.0] }")),
        r"^front\.layer_nm\.Al2O3: is \[400, 15\]; expected",
    ),
    "limits of nothing": (
        document(front(layer_nm="[0.0, 0.0]")),
        r"^front\.layer_nm: is \[0, 0\]; expected",
    ),
    "limits of another material": (
        document(front(layer_nm="{ SiO2 = [15.0, 400.0] }")),
        r"^front\.layer_nm\.SiO2: limits a material that is not in the palette; expected one of",
    ),
    "total below the thinnest": (
        document(front(layer_nm="{ Al2O3 = [15.0, 400.0], Ta2O5 = [20, 300] }", total_nm="10.0")),
        r"^front\.total_nm: is 10, below 15 nm, the thinnest stack that first, last and layer_nm",
    ),
    "total below two ends": (
        document(front(layer_nm="[15, 400]", first='"Al2O3"', last='"Ta2O5"', total_nm="29.0")),
        r"^front\.total_nm: is 29, below 30 nm",
    ),
    # process
    "stress limit without stress": (
        document(front(), "[process]\nstress_max_N_per_m = 50.0"),
        r"^process\.stress_MPa: says nothing of Al2O3, Ta2O5; stress_max_N_per_m needs it for e",
    ),
    "own stress limit": (
        document(
            front(),
            "[process]\nstress_MPa = { Al2O3 = -100 }\n[front.process]\nstress_max_N_per_m = 50.0",
        ),
        r"^front\.process\.stress_MPa: says nothing of Ta2O5; stress_max_N_per_m needs it for e",
    ),
    # witness
    "witness twice": (
        document(witness(), witness()),
        r'^witness#2\.name: is "W1" again; expected another name$',
    ),
    "light through ground glass": (
        document(witness(quantity='"T"')),
        r'^witness#1\.quantity: is "T", but a ground back scatters what passes; expected "R", or b',
    ),
    # materials
    "material of nothing": (
        document("[materials.X]"),
        r"^materials\.X: says nothing of what it is; expected one of table, index, cauchy, of",
    ),
    "material of two kinds": (
        document("[materials.X]\nindex = 2.1\ncauchy = [2.1]"),
        r"^materials\.X: gives index and cauchy; expected one of table",
    ),
    "k in a table": (
        document('[materials.X]\ntable = "x.csv"\nk = 0.1'),
        r"^materials\.X\.k: does not go with table; it belongs to index or cauchy$",
    ),
    "scale alone": (
        document("[materials.X]\nindex = 2.1\nscale = 0.9"),
        r"^materials\.X\.scale: does not go with index; it belongs to of$",
    ),
    "of alone": (
        document('[materials.X]\nof = "Ta2O5"'),
        r"^materials\.X\.scale: is missing; of needs scale or temperature_C$",
    ),
    "mixture without share": (
        document('[materials.X]\nmixture = ["SiO2", "TiO2"]'),
        r"^materials\.X\.fraction: is missing; mixture needs the share of its second material$",
    ),
}


def test_a_palette_without_windows_is_noted() -> None:
    recipe = parse_recipe(document('[front]\npalette = ["Al2O3", "Ta2O5"]'), path=Path("x.toml"))
    assert not recipe.front.is_searchable
    assert recipe.notes == (
        "front: a palette without windows: no stack is searched, the facet counts as it is",
    )


@pytest.mark.parametrize("case", CONTRADICTIONS, ids=str)
def test_contradiction_with_key_path(case: str) -> None:
    text, expected = CONTRADICTIONS[case]
    lines = problems(text)
    assert len(lines) == 1, lines
    assert re.search(expected, lines[0]), lines[0]


SOUND = {
    "one wavelength": document(band_nm="[976.0, 976.0]"),
    "window of one wavelength": document(front(window(band_nm="[1064.0, 1064.0]"))),
    "absorption alone": document(front(only(absorption_at_most="0.0"))),
    "no reflection at all": document(front(only(at_most="0.0"))),
    "all of it": document(front(only(at_least="1.0"))),
    "guide for the load": document(GUIDE, laser(facet_limit_MW_per_cm2="20"), index=None),
    "layers without search": document('[front]\nlayers = [{ material = "SiO2", nm = 100 }]'),
    "palette for given layers": document(
        '[front]\npalette = ["SiO2"]\nlayers = [{ material = "SiO2", nm = 100 }]'
    ),
    "equal neighbours": document(
        '[front]\nlayers = [{ material = "SiO2", nm = 1 }, { material = "SiO2", nm = 2 }]'
    ),
    "window of a bare facet": document("[front]\n[[front.windows]]\nat_most = 0.4"),
    "total just enough": document(front(layer_nm="[15, 400]", total_nm="15.0")),
    "one thickness": document(front(layer_nm="[50, 50]")),
    "ends alike": document(front(first='"Al2O3"', last='"Al2O3"', max_layers="1")),
    "stress limit on bare facets": document("[process]\nstress_max_N_per_m = 50.0"),
    "light through a polished plate": document(witness(quantity='"T"', back='"polished"')),
}


@pytest.mark.parametrize("case", SOUND, ids=str)
def test_sound(case: str) -> None:
    assert parse_recipe(SOUND[case], path=Path("x.toml")).text == SOUND[case]


def test_one_material_is_a_note_and_no_fault() -> None:
    recipe = read(front(palette='["Al2O3"]', max_layers="3"))
    assert len(recipe.notes) == 1
    assert re.search(r"^front\.max_layers: with one material .* one layer at most", recipe.notes[0])
    assert read(front(palette='["Al2O3"]', max_layers="1")).notes == ()
