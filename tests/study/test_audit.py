"""The audit passes where all is well and fails, on the right line, where something is wrong."""

import json
import shutil
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from click.testing import CliRunner
from studied import STACK_FILE, small_stack

import optics
from optics.cli import main
from optics.fate.drawing import drawn as sound_drawing
from optics.fate.ledger import ENDS
from optics.fate.scenes import scenes
from optics.media.card import read_card
from optics.study import planewaves
from optics.study.audit import audit
from optics.study.chance import follow

ROOT = Path(__file__).resolve().parents[2]
EXAMPLES = sorted((ROOT / "examples").glob("*/*.toml"))
CHECKS = (
    "plane waves",
    "reciprocity above",
    "reciprocity below",
    "exchange between layers",
    "power by two paths",
    "doubled quadrature",
    "wave against ray",
    "rays by chance",
)


def run(*words):
    return CliRunner().invoke(main, ["audit", *map(str, words)])


def failed(found):
    return {check.name for check in found.checks if check.verdict == "FAIL"}


def stacks_of_examples():
    return [path for path in EXAMPLES if "[[layer]]" in path.read_text(encoding="utf-8")]


@pytest.mark.parametrize("path", stacks_of_examples(), ids=lambda path: f"{path.parent.name}/{path.stem}")
def test_every_example_passes(path):
    found = audit(optics.read_stack(path))
    assert found.passed, [check for check in found.checks if check.verdict == "FAIL"]


def test_a_sound_stack_passes_every_check_there_is():
    found = audit(small_stack())
    assert found.passed
    assert set(CHECKS) <= {check.name for check in found.checks}
    for check in found.checks:
        if check.verdict == "pass" and check.figure is not None:
            assert check.figure <= check.bound
            assert check.said


@pytest.fixture
def project(tmp_path):
    shutil.copytree(ROOT / "optics" / "output" / "starter" / "tables", tmp_path / "tables")
    text = STACK_FILE.replace("{ n = 2.4, k = 0.02 }", '"tables/invented-red-film.csv"').replace(
        "740, 760, 780", "650, 668, 690"
    )
    (tmp_path / "stack.toml").write_text(text.replace("762", "668"), encoding="utf-8")
    return tmp_path


def edited(project, change):
    table = project / "tables" / "invented-red-film.csv"
    lines = table.read_text(encoding="utf-8").splitlines()
    table.write_text("\n".join(change(lines)) + "\n", encoding="utf-8")


def test_a_wrong_sign_of_k_fails_at_the_tables(project):
    def turned(lines):
        return [
            line if "," not in line or "n" in line else ",".join([*line.split(",")[:2], f"-{line.split(',')[2]}"])
            for line in lines
        ]

    edited(project, turned)
    done = run(project / "stack.toml")
    assert done.exit_code == 1
    assert "FAIL  tables and cards" in done.stdout
    assert "k: found -" in done.stdout


def test_a_truncated_table_fails_at_the_tables(project):
    edited(project, lambda lines: lines[:30])
    done = run(project / "stack.toml")
    assert done.exit_code == 1
    assert "FAIL  tables and cards" in done.stdout
    assert "covers" in done.stdout


def test_a_tampered_card_fails_at_the_tables(project, tmp_path, monkeypatch):
    card = tmp_path / "float-glass.toml"
    text = (ROOT / "materials" / "float-glass.toml").read_text(encoding="utf-8")
    head, mark, data = text.partition("[data]")
    card.write_text(head + mark + data.replace("1", "2", 1), encoding="utf-8")
    monkeypatch.setattr(
        "optics.media.cabinet.read_card", lambda path: read_card(card if path.stem == "float-glass" else path)
    )
    done = run(project / "stack.toml")
    assert done.exit_code == 1
    assert "FAIL  tables and cards" in done.stdout
    assert "checksum" in done.stdout


def swapped(stack, wavelength_nm):
    """Return a drawing in which the film's neighbour stands on its other side."""
    sound = sound_drawing(stack, wavelength_nm)
    order = [0, 2, 1, *range(3, len(sound.index))]
    return replace(sound, index=sound.index[order], thickness_nm=sound.thickness_nm[order], film=2)


def test_a_layer_swapped_within_the_computation_fails_at_the_plane_waves(monkeypatch):
    monkeypatch.setattr(planewaves, "drawn", swapped)
    assert "plane waves" in failed(audit(small_stack()))


def test_a_layer_swapped_in_the_stack_file_fails_at_the_result_on_file(project):
    file = project / "stack.toml"
    text = file.read_text(encoding="utf-8").replace(
        '[[layer]]\nname = "glass"',
        '[[layer]]\nname = "contact"\nmaterial = { n = 1.8, k = 0.02 }\nthickness_nm = 90\n\n[[layer]]\nname = "glass"',
    )
    file.write_text(text, encoding="utf-8")
    assert CliRunner().invoke(main, ["solve", str(file)]).exit_code == 0
    assert run(file).exit_code == 0
    head, *layers = text.split("[[layer]]")
    file.write_text("[[layer]]".join([head, layers[1], layers[0], layers[2]]), encoding="utf-8")
    done = run(file, "--json")
    assert done.exit_code == 1
    assert [each["name"] for each in json.loads(done.stdout)["checks"] if each["verdict"] == "FAIL"] == [
        "result on file"
    ]


def test_a_quadrature_cut_to_few_nodes_fails_at_the_doubled_one(monkeypatch):
    from optics.fate import wave
    from optics.fate.wave import Settings

    coarse = Settings(tolerance=1e3)  # takes whatever the first nodes give
    sound = wave.path_order
    # order 8 has a rule of 7 nodes, and its nested one 3
    monkeypatch.setattr(wave, "path_order", lambda scene, settings: 8 if settings == coarse else sound(scene, settings))
    monkeypatch.setattr("optics.fate.wave_account.ROUNDS", 0)
    assert "doubled quadrature" in failed(audit(small_stack(), settings=coarse))


def test_machines_read_the_same(project):
    done = run(project / "stack.toml", "--json")
    found = json.loads(done.stdout)
    assert done.exit_code == 0
    assert found["passed"] is True
    assert {"name", "figure", "bound", "verdict", "said"} == set(found["checks"][0])


def test_a_file_that_is_no_stack_is_bad_input_and_no_audit(tmp_path):
    (tmp_path / "stack.toml").write_text("title = ", encoding="utf-8")
    done = run(tmp_path / "stack.toml")
    assert done.exit_code == 2
    assert done.stdout == ""


@pytest.mark.parametrize("share", [2 / 3, 1.0, 0.0])
def test_rays_followed_by_chance_end_where_the_series_say(share):
    stack = small_stack(2.4 + 0.004j, thickness_nm=2000.0).with_emission(horizontal_share=share)
    drawing = replace(sound_drawing(stack, np.array([760.0])), in_plane=share)
    (_, scene), *_ = scenes(drawing)
    found = follow(scene, rays=30_000, seed=5)
    table = optics.solve(stack).ray_table.set_index("wavelength_nm").loc[760.0]
    away = np.abs(found.shares - table[list(ENDS)].to_numpy(dtype=float)) / found.errors
    assert found.shares.sum() == pytest.approx(1.0, abs=1e-12)
    assert away.max() < 4.5  # seven ends, one in ten thousand


def test_the_same_seed_gives_the_same_lots():
    (_, scene), *_ = scenes(sound_drawing(small_stack(), np.array([760.0])))
    one, same, other = (follow(scene, rays=500, seed=seed).shares for seed in (1, 1, 2))
    assert one.tolist() == same.tolist() != other.tolist()
