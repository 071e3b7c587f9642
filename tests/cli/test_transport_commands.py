"""The commands inplane and indepth, through their exit codes and files."""

import json

import numpy as np
import pandas as pd
import pytest
from click.testing import CliRunner

from optics.cli import main


@pytest.fixture(scope="module")
def project(tmp_path_factory):
    folder = tmp_path_factory.mktemp("transport") / "film"
    assert run("start", folder).exit_code == 0
    return folder


def run(*arguments):
    return CliRunner().invoke(main, [str(each) for each in arguments])


def test_inplane_writes_its_tables_and_shows_the_distances(project):
    done = run("inplane", project / "stack.toml")
    assert done.exit_code == 0, done.output
    assert "median" in done.output
    folder = project / "stack-inplane"
    kernel = pd.read_csv(folder / "kernel.csv")
    summary = json.loads((folder / "summary.json").read_text(encoding="utf-8"))
    assert kernel["cumulative"].iloc[-1] == pytest.approx(summary["averages"]["taken_back"], abs=1e-5)
    modes = pd.read_csv(folder / "modes.csv")
    assert modes["share"].groupby(modes["wavelength_nm"]).sum().between(0.5, 0.9).all()
    guided = pd.read_csv(folder / "guided_spectrum.csv").drop(columns=["wavelength_nm"])
    assert guided[guided > 0.0].min(axis=None) > 1e-30 * guided["births_per_nm"].max()
    assert guided["guided_per_nm_0_um"].min() > 0.0
    names = {path.name for path in folder.iterdir()}
    assert {"compact.csv", "exponentials.csv", "guided_spectrum.csv", "inplane.svg", "inplane.png"} <= names
    assert run("inplane", project / "stack.toml").exit_code == 0  # an untouched folder is written anew


def test_indepth_takes_a_mesh_and_its_rows_add_to_one(project, tmp_path):
    mesh = tmp_path / "edges.csv"
    mesh.write_text("edge_nm\n0\n20\n100\n320\n", encoding="utf-8")
    done = run("indepth", project / "stack.toml", "--mesh", mesh, "--by-wavelength")
    assert done.exit_code == 0, done.output
    folder = project / "stack-indepth"
    for name in ("depth_wave.csv", "depth_ray.csv"):
        table = pd.read_csv(folder / name)
        assert table["birth_to_nm"].tolist() == [20, 100, 320]
        assert table.iloc[:, 3:].sum(axis=1).to_numpy() == pytest.approx(np.ones(3), abs=1e-9)
    tidy = pd.read_csv(folder / "depth_by_wavelength.csv")
    assert len(tidy) == 9 * tidy["wavelength_nm"].nunique()


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("edge_nm\n0\n200\n100\n320\n", "expected ascending edges"),
        ("edge_nm\n0\n100\n300\n", "expected 0 to 320 nm"),
        ("depth\n0\n320\n", "expected the one column edge_nm"),
        ("edge_nm\n0\nhalf\n320\n", "row 3: found 'half'"),
        ("", "expected the one column edge_nm"),
    ],
)
def test_a_mesh_that_will_not_do_is_refused_in_one_line(project, tmp_path, text, said):
    mesh = tmp_path / "edges.csv"
    mesh.write_text(text, encoding="utf-8")
    done = run("indepth", project / "stack.toml", "--mesh", mesh, "--output", tmp_path / "out")
    assert done.exit_code == 2
    assert said in done.output
    assert len(done.output.strip().splitlines()) == 1
    assert not (tmp_path / "out").exists()


def test_a_mesh_that_is_not_there_is_refused(project, tmp_path):
    done = run("indepth", project / "stack.toml", "--mesh", tmp_path / "none.csv")
    assert done.exit_code == 2
    assert "cannot be read" in done.output
