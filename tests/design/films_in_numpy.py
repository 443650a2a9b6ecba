"""The slow twin of the design room: windows, margins and yields from the recipe in plain numpy.

Nothing here uses `coatings.optics` or `coatings.design`: light goes through a stack by the Fresnel
coefficient of every interface, added from the outside in, and the run errs as physics says,

    d' = d (1 + run z0 + layer z + position zp) + sigma z',

one z0, z and z' a run and one zp a chip.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from coatings.recipe import Recipe

Reals = NDArray[np.float64]
Complexes = NDArray[np.complex128]


def light(
    wavelength_nm: Reals, incident: Complexes, outside: Complexes, index: Complexes, nm: Reals
) -> tuple[Reals, Reals]:
    """R and A (S, P) of stacks ``nm`` (S, L), chip outward; ``index`` (S or 1, L, P).

    Airy's summation from the outermost interface inward; incident (S or 1, P), outside (P,).
    """
    layers = nm.shape[1]
    media = [np.broadcast_to(incident, (len(nm), len(wavelength_nm)))]
    media += [np.broadcast_to(index[:, j], media[0].shape) for j in range(layers)]
    media.append(np.broadcast_to(outside, media[0].shape))
    r = (media[-2] - media[-1]) / (media[-2] + media[-1])
    t = 2 * media[-2] / (media[-2] + media[-1])
    for j in range(layers - 1, -1, -1):
        turn = np.exp(2j * np.pi * media[j + 1] * nm[:, j, None] / wavelength_nm)
        r_ab = (media[j] - media[j + 1]) / (media[j] + media[j + 1])
        t_ab = 2 * media[j] / (media[j] + media[j + 1])
        below = 1 + r_ab * r * turn**2
        r, t = (r_ab + r * turn**2) / below, t_ab * t * turn / below
    big_r = np.abs(r) ** 2
    return big_r, 1 - big_r - media[-1].real / media[0].real * np.abs(t) ** 2


@dataclass(frozen=True)
class Chips:
    """Drawn chips: normal deviates by source of error; what a run shares is repeated for its chips."""

    run: Reals
    layer: Reals
    offset: Reals
    position: Reals
    film: Reals
    chip: Reals


def draw(layers: int, films: int, *, runs: int, chips: int, rng: np.random.Generator) -> Chips:
    """``runs`` runs of ``chips`` chips each."""

    def of_run(*shape: int) -> Reals:
        return np.repeat(rng.normal(size=(runs, *shape)), chips, axis=0)

    return Chips(
        run=of_run(1),
        layer=of_run(layers),
        offset=of_run(layers),
        position=rng.normal(size=(runs * chips, 1)),
        film=of_run(films),
        chip=rng.normal(size=runs * chips),
    )


@dataclass(frozen=True)
class Twin:
    """One facet of a recipe with the materials of its layers, base and cap included."""

    recipe: Recipe
    side: str
    names: tuple[str, ...]
    grids: tuple[Reals, ...]

    @classmethod
    def of(
        cls, recipe: Recipe, names: Sequence[str], *, side: str = "front", step_nm: float = 1.0
    ) -> Twin:
        """``names`` are the searched layers' materials, chip outward."""
        facet = recipe.facets[side]
        every = [*(e.material for e in facet.base), *names, *(e.material for e in facet.cap)]
        grids = []
        for window in facet.windows:
            low, high = window.band_nm
            grids.append(np.linspace(low, high, int(np.ceil((high - low) / step_nm)) + 1))
        return cls(recipe, side, tuple(every), tuple(grids))

    def every_nm(self, nm: Reals) -> Reals:
        """Stacks (S, L) with base and cap around them."""
        facet = self.recipe.facets[self.side]
        base, cap = ([e.nm for e in part] for part in (facet.base, facet.cap))
        rows = len(nm)
        return np.hstack([np.tile(base, (rows, 1)), nm, np.tile(cap, (rows, 1))])

    def slack(
        self, every_nm: Reals, shift: Reals | None = None, chip: Reals | None = None
    ) -> Reals:
        """Least distance (S,) inside all windows of stacks with every layer given."""
        least = np.full(len(every_nm), np.inf)
        facet = self.recipe.facets[self.side]
        for window, grid in zip(facet.windows, self.grids, strict=True):
            incident = self.recipe.window_index(window, grid)[None, :].astype(complex)
            if chip is not None:
                incident = incident + chip[:, None]
            index = np.array([self.recipe.material(name).nk(grid) for name in self.names])
            index = index.reshape(1, len(self.names), len(grid))
            if shift is not None:
                index = index + shift[:, :, None]
            outside = self.recipe.index_of(facet.outside, grid)
            big_r, big_a = light(grid, incident, outside, index, every_nm)
            if window.low is not None:
                least = np.minimum(least, (big_r - window.low).min(axis=1))
            if window.high is not None:
                least = np.minimum(least, (window.high - big_r).min(axis=1))
            if window.absorption_at_most is not None:
                least = np.minimum(least, (window.absorption_at_most - big_a).min(axis=1))
        return least

    def margin(self, nm: Reals) -> Reals:
        """Margins (S,) of searched layers (S, L)."""
        return self.slack(self.every_nm(nm))

    def deposited(self, nm: Reals, chips: Chips) -> tuple[Reals, Reals, Reals]:
        """Thicknesses (S, L), index shift of every layer (S, L) and of the chip (S,)."""
        process = self.recipe.process_for(self.side)
        films = self.recipe.facets[self.side].films
        rows = [films.index(name) for name in self.names]
        sigma = np.array([process.index.get(name, 0.0) for name in films])
        shift = (chips.film * sigma)[:, rows]
        scale = (
            1
            + process.run_percent / 100 * chips.run
            + process.layer_percent / 100 * chips.layer
            + process.position_percent / 100 * chips.position
        )
        if process.holds == "optical":
            at = np.array([self.recipe.chip.wavelength_nm])
            n = np.array([self.recipe.material(name).nk(at).real[0] for name in self.names])
            scale = scale * n / (n + shift)
        ordered = self.every_nm(nm[None])[0]
        every = np.maximum(ordered * scale + process.thickness_sigma_nm * chips.offset, 0.0)
        return every, shift, process.chip_index * chips.chip

    def chips(self, *, runs: int, chips: int = 1, seed: int = 0) -> Chips:
        """Drawn chips of this facet."""
        films = len(self.recipe.facets[self.side].films)
        return draw(len(self.names), films, runs=runs, chips=chips, rng=np.random.default_rng(seed))

    def inside(self, nm: Reals, chips: Chips, *, piece: int = 4000) -> NDArray[np.bool_]:
        """Which drawn chips (S,) of one ordered stack (L,) are inside every window."""
        every, shift, chip = self.deposited(nm, chips)
        parts = [slice(at, at + piece) for at in range(0, len(every), piece)]
        return np.concatenate([self.slack(every[p], shift[p], chip[p]) >= 0.0 for p in parts])
