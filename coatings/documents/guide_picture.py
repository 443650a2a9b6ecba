"""Picture of the chip's mode: near field over the layers, far field."""

from __future__ import annotations

import matplotlib as mpl
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D

from coatings.documents.look import CHIP, INK, QUIET, STYLE
from coatings.documents.pictures import png
from coatings.guide import GuideFigures, GuideProfile

FIELD = "#5b3f8c"


def guide_picture(figures: GuideFigures, profile: GuideProfile, *, title: str) -> bytes:
    """Near field at the left, far field at the right, as PNG."""
    with mpl.rc_context(STYLE):
        figure = Figure(figsize=(7.6, 3.2), layout="constrained")
        figure.suptitle(
            f"{title}: {figures.polarization} mode at {figures.wavelength_nm:g} nm",
            x=0.02, ha="left", fontsize=11, fontweight="bold", color=INK,
        )  # fmt: skip
        near_ax, far_ax = figure.subplots(1, 2)
        draw_near_field(near_ax, profile)
        near_ax.set_title(f"effective height {figures.near_field_height_um:.3g} um")
        draw_far_field(far_ax, profile)
        width = figures.far_field_fwhm_deg
        far_ax.set_title(
            "far field" if width is None else f"far field, {width:.3g}° at half maximum"
        )
        return png(figure)


def draw_near_field(ax: Axes, profile: GuideProfile) -> Line2D:
    """Intensity across the layers, the index profile behind it on its own axis."""
    behind = ax.twinx()
    behind.fill_between(
        profile.x_um, profile.index, profile.index.min(), color=CHIP, alpha=0.6, lw=0
    )
    behind.set_ylabel("index", color=QUIET)
    behind.grid(visible=False)
    behind.spines["right"].set_visible(True)
    room = profile.index.max() - profile.index.min()
    behind.set_ylim(profile.index.min(), profile.index.max() + 0.6 * room)
    (line,) = ax.plot(profile.x_um, profile.intensity, color=FIELD, lw=1.8)
    ax.set_zorder(behind.get_zorder() + 1)
    ax.patch.set_visible(False)
    ax.set_xlabel("across the layers, substrate at the left (um)")
    ax.set_ylabel("near field")
    ax.set_xlim(float(profile.x_um[0]), float(profile.x_um[-1]))
    ax.set_ylim(0, 1.08)
    return line


def draw_far_field(ax: Axes, profile: GuideProfile) -> Line2D:
    """Intensity against angle."""
    (line,) = ax.plot(profile.angle_deg, profile.far, color=FIELD, lw=1.8)
    ax.axhline(0.5, color=QUIET, lw=0.8, ls=(0, (4, 3)))
    ax.set_xlabel("angle to the facet normal (degrees)")
    ax.set_xlim(-90, 90)
    ax.set_ylim(0, 1.08)
    ax.set_xticks([-90, -60, -30, 0, 30, 60, 90])
    return line
