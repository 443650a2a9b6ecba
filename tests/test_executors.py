"""Work in processes: order of results, errors, interrupts, workers that die."""

from __future__ import annotations

import multiprocessing
import os
import signal
import time

import pytest

from coatings.errors import InputError
from coatings.executors import Workers, default_workers, run_all
from coatings.optics import get_threads


def square(x):
    return x * x


def process_of(_):
    return os.getpid()


def threads(_):
    return get_threads()


def refuse_three(x):
    if x == 3:
        raise InputError("three: is refused; give another")
    return x


def die_in_a_worker(x):
    """The process of a worker ends without a word; in the parent the piece is done."""
    if x == 2 and multiprocessing.parent_process() is not None:
        os.kill(os.getpid(), signal.SIGKILL)
    return x * x


def interrupted_at_two(x):
    if x == 2:
        raise KeyboardInterrupt
    return x


def workers_end():
    """Whether no child is left; the book-keeping of a dead one may lag for a moment."""
    for _ in range(50):
        if not multiprocessing.active_children():
            return True
        time.sleep(0.02)
    return False


@pytest.mark.parametrize("workers", [1, 2, 3])
def test_results_come_in_the_order_of_the_pieces(workers):
    seen = []
    outcome = run_all(
        square,
        range(7),
        workers=workers,
        on_done=lambda piece, result: seen.append((piece, result)),
    )
    assert outcome.results == (0, 1, 4, 9, 16, 25, 36)
    assert not outcome.cut_short
    assert sorted(seen) == [(x, x * x) for x in range(7)]


def test_no_pieces_and_one_piece_need_no_process():
    assert run_all(square, [], workers=4).results == ()
    assert run_all(process_of, [0], workers=4).results == (os.getpid(),)


def test_workers_are_other_processes_and_are_kept_between_calls():
    with Workers(2) as crew:
        first = set(crew.run_all(process_of, range(6)).results)
        second = set(crew.run_all(process_of, range(6)).results)
    assert os.getpid() not in first | second
    assert len(first | second) <= 2


def test_workers_keep_to_one_thread():
    assert set(run_all(threads, range(2), workers=2).results) == {1}


@pytest.mark.parametrize("workers", [1, 2])
def test_an_error_of_a_piece_is_raised_here(workers):
    with pytest.raises(InputError, match="three: is refused"):
        run_all(refuse_three, range(6), workers=workers)


def test_a_worker_that_is_killed_loses_nothing():
    seen = []
    outcome = run_all(
        die_in_a_worker, range(6), workers=2, on_done=lambda piece, _: seen.append(piece)
    )
    assert outcome.results == (0, 1, 4, 9, 16, 25)
    assert not outcome.cut_short
    assert sorted(seen) == list(range(6))


def test_after_a_killed_worker_there_are_new_ones():
    with Workers(2) as crew:
        assert crew.run_all(die_in_a_worker, range(4)).results == (0, 1, 4, 9)
        later = set(crew.run_all(process_of, range(4)).results)
    assert os.getpid() not in later


def test_an_interrupt_in_this_process_keeps_what_is_done():
    outcome = run_all(interrupted_at_two, [0, 1, 2, 3], workers=1)
    assert outcome.cut_short
    assert outcome.results == (0, 1, None, None)


def test_an_interrupt_while_workers_work_keeps_what_is_done():
    def on_done(piece, result):
        raise KeyboardInterrupt

    with Workers(2) as crew:
        outcome = crew.run_all(square, range(6), on_done=on_done)
        assert outcome.cut_short
        done = [result for result in outcome.results if result is not None]
        assert len(done) == 1
        assert workers_end()


def test_workers_are_gone_when_the_work_is():
    with Workers(2) as crew:
        crew.run_all(square, range(4))
        assert len(multiprocessing.active_children()) > 0
    assert workers_end()


def test_default_is_the_processors_of_this_process(monkeypatch):
    if hasattr(os, "sched_getaffinity"):
        assert default_workers() == len(os.sched_getaffinity(0))
        monkeypatch.delattr(os, "sched_getaffinity")
    monkeypatch.setattr(os, "cpu_count", lambda: None)
    assert default_workers() == 1
