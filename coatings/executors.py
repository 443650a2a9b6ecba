"""Independent pieces of work, here or in worker processes.

The order in which pieces end never shows: results come back in the order of the pieces, and every
piece depends on its arguments alone, so any number of workers gives the same bits.
"""

from __future__ import annotations

import multiprocessing
import os
import signal
from collections.abc import Callable, Sequence
from concurrent.futures import Future, ProcessPoolExecutor, as_completed
from concurrent.futures.process import BrokenProcessPool
from dataclasses import dataclass
from typing import Generic, TypeVar

Piece = TypeVar("Piece")
Result = TypeVar("Result")


@dataclass(frozen=True)
class Outcome(Generic[Result]):
    """Results in the order of the pieces, None where the work was cut short before one was done."""

    results: tuple[Result | None, ...]
    cut_short: bool


def default_workers() -> int:
    """Processors that this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


def run_all(
    function: Callable[[Piece], Result],
    pieces: Sequence[Piece],
    *,
    workers: int,
    on_done: Callable[[Piece, Result], None] | None = None,
) -> Outcome[Result]:
    """Call ``function`` on every piece with up to ``workers`` processes; an interrupt keeps what is done.

    ``function`` and the pieces must be picklable when ``workers`` is above 1. ``on_done`` is called in
    this process after each piece. Errors of a piece are raised here.
    """
    results: list[Result | None] = [None] * len(pieces)

    def done(number: int, result: Result) -> None:
        results[number] = result
        if on_done is not None:
            on_done(pieces[number], result)

    try:
        if min(workers, len(pieces)) <= 1:
            for number, piece in enumerate(pieces):
                done(number, function(piece))
        else:
            _run_in_processes(function, pieces, workers, done)
    except KeyboardInterrupt:
        return Outcome(tuple(results), cut_short=True)
    return Outcome(tuple(results), cut_short=False)


def _run_in_processes(
    function: Callable[[Piece], Result],
    pieces: Sequence[Piece],
    workers: int,
    done: Callable[[int, Result], None],
) -> None:
    left = set(range(len(pieces)))

    def finished(number: int, result: Result) -> None:
        left.discard(number)
        done(number, result)

    try:
        _run_in_pool(function, pieces, workers, finished)
    except BrokenProcessPool:  # a worker was killed: its pieces are done here, to the same bits
        for number in sorted(left):
            done(number, function(pieces[number]))


def _run_in_pool(
    function: Callable[[Piece], Result],
    pieces: Sequence[Piece],
    workers: int,
    done: Callable[[int, Result], None],
) -> None:
    pool = ProcessPoolExecutor(
        max_workers=min(workers, len(pieces)),
        mp_context=multiprocessing.get_context("spawn"),
        initializer=_prepare_worker,
    )
    try:
        numbers: dict[Future[Result], int] = {
            pool.submit(function, piece): number for number, piece in enumerate(pieces)
        }
        for future in as_completed(numbers):
            done(numbers[future], future.result())
    except BaseException:
        _stop(pool)
        raise
    pool.shutdown()


def _stop(pool: ProcessPoolExecutor) -> None:
    running = list((pool._processes or {}).values())
    pool.shutdown(wait=False, cancel_futures=True)
    for process in running:
        process.terminate()


def _prepare_worker() -> None:
    """A worker leaves Ctrl-C to the parent and keeps to one thread."""
    from coatings.optics.threads import set_threads

    signal.signal(signal.SIGINT, signal.SIG_IGN)
    set_threads(1)
