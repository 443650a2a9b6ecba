"""The look of every picture: one set of colours, chip at the left, light to the right."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

INK = "#22272e"
QUIET = "#8b939c"
GRID = "#e3e6e9"
CHIP = "#c9c3d6"
GATE = "#5b6470"
SIDE_COLOURS = {"front": "#00707a", "rear": "#b3541e"}

# Told apart by lightness too, so that they survive colour-blind eyes and grey print.
FILM_COLOURS = (
    "#f2d7a0", "#6a9fb5", "#d9e4c3", "#a8577e", "#8fc1b5", "#e8a07c", "#4d5e8a", "#c8b6e0",
    "#b8bd5f", "#7b5d4a",
)  # fmt: skip

STYLE: Any = {
    "font.size": 9.0,
    "font.family": "sans-serif",
    "axes.edgecolor": INK,
    "axes.labelcolor": INK,
    "axes.titlecolor": INK,
    "axes.titlelocation": "left",
    "axes.titlesize": 10.0,
    "axes.titleweight": "bold",
    "axes.spines.top": False,
    "axes.spines.right": False,
    "axes.grid": True,
    "axes.axisbelow": True,
    "grid.color": GRID,
    "grid.linewidth": 0.8,
    "xtick.color": INK,
    "ytick.color": INK,
    "legend.frameon": False,
    "legend.fontsize": 8.0,
    "figure.dpi": 110.0,
    "savefig.dpi": 110.0,
}


def film_colours(films: Sequence[str]) -> dict[str, str]:
    """A colour for each film, by order of first appearance."""
    unique = list(dict.fromkeys(films))
    return {film: FILM_COLOURS[number % len(FILM_COLOURS)] for number, film in enumerate(unique)}
