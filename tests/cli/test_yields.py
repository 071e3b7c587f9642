"""`photonfate yields`: what it prints and writes, and what it refuses."""

import json

import pandas as pd
import pytest
from click.testing import CliRunner
from studied import FILM_ON_GLASS

from optics.cli import main


@pytest.fixture
def stack_file(tmp_path):
    path = tmp_path / "stack.toml"
    path.write_text(FILM_ON_GLASS, encoding="utf-8")
    return path


def run(*arguments):
    return CliRunner().invoke(main, ["yields", *map(str, arguments)])


def test_an_internal_yield_gives_three_external_ones(stack_file, tmp_path):
    done = run(stack_file, "--internal", "0.9")
    assert done.exit_code == 0, done.output
    for number in ("0.8256", "0.0854", "0.0890", "0.9146", "0.2992", "0.4347", "0.5085"):
        assert number in done.output
    assert "no [sample] given: defaults" in done.output
    folder = tmp_path / "stack-yields"
    table = pd.read_csv(folder / "yields.csv")
    assert table["reading"].tolist() == ["faces", "wide", "sphere"]
    assert table["external"].tolist() == pytest.approx([0.2992, 0.4347, 0.5085], abs=1e-4)
    readings = pd.read_csv(folder / "readings.csv")
    assert (readings[["p_r", "p_e", "p_a"]].sum(axis=1) - 1.0).abs().max() < 1e-9
    ends = pd.read_csv(folder / "ends.csv")
    assert ends.groupby("sample")["share"].sum().to_list() == pytest.approx([1.0, 1.0, 1.0], abs=1e-9)
    assert json.loads((folder / "summary.json").read_text())["given"] == {"internal": 0.9, "sd": None}
    assert (folder / "yields.svg").stat().st_size > 5000


def test_an_uncertainty_that_was_not_given_is_no_zero(stack_file, tmp_path):
    done = run(stack_file, "--external", "0.3")
    head = next(line for line in done.output.splitlines() if line.startswith("Reading ") and "largest" in line)
    assert "+-" not in head
    table = pd.read_csv(tmp_path / "stack-yields/yields.csv")
    assert table[["sd", "low", "high"]].isna().all(axis=None)
    done = run(stack_file, "--external", "0.3", "--external-sd", "0.02")
    assert " +- " in next(line for line in done.output.splitlines() if line.startswith("Reading ") and "mV" in line)
    assert (pd.read_csv(tmp_path / "stack-yields/yields.csv")["sd"] > 0.0).all()


def test_external_and_back_is_the_same_yield(stack_file, tmp_path):
    run(stack_file, "--internal", "0.9")
    external = pd.read_csv(tmp_path / "stack-yields/yields.csv").set_index("reading")["external"]["wide"]
    done = run(stack_file, "--external", repr(float(external)), "--external-sd", "0.01", "--reading", "wide")
    assert done.exit_code == 0, done.output
    table = pd.read_csv(tmp_path / "stack-yields/yields.csv").set_index("reading")
    assert table["internal"]["wide"] == pytest.approx(0.9, abs=1e-8)  # ten digits in the file between
    assert table["low"]["wide"] < 0.9 < table["high"]["wide"]


def test_a_sample_in_the_file_is_used_by_yields_and_by_solve(stack_file):
    stack_file.write_text(FILM_ON_GLASS + '[sample]\nto_edge_mm = 5\nedges = "lost"\n', encoding="utf-8")
    done = run(stack_file)
    assert "edge at 5 mm" in done.output
    assert "lost edges" in done.output
    refused = run(stack_file, "--external", "0.9", "--replace")
    assert 'reading "lost edges"' in refused.output
    solved = CliRunner().invoke(main, ["solve", str(stack_file)])
    assert solved.exit_code == 0, solved.output
    assert "lost edges" in solved.output
    folder = stack_file.with_name("stack-result")
    assert pd.read_csv(folder / "readings.csv")["reading"].tolist()[:4] == ["faces", "wide", "sphere", "lost edges"]
    assert json.loads((folder / "summary.json").read_text())["sample"]["readings"]["wide"]["p_e"] > 0.08


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (("--external", "0.9", "--reading", "faces"), "expected at most 0.489785"),
        (("--external", "0.5", "--reading", "faces"), 'reading "faces"'),
        (("--internal", "0.9", "--external", "0.5"), "expected one of them"),
        (("--internal", "2"), "from 0 up to 1"),
        (("--internal", "0.9", "--reading", "moon"), "faces, wide, sphere"),
        (("--internal", "0.9", "--temperature-K", "0"), "temperature_K: found 0"),
    ],
)
def test_what_cannot_be_is_refused_in_one_line_and_nothing_is_written(arguments, said, stack_file, tmp_path):
    done = run(stack_file, *arguments)
    assert done.exit_code == 2
    assert len(done.output.strip().splitlines()) == 1
    assert said in done.output
    assert [path.name for path in tmp_path.iterdir()] == ["stack.toml"]


def test_a_folder_that_was_touched_is_kept(stack_file, tmp_path):
    run(stack_file)
    (tmp_path / "stack-yields/note.txt").write_text("mine", encoding="utf-8")
    assert run(stack_file).exit_code == 2
    assert run(stack_file, "--replace").exit_code == 0
