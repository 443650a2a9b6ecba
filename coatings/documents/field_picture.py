"""Picture of the standing wave: the field above, the layers beneath, the chip at the left."""

from __future__ import annotations

from collections.abc import Mapping

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from coatings.documents.look import CHIP, INK, SIDE_COLOURS, STYLE, film_colours
from coatings.documents.pictures import png
from coatings.field import FacetField
from coatings.recipe import FacetName, Recipe

ABSORPTION = "#8c2f39"
SKIRT = 0.16  # height of the strip of layers, as a share of the axes


def field_picture(recipe: Recipe, fields: Mapping[FacetName, FacetField]) -> bytes:
    """Standing wave of each facet as PNG, one row a facet."""
    with mpl.rc_context(STYLE):
        figure = Figure(figsize=(7.6, 3.7 * len(fields)), layout="constrained")
        figure.suptitle(
            f"{recipe.title}: standing wave at {recipe.chip.wavelength_nm:g} nm",
            x=0.02, ha="left", fontsize=11, fontweight="bold", color=INK,
        )  # fmt: skip
        axes = figure.subplots(len(fields), 1, squeeze=False)[:, 0]
        colours = film_colours([*recipe.front.films, *recipe.rear.films])
        for ax, field in zip(axes, fields.values(), strict=True):
            draw_field(ax, field)
            draw_ground(ax, field, colours=colours)
        return png(figure)


def draw_field(ax: Axes, field: FacetField) -> Line2D:
    """E squared through chip, layers and outside; density of absorption on the right where there is any."""
    profile = field.profile
    (line,) = ax.plot(profile.z_nm, profile.E2[0], color=SIDE_COLOURS[field.side], lw=1.8)
    top = float(profile.E2.max())
    ax.set_ylim(-SKIRT / (1 - SKIRT) * 1.1 * top, 1.1 * top)
    ax.set_xlim(float(profile.z_nm[0]), float(profile.z_nm[-1]))
    ax.set_xlabel("distance from the chip's face (nm)")
    ax.set_ylabel("E² over the wave in the chip")
    ax.set_title(field.side, color=SIDE_COLOURS[field.side])
    density = np.maximum(profile.absorption_per_nm[0], 0.0)
    if density.max() > 0.0:
        other = ax.twinx()
        other.fill_between(profile.z_nm, 1e6 * density, color=ABSORPTION, alpha=0.3, lw=0)
        peak = 1e6 * float(density.max())
        other.set_ylim(-SKIRT / (1 - SKIRT) * 1.1 * peak, 1.1 * peak)
        other.set_ylabel("absorbed (ppm of arriving power per nm)", color=ABSORPTION)
        other.grid(visible=False)
        other.spines["right"].set_visible(True)
        other.set_yticks([tick for tick in other.get_yticks() if 0 <= tick <= 1.1 * peak])
    ax.set_yticks([tick for tick in ax.get_yticks() if 0 <= tick <= 1.1 * top])
    return line


def draw_ground(ax: Axes, field: FacetField, *, colours: Mapping[str, str]) -> list[object]:
    """The layers as a strip beneath the field, to physical scale, named where there is room."""
    edges = field.wave.face_nm
    low, high = ax.get_xlim()
    parts = [("chip", low, 0.0, CHIP)]
    for layer, start, end in zip(field.stack, edges[:-1], edges[1:], strict=True):
        parts.append((f"{layer.material}\n{layer.nm:g}", start, end, colours[layer.material]))
    drawn: list[object] = []
    for label, start, end, colour in parts:
        drawn.append(
            ax.axvspan(start, end, ymax=SKIRT - 0.02, facecolor=colour, edgecolor="white", lw=0.8)
        )
        if (end - start) > 0.055 * (high - low):
            ax.text(
                (start + end) / 2, SKIRT / 2 - 0.01, label, transform=ax.get_xaxis_transform(),
                ha="center", va="center", fontsize=6.5, color=INK,
            )  # fmt: skip
    for edge in edges:
        ax.axvline(edge, color=INK, lw=0.5, alpha=0.35)
    return drawn
