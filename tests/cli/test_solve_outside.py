"""`solve` with a pump, an aperture and a measurement: files, screen, exit codes."""

import json

import numpy as np
import pandas as pd
import pytest
from click.testing import CliRunner

from optics.cli import main

STACK = """\
title = "Invented film"
above = "air"
below = "air"
[light]
from_nm = 700
to_nm = 860
step_nm = 4
[light.spectrum]
kind = "gaussian"
seen = "above"
peak_nm = 768
fwhm_nm = 40
[emission]
depth = { pump_nm = 532, side = "above", births = "square" }
[collection]
na = 0.9
side = "above"
[[layer]]
name = "film"
material = { n = 2.5, k = 0.05 }
thickness_nm = 480
emits = true
"""


def run(*words):
    return CliRunner().invoke(main, [str(word) for word in words])


@pytest.fixture
def stack(tmp_path):
    path = tmp_path / "stack.toml"
    path.write_text(STACK, encoding="utf-8")
    nm = np.arange(700.0, 861.0, 4.0)
    light = 900.0 * np.exp(-4 * np.log(2) * ((nm - 768) / 40) ** 2)
    rows = [f"{x:g},{y:.6f}" for x, y in zip(nm, light, strict=True)]
    (tmp_path / "seen.csv").write_text("\n".join(["wavelength_nm,light_per_nm", *rows]), encoding="utf-8")
    return path


def test_the_screen_tells_pump_aperture_and_misfit_and_the_folder_holds_their_files(stack):
    result = run("solve", stack, "--measured", stack.with_name("seen.csv"), "--laid-over", "above")
    assert result.exit_code == 0, result.output
    for said in (
        "Pump absorbed in the film: ",
        "uniform      linear      square",
        "Collected above with NA 0.9: wave ",
    ):
        assert said in result.output
    assert "laid over above: 0.0% of its peak apart" in result.output  # what was seen is what gets out
    folder = stack.with_name("stack-result")
    names = {path.name for path in folder.iterdir()}
    assert {"spectra.csv", "spectra.png", "pattern.csv", "pattern.png", "depth.csv"} <= names
    summary = json.loads((folder / "summary.json").read_text(encoding="utf-8"))
    assert set(summary["depth_averages"]) == {"uniform", "linear", "square"}
    assert summary["depth_averages"]["square"]["trapped"] == pytest.approx(summary["averages"]["trapped"])
    assert summary["pump"]["absorbed"] > 0.0
    assert summary["measured"]["curve"] == "above"
    outcomes = pd.read_csv(folder / "outcomes.csv")
    assert outcomes.columns[-1] == "collected"
    assert (outcomes["collected"] < outcomes["free_above"]).all()
    assert pd.read_csv(folder / "spectra.csv")["measured_per_nm"].notna().all()


@pytest.mark.parametrize(
    ("content", "said"),
    [
        ("wavelength_nm,light_per_nm\n500,1\n600,1\n", "found 0 rows with light within 700 to 860 nm"),
        ("wavelength_nm,counts\n750,1\n", 'column "counts" is not known'),
        (None, "no such file"),
    ],
)
def test_a_measurement_that_cannot_be_used_is_one_line_and_leaves_nothing(stack, content, said):
    path = stack.with_name("other.csv")
    if content is not None:
        path.write_text(content, encoding="utf-8")
    result = run("solve", stack, "--measured", path)
    assert result.exit_code == 2
    assert said in result.stderr
    assert len(result.stderr.strip().splitlines()) == 1
    assert not stack.with_name("stack-result").exists()
