"""The chip of the recipe example, for every test of the laser room."""

from __future__ import annotations

import pytest

from coatings.laser import LaserChip


@pytest.fixture
def pump() -> LaserChip:
    """976 nm pump chip of 4 mm with its reference temperature at the heat sink."""
    return LaserChip(
        wavelength_nm=976.0,
        length_um=4000.0,
        stripe_um=95.0,
        internal_loss_per_cm=0.8,
        injection_efficiency=0.95,
        transparency_A_per_cm2=120.0,
        modal_gain_per_cm=18.0,
        drive_A=12.0,
        spontaneous_factor=1e-5,
        series_mohm=14.0,
        junction_V=1.31,
        thermal_K_per_W=2.0,
        t0_K=170.0,
        t1_K=600.0,
        mode_height_um=0.8,
    )
