"""What the loader refuses, with the line at fault."""

from __future__ import annotations

import re

import pytest

import materials
from materials import library
from materials.tables import from_entry, read_entry, split_head

HEAD = {
    "name": "X", "use": "film", "kind": "table", "compound": "X", "common": "x",
    "sample": "film, 100 nm",
    "process": "sputtering", "temperature_C": "20", "range_nm": "400 600", "k_status": "measured",
    "accuracy": "not stated", "source": "A. Author. J. Test 1, 1 (2000)", "doi": "not stated",
    "year": "2000",
}  # fmt: skip
ROWS = ["wavelength_nm,n,k", "400,2.0,0.1", "500,1.9,0.05", "600,1.8,0"]


def loaded(rows=ROWS, **changes):
    head = {**HEAD, **changes}
    return from_entry(head, list(enumerate(rows, start=1)), "x.csv")


def refused(what: str):
    return pytest.raises(materials.TableError, match=re.escape(what))


def test_a_complete_table_loads():
    assert loaded().nk(500.0) == 1.9 + 0.05j


@pytest.mark.parametrize("key", HEAD)
def test_incomplete_metadata(key):
    with refused(f"the head lacks '{key}'"):
        loaded(**{key: ""})


@pytest.mark.parametrize(
    ("changes", "what"),
    [
        ({"use": "paint"}, "use is 'paint'; it must be one of semiconductor, film"),
        ({"k_status": "maybe"}, "k_status is 'maybe'"),
        ({"kind": "guess"}, "kind is 'guess'"),
        ({"temperature_C": "warm"}, "temperature_C is 'warm'; it must be a number"),
        ({"year": "long ago"}, "year is 'long ago'; it must be a number"),
        ({"range_nm": "400"}, "it must be two numbers, low and high"),
        ({"range_nm": "600 400"}, "the first must be below the second"),
        ({"range_nm": "400 700"}, "differs from the first and last wavelength"),
        ({"kind": "formula"}, "no formula ''; there are sellmeier"),
        ({"kind": "formula", "formula": "magic"}, "no formula 'magic'"),
        ({"kind": "formula", "formula": "cauchy", "coefficients": "a"}, "are not numbers"),
        ({"kind": "formula", "formula": "cauchy", "coefficients": "1; 2"}, "must read 'c; B C"),
        ({"kind": "formula", "formula": "cauchy", "coefficients": "1 2"}, "must read 'c; B C"),
    ],
)
def test_wrong_metadata(changes, what):
    with refused(what):
        loaded(**changes)


@pytest.mark.parametrize(
    ("rows", "line", "what"),
    [
        (["nm,n,k", "400,2,0"], 1, "the first column must be wavelength_nm"),
        (["wavelength_nm,k", "400,0", "600,0"], None, "the table has no column n"),
        ([ROWS[0], ROWS[1]], None, "fewer than two rows"),
        ([ROWS[0]], None, "fewer than two rows"),
        ([*ROWS[:2], "500,1.9", ROWS[3]], 3, "2 cells instead of 3"),
        ([*ROWS[:2], "500,high,0", ROWS[3]], 3, "is not a row of numbers"),
        ([*ROWS[:2], "500,nan,0", ROWS[3]], 3, "n is not a finite number"),
        ([*ROWS[:2], "500,inf,0", ROWS[3]], 3, "n is not a finite number"),
        ([*ROWS[:2], "400,1.9,0", ROWS[3]], 3, "is repeated"),
        ([ROWS[0], ROWS[2], ROWS[1], ROWS[3]], 3, "sort the table, rising"),
        ([ROWS[0], "-400,2,0", *ROWS[2:]], 2, "the wavelength must be positive"),
        ([*ROWS[:2], "500,-1.9,0", ROWS[3]], 3, "n must be positive"),
        ([*ROWS[:2], "500,1.9,-0.1", ROWS[3]], 3, "k is below zero"),
    ],
)
def test_wrong_rows(rows, line, what):
    with refused(what) as caught:
        loaded(rows)
    assert caught.value.line == line
    assert caught.value.where == "x.csv"
    assert str(caught.value).startswith("x.csv, line" if line else "x.csv:")


def test_head_line_without_colon():
    with refused("must read '# key: value'"):
        split_head("# name: X\n# nonsense\n", "x.csv")


def test_file_of_the_folder(tmp_path):
    path = tmp_path / "x.csv"
    lines = [*(f"# {key}: {value}" for key, value in HEAD.items()), *ROWS]
    path.write_text("\n".join(lines), encoding="utf-8")
    assert read_entry(path).nk(600.0) == 1.8


def test_self_check_finds_what_is_wrong(monkeypatch):
    info = materials.entries()[0]
    monkeypatch.setattr(library, "load", lambda name: materials.constant(name, 0.5))
    monkeypatch.setattr(library, "entries", lambda: (info,))
    assert library.self_check() == (info.name,)
    wrong = loaded(["wavelength_nm,n", "400,2", "600,2"])
    object.__setattr__(wrong, "curve", materials.constant("x", 1.0).curve)
    object.__setattr__(wrong.curve, "index", complex(2.0, -1.0))
    monkeypatch.setattr(library, "load", lambda name: wrong)
    with pytest.raises(materials.MaterialError, match="or n <= 0, or k < 0 in its range"):
        library.self_check()


def test_errors_are_one_tree():
    for name in ("UnknownMaterial", "OutOfRange", "CompositionError", "TemperatureError"):
        assert issubclass(getattr(materials, name), materials.MaterialError)
    assert issubclass(materials.TableError, materials.MaterialError)
    assert issubclass(materials.MaterialError, ValueError)
