"""Speed of the film kernels, as ratios of times taken in turn in one run.

    pytest tests/benchmarks/test_kernel_speed.py --benchmark-enable --benchmark-only -s

The ordinary run only checks that the rivals compute the same.
"""

import time

import numpy as np
import pytest
from rivals import c_reflection, numpy_in_pieces, numpy_reflection

from coatings.optics import (
    Scene,
    get_threads,
    gradient,
    reflectance,
    reflection,
    set_threads,
    weighted_gradient,
)

INCIDENT, OUTSIDE = 3.3, 1.0


class Work:
    """A batch of alternating layers at normal incidence."""

    def __init__(self, stacks, layers, points, *, k=1e-4):
        rng = np.random.default_rng(5)
        self.nm = np.linspace(900.0, 1050.0, points)
        self.films = np.array([[1.45 + 1j * k] * points, [2.1 + 2j * k] * points])
        self.thickness = rng.uniform(20.0, 300.0, (stacks, layers))
        self.film = np.arange(layers) % 2
        self.scene = Scene(self.nm, INCIDENT, OUTSIDE, self.films)
        self.weight = rng.normal(size=(stacks, points))

    @property
    def plain(self):
        return self.nm, INCIDENT, OUTSIDE, self.films, self.thickness, self.film

    def reflection(self):
        return reflection(self.scene, self.thickness, film=self.film)

    def reflectance(self):
        return reflectance(self.scene, self.thickness, film=self.film)

    def gradient(self):
        return gradient(self.scene, self.thickness, film=self.film)

    def weighted(self):
        return weighted_gradient(self.scene, self.thickness, film=self.film, weight=self.weight)


def times(*jobs, seconds=1.5):
    """Shortest time of each job [s]; they take turns, so that a busy machine is busy for all."""
    for job in jobs:
        job()
    repeats = []
    for job in jobs:
        start = time.perf_counter()
        job()
        repeats.append(max(1, int(2e-3 / (time.perf_counter() - start))))
    best = [np.inf] * len(jobs)
    end = time.perf_counter() + seconds
    while time.perf_counter() < end:
        for at, (job, count) in enumerate(zip(jobs, repeats, strict=True)):
            start = time.perf_counter()
            for _ in range(count):
                job()
            best[at] = min(best[at], (time.perf_counter() - start) / count)
    return best


def exponent(sizes, make):
    """Slope of log time against log size."""
    taken = [times(make(size).reflection, seconds=0.4)[0] for size in sizes]
    return np.polyfit(np.log(sizes), np.log(taken), 1)[0]


@pytest.fixture
def table(benchmark, capsys):
    """Collects rows (work, figure, wanted, met) and prints them; only when timing is asked for."""
    if benchmark.disabled:
        benchmark(str)  # one left unused is warned of
        pytest.skip("timing is asked for by --benchmark-enable --benchmark-only")
    before = get_threads()
    set_threads(1)
    rows = []
    yield rows
    set_threads(before)
    with capsys.disabled():
        print()
        for work, figure, sign, wanted in rows:
            met = figure >= wanted if sign == ">=" else figure <= wanted
            print(f"{work:58s} {figure:8.2f}  {sign} {wanted:<5} {'met' if met else 'MISSED'}")


@pytest.mark.parametrize("shape", [(3, 10, 100), (50, 4, 60)])
def test_rivals_agree(shape, tmp_path):
    work = Work(*shape)
    np.testing.assert_allclose(numpy_in_pieces(*work.plain), work.reflection(), atol=1e-12)
    in_c = c_reflection(tmp_path)
    if in_c is None:
        pytest.skip("no C compiler here")
    np.testing.assert_allclose(in_c(*work.plain), work.reflection(), atol=1e-12)


def test_against_numpy(table, benchmark):
    for shape, wanted in (((2000, 10, 100), 4.5), ((1, 10, 100), 7.0), ((1, 4, 60), 6.0)):
        work = Work(*shape)
        whole, pieces, ours = times(
            lambda work=work: numpy_reflection(*work.plain),
            lambda work=work: numpy_in_pieces(*work.plain),
            work.reflection,
        )
        name = "numpy / kernel, {} stacks x {} layers x {} wavelengths".format(*shape)
        table.append((name, min(whole, pieces) / ours, ">=", wanted))
    benchmark(work.reflection)


def test_against_complex_path(table, benchmark):
    complex_path, real_path = Work(2000, 10, 100), Work(2000, 10, 100, k=0.0)
    slow, fast = times(complex_path.reflection, real_path.reflection)
    table.append(("lossy / lossless layers, complex r", slow / fast, ">=", 1.3))
    benchmark(real_path.reflection)


def test_gradients(table, benchmark):
    for layers in (10, 60):
        for k, kind in ((1e-4, "lossy"), (0.0, "lossless")):
            for stacks in (1, 400):
                work = Work(stacks, layers, 100, k=k)
                forward, every, weighted = times(work.reflectance, work.gradient, work.weighted)
                name = f"{stacks} {kind} stacks of {layers} layers"
                table.append((f"gradient / forward, {name}", every / forward, "<=", 3.0))
                table.append(
                    (f"weighted gradient / forward, {name}", weighted / forward, "<=", 3.0)
                )
    benchmark(work.gradient)


def test_threads(table, benchmark):
    work = Work(2000, 20, 200)

    def with_threads(n):
        set_threads(n)
        return times(work.reflectance, seconds=0.25)[0]

    one, two = np.min([[with_threads(1), with_threads(2)] for _ in range(20)], axis=0)
    set_threads(1)
    table.append(("two threads / one, 2000 stacks x 20 x 200", one / two, ">=", 1.7))
    benchmark(work.reflectance)


def test_growth(table, benchmark):
    by_layers = exponent([5, 10, 20, 50, 100, 300], lambda n: Work(50, n, 100))
    by_points = exponent([50, 100, 300, 1000, 5000], lambda n: Work(50, 10, n))
    table.append(("exponent of time in layers, 5 to 300", by_layers, "<=", 1.05))
    table.append(("exponent of time in wavelengths, 50 to 5000", by_points, "<=", 1.05))
    benchmark(Work(50, 10, 100).reflection)


def test_against_c(table, benchmark, tmp_path):
    in_c = c_reflection(tmp_path)
    if in_c is None:
        pytest.skip("no C compiler here")
    work = Work(2000, 10, 100)
    theirs, ours = times(lambda: in_c(*work.plain), work.reflection)
    table.append(("kernel / C (gcc -O3 -march=native -ffast-math)", ours / theirs, "<=", 1.6))
    benchmark(work.reflection)
