"""How long transport takes beside solve, in one run: 161 wavelengths of a film on glass."""

import time

import numpy as np
import pytest

from optics import Gaussian, Layer, Light, Outer, Stack, find_material, solve
from optics.transport.depth import indepth
from optics.transport.inplane import inplane

IN_PLANE, IN_DEPTH = 4.0, 6.0
ROUNDS = 5


@pytest.fixture(scope="module", params=[(2.5 + 0.02j, 500), ("ch3nh3pbi3", 500)], ids=["constant", "table"])
def stack(request):
    film, thickness = request.param
    layers = (
        Layer(name="contact", material=find_material(1.9 + 0.001j), thickness_nm=50),
        Layer(name="film", material=find_material(film), thickness_nm=thickness, emits=True),
        Layer(name="glass", material=find_material("float-glass"), thickness_nm=1.1e6),
    )
    air = Outer(material=find_material("air"))
    light = Light(wavelengths_nm=np.arange(700.0, 861.0), spectrum=Gaussian(peak_nm=770, fwhm_nm=40))
    return Stack(above=air, below=air, layers=layers, light=light)


def best(call, *arguments, **options):
    """Return the shortest of some runs [s]: what else the machine does only ever adds."""
    times = []
    for _ in range(ROUNDS):
        start = time.perf_counter()
        call(*arguments, **options)
        times.append(time.perf_counter() - start)
    return min(times)


def test_the_plane_takes_at_most_four_times_as_long_as_solve(stack):
    assert best(inplane, stack) <= IN_PLANE * best(solve, stack)


def test_fifty_slices_take_at_most_six_times_as_long_as_solve(stack):
    assert best(indepth, stack, slices=50) <= IN_DEPTH * best(solve, stack)


def test_time_in_the_plane(benchmark, stack):
    benchmark(inplane, stack)


def test_time_over_the_depth(benchmark, stack):
    benchmark(indepth, stack, slices=50)
