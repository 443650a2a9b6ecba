"""The chip's guided mode at the wavelength of operation, in figures and for a picture."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.facets import FloatArray, chip_mode
from coatings.optics.far_field import far_field
from coatings.optics.guide_modes import GuidedMode
from coatings.recipe import Recipe

TAILS = 4.0  # how many lengths of the tails a picture shows, at most a micrometre and a half
SAMPLES = 801


@dataclass(frozen=True)
class GuideFigures:
    """The fundamental mode: effective and group index, share of the power in each layer (N,), effective height
    int |E|^2 dx / max |E|^2 [um] and full width of the far field at half maximum [deg], None where it does
    not fall to half."""

    polarization: str
    wavelength_nm: float
    effective_index: float
    group_index: float
    modal_loss_per_cm: float
    layers: tuple[str, ...]
    confinement: FloatArray
    near_field_height_um: float
    far_field_fwhm_deg: float | None


@dataclass(frozen=True)
class GuideProfile:
    """Near field |phi|^2 over its maximum across the layers (x from the substrate's end [um]), the layers'
    index there, interfaces [um]; far field over its maximum against angle [deg]."""

    x_um: FloatArray
    intensity: FloatArray
    index: FloatArray
    interfaces_um: FloatArray
    angle_deg: FloatArray
    far: FloatArray


def guide_figures(recipe: Recipe) -> GuideFigures | None:
    """Figures of the chip's own mode; None for a recipe without [chip.guide]."""
    guide = recipe.chip.guide
    if guide is None:
        return None
    mode = _mode(recipe)
    k0_per_cm = 2e7 * np.pi / recipe.chip.wavelength_nm
    width = float(mode.far_field_fwhm_deg[0])
    return GuideFigures(
        polarization=recipe.chip.polarization,
        wavelength_nm=recipe.chip.wavelength_nm,
        effective_index=float(mode.n_eff[0].real),
        group_index=float(mode.group_index[0]),
        modal_loss_per_cm=float(2.0 * k0_per_cm * mode.n_eff[0].imag),
        layers=tuple(layer.material or f"n = {layer.index:g}" for layer in guide.layers),
        confinement=mode.confinement[:, 0],
        near_field_height_um=float(mode.near_field_height_um[0]),
        far_field_fwhm_deg=None if np.isnan(width) else width,
    )


def guide_profile(recipe: Recipe) -> GuideProfile:
    """Near and far field of the chip's mode; the recipe must have [chip.guide]."""
    mode = _mode(recipe)
    edges = np.concatenate([[0.0], np.cumsum(mode.guide.thickness_um)])
    tails = np.minimum(TAILS * mode.tail_um[:, 0], 1.5)
    x = np.linspace(-tails[0], edges[-1] + tails[1], SAMPLES)
    intensity = np.abs(mode.profile(x)) ** 2
    angle = np.linspace(-90.0, 90.0, SAMPLES)
    far = far_field(mode, angle)
    return GuideProfile(
        x_um=x,
        intensity=intensity / intensity.max(),
        index=mode.guide.index[np.searchsorted(edges, x), 0].real,
        interfaces_um=edges,
        angle_deg=angle,
        far=far / far.max(),
    )


def _mode(recipe: Recipe) -> GuidedMode:
    at = np.array([recipe.chip.wavelength_nm])
    return chip_mode(recipe, at, tm=recipe.chip.polarization == "TM")
