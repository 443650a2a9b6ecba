"""Which layer counts are searched.

Every count up to `EVERY_COUNT` is. Beyond it a count is useful while more layers still bring something:
counts are searched a few at a time, and no further once a stack passes every drawn chip (a thicker one
could not be chosen), or once two steps in a row have raised neither the best yield nor the best margin
by a `LEAST_GAIN`. Far beyond, where one layer more is a small change, counts are some per cent apart.
"""

from __future__ import annotations

from collections.abc import Sequence

from coatings.design.search import Found, Task

EVERY_COUNT = 16  # all counts up to here are searched
CLOSE_COUNT = 40  # and are searched one by one up to here while they are useful
STEP = 4  # counts searched together
LEAST_GAIN = 0.01  # of the yield, or of the narrowest window's width


def count_steps(most_layers: int) -> list[list[int]]:
    """Layer counts up to ``most_layers`` in the steps in which they are searched."""
    counts = list(range(EVERY_COUNT + 1, min(most_layers, CLOSE_COUNT) + 1))
    far = CLOSE_COUNT
    while far < most_layers:
        far = min(max(far + 2, round(far * 1.1)), most_layers)
        counts += [far - 1, far] if far - 1 > counts[-1] else [far]
    later = [counts[at : at + STEP] for at in range(0, len(counts), STEP)]
    return [list(range(1, min(most_layers, EVERY_COUNT) + 1)), *later]


def is_enough(task: Task, steps: Sequence[Sequence[Found]]) -> bool:
    """Whether more layers than those of the steps searched so far, in order, would be of no use."""
    found = [design for step in steps for design in step]
    if not task.errors.none and any(design.yields.chips == 1.0 for design in found):
        return True
    return (
        len(steps) > 2
        and not _gained(task, steps[:-1], steps[-1])
        and not _gained(task, steps[:-2], steps[-2])
    )


def _gained(task: Task, before: Sequence[Sequence[Found]], step: Sequence[Found]) -> bool:
    known = [design for each in before for design in each]
    if not known:
        return True
    if not step:
        return False
    margin = max(f.margin for f in step) - max(f.margin for f in known)
    chips = max(f.yields.chips for f in step) - max(f.yields.chips for f in known)
    return chips > LEAST_GAIN or margin > LEAST_GAIN * float(task.model.goal.width.min())
