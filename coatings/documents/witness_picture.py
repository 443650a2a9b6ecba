"""Picture of a witness piece's curve: the piece above, what the instrument reads below."""

from __future__ import annotations

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from coatings.documents.look import INK, QUIET, SIDE_COLOURS, STYLE, film_colours
from coatings.documents.pictures import png
from coatings.documents.plots import draw_layers
from coatings.recipe import Recipe
from coatings.witness import WitnessCurve


def witness_picture(recipe: Recipe, curve: WitnessCurve) -> bytes:
    """A witness piece's curve as PNG."""
    with mpl.rc_context(STYLE):
        figure = Figure(figsize=(7.6, 3.9), layout="constrained")
        title = f"{recipe.title}: witness {curve.witness.name}"
        figure.suptitle(title, x=0.02, ha="left", fontsize=11, fontweight="bold", color=INK)
        layers_ax, ax = figure.subplots(2, 1, height_ratios=[1, 5])
        _draw_piece(layers_ax, recipe, curve)
        draw_reading(ax, curve)
        return png(figure)


def draw_reading(ax: Axes, curve: WitnessCurve) -> Line2D:
    """The measured quantity in percent, the other one thin and grey where a clear back lets it be."""
    asked, other = (curve.R, curve.T) if curve.witness.quantity == "R" else (curve.T, curve.R)
    names = ("R", "T") if curve.witness.quantity == "R" else ("T", "R")
    colour = SIDE_COLOURS[curve.witness.facet]
    (line,) = ax.plot(curve.wavelength_nm, 100 * asked, color=colour, lw=1.8, label=names[0])
    if curve.witness.back == "polished":
        ax.plot(curve.wavelength_nm, 100 * other, color=QUIET, lw=1.0, label=names[1])
        ax.legend(loc="best")
    ax.set_xlabel("wavelength (nm)")
    ax.set_ylabel(f"{names[0]} of the piece, back face included (%)")
    ax.set_xlim(float(curve.wavelength_nm[0]), float(curve.wavelength_nm[-1]))
    return line


def _draw_piece(ax: Axes, recipe: Recipe, curve: WitnessCurve) -> None:
    at = np.array([recipe.chip.wavelength_nm])
    layers = [
        (layer.material, layer.nm, float(recipe.material(layer.material).nk(at).real[0]) * layer.nm)
        for layer in curve.stack
    ]
    colours = film_colours([*recipe.front.films, *recipe.rear.films])
    draw_layers(ax, layers, outside="air", colours=colours, inside=curve.witness.substrate)
