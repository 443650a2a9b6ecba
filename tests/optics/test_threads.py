"""Threads change the time that a batch takes, and nothing else."""

import os
import subprocess
import sys

import numpy as np
import pytest

from coatings.errors import InputError
from coatings.optics import (
    Scene,
    get_threads,
    index_gradient,
    response,
    set_threads,
    weighted_gradient,
)
from coatings.optics.threads import share


@pytest.fixture(autouse=True)
def _restore():
    before = get_threads()
    yield
    set_threads(before)


def _batch():
    rng = np.random.default_rng(3)
    points = 130
    scene = Scene(
        np.linspace(900.0, 1000.0, points),
        3.3,
        1.0,
        [[1.45] * points, [2.1 + 1e-3j] * points],
        q=0.5,
        tm=rng.random(points) < 0.5,
    )
    return scene, rng.uniform(20.0, 300.0, (701, 10)), rng.normal(size=(701, points))


@pytest.mark.parametrize("threads", [2, 3, 7])
def test_same_bits_for_any_number_of_threads(threads):
    scene, thickness, weight = _batch()
    film, shift = [0, 1] * 5, np.random.default_rng(1).normal(0.0, 0.02, (701, 2))

    def everything():
        found = response(scene, thickness, film=film, film_shift=shift)
        slope = weighted_gradient(scene, thickness, film=film, weight=weight)[1]
        by_index = index_gradient(scene, thickness[:40], film=film)[1]
        return found.r, found.t, found.T, slope, by_index

    set_threads(1)
    alone = everything()
    set_threads(threads)
    for one, many in zip(alone, everything(), strict=True):
        np.testing.assert_array_equal(one, many)


def test_work_is_shared_only_when_worth_while():
    set_threads(4)
    seen = []
    share(10, 1000, seen.append)
    assert seen == [slice(0, 10)]
    seen.clear()
    share(10, 1_000_000, seen.append)
    assert sorted((part.start, part.stop) for part in seen) == [(0, 2), (2, 5), (5, 7), (7, 10)]


def test_what_goes_wrong_in_a_thread_is_heard():
    set_threads(2)

    def job(part):
        raise InputError("here")

    with pytest.raises(InputError, match="here"):
        share(4, 1_000_000, job)


@pytest.mark.parametrize("n", [0, -1])
def test_number_of_threads(n):
    with pytest.raises(InputError, match=f"threads: got {n}; give 1 or more"):
        set_threads(n)


@pytest.mark.skipif(not hasattr(os, "fork"), reason="no fork here")
def test_a_forked_child_makes_its_own_threads():
    """Threads do not survive a fork; a child that kept the pool would wait for ever."""
    script = """
import os
from coatings.optics import set_threads
from coatings.optics.threads import share
set_threads(2)
share(4, 10**6, lambda part: None)
if os.fork() == 0:
    share(4, 10**6, lambda part: None)
    os._exit(0)
raise SystemExit(os.waitstatus_to_exitcode(os.wait()[1]))
"""
    command = [sys.executable, "-W", "ignore", "-c", script]
    assert subprocess.run(command, timeout=60, check=False).returncode == 0
