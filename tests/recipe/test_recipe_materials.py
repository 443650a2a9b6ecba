"""Names of materials in a recipe: the library's, the recipe's own, and what their data reach."""

from __future__ import annotations

import os
import re
from pathlib import Path

import numpy as np
import pytest
from recipe_texts import document, front, only, problems, read, window, witness

import materials
from coatings.errors import InputError

TABLE = "wavelength_nm,n,k\n900,2.10,0\n976,2.08,0\n1000,2.07,1e-4\n"
USES_OWN = front(palette='["Al2O3", "own"]')


def own(keys: str, name: str = "own") -> str:
    return f"[materials.{name}]\n{keys}"


UNKNOWN = {
    "palette": (document(front(palette='["Al2O3", "Ta205"]')), r"^front\.palette: no material 'T"),
    "outside": (document(front(outside='"aer"')), r"^front\.outside: no material 'aer': did you m"),
    "chip": (document(index='"GaAss"'), r"^chip\.index: no material 'GaAss': did you mean 'GaAs'"),
    "layer": (
        document('[front]\nlayers = [{ material = "SiO3", nm = 1 }]'),
        r"^front\.layers#1\.material: no material 'SiO3': did you mean 'SiO",
    ),
    "base": (
        document('[rear]\nbase = [{ material = "qq", nm = 1 }]'),
        r"^rear\.base#1\.material: no material 'qq'",
    ),
    "witness": (
        document(witness(substrate='"borosilicate"')),
        r"^witness#1\.substrate: no material 'borosilicate': did you mean 'borosilicate-crown'",
    ),
    "process": (
        document("[process]\nindex = { Al203 = 0.01 }"),
        r"^process\.index\.Al203: no material 'Al203': did you mean 'Al2O3",
    ),
    "guide": (
        document('[chip.guide]\nlayers = [{material = "GaAss"}, {index = 3, um = 1}, {index = 3}]',
                 index=None),
        r"^chip\.guide\.layers#1\.material: no material 'GaAss'",
    ),
    "composition": (document(index='"AlGaAs:1.30"'), r"^chip\.index: .*1\.3"),
    "composition of a word": (document(index='"AlGaAs:much"'), r"^chip\.index: .*AlGaAs"),
    "near to the recipe's own": (
        document(own("index = 2.1", "lot-17"), front(palette='["Al2O3", "lot17"]')),
        r'^front\.palette: no material "lot17"; did you mean "lot-17"\?$',
    ),
}  # fmt: skip


@pytest.mark.parametrize("case", UNKNOWN, ids=str)
def test_unknown_material_with_the_nearest(case: str) -> None:
    text, expected = UNKNOWN[case]
    lines = problems(text)
    assert len(lines) == 1, lines
    assert re.search(expected, lines[0]), lines[0]


def test_windows_outside_a_material_s_range() -> None:
    low, high = materials.load("Ta2O5").range_nm
    beyond = only(at_most="0.9", band_nm=f"[900, {high + 1}]")
    lines = problems(document(front(window(), beyond, palette='["Ta2O5"]', max_layers="1")))
    assert lines == [
        f"front.windows#2.band_nm: reaches over 900 to {high + 1:g} nm, but Ta2O5 (front.palette) "
        f"is known over {low:g} to {high:g} nm"
    ]


def test_band_outside_the_chip_material_s_range() -> None:
    lines = problems(document(index='"AlGaAs:0.30"', wavelength_nm="500", band_nm="[490, 510]"))
    assert len(lines) == 1
    assert re.search(
        r"^chip\.band_nm: reaches over 490 to 510 nm, but AlGaAs:0\.30 \(chip\.index\) is", lines[0]
    )


def test_material_used_twice_is_blamed_once() -> None:
    text = document(front(cap='[{ material = "Ta2O5", nm = 1 }]'), band_nm="[964, 1900]")
    assert [line.split("(")[1][:13] for line in problems(text)] == ["front.palette"]
    lines = problems(document(front(), wavelength_nm="200", band_nm="[964, 988]"))
    assert "chip.wavelength_nm: is 200, but Ta2O5 (front.palette) is known over" in lines[-1]


def test_own_material_goes_before_the_library() -> None:
    recipe = read(front(), own("index = 2.5\nk = 0.01", "Ta2O5"))
    assert recipe.material("Ta2O5").nk(976.0) == 2.5 + 0.01j
    assert recipe.material_notes == (
        "Ta2O5: the recipe's own (index 2.5) instead of the library's",
    )


def test_scale_of_the_library_s_material_under_its_own_name() -> None:
    recipe = read(front(), own('of = "Ta2O5"\nscale = 0.985', "Ta2O5"))
    plain = materials.load("Ta2O5").nk(976.0)
    assert recipe.material("Ta2O5").nk(976.0).real == pytest.approx(0.985 * plain.real, rel=1e-14)


def test_formula() -> None:
    recipe = read(USES_OWN, own("cauchy = [2.05, 0.018]\nk = 0.001"))
    assert recipe.material("own").nk(1000.0) == pytest.approx(2.068 + 0.001j, rel=1e-14)
    assert recipe.material_notes == ("own: the recipe's own (dispersion formula)",)


def test_mixture_is_made_of_the_recipe_s_own() -> None:
    text = own('mixture = ["SiO2", "Ta2O5"]\nfraction = 1.0') + "\n" + own("index = 2.2", "Ta2O5")
    recipe = read(USES_OWN, text)
    assert recipe.material("own").nk(976.0) == pytest.approx(2.2, rel=1e-12)
    assert recipe.material_notes[0].startswith("own: the recipe's own (SiO2 with 1 of Ta2O5, ")


def test_temperature_where_it_is_known() -> None:
    recipe = read(own('of = "GaAs"\ntemperature_C = 60'), index='"own"', wavelength_nm="980",
                  band_nm="[975, 985]")  # fmt: skip
    assert recipe.chip_index(980.0) > materials.load("GaAs").nk(980.0).real
    assert "GaAs, at 60 C" in recipe.material_notes[0]


def test_table_beside_the_recipe(tmp_path: Path) -> None:
    (tmp_path / "lot.csv").write_text(TABLE)
    recipe = read(USES_OWN, own('table = "lot.csv"'), folder=tmp_path)
    assert recipe.material("own").nk(np.array([900.0, 1000.0])) == pytest.approx(
        [2.10, 2.07 + 1e-4j]
    )
    assert recipe.table_paths == (tmp_path / "lot.csv",)
    assert recipe.material_notes == ("own: the recipe's own (table lot.csv, 900-1000 nm)",)


def test_table_in_a_folder_below(tmp_path: Path) -> None:
    (tmp_path / "lots").mkdir()
    (tmp_path / "lots" / "lot.csv").write_text(TABLE)
    assert read(USES_OWN, own('table = "lots/lot.csv"'), folder=tmp_path).material("own")


def test_link_that_stays_in_the_folder(tmp_path: Path) -> None:
    (tmp_path / "lot.csv").write_text(TABLE)
    (tmp_path / "link.csv").symlink_to("lot.csv")
    assert read(USES_OWN, own('table = "link.csv"'), folder=tmp_path).material("own")


TABLE_PATHS = {
    "absolute": (
        "'/etc/hostname'",
        r'is "/etc/hostname", an absolute path; expected a file in the',
    ),
    "drive": ("'C:\\lot.csv'", r'is "C:.*lot\.csv", an absolute path'),
    "share": ("'\\\\host\\lot.csv'", "an absolute path"),
    "climbing": ("'../lot.csv'", r'is "\.\./lot\.csv", which leaves the recipe\'s folder'),
    "climbing back": ("'lots/../../lot.csv'", "which leaves the recipe's folder"),
    "climbing backslash": ("'..\\lot.csv'", "which leaves the recipe's folder"),
    "link outside": ("'outside.csv'", "a link that leaves the recipe's folder"),
    "linked folder": ("'away/lot.csv'", "a link that leaves the recipe's folder"),
    "missing": ("'gone.csv'", '"gone.csv" no such file'),
    "folder": ("'lots'", '"lots" is a folder; expected a file'),
    "pipe": ("'pipe.csv'", '"pipe.csv" is not a regular file'),
    "control": ('"a\\u0000b"', r'is "a\\u0000b"; expected a file name without control'),
    "home": ("'~/lot.csv'", "no such file"),
    "circle": ("'circle.csv'", "circle.csv"),
}


@pytest.mark.parametrize("case", TABLE_PATHS, ids=str)
def test_table_stays_in_the_recipe_s_folder(tmp_path: Path, case: str) -> None:
    home = tmp_path / "home"
    (home / "lots").mkdir(parents=True)
    away = tmp_path / "away"
    away.mkdir()
    for path in (away / "lot.csv", tmp_path / "lot.csv"):
        path.write_text(TABLE)
    (home / "outside.csv").symlink_to(away / "lot.csv")
    (home / "away").symlink_to(away)
    (home / "circle.csv").symlink_to("circle.csv")
    os.mkfifo(home / "pipe.csv")
    name, expected = TABLE_PATHS[case]
    lines = problems(document(USES_OWN, own(f"table = {name}")), home)
    assert len(lines) == 1, lines
    assert re.search(r"^materials\.own\.table: .*" + expected, lines[0]), lines[0]


TABLES = {
    "empty": b"",
    "text": b"wavelength_nm,n,k\n900,two,0\n1000,2.0,0\n",
    "holes": b"wavelength_nm,n,k\n900,,0\n1000,2.0,0\n",
    "unsorted": b"wavelength_nm,n,k\n1000,2.1,0\n900,2.0,0\n",
    "repeated": b"wavelength_nm,n,k\n900,2.1,0\n900,2.0,0\n1000,2.0,0\n",
    "negative k": b"wavelength_nm,n,k\n900,2.1,-0.1\n1000,2.0,0\n",
    "binary": bytes(range(256)),
    "one row": b"wavelength_nm,n,k\n900,2.1,0\n",
}


@pytest.mark.parametrize("case", TABLES, ids=str)
def test_table_that_can_t_be_used(tmp_path: Path, case: str) -> None:
    (tmp_path / "lot.csv").write_bytes(TABLES[case])
    lines = problems(document(USES_OWN, own('table = "lot.csv"')), tmp_path)
    assert len(lines) == 1, lines
    assert re.search(r'^materials\.own\.table: "lot\.csv"', lines[0]), lines[0]


def test_table_too_large(tmp_path: Path) -> None:
    with (tmp_path / "lot.csv").open("wb") as file:
        file.truncate(10_000_001)
    lines = problems(document(USES_OWN, own('table = "lot.csv"')), tmp_path)
    assert lines == ['materials.own.table: "lot.csv" is larger than 10 MB']


def test_table_that_does_not_reach(tmp_path: Path) -> None:
    (tmp_path / "lot.csv").write_text(TABLE)
    text = document(USES_OWN, own('table = "lot.csv"'), band_nm="[964.0, 1001.0]")
    assert problems(text, tmp_path) == [
        "chip.band_nm: reaches over 964 to 1001 nm, but own (front.palette) is known over 900 to "
        "1000 nm"
    ]


CHAINS = {
    "unknown base": (own('of = "Ta205"\nscale = 0.9'), r"^materials\.own\.of: no material 'Ta205'"),
    "itself": (own('of = "own"\nscale = 0.9'), r"^materials\.own\.of: no material 'own'"),
    "circle of two": (
        own('of = "b"\nscale = 0.9') + "\n" + own('of = "own"\nscale = 0.9', "b"),
        r"^materials\.(own|b): refers to itself: ",
    ),
    "mixture with itself": (
        own('mixture = ["b", "SiO2"]\nfraction = 0.5')
        + "\n"
        + own('mixture = ["SiO2", "own"]\nfraction = 0.5', "b"),
        r"^materials\.(own|b): refers to itself: ",
    ),
    "unknown half": (
        own('mixture = ["SiO2", "Ta205"]\nfraction = 0.5'),
        r"^materials\.own\.mixture: no material 'Ta205'",
    ),
    "temperature unknown": (
        own('of = "Ta2O5"\ntemperature_C = 60'),
        r"^materials\.own\.temperature_C: .*dn/dT",
    ),
    "formula of zero": (
        own("cauchy = [0.5, -0.6]"),
        r"^materials\.own\.cauchy: gives an index of 0 or less within 964 to 988 nm; check",
    ),
    "formula below zero": (own("cauchy = [-2.0]"), r"^materials\.own\.cauchy: "),
}


@pytest.mark.parametrize("case", CHAINS, ids=str)
def test_own_material_that_can_t_be_made(case: str) -> None:
    text, expected = CHAINS[case]
    lines = problems(document(USES_OWN, text))
    assert lines
    assert all(re.search(expected, line) for line in lines), lines


def chain(length: int) -> str:
    links = [own(f'of = "m{place + 1}"\nscale = 1.0', f"m{place}") for place in range(length)]
    return "\n".join([*links, own("index = 2.1", f"m{length}")])


def test_long_chain_of_references() -> None:
    assert read(chain(7)).material("m0").nk(976.0) == 2.1
    lines = problems(document(chain(2000)))
    assert all("is made through more than 8 others" in line for line in lines)


def test_faulty_own_material_is_blamed_once() -> None:
    assert problems(document(USES_OWN, own('index = "2.1"'))) == [
        'materials.own.index: is "2.1"; expected an index above 0 and up to 10'
    ]
    lines = problems(document(USES_OWN, own('of = "bad"\nscale = 1'), own("k = 1", "bad")))
    assert [line.split(":")[0] for line in lines] == ["materials.bad"]


def test_material_asked_for_later() -> None:
    recipe = read(own("index = 2.1"))
    assert recipe.material("SiO2").name == "SiO2"
    with pytest.raises(InputError, match="no material 'Ta205'"):
        recipe.material("Ta205")
