"""Tables from the laboratory: three units read alike, everything doubtful refused with its place."""

import os
from pathlib import Path

import numpy as np
import pytest

from optics import units
from optics.errors import InputError
from optics.media import find, read_table
from optics.media.sheet import LIMIT_BYTES, SHOWN_FAULTS

ROUND_TRIP = 1e-12  # relative: a few roundings of float64 through eV or um and 17 printed digits

WAVELENGTHS = np.array([301.0, 456.78901234567, 589.3, 770.0, 1064.1])
N = np.array([2.1, 2.3456789012345, 2.5, 2.55, 2.4])
K = np.array([0.9, 0.5, 1e-7, 0.0, 0.0])


def _write(path: Path, axis: str, values: np.ndarray) -> Path:  # type: ignore[type-arg]
    rows = [f"{w!r},{n!r},{k!r}" for w, n, k in zip(values.tolist(), N.tolist(), K.tolist(), strict=True)]
    path.write_text("\n".join([f"{axis},n,k", *rows]) + "\n", encoding="utf-8")
    return path


@pytest.mark.parametrize(
    ("axis", "values"),
    [
        ("wavelength_nm", WAVELENGTHS),
        ("wavelength_um", units.um_from_nm(WAVELENGTHS)),
        ("energy_eV", units.energy_eV(WAVELENGTHS)),
    ],
)
def test_the_three_units_round_trip(tmp_path: Path, axis: str, values: np.ndarray) -> None:  # type: ignore[type-arg]
    table = read_table(_write(tmp_path / "film.csv", axis, values))
    assert table.wavelength_nm == pytest.approx(WAVELENGTHS, rel=ROUND_TRIP)
    assert np.array_equal(table.n, N)
    assert np.array_equal(table.k, K)


def test_descending_tables_mean_the_same(tmp_path: Path) -> None:
    up = tmp_path / "up.csv"
    down = tmp_path / "down.csv"
    up.write_text("wavelength_nm,n,k\n400,1.5,0.1\n500,1.6,0.2\n700,1.7,0\n")
    down.write_text("wavelength_nm,n,k\n700,1.7,0\n500,1.6,0.2\n400,1.5,0.1\n")
    assert read_table(up) == read_table(down)


@pytest.mark.parametrize(
    "content",
    [
        b"\xef\xbb\xbfwavelength_nm,n,k\n400,1.5,0.1\n500,1.6,0.2\n",
        b"# measured on a Tuesday\r\nwavelength_nm,n,k\r\n\r\n400,1.5,0.1\r\n# a step\r\n500,1.6,0.2\r\n",
        b"k , n , wavelength_nm\n 0.1, 1.5, 400\n 0.2, 1.6, 500",
        b'"wavelength_nm","n","k"\r"4e2","1.5","0.1"\r500,1.6,0.2\r',
    ],
    ids=["byte-order mark", "comments, blank lines, CRLF", "other order, spaces", "quotes, CR"],
)
def test_harmless_differences_of_form_are_read(tmp_path: Path, content: bytes) -> None:
    path = tmp_path / "film.csv"
    path.write_bytes(content)
    table = read_table(path)
    assert np.array_equal(table.wavelength_nm, [400.0, 500.0])
    assert np.array_equal(table.index([400.0, 500.0]), [1.5 + 0.1j, 1.6 + 0.2j])


HEAD = "wavelength_nm,n,k\n"
GOOD = HEAD + "400,1.5,0.1\n500,1.6,0.2\n"

MALFORMED: dict[str, tuple[bytes, str]] = {
    "empty": (b"", "found an empty file, expected a header"),
    "blank": (b" \n\n\t\n", "found an empty file, expected a header"),
    "comments only": (b"# nothing\n# here\n", "found only comments"),
    "header only": (HEAD.encode(), "found 0 row(s) of numbers, expected at least 2"),
    "one row": (b"wavelength_nm,n,k\n400,1.5,0\n", "found 1 row(s) of numbers"),
    "truncated row": (b"wavelength_nm,n,k\n400,1.5,0\n500,1.6\n", "line 3: found 2 cells, expected 3"),
    "truncated number": (b"wavelength_nm,n,k\n400,1.5,0\n500,1.6,", "line 3: k: found nothing"),
    "no unit": (b"wavelength,n,k\n400,1.5,0\n500,1.6,0\n", 'column "wavelength" names no accepted unit'),
    "greek letter": ("λ,n,k\n400,1.5,0\n500,1.6,0\n".encode(), "names no accepted unit"),
    "two axes": (b"wavelength_nm,energy_eV,n,k\n400,3,1.5,0\n", "found wavelength_nm and energy_eV, expected one"),
    "no axis": (b"n,k\n1.5,0\n1.6,0\n", "found no column of wavelength or energy"),
    "no k": (b"wavelength_nm,n\n400,1.5\n500,1.6\n", "found no column k, expected n and k"),
    "no n": (b"wavelength_nm,k\n400,0\n500,0\n", "found no column n, expected n and k"),
    "column twice": (b"wavelength_nm,n,n,k\n400,1.5,1.5,0\n", 'column "n" stands twice'),
    "misspelt column": (b"wavelength_nm,n,kk\n400,1.5,0\n", 'column "kk" is not known'),
    "no header": (b"400,1.5,0\n500,1.6,0\n", "line 1: found numbers, expected a header"),
    "duplicate wavelength": (
        GOOD.encode() + b"500,1.6,0.2\n",
        "line 4: wavelength_nm: found 500 again (first on line 3)",
    ),
    "unsorted": (GOOD.encode() + b"450,1.6,0.2\n", "line 4: wavelength_nm: found 450 after 500, expected ascending"),
    "unsorted down": (b"wavelength_nm,n,k\n700,1.5,0\n500,1.5,0\n600,1.5,0\n400,1.5,0\n", "expected descending order"),
    "NaN": (HEAD.encode() + b"400,nan,0\n500,1.6,0\n", 'line 2: n: found "nan", expected a finite number'),
    "infinity": (HEAD.encode() + b"400,1.5,0\n500,1.6,inf\n", 'line 3: k: found "inf", expected a finite number'),
    "overflow": (HEAD.encode() + b"400,1.5,0\n500,1e999,0\n", 'line 3: n: found "1e999"'),
    "words": (HEAD.encode() + b"400,1.5,0\n500,high,0\n", 'line 3: n: found "high", expected a finite number'),
    "underscore": (HEAD.encode() + b"400,1.5,0\n1_000,1.5,0\n", 'line 3: wavelength_nm: found "1_000"'),
    "control characters": (HEAD.encode() + b"400,1.5,0\n500,\x1b[2J,0\n", 'line 3: n: found "?[2J"'),
    "negative k": (HEAD.encode() + b"400,1.5,0\n500,1.6,-0.2\n", "line 3: k: found -0.2, expected 0 or more"),
    "n of zero": (HEAD.encode() + b"400,0,0\n500,1.6,0\n", "line 2: n: found 0, expected a number above 0"),
    "negative n": (HEAD.encode() + b"400,1.5,0\n500,-1.6,0\n", "line 3: n: found -1.6"),
    "wavelength of zero": (HEAD.encode() + b"0,1.5,0\n500,1.6,0\n", "line 2: wavelength_nm: found 0"),
    "energy of zero": (b"energy_eV,n,k\n0,1.5,0\n1,1.6,0\n", "line 2: energy_eV: found 0"),
    "decimal commas": (HEAD.encode() + b"400,1,5,0,1\n500,1,6,0,2\n", "expected 5 headings"),
    "open quote": (HEAD.encode() + b'400,"1.5,0\n500,1.6,0\n', "line 2: found"),
    "binary": (b"\x89PNG\r\n\x1a\n\0\0\0\rIHDR", "found binary data"),
    "UTF-16": (b"\xff\xfe\x00\xd8\x00\x00", "found bytes that are no text"),
    "micrometres called nm": (HEAD.encode() + b"0.4,1.5,0\n0.8,1.6,0\n", "which look like micrometres"),
    "nanometres called um": (b"wavelength_um,n,k\n400,1.5,0\n800,1.6,0\n", "which look like nanometres"),
    "nanometres called eV": (b"energy_eV,n,k\n400,1.5,0\n800,1.6,0\n", "which look like nanometres"),
    "absorption called k": (
        HEAD.encode() + b"400,1.5,35000\n800,1.6,10\n",
        "which look like an absorption coefficient",
    ),
}


@pytest.mark.parametrize("case", MALFORMED)
def test_a_malformed_table_is_refused_in_one_clear_line(tmp_path: Path, case: str) -> None:
    content, expected = MALFORMED[case]
    path = tmp_path / "film.csv"
    path.write_bytes(content)
    faults = _faults(path)
    assert any(expected in fault for fault in faults), faults
    assert all(fault.startswith(f"{path}: ") and "\n" not in fault and fault.isprintable() for fault in faults)


def _faults(path: Path) -> tuple[str, ...]:
    with pytest.raises(InputError) as caught:
        read_table(path)
    return caught.value.faults


def test_every_faulty_row_is_told_and_many_are_counted(tmp_path: Path) -> None:
    path = tmp_path / "film.csv"
    path.write_text(HEAD + "400,1.5,-1\n500,0,0\n600,1.5,-2\n")
    assert len(_faults(path)) == 3
    path.write_text(HEAD + "".join(f"{400 + i},x,0\n" for i in range(100)))
    faults = _faults(path)
    assert len(faults) == SHOWN_FAULTS + 1
    assert faults[-1].endswith(f"and {100 - SHOWN_FAULTS} more faults")


def test_a_missing_file_is_named_with_the_place_looked_at(tmp_path: Path) -> None:
    assert "no such file; looked for" in _faults(tmp_path / "film.csv")[0]
    (tmp_path / "file").write_text("x")
    assert "no such file" in _faults(tmp_path / "file" / "film.csv")[0]


def test_a_directory_is_refused(tmp_path: Path) -> None:
    (tmp_path / "film.csv").mkdir()
    path = tmp_path / "film.csv"
    assert _faults(path) == (f"{path}: found a directory, expected a table (csv, txt, dat, tsv, xlsx or xlsm)",)


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="no named pipes here")
def test_a_pipe_is_refused_without_waiting_for_it(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "film.csv")
    assert "found a device or pipe" in _faults(tmp_path / "film.csv")[0]


def test_an_unreadable_file_is_refused(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "film.csv"
    path.write_text(GOOD)

    def refuse(self: Path) -> bytes:  # permissions do not bind root, under whom tests may run
        raise PermissionError(13, "Permission denied", str(self))

    monkeypatch.setattr(Path, "read_bytes", refuse)
    assert "cannot be read (Permission denied)" in _faults(path)[0]


def test_a_huge_file_is_refused_unread(tmp_path: Path) -> None:
    path = tmp_path / "film.csv"
    with path.open("wb") as file:
        file.truncate(LIMIT_BYTES + 1)
    assert _faults(path) == (f"{path}: found 50.0 MB, expected at most 50 MB; thin the table out",)


def test_a_path_that_is_no_path_is_refused() -> None:
    assert "cannot be read" in _faults(Path("film\0.csv"))[0] or "no such file" in _faults(Path("film\0.csv"))[0]


def test_find_reads_a_table_beside_its_folder_and_records_its_hash(tmp_path: Path) -> None:
    import hashlib

    (tmp_path / "tables").mkdir()
    (tmp_path / "tables" / "red-film.csv").write_text(GOOD)
    material = find("tables/red-film.csv", folder=tmp_path)
    assert material.name == "red-film"
    assert material.source == "table red-film.csv"
    assert material.sha256 == hashlib.sha256(GOOD.encode()).hexdigest()
    assert Path(material.path).read_text() == GOOD
    assert material.range_nm == (400.0, 500.0)
    assert find(tmp_path / "tables" / "red-film.csv").medium == material.medium
    with pytest.raises(InputError, match=r"tables/other\.csv: no such file"):
        find("tables/other.csv", folder=tmp_path)
