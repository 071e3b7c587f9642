"""The wheel is complete: installed alone, away from the checkout, it solves with the materials it carries."""

import subprocess
import sys
import venv
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]


@pytest.fixture(scope="module")
def wheel(tmp_path_factory):
    folder = tmp_path_factory.mktemp("wheel")
    build = [sys.executable, "-m", "hatchling", "build", "-t", "wheel", "-d", str(folder)]
    subprocess.run(build, cwd=ROOT, check=True, capture_output=True)
    return next(folder.glob("photonfate-*.whl"))


def test_the_wheel_carries_materials_starter_files_and_type_marker(wheel):
    names = set(zipfile.ZipFile(wheel).namelist())
    cards = {f"optics/_materials/{card.name}" for card in (ROOT / "materials").glob("*.toml")}
    starter = {"optics/output/starter/stack.toml", "optics/output/starter/tables/invented-red-film.csv"}
    assert cards | starter | {"optics/py.typed"} <= names
    assert len(cards) >= 16
    assert {name.split("/")[0] for name in names if ".dist-info/" not in name} == {"optics"}


def test_an_installed_wheel_solves_away_from_the_checkout(wheel, tmp_path):
    environment = tmp_path / "environment"
    venv.create(environment, with_pip=False)
    commands = environment / ("Scripts" if sys.platform == "win32" else "bin")
    install = ["install", "--quiet", "--no-deps", "--no-index", str(wheel)]
    run(sys.executable, "-m", "pip", "--python", environment, *install, cwd=tmp_path)
    # The libraries that the wheel needs are lent by this environment through a path file, so that no network is
    # needed; a path file comes after the environment's own packages, and brings no checkout along.
    lent = "\n".join(path for path in sys.path if path.endswith("-packages"))
    packages = run(commands / "python", "-c", "import sysconfig; print(sysconfig.get_path('purelib'))", cwd=tmp_path)
    (Path(packages.strip()) / "lent.pth").write_text(lent, encoding="utf-8")
    home = run(commands / "python", "-c", "import optics; print(optics.__file__, optics.__version__)", cwd=tmp_path)
    assert Path(home.split()[0]).is_relative_to(Path(packages.strip()))
    assert home.split()[1] == "0.1.0"
    run(commands / "photonfate", "start", "made", cwd=tmp_path)
    run(commands / "photonfate", "solve", "made/stack.toml", cwd=tmp_path)
    assert (tmp_path / "made" / "stack-result" / "outcomes.csv").is_file()


def run(*words, cwd):
    done = subprocess.run([str(word) for word in words], cwd=cwd, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    return done.stdout
