"""The chosen recipe in every way that TOML lets a facet be written."""

from __future__ import annotations

import re
import tomllib
from pathlib import Path

import pytest
import tomlkit

from coatings.documents import chosen
from coatings.documents.chosen import chosen_recipe
from coatings.recipe import parse_recipe
from coatings.stack import Stack

CHIP = """[chip] # chip
wavelength_nm = 980.0
band_nm = [975.0, 985.0]
polarization = "TE"
length_um = 500.0
stripe_um = 5.0
index = 3.0
"""
KEYS = 'palette = ["Al2O3", "Ta2O5"] # films\nmax_layers = 2\n'
WINDOW = "[[front.windows]] # window\nat_most = 0.05\n"
HEAD = "# head\nrecipe = 1\n"

WAYS = {
    "plain": f"{HEAD}{CHIP}[front]\n{KEYS}# on windows\n\n{WINDOW}# end",
    "inline": f'{HEAD}front = {{ palette = ["Al2O3", "Ta2O5"], max_layers = 2, '
    f"windows = [{{ at_most = 0.05 }}] }} # front\n{CHIP}",
    "inline with layers": f'{HEAD}front = {{ layers = [{{ material = "Al2O3", nm = 3.0 }}], '
    f'palette = ["Al2O3", "Ta2O5"], max_layers = 2, windows = [{{ at_most = 0.05 }}] }}\n{CHIP}',
    "dotted": f'{HEAD}front.palette = ["Al2O3", "Ta2O5"]\nfront.max_layers = 2 # most\n'
    f"front.windows = [{{ at_most = 0.05 }}]\n{CHIP}",
    "windows first": f"{HEAD}{CHIP}{WINDOW}[front]\n{KEYS}",
    "windows far away": f"{HEAD}[front]\n{KEYS}{CHIP}[rear]\n# nothing\n{WINDOW}",
    "no last newline": f"{HEAD}{CHIP}{WINDOW}[front]\n{KEYS}".rstrip(),
    "own process": f'{HEAD}{CHIP}[front]\n{KEYS}[front.process]\nmethod = "e-beam" # beam\n{WINDOW}',
    "limits by film": f"{HEAD}{CHIP}[front]\n{KEYS}layer_nm.Al2O3 = [1.0, 99.0]\n"
    f"layer_nm.Ta2O5 = [1.0, 99.0]\n{WINDOW}",
    "limits in a table": f"{HEAD}{CHIP}[front]\n{KEYS}[front.layer_nm]\nAl2O3 = [1.0, 99.0]\n{WINDOW}",
    "layers there": f'{HEAD}{CHIP}[front]\nlayers = [{{ material = "Al2O3", nm = 3.0 }}]\n{KEYS}{WINDOW}',
    "layers as tables": f'{HEAD}{CHIP}[front]\n{KEYS}[[front.layers]]\nmaterial = "Al2O3"\nnm = 3.0\n'
    f"{WINDOW}",
    "no layers yet": f"{HEAD}{CHIP}[front]\nlayers = []\n{KEYS}{WINDOW}",
    "quoted": f'{HEAD}{CHIP}["front"]\n{KEYS}[["front"."windows"]]\nat_most = 0.05\n',
    "indented": f"{HEAD}{CHIP}  [front]\n    max_layers = 2\n    palette = ['Al2O3', 'Ta2O5']\n"
    "    [[front.windows]]\n      at_most = 0.05 # low\n",
}
STACK = Stack.of(["Al2O3", "Ta2O5"], [12.3, 45.0])
LAYERS = [{"material": "Al2O3", "nm": 12.3}, {"material": "Ta2O5", "nm": 45.0}]


@pytest.mark.parametrize("way", WAYS)
@pytest.mark.parametrize("line_end", ["\n", "\r\n"])
def test_layers_go_in_and_all_else_stays(way: str, line_end: str) -> None:
    text = WAYS[way].replace("\n", line_end)
    chosen_text = chosen_recipe(parse_recipe(text, path=Path("x.toml")), {"front": STACK})
    wanted = tomllib.loads(text)
    wanted["front"]["layers"] = LAYERS
    assert tomllib.loads(chosen_text) == wanted
    assert re.findall(r"#[^\r\n]*", chosen_text) == re.findall(r"#[^\r\n]*", text)
    assert ("\r\n" in text) is ("\r\n" in chosen_text)
    assert chosen_text.count("\n") == chosen_text.count(line_end)
    parse_recipe(chosen_text, path=Path("x.toml"))


def test_no_facet_no_change() -> None:
    recipe = parse_recipe(WAYS["plain"], path=Path("x.toml"))
    assert chosen_recipe(recipe, {}) == WAYS["plain"]


def test_stack_without_layers() -> None:
    recipe = parse_recipe(WAYS["plain"], path=Path("x.toml"))
    text = chosen_recipe(recipe, {"front": Stack(())})
    assert tomllib.loads(text)["front"]["layers"] == []


def test_text_that_takes_no_layers_is_written_anew(monkeypatch: pytest.MonkeyPatch) -> None:
    def refuse(_: str) -> tomlkit.TOMLDocument:
        raise tomlkit.exceptions.TOMLKitError

    recipe = parse_recipe(WAYS["dotted"], path=Path("x.toml"))
    monkeypatch.setattr(chosen.tomlkit, "parse", refuse)
    text = chosen_recipe(recipe, {"front": STACK})
    assert "#" not in text
    assert parse_recipe(text, path=Path("x.toml")).front.layers is not None
