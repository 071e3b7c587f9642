"""No command writes its results over the stack file or the tables that it reads, whatever it is told."""

import pytest
from click.testing import CliRunner

from optics.cli import main

COMMANDS = {
    "solve": ("solve", "{stack}", "--output", "{folder}"),
    "yields": ("yields", "{stack}", "--external", "0.2", "--output", "{folder}"),
    "inplane": ("inplane", "{stack}", "--output", "{folder}"),
    "indepth": ("indepth", "{stack}", "--output", "{folder}"),
    "receivers": ("receivers", "{stack}", "--output", "{folder}"),
    "handoff": ("handoff", "{stack}", "--to", "{folder}"),
    "tolerance": ("tolerance", "{stack}", "--output", "{folder}"),
    "sweep": ("sweep", "{stack}", "--vary", "film.thickness_nm = 100, 200", "--output", "{folder}"),
    "compare": ("compare", "{stack}", "{other}", "--output", "{folder}"),
}


@pytest.mark.parametrize("part", [".", "tables"], ids=["around the stack file", "around its tables"])
@pytest.mark.parametrize("command", COMMANDS)
def test_the_folder_of_the_inputs_is_never_replaced(command, part, tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    for name in ("film", "other"):
        assert CliRunner().invoke(main, ["start", name]).exit_code == 0
    before = {path: path.read_bytes() for path in tmp_path.rglob("*") if path.is_file()}
    places = {"stack": "film/stack.toml", "other": "other/stack.toml", "folder": f"film/{part}"}
    words = [word.format(**places) for word in COMMANDS[command]]
    run = CliRunner().invoke(main, [*words, "--replace"])
    assert run.exit_code == 2, run.output
    assert "lies in it, which is needed" in run.output
    assert {path: path.read_bytes() for path in tmp_path.rglob("*") if path.is_file()} == before


def test_the_copy_of_the_stack_file_is_as_it_was_written(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    for words in (["start", "film"], ["solve", "film/stack.toml"]):
        assert CliRunner().invoke(main, words).exit_code == 0
    copy = tmp_path / "film" / "stack-result" / "stack.toml"
    assert copy.read_bytes() == (tmp_path / "film" / "stack.toml").read_bytes()
