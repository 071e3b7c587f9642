"""How fast studies are, as ratios within one run: python -m pytest tests/benchmarks -s.

A film's thickness is swept on 161 wavelengths, as separate solves in this process, as a sweep in this
process, and as a sweep by two processes.
"""

import resource
import subprocess
import sys
import time
from pathlib import Path

import pytest

import optics
from optics.fate.solve import solve
from optics.study.sweep import sweep

ROOT = Path(__file__).resolve().parents[2]
EXAMPLES = ("ch3nh3pbi3-on-glass/stack", "encapsulation/cover-glass")
FASTER_THAN_SOLVES = 1.5  # what a sweep is sure to gain; README says how much it was
FASTER_WITH_TWO = 1.5
OVERHEAD = 0.05
MOST_MB = 400.0
THICKNESSES = [float(each) for each in range(300, 420)]


def seconds(act):
    start = time.perf_counter()
    act()
    return time.perf_counter() - start


@pytest.mark.parametrize("name", EXAMPLES)
def test_a_sweep_is_faster_than_separate_solves(name):
    stack = optics.read_stack(ROOT / "examples" / f"{name}.toml")
    separate = seconds(lambda: [solve(stack.with_layer("film", thickness_nm=each)) for each in THICKNESSES])
    together = seconds(lambda: sweep(stack, {"film.thickness_nm": THICKNESSES}))
    print(f"\n{name}: separate solves over sweep {separate / together:.2f}")  # noqa: T201
    assert separate / together > FASTER_THAN_SOLVES


def test_two_workers_are_faster_than_one():
    stack = optics.read_stack(ROOT / "examples" / f"{EXAMPLES[0]}.toml")
    many = {"film.thickness_nm": [float(each) for each in range(51, 1051)]}
    one = seconds(lambda: sweep(stack, many))
    two = seconds(lambda: sweep(stack, many, workers=2))
    print(f"\none process over two {one / two:.2f}")  # noqa: T201
    assert one / two > FASTER_WITH_TWO


def test_a_thousand_points_need_little_memory(tmp_path):
    code = "from optics.cli import main; main(prog_name='photonfate')"
    words = ["sweep", str(ROOT / "examples" / f"{EXAMPLES[0]}.toml"), "--vary", "film.thickness_nm = 51 to 1050 step 1"]
    subprocess.run([sys.executable, "-c", code, *words, "--output", tmp_path / "out"], check=True, capture_output=True)
    largest = resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss / 1e3
    print(f"\nlargest process {largest:.0f} MB")  # noqa: T201
    assert largest < MOST_MB


def test_handing_out_costs_next_to_nothing():
    from optics.study.axes import from_values
    from optics.study.engine import Place, run
    from optics.study.sweep import Plan, work

    stack = optics.read_stack(ROOT / "examples" / f"{EXAMPLES[0]}.toml")
    plan = Plan(stack, from_values(stack, {"film.thickness_nm": THICKNESSES}))
    bare = seconds(lambda: work(plan.pack(range(len(THICKNESSES)))))
    handed = seconds(lambda: list(run(work, plan.pack, range(len(THICKNESSES)), Place())))
    print(f"\nwork handed out over work {handed / bare:.3f}")  # noqa: T201
    assert handed / bare < 1.0 + OVERHEAD + 0.1  # the pace of one machine wavers by a tenth
