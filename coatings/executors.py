"""Independent pieces of work, here or in worker processes.

The order in which pieces end never shows: results come back in the order of the pieces, and every
piece depends on its arguments alone, so any number of workers gives the same bits.
"""

from __future__ import annotations

import multiprocessing
import os
import signal
from collections.abc import Callable, Iterable, Iterator, Sequence
from concurrent.futures import Future, ProcessPoolExecutor, as_completed
from concurrent.futures.process import BrokenProcessPool
from contextlib import contextmanager
from dataclasses import dataclass
from multiprocessing.connection import wait
from typing import Generic, TypeVar

LONGEST_END_S = 5.0  # a terminated worker that takes longer to end is left to itself

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


class Workers:
    """Up to ``count`` worker processes, started when first needed and kept until the end of ``with``."""

    def __init__(self, count: int) -> None:
        self.count = count
        self._pool: ProcessPoolExecutor | None = None

    def __enter__(self) -> Workers:
        return self

    def __exit__(self, *_: object) -> None:
        self._stop()

    def run_all(
        self,
        function: Callable[[Piece], Result],
        pieces: Sequence[Piece],
        *,
        on_done: Callable[[Piece, Result], None] | None = None,
    ) -> Outcome[Result]:
        """Call ``function`` on every piece; an interrupt keeps what is done.

        ``function`` and the pieces must be picklable when there is more than one worker. ``on_done`` is
        called in this process after each piece. Errors of a piece are raised here.
        """
        results: list[Result | None] = [None] * len(pieces)

        def done(number: int, result: Result) -> None:
            results[number] = result
            if on_done is not None:
                on_done(pieces[number], result)

        try:
            if min(self.count, len(pieces)) <= 1:
                _run_here(function, pieces, range(len(pieces)), done)
            else:
                self._run_in_processes(function, pieces, done)
        except KeyboardInterrupt:
            self._stop()
            return Outcome(tuple(results), cut_short=True)
        except BaseException:
            self._stop()
            raise
        return Outcome(tuple(results), cut_short=False)

    def _run_in_processes(
        self,
        function: Callable[[Piece], Result],
        pieces: Sequence[Piece],
        done: Callable[[int, Result], None],
    ) -> None:
        left = dict.fromkeys(range(len(pieces)))
        try:
            pool = self._started()
            with _interrupts_held():
                numbers: dict[Future[Result], int] = {
                    pool.submit(function, piece): number for number, piece in enumerate(pieces)
                }
            for future in as_completed(numbers):
                number = numbers[future]
                result = future.result()
                del left[number]
                done(number, result)
        except BrokenProcessPool:  # a worker was killed: its pieces are done here, to the same bits
            self._stop()
            _run_here(function, pieces, left, done)

    def _started(self) -> ProcessPoolExecutor:
        if self._pool is None:
            self._pool = ProcessPoolExecutor(
                max_workers=self.count,
                mp_context=multiprocessing.get_context("spawn"),
                initializer=_prepare_worker,
            )
        return self._pool

    def _stop(self) -> None:
        pool, self._pool = self._pool, None
        if pool is None:
            return
        running = list((pool._processes or {}).values())
        pool.shutdown(wait=False, cancel_futures=True)
        for process in running:
            process.terminate()
        for process in running:  # the pool's own thread reaps them: only wait for their end
            wait([process.sentinel], timeout=LONGEST_END_S)


def run_all(
    function: Callable[[Piece], Result],
    pieces: Sequence[Piece],
    *,
    workers: int,
    on_done: Callable[[Piece, Result], None] | None = None,
) -> Outcome[Result]:
    """`Workers.run_all` with workers for these pieces alone."""
    with Workers(min(workers, len(pieces))) as crew:
        return crew.run_all(function, pieces, on_done=on_done)


def _run_here(
    function: Callable[[Piece], Result],
    pieces: Sequence[Piece],
    numbers: Iterable[int],
    done: Callable[[int, Result], None],
) -> None:
    for number in numbers:
        done(number, function(pieces[number]))


@contextmanager
def _interrupts_held() -> Iterator[None]:
    """Hold Ctrl-C back while workers are started: they inherit that, and so can't be hit before they are
    ready to leave it to the parent. The parent gets it afterwards."""
    if not hasattr(signal, "pthread_sigmask"):
        yield
        return
    before = signal.pthread_sigmask(signal.SIG_BLOCK, {signal.SIGINT})
    try:
        yield
    finally:
        signal.pthread_sigmask(signal.SIG_SETMASK, before)


def _prepare_worker() -> None:
    """A worker leaves Ctrl-C to the parent and keeps to one thread."""
    from coatings.optics.threads import set_threads

    signal.signal(signal.SIGINT, signal.SIG_IGN)
    set_threads(1)
