"""The guided mode's cost beside the plane wave's, in one run. Off by default."""

import numpy as np
import pytest

from coatings.optics import Scene, reflectance
from coatings.optics.facet import ModalFacet
from coatings.optics.guide import Guide, fundamental

GUIDE = ([3.17, 3.25, 3.38, 3.25, 3.17], [0.1, 0.2, 0.1])
FILM = [0, 1, 0, 1]
BOTH = pytest.mark.parametrize("tm", [False, True])


def films(points):
    return np.repeat([[1.45], [2.1]], points, axis=1)


def build(points, tm):
    nm = np.linspace(1500.0, 1600.0, points)
    return ModalFacet(fundamental(Guide(nm, *GUIDE), tm=tm), 1.0, films(points))


@BOTH
@pytest.mark.benchmark(group="four layers, 100 wavelengths, guide included")
def test_one_stack_with_its_guide(benchmark, tm):
    stack = np.array([[120.0, 130.0, 110.0, 140.0]])
    benchmark(lambda: build(100, tm).reflectance(stack, film=FILM))


@pytest.mark.benchmark(group="four layers, 100 wavelengths, guide included")
def test_one_stack_in_a_plane_wave(benchmark):
    stack, nm = np.array([[120.0, 130.0, 110.0, 140.0]]), np.linspace(1500.0, 1600.0, 100)
    benchmark(lambda: reflectance(Scene(nm, 3.2, 1.0, films(100)), stack, film=FILM))


@BOTH
@pytest.mark.parametrize("kind", ["reflectance", "gradient", "response"])
@pytest.mark.benchmark(group="1000 stacks of four layers, 30 wavelengths")
def test_many_stacks(benchmark, kind, tm):
    stacks = np.random.default_rng(1).uniform(50.0, 300.0, (1000, 4))
    call = getattr(build(30, tm), kind)
    benchmark(lambda: call(stacks, film=FILM))


@pytest.mark.benchmark(group="1000 stacks of four layers, 30 wavelengths")
def test_many_stacks_in_a_plane_wave(benchmark):
    stacks = np.random.default_rng(1).uniform(50.0, 300.0, (1000, 4))
    scene = Scene(np.linspace(1500.0, 1600.0, 30), 3.2, 1.0, films(30))
    benchmark(lambda: reflectance(scene, stacks, film=FILM))
