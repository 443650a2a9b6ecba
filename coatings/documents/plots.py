"""Pictures of results. Functions take the axes to draw on and return what they drew."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.collections import FillBetweenPolyCollection, PathCollection
from matplotlib.lines import Line2D
from matplotlib.patches import Rectangle

from coatings.design.plan import FacetPlan
from coatings.documents.look import CHIP, GATE, INK, QUIET, SIDE_COLOURS, film_colours
from coatings.facets import FacetSpectrum, FloatArray
from coatings.laser import PowerCurrent
from coatings.recipe import Window


@dataclass(frozen=True)
class Band:
    """Quantiles of R (P,) over the run's errors: 5 %, 50 % and 95 % of the chips lie below."""

    wavelength_nm: FloatArray
    p05: FloatArray
    p50: FloatArray
    p95: FloatArray


def draw_spectrum(ax: Axes, spectrum: FacetSpectrum, *, side: str, band: Band | None = None) -> Line2D:
    """R in percent against wavelength, with the band that nine of ten chips keep to."""
    colour = SIDE_COLOURS[side]
    if band is not None:
        ax.fill_between(
            band.wavelength_nm, 100 * band.p05, 100 * band.p95, color=colour, alpha=0.22, lw=0,
            label="9 of 10 chips",
        )  # fmt: skip
    (line,) = ax.plot(spectrum.wavelength_nm, 100 * spectrum.R, color=colour, lw=1.8, label="as ordered")
    ax.set_xlabel("wavelength (nm)")
    ax.set_ylabel("reflectance into the chip (%)")
    ax.set_xlim(float(spectrum.wavelength_nm[0]), float(spectrum.wavelength_nm[-1]))
    return line


def draw_gates(ax: Axes, windows: Sequence[Window]) -> list[Rectangle]:
    """Windows as gates: bars that the curve must pass between, below or above."""
    bars = []
    bottom, top = ax.get_ylim()
    reach = 0.035 * (top - bottom)
    for window in windows:
        start, stop = window.band_nm
        for level, outward in ((window.low, -1.0), (window.high, 1.0)):
            if level is None or not 0.0 < level < 1.0:
                continue
            bar = Rectangle(
                (start, 100 * level), stop - start, outward * reach, facecolor=GATE, edgecolor="none",
                alpha=0.85, zorder=3,
            )  # fmt: skip
            bars.append(bar)
            ax.add_patch(bar)
    return bars


def draw_layers(
    ax: Axes, layers: Sequence[tuple[str, float, float]], *, outside: str
) -> list[Rectangle]:
    """Layers to optical scale between chip (left) and outside (right).

    ``layers``: (film, thickness in nm, optical thickness in waves), chip outward.
    """
    colours = film_colours([film for film, _, _ in layers])
    total = sum(waves for *_, waves in layers) or 0.25
    end = 0.12 * total
    boxes = [_box(ax, -end, end, CHIP, "chip", 0.0)]
    at = 0.0
    for film, nm, waves in layers:
        boxes.append(_box(ax, at, waves, colours[film], f"{film}\n{nm:g} nm", waves / total))
        at += waves
    ax.text(at + 0.15 * end, 0.5, outside, va="center", ha="left", fontsize=7, color=INK)
    ax.set_xlim(-end, at + 1.6 * end)
    ax.set_ylim(0, 1)
    ax.set_axis_off()
    return boxes


def _box(ax: Axes, x: float, width: float, colour: str, label: str, share: float) -> Rectangle:
    box = Rectangle((x, 0.08), width, 0.84, facecolor=colour, edgecolor="white", lw=0.8)
    ax.add_patch(box)
    upright = 0.0 if share == 0.0 or share > 0.11 else 90.0
    ax.text(
        x + width / 2, 0.5, label if upright == 0.0 else label.replace("\n", " "), ha="center",
        va="center", rotation=upright, fontsize=7 if upright == 0.0 else 6, color=INK, clip_on=True,
    )  # fmt: skip
    return box


def draw_yields(ax: Axes, plan: FacetPlan) -> PathCollection:
    """Layers against yield: the whole shortlist, the stack taken ringed."""
    colour = SIDE_COLOURS[plan.side]
    counts = np.array([len(found.nm) for found in plan.stacks], dtype=float)
    yields = np.array([100 * found.yields.chips for found in plan.stacks])
    best = [float(yields[counts == count].max()) for count in np.unique(counts)]
    ax.plot(np.unique(counts), best, color=colour, lw=1.0, alpha=0.5)
    points = ax.scatter(counts, yields, s=26, color=colour, zorder=3)
    taken = plan.chosen
    ax.scatter(counts[taken], yields[taken], s=120, facecolor="none", edgecolor=INK, lw=1.4, zorder=4)
    ax.annotate(
        f"taken: {yields[taken]:.1f} %", (counts[taken], yields[taken]), xytext=(0, -16),
        textcoords="offset points", ha="center", fontsize=8, color=INK,
    )  # fmt: skip
    ax.set_xlabel("searched layers")
    ax.set_ylabel("chips inside all windows (%)")
    ax.set_xticks(np.unique(counts))
    ax.set_xlim(counts.min() - 0.6, counts.max() + 0.6)
    ax.set_ylim(min(-4.0, yields.min()), 106.0)
    return points


def draw_power(
    ax: Axes, power: PowerCurrent, *, drive_A: float | None
) -> list[Line2D]:
    """Power of both facets against current, the operating current marked."""
    lines = []
    for side, watts in (("front", power.front_W), ("rear", power.rear_W)):
        (line,) = ax.plot(power.current_A, watts, color=SIDE_COLOURS[side], lw=1.8, label=side)
        lines.append(line)
    if drive_A is not None:
        ax.axvline(drive_A, color=QUIET, lw=1.0, ls=(0, (4, 3)))
        ax.annotate(
            f"{drive_A:g} A", (drive_A, ax.get_ylim()[1]), xytext=(-3, -10),
            textcoords="offset points", ha="right", fontsize=8, color=QUIET,
        )  # fmt: skip
    ax.set_xlabel("current (A)")
    ax.set_ylabel("power (W)")
    ax.set_xlim(0, float(power.current_A[-1]))
    ax.set_ylim(bottom=0)
    ax.legend(loc="upper left")
    return lines


def spread_collections(ax: Axes) -> list[FillBetweenPolyCollection]:
    """The filled spread bands on an axes."""
    return [c for c in ax.collections if isinstance(c, FillBetweenPolyCollection)]
