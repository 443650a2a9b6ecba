"""Pictures of results. Functions take the axes to draw on and return what they drew."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from matplotlib.axes import Axes
from matplotlib.collections import PathCollection
from matplotlib.colors import to_rgb
from matplotlib.lines import Line2D
from matplotlib.patches import Rectangle
from matplotlib.ticker import MaxNLocator

from coatings.documents.look import CHIP, GATE, INK, QUIET, SIDE_COLOURS

if TYPE_CHECKING:  # searching and laser models are slow to import, and curve needs neither
    from coatings.design.plan import FacetPlan
    from coatings.facets import FacetSpectrum, FloatArray
    from coatings.laser import PowerCurrent
    from coatings.recipe import FacetName, Window

FILM_ALONE = "window of the film alone"
GATE_SHARE = 0.035  # of the height of the axes
NARROWEST_WRITTEN, NARROWEST_UPRIGHT = 0.007, 0.06  # shares of the drawn width


@dataclass(frozen=True)
class Band:
    """Quantiles of R (P,) over the run's errors: 5 %, 50 % and 95 % of the chips lie below."""

    wavelength_nm: FloatArray
    p05: FloatArray
    p50: FloatArray
    p95: FloatArray


def draw_spectrum(
    ax: Axes, spectrum: FacetSpectrum, *, side: FacetName, band: Band | None = None
) -> Line2D:
    """R in percent against wavelength, with the band that nine of ten chips keep to."""
    colour = SIDE_COLOURS[side]
    if band is not None:
        ax.fill_between(
            band.wavelength_nm, 100 * band.p05, 100 * band.p95, color=colour, alpha=0.22, lw=0,
            label="9 of 10 chips",
        )  # fmt: skip
    (line,) = ax.plot(
        spectrum.wavelength_nm, 100 * spectrum.R, color=colour, lw=1.8, label="as ordered"
    )
    ax.set_xlabel("wavelength (nm)")
    ax.set_ylabel("reflectance into the chip (%)")
    ax.set_xlim(float(spectrum.wavelength_nm[0]), float(spectrum.wavelength_nm[-1]))
    return line


def draw_plane_wave(ax: Axes, spectrum: FacetSpectrum) -> Line2D:
    """R of the plane wave in percent, for comparison with the mode's."""
    (line,) = ax.plot(
        spectrum.wavelength_nm,
        100 * spectrum.R,
        color=QUIET,
        lw=1.0,
        ls=(0, (4, 3)),
        label="plane wave",
    )
    return line


def draw_gates(ax: Axes, windows: Sequence[Window]) -> list[Rectangle]:
    """Windows as gates: bars that the curve must pass between, below or above.

    Hollow bars are for the film alone; the curve of the mode need not keep to them.
    """
    bars: list[Rectangle] = []
    for window in windows:
        start, stop = window.band_nm
        is_hollow = window.of == "coating"
        for level, outward in ((window.low, -1.0), (window.high, 1.0)):
            if level is None or not 0.0 < level < 1.0:
                continue
            bar = Rectangle(
                (start, 100 * level), stop - start, _gate_height(ax, 100 * level, outward),
                facecolor="none" if is_hollow else GATE, edgecolor=GATE if is_hollow else "none",
                alpha=0.85, zorder=3,
            )  # fmt: skip
            if is_hollow and not any(other.get_label() == FILM_ALONE for other in bars):
                bar.set_label(FILM_ALONE)
            bars.append(bar)
            ax.add_patch(bar)
    return bars


def _gate_height(ax: Axes, level: float, outward: float) -> float:
    """Height of a bar that looks the same at every level of the axis."""
    bottom, top = ax.get_ylim()
    if ax.get_yscale() == "log":
        return level * float((top / bottom) ** (outward * GATE_SHARE) - 1.0)
    return outward * GATE_SHARE * (top - bottom)


def draw_layers(
    ax: Axes,
    layers: Sequence[tuple[str, float, float]],
    *,
    outside: str,
    colours: Mapping[str, str],
    inside: str = "chip",
) -> list[Rectangle]:
    """Layers to optical scale between ``inside`` (left: the chip, or a witness piece) and ``outside`` (right).

    ``layers``: (film, thickness in nm, optical thickness in any unit), chip outward; ``colours`` by film.
    """
    total = sum(waves for *_, waves in layers) or 0.25
    end = 0.12 * total
    boxes = [_box(ax, -end, end, CHIP)]
    size = 8 if len(inside) < 8 else 6
    ax.text(-0.5 * end, 0.5, inside, ha="center", va="center", fontsize=size, color=INK)
    at = 0.0
    for film, nm, waves in layers:
        boxes.append(_box(ax, at, waves, colours[film]))
        if waves / total > NARROWEST_WRITTEN:
            ax.text(
                at + 0.5 * waves, 0.5, f"{nm:g}", ha="center", va="center", fontsize=7,
                color="white" if _is_dark(colours[film]) else INK,
                rotation=0.0 if waves / total > NARROWEST_UPRIGHT else 90.0,
            )  # fmt: skip
        at += waves
    films = dict.fromkeys(film for film, *_ in layers)
    key = [Rectangle((0, 0), 1, 1, facecolor=colours[film], label=film) for film in films]
    if key:
        ax.legend(handles=key, loc="lower left", bbox_to_anchor=(0.1, 0.98), ncols=6, fontsize=8,
                  borderaxespad=0.0, handlelength=1.2, columnspacing=1.2)  # fmt: skip
        ax.set_title("thickness in nm, optical scale", loc="right", fontsize=8,
                     fontweight="normal", color=INK)  # fmt: skip
    ax.text(at + 0.2 * end, 0.5, outside, va="center", ha="left", fontsize=8, color=INK)
    ax.set_xlim(-end, at + end)
    ax.set_ylim(0, 1)
    ax.set_axis_off()
    return boxes


def _is_dark(colour: str) -> bool:
    """Whether white is easier to read on a colour than ink."""
    red, green, blue = to_rgb(colour)
    return 0.299 * red + 0.587 * green + 0.114 * blue < 0.5


def _box(ax: Axes, x: float, width: float, colour: str) -> Rectangle:
    box = Rectangle((x, 0.08), width, 0.84, facecolor=colour, edgecolor="white", lw=0.8)
    ax.add_patch(box)
    return box


def draw_yields(ax: Axes, plan: FacetPlan) -> PathCollection:
    """Layers against yield: the shortlist, the best of each count filled, the stack taken ringed.

    Where no errors of the run are given, the margin stands for the yield.
    """
    colour, by_margin = SIDE_COLOURS[plan.side], plan.task.errors.none
    counts = np.array([len(found.nm) for found in plan.stacks], dtype=float)
    values = 100 * np.array([f.margin if by_margin else f.yields.chips for f in plan.stacks])
    best = {count: float(values[counts == count].max()) for count in np.unique(counts)}
    ax.plot(list(best), list(best.values()), color=colour, lw=1.0, alpha=0.5)
    is_best = np.array([v == best[count] for count, v in zip(counts, values, strict=True)])
    ax.scatter(counts[~is_best], values[~is_best], s=24, color="white", edgecolor=colour, zorder=3)
    points = ax.scatter(counts[is_best], values[is_best], s=24, color=colour, zorder=4)
    count, value = counts[plan.chosen], values[plan.chosen]
    ax.scatter(count, value, s=130, facecolor="none", edgecolor=INK, lw=1.4, zorder=5)
    layers = "1 layer" if count == 1 else f"{count:.0f} layers"
    ax.set_title(f"{plan.side}: {value:.{2 if by_margin else 1}f} % with {layers}", color=colour)
    ax.set_xlabel("searched layers")
    ax.xaxis.set_major_locator(MaxNLocator(integer=True, nbins=12))
    ax.set_xlim(counts.min() - 0.6, counts.max() + 0.6)
    if by_margin:
        ax.set_ylabel("margin to the windows (%)")
        ax.axhline(0.0, color=GATE, lw=1.2)
    else:
        ax.set_ylabel("chips inside all windows (%)")
        ax.set_ylim(-4.0, 106.0)
    return points


def _power_unit(most_W: float) -> tuple[float, str]:
    """Factor and unit that make the greatest power at least a half."""
    units = ((1.0, "W"), (1e3, "mW"), (1e6, "uW"), (1e9, "nW"))
    return next((pair for pair in units if pair[0] * most_W >= 0.5), units[0])


def draw_power(ax: Axes, power: PowerCurrent, *, side: FacetName, drive_A: float | None) -> Line2D:
    """Power of one facet against current; the power at the operating current is written out."""
    watts = power.front_W if side == "front" else power.rear_W
    scale, unit = _power_unit(float(watts.max()))
    (line,) = ax.plot(power.current_A, scale * watts, color=SIDE_COLOURS[side], lw=1.8)
    ax.set_ylabel(f"{side} ({unit})", color=SIDE_COLOURS[side])
    ax.set_xlim(0, float(power.current_A[-1]))
    ax.set_ylim(0, 1.12 * scale * float(watts.max()) or 1.0)
    if drive_A is not None:
        there = float(np.interp(drive_A, power.current_A, scale * watts))
        ax.axvline(drive_A, color=QUIET, lw=1.0, ls=(0, (4, 3)))
        ax.plot([drive_A], [there], "o", color=SIDE_COLOURS[side], ms=5)
        ax.annotate(
            f"{there:.3g} {unit} at {drive_A:g} A", (drive_A, there), xytext=(-8, 2),
            textcoords="offset points", ha="right", va="bottom", fontsize=9, color=INK,
        )  # fmt: skip
    return line
