"""Errors of the run: what is deposited when a stack is ordered, and how many chips stay inside.

    d_j' = d_j (1 + run z0 + layer z_j + position z_p) + thickness_sigma z'_j

with independent standard normal z: z_p once a chip, the others once a run. Film indices shift run to
run, the chip's modal index chip to chip. When the monitor holds the optical thickness, a film whose
index came out high is that much thinner. Base and cap are deposited too and err like any layer.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import sqrt

import numpy as np
from numpy.typing import NDArray

from coatings.design.model import FacetModel
from coatings.facets import FloatArray, IntArray
from coatings.optics.light import Light
from coatings.optics.nearby import near
from coatings.recipe import FacetName, Recipe

RUN_SHARE = 0.95  # share of a run's chips that must be inside for the run to count
RUN_POINTS = 15  # wavelengths a window for the runs' chips
FAR_OUTSIDE = 0.5  # no chip passes when all miss by more than this share of the mean miss
EXACT_CHIPS = 4096  # chips of a guided mode that are sampled exactly,
EXACT_POINTS = 9  # at so many wavelengths a window
CHUNK = 2048  # draws evaluated at once: keeps arrays in cache


@dataclass(frozen=True)
class RunErrors:
    """One-sigma errors: fractions of thickness, nm, index; ``index`` and ``monitor_index`` (M,) by film row."""

    run: float
    layer: float
    position: float
    thickness_sigma_nm: float
    index: FloatArray
    chip_index: float
    holds_optical: bool
    monitor_index: FloatArray

    @property
    def none(self) -> bool:
        """Whether every error is zero."""
        scalars = (self.run, self.layer, self.position, self.thickness_sigma_nm, self.chip_index)
        return not any(scalars) and not self.index.any()

    def thickness_nm(self, nm: FloatArray) -> float:
        """Mean one-sigma error [nm] of the layers (L,) of an ordered stack."""
        share = np.hypot(np.hypot(self.run, self.layer), self.position)
        return float(np.hypot(share * nm, self.thickness_sigma_nm).mean())


@dataclass(frozen=True)
class Draws:
    """Deposited chips: ``factor`` and ``offset_nm`` (S, L) on thickness, ``film_shift`` (S, M),
    ``incident_shift`` (S,) on index. L counts every layer, base and cap included."""

    factor: FloatArray
    offset_nm: FloatArray
    film_shift: FloatArray
    incident_shift: FloatArray

    def __len__(self) -> int:
        return len(self.factor)

    def nm(self, ordered_nm: FloatArray) -> FloatArray:
        """Deposited thicknesses (S, L) [nm]; a film that would come out below nothing is absent."""
        return np.maximum(ordered_nm * self.factor + self.offset_nm, 0.0)

    def part(self, rows: slice) -> Draws:
        """Some of the draws."""
        return Draws(
            self.factor[rows],
            self.offset_nm[rows],
            self.film_shift[rows],
            self.incident_shift[rows],
        )


def run_errors(recipe: Recipe, side: FacetName) -> RunErrors:
    """Errors of a facet's run from its recipe; ``side`` is "front" or "rear"."""
    process = recipe.process_for(side)
    films = recipe.facets[side].films
    at = np.array([recipe.chip.wavelength_nm])
    return RunErrors(
        run=process.run_percent / 100.0,
        layer=process.layer_percent / 100.0,
        position=process.position_percent / 100.0,
        thickness_sigma_nm=process.thickness_sigma_nm,
        index=np.array([process.index.get(name, 0.0) for name in films]),
        chip_index=process.chip_index,
        holds_optical=process.holds == "optical",
        monitor_index=np.array([float(recipe.material(name).nk(at).real[0]) for name in films]),
    )


@dataclass(frozen=True)
class _Deviates:
    """Standard normal deviates of R runs and their C chips, one field a source of error."""

    run: FloatArray
    layer: FloatArray
    offset: FloatArray
    film: FloatArray
    position: FloatArray
    chip: FloatArray

    @classmethod
    def drawn(
        cls, generator: np.random.Generator, *, layers: int, films: int, runs: int, chips: int
    ) -> _Deviates:
        normal = generator.standard_normal
        return cls(
            run=normal((runs, 1)),
            layer=normal((runs, layers)),
            offset=normal((runs, layers)),
            film=normal((runs, films)),
            position=normal((runs * chips, 1)),
            chip=normal(runs * chips),
        )

    def with_opposites(self) -> _Deviates:
        """Every run twice, the second time with opposite deviates."""
        return _Deviates(
            **{name: np.concatenate([values, -values]) for name, values in vars(self).items()}
        )


def draw_chips(
    errors: RunErrors, *, film: IntArray, count: int, generator: np.random.Generator
) -> Draws:
    """``count`` chips, each of another run; ``film`` (L,) rows of all layers."""
    return draw_runs(errors, film=film, runs=count, chips=1, generator=generator)


def draw_runs(
    errors: RunErrors, *, film: IntArray, runs: int, chips: int, generator: np.random.Generator
) -> Draws:
    """``runs`` runs of ``chips`` chips each, run after run."""
    deviates = _Deviates.drawn(
        generator, layers=len(film), films=len(errors.index), runs=runs, chips=chips
    )
    return _deposited(errors, film, deviates, chips=chips)


def draw_mirrored(
    errors: RunErrors, *, film: IntArray, count: int, generator: np.random.Generator
) -> Draws:
    """``count`` chips (one more when odd) in pairs with opposite errors: steadier averages for a search."""
    deviates = _Deviates.drawn(
        generator, layers=len(film), films=len(errors.index), runs=(count + 1) // 2, chips=1
    )
    return _deposited(errors, film, deviates.with_opposites(), chips=1)


def _deposited(errors: RunErrors, film: IntArray, z: _Deviates, *, chips: int) -> Draws:
    run = errors.run * z.run + errors.layer * z.layer
    shift = np.repeat(errors.index * z.film, chips, axis=0)
    factor = 1.0 + np.repeat(run, chips, axis=0) + errors.position * z.position
    if errors.holds_optical:
        held = errors.monitor_index / (errors.monitor_index + shift)
        factor = factor * held[:, film]
    offset = np.repeat(errors.thickness_sigma_nm * z.offset, chips, axis=0)
    return Draws(factor, offset, shift, errors.chip_index * z.chip)


def drawn_slack(model: FacetModel, nm: FloatArray, *, film: IntArray, draws: Draws) -> FloatArray:
    """Least slack (S,) of every drawn chip of one ordered stack ``nm`` (L,) [nm]."""
    ordered = model.frame.nm(nm[None])[0]
    rows = model.frame.film(film)
    least = np.empty(len(draws))
    for start in range(0, len(draws), CHUNK):
        part = draws.part(slice(start, start + CHUNK))
        slack = model.goal.slack(
            part.nm(ordered),
            film=rows,
            film_shift=part.film_shift,
            incident_shift=part.incident_shift,
        )
        least[start : start + CHUNK] = slack.min(axis=1)
    return least


@dataclass(frozen=True)
class Yield:
    """Share of chips inside all windows, its standard error and Wilson interval (95 %), and the share
    of runs of whose chips at least 95 % are inside."""

    chips: float
    standard_error: float
    low: float
    high: float
    runs: float


def sampled_yield(
    model: FacetModel,
    nm: FloatArray,
    *,
    film: IntArray,
    errors: RunErrors,
    generator: np.random.Generator,
    chips: int = 16384,
    runs: int = 1000,
    chips_a_run: int = 40,
) -> Yield:
    """Yield of one ordered stack (L,) [nm] by sampling: chips of as many runs, and runs of many chips.

    A guided mode is sampled by its quick stand-in near the stack. What that misjudges is measured on the
    first `EXACT_CHIPS`, at `EXACT_POINTS` wavelengths a window, and taken off (a control variate), its
    uncertainty included.
    """
    rows = model.frame.film(film)
    if errors.none:
        inside = float(model.margin(nm[None], film=film)[0] >= 0.0)
        return Yield(inside, 0.0, inside, inside, inside)
    pooled = draw_chips(errors, film=rows, count=chips, generator=generator)
    quick = model.near(nm, film=film)
    slack = drawn_slack(quick, nm, film=film, draws=pooled)
    if slack.max() < FAR_OUTSIDE * slack.mean() < 0.0:
        return Yield(0.0, 1.0 / chips, 0.0, wilson_interval(0, chips)[1], 0.0)
    passed = slack >= 0.0
    share, error = _corrected(model, quick, nm, film=film, draws=pooled, passed=passed)
    spread = share * (1.0 - share)
    count = chips if error * error * chips <= spread or spread == 0.0 else int(spread / error**2)
    low, high = wilson_interval(round(share * count), max(count, 1))
    nested = draw_runs(errors, film=rows, runs=runs, chips=chips_a_run, generator=generator)
    coarse = quick.with_goal(quick.goal.thinned(RUN_POINTS))
    inside_run = drawn_slack(coarse, nm, film=film, draws=nested).reshape(runs, chips_a_run) >= 0.0
    good = np.mean(inside_run.mean(axis=1) >= RUN_SHARE - 1e-12)
    return Yield(share, error, low, high, float(good))


def _corrected(
    model: FacetModel,
    quick: FacetModel,
    nm: FloatArray,
    *,
    film: IntArray,
    draws: Draws,
    passed: NDArray[np.bool_],
) -> tuple[float, float]:
    """Share of chips inside and its standard error, never zero: an observed share of 1 is not certainty."""
    share, chips = float(passed.mean()), len(passed)
    variance = share * (1.0 - share) / chips
    if quick.goal.light is not model.goal.light and not model.goal.constraints.on_absorption:
        few = draws.part(slice(0, EXACT_CHIPS))
        exact, approximate = (
            drawn_slack(m.with_goal(m.goal.thinned(EXACT_POINTS)), nm, film=film, draws=few) >= 0.0
            for m in (model, quick)
        )
        misjudged = exact.astype(float) - approximate
        share = min(max(share + float(misjudged.mean()), 0.0), 1.0)
        variance += float(misjudged.var()) / len(misjudged)
    return share, max(sqrt(variance), 1.0 / chips)


def wilson_interval(
    passed: int, count: int, *, z: float = 1.959963984540054
) -> tuple[float, float]:
    """Wilson's score interval of a share: E. B. Wilson, J. Am. Stat. Assoc. 22, 209 (1927), from memory.

    Parameters: ``passed`` of ``count`` draws; ``z`` normal quantile (95 % two-sided by default).
    """
    share = passed / count
    middle = share + z * z / (2 * count)
    half = z * sqrt(share * (1 - share) / count + z * z / (4 * count * count))
    scale = 1 + z * z / count
    return max((middle - half) / scale, 0.0), min((middle + half) / scale, 1.0)


def reflectance_quantiles(
    light: Light,
    ordered_nm: FloatArray,
    *,
    film: IntArray,
    draws: Draws,
    quantiles: tuple[float, ...] = (0.05, 0.5, 0.95),
) -> FloatArray:
    """Quantiles (K, P) of R over drawn chips of one stack; ``ordered_nm`` (L,) and ``film`` (L,) count
    every layer, base and cap included."""
    R = near(light, ordered_nm, film=film).reflectance(
        draws.nm(ordered_nm),
        film=film,
        film_shift=draws.film_shift,
        incident_shift=draws.incident_shift,
    )
    result: FloatArray = np.quantile(R, quantiles, axis=0)
    return result
