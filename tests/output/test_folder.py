"""Result folders: whole or not at all, and nobody's work is written over."""

import json
import os

import pandas as pd
import pytest
from made_results import made_result, made_stack

from optics.errors import InputError
from optics.output.folder import writing
from optics.output.record import touched
from optics.output.result import result_folder, write_result
from optics.output.tables import write_json, write_summary, write_table
from optics.stackfile import read_stack, write_stack

FILES = {
    "births.png",
    "births.svg",
    "index.csv",
    "outcomes.csv",
    "outcomes_ray.csv",
    "reflection.csv",
    "run.json",
    "spectra.csv",
    "spectra.png",
    "spectra.svg",
    "stack.toml",
    "summary.json",
    "where.csv",
}


@pytest.fixture
def solved(tmp_path):
    """A stack file with a table, its made-up result, and where that goes."""
    (tmp_path / "tables").mkdir()
    (tmp_path / "tables" / "film.csv").write_text("wavelength_nm,n,k\n600,2.5,0.1\n900,2.4,0.0\n", encoding="utf-8")
    text = "# my own remark\n" + write_stack(made_stack(film=str(tmp_path / "tables" / "film.csv")), folder=tmp_path)
    stack_file = tmp_path / "my stack.toml"
    stack_file.write_text(text, encoding="utf-8")
    return made_result(stack=read_stack(stack_file)), stack_file


def written(solved, **options):
    result, stack_file = solved
    return write_result(result, result_folder(stack_file), stack_file=stack_file, **options)


def test_a_result_folder_lies_beside_the_stack_file_and_holds_every_file(solved):
    folder = written(solved)
    assert folder == solved[1].parent / "my stack-result"
    assert {path.name for path in folder.iterdir()} == FILES | {"tables"}


def test_a_film_solved_by_rays_alone_has_no_wave_outcomes(tmp_path):
    folder = write_result(made_result(ray=True), tmp_path / "out")
    assert {path.name for path in folder.iterdir()} == FILES - {"outcomes.csv"}


def test_a_table_is_read_back_to_ten_digits(solved):
    read = pd.read_csv(written(solved) / "outcomes.csv")
    assert list(read.columns) == list(solved[0].table.columns)
    # Ten digits are written.
    pd.testing.assert_frame_equal(read, solved[0].table, rtol=1e-9, atol=0, check_dtype=False)


def test_a_table_has_one_header_row_and_no_index(tmp_path):
    write_table(pd.DataFrame({"wavelength_nm": [700.0], "share": [1 / 3]}), tmp_path / "table.csv")
    assert (tmp_path / "table.csv").read_bytes() == b"wavelength_nm,share\n700,0.3333333333\n"


def test_numbers_that_json_does_not_know_become_null(tmp_path):
    write_json({"a": float("nan"), "b": (1.5, float("inf"))}, tmp_path / "a.json")
    assert json.loads((tmp_path / "a.json").read_text()) == {"a": None, "b": [1.5, None]}


def test_numbers_of_summaries_have_twelve_digits(tmp_path):
    write_summary({"rate_factor": 1.0 - 1e-16, "parts": [{"a": 1 / 3}], "count": 3, "fit": True}, tmp_path / "a.json")
    found = json.loads((tmp_path / "a.json").read_text())
    assert found == {"rate_factor": 1.0, "parts": [{"a": 0.333333333333}], "count": 3, "fit": True}
    assert found["fit"] is True


def test_the_summary_holds_averages_and_what_to_think_of_them(solved):
    summary = json.loads((written(solved) / "summary.json").read_text())
    assert summary["averages"]["trapped"] == pytest.approx(0.6)
    assert summary["advised_model"] == "wave"
    assert summary["wave_minus_ray"]["free_above"] == pytest.approx(0.06 - 0.057)
    assert {"advised_because", "numerical_error", "warnings", "assumptions", "ray_averages"} <= set(summary)


def test_the_record_holds_versions_input_hashes_settings_and_the_hash_of_every_file(solved):
    folder = written(solved)
    record = json.loads((folder / "run.json").read_text())
    everything = {path.relative_to(folder).as_posix() for path in folder.rglob("*") if path.is_file()}
    assert set(record["files"]) == everything - {"run.json"}
    assert record["libraries"]["numpy"]
    assert record["inputs"]["stack_file"]["sha256"] == record["files"]["stack.toml"]
    film = next(medium for medium in record["inputs"]["media"] if medium["material"] == "film")
    assert film["sha256"] == record["files"]["tables/film.csv"]
    assert record["settings"]["from_nm"] == 700


def test_the_stack_file_is_copied_as_it_is_and_can_be_solved_from_the_copy(solved):
    folder = written(solved)
    assert (folder / "stack.toml").read_bytes() == solved[1].read_bytes()
    solved[1].unlink()
    (solved[1].parent / "tables" / "film.csv").unlink()
    copied = read_stack(folder / "stack.toml")
    assert copied.film.material.sha256 == solved[0].stack.film.material.sha256


@pytest.mark.parametrize("name", ["../elsewhere.csv", "index.csv"])
def test_tables_that_cannot_stand_beside_the_copy_are_named_anew(tmp_path, name):
    home = tmp_path / "home"
    home.mkdir()
    table = home / name
    table.write_text("wavelength_nm,n,k\n600,2.5,0.1\n900,2.4,0.0\n", encoding="utf-8")
    stack_file = home / "stack.toml"
    stack_file.write_text(write_stack(made_stack(film=str(table)), folder=home), encoding="utf-8")
    stack = read_stack(stack_file)
    folder = write_result(made_result(stack=stack), home / "out", stack_file=stack_file)
    table.unlink()
    again = read_stack(folder / "stack.toml")
    assert again.film.material.sha256 == stack.film.material.sha256
    assert again.light == stack.light
    assert (folder / "index.csv").read_text().startswith("wavelength_nm,share")


def test_a_table_that_changed_meanwhile_is_noticed(solved):
    (solved[1].parent / "tables" / "film.csv").write_text("wavelength_nm,n,k\n600,2,0\n900,2,0\n", encoding="utf-8")
    with pytest.raises(InputError, match=r"film\.csv: changed while it was being used"):
        written(solved)
    assert not result_folder(solved[1]).exists()


def test_an_untouched_result_is_replaced(solved):
    folder = written(solved)
    before = (folder / "run.json").stat().st_ino
    assert touched(folder) == ""
    written(solved)
    assert (folder / "run.json").stat().st_ino != before


def add_note(folder):
    (folder / "note.txt").write_text("mine", encoding="utf-8")


def change_table(folder):
    (folder / "outcomes.csv").write_text("mine", encoding="utf-8")


def remove_figure(folder):
    (folder / "births.png").unlink()


def remove_record(folder):
    (folder / "run.json").unlink()


def edit_record(folder):
    record = json.loads((folder / "run.json").read_text())
    (folder / "run.json").write_text(json.dumps(record | {"version": "9"}), encoding="utf-8")


def add_folder(folder):
    (folder / "mine").mkdir()


TOUCHES = {
    add_note: "note.txt was added to it",
    add_folder: "mine was added to it",
    change_table: "outcomes.csv in it was changed",
    remove_figure: "births.png was taken out of it",
    remove_record: "it holds no run.json of this tool",
    edit_record: "run.json in it was changed",
}


@pytest.mark.parametrize(("touch", "reason"), TOUCHES.items(), ids=lambda value: getattr(value, "__name__", ""))
def test_a_touched_result_is_kept_unless_replacing_is_asked_for(solved, touch, reason):
    folder = written(solved)
    touch(folder)
    left = {path.name: path.stat().st_mtime_ns for path in folder.rglob("*")}
    with pytest.raises(InputError, match=reason) as refusal:
        written(solved)
    assert "--replace" in str(refusal.value)
    assert {path.name: path.stat().st_mtime_ns for path in folder.rglob("*")} == left
    written(solved, replace=True)
    assert touched(folder) == ""


def test_what_a_file_manager_leaves_is_no_touch(solved):
    folder = written(solved)
    (folder / ".DS_Store").write_bytes(b"\0")
    written(solved)
    assert touched(folder) == ""


def test_an_empty_folder_is_written_into(solved):
    result_folder(solved[1]).mkdir()
    assert (written(solved) / "run.json").is_file()


def test_a_file_in_the_way_is_refused_even_when_replacing(solved):
    result_folder(solved[1]).write_text("mine", encoding="utf-8")
    with pytest.raises(InputError, match="found a file"):
        written(solved, replace=True)


def test_a_folder_around_the_working_directory_is_never_replaced(tmp_path, monkeypatch):
    (tmp_path / "in").mkdir()
    monkeypatch.chdir(tmp_path / "in")
    with pytest.raises(InputError, match="the working directory lies in it"), writing(tmp_path, replace=True):
        pass


def test_a_missing_parent_folder_is_named(tmp_path):
    with pytest.raises(InputError, match="make that first"), writing(tmp_path / "no" / "out"):
        pass


@pytest.mark.parametrize("stop", [KeyboardInterrupt, MemoryError, InputError("bad")])
def test_whatever_stops_the_writing_leaves_nothing(tmp_path, stop):
    def stopped():
        with writing(tmp_path / "out") as part:
            (part / "half.csv").write_text("1", encoding="utf-8")
            raise stop

    with pytest.raises((KeyboardInterrupt, MemoryError, InputError)):
        stopped()
    assert list(tmp_path.iterdir()) == []


def test_a_stop_while_renaming_puts_the_old_result_back(solved, monkeypatch):
    folder = written(solved)
    rename = type(folder).rename

    def stop_at_new(self, target):
        if self.suffix == ".part":
            raise KeyboardInterrupt
        return rename(self, target)

    monkeypatch.setattr(type(folder), "rename", stop_at_new)
    with pytest.raises(KeyboardInterrupt):
        written(solved)
    assert touched(folder) == ""
    assert {path.name for path in folder.parent.iterdir()} == {"tables", "my stack.toml", "my stack-result"}


@pytest.mark.skipif(not hasattr(os, "geteuid") or os.geteuid() == 0, reason="root may write everywhere")
def test_a_place_that_cannot_be_written_is_one_line(tmp_path):
    tmp_path.chmod(0o500)
    with pytest.raises(InputError, match="cannot be written"), writing(tmp_path / "out"):
        pass


def test_a_full_disk_is_one_line_and_leaves_nothing(tmp_path):
    def filled():
        with writing(tmp_path / "out"):
            raise OSError(28, "No space left on device")

    with pytest.raises(InputError, match="out: cannot be written"):
        filled()
    assert list(tmp_path.iterdir()) == []
