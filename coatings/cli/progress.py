"""How far a search is: one line on standard error, rewritten in place, when that is a terminal."""

from __future__ import annotations

import shutil
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from coatings.design.plan import Progress
    from coatings.design.search import Found
    from coatings.recipe import FacetName, Recipe


@contextmanager
def shown_progress(
    recipe: Recipe, sides: tuple[FacetName, ...], *, quiet: bool
) -> Iterator[Progress | None]:
    """A callback that shows what is searched and found; None where nobody would see it."""
    if quiet or sys.stderr is None or not sys.stderr.isatty():
        yield None
        return
    searched = [recipe.facets[side] for side in sides if recipe.facets[side].is_searchable]
    pieces = sum(facet.max_layers or 0 for facet in searched)
    ended = 0

    def show(side: str, count: int, best: Found | None) -> None:
        nonlocal ended
        ended += 1
        found = "none fits" if best is None else f"{100 * best.yields.chips:.1f} %"
        _rewrite(f"searched {ended} of {pieces} layer counts; {side}, {count}: {found}")

    _rewrite("searching; Ctrl-C ends with the best so far")
    try:
        yield show
    finally:
        _rewrite("")


def _rewrite(line: str) -> None:
    width = shutil.get_terminal_size().columns - 1
    sys.stderr.write(f"\r{line[:width]:<{width}}\r")
    sys.stderr.flush()
