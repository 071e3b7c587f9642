"""Laboratory tables: every unit, dialect and wording reads back the same; what is open is asked for, never guessed."""

import itertools
from pathlib import Path

import numpy as np
import pytest

from optics import units
from optics.errors import InputError
from optics.media import find, read_table
from optics.media.headings import heading
from optics.media.labfile import Hints, LabTable, parse_lab, read_lab

SAME = 1e-9  # relative: what the tool promises; a few roundings of float64 and 17 digits stay far below

WAVELENGTHS = np.array([301.0, 456.78901234567, 589.3, 770.0, 1064.1])
N = np.array([2.1, 2.3456789012345, 2.5, 2.55, 2.4])
K = np.array([0.9, 0.5, 1e-3, 1e-5, 0.0])

SPEED = 299_792_458.0  # m/s, exact in the SI
AXES = {
    "wavelength_nm": WAVELENGTHS,
    "Wavelength (nm)": WAVELENGTHS,
    "λ [µm]": WAVELENGTHS / 1e3,
    "lambda/um": WAVELENGTHS / 1e3,
    "wavelength (Å)": WAVELENGTHS * 10.0,
    "Wavelength [angstrom]": WAVELENGTHS * 10.0,
    "wavelength (m)": WAVELENGTHS * 1e-9,
    "nm": WAVELENGTHS,
    "Photon energy (eV)": units.energy_eV(WAVELENGTHS),
    "E (eV)": units.energy_eV(WAVELENGTHS),
    "energy_meV": units.energy_eV(WAVELENGTHS) * 1e3,
    "Wavenumber (cm⁻¹)": 1e7 / WAVELENGTHS,
    "wavenumber [1/cm]": 1e7 / WAVELENGTHS,
    "frequency (THz)": SPEED / WAVELENGTHS * 1e-3,
    "freq_Hz": SPEED / (WAVELENGTHS * 1e-9),
    "Wellenlänge (nm)": WAVELENGTHS,
}
EPS = (N + 1j * K) ** 2
ALPHA = 4.0 * np.pi * K / (WAVELENGTHS * 1e-7)
INDICES = {
    "n and k": {"n": N, "k": K},
    "capitals": {"N": N, "K": K},
    "in words": {"Refractive index": N, "Extinction coefficient": K},
    "real and imaginary": {"Re(n)": N, "Im(n)": K},
    "eps1 and eps2": {"eps1": EPS.real, "eps2": EPS.imag},
    "Greek": {"ε1": EPS.real, "ε2": EPS.imag},
    "primes": {"eps'": EPS.real, "eps''": EPS.imag},
    "alpha in 1/cm": {"n": N, "alpha (1/cm)": ALPHA},
    "alpha in cm-1": {"n": N, "\N{GREEK SMALL LETTER ALPHA} (cm^-1)": ALPHA},
    "alpha in 1/m": {"n": N, "absorption coefficient [1/m]": ALPHA * 1e2},
    "alpha in 1/um": {"n": N, "alpha_1/um": ALPHA * 1e-4},
}


def written(columns: dict[str, np.ndarray], separator: str = ",", decimal: str = ".", step: int = 1) -> str:
    """Return a table with every digit, its rows forwards or backwards."""
    rows = zip(*(values.tolist() for values in columns.values()), strict=True)
    lines = [separator.join(repr(float(value)).replace(".", decimal) for value in row) for row in rows][::step]
    return "\n".join([separator.join(columns), *lines]) + "\n"


def agrees(table: LabTable) -> bool:
    found = table.tabulated
    # An absolute part for k: through eps its last digit hangs on that of n^2.
    pairs = ((found.wavelength_nm, WAVELENGTHS, 0.0), (found.n, N, 0.0), (found.k, K, 1e-15))
    return all(np.allclose(one, two, rtol=SAME, atol=least) for one, two, least in pairs)


@pytest.mark.parametrize("axis", AXES)
@pytest.mark.parametrize("index", INDICES)
def test_a_table_in_every_unit_and_wording_reads_back_the_same(axis: str, index: str) -> None:
    for step in (1, -1):
        assert agrees(parse_lab(written({axis: AXES[axis], **INDICES[index]}, step=step), place="film.csv"))


DIALECTS = [(s, d) for s, d in itertools.product((",", ";", "\t", "  ", " ; "), ".,") if (s, d) != (",", ",")]


@pytest.mark.parametrize(("separator", "decimal"), DIALECTS)
@pytest.mark.parametrize("index", ["n and k", "eps1 and eps2", "alpha in 1/cm"])
def test_a_table_in_every_dialect_reads_back_the_same(separator: str, decimal: str, index: str) -> None:
    columns = {"Wavelength (um)": AXES["λ [µm]"], **INDICES[index]}
    for step in (1, -1):
        assert agrees(parse_lab(written(columns, separator, decimal, step), place="film.csv"))


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "latin-1", "utf-16"])
@pytest.mark.parametrize("ends", ["\n", "\r\n", "\r"])
def test_encodings_and_line_ends_make_no_difference(tmp_path: Path, encoding: str, ends: str) -> None:
    text = "Sample: é, 20 °C\n" + written({"Wavelength (µm)": AXES["λ [µm]"], "n": N, "k": K}, ";", ",")
    (tmp_path / "film.txt").write_bytes(text.replace("\n", ends).encode(encoding))
    assert agrees(read_lab(tmp_path / "film.txt", place="film.txt", hints=Hints()))


FORMS = {
    "comments of several kinds": "# one\n% two\n! three\n// four\nwavelength_nm,n,k\n{rows}",
    "header in a comment": "# wavelength_nm, n, k\n{rows}",
    "metadata above": "Instrument,X1\nAngles,65,70,75\nOperator\n\nwavelength_nm,n,k\n{rows}",
    "units on a line of their own": "wavelength,n,k\nnm,,\n{rows}",
    "comments between rows": "wavelength_nm,n,k\n{first}\n# lamp changed\n{rest}",
    "blank lines": "\n\nwavelength_nm,n,k\n\n{first}\n\n{rest}\n\n",
    "a note below": "wavelength_nm,n,k\n{rows}\nEnd of scan\nfile closed",
    "a comma before the unit": "Wavelength, nm,n,k\n{rows}",
    "quotes": '"wavelength_nm","n","k"\n{rows}',
}


@pytest.mark.parametrize("form", FORMS)
def test_lines_that_are_no_rows_make_no_difference(form: str) -> None:
    rows = written({"wavelength_nm": WAVELENGTHS, "n": N, "k": K}).split("\n", 1)[1].strip()
    first, rest = rows.split("\n", 1)
    assert agrees(parse_lab(FORMS[form].format(rows=rows, first=first, rest=rest), place="film.csv"))


def test_columns_stand_in_any_order_and_those_not_needed_are_said_to_be_left() -> None:
    text = written({"MSE": N * 3, "k": K, "Wavelength (nm)": WAVELENGTHS, "n_error": K, "n": N})
    table = parse_lab(text, place="film.csv")
    assert agrees(table)
    said = " ".join(table.understood)
    assert 'column 1 "MSE" not used' in said
    assert 'column 2 "k" read as k' in said
    assert 'column 3 "Wavelength (nm)" read as wavelength in nm' in said
    assert "5 rows, 301 to 1064.1 nm (1.165 to 4.119 eV), rising" in said


def test_headings_of_several_words_between_spaces_are_put_together() -> None:
    text = written({"a": WAVELENGTHS, "b": N, "c": K}, "   ").split("\n", 1)[1]
    assert agrees(parse_lab("Wavelength (nm) refractive index extinction coefficient\n" + text, place="film.txt"))


def test_a_separator_at_the_end_of_every_line_is_no_column() -> None:
    text = written({"wavelength_nm": WAVELENGTHS, "n": N, "k": K}).replace("\n", ",\n")
    assert agrees(parse_lab(text, place="film.csv"))


def test_decimal_commas_in_quotes_are_read() -> None:
    text = 'wavelength_nm,n,k\n"400,5","1,5","0,1"\n"500,5","1,6","0,2"\n'
    table = parse_lab(text, place="film.csv")
    assert table.wavelength_nm.tolist() == [400.5, 500.5]
    assert table.k.tolist() == [0.1, 0.2]


def test_numbers_of_fortran_and_with_a_typeset_minus_are_read() -> None:
    table = parse_lab(
        "energy_eV n k\n1.0D+00 1.5 1\u2212\n".replace("1\u2212", "1E\u22123") + "2d0 1.6 2e-3\n", place="f"
    )
    assert table.k.tolist() == [2e-3, 1e-3]


ASKED = {
    "wavelength without a unit": (
        "wavelength,n,k\n400,1.5,0\n500,1.6,0\n",
        {},
        {"unit": "nm"},
        "say --unit when importing it",
    ),
    "energy without a unit": ("E,n,k\n2,1.5,0\n3,1.6,0\n", {}, {"unit": "eV"}, "say --unit when importing it"),
    "cm-1, wavenumber or absorption": (
        "cm-1,n,k\n20000,1.5,0\n30000,1.6,0\n",
        {},
        {"columns": ("wavenumber_1/cm", "n", "k")},
        "may be a wavenumber or an absorption coefficient",
    ),
    "alpha without a unit": (
        "wavelength_nm,n,alpha\n400,1.5,100\n500,1.6,0\n",
        {},
        {"columns": ("wavelength_nm", "n", "alpha_1/cm")},
        "names no unit of an absorption coefficient",
    ),
    "no header": ("400,1.5,0\n500,1.6,0\n", {}, {"columns": ("wavelength_nm", "n", "k")}, "say --columns"),
    "two axes": (
        "nm,eV,n,k\n400,3.1,1.5,0\n500,2.48,1.6,0\n",
        {},
        {"columns": ("nm", "-", "n", "k")},
        "say which with --columns",
    ),
    "two columns of k": (
        "nm,n,k,k\n400,1.5,0,1\n500,1.6,0,1\n",
        {},
        {"columns": ("nm", "n", "k", "-")},
        "stands twice",
    ),
    "thousands or decimals": (
        "wavelength_nm;n;k\n1,500;2;0\n1,600;2;0\n1,700;2;0\n",
        {},
        {"decimal": "comma", "unit": "nm"},
        "may be 1.500 or 1500; say --decimal",
    ),
    "two ways to cut a line": (
        "nm ,n\n400 ,15\n500 ,16\n",
        {},
        {"separator": "comma", "columns": ("nm", "k"), "n_from": find(1.5)},
        "may be read in two ways",
    ),
    "absorption alone": (
        "wavelength_nm,k\n400,0.1\n500,0.2\n",
        {},
        {"n_from": find(2.5)},
        "or say --n-from when importing it",
    ),
    "the other sign": (
        "wavelength_nm,n,k\n400,1.5,-0.1\n500,1.6,-0.2\n",
        {},
        {"conjugate": True},
        "say --conjugate",
    ),
    "noise below zero": (
        "wavelength_nm,n,k\n400,1.5,0.1\n500,1.6,-0.001\n",
        {},
        {"zero_negative": True},
        "say --zero-negative-k",
    ),
    "a unit that cannot be": (
        "wavelength_angstrom,n,k\n400,1.5,0\n500,1.6,0\n",
        {},
        {"unit": "angstrom"},
        "which look like nanometres",
    ),
}


@pytest.mark.parametrize("case", ASKED)
def test_what_a_file_leaves_open_is_asked_for_by_an_option_that_then_settles_it(case: str) -> None:
    text, without, with_, asked = ASKED[case]
    with pytest.raises(InputError) as caught:
        parse_lab(text, place="film.csv", hints=Hints(**without))
    assert any(asked in fault for fault in caught.value.faults), caught.value.faults
    assert all(fault.startswith("film.csv: ") and fault.isprintable() for fault in caught.value.faults)
    table = parse_lab(text, place="film.csv", hints=Hints(**with_))
    assert table.n is not None
    assert (table.k >= 0.0).all()


def test_absorption_alone_takes_its_n_from_elsewhere_and_says_so() -> None:
    table = parse_lab(
        "wavelength_nm,alpha (1/cm)\n150,1e5\n400,1e5\n500,1e4\n600,0\n",
        place="alpha.csv",
        hints=Hints(n_from=find("fused-silica")),
    )
    assert table.wavelength_nm.tolist() == [400.0, 500.0, 600.0]
    assert table.n == pytest.approx(find("fused-silica").index([400.0, 500.0, 600.0]).real, rel=1e-15)
    assert "n taken from fused-silica; 1 rows outside its range left out" in table.converted


def test_columns_that_say_the_same_must_agree() -> None:
    columns = {"wavelength_nm": WAVELENGTHS, "n": N, "k": K, "alpha (1/cm)": ALPHA}
    assert agrees(parse_lab(written(columns), place="film.csv"))
    with pytest.raises(InputError, match=r"k from alpha in 1/cm is 10 times the k from n and k"):
        parse_lab(written(columns | {"alpha (1/cm)": 10 * ALPHA}), place="film.csv")


@pytest.mark.parametrize(
    ("hints", "expected"),
    [
        ({"separator": "pipe"}, "separator: found"),
        ({"decimal": "dot"}, "decimal: found"),
        ({"unit": "furlong"}, "unit: found"),
    ],
)
def test_an_option_with_a_value_that_is_none_is_refused(hints: dict[str, str], expected: str) -> None:
    with pytest.raises(InputError, match=expected):
        Hints(**hints)  # type: ignore[arg-type]


def test_a_unit_that_contradicts_the_heading_is_refused() -> None:
    with pytest.raises(InputError, match="is a wavelength, and --unit eV is one of a energy"):
        parse_lab("wavelength,n,k\n400,1.5,0\n500,1.6,0\n", place="f", hints=Hints(unit="eV"))
    with pytest.raises(InputError, match="names no known unit of a wavelength"):
        parse_lab("wavelength (eV),n,k\n2,1.5,0\n3,1.6,0\n", place="f")


@pytest.mark.parametrize(
    "text",
    ["thickness (nm)", "n_error", "k std", "A", "Abs", "R (%)", "", "psi", "delta", "temperature"],
)
def test_a_heading_that_names_nothing_of_use_is_not_taken(text: str) -> None:
    assert not heading(text).quantity


def test_an_excel_workbook_reads_like_its_text(tmp_path: Path) -> None:
    pd = pytest.importorskip("pandas")
    pytest.importorskip("openpyxl")
    frame = pd.DataFrame({"Photon energy (eV)": units.energy_eV(WAVELENGTHS), "eps1": EPS.real, "eps2": EPS.imag})
    path = tmp_path / "film.xlsx"
    with pd.ExcelWriter(path) as book:
        frame.to_excel(book, sheet_name="fit", index=False, startrow=3)
        book.book["fit"]["A1"] = "Measured somewhere"
    table = read_table(path)
    assert np.allclose(table.wavelength_nm, WAVELENGTHS, rtol=SAME, atol=0.0)
    assert np.allclose(table.n, N, rtol=SAME, atol=0.0)
    assert find("film.xlsx", folder=tmp_path).understood[0].startswith('sheet "fit"')
    with pd.ExcelWriter(path) as book:
        frame.to_excel(book, sheet_name="fit", index=False)
        frame.to_excel(book, sheet_name="raw", index=False)
    with pytest.raises(InputError, match=r"2 sheets hold something \(fit, raw\); say --sheet"):
        read_table(path)
    assert read_lab(path, place="film.xlsx", hints=Hints(sheet="raw")).n is not None
    with pytest.raises(InputError, match='no sheet "other", expected one of fit, raw'):
        read_lab(path, place="film.xlsx", hints=Hints(sheet="other"))


def test_a_file_that_is_no_workbook_is_refused_in_one_line(tmp_path: Path) -> None:
    pytest.importorskip("openpyxl")
    (tmp_path / "film.xlsx").write_text("wavelength_nm,n,k\n400,1.5,0\n", encoding="utf-8")
    with pytest.raises(InputError, match="not an Excel workbook that can be read"):
        read_table(tmp_path / "film.xlsx")


def test_headings_that_are_all_open_do_not_pass_for_a_header() -> None:
    with pytest.raises(InputError, match="found no column of wavelength or energy"):
        parse_lab("a,b,c\n400,1.5,0\n500,1.6,0\n", place="f")
