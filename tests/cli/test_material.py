"""A laboratory's tables on the command line: imported, checked, repaired, and carried with results."""

import json
import re
import tomllib
from pathlib import Path

import numpy as np
import pytest
from click.testing import CliRunner

import optics
from optics.cli import main
from optics.fate.ledger import ENDS, SHARES
from optics.media import find
from optics.media.tail import Tail

CONSERVED = 1e-9  # shares sum to one on both sides, up to rounding and the integrals' own closure

FLOORED = """\
title = "A film with a floor"
above = "air"
below = "air"

[light]
from_nm = 720
to_nm = 840
step_nm = 10

[light.spectrum]
seen = "inside"
kind = "gaussian"
peak_nm = 770
fwhm_nm = 40

[[layer]]
name = "film"
material = "ch3nh3pbi3"
thickness_nm = 300
emits = true
TAIL

[[layer]]
name = "glass"
material = "float-glass"
thickness_mm = 1.1
"""


def run(*words: object):
    return CliRunner().invoke(main, [str(word) for word in words])


@pytest.fixture(autouse=True)
def _cabinet(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PHOTONFATE_MATERIALS", str(tmp_path / "own"))
    monkeypatch.chdir(tmp_path)


def floored(folder: Path, tail: str) -> Path:
    path = folder / "stack.toml"
    path.write_text(FLOORED.replace("TAIL", tail), encoding="utf-8")
    return path


def test_an_import_prints_what_was_understood_and_where_the_card_is(tmp_path):
    (tmp_path / "film.dat").write_text("Energy (eV) eps1 eps2\n1.5 5.5 0.5\n1.2 5.0 0.1\n", encoding="utf-8")
    done = run("material", "import", "film.dat", "--name", "red-film")
    assert done.exit_code == 0, done.output
    for words in (
        'column 1 "Energy (eV)" read as energy in eV',
        "2 rows, 826.561 to 1033.2 nm (1.2 to 1.5 eV)",
        "n and k from eps1 and eps2",
        f"Card: {tmp_path / 'own' / 'red-film.toml'}",
        'material = "red-film"',
    ):
        assert words in done.output
    assert "Nothing changed" in run("material", "import", "film.dat", "--name", "red-film").output
    assert "red-film" in run("material", "list").output
    assert run("material", "show", "red-film").exit_code == 0


def test_every_option_that_settles_what_a_file_leaves_open_reaches_the_reader(tmp_path):
    text = "1,0;400\n0,9;500\n0,8;600\n"
    (tmp_path / "film.txt").write_text(text, encoding="utf-8")
    refused = run("material", "import", "film.txt", "--name", "film")
    assert refused.exit_code == 2
    assert refused.stderr.startswith("film.txt: line 1: found numbers, expected a header")
    options = ["--columns", "k,wavelength", "--unit", "nm", "--separator", "semicolon", "--decimal", "comma"]
    done = run("material", "import", "film.txt", "--name", "film", *options, "--n-from", "2.5", "--source", "x")
    assert done.exit_code == 0, done.output
    assert find("film").index(500.0) == pytest.approx(2.5 + 0.9j)
    flipped = run("material", "import", "film.txt", "--name", "film", *options, "--n-from", "2.5", "--conjugate")
    assert flipped.exit_code == 2
    zeroed = run(
        *("material", "import", "film.txt", "--name", "film", *options, "--n-from", "2.5"),
        *("--conjugate", "--zero-negative-k", "--replace"),
    )
    assert zeroed.exit_code == 0, zeroed.output
    assert "3 negative k (down to -1) set to 0" in zeroed.output


def test_a_card_of_ones_own_goes_with_the_result_and_solves_there(tmp_path, monkeypatch):
    project = tmp_path / "project"
    assert run("start", project).exit_code == 0
    (raw,) = (project / "tables").glob("*.csv")
    for where in ("user", "beside"):
        options = ["--folder", project] if where == "beside" else []
        assert run("material", "import", raw, "--name", f"film-{where}", *options).exit_code == 0
        text = (project / "stack.toml").read_text(encoding="utf-8")
        stack = project / f"{where}.toml"
        stack.write_text(text.replace(f"tables/{raw.name}", f"film-{where}"), encoding="utf-8")
        assert run("solve", stack, "--output", tmp_path / where).exit_code == 0
        monkeypatch.setenv("PHOTONFATE_MATERIALS", str(tmp_path / "nowhere"))
        copied = optics.read_stack(tmp_path / where / "stack.toml")
        monkeypatch.setenv("PHOTONFATE_MATERIALS", str(tmp_path / "own"))
        assert copied == optics.read_stack(stack)
        record = json.loads((tmp_path / where / "run.json").read_text(encoding="utf-8"))
        assert any(each["path"].endswith(f"film-{where}.toml") for each in record["inputs"]["media"])


def test_a_check_says_what_is_unfit_and_ends_with_one(tmp_path):
    sound = run("material", "check", "silicon", "--from-nm", 400, "--to-nm", 1200)
    assert sound.exit_code == 0, sound.output
    assert sound.output.startswith("silicon: fit")
    floored = run("material", "check", "ch3nh3pbi3", "--figure")
    assert floored.exit_code == 1
    assert "! tail: beyond 797 nm k stops falling like a tail" in floored.output
    assert (tmp_path / "ch3nh3pbi3-check.png").read_bytes().startswith(b"\x89PNG")
    again = run("material", "check", "ch3nh3pbi3", "--figure")
    assert again.exit_code == 2
    assert "exists and is kept" in again.stderr


def test_a_check_covers_the_range_that_the_list_gives():
    listed = next(line for line in run("material", "list").output.splitlines() if line.startswith("pedot-pss "))
    checked = run("material", "check", "pedot-pss", "--to-nm", 1096)
    assert checked.exit_code == 0
    first, last = re.search(r"([\d.]+) to ([\d.]+) nm", listed).groups()
    assert f"rows from {first} to {last} nm" in checked.output


def test_a_directory_in_place_of_a_table_is_told_what_is_read(tmp_path):
    done = run("material", "import", tmp_path, "--name", "xx")
    assert done.exit_code == 2
    assert "found a directory, expected a table (csv, txt, dat, tsv, xlsx or xlsm)" in done.output


def test_the_help_of_a_check_says_that_no_figure_is_drawn_unless_asked_for():
    said = " ".join(run("material", "check", "--help").output.split())
    assert "--figure with no file after it draws <name>-check.png [default: no figure]" in said


@pytest.mark.parametrize("kind", ["png", "svg", "pdf"])
def test_the_figure_of_a_check_is_drawn_for_every_kind_of_finding(tmp_path, kind):
    nm = np.arange(350.0, 1000.0, 2.0)
    index = find("ch3nh3pbi3").index(nm)
    k = np.where(nm > 900, 0.01 * np.random.default_rng(1).standard_normal(nm.size), index.imag)
    n = index.real + 0.08 * (nm == 550)
    keep = (nm < 600) | (nm > 640)
    rows = "\n".join(f"{a},{b},{c}" for a, b, c in zip(nm[keep], n[keep], k[keep], strict=True))
    (tmp_path / "messy.csv").write_text(f"wavelength_nm,n,k\n{rows}\n", encoding="utf-8")
    done = run("material", "check", "messy.csv", "--figure", f"messy.{kind}")
    assert done.exit_code == 1, done.output
    for word in ("! gap", "! outlier", "! sign", "! noise"):
        assert word in done.output
    assert (tmp_path / f"messy.{kind}").stat().st_size > 1000


@pytest.mark.parametrize(
    ("words", "expected"),
    [
        (["material", "check", "unobtainium"], "no bundled material"),
        (["material", "check", "air"], "there is nothing to check"),
        (["material", "check", "silicon", "--from-nm", 900, "--to-nm", 800], "--from-nm: found 900 up to 800"),
        (["material", "check", "silicon", "--figure", "figure.doc"], "found .doc"),
        (["material", "import", "nowhere.csv", "--name", "x"], "no such file"),
        (["material", "import", "nowhere.csv", "--name", "silver"], "must not be hidden"),
        (["material", "import", "nowhere.csv", "--name", "x", "--decimal", "dot"], "decimal: found"),
        (["material", "import", "nowhere.csv", "--name", "x", "--n-from", "nothing"], "no bundled material"),
    ],
)
def test_bad_input_ends_with_two_and_a_line(words, expected):
    done = run(*words)
    assert done.exit_code == 2
    assert expected in done.stderr
    assert len(done.stderr.strip().splitlines()) == 1


def test_solve_warns_of_a_floor_and_says_what_its_repair_moved(tmp_path):
    bare = run("solve", floored(tmp_path, ""), "--output", "bare")
    assert "k stops falling at 797 nm" in bare.output
    repaired = run("solve", floored(tmp_path, "tail = { urbach_meV = 15, red_of_nm = 775 }"), "--output", "repaired")
    assert "k stops falling" not in repaired.output
    assert "by the tail" in repaired.output
    assert "replaced by an Urbach tail of 15 meV" in repaired.output
    one, two = (json.loads(Path(name, "summary.json").read_text(encoding="utf-8")) for name in ("bare", "repaired"))
    assert one["moved_by_tail"] == {}
    for share in SHARES:
        # The same births inside, both solved in full.
        moved = two["averages"][share] - one["averages"][share]
        assert two["moved_by_tail"][share] == pytest.approx(moved, abs=1e-12)
    assert two["moved_by_tail"]["reabsorbed"] < -0.01
    assert abs(sum(two["moved_by_tail"][share] for share in ENDS)) < CONSERVED
    copied = tomllib.loads(Path("repaired", "stack.toml").read_text(encoding="utf-8"))
    assert copied["layer"][0]["tail"] == {"urbach_meV": 15, "red_of_nm": 775}


def test_a_measured_tail_goes_with_the_result_and_reads_back(tmp_path):
    nm = np.arange(760.0, 901.0, 2.0)
    alpha = 1.2e4 * np.exp((1239.841984 / nm - 1239.841984 / 777.0) / 0.02)
    rows = "\n".join(f"{a};{b}".replace(".", ",") for a, b in zip(nm, alpha, strict=True))
    (tmp_path / "deflection.txt").write_text(f"wavelength (nm);alpha (1/cm)\n{rows}\n", encoding="utf-8")
    path = floored(tmp_path, 'tail = { table = "deflection.txt" }')
    done = run("solve", path, "--output", "out")
    assert done.exit_code == 0, done.output
    assert "taken from deflection.txt" in done.output
    assert (tmp_path / "out" / "deflection.txt").is_file()
    stack = optics.read_stack(path)
    assert optics.read_stack(tmp_path / "out" / "stack.toml") == stack
    assert optics.parse_stack(optics.write_stack(stack, folder=tmp_path), folder=tmp_path) == stack
    optics.write_result(optics.solve(stack), tmp_path / "anew")
    assert optics.read_stack(tmp_path / "anew" / "stack.toml") == stack
    record = json.loads((tmp_path / "out" / "run.json").read_text(encoding="utf-8"))
    assert [each["tail"] for each in record["inputs"]["media"] if "tail" in each] == [stack.film.tail.measured.path]


@pytest.mark.parametrize(
    ("tail", "expected"),
    [
        ('tail = "fitt"', 'layer "film": tail: found "fitt"'),
        ("tail = { urbach_mev = 15 }", 'layer "film": tail: urbach_mev: unknown key; did you mean urbach_meV?'),
        ("tail = { urbach_meV = 15, red_of_nm = 9000 }", 'layer "film": tail: red_of_nm: found 9000'),
        ('tail = { table = "none.csv" }', 'layer "film": tail: table: none.csv: no such file'),
    ],
)
def test_a_faulty_tail_is_refused_with_layer_and_key(tmp_path, tail, expected):
    done = run("solve", floored(tmp_path, tail))
    assert done.exit_code == 2
    assert expected in done.stderr
    assert len(done.stderr.strip().splitlines()) == 1


def test_a_tail_can_be_given_in_python_as_in_a_file(tmp_path):
    stack = optics.read_stack(floored(tmp_path, ""))
    fitted = stack.with_layer("film", tail="fit")
    assert fitted.film.tail == Tail(fit=True)
    assert fitted == optics.read_stack(floored(tmp_path, 'tail = "fit"'))
    assert fitted.with_layer("film", tail=None) == stack
    assert stack.with_layer("film", tail={"urbach_meV": 15}).film.tail == Tail(urbach_meV=15)
    with pytest.raises(optics.InputError, match='layer "film": tail: found 3, expected'):
        stack.with_layer("film", tail=3)


@pytest.mark.parametrize(
    "change",
    [
        ("thickness_nm = 300\n", "thickness_nm = 300\nroughness_nm = 10\n"),
        ('seen = "inside"\nkind = "gaussian"\npeak_nm = 770\nfwhm_nm = 40', 'kind = "from-absorption"'),
        ('seen = "inside"', 'seen = "above"'),
        ("from_nm = 720\nto_nm = 840\nstep_nm = 10", "wavelengths_nm = [780]"),
    ],
    ids=["a rough face", "births from the repaired absorption", "births seen above", "one wavelength"],
)
def test_what_the_repair_moved_is_said_whatever_else_is_asked_for(tmp_path, change):
    path = floored(tmp_path, "tail = { urbach_meV = 15, red_of_nm = 775 }")
    path.write_text(path.read_text(encoding="utf-8").replace(*change), encoding="utf-8")
    result = optics.solve(optics.read_stack(path))
    assert result.moved_by_tail["reabsorbed"] < -1e-3
    assert abs(sum(result.moved_by_tail[share] for share in ENDS)) < CONSERVED


def test_births_from_absorption_that_end_on_a_floor_are_refused_until_it_is_repaired(tmp_path):
    path = floored(tmp_path, "")
    births = 'seen = "inside"\nkind = "gaussian"\npeak_nm = 770\nfwhm_nm = 40'
    path.write_text(path.read_text(encoding="utf-8").replace(births, 'kind = "from-absorption"'), encoding="utf-8")
    with pytest.raises(optics.InputError, match="tail"):
        optics.read_stack(path)
    for tail, refused in (('"fit"', True), ("{ urbach_meV = 15 }", False)):
        text = path.read_text(encoding="utf-8")
        (tmp_path / "tail.toml").write_text(
            text.replace("emits = true", f"emits = true\ntail = {tail}"), encoding="utf-8"
        )
        if refused:  # the table's own edge falls by a factor e in 38 meV, more slowly than kT allows
            with pytest.raises(optics.InputError, match="still rise at the red end"):
                optics.read_stack(tmp_path / "tail.toml")
        else:
            assert optics.solve(optics.read_stack(tmp_path / "tail.toml")).averages["trapped"] > 0.5


def test_the_invented_film_to_begin_from_is_fit(tmp_path):
    run("start", tmp_path / "project")
    (table,) = (tmp_path / "project" / "tables").glob("*.csv")
    done = run("material", "check", table, "--from-nm", 610, "--to-nm", 750)
    assert done.exit_code == 0, done.output
