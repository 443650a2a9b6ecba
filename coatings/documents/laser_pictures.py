"""Pictures of ``ripple`` and ``calibrate``."""

from __future__ import annotations

from dataclasses import replace

import matplotlib as mpl
import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.lines import Line2D
from scipy.constants import c

from coatings.calibration import ChipCalibration
from coatings.documents.look import GATE, INK, QUIET, SIDE_COLOURS, STYLE
from coatings.documents.pictures import png
from coatings.facets import FloatArray
from coatings.laser import Amplifier, Ripple
from coatings.laser.calibrate_model import expected
from coatings.recipe import Recipe

FEW_MODES = 8
LINE_POINTS = 121


def ripple_picture(recipe: Recipe, amplifier: Amplifier, ripple: Ripple) -> bytes:
    """Gain over the band, and a few modes where the ripple is worst, as PNG."""
    with mpl.rc_context(STYLE):
        figure = Figure(figsize=(7.6, 5.6), layout="constrained")
        _title(figure, f"{recipe.title}: gain below threshold")
        whole, near = figure.subplots(2, 1)
        draw_gain(whole, amplifier, ripple)
        draw_gain(near, amplifier, ripple)
        mode_nm = ripple.worst_nm**2 * ripple.mode_spacing_GHz / c
        low, high = ripple.wavelength_nm[0], ripple.wavelength_nm[-1]
        half = min(FEW_MODES * mode_nm / 2.0, (high - low) / 2.0)
        middle = float(np.clip(ripple.worst_nm, low + half, high - half))
        near.set_xlim(middle - half, middle + half)
        near.set_xlabel("wavelength (nm)")
        near.set_title(f"where it is worst: {ripple.ripple_dB:.3g} dB")
        return png(figure)


def draw_gain(ax: Axes, amplifier: Amplifier, ripple: Ripple) -> Line2D:
    """Transmitted gain in decibel, and the single pass."""
    (line,) = ax.plot(
        ripple.wavelength_nm, 10.0 * np.log10(ripple.gain), color=SIDE_COLOURS["front"], lw=0.9
    )
    single = amplifier.gain_at_dB(ripple.wavelength_nm)
    ax.plot(ripple.wavelength_nm, single, color=QUIET, lw=1.0, ls="--", label="single pass")
    ax.set_ylabel("gain, facet to facet (dB)")
    ax.legend(loc="lower right")
    return line


def calibrate_picture(recipe: Recipe, calibrated: ChipCalibration) -> bytes:
    """The chips on the two usual lines with the joint fit, as PNG."""
    points = calibrated.found.points
    length = np.linspace(0.8 * points.length_cm.min(), 1.1 * points.length_cm.max(), LINE_POINTS)
    line = replace(
        points, length_cm=length, efficiency=np.ones_like(length), density=np.ones_like(length)
    )
    ln_d, ln_J = expected(line, calibrated.found.parameters)
    with mpl.rc_context(STYLE):
        figure = Figure(figsize=(7.6, 3.8), layout="constrained")
        _title(figure, f"{recipe.title}: uncoated chips")
        left, right = figure.subplots(1, 2)
        draw_chips(left, calibrated, points.length_cm * 1e4, 1.0 / points.efficiency)
        left.plot(1e4 * length, np.exp(-ln_d), color=GATE, lw=1.4)
        left.set_xlabel("length (µm)")
        left.set_ylabel("electrons a photon out, both facets")
        draw_chips(right, calibrated, 1.0 / points.length_cm, points.density)
        right.plot(1.0 / length, np.exp(ln_J), color=GATE, lw=1.4)
        right.set_yscale("log")
        right.set_xlabel("1/length (1/cm)")
        right.set_ylabel("threshold density (A/cm²)")
        left.legend(loc="upper left")
        return png(figure)


def draw_chips(ax: Axes, calibrated: ChipCalibration, x: FloatArray, y: FloatArray) -> list[Line2D]:
    """Measured chips; those left out of the fit as crosses."""
    used = calibrated.found.used
    drawn = ax.plot(x[used], y[used], "o", ms=4.0, color=SIDE_COLOURS["front"], label="chips")
    if not used.all():
        drawn += ax.plot(x[~used], y[~used], "x", color=SIDE_COLOURS["rear"], label="left out")
    return drawn


def _title(figure: Figure, text: str) -> None:
    figure.suptitle(text, x=0.02, ha="left", fontsize=11, fontweight="bold", color=INK)
