"""Numbers, windows and stacks in words."""

from __future__ import annotations

from pathlib import Path

import pytest

from coatings.cli.words import amperes, counted, layers_text, percent, watts, window_text
from coatings.recipe import Window, parse_recipe
from coatings.stack import Stack


@pytest.mark.parametrize(
    ("share", "text"),
    [
        (0.0511, "5.11 %"),
        (1.0, "100.00 %"),
        (2.6e-6, "0.00026 %"),
        (0.0, "0 %"),
        (-0.02, "-2.00 %"),
    ],
)
def test_percent(share: float, text: str) -> None:
    assert percent(share) == text


@pytest.mark.parametrize(
    ("power_W", "text"),
    [(10.82, "10.8 W"), (0.0412, "41.2 mW"), (3.5e-5, "35 uW"), (1e-12, "0 W"), (0.0, "0 W")],
)
def test_watts(power_W: float, text: str) -> None:
    assert watts(power_W) == text


def test_amperes_and_counts() -> None:
    assert amperes(12.0) == "12 A"
    assert amperes(0.0257) == "25.7 mA"
    assert counted(1, "layer") == "1 layer"
    assert counted(4, "layer") == "4 layers"


def _window(keys: str) -> Window:
    text = (
        "recipe = 1\n[chip]\nwavelength_nm = 980.0\nband_nm = [975.0, 985.0]\n"
        'polarization = "TE"\nlength_um = 500.0\nstripe_um = 5.0\nindex = 3.0\n[[front.windows]]\n'
    )
    return parse_recipe(text + keys, path=Path("x.toml")).front.windows[0]


@pytest.mark.parametrize(
    ("keys", "text"),
    [
        ("reflectance = 0.05\ntolerance = 0.01", "4 to 6 % over 975-985 nm"),
        ("at_most = 0.001", "at most 0.1 % over 975-985 nm"),
        ("at_least = 0.97\nband_nm = [980.0, 980.0]", "at least 97 % over 980 nm"),
        ("absorption_at_most = 0.002", "absorption at most 0.2 % over 975-985 nm"),
        ('at_most = 0.1\nindex = 3.3\npolarization = "both"',
         "at most 10 % over 975-985 nm in TE and TM, index 3.3"),
        ('at_most = 0.1\nof = "coating"', "at most 10 % over 975-985 nm for the film alone"),
    ],
)  # fmt: skip
def test_window(keys: str, text: str) -> None:
    assert window_text(_window(keys)) == text


def test_layers_of_every_kind() -> None:
    assert layers_text(Stack(())) == "no searched layers"
    assert layers_text(Stack.of(["A"], [29.4])) == "1 layer, 29.4 nm: A 29.4"
    few = Stack.of(["A", "B", "A"], [1.0, 2.0, 3.5])
    assert layers_text(few) == "3 layers, 6.5 nm: A 1 | B 2 | A 3.5"
    pairs = Stack.of(["A", "B"] * 3, [10.0, 20.0, 11.0, 21.0, 12.0, 22.0])
    assert layers_text(pairs) == "6 layers, 96 nm, A/B: 10 20 11 21 12 22"
    long = Stack.of(["A", "B"] * 20, [10.0, 20.0, *[11.0, 21.0] * 19])
    assert layers_text(long) == "40 layers, 638 nm: A 10 to 11 and B 20 to 21 in turn"
    mixed = Stack.of(["A", "B", "C"] * 4, [5.0] * 12)
    assert layers_text(mixed) == (
        "12 layers, 60 nm: A 5 | B 5 | C 5 | A 5 | 4 more | C 5 | A 5 | B 5 | C 5"
    )
