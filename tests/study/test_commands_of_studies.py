"""The commands sweep, compare, tolerance and audit: files, screens, exit codes."""

import json
import shlex

import pandas as pd
import pytest
from click.testing import CliRunner
from studied import STACK_FILE

from optics.cli import main
from optics.cli.progress import line


@pytest.fixture
def stack_file(tmp_path):
    path = tmp_path / "stack.toml"
    path.write_text(STACK_FILE, encoding="utf-8")
    return path


def run(*words):
    return CliRunner().invoke(main, [str(word) for word in words])


def test_a_sweep_writes_table_summary_figure_and_what_it_was_made_from(stack_file):
    done = run(
        "sweep", stack_file, "--vary", "film.thickness_nm = 100 to 300 step 50", "--best", "max:free_above", "--spectra"
    )
    assert done.exit_code == 0, done.stderr
    folder = stack_file.with_name("stack-sweep")
    names = {path.name for path in folder.iterdir()}
    assert names == {"sweep.csv", "spectra.csv", "summary.json", "run.json", "sweep.svg", "sweep.png", "stack.toml"}
    table = pd.read_csv(folder / "sweep.csv")
    assert list(table.columns[:3]) == ["point", "film.thickness_nm", "model"]
    assert len(pd.read_csv(folder / "spectra.csv")) == 3 * len(table) == 15
    found = json.loads((folder / "summary.json").read_text(encoding="utf-8"))
    assert found["own"] == {"film.thickness_nm": 300.0}
    assert found["best"][0]["value"] == pytest.approx(table["free_above"].max(), abs=1e-11)
    assert "worse by" in done.stdout
    assert not stack_file.with_name("stack-sweep.unfinished").exists()


def test_a_study_file_and_its_options_on_the_command_line_give_the_same(stack_file):
    study = stack_file.with_name("study.toml")
    study.write_text('stack = "stack.toml"\nvary = ["film.thickness_nm = 100 to 300 step 100"]\n', encoding="utf-8")
    assert run("sweep", study).exit_code == 0
    assert run("sweep", stack_file, "--vary", "film.thickness_nm = 100 to 300 step 100").exit_code == 0
    one, other = (stack_file.with_name(f"{name}-sweep") / "sweep.csv" for name in ("study", "stack"))
    assert one.read_bytes() == other.read_bytes()


def test_cases_change_whole_tables(stack_file):
    for name, k in (("cold", 0.01), ("hot", 0.04)):
        rows = f"wavelength_nm,n,k\n700,2.4,{k}\n850,2.4,{k}\n"
        stack_file.with_name(f"{name}.csv").write_text(rows, encoding="utf-8")
    cases = stack_file.with_name("cases.csv")
    cases.write_text("film.material,light.spectrum.peak_nm\ncold.csv,760\nhot.csv,764\n", encoding="utf-8")
    done = run("sweep", stack_file, "--cases", cases)
    assert done.exit_code == 0, done.stderr
    table = pd.read_csv(stack_file.with_name("stack-sweep") / "sweep.csv")
    assert table["film.material"].tolist() == ["cold.csv", "hot.csv"]
    assert table["reabsorbed"].iloc[1] > table["reabsorbed"].iloc[0]


def test_two_axes_are_drawn_as_maps_and_three_not_at_all(stack_file):
    axes = ["--vary", "film.thickness_nm = 100, 200", "--vary", "glass.material = float-glass, sapphire"]
    assert run("sweep", stack_file, *axes).exit_code == 0
    folder = stack_file.with_name("stack-sweep")
    assert (folder / "sweep.svg").exists()
    assert run("sweep", stack_file, *axes, "--vary", "above = air, pmma").exit_code == 0
    assert not (folder / "sweep.svg").exists()


@pytest.mark.parametrize(
    ("options", "said"),
    [
        ([], "nothing to vary"),
        (["--vary", "film.thickness_nm = 0"], "found 0, expected a number in nm above 0"),
        (["--vary", "film.thickness_nm = 100", "--best", "max:fre_above"], "did you mean free_above?"),
        (["--vary", "film.thickness_nm = 100", "--cases", "x.csv"], "both axes and cases"),
        (["--vary", "film.thickness_nm = 100", "--cluster", "tcp://127.0.0.1:1", "--workers", "2"], "more than one of"),
    ],
)
def test_what_a_sweep_cannot_do_is_one_line_and_leaves_nothing(options, said, stack_file):
    done = run("sweep", stack_file, *options)
    assert done.exit_code == 2
    assert said in done.stderr
    assert done.stderr.count("\n") == 1
    assert not stack_file.with_name("stack-sweep").exists()


def test_a_comparison_writes_its_tables_and_says_why(stack_file):
    other = stack_file.with_name("sapphire.toml")
    other.write_text(STACK_FILE.replace("float-glass", "sapphire"), encoding="utf-8")
    done = run("compare", stack_file, other)
    assert done.exit_code == 0, done.stderr
    folder = stack_file.with_name("stack-compared")
    assert {
        "shares.csv",
        "differences.csv",
        "differences_by_wavelength.csv",
        "why.csv",
        "ladder.svg",
        "differences.svg",
    } <= {path.name for path in folder.iterdir()}
    assert "Why sapphire differs" in done.stdout
    assert run("compare", stack_file, other).exit_code == 0  # nobody touched it: replaced
    (folder / "why.csv").write_text("mine", encoding="utf-8")
    assert run("compare", stack_file, other).exit_code == 2


def test_a_comparison_of_stacks_that_do_not_differ_says_so_in_a_line(stack_file):
    other = stack_file.with_name("same.toml")
    other.write_text(STACK_FILE, encoding="utf-8")
    done = run("compare", stack_file, other)
    assert done.exit_code == 0, done.stderr
    assert "same differs in nothing." in done.stdout.splitlines()
    assert "Why" not in done.stdout


def test_a_comparison_with_itself_is_refused(stack_file):
    done = run("compare", stack_file, stack_file)
    assert done.exit_code == 2
    assert "the same file twice" in done.stderr


def test_a_tolerance_study_writes_bands_indices_and_other_tables(stack_file):
    text = STACK_FILE.replace("thickness_nm = 300", "thickness_nm = { value = 300, sd = 10 }")
    text = text.replace("{ n = 2.4, k = 0.02 }", "[{ n = 2.4, k = 0.02 }, { n = 2.3, k = 0.03 }]")
    stack_file.write_text(text, encoding="utf-8")
    done = run("tolerance", stack_file, "--samples", "16")
    assert done.exit_code == 0, done.stderr
    folder = stack_file.with_name("stack-tolerance")
    bands = pd.read_csv(folder / "bands.csv").set_index("share")
    assert (bands["low_95"] <= bands["high_95"]).all()
    assert set(pd.read_csv(folder / "indices.csv")["input"]) == {"film.thickness_nm", "film.n_offset", "film.k_scale"}
    assert len(pd.read_csv(folder / "alternatives.csv")) == 2
    for word in ("other tables", "Convergence", "film.n 0.02 (default)", "film.thickness_nm 10 (normal)"):
        assert word in done.stdout
    assert "film.n_offset" not in done.stdout  # one name for what is given and what is found
    assert "film.k_scale" not in done.stdout


def test_samples_that_are_no_power_of_two_are_one_line(stack_file):
    done = run("tolerance", stack_file, "--samples", "100")
    assert done.exit_code == 2
    assert "expected a power of two" in done.stderr


def test_solve_shows_and_writes_what_its_inputs_are_worth(stack_file):
    done = run("solve", stack_file)
    assert done.exit_code == 0, done.stderr
    assert "inputs +-" in done.stdout
    assert "Most sensitive to" in done.stdout
    folder = stack_file.with_name("stack-result")
    found = json.loads((folder / "summary.json").read_text(encoding="utf-8"))["input_uncertainty"]
    assert found["by_share"]["trapped"] > 0
    assert [each["stated"] for each in found["inputs"]] == [False] * 3
    assert len(pd.read_csv(folder / "inputs.csv")) == 3


def test_progress_tells_points_rate_and_time_left():
    assert line(30, 100, 2.0) == "30 of 100 points, 2 a second, 0:00:35 left"
    assert line(0, 100, 0.0).endswith("unknown left")


@pytest.mark.parametrize("command", ["sweep", "compare", "tolerance", "audit"])
def test_the_example_in_the_help_runs(command, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    text = run(command, "--help").stdout
    shown = text.split("Example:")[1].split("Options:")[0].splitlines()
    examples = [each.strip().removeprefix("photonfate ") for each in shown if each.strip().startswith("photonfate ")]
    assert len(examples) >= 2
    for example in examples:
        done = run(*shlex.split(example))
        assert done.exit_code == 0, done.output
