"""Picture of the trade: power and threshold over front reflectivity."""

from __future__ import annotations

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from coatings.documents.look import GATE, INK, QUIET, SIDE_COLOURS, STYLE
from coatings.documents.pictures import png
from coatings.recipe import Recipe
from coatings.trading import ProductTrade

ALLOWED = "#dfeadf"


def trade_picture(recipe: Recipe, found: ProductTrade) -> bytes:
    """Power above, threshold beneath, over front R on a log axis, as PNG."""
    trade = found.trade
    with mpl.rc_context(STYLE):
        figure = Figure(figsize=(7.6, 6.0), layout="constrained")
        figure.suptitle(
            f"{recipe.title}: what the front's reflectivity does at {trade.drive_A:g} A",
            x=0.02, ha="left", fontsize=11, fontweight="bold", color=INK,
        )  # fmt: skip
        above, beneath = figure.subplots(2, 1, sharex=True, height_ratios=(3, 2))
        draw_power(above, found)
        draw_threshold(beneath, found)
        for ax in (above, beneath):
            draw_marks(ax, found)
        above.legend(loc="best")
        beneath.set_xlabel("front R")
        return png(figure)


def draw_power(ax: Axes, found: ProductTrade) -> list[Line2D]:
    """Front and rear power at the drive current."""
    columns = found.trade.columns
    lines = ax.plot(columns.R_front, columns.front_W, color=SIDE_COLOURS["front"], lw=1.8)
    lines += ax.plot(columns.R_front, columns.rear_W, color=SIDE_COLOURS["rear"], lw=1.2)
    lines[0].set_label("front power")
    lines[1].set_label("rear power")
    ax.set_xscale("log")
    ax.set_ylim(bottom=0.0)
    ax.set_ylabel("power (W)")
    return lines


def draw_threshold(ax: Axes, found: ProductTrade) -> Line2D:
    """Threshold current, up to a little beyond the drive current."""
    columns = found.trade.columns
    finite = np.where(np.isfinite(columns.threshold_A), columns.threshold_A, np.nan)
    (line,) = ax.plot(columns.R_front, finite, color=GATE, lw=1.8)
    if np.nanmax(finite, initial=0.0) > 1.2 * found.trade.drive_A:
        ax.set_ylim(0.0, 1.2 * found.trade.drive_A)
    else:
        ax.set_ylim(bottom=0.0)
    ax.set_ylabel("threshold (A)")
    return line


def draw_marks(ax: Axes, found: ProductTrade) -> None:
    """The range allowed, the best, and the front as it is now."""
    best = found.trade.best
    if best.R_low is not None and best.R_high is not None and best.R_front is not None:
        ax.axvspan(
            best.R_low, best.R_high, color=ALLOWED, zorder=0,
            label=f"R {best.R_low:.3g} to {best.R_high:.3g}: within 1 % of the best, limits kept",
        )  # fmt: skip
        ax.axvline(best.R_front, color=INK, lw=1.0, ls=":", label=f"best R {best.R_front:.3g}")
    front = found.facets.get("front")
    if front is not None and float(front.light.R) > 0.0:
        R = float(front.light.R)
        ax.axvline(R, color=QUIET, lw=1.4, ls="--", label=f"front now: R {R:.3g}")
