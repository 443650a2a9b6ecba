"""What a facet does to the guided mode: amplitudes and shares of its power."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from functools import cached_property
from typing import NamedTuple

import numpy as np

from coatings.optics.arrays import Complexes, Reals


@dataclass(frozen=True, eq=False)
class ModalResponse:
    """What S stacks do to the guided mode at W wavelengths.

    Attributes
    ----------
    r : complex array (S, W)
        Reflected over incident amplitude of the mode, by its tangential electric field.
    T : array (S, W)
        Share of the mode's power that leaves.
    """

    r: Complexes
    T: Reals
    _thrown_back: Callable[[], Reals] = field(repr=False)

    @property
    def R(self) -> Reals:
        """Reflectivity of the mode |r|^2, array (S, W)."""
        return self.r.real**2 + self.r.imag**2

    @cached_property
    def S(self) -> Reals:
        """Share thrown back into the chip outside the mode, array (S, W).

        1 - R - T without loss; else an integral that is done when first asked for, and takes its
        time with mirrors.
        """
        return self._thrown_back()

    @property
    def A(self) -> Reals:
        """Share absorbed in the coating, 1 - R - T - S, array (S, W)."""
        return 1.0 - self.R - self.T - self.S

    @property
    def phase_rad(self) -> Reals:
        """Phase of r [rad], array (S, W), in (-pi, pi]."""
        return np.angle(self.r)


class Found(NamedTuple):
    """The kernel's answer: r and c/d (S, W), slopes (S, parts, W, L)."""

    r: Complexes
    tilt: Complexes
    slopes: Reals
