"""Cards of one's own: where they come from is kept, twice is once, nothing is hidden or lost."""

import hashlib
import os
import tomllib
from pathlib import Path

import numpy as np
import pytest

from optics.errors import InputError
from optics.media import bundled_names, find, own_names
from optics.media.cabinet import users_cabinet
from optics.media.importing import About, import_table
from optics.media.labfile import Hints
from optics.units import energy_eV

TEXT = "Measured; 20 C\nE (eV);eps1;eps2\n1,5;5,5;0,5\n1,3;5,1;0,2\n1,2;5,0;0,1\n"


@pytest.fixture(autouse=True)
def _cabinet(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("PHOTONFATE_MATERIALS", str(tmp_path / "own"))


@pytest.fixture
def raw(tmp_path: Path) -> Path:
    path = tmp_path / "ellipsometry.txt"
    path.write_text(TEXT, encoding="latin-1")
    return path


def test_a_card_says_where_its_numbers_come_from_and_what_was_done(raw, tmp_path):
    about = About(title="Invented film", source="our own", licence="CC0")
    done = import_table(raw, name="red-film", cabinet=users_cabinet(), about=about)
    card = tomllib.loads(done.path.read_text(encoding="utf-8"))
    assert done.written
    assert done.path == tmp_path / "own" / "red-film.toml"
    assert (card["title"], card["source"], card["licence"]) == ("Invented film", "our own", "CC0")
    assert card["imported"]["original"] == "ellipsometry.txt"
    assert card["imported"]["original_sha256"] == hashlib.sha256(TEXT.encode()).hexdigest()
    assert card["imported"]["converted"] == ["E (eV) in eV to wavelength in nm", "n and k from eps1 and eps2"]
    assert 'column 2 "eps1" read as eps1' in " ".join(card["imported"]["understood"])
    assert len(card["imported"]["date"]) == len("2000-01-01")


def test_the_imported_material_has_the_numbers_of_the_file(raw):
    import_table(raw, name="red-film", cabinet=users_cabinet())
    at = 1239.8419843320026 / np.array([1.5, 1.3, 1.2])
    index = find("red-film").index(at)
    assert energy_eV(at) == pytest.approx([1.5, 1.3, 1.2], rel=1e-15)
    assert index**2 == pytest.approx([5.5 + 0.5j, 5.1 + 0.2j, 5.0 + 0.1j], rel=1e-9)


def test_importing_the_same_twice_changes_nothing(raw):
    first = import_table(raw, name="red-film", cabinet=users_cabinet())
    os.utime(first.path, (1, 1))
    again = import_table(raw, name="red-film", cabinet=users_cabinet())
    assert not again.written
    assert first.path.stat().st_mtime == 1
    assert list(first.path.parent.iterdir()) == [first.path]


def test_a_card_that_holds_something_else_is_kept_unless_it_may_be_lost(raw):
    first = import_table(raw, name="red-film", cabinet=users_cabinet())
    raw.write_text(TEXT.replace("0,5\n", "0,6\n"), encoding="latin-1")
    before = first.path.read_bytes()
    with pytest.raises(InputError, match=r"is there and holds something else, and is kept; .* --replace"):
        import_table(raw, name="red-film", cabinet=users_cabinet())
    assert first.path.read_bytes() == before
    assert import_table(raw, name="red-film", cabinet=users_cabinet(), replace=True).written
    assert first.path.read_bytes() != before


@pytest.mark.parametrize("name", ["silver", "Ag", "air", "ag"])
def test_a_bundled_name_is_not_taken(raw, name):
    with pytest.raises(InputError, match="name: "):
        import_table(raw, name=name, cabinet=users_cabinet())
    assert not users_cabinet().exists()


@pytest.mark.parametrize("name", ["", "Red", "a b", "../x", "x/y", ".x", "ü"])
def test_a_name_that_is_no_file_name_everywhere_is_refused(raw, name):
    with pytest.raises(InputError, match="name: found"):
        import_table(raw, name=name, cabinet=users_cabinet())


def test_nothing_is_written_for_a_table_that_cannot_be_read(tmp_path):
    (tmp_path / "film.csv").write_text("wavelength,n,k\n400,1,0\n500,1,0\n", encoding="utf-8")
    with pytest.raises(InputError, match="say --unit"):
        import_table(tmp_path / "film.csv", name="film", cabinet=users_cabinet())
    assert not users_cabinet().exists()
    assert import_table(tmp_path / "film.csv", name="film", cabinet=users_cabinet(), hints=Hints(unit="nm")).written


def test_a_card_beside_the_stack_file_comes_before_the_users_own(raw, tmp_path):
    import_table(raw, name="film", cabinet=users_cabinet())
    raw.write_text(TEXT.replace("0,5\n", "0,6\n"), encoding="latin-1")
    import_table(raw, name="film", cabinet=tmp_path / "project" / "materials")
    assert find("film") != find("film", folder=tmp_path / "project")
    assert Path(find("film", folder=tmp_path / "project").path).parent.name == "materials"
    assert set(own_names(tmp_path / "project")) == {"film"}


def test_a_card_that_took_a_bundled_name_by_hand_is_refused_not_preferred(raw, tmp_path):
    done = import_table(raw, name="red-film", cabinet=users_cabinet())
    done.path.rename(done.path.with_name("silver.toml"))
    with pytest.raises(InputError, match='"silver" is bundled, and the name of a card of your own too'):
        find("silver")
    assert find(str(users_cabinet() / "silver.toml")).name == "red-film"


def test_an_unknown_name_is_told_with_names_of_ones_own_among_the_nearest(raw):
    import_table(raw, name="red-film", cabinet=users_cabinet())
    with pytest.raises(InputError, match="did you mean red-film"):
        find("red-flim")


def test_a_changed_card_is_refused(raw):
    done = import_table(raw, name="red-film", cabinet=users_cabinet())
    text = done.path.read_text(encoding="utf-8")
    done.path.write_text(text.replace(",0.1064", ",0.2064"), encoding="utf-8")
    with pytest.raises(InputError, match="do not match the card's checksum"):
        find("red-film")


def test_an_unwritable_cabinet_is_refused(raw, tmp_path):
    (tmp_path / "file").write_text("", encoding="utf-8")
    with pytest.raises(InputError, match="cannot be written"):
        import_table(raw, name="red-film", cabinet=tmp_path / "file")


def test_the_users_cabinet_stands_in_the_platforms_place(monkeypatch):
    monkeypatch.delenv("PHOTONFATE_MATERIALS")
    assert users_cabinet().parts[-2:] == ("photonfate", "materials")
    assert "silver" in bundled_names()
