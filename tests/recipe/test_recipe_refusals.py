"""Values and keys that the schema refuses: the key path, what was found, what was expected."""

from __future__ import annotations

import re
from pathlib import Path

import pytest
from recipe_texts import document, front, laser, only, problems, window, witness

from coatings.errors import RecipeError
from coatings.recipe import parse_recipe

REFUSED = {
    # format version, top level
    "version": ("recipe = 2", r"^recipe: is 2; this program reads recipes of format version 1$"),
    "version of text": (
        document().replace("recipe = 1", 'recipe = "1"'),
        r'^recipe: is "1"; expected 1$',
    ),
    "version missing": (
        document().replace("recipe = 1", ""),
        r"^recipe: is missing; expected 1$",
    ),
    "chip missing": ("recipe = 1", r"^chip: is missing; expected a table$"),
    "section is a number": (document().replace("[chip]", "laser = 3\n[chip]"), r"^laser: is 3; e"),
    "typo in a section": (document("[frnt]"), r"^frnt: unknown key; did you mean front\?$"),
    "nothing like it": (document("[qqqqqq]"), r"^qqqqqq: unknown key; expected one of recipe, "),
    "odd key": (document('["a\\nb"]'), r'^"a\\nb": unknown key; '),
    "title of two lines": (
        document().replace("recipe = 1", 'recipe = 1\ntitle = "a\\u001b[2J"'),
        r'^title: is "a\\u001b\[2J"; expected one line of at most 200 characters$',
    ),
    "name that moves the cursor": (
        document(front(palette='["Al2O3", "a\\nb"]')),
        r'^front\.palette: is \["Al2O3", "a\\nb"\]; expected a list of materials',
    ),
    # chip
    "typo in a key": (
        document(lenght_um="1.0"),
        r"^chip\.lenght_um: unknown key; did you mean length_um\?$",
    ),
    "key of another section": (
        document(drive_A="1.0"),
        r"^chip\.drive_A: unknown key here; it belongs to \[laser\]$",
    ),
    "negative length": (
        document(length_um="-4000"),
        r"^chip\.length_um: is -4000; expected a length above 0, in um$",
    ),
    "zero": (document(stripe_um="0"), r"^chip\.stripe_um: is 0; expected a length above 0, in um$"),
    "text for a number": (
        document(length_um='"4000"'),
        r'^chip\.length_um: is "4000"; expected a length above 0, in um$',
    ),
    "true for a number": (document(length_um="true"), r"^chip\.length_um: is true; expected a len"),
    "nan": (document(length_um="nan"), r"^chip\.length_um: is nan; expected a length above 0"),
    "inf": (document(length_um="inf"), r"^chip\.length_um: is inf; expected a length above 0"),
    "minus inf": (document(tilt_deg="-inf"), r"^chip\.tilt_deg: is -inf; expected an angle from 0"),
    "beyond reason": (
        document(length_um="1e9"),
        r"^chip\.length_um: is 1000000000\.0; expected a length above 0 and up to 1e\+06, in um$",
    ),
    "hexadecimal monster": (
        document(length_um="0x" + "f" * 6000),
        r"^chip\.length_um: is a whole number of 24000 bits; expected a length above 0",
    ),
    "a date": (document(length_um="2020-01-01"), r"^chip\.length_um: is 2020-01-01; expected a le"),
    "missing": (
        document(stripe_um=None),
        r"^chip\.stripe_um: is missing; expected a length above 0, in um$",
    ),
    "polarization": (
        document(polarization='"te"'),
        r'^chip\.polarization: is "te"; expected one of "TE", "TM"; did you mean "TE"\?$',
    ),
    "half an emitter": (
        document(emitters="1.5"),
        r"^chip\.emitters: is 1\.5; expected a whole number of 1 or more$",
    ),
    "no emitter": (document(emitters="0"), r"^chip\.emitters: is 0; expected a whole number of 1"),
    "band of three": (
        document(band_nm="[964.0, 976.0, 988.0]"),
        r"^chip\.band_nm: is \[964\.0, 976\.0, 988\.0\]; expected two wavelengths \[low, high\]",
    ),
    "band of text": (document(band_nm='[964.0, "x"]'), r'^chip\.band_nm: is \[964\.0, "x"\]; e'),
    "negative band": (document(band_nm="[-1, 988]"), r"^chip\.band_nm: is \[-1, 988\]; expected"),
    "index of a list": (
        document(index="[3.3]"),
        r"^chip\.index: is \[3\.3\]; expected an index from 1 to 10, or the name of a material$",
    ),
    "index below one": (document(index="0.5"), r"^chip\.index: is 0\.5; expected an index from 1"),
    "guide layer": (
        document('[chip.guide]\nlayers = [{ materiel = "GaAs" }]', index=None),
        r"^chip\.guide\.layers#1\.materiel: unknown key; did you mean material\?$",
    ),
    # laser
    "negative loss": (
        document(laser(internal_loss_per_cm="-0.1")),
        r"^laser\.internal_loss_per_cm: is -0\.1; expected a loss of 0 or more, in 1/cm$",
    ),
    "efficiency in percent": (
        document(laser(injection_efficiency="95")),
        r"^laser\.injection_efficiency: is 95; expected a fraction above 0 and up to 1; "
        r"did you mean 0\.95 \(95 %\)\?$",
    ),
    "t0 zero": (
        document(laser(t0_K="0.0")),
        r"^laser\.t0_K: is 0\.0; expected a temperature above 0, in K$",
    ),
    "gain law": (
        document(laser(gain_law='"log"')),
        r'^laser\.gain_law: is "log"; expected one of "logarithmic", "linear"',
    ),
    "below absolute zero": (
        document(laser(heatsink_C="-300")),
        r"^laser\.heatsink_C: is -300; expected a temperature above -273\.15 and up to 500, in deg",
    ),
    # external, amplifier
    "external": (
        document("[external]\nreflectance = 5\ncoupling = 0.8"),
        r"^external\.reflectance: is 5; .*; did you mean 0\.05 \(5 %\)\?$",
    ),
    "amplifier": (
        document("[amplifier]\ngain_dB = 0.0"),
        r"^amplifier\.gain_dB: is 0\.0; expected a gain above 0 and up to 100, in dB$",
    ),
    # facets
    "outside": (document(front(outside="true")), r"^front\.outside: is true; expected an index"),
    "empty palette": (
        document(front(palette="[]")),
        r"^front\.palette: is \[\]; expected a list of materials such as",
    ),
    "palette of one word": (document(front(palette='"SiO2"')), r'^front\.palette: is "SiO2"; exp'),
    "no layers at most": (
        document(front(max_layers="0")),
        r"^front\.max_layers: is 0; expected a whole number from 1 to 400$",
    ),
    "too many layers": (document(front(max_layers="401")), r"^front\.max_layers: is 401; exp"),
    "negative thickness": (
        document(front(base='[{ material = "Al2O3", nm = -10.0 }]')),
        r"^front\.base#1\.nm: is -10\.0; expected a length above 0, in nm$",
    ),
    "layer of no thickness": (
        document(front(layers='[{ material = "Al2O3", nm = 0 }]')),
        r"^front\.layers#1\.nm: is 0; expected a length above 0, in nm$",
    ),
    "second layer": (
        document(front(cap='[{ material = "Al2O3", nm = 1 }, { material = "Al2O3" }]')),
        r"^front\.cap#2\.nm: is missing; expected a length above 0, in nm$",
    ),
    "layer is a word": (
        document(front(layers='["Al2O3"]')),
        r'^front\.layers#1: is "Al2O3"; expected a table$',
    ),
    "on_witness": (
        document(front(base='[{ material = "Al2O3", nm = 1, on_witness = 1 }]')),
        r"^front\.base#1\.on_witness: is 1; expected true or false$",
    ),
    "layer limits": (
        document(front(layer_nm="15.0")),
        r"^front\.layer_nm: is 15\.0; expected two lengths \[thinnest, thickest\] in nm, or a tab",
    ),
    "layer limits of text": (
        document(front(layer_nm='{ Al2O3 = [15, "x"] }')),
        r'^front\.layer_nm\.Al2O3: is \[15, "x"\]; expected two lengths \[thinnest, thickest\], in',
    ),
    "negative layer limit": (document(front(layer_nm="[-1, 5]")), r"^front\.layer_nm: is \[-1, 5"),
    "total": (
        document(front(total_nm="0")),
        r"^front\.total_nm: is 0; expected a length above 0, in nm$",
    ),
    # windows
    "three": (
        document(front(window(reflectance="3"))),
        r'^front\.windows#1\.reflectance: is 3; expected a fraction from 0 to 1, or "trade"; '
        r"did you mean 0\.03 \(3 %\)\?$",
    ),
    "second window": (
        document(front(window(), only(at_most="10"))),
        r"^front\.windows#2\.at_most: is 10; expected a fraction from 0 to 1; "
        r"did you mean 0\.1 \(10 %\)\?$",
    ),
    "at_least in percent": (
        document(front(only(at_least="97.5"))),
        r"^front\.windows#1\.at_least: is 97\.5; .*did you mean 0\.975 \(97\.5 %\)\?$",
    ),
    "negative target": (
        document(front(only(at_most="-0.1"))),
        r"^front\.windows#1\.at_most: is -0\.1; expected a fraction from 0 to 1$",
    ),
    "target far beyond": (
        document(front(only(at_most="300"))),
        r"^front\.windows#1\.at_most: is 300; expected a fraction from 0 to 1$",
    ),
    "between in percent": (
        document(front(only(between="[4, 6]"))),
        r"^front\.windows#1\.between: is \[4, 6\]; expected two fractions \[low, high\] from 0 to 1"
        r"; did you mean \[0\.04, 0\.06\] \(4 to 6 %\)\?$",
    ),
    "tolerance in percent": (
        document(front(window(tolerance="1"))),
        r"^front\.windows#1\.tolerance: is 1; expected a fraction above 0 and below 1; "
        r"did you mean 0\.01 \(1 %\)\?$",
    ),
    "no tolerance": (document(front(window(tolerance="0.0"))), r"tolerance: is 0\.0; expected a f"),
    "another word": (
        document(front(window(reflectance='"traed"'))),
        r'^front\.windows#1\.reflectance: is "traed"; expected a fraction from 0 to 1, or "trade"$',
    ),
    "absorption": (
        document(front(only(absorption_at_most="2"))),
        r"^front\.windows#1\.absorption_at_most: is 2; .*did you mean 0\.02 \(2 %\)\?$",
    ),
    "window polarization": (
        document(front(window(polarization='"s"'))),
        r'^front\.windows#1\.polarization: is "s"; expected one of "TE", "TM", "both"$',
    ),
    "window of": (document(front(window(of='"film"'))), r'^front\.windows#1\.of: is "film"; exp'),
    "sister index": (document(front(window(index="0"))), r"^front\.windows#1\.index: is 0; expect"),
    "single brackets": (
        document("[front]\n[front.windows]\nat_most = 0.1"),
        r"^front\.windows: is a table; expected at most 100 tables in double brackets, such as",
    ),
    # process
    "method": (
        document('[process]\nmethod = "ebeam"'),
        r'^process\.method: is "ebeam"; expected one of "e-beam", .*; did you mean "e-beam"\?$',
    ),
    "negative error": (
        document("[process]\nrun_percent = -1"),
        r"^process\.run_percent: is -1; expected a percentage from 0 to 50, in percent$",
    ),
    "index error": (
        document("[process]\nindex = { Al2O3 = -0.01 }"),
        r"^process\.index\.Al2O3: is -0\.01; expected a number from 0 to 1$",
    ),
    "index error for all": (
        document("[process]\nindex = 0.01"),
        r"^process\.index: is 0\.01; expected a table by material such as \{ Al2O3 = 0\.01 \}$",
    ),
    "rate": (document("[process]\nrate_nm_per_s = { Al2O3 = 0 }"), r"Al2O3: is 0; expected a rate"),
    "decimals": (
        document("[process]\ndecimals_nm = 9"),
        r"^process\.decimals_nm: is 9; expected a whole number from 0 to 6$",
    ),
    "own process": (
        document("[front.process]\nrun_procent = 1.0"),
        r"^front\.process\.run_procent: unknown key; did you mean run_percent\?$",
    ),
    # witness
    "witness facet": (
        document(witness(facet='"back"')),
        r'^witness#1\.facet: is "back"; expected one of "front", "rear"$',
    ),
    "witness angle": (
        document(witness(), witness(name='"W2"', angle_deg="90")),
        r"^witness#2\.angle_deg: is 90; expected an angle from 0 to below 90, in degrees$",
    ),
    "witness name": (
        document(witness(name='"a=b"')),
        r'^witness#1\.name: is "a=b"; expected a name of 1 to 40 characters without',
    ),
    "witness in single brackets": (
        document("[witness]\nname = 'W1'"),
        r"^witness: is a table; expected at most 50 tables in double brackets, \[\[witness\]\]$",
    ),
    # materials
    "negative k": (
        document("[materials.X]\nindex = 2.1\nk = -0.1"),
        r"^materials\.X\.k: is -0\.1; expected an extinction coefficient from 0 to 20$",
    ),
    "no coefficients": (
        document("[materials.X]\ncauchy = []"),
        r"^materials\.X\.cauchy: is \[\]; expected a list of 1 to 6 numbers",
    ),
    "mixture of three": (
        document('[materials.X]\nmixture = ["SiO2", "TiO2", "Ta2O5"]\nfraction = 0.1'),
        r"^materials\.X\.mixture: is \[.*\]; expected the names of two materials$",
    ),
    "fraction in percent": (
        document('[materials.X]\nmixture = ["SiO2", "TiO2"]\nfraction = 30'),
        r"^materials\.X\.fraction: is 30; .*did you mean 0\.3 \(30 %\)\?$",
    ),
    "material is a number": (
        document("[materials]\nX = 2.1"),
        r"^materials\.X: is 2\.1; expected a table$",
    ),
}


@pytest.mark.parametrize("case", REFUSED, ids=str)
def test_refused_with_key_path(case: str) -> None:
    text, expected = REFUSED[case]
    lines = problems(text)
    assert len(lines) == 1, lines
    assert re.search(expected, lines[0]), lines[0]


def test_all_problems_of_a_file_at_once() -> None:
    text = document(
        front(
            window(reflectance="3"),
            only(at_most="0.1", at_least="0.01"),
            first='"SiO2"',
            layers='[{ material = "Al2O3", nn = 3.0 }]',
        ),
        laser(t0_K="0"),
        '[rear]\npalette = ["Ta205"]\nmax_layers = 2\n[[rear.windows]]\nat_least = 0.9',
        length_um="-1",
        band_nm="[988.0, 964.0]",
    )
    paths = [line.split(": ")[0] for line in problems(text)]
    assert sorted(paths) == sorted(
        [
            "chip.length_um",
            "laser.t0_K",
            "front.layers#1.nm",
            "front.layers#1.nn",
            "front.windows#1.reflectance",
            "front.windows#2",
            "front.first",
            "rear.palette",
        ]
        # [chip] can't be read without its length, so its band waits for the next run.
    )


def test_conflicts_are_seen_beside_a_faulty_optional_key() -> None:
    lines = problems(document(band_nm="[988.0, 964.0]", emitters="-1"))
    assert [line.split(": ")[0] for line in lines] == ["chip.emitters", "chip.band_nm"]


def test_a_fault_is_not_blamed_twice() -> None:
    lines = problems(document(front(only(at_mots="0.1"))))
    assert lines == ["front.windows#1.at_mots: unknown key; did you mean at_most?"]


def test_error_holds_every_problem_with_the_file() -> None:
    with pytest.raises(RecipeError, match="length_um") as caught:
        parse_recipe(document(length_um="-1", stripe_um="-1"), path=Path("recipes/x.toml"))
    assert [problem.where for problem in caught.value.problems] == [
        "recipes/x.toml: chip.length_um",
        "recipes/x.toml: chip.stripe_um",
    ]
