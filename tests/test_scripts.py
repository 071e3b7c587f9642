"""The scripts say plainly what is missing, and run from paths with blanks."""

import os
import shutil
import stat
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]
TOOLS = ("sh", "dirname", "cat", "cksum", "rm")
pytestmark = pytest.mark.skipif(shutil.which("sh") is None, reason="needs a POSIX shell")


@pytest.fixture
def checkout(tmp_path):
    """A checkout with the scripts alone, in a path with a blank, and a folder of commands without any Python."""
    root = tmp_path / "my checkout"
    for name in (".ci/environment.sh", "examples/demo.sh", "tests/run.sh", "pyproject.toml"):
        (root / name).parent.mkdir(parents=True, exist_ok=True)
        shutil.copy(ROOT / name, root / name)
    commands = tmp_path / "commands"
    commands.mkdir()
    for tool in TOOLS:
        (commands / tool).symlink_to(shutil.which(tool))
    return root


def pretend(checkout, script):
    """Put a Python of one's own making among the commands."""
    python = checkout.parent / "commands" / "python3"
    python.write_text(f"#!/bin/sh\n{script}\n", encoding="utf-8")
    python.chmod(python.stat().st_mode | stat.S_IXUSR)


def run(checkout, name, **environment):
    words = [str(checkout.parent / "commands" / "sh"), str(checkout / name)]
    path = {"PATH": str(checkout.parent / "commands")}
    return subprocess.run(words, env=path | environment, capture_output=True, text=True, check=False, cwd="/")


@pytest.mark.parametrize("name", ["examples/demo.sh", "tests/run.sh"])
def test_a_missing_python_is_said_plainly(checkout, name):
    done = run(checkout, name)
    assert done.returncode == 1
    assert done.stderr.startswith("Python 3.11 or later is missing")


def test_a_python_that_is_too_old_is_a_missing_one(checkout):
    pretend(checkout, "exit 1")  # what the question for its version answers
    assert "Python 3.11 or later is missing" in run(checkout, "examples/demo.sh").stderr


def test_a_missing_venv_module_is_said_plainly(checkout):
    pretend(checkout, 'case "$2" in *venv*) exit 1;; esac')
    done = run(checkout, "examples/demo.sh")
    assert done.returncode == 1
    assert "modules venv and ensurepip of python3 are missing" in done.stderr
    assert "apt install python3-venv" in done.stderr


def test_an_unreachable_index_is_said_plainly_and_the_next_run_begins_anew(checkout):
    pretend(checkout, f'exec "{sys.executable}" "$@"')
    nowhere = {"PIP_CONFIG_FILE": os.devnull, "PIP_INDEX_URL": "http://127.0.0.1:9/", "PIP_RETRIES": "0"}
    done = run(checkout, "tests/run.sh", **nowhere)
    assert done.returncode == 1
    assert "The first run needs a network" in done.stderr
    assert not (checkout / ".venv-tests" / "made-for").exists()
