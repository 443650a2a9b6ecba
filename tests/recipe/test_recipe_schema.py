"""The schema is the only place where a key is explained: nothing in it may be left unsaid."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st
from pydantic import BaseModel
from pydantic.fields import FieldInfo
from recipe_texts import document, problems

from coatings.errors import RecipeError
from coatings.recipe import KeyPath, parse_recipe
from coatings.recipe.document import RecipeTable
from coatings.recipe.expectation import choices, expectation, extra, limits, limits_in_words
from coatings.recipe.lookup import find, plain, section_of
from coatings.recipe.paths import shown
from coatings.recipe.problems import nearest


def fields(section: type[BaseModel], at: str = "") -> Iterator[tuple[str, FieldInfo]]:
    for name, field in section.model_fields.items():
        yield f"{at}{name}", field
        inner = section_of(field.annotation)
        if inner is not None:
            yield from fields(inner, f"{at}{name}.")


FIELDS = dict(fields(RecipeTable))
NUMBERS = {path: field for path, field in FIELDS.items() if plain(field.annotation) in (int, float)}


@pytest.mark.parametrize("path", FIELDS)
def test_every_key_is_described(path: str) -> None:
    field = FIELDS[path]
    assert field.description
    assert field.description[0].isupper() or field.description[0] in '"1'
    assert expectation(field) not in ("", "a list")
    is_silent = field.default is None and not field.is_required()
    # Alternatives of which one must be given explain themselves in their description.
    assert (
        not is_silent
        or extra(field, "otherwise")
        or "this or" in field.description
        or any(path.endswith(key) for key in ONE_OF)
    )


ONE_OF = (
    ".reflectance", ".between", ".at_most", ".at_least",
    ".table", ".index", ".cauchy", ".of", ".scale", ".temperature_C", ".mixture", ".fraction",
)  # fmt: skip


@pytest.mark.parametrize("path", NUMBERS)
def test_every_number_has_a_unit_and_limits(path: str) -> None:
    field = NUMBERS[path]
    assert extra(field, "unit")
    found = limits(field)
    assert "gt" in found or "ge" in found
    assert "lt" in found or "le" in found


SUFFIXES = {
    "_nm": "nm", "_um": "um", "_mm": "mm", "_deg": "deg", "_percent": "percent", "_A": "A",
    "_W": "W", "_V": "V", "_C": "C", "_K": "K", "_dB": "dB", "_per_cm": "1/cm", "_mohm": "mohm",
    "_MPa": "MPa", "_nm_per_s": "nm/s", "_N_per_m": "N/m", "_MW_per_cm2": "MW/cm2",
    "_A_per_cm2": "A/cm2", "_K_per_W": "K/W",
}  # fmt: skip


@pytest.mark.parametrize("path", FIELDS)
def test_unit_agrees_with_the_name(path: str) -> None:
    fitting = [suffix for suffix in SUFFIXES if path.endswith(suffix)]
    if fitting and not path.endswith("decimals_nm"):
        assert extra(FIELDS[path], "unit") == SUFFIXES[max(fitting, key=len)]


@pytest.mark.parametrize(
    ("found", "words"),
    [
        ({}, ""),
        ({"gt": 0.0}, "above 0"),
        ({"ge": 1}, "of 1 or more"),
        ({"le": 5}, "up to 5"),
        ({"lt": 5}, "to below 5"),
        ({"ge": 0.0, "le": 1.0}, "from 0 to 1"),
        ({"gt": 0.0, "le": 1.0}, "above 0 and up to 1"),
        ({"gt": 0.0, "lt": 1.0}, "above 0 and below 1"),
        ({"ge": 0.0, "lt": 90.0}, "from 0 to below 90"),
    ],
)
def test_limits_in_words(found: dict[str, float], words: str) -> None:
    assert limits_in_words(found) == words


def test_find_follows_key_paths() -> None:
    place = find(("front", "windows", 1, "at_most"))
    assert str(place.path) == "front.windows#2.at_most"
    assert place.field is not None
    assert place.field.description == "Highest reflectance"
    assert find(("process", "index", "Al2O3")).is_item
    assert str(find(("chip", "band_nm", 1)).path) == "chip.band_nm"
    assert find(("chip", "nothing")).field is None
    assert choices(find(("chip", "polarization")).field or FieldInfo()) == ("TE", "TM")


@pytest.mark.parametrize(
    ("parts", "written"),
    [
        (("chip", "band_nm"), "chip.band_nm"),
        (("front", "windows", 0), "front.windows#1"),
        (("materials", "AlGaAs:0.30", "k"), 'materials."AlGaAs:0.30".k'),
        ((), ""),
    ],
)
def test_key_path_as_written(parts: tuple[str | int, ...], written: str) -> None:
    assert str(KeyPath(parts)) == written


@pytest.mark.parametrize(
    ("value", "text"),
    [
        ("a\nb\x1b", '"a\\nb\\u001b"'),
        ("µ", '"µ"'),
        (True, "true"),
        (-4000, "-4000"),
        (0.5, "0.5"),
        ((1, "x"), '[1, "x"]'),
        ({"a": 1}, "a table"),
        ("x" * 100, '"' + "x" * 56 + "..."),
        (10**30, "a whole number of 100 bits"),
    ],
)
def test_values_as_shown(value: object, text: str) -> None:
    assert shown(value) == text


@pytest.mark.parametrize(
    ("word", "names", "guess"),
    [
        ("lenght_um", ("length_um", "stripe_um"), "length_um"),
        ("TE2", ("TE", "TM"), "TE"),
        ("ta2o5", ("Ta2O5", "TiO2"), "Ta2O5"),
        ("zzz", ("length_um",), None),
    ],
)
def test_nearest(word: str, names: tuple[str, ...], guess: str | None) -> None:
    assert nearest(word, names) == guess


VALUES = st.one_of(
    st.booleans().map(lambda x: "true" if x else "false"),
    st.integers().map(str),
    st.floats().map(repr),
    st.just('"TE"'),
    st.just("[]"),
    st.just("{}"),
    st.just("[1, 2]"),
    st.just("[[1]]"),
    st.just("[{}]"),
    st.just('["Al2O3"]'),
    st.just("{ Al2O3 = [1, 2] }"),
    st.just("2020-01-01"),
)


@given(st.sampled_from([p for p in FIELDS if p not in ("recipe",)]), VALUES)
def test_any_value_anywhere_is_read_or_refused_in_clear_lines(path: str, value: str) -> None:
    """No input reaches a traceback; each problem is one line that says something."""
    section, *keys = path.split(".")
    if section in ("witness", "materials") and keys:
        head = f"[[{section}]]" if section == "witness" else "[materials.X]"
        text = f"recipe = 1\n{head}\n{'.'.join(keys)} = {value}\n"
    else:
        text = f"recipe = 1\n{path} = {value}\n"
    try:
        parse_recipe(text, path=Path("x.toml"))
    except RecipeError as error:
        for problem in error.problems:
            assert str(problem).isprintable()
            assert problem.where.startswith("x.toml")
            assert problem.what


def test_word_for_every_section() -> None:
    assert problems(document("[laser]\n"))[0].startswith("laser.internal_loss_per_cm: is missing")
