"""What README shows is what the tool does."""

import re
import tomllib
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from click.testing import CliRunner

import optics
from optics.cli import main
from optics.media import Tabulated
from optics.media.tail import Tail
from optics.stackfile import parse_stack

ROOT = Path(__file__).resolve().parents[1]
README = (ROOT / "README.md").read_text(encoding="utf-8")
DIGITS = 5e-4  # README gives three decimals
# Sizes of rounding and estimates of it differ from machine to machine.
VARIES = ("Closure", "Numerical error", "Warnings:", "  - numerical error")


def blocks(kind):
    return re.findall(rf"^```{kind}\n(.*?)^```", README, flags=re.MULTILINE | re.DOTALL)


def test_the_example_shows_the_real_output(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    runner = CliRunner()
    runner.invoke(main, ["start", "my-film"])
    shown = runner.invoke(main, ["solve", "my-film/stack.toml"]).stdout
    expected = blocks("text")[0]

    def steady(text):
        return [line for line in text.splitlines() if line and not line.startswith(VARIES)]

    assert steady(shown) == steady(expected)


def test_the_python_example_runs(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    CliRunner().invoke(main, ["start", "my-film"])
    (code,) = blocks("python")
    names = {}
    exec(code, names)  # it is the project's own README
    assert names["thin"].averages["trapped"] != names["result"].averages["trapped"]


def test_the_stack_file_shown_is_a_sound_one(tmp_path):
    (text,) = blocks("toml")
    (tmp_path / "tables").mkdir()
    (tmp_path / "tables" / "film.csv").write_text("wavelength_nm,n,k\n600,2.5,0.1\n900,2.4,0\n", encoding="utf-8")
    assert parse_stack(text, folder=tmp_path).film.name == "film"


def test_the_changelog_has_a_section_for_the_version():
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    assert f"## {project['version']}" in (ROOT / "CHANGELOG.md").read_text(encoding="utf-8")


def as_published(stack):
    return stack


def with_a_tail(stack):
    assert "tail = { urbach_meV = 15,\n  red_of_nm = 760 }" in README
    return stack.with_layer("film", tail=Tail(urbach_meV=15, red_of_nm=760))


def clear(stack):
    wavelengths = np.arange(690.0, 871.0)
    medium = Tabulated(wavelengths, stack.film.material.index(wavelengths).real, np.zeros_like(wavelengths))
    return stack.with_layer("film", material=replace(stack.film.material, medium=medium))


@pytest.mark.parametrize(
    ("change", "trapped", "warned"), [(as_published, 0.896, True), (with_a_tail, 0.885, False), (clear, 0.795, False)]
)
def test_the_floor_of_a_published_table_moves_the_trapped_share_as_stated(change, trapped, warned):
    result = optics.solve(change(optics.read_stack(ROOT / "examples" / "ch3nh3pbi3-on-glass" / "stack.toml")))
    assert result.averages["trapped"] == pytest.approx(trapped, abs=DIGITS)
    assert f"{trapped}" in README
    assert any("k stops falling" in warning for warning in result.warnings) == warned
