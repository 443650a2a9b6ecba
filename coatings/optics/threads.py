"""Threads over the outer axis of a batch. Who computes a stack never changes its bits."""

from __future__ import annotations

import os
from collections.abc import Callable
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, field
from itertools import pairwise

from coatings.errors import InputError, Problem

WORTHWHILE = 200_000
"""Layers times points below which handing work to a second thread costs more than it saves."""


def _processors() -> int:
    affinity = getattr(os, "sched_getaffinity", None)
    return len(affinity(0)) if affinity else (os.cpu_count() or 1)


@dataclass
class _Crew:
    """The threads of this process; made when first needed, anew in a forked child."""

    size: int = field(default_factory=_processors)
    pool: ThreadPoolExecutor | None = None
    process: int = 0

    def executor(self) -> ThreadPoolExecutor:
        if self.pool is None or self.process != os.getpid():
            self.pool = ThreadPoolExecutor(self.size, thread_name_prefix="optics")
            self.process = os.getpid()
        return self.pool


_crew = _Crew()


def set_threads(n: int) -> None:
    """Set how many threads share a large batch; a worker process of a pool calls this with 1.

    Parameters
    ----------
    n : int
        1 or more. At start it is the number of processors this process may use.

    Raises
    ------
    InputError
        When ``n`` is less than 1.
    """
    if n < 1:
        raise InputError(Problem("threads", f"got {n}; give 1 or more"))
    if _crew.pool is not None and _crew.process == os.getpid():
        _crew.pool.shutdown()
    _crew.pool = None
    _crew.size = n


def get_threads() -> int:
    """How many threads share a large batch."""
    return _crew.size


def worthwhile(outer: int, cost_each: int) -> int:
    """Into how many parts a batch is worth being shared; 0 or 1 means not at all."""
    return min(_crew.size, outer, outer * cost_each // WORTHWHILE)


def share(outer: int, cost_each: int, job: Callable[[slice], None]) -> None:
    """Call ``job`` on slices that cover ``range(outer)``, in threads when that is worth while."""
    parts = worthwhile(outer, cost_each)
    if parts < 2:
        job(slice(0, outer))
        return
    edges = [outer * part // parts for part in range(parts + 1)]
    slices = [slice(low, high) for low, high in pairwise(edges)]
    for _ in _crew.executor().map(job, slices):
        pass
