"""From the facets' reflectivities to threshold and power; knows no layers, recipes or files."""

from coatings.laser.axial import (
    AxialProfile,
    axial_power_ratio,
    axial_profile,
    front_over_least,
)
from coatings.laser.budget import PowerBudget, power_budget
from coatings.laser.calibrate import ChipKind, UncoatedChips, calibrate
from coatings.laser.calibrate_outliers import LeftOut, Outlier
from coatings.laser.calibrate_result import Calibration, Quantity
from coatings.laser.chip import Gain, GainLaw, LaserChip
from coatings.laser.estimate import LaserEstimate, estimate
from coatings.laser.external import External, FedBackFacet, with_external
from coatings.laser.facets import FacetLight
from coatings.laser.inverse import (
    Method,
    R_from_slope_ratio,
    Reflectivity,
    reflectivity_from_bare,
    reflectivity_from_ripple,
    reflectivity_from_slopes,
)
from coatings.laser.inverse_fringes import FringeSpectrum, RippleReading, read_ripple
from coatings.laser.inverse_slopes import Side, SlopeRatio, TwoSidedSweep, slope_ratio
from coatings.laser.limits import Judgement, Limits, judge_limits, keeps_limits
from coatings.laser.locking import (
    ExternalEstimate,
    estimate_external,
    highest_locking_R,
    locking_margin_per_cm,
    rival_nm,
)
from coatings.laser.operation import FieldModel, Operation, operate
from coatings.laser.power import (
    FacetSplit,
    excess_current_A,
    facet_load_MW_per_cm2,
    facet_output_MW_per_cm2,
    facet_split,
    total_slope_W_per_A,
)
from coatings.laser.power_current import PowerCurrent, power_current
from coatings.laser.resonator import (
    R_product_needed,
    mode_spacing_GHz,
    reflected_gain,
    ripple_dB,
    round_trip,
    round_trip_phase_rad,
    single_pass_gain,
    transmitted_gain,
)
from coatings.laser.ripple import Amplifier, Ripple, fringe_grid_nm, ripple_spectrum
from coatings.laser.threshold import (
    gain_shape,
    lowest_threshold,
    mirror_loss_per_cm,
    threshold_current_A,
    threshold_gain_per_cm,
)

__all__ = [
    "Amplifier",
    "AxialProfile",
    "Calibration",
    "ChipKind",
    "External",
    "ExternalEstimate",
    "FacetLight",
    "FacetSplit",
    "FedBackFacet",
    "FieldModel",
    "FringeSpectrum",
    "Gain",
    "GainLaw",
    "Judgement",
    "LaserChip",
    "LaserEstimate",
    "LeftOut",
    "Limits",
    "Method",
    "Operation",
    "Outlier",
    "PowerBudget",
    "PowerCurrent",
    "Quantity",
    "R_from_slope_ratio",
    "R_product_needed",
    "Reflectivity",
    "Ripple",
    "RippleReading",
    "Side",
    "SlopeRatio",
    "TwoSidedSweep",
    "UncoatedChips",
    "axial_power_ratio",
    "axial_profile",
    "calibrate",
    "estimate",
    "estimate_external",
    "excess_current_A",
    "facet_load_MW_per_cm2",
    "facet_output_MW_per_cm2",
    "facet_split",
    "fringe_grid_nm",
    "front_over_least",
    "gain_shape",
    "highest_locking_R",
    "judge_limits",
    "keeps_limits",
    "locking_margin_per_cm",
    "lowest_threshold",
    "mirror_loss_per_cm",
    "mode_spacing_GHz",
    "operate",
    "power_budget",
    "power_current",
    "read_ripple",
    "reflected_gain",
    "reflectivity_from_bare",
    "reflectivity_from_ripple",
    "reflectivity_from_slopes",
    "ripple_dB",
    "ripple_spectrum",
    "rival_nm",
    "round_trip",
    "round_trip_phase_rad",
    "single_pass_gain",
    "slope_ratio",
    "threshold_current_A",
    "threshold_gain_per_cm",
    "total_slope_W_per_A",
    "transmitted_gain",
    "with_external",
]
