"""Numbers and stacks in the words of the terminal."""

from __future__ import annotations

from typing import TYPE_CHECKING

from rich.markup import escape

from coatings.documents.look import SIDE_COLOURS

if TYPE_CHECKING:
    from collections.abc import Sequence

    from coatings.recipe import FacetName, Recipe, Window
    from coatings.stack import Stack

MOST_NUMBERS = 18


def percent(share: float) -> str:
    """A share in percent with the digits that matter."""
    value = 100.0 * share
    if abs(value) < 1e-9:
        return "0 %"
    if abs(value) >= 0.1:
        return f"{value:.2f} %"
    return f"{value:.2g} %"


def window_text(window: Window) -> str:
    """What a window asks for, in percent: ``4 to 6 % over 955-997 nm``."""
    low, high = (None if v is None else f"{100 * v:.6g}" for v in (window.low, window.high))
    parts = []
    if low is not None and high is not None:
        parts.append(f"{low} to {high} %")
    elif low is not None or high is not None:
        parts.append(f"at least {low} %" if high is None else f"at most {high} %")
    if window.absorption_at_most is not None:
        parts.append(f"absorption at most {100 * window.absorption_at_most:.6g} %")
    first, last = window.band_nm
    band = f"{first:g} nm" if first == last else f"{first:g}-{last:g} nm"
    sister = "" if window.index is None else f", index {window.index:g}"
    film = " for the film alone" if window.of == "coating" else ""
    both = " in TE and TM" if window.polarization == "both" else ""
    return f"{', '.join(parts)} over {band}{both}{sister}{film}"


def watts(power_W: float) -> str:
    """A power in W, in mW below half a watt, in uW below half a milliwatt."""
    if abs(power_W) < 1e-11:
        return "0 W"
    if power_W < 5e-4:
        return f"{1e6 * power_W:.3g} uW"
    return f"{power_W:.3g} W" if power_W >= 0.5 else f"{1e3 * power_W:.3g} mW"


def amperes(current_A: float) -> str:
    """A current in A, or in mA below half an ampere."""
    return f"{current_A:.3g} A" if current_A >= 0.5 else f"{1e3 * current_A:.3g} mA"


def title(recipe: Recipe) -> str:
    """The product by its title and revision."""
    revision = f", revision {escape(recipe.revision)}" if recipe.revision else ""
    return f"[bold]{escape(recipe.title)}[/bold]{revision}"


def side_label(side: FacetName) -> str:
    """Label of a facet's rows."""
    return f"[bold {SIDE_COLOURS[side]}]{side.upper()}[/]"


def counted(number: int, noun: str) -> str:
    """``1 layer``, ``2 layers``."""
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"


def layers_text(stack: Stack) -> str:
    """Layers chip outward; a stack of two films in turn by its numbers, a long one by their ranges."""
    if len(stack) == 0:
        return "no searched layers"
    head = f"{counted(len(stack), 'layer')}, {stack.total_nm:.6g} nm"
    if len(stack) <= 4:
        return f"{head}: " + " | ".join(f"{layer.material} {layer.nm:g}" for layer in stack)
    first, second = stack.materials[:2]
    in_turn = all(m == (first, second)[n % 2] for n, m in enumerate(stack.materials))
    if in_turn and len(stack) <= MOST_NUMBERS:
        return f"{head}, {first}/{second}: {' '.join(f'{nm:g}' for nm in stack.nm)}"
    if in_turn:
        return (
            f"{head}: {first} {_range(stack.nm[::2])} and {second} {_range(stack.nm[1::2])} in turn"
        )
    parts = [f"{layer.material} {layer.nm:g}" for layer in stack]
    if len(parts) > MOST_NUMBERS // 2:
        parts = [*parts[:4], f"{len(parts) - 8} more", *parts[-4:]]
    return f"{head}: " + " | ".join(parts)


def _range(nm: Sequence[float]) -> str:
    return f"{min(nm):g} to {max(nm):g}"
