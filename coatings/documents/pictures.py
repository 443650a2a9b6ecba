"""Whole figures as PNG bytes, made of the drawings in ``plots``."""

from __future__ import annotations

import warnings
from collections.abc import Mapping
from io import BytesIO
from typing import TYPE_CHECKING

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.layout_engine import ConstrainedLayoutEngine

from coatings.documents.look import INK, SIDE_COLOURS, STYLE, film_colours
from coatings.documents.plots import (
    Band,
    draw_gates,
    draw_layers,
    draw_plane_wave,
    draw_power,
    draw_spectrum,
    draw_yields,
)
from coatings.facets import stack_of

if TYPE_CHECKING:  # searching and laser models are slow to import, and curve needs neither
    from coatings.curve import FacetCurve
    from coatings.design.plan import FacetPlan
    from coatings.laser import PowerCurrent
    from coatings.recipe import FacetName, Recipe, Window
    from coatings.stack import Stack
    from materials import Material

DECADES_APART = 30.0


def spectrum_picture(
    recipe: Recipe, curves: Mapping[FacetName, FacetCurve], *, stacks: Mapping[FacetName, Stack],
    bands: Mapping[FacetName, Band],
) -> bytes:  # fmt: skip
    """One row a facet: the layers above, the spectrum with gates and spread below."""
    with mpl.rc_context(STYLE):
        figure = Figure(figsize=(7.6, 3.9 * len(curves)), layout="constrained")
        grid = figure.add_gridspec(2 * len(curves), 1, height_ratios=[1, 5] * len(curves))
        figure.suptitle(recipe.title, x=0.02, ha="left", fontsize=11, fontweight="bold", color=INK)
        for row, (side, curve) in enumerate(curves.items()):
            layers_ax = figure.add_subplot(grid[2 * row])
            spectrum_ax = figure.add_subplot(grid[2 * row + 1])
            _layers(layers_ax, recipe, side, stacks.get(side))
            draw_spectrum(spectrum_ax, curve.spectrum, side=side, band=bands.get(side))
            if curve.plane_spectrum is not None:
                draw_plane_wave(spectrum_ax, curve.plane_spectrum)
            _frame_windows(spectrum_ax, [w.window for w in curve.windows])
            draw_gates(spectrum_ax, [w.window for w in curve.windows])
            if side in bands or curve.plane_spectrum is not None:
                spectrum_ax.legend(loc="lower right", bbox_to_anchor=(1.0, 0.99), ncols=4,
                                   borderaxespad=0.0)  # fmt: skip
        return png(figure)


def yield_picture(plans: Mapping[FacetName, FacetPlan]) -> bytes:
    """Layers against yield, one panel a facet."""
    with mpl.rc_context(STYLE):
        above_key = ConstrainedLayoutEngine(rect=(0.0, 0.06, 1.0, 0.94))
        figure = Figure(figsize=(7.6, 3.3), layout=above_key)
        axes = figure.subplots(1, len(plans), squeeze=False)[0]
        for ax, plan in zip(axes, plans.values(), strict=True):
            draw_yields(ax, plan)
        figure.text(
            0.99, 0.005, "ring: taken; filled: the best of its layer count; open: another design",
            ha="right", va="bottom", fontsize=8, color=INK,
        )  # fmt: skip
        return png(figure)


def power_picture(power: PowerCurrent, *, drive_A: float | None, title: str) -> bytes:
    """Power against current: the front above, the rear below on its own scale."""
    with mpl.rc_context(STYLE):
        figure = Figure(figsize=(6.4, 4.6), layout="constrained")
        front_ax, rear_ax = figure.subplots(2, 1, sharex=True, height_ratios=[2.4, 1])
        draw_power(front_ax, power, side="front", drive_A=drive_A)
        draw_power(rear_ax, power, side="rear", drive_A=drive_A)
        rear_ax.set_xlabel("current (A)")
        front_ax.set_title(title)
        return png(figure)


def material_picture(material: Material) -> bytes:
    """n and k of a material over its range."""
    with mpl.rc_context(STYLE):
        figure = Figure(figsize=(6.0, 4.6), layout="constrained")
        n_ax, k_ax = figure.subplots(2, 1, sharex=True)
        wavelength = np.clip(np.geomspace(*material.range_nm, 600), *material.range_nm)
        values = material.nk(wavelength)
        for ax, value, label in ((n_ax, values.real, "n"), (k_ax, values.imag, "k")):
            ax.plot(wavelength, value, color=INK, lw=1.6)
            ax.set_ylabel(label)
        k_ax.set_xlabel("wavelength (nm)")
        k_ax.set_xscale("log")
        n_ax.set_title(f"{material.name}: {material.info.sample}")
        return png(figure)


def _layers(ax: Axes, recipe: Recipe, side: FacetName, searched: Stack | None) -> None:
    facet = recipe.facets[side]
    at = np.array([recipe.chip.wavelength_nm])
    layers = [
        (
            layer.material,
            layer.nm,
            float(recipe.material(layer.material).nk(at).real[0]) * layer.nm / at[0],
        )
        for layer in stack_of(facet, searched)
    ]
    outside = facet.outside if isinstance(facet.outside, str) else f"n = {facet.outside:g}"
    colours = film_colours([*recipe.front.films, *recipe.rear.films])
    draw_layers(ax, layers, outside=outside, colours=colours)
    ax.set_title(side, color=SIDE_COLOURS[side], pad=4)


def _frame_windows(ax: Axes, windows: list[Window]) -> None:
    """Limits of the R axis that show the curve near its windows, gates included."""
    levels = [100 * v for w in windows for v in (w.low, w.high) if v is not None and 0 < v < 1]
    if not levels:
        return
    start = min(w.band_nm[0] for w in windows)
    stop = max(w.band_nm[1] for w in windows)
    shown = [y for line in ax.lines for x, y in zip(*map(np.asarray, line.get_data()), strict=True)
             if start <= x <= stop]  # fmt: skip
    low, high = min([*levels, *shown]), max([*levels, *shown])
    if max(levels) > DECADES_APART * min(levels):  # gates of one picture that a line can't hold
        ax.set_yscale("log")
        ax.set_ylim(max(0.5 * low, 1e-4 * min(levels)), 3.0 * high)
        return
    room = 0.35 * (high - low) or 0.5 * high
    ax.set_ylim(max(low - room, 0.0) if low > 5 * (high - low) else 0.0, min(high + room, 101.0))


def png(figure: Figure) -> bytes:
    """A figure as PNG bytes, the same for the same picture."""
    FigureCanvasAgg(figure)
    out = BytesIO()
    with (
        warnings.catch_warnings()
    ):  # a letter that the font lacks is drawn as a box, which says enough
        warnings.filterwarnings("ignore", message=r"Glyph \d+|Font .* does not have a glyph")
        figure.savefig(out, format="png", metadata={"Software": None})
    return out.getvalue()
