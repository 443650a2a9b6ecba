"""Why a guide can't be used: each check raises an error that says where, what and how to mend."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from coatings.errors import InputError, Problem
from coatings.optics.arrays import Integers, Reals, check_finite, refuse
from coatings.optics.guide_kernel import ABSENT, LOST, TWIN

if TYPE_CHECKING:
    from coatings.optics.guide import Guide
    from coatings.optics.guide_modes import GuidedMode

THINNEST_UM = 1e-4
LONGEST_TAIL_UM = 100.0


def check_thickness(um: Reals) -> None:
    """Refuse layers thinner than 0.1 nm."""
    check_finite(um, "thickness_um")
    thin = um < THINNEST_UM
    if thin.any():
        place = int(np.argmax(thin))
        what = (
            f"is {um[place]:g} um; a layer is 0.1 nm (0.0001 um) thick or thicker, "
            "as an atom is: leave it out or give its thickness in um"
        )
        raise refuse(f"thickness_um[{place}]", what)


def check_metal(guide: Guide, tm: bool) -> None:
    """Refuse a metal in TM: the wave on its surface would be taken for the laser's mode."""
    metal = (guide.index**2).real <= 0.0
    if not tm or not metal.any():
        return
    layer, place = (int(i) for i in np.argwhere(metal)[0])
    what = (
        f"is {_complex(guide.index[layer, place])} at {guide.wavelength_nm[place]:g} nm, a metal: "
        "in TM the first mode would be a wave bound to its surface, not the laser's; end the "
        "guide in the semiconductor next to it"
    )
    raise InputError(Problem(f"guide layer {layer + 1}", what))


def _complex(value: complex) -> str:
    return f"{value.real:g} + {value.imag:g}i"


def check_states(guide: Guide, state: Integers, name: str) -> None:
    """Refuse wavelengths at which `guide_kernel.solve` found no mode of polarization ``name``."""
    absent = state == ABSENT
    if absent.any():
        raise InputError(Problem("guide", _why_absent(guide, absent, name)))
    for bad, what in (
        (
            TWIN,
            "has twin guides: its two first {name} modes differ by less than 1e-8 in effective "
            "index at {nm:g} nm, and in which of the twins the light runs is not decided; "
            "give one of them",
        ),
        (
            LOST,
            "keeps no {name} mode at {nm:g} nm when loss and gain of its layers are counted; "
            "lower the imaginary parts of their indices",
        ),
    ):
        if (state == bad).any():
            nm = guide.wavelength_nm[int(np.argmax(state == bad))]
            raise InputError(Problem("guide", what.format(name=name, nm=nm)))


def _why_absent(guide: Guide, absent: NDArray[np.bool_], name: str) -> str:
    place = int(np.argmax(absent))
    nm = guide.wavelength_nm[place]
    n = np.sqrt(np.maximum((guide.index[:, place] ** 2).real, 0.0))
    inner, outer = n[1:-1].max(), max(n[0], n[-1])
    if inner <= outer:
        why = f"no layer within (largest index {inner:.6g}) is above the outer ones ({outer:.6g})"
    else:
        why = "it is too thin or too weak for its unequal sides"
    if absent.all():
        return f"has no bound {name} mode at {nm:g} nm: {why}; thicken or strengthen the core"
    held = guide.wavelength_nm[~absent]
    near = held[np.argmin(np.abs(held - nm))]
    return (
        f"guides {name} at {near:g} nm but not at {nm:g} nm: {why} there; "
        "strengthen the core or narrow the band"
    )


def check_tails(mode: GuidedMode) -> None:
    """Refuse a mode whose tail is too long to be one."""
    tail = mode.tail_um
    if tail.max() <= LONGEST_TAIL_UM and not np.isnan(tail).any():
        return
    place = int(np.nanargmax(tail.max(axis=0)))
    what = (
        f"holds its {'TM' if mode.tm else 'TE'} mode of order {mode.order} so weakly at "
        f"{mode.guide.wavelength_nm[place]:g} nm that a tail is {tail[:, place].max():.3g} um "
        "long (100 um at most): it is next to cut-off; strengthen the core"
    )
    raise InputError(Problem("guide", what))
