"""How fast a solve is, as ratios within one run: python -m pytest tests/benchmarks -s.

The stack: air / 2.0 + 0.01i, 60 nm / film 2.5, 500 nm / 1.8 + 0.005i, 120 nm / 1.5; 161 wavelengths, wave and ray
optics, guided parts and averages, everything that `optics.solve` returns.
"""

import subprocess
import sys
import time
from functools import partial

import numpy as np
import pytest
from tmm_pile import absorptances

import optics

AT_MOST = 15.0  # times the compiled yardstick
AT_MOST_NEARLY_CLEAR = 60.0
FASTER_THAN_LOOPS = 100.0
MEGABYTES = 250.0
HELP_TO_PYPLOT = 0.5
ANGLES = 48
WAVELENGTHS_NM = np.linspace(700.0, 860.0, 161)


def stack(k=0.02):
    """Return this benchmark's stack with k of the film."""
    contacts = {"upper": (2.0 + 0.01j, 60.0), "film": (2.5 + 1j * k, 500.0), "lower": (1.8 + 0.005j, 120.0)}
    return optics.Stack(
        above=optics.Outer(material=optics.find_material("air")),
        below=optics.Outer(material=optics.find_material(1.5), counts_as="free"),
        layers=tuple(
            optics.Layer(name=name, material=optics.find_material(index), thickness_nm=nm, emits=name == "film")
            for name, (index, nm) in contacts.items()
        ),
        light=optics.Light(wavelengths_nm=WAVELENGTHS_NM, spectrum=optics.Gaussian(peak_nm=768.0, fwhm_nm=40.0)),
    )


def said(what, ratio, limit):
    print(f"\n{what}: {ratio:.3g} (limit {limit:g})")  # noqa: T201  # the ratio is what one runs this for


def best_of(function, repeats):
    """Return the seconds of the quickest of several calls."""
    best = float("inf")
    for _ in range(repeats):
        start = time.perf_counter()
        function()
        best = min(best, time.perf_counter() - start)
    return best


@pytest.mark.parametrize(
    ("k", "limit"), [(0.02, AT_MOST), (1e-5, AT_MOST_NEARLY_CLEAR)], ids=["absorbing film", "nearly clear film"]
)
def test_a_solve_takes_so_many_times_the_compiled_arithmetic(benchmark, yardstick, k, limit):
    one = stack(k)
    before = best_of(yardstick, 30)
    result = benchmark.pedantic(optics.solve, args=(one,), rounds=12, warmup_rounds=2)
    after = best_of(yardstick, 30)
    ratio = benchmark.stats.stats.min / min(before, after)
    benchmark.extra_info["times the yardstick"] = ratio
    said(f"solve / compiled yardstick, film k = {k:g}, error {result.numerical_error:.0e}", ratio, limit)
    assert ratio <= limit
    assert result.numerical_error < 1e-6


def open_shares_by_loops(media, film):
    """Return the power that leaves on either side by reciprocity, the `tmm` library called for every angle."""
    q, weight = np.polynomial.legendre.leggauss(ANGLES)
    out = []
    for side in (media, media[::-1]):
        place = film if side is media else len(media) - 1 - film
        top = complex(side[0][0]).real
        for wavelength in WAVELENGTHS_NM:
            taken = [
                sum(absorptances(pol, side, wavelength, each)[place] for pol in "sp") for each in top * 0.5 * (1 + q)
            ]
            out.append(weight @ np.array(taken))
    return out


def test_a_solve_is_faster_than_loops_over_a_transfer_matrix_for_the_open_shares_alone():
    """48 angles, both polarisations, both sides."""
    media = [(1.0, 0), (2.0 + 0.01j, 60), (2.5 + 0.02j, 500), (1.8 + 0.005j, 120), (1.5, 0)]
    one = stack()
    optics.solve(one)
    solve = best_of(partial(optics.solve, one), 10)
    loops = best_of(partial(open_shares_by_loops, media, 2), 1)
    said("loops over tmm for the open shares / solve", loops / solve, FASTER_THAN_LOOPS)
    assert loops / solve >= FASTER_THAN_LOOPS


PEAK = """
import resource, sys
import optics
optics.solve(optics.parse_stack(sys.stdin.read(), folder="."))
print(resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024.0)
"""


@pytest.mark.parametrize("k", [0.02, 1e-5])
def test_a_solve_needs_little_memory(k):
    """The peak of a fresh process, Python and libraries included."""
    text = optics.write_stack(stack(k))
    run = subprocess.run([sys.executable, "-c", PEAK], input=text, capture_output=True, text=True, check=True)
    peak = float(run.stdout)
    said(f"peak memory of a process with one solve, k = {k:g}, in MB", peak, MEGABYTES)
    assert peak < MEGABYTES


def test_help_is_there_before_pyplot_would_be():
    shown = partial(
        subprocess.run,
        [sys.executable, "-c", "from optics.cli import main; main(['--help'])"],
        capture_output=True,
        check=True,
    )
    loaded = partial(subprocess.run, [sys.executable, "-c", "import matplotlib.pyplot"], check=True)
    ratio = best_of(shown, 5) / best_of(loaded, 5)
    said("photonfate --help / import matplotlib.pyplot", ratio, HELP_TO_PYPLOT)
    assert ratio < HELP_TO_PYPLOT
