"""The field along the chip: hole burning where the facets are strongly unequal.

Two waves run along the chip, dP+-/dz = +-(g(z) - a_i) P+-, held by the facets, P+(0) = R2 P-(0)
and P-(L) = R1 P+(L), and feed on the local carriers, J - Jsp(g) = K g (P+ + P-) with
K = q/(h nu eta_i w stages), Jsp = Jtr exp(g/G0) or Jtr (1 + g/G0). The product P+ P- = C is
constant along z, so with v = ln(P+/sqrt C), dv/dz = g - a_i, the whole problem is one root in C:

    L = int dv/(g(2 sqrt C cosh v) - a_i),   v from ln(R2)/2 to -ln(R1)/2.

The integral grows with C, from less than L at C = 0 if and only if the chip is above threshold, to
infinity where g has fallen to a_i at the stronger facet: one root, and only above threshold. The
lost power then is sqrt C [(1 - R1)/sqrt R1 + (1 - R2)/sqrt R2]. For a linear law without internal
loss this is the closed form of Rigrod, J. Appl. Phys. 36, 2487 (1965) (from memory).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from coatings.errors import ArrayError, Problem
from coatings.laser.cavity import Cavity, cavity_above, gain_over_modal, gauss_mesh
from coatings.laser.checks import FloatArray, Real, reflectances, same_shape
from coatings.laser.chip import LaserChip
from coatings.laser.power import cooled_slope_W_per_A
from coatings.laser.threshold import warmed_threshold_A

_BLOCK = 512
# So close to threshold both models agree beyond what rounding leaves of their difference.
_AT_THRESHOLD = 1e-8
_ORDER = 8
_PANELS = 64
_HALVINGS = 36


def front_over_least(R_front: Real) -> FloatArray:
    """Density of the light at the front over the least along the chip, (1 + R1)/(2 sqrt R1).

    Holds for any gain law and current, because P+ P- is constant and the two waves are equal
    somewhere inside the chip; one for R1 = 1.

    Raises
    ------
    ArrayError
        A reflectance of zero or above 1.
    """
    R = reflectances("R_front", R_front)
    ratio: FloatArray = (1.0 + R) / (2.0 * np.sqrt(R))
    return ratio


def axial_power_ratio(
    chip: LaserChip, *, current_A: Real, R_front: Real, R_rear: Real, rise_K: Real = 0.0
) -> FloatArray:
    """Light lost at the facets by the axial model over the uniform model's, without the knee.

    One at threshold and below, where both are the same model. Vectorised.

    Parameters
    ----------
    chip : the chip.
    current_A : current of the bar [A].
    R_front, R_rear : power reflectances [1].
    rise_K : junction temperature less reference temperature [K].

    Raises
    ------
    ArrayError
        A reflectance of zero or above 1, two facets of R = 1, or shapes that do not match.
    """
    front, rear = reflectances("R_front", R_front), reflectances("R_rear", R_rear)
    current, front, rear, rise = same_shape(
        {"current_A": current_A, "R_front": front, "R_rear": rear, "rise_K": rise_K}
    )
    _refuse_no_loss(front * rear)
    rows = [np.ravel(part) for part in (current, front, rear, rise)]
    return axial_ratio_kernel(chip, *rows).reshape(current.shape)


def axial_ratio_kernel(
    chip: LaserChip, current: FloatArray, R_front: FloatArray, R_rear: FloatArray, rise: FloatArray
) -> FloatArray:
    """``axial_power_ratio`` without checks; arrays of shape (n,)."""
    pumping, threshold = _pumping(chip, current, R_front, R_rear, rise)
    ratio = np.ones(pumping.shape)
    rows = np.flatnonzero(pumping > threshold * (1.0 + _AT_THRESHOLD))
    # Blocks that stay in the cache: several times faster than all draws at once.
    for start in range(0, rows.size, _BLOCK):
        block = rows[start : start + _BLOCK]
        cavity = cavity_above(chip, pumping[block], R_front[block], R_rear[block])
        ratio[block] = cavity.root() / cavity.uniform_root()
    return ratio


def _pumping(
    chip: LaserChip, current: FloatArray, R_front: FloatArray, R_rear: FloatArray, rise: FloatArray
) -> tuple[FloatArray, FloatArray]:
    """J/Jtr and its value at threshold."""
    transparency_A = chip.transparency_A_per_cm2 * chip.pumped_cm2
    pumping = current / warmed_threshold_A(chip, np.asarray(transparency_A), rise)
    mirror = -0.5 * (np.log(R_front) + np.log(R_rear)) / chip.length_cm
    need = chip.gain.current_density_A_per_cm2(chip.internal_loss_per_cm + mirror)
    return pumping, need / chip.transparency_A_per_cm2


def _refuse_no_loss(R_product: Real) -> None:
    if np.any(np.asarray(R_product) == 1.0):
        raise ArrayError(Problem("R_front, R_rear", "both are 1: no light is lost; give one below"))


@dataclass(frozen=True)
class AxialProfile:
    """Field along one chip, from the rear (z = 0) to the front (z = L); arrays of shape (n,).

    Attributes
    ----------
    z_um : place, unevenly spaced [um].
    forward_W, backward_W : waves towards the front and the rear, all emitters [W].
    gain_per_cm : local modal gain [1/cm].
    lost_W : light lost at both facets [W]; ``internal_loss_W`` : absorbed along the chip [W].
    """

    z_um: FloatArray
    forward_W: FloatArray
    backward_W: FloatArray
    gain_per_cm: FloatArray
    lost_W: float
    internal_loss_W: float

    @property
    def density_over_least(self) -> FloatArray:
        """Density of the light over its least along the chip [1]."""
        # P+ P- is constant and the waves are equal somewhere: the least is 2 sqrt(P+ P-).
        least = 2.0 * np.sqrt(self.forward_W * self.backward_W)
        ratio: FloatArray = (self.forward_W + self.backward_W) / least
        return ratio


def axial_profile(
    chip: LaserChip, *, current_A: float, R_front: float, R_rear: float, rise_K: float = 0.0
) -> AxialProfile:
    """The two waves and the local gain along the chip, without the knee.

    Parameters
    ----------
    chip : the chip.
    current_A : current of the bar [A].
    R_front, R_rear : power reflectances [1], not both 1.
    rise_K : junction temperature less reference temperature [K].

    Raises
    ------
    ArrayError
        A current that is not above threshold, a reflectance of zero or above 1, or both 1.
    """
    front = float(reflectances("R_front", R_front))
    rear = float(reflectances("R_rear", R_rear))
    _refuse_no_loss(front * rear)
    pumping, threshold = _pumping(chip, *(np.array([x]) for x in (current_A, front, rear, rise_K)))
    if not pumping[0] > threshold[0] * (1.0 + _AT_THRESHOLD):
        raise ArrayError(
            Problem(
                "current_A",
                f"{current_A:g} A is not above the threshold of "
                f"{current_A * threshold[0] / pumping[0]:.4g} A: there is no stimulated field; "
                "raise it",
            )
        )
    cavity = cavity_above(chip, pumping, np.array([front]), np.array([rear]))
    return _profile(chip, cavity, rise_K)


def _profile(chip: LaserChip, cavity: Cavity, rise_K: float) -> AxialProfile:
    edges = _graded_edges(front_is_strong=bool(cavity.R_front[0] <= cavity.R_rear[0]))
    mesh = gauss_mesh(edges, _ORDER)
    root = float(cavity.root(mesh)[0])
    v_rear, span = float(cavity.v_rear[0]), float((cavity.v_front - cavity.v_rear)[0])

    def net_gain(nodes: FloatArray) -> FloatArray:
        density = 2.0 * root * np.cosh(v_rear + span * nodes)
        return gain_over_modal(cavity.law, cavity.pumping, density) - cavity.loss

    per_panel = (span * mesh.weights / net_gain(mesh.nodes)).reshape(-1, _ORDER)
    z = np.concatenate([[0.0], np.cumsum(per_panel.sum(axis=1))])
    absorbed = cavity.loss * root * float(per_panel.ravel() @ cavity.waves(mesh)[0])
    scale_W = _saturation_W(chip, rise_K)
    v = v_rear + span * edges
    return AxialProfile(
        z_um=z / chip.modal_gain_per_cm * 1e4,
        forward_W=scale_W * root * np.exp(v),
        backward_W=scale_W * root * np.exp(-v),
        gain_per_cm=chip.modal_gain_per_cm * (net_gain(edges) + cavity.loss),
        lost_W=scale_W * root * float(cavity.lost_over_root[0]),
        internal_loss_W=scale_W * absorbed,
    )


def _graded_edges(*, front_is_strong: bool) -> FloatArray:
    """Panels that shrink towards the stronger light, where gain may come close to the loss."""
    even = np.linspace(0.0, 1.0, _PANELS + 1)[:-1]
    halving = 1.0 - 0.5 ** np.arange(1, _HALVINGS) / _PANELS
    edges = np.concatenate([even, halving, [1.0]])
    return edges if front_is_strong else 1.0 - edges[::-1]


def _saturation_W(chip: LaserChip, rise_K: float) -> float:
    """Power at which p = 1, Jtr/(K G0) for all emitters [W]."""
    rise = np.asarray(rise_K)
    transparency_A = warmed_threshold_A(
        chip, np.asarray(chip.transparency_A_per_cm2 * chip.pumped_cm2), rise
    )
    slope = cooled_slope_W_per_A(
        chip, np.asarray(chip.injection_efficiency * chip.stages * chip.photon_V), rise
    )
    return float(slope * transparency_A / (chip.length_cm * chip.modal_gain_per_cm))
