"""Stack files and tables with something wrong: what a reader must refuse, with what words, in how many lines."""

import os
from collections.abc import Callable
from pathlib import Path
from typing import NamedTuple


class Case(NamedTuple):
    """A malformed input.

    ``write`` puts it into a folder and returns the path of the stack file; the message must hold every one of
    ``fragments`` and have one line a fault.
    """

    id: str
    write: Callable[[Path], Path]
    fragments: tuple[str, ...]
    faults: int = 1


GOOD = """\
title = "Sound"
above = "air"
below = "air"

[light]
from_nm = 700
to_nm = 860
step_nm = 1

[light.spectrum]
kind = "gaussian"
seen = "inside"
peak_nm = 768
fwhm_nm = 40

[emission]
horizontal_share = 0.6667
depth = "uniform"

[[layer]]
name = "film"
material = "film.csv"
thickness_nm = 480
emits = true

[[layer]]
name = "glass"
material = "float-glass"
thickness_mm = 1.1
"""
FILM = "wavelength_nm,n,k\n600,2.5,0.1\n700,2.45,0.05\n800,2.4,0.02\n900,2.35,0.0\n"
BIRTHS = "wavelength_nm,births_per_nm\n650,0\n768,1\n900,0\n"
GAUSSIAN = 'kind = "gaussian"\nseen = "inside"\npeak_nm = 768\nfwhm_nm = 40'
ABSORPTION = 'kind = "from-absorption"'
GRID = "from_nm = 700\nto_nm = 860\nstep_nm = 1"


def write_good(folder: Path) -> Path:
    """Write a sound stack file with its tables."""
    (folder / "film.csv").write_text(FILM, encoding="utf-8")
    (folder / "births.csv").write_text(BIRTHS, encoding="utf-8")
    path = folder / "stack.toml"
    path.write_text(GOOD, encoding="utf-8")
    return path


def edited(*changes: tuple[str, str]) -> Callable[[Path], Path]:
    """Return a writer of the sound stack file with pieces replaced, each of which must be in it."""

    def write(folder: Path) -> Path:
        path = write_good(folder)
        text = GOOD
        for old, new in changes:
            if text.count(old) != 1:
                raise ValueError(f"{old!r} is not in the sound file once")
            text = text.replace(old, new)
        path.write_text(text, encoding="utf-8")
        return path

    return write


def whole(content: bytes) -> Callable[[Path], Path]:
    """Return a writer of a stack file of these bytes."""

    def write(folder: Path) -> Path:
        path = write_good(folder)
        path.write_bytes(content)
        return path

    return write


def film(content: bytes | str) -> Callable[[Path], Path]:
    """Return a writer of the sound stack file with another table of n and k."""

    def write(folder: Path) -> Path:
        path = write_good(folder)
        (folder / "film.csv").write_bytes(content if isinstance(content, bytes) else content.encode())
        return path

    return write


def births(content: bytes | str) -> Callable[[Path], Path]:
    """Return a writer of a stack file whose spectrum is a table of this content."""

    def write(folder: Path) -> Path:
        path = edited((GAUSSIAN, 'kind = "table"\nfile = "births.csv"'))(folder)
        (folder / "births.csv").write_bytes(content if isinstance(content, bytes) else content.encode())
        return path

    return write


def profile(content: str) -> Callable[[Path], Path]:
    """Return a writer of a stack file whose births over depth are a table of this content."""

    def write(folder: Path) -> Path:
        path = edited(('"uniform"', '{ table = "profile.csv" }'))(folder)
        (folder / "profile.csv").write_text(content, encoding="utf-8")
        return path

    return write


def _missing(folder: Path) -> Path:
    return folder / "stack.toml"


def _directory(folder: Path) -> Path:
    path = folder / "stack.toml"
    path.mkdir()
    return path


def _file_as_folder(folder: Path) -> Path:
    return write_good(folder) / "stack.toml"


def _unreadable(folder: Path) -> Path:
    # A link to itself cannot be read by anybody, the administrator included.
    path = folder / "stack.toml"
    path.symlink_to(path)
    return path


def _pipe(folder: Path) -> Path:
    path = folder / "stack.toml"
    os.mkfifo(path)
    return path


def _huge(folder: Path) -> Path:
    path = write_good(folder)
    path.write_text(GOOD + "# " + "x" * 6_000_000 + "\n", encoding="utf-8")
    return path


def _table_directory(folder: Path) -> Path:
    path = write_good(folder)
    (folder / "film.csv").unlink()
    (folder / "film.csv").mkdir()
    return path


def _table_huge(folder: Path) -> Path:
    path = write_good(folder)
    with (folder / "film.csv").open("wb") as file:
        file.truncate(60_000_000)
    return path


def _table_unreadable(folder: Path) -> Path:
    path = write_good(folder)
    (folder / "film.csv").unlink()
    (folder / "film.csv").symlink_to(folder / "film.csv")
    return path


_THICKNESS = "thickness_nm = 480"
_FILM = 'layer "film"'

CASES = [
    # the file
    Case("missing file", _missing, ("no such file",)),
    Case("directory instead of file", _directory, ("stack.toml: found a directory",)),
    Case("file taken for a folder", _file_as_folder, ("no such file",)),
    Case("unreadable file", _unreadable, ("cannot be read",)),
    Case("huge file", _huge, ("stack.toml: found 6.0 MB", "expected at most 5 MB")),
    Case("empty file", whole(b""), ("empty file",)),
    Case("blank file", whole(b" \n\n\t\n"), ("empty file",)),
    Case("binary file", whole(b"\x89PNG\r\n\x1a\n\x00\x00"), ("binary",)),
    Case("UTF-16 file", whole(GOOD.encode("utf-16")), ("UTF-16",)),
    Case("Latin-1 file", whole('title = "gr\xfcn"\n'.encode("latin-1")), ("line 1", "0xfc", "UTF-8")),
    # the TOML
    Case("truncated in a text", whole(GOOD[: GOOD.index("float-glass") + 4].encode()), ("line 28", "not TOML")),
    Case("truncated in a table name", whole(GOOD[: GOOD.index("[emission") + 5].encode()), ("line 16", "not TOML")),
    Case("truncated between layers", whole(GOOD[: GOOD.index("[[layer]]")].encode()), ("found no layer",)),
    Case("comma decimal", edited((_THICKNESS, "thickness_nm = 480,5")), ("line 23", "decimals with a point")),
    Case("unit behind the number", edited((_THICKNESS, "thickness_nm = 480 nm")), ("line 23", "unit is in the key")),
    Case("text without quotes", edited(('above = "air"', "above = air")), ("line 2", "in quotes")),
    Case("true in capitals", edited(("emits = true", "emits = True")), ("line 24", "small letters")),
    Case("key twice", edited((_THICKNESS, f"{_THICKNESS}\n{_THICKNESS}")), ("line 24", "stands twice")),
    Case("not TOML at all", whole(b"layers: [film, glass]\n"), ("line 1", "not TOML")),
    Case("nested beyond reason", whole(b"title = " + b"[" * 100_000), ("nested too deeply",)),
    Case("number of five thousand digits", whole(b"title = " + b"9" * 5000), ("too many digits",)),
    # keys
    Case("unknown key", edited(("title =", "subject =")), ("subject: unknown key", "valid here: title")),
    Case(
        "misspelt key", edited((_THICKNESS, "thicknes_nm = 480")), (_FILM, "thicknes_nm", "did you mean thickness_nm")
    ),
    Case("misspelt table", edited(("[emission]", "[emision]")), ("emision", "did you mean emission")),
    Case("layers in the plural", whole(GOOD.replace("[[layer]]", "[[layers]]").encode()), ("did you mean layer",)),
    Case("misspelt emits", edited(("emits = true", "emit = true")), (_FILM, "did you mean emits")),
    Case("key with a line break", edited(("title =", '"ti\\ntle" =')), ("ti\\ntle: unknown key",)),
    Case(
        "layer in single brackets",
        whole(GOOD[: GOOD.rindex("\n[[layer]]")].replace("[[layer]]", "[layer]").encode()),
        ("double brackets",),
    ),
    Case(
        "light that is no table",
        edited((f"[light]\n{GRID}\n\n[light.spectrum]\n{GAUSSIAN}\n", ""), ("title =", "light = 700\ntitle =")),
        ("light: found 700", "table"),
    ),
    Case(
        "layers that are numbers",
        whole((GOOD[: GOOD.index("[[layer]]")].replace("title", "layer = [1]\ntitle")).encode()),
        ("layer 1: found 1", "no layer emits"),
        2,
    ),
    # above and below
    Case(
        "no outer media",
        edited(('above = "air"\n', ""), ('below = "air"\n', "")),
        ("above: missing", "below: missing"),
        2,
    ),
    Case("unknown outer medium", edited(('above = "air"', 'above = "aer"')), ("above: ", "did you mean air")),
    Case(
        "wrong counts_as",
        edited(('below = "air"', 'below = { material = "air", counts_as = "open" }')),
        ("below: counts_as", '"open" (text)', '"free" or "held"'),
    ),
    Case(
        "outer medium without material",
        edited(('below = "air"', 'below = { counts_as = "free" }')),
        ("below: material: missing",),
    ),
    # wavelengths
    Case("no light", edited((f"[light]\n{GRID}\n\n[light.spectrum]\n{GAUSSIAN}\n", "")), ("light: missing",)),
    Case("no wavelengths", edited((GRID, "")), ("from_nm: missing", "to_nm: missing", "step_nm: missing"), 3),
    Case(
        "wavelengths both ways",
        edited((GRID, f"{GRID}\nwavelengths_nm = [700, 701]")),
        ("light: wavelengths_nm", "one way or the other"),
    ),
    Case("text for a wavelength", edited(("from_nm = 700", 'from_nm = "700"')), ("light: from_nm", '"700" (text)')),
    Case("range the wrong way round", edited(("to_nm = 860", "to_nm = 600")), ("light: to_nm: found 600", "700")),
    Case("step of zero", edited(("step_nm = 1", "step_nm = 0")), ("light: step_nm: found 0", "above 0")),
    Case("step that does not fit", edited(("step_nm = 1", "step_nm = 7")), ("light: step_nm: found 7", "854")),
    Case("step much too fine", edited(("step_nm = 1", "step_nm = 1e-6")), ("light: step_nm", "at most 100000")),
    Case(
        "micrometres given as nm",
        edited(
            ("from_nm = 700", "from_nm = 0.7"),
            ("to_nm = 860", "to_nm = 0.86"),
            ("step_nm = 1", "step_nm = 0.01"),
            ('"film.csv"', "{ n = 2.5, k = 0.02 }"),
            ('"float-glass"', "1.5"),
        ),
        ("wavelengths_nm: found 0.7", "is the unit nm?"),
    ),
    Case(
        "unsorted wavelengths",
        edited((GRID, "wavelengths_nm = [700, 720, 710, 860]")),
        ("light: wavelengths_nm: value 3", "710 after 720", "sort them"),
    ),
    Case("wavelength twice", edited((GRID, "wavelengths_nm = [700, 720, 720]")), ("value 3", "720 twice")),
    Case("wavelength that is NaN", edited((GRID, "wavelengths_nm = [700, nan]")), ("value 2: found nan",)),
    Case("wavelength that is text", edited((GRID, 'wavelengths_nm = [700, "720"]')), ("value 2", '"720" (text)')),
    Case("no wavelength in the list", edited((GRID, "wavelengths_nm = []")), ("wavelengths_nm", "empty list")),
    Case("negative wavelength", edited((GRID, "wavelengths_nm = [-5, 700]")), ("value 1: found -5",)),
    # spectrum
    Case("no spectrum", edited((f"[light.spectrum]\n{GAUSSIAN}\n", "")), ("light: spectrum: missing",)),
    Case("no kind", edited(('kind = "gaussian"\n', "")), ("light.spectrum: kind: missing",)),
    Case("misspelt kind", edited(('"gaussian"', '"gausian"')), ("light.spectrum: kind", 'did you mean "gaussian"')),
    Case("kind that is a number", edited(('"gaussian"', "3")), ("light.spectrum: kind: found 3",)),
    Case(
        "gaussian keys with absorption",
        edited(('"gaussian"', '"from-absorption"')),
        ("light.spectrum: peak_nm", ": fwhm_nm: unknown key"),
        2,
    ),
    Case("aperture inside", edited(('"inside"', '"inside"\nna = 0.5')), ("light.spectrum: na", "inside")),
    Case("aperture of minus one", edited(('"inside"', '"above"\nna = -1')), ("light.spectrum: na", "above 0")),
    Case(
        "aperture beyond air",
        edited(('"inside"', '"above"\nna = 1.3')),
        ("light.spectrum: na", "index of air", "above ="),
    ),
    Case("seen from nowhere", edited(('"inside"', '"outside"')), ("light.spectrum: seen", 'expected "inside"')),
    Case("width of zero", edited(("fwhm_nm = 40", "fwhm_nm = 0")), ("light.spectrum: fwhm_nm: found 0", "from 0.001")),
    Case("no peak", edited(("peak_nm = 768\n", "")), ("light.spectrum: peak_nm: missing",)),
    Case("peak far from the light", edited(("peak_nm = 768", "peak_nm = 7680")), ("light.spectrum", "no births")),
    Case(
        "misspelt peak and negative width",
        edited(("peak_nm", "peek_nm"), ("fwhm_nm = 40", "fwhm_nm = -40")),
        ("did you mean peak_nm", "fwhm_nm: found -40"),
        2,
    ),
    # emission
    Case("share above one", edited(("0.6667", "1.2")), ("emission: horizontal_share: found 1.2", "from 0 up to 1")),
    Case("share in percent as text", edited(("0.6667", '"67 %"')), ("emission: horizontal_share", '"67 %" (text)')),
    Case("absorption on a floor", edited((GAUSSIAN, ABSORPTION)), ("light.spectrum", "a floor or a cut, not a tail")),
    Case(
        "absorption seen above",
        edited((GAUSSIAN, f'{ABSORPTION}\nseen = "above"')),
        ("light.spectrum: seen", 'expected "inside"'),
    ),
    Case("absorption at no kelvin", edited((GAUSSIAN, f"{ABSORPTION}\ntemperature_K = 0")), ("temperature_K", "in K")),
    Case("splitting below zero", edited((GAUSSIAN, f"{ABSORPTION}\nsplitting_eV = -1")), ("splitting_eV", "from 0")),
    Case("no carriers at all", edited((GAUSSIAN, f"{ABSORPTION}\nn_i_per_cm3 = 0")), ("n_i_per_cm3", "above 0")),
    Case("gain", edited((GAUSSIAN, f"{ABSORPTION}\nsplitting_eV = 1.6")), ("splitting_eV: found 1.6", "gain")),
    Case("profile without a depth", profile("x,births\n0,1\n"), ("emission: depth: table", '"x" is not known')),
    Case("profile with two depths", profile("depth_nm,depth_um,births\n0,0,1\n"), ("depth_nm and depth_um",)),
    Case("profile without a column", profile("depth_nm\n0\n"), ("found depth_nm, expected", "births")),
    Case("profile with a depth twice", profile("depth_nm,births\n0,1\n0,2\n480,1\n"), ("found 0 after 0",)),
    Case(
        "decay from nowhere", edited(('"uniform"', "{ decay_nm = 120 }")), ("emission: depth: side: missing", '"above"')
    ),
    Case(
        "decay from a corner",
        edited(('"uniform"', '{ decay_nm = 1, side = "left" }')),
        ("emission: depth: side", '"left"'),
    ),
    Case(
        "sheet outside", edited(('"uniform"', "{ at_nm = 481 }")), ("emission: depth", "at_nm: found 481", "0 to 480")
    ),
    Case("two depths", edited(('"uniform"', "{ at_nm = 1, pump_nm = 500 }")), ("emission: depth", "pump_nm and at_nm")),
    Case(
        "cubic births",
        edited(('"uniform"', '{ pump_nm = 750, side = "above", births = "cubic" }')),
        ("depth: births", '"square"'),
    ),
    Case(
        "pump out of range",
        edited(('"uniform"', '{ pump_nm = 300, side = "above" }')),
        ("depth", "pump_nm: found 300", "covers"),
        2,
    ),
    Case(
        "pump as text",
        edited(('"uniform"', '{ pump_nm = "green", side = "above" }')),
        ("depth: pump_nm", "number in nm"),
    ),
    Case(
        "misspelt depth key",
        edited(('"uniform"', '{ pump_nm = 750, site = "above" }')),
        ("depth: site", "did you mean side"),
    ),
    Case(
        "profile that is missing",
        edited(('"uniform"', '{ table = "p.csv" }')),
        ("emission: depth: table", "no such file"),
    ),
    Case("profile that is a number", edited(('"uniform"', "{ table = 5 }")), ("emission: depth: table", "found 5")),
    Case(
        "profile too short",
        edited(('"uniform"', "{ depth_nm = [0, 100], births = [1, 1] }")),
        ("covers 0 to 100", "480 nm"),
    ),
    Case(
        "profile without births",
        edited(('"uniform"', "{ depth_nm = [0, 480], births = [0, 0] }")),
        ("births: found zeros",),
    ),
    Case(
        "profile below zero",
        edited(('"uniform"', "{ depth_nm = [0, 480], births = [0, -1] }")),
        ("births: value 2", "0 or more"),
    ),
    Case(
        "profile unsorted",
        edited(('"uniform"', "{ depth_nm = [480, 0], births = [0, 1] }")),
        ("depth_nm: value 2", "ascending"),
    ),
    Case(
        "aperture of nobody",
        edited(("[emission]", '[collection]\nside = "above"\n\n[emission]')),
        ("collection: na: missing",),
    ),
    Case(
        "aperture of too much",
        edited(("[emission]", '[collection]\nna = 1.4\nside = "below"\n\n[emission]')),
        ("collection: na", "air"),
    ),
    Case(
        "aperture from the left",
        edited(("[emission]", '[collection]\nna = 1\nside = "left"\n\n[emission]')),
        ("collection: side",),
    ),
    Case("unknown depth", edited(('depth = "uniform"', 'depth = "deep"')), ("emission: depth", 'expected "uniform"')),
    # layers
    Case(
        "thickness as text",
        edited((_THICKNESS, 'thickness_nm = "480nm"')),
        (f'{_FILM}: thickness_nm: found "480nm" (text), expected a number in nm, for example 480',),
    ),
    Case("comma decimal as text", edited((_THICKNESS, 'thickness_nm = "480,5"')), ("480.5 without quotes", "point")),
    Case("bool for a thickness", edited((_THICKNESS, "thickness_nm = true")), (_FILM, "found true (true or false)")),
    Case("negative thickness", edited((_THICKNESS, "thickness_nm = -480")), (_FILM, "found -480", "above 0")),
    Case("thickness that is NaN", edited((_THICKNESS, "thickness_nm = nan")), (_FILM, "thickness_nm: found nan")),
    Case("thickness without end", edited((_THICKNESS, "thickness_nm = inf")), (_FILM, "thickness_nm: found inf")),
    Case(
        "thickness beyond floats", edited((_THICKNESS, f"thickness_nm = 1{'0' * 400}")), (_FILM, "thickness_nm: found")
    ),
    Case("thickness that is a list", edited((_THICKNESS, "thickness_nm = [480]")), (_FILM, "a list of 1")),
    Case("thickness that is a date", edited((_THICKNESS, "thickness_nm = 1979-05-27")), (_FILM, "1979-05-27 (date)")),
    Case(
        "two thicknesses", edited((_THICKNESS, f"{_THICKNESS}\nthickness_um = 0.48")), (_FILM, "expected one of them")
    ),
    Case("no thickness", edited((f"{_THICKNESS}\n", "")), (_FILM, "thickness_nm: missing")),
    Case(
        "thickness with an unknown unit", edited((_THICKNESS, "thickness_cm = 1")), (_FILM, "did you mean thickness_")
    ),
    Case("no material", edited(('material = "film.csv"\n', "")), (_FILM, "material: missing")),
    Case("material that is true", edited(('"film.csv"', "true")), (_FILM, "material", "found")),
    Case("unknown material", edited(('"float-glass"', '"flaot-glass"')), ('layer "glass"', "did you mean float-glass")),
    Case("negative k", edited(('"film.csv"', "{ n = 2.5, k = -0.02 }")), (_FILM, "material: k: found -0.02")),
    Case("index beyond floats", edited(('"film.csv"', f"1{'0' * 400}")), (_FILM, "material: ")),
    Case("n of zero", edited(('"film.csv"', "{ n = 0.0 }")), (_FILM, "material: n: found 0")),
    Case("unknown key in a material", edited(('"film.csv"', "{ n = 2.5, kk = 0.1 }")), (_FILM, '"kk"')),
    Case("unknown published page", edited(('"film.csv"', "{ published = 7 }")), (_FILM, "published: found 7")),
    Case("no layer emits", edited(("emits = true\n", "")), ("no layer emits", "film, glass")),
    Case(
        "two layers emit",
        edited(("thickness_mm = 1.1", "thickness_mm = 1.1\nemits = true")),
        ("2 layers emit (film, glass)",),
    ),
    Case("emits as text", edited(("emits = true", 'emits = "yes"')), (_FILM, "emits", "true or false")),
    Case("name twice", edited(('"glass"', '"film"')), (_FILM, "used 2 times")),
    Case("no name", edited(('name = "glass"\n', "")), ("layer 2: name: missing",)),
    Case("empty name", edited(('"glass"', '""')), ("layer 2: name: found empty text",)),
    Case("name without end", edited(('"glass"', f'"{"glass" * 20}"')), ("name: found 100 characters", "at most 60")),
    Case("name with blanks around it", edited(('"glass"', '" glass"')), ('name: found " glass" (text)',)),
    Case("peak out of all reach", edited(("peak_nm = 768", "peak_nm = 1e300")), ("light.spectrum", "no births")),
    Case(
        "step beyond floats",
        edited(("to_nm = 860", "to_nm = 1e300"), ("step_nm = 1", "step_nm = 1e-300")),
        ("light: step_nm: found 1e-300", "at most 100000"),
    ),
    Case("name of an outer medium", edited(('"glass"', '"below"')), ("names an outer medium",)),
    Case("name with a line break", edited(('"glass"', '"gla\\nss"')), ("name: found", "gla\\nss")),
    Case(
        "wrong phases",
        edited(("thickness_mm = 1.1", 'thickness_mm = 1.1\nphases = "forget"')),
        ('layer "glass"', "phases", '"keep" or "ignore"'),
    ),
    Case(
        "wavelength outside a table",
        edited(("to_nm = 860", "to_nm = 960")),
        (_FILM, "600 to 900 nm", "700 to 960 nm", "shorten"),
    ),
    Case(
        "wavelength outside two tables",
        edited(("from_nm = 700", "from_nm = 200"), ("step_nm = 1", "step_nm = 10")),
        (_FILM, 'layer "glass"', "310 to 4600 nm"),
        2,
    ),
    Case(
        "faults everywhere",
        edited(
            ("title =", "titel ="),
            (_THICKNESS, "thickness_nm = -1"),
            ("step_nm = 1", "step_nm = -1"),
            ("fwhm_nm = 40", "fwhm_nm = -1"),
            ("0.6667", "2"),
            ('"float-glass"', '"float"'),
        ),
        ("titel", "light: step_nm", "light.spectrum: fwhm_nm", "horizontal_share", _FILM, 'layer "glass": material'),
        6,
    ),
    # tables of n and k
    Case("missing table", edited(('"film.csv"', '"flim.csv"')), (_FILM, "material: flim.csv: no such file")),
    Case("table that is a directory", _table_directory, (_FILM, "material: film.csv: found a directory")),
    Case("huge table", _table_huge, (_FILM, "material: film.csv: ", "60.0 MB")),
    Case("unreadable table", _table_unreadable, (_FILM, "film.csv: cannot be read")),
    Case("empty table", film(""), (_FILM, "film.csv: found an empty file")),
    Case("binary table", film(b"PK\x03\x04\x00\x00"), (_FILM, "film.csv: found binary")),
    Case("table without a unit", film(FILM.replace("wavelength_nm", "wavelength")), (_FILM, "line 1", "unit")),
    Case(
        "table in the wrong unit", film("wavelength_nm,n,k\n0.6,2.5,0.1\n0.9,2.3,0\n"), (_FILM, "look like micrometres")
    ),
    Case("table without a header", film("600,2.5,0.1\n900,2.3,0\n"), (_FILM, "line 1", "header")),
    Case("table without k", film("wavelength_nm,n\n600,2.5\n900,2.3\n"), (_FILM, "no column k")),
    Case("truncated table", film(FILM[:-8]), (_FILM, "line 5")),
    Case("unsorted table", film(FILM + "650,2.48,0.08\n"), (_FILM, "line 6", "650 after 900")),
    Case("duplicate wavelength in a table", film(FILM + "900,2.3,0.0\n"), (_FILM, "line 6", "900 again")),
    Case("NaN in a table", film(FILM.replace("0.05", "nan")), (_FILM, "line 3: k", "nan")),
    Case("negative k in a table", film(FILM.replace("0.05", "-0.05")), (_FILM, "line 3: k: found -0.05")),
    Case("comma decimals in a table", film(FILM.replace("2.45", "2,45")), (_FILM, "line 3", "point")),
    Case("tabs above commas in a table", film(FILM.replace(",", "\t", 2)), (_FILM, "line 1", "expected 3 headings")),
    # tables of births
    Case("missing births", edited((GAUSSIAN, 'kind = "table"\nfile = "birth.csv"')), ("birth.csv: no such file",)),
    Case("births without a file", edited((GAUSSIAN, 'kind = "table"')), ("light.spectrum: file: missing",)),
    Case(
        "births without a unit",
        births(BIRTHS.replace("births_per_nm", "births")),
        ("births.csv: line 1", "births_per_nm"),
    ),
    Case("counts for births", births(BIRTHS.replace("births_per_nm", "counts")), ("births.csv: line 1", '"counts"')),
    Case(
        "two scales of births",
        births("wavelength_nm,energy_eV,births_per_nm\n650,1,0\n900,2,1\n"),
        ("expected one of",),
    ),
    Case(
        "negative births", births(BIRTHS.replace("900,0", "900,-1")), ("births.csv: line 4: births_per_nm: found -1",)
    ),
    Case("births without births", births(BIRTHS.replace("768,1", "768,0")), ("light.spectrum: ", "zeros alone")),
    Case("births in disorder", births(BIRTHS + "800,0\n"), ("births.csv: line 5", "800 after 900", "sort")),
    Case("births twice", births(BIRTHS + "900,0\n"), ("births.csv: line 5", "900 after 900", "none twice")),
    Case(
        "births that end too early",
        births(BIRTHS.replace("900,0", "800,0")),
        ("650 to 800 nm", "700 to 860 nm", "zeros"),
    ),
    Case("births cut off", births(BIRTHS[:-2]), ("births.csv: line 4",)),
    Case("births with NaN", births(BIRTHS.replace("768,1", "768,NaN")), ("births.csv: line 3",)),
    Case("one row of births", births("wavelength_nm,births_per_nm\n768,1\n"), ("births.csv", "at least 2")),
]

if hasattr(os, "mkfifo"):
    CASES.append(Case("pipe instead of file", _pipe, ("stack.toml: found a device or pipe",)))
