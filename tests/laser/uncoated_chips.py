"""Synthetic uncoated chips, made with the laser's own forward models."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.laser import ChipKind, FacetLight, GainLaw, LaserChip, UncoatedChips, estimate

STRIPE_UM = 95.0
WAVELENGTH_NM = 976.0


@dataclass(frozen=True)
class Truth:
    """What the calibration should find."""

    internal_loss_per_cm: float
    injection_efficiency: float
    transparency_A_per_cm2: float
    modal_gain_per_cm: float

    def row(self) -> np.ndarray:
        return np.array(
            [
                self.internal_loss_per_cm,
                self.injection_efficiency,
                self.transparency_A_per_cm2,
                self.modal_gain_per_cm,
            ]
        )


PUMP = Truth(0.8, 0.95, 120.0, 18.0)
BARE = FacetLight.lossless(0.31)


def a_truth(rng: np.random.Generator) -> Truth:
    """A chip from a spread of chips."""
    return Truth(
        rng.uniform(0.5, 8.0), rng.uniform(0.6, 0.97), rng.uniform(50.0, 300.0), rng.uniform(12, 60)
    )


def kind(bare: FacetLight = BARE, **changes: object) -> ChipKind:
    return ChipKind(wavelength_nm=WAVELENGTH_NM, stripe_um=STRIPE_UM, bare=bare, **changes)


def perfect_chips(
    truth: Truth,
    length_um: list[float],
    *,
    bare: FacetLight = BARE,
    law: GainLaw = GainLaw.LOGARITHMIC,
    emitters: int = 1,
    stages: int = 1,
) -> UncoatedChips:
    """Threshold and slope of both facets by the forward models, without scatter."""
    rows = []
    for length in length_um:
        chip = LaserChip(
            wavelength_nm=WAVELENGTH_NM,
            length_um=length,
            stripe_um=STRIPE_UM,
            internal_loss_per_cm=truth.internal_loss_per_cm,
            injection_efficiency=truth.injection_efficiency,
            transparency_A_per_cm2=truth.transparency_A_per_cm2,
            modal_gain_per_cm=truth.modal_gain_per_cm,
            gain_law=law,
            emitters=emitters,
            stages=stages,
        )
        figures = estimate(chip, bare, bare)
        both = figures.slope_front_W_per_A + figures.slope_rear_W_per_A
        rows.append((length, figures.threshold_A, both))
    return UncoatedChips(*np.array(rows, dtype=float).T)


def scattered_chips(
    perfect: UncoatedChips, rng: np.random.Generator, *, slope: float, threshold: float
) -> UncoatedChips:
    """The same chips with relative scatter of slope and threshold."""
    n = perfect.length_um.size
    return UncoatedChips(
        perfect.length_um,
        perfect.threshold_A * np.exp(threshold * rng.standard_normal(n)),
        perfect.slope_W_per_A * np.exp(slope * rng.standard_normal(n)),
    )
