"""Tables of n and k as laboratories keep them, in any usual dialect, unit and way to state an index.

What was understood is said in sentences; what a file leaves open (the unit of its wavelengths, what a column is, where
n comes from) is refused with the option that says it, and never guessed.
"""

import hashlib
import re
from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from difflib import get_close_matches
from pathlib import Path

import numpy as np

from optics.arrays import Real
from optics.errors import InputError
from optics.media.dialects import COMMENT, DECIMALS, SEPARATORS, Grid, grid_of_cells, grid_of_text, text_of
from optics.media.dispersion import Tabulated
from optics.media.headings import AXIS, AXIS_UNITS, Heading, heading, unit_named
from optics.media.labvalues import Values, index_from, ordered, value_faults
from optics.media.material import Material
from optics.media.sheet import bare, read_bytes, shortened, shown
from optics.units import energy_eV

__all__ = ["Hints", "LabTable", "is_workbook", "parse_lab", "read_hashed", "read_lab", "read_table"]


_NUMBER_WITHIN = re.compile(r"(^|[\s;,\"'])[+-]?[.,]?\d")  # a cell that begins as a number does
WORKBOOKS = (".xlsx", ".xlsm")
NEEDED = {"nk": "n and k (or eps1 and eps2, or n and alpha)", "k": "k or alpha"}


@dataclass(frozen=True, kw_only=True)
class Hints:
    """What the user says about a table that the file leaves open.

    Parameters
    ----------
    columns
        What each column is, as headings with units (``"wavelength_nm"``, ``"n"``, ``"alpha_1/cm"``); "-" for one that
        is not used. None lets the file's header say it.
    unit
        Unit of the wavelengths (or energies), in words of `headings.AXIS_UNITS`.
    separator, decimal
        Keys of `dialects.SEPARATORS` and `dialects.DECIMALS`.
    sheet
        Which sheet of a workbook.
    n_from
        Where n comes from when the table has absorption alone.
    conjugate
        Whether the table writes n - i k, so that k and eps2 change sign.
    zero_negative
        Whether a negative k is set to zero.
    """

    columns: tuple[str, ...] | None = None
    unit: str = ""
    separator: str = ""
    decimal: str = ""
    sheet: str = ""
    n_from: Material | None = None
    conjugate: bool = False
    zero_negative: bool = False

    def __post_init__(self) -> None:
        faults = [
            f"{name}: found {shown(value)}, expected one of {', '.join(valid)}"
            for name, value, valid in (("separator", self.separator, SEPARATORS), ("decimal", self.decimal, DECIMALS))
            if value and value not in valid
        ]
        if self.unit and unit_named(self.unit) not in AXIS_UNITS:
            faults.append(f"unit: found {shown(self.unit)}, expected one of {', '.join(AXIS_UNITS)}")
        if faults:
            raise InputError(faults)


@dataclass(frozen=True)
class LabTable:
    """A table as it was understood, in ascending wavelength.

    Parameters
    ----------
    wavelength_nm
        Wavelengths [nm], (row,).
    n
        Real part of the index, None when only absorption was wanted.
    k
        Imaginary part; may be negative when that was allowed.
    understood
        Sentences that say how the file was read.
    converted
        Sentences that say what was computed from what stands in the file.
    sha256
        Hash of the file.
    """

    wavelength_nm: Real
    n: Real | None
    k: Real
    understood: tuple[str, ...]
    converted: tuple[str, ...] = ()
    sha256: str = field(default="")

    @property
    def tabulated(self) -> Tabulated:
        """The table as a medium."""
        if self.n is None:
            raise InputError("the table holds absorption alone, expected n too")
        return Tabulated(self.wavelength_nm, self.n, self.k)


def read_table(path: str | Path) -> Tabulated:
    """Read a table of n and k, in any usual dialect and unit.

    Parameters
    ----------
    path
        A text table with a header, for instance ``wavelength_nm,n,k``, or an Excel workbook.

    Returns
    -------
    Tabulated
        In ascending wavelength [nm].

    Raises
    ------
    InputError
        One line a fault: file, line and column, what was found, what is expected.
    """
    return read_hashed(Path(path), place=str(path)).tabulated


def read_hashed(path: Path, *, place: str) -> LabTable:
    """Return a table of n and k with the hash of its file; ``place`` is what messages call the file."""
    return read_lab(path, place=place, hints=Hints())


def is_workbook(path: str | Path) -> bool:
    """Say whether a path names an Excel workbook."""
    return str(path).lower().endswith(WORKBOOKS)


def read_lab(path: Path, *, place: str, hints: Hints, wanted: str = "nk", signed: bool = False) -> LabTable:
    """Read a laboratory's table.

    Parameters
    ----------
    path
        A text table or an Excel workbook.
    place
        What messages call it.
    hints
        What the user says of it.
    wanted
        ``"nk"``, or ``"k"`` for a table of absorption alone.
    signed
        Whether a negative k is let through, for somebody who looks into it.
    """
    content = read_bytes(path, place=place, kind="table (csv, txt, dat, tsv, xlsx or xlsm)")
    if is_workbook(path):
        from optics.media.workbook import cells_of

        rows, name = cells_of(content, place=place, sheet=hints.sheet)
        grid, source = grid_of_cells(rows, place=place, decimal=hints.decimal), f'sheet "{name}"'
    else:
        text, encoding = text_of(content, place=place)
        grid = grid_of_text(text, place=place, separator=hints.separator, decimal=hints.decimal)
        source = "" if encoding == "UTF-8" else f"{encoding} text"
    table = _table(grid, place=place, hints=hints, wanted=wanted, signed=signed, source=source)
    return replace(table, sha256=hashlib.sha256(content).hexdigest())


def parse_lab(text: str, *, place: str, hints: Hints | None = None, wanted: str = "nk") -> LabTable:
    """Return the table in a text; see `read_lab`."""
    hints = hints or Hints()
    grid = grid_of_text(text, place=place, separator=hints.separator, decimal=hints.decimal)
    return _table(grid, place=place, hints=hints, wanted=wanted, signed=False, source="")


def _table(grid: Grid, *, place: str, hints: Hints, wanted: str, signed: bool, source: str) -> LabTable:
    headings, line = _headings(grid, place, hints, wanted)
    used = _used(headings, hints, wanted, f"{place}: line {line}" if line else place)
    if len(grid.lines) < 2:
        raise InputError(f"{place}: found {len(grid.lines)} row(s) of numbers, expected at least 2")
    columns = {quantity: grid.values[:, at] for quantity, at in used.items()}
    unit = unit_named(hints.unit) if hints.unit else headings[used[AXIS]].unit
    values = Values(
        axis=columns.pop(AXIS),
        unit=unit,
        columns={name: (column, headings[used[name]].unit) for name, column in columns.items()},
        lines=grid.lines,
        names={quantity: bare(headings[at].text) for quantity, at in used.items()},
        texts={quantity: tuple(row[at] for row in grid.texts) for quantity, at in used.items()},
    )
    faults = value_faults(values, hints, signed=signed)
    if faults:
        raise InputError(shortened([f"{place}: {fault}" for fault in faults], place))
    wavelength, order = ordered(values, place)
    n, k, converted = index_from(values, wavelength, order, place=place, hints=hints, wanted=wanted, signed=signed)
    # Where n is taken from elsewhere, rows outside its range are left out; index_from says so and returns nan there.
    known = np.isfinite(k) if n is None else np.isfinite(n) & np.isfinite(k)
    understood = _understood(
        grid, headings, used, unit, wavelength[known], source, rising=bool(values.axis[0] < values.axis[-1])
    )
    return LabTable(wavelength[known], None if n is None else n[known], k[known], understood, converted)


def _headings(grid: Grid, place: str, hints: Hints, wanted: str) -> tuple[tuple[Heading, ...], int]:
    """Return what the columns are and the line of the header, 0 when the user said it."""
    width = grid.values.shape[1]
    if hints.columns is not None:
        if len(hints.columns) != width:
            raise InputError(f"{place}: --columns names {len(hints.columns)} columns, the rows have {width}")
        return tuple(Heading("-") if name.strip() == "-" else heading(name) for name in hints.columns), 0
    ranked = [
        (sum(bool(each.quantity) for each in read), read, number)
        for number, ways in grid.headers
        for way in ways
        if (read := _with_units_below(way, number, grid))
    ]
    # The nearest line above the numbers that names an axis and something along it.
    for count, read, number in ranked:
        if count >= 2 and any(each.quantity == AXIS for each in read) and not _outdone(count, number, ranked):
            return _with_nothing_lost(read, number, grid, place)
    if ranked:
        _, read, number = max(ranked, key=lambda each: each[0])
        return _with_nothing_lost(read, number, grid, place)
    if grid.above:
        number, text = grid.above[0]
        raise InputError(
            f"{place}: line {number}: found {shown(text)} above {width} columns of numbers, expected {width} headings; "
            "mend the header, or say --columns when importing it"
        )
    expected = f"a header that names {NEEDED[wanted]} and a wavelength or energy with its unit"
    raise InputError(
        f"{place}: line {grid.lines[0]}: found numbers, expected {expected}; write one, "
        "or say --columns when importing it"
    )


def _with_nothing_lost(
    read: tuple[Heading, ...], number: int, grid: Grid, place: str
) -> tuple[tuple[Heading, ...], int]:
    """Return the header, unless a line between it and the numbers begins like a row that is broken."""
    lost = [
        (line, text.strip())
        for line, text in grid.above
        if line > number and not text.lstrip().startswith(COMMENT) and _NUMBER_WITHIN.search(text)
    ]
    if lost:
        raise InputError(f"{place}: line {line}: found {shown(text)}, expected a row of numbers" for line, text in lost)
    return read, number


def _outdone(count: int, number: int, ranked: Sequence[tuple[int, tuple[Heading, ...], int]]) -> bool:
    """Say whether the same line splits otherwise into more headings that are known."""
    return any(line == number and other > count for other, _, line in ranked)


def _with_units_below(way: tuple[str, ...], number: int, grid: Grid) -> tuple[Heading, ...]:
    """Return the headings of a line; a line of units between it and the numbers completes them."""
    read = tuple(heading(cell) for cell in way)
    below = [ways for line, ways in grid.headers if line > number]
    for ways in below:
        for units in ways:
            if all(not cell.strip("()[]- ") or unit_named(cell) for cell in units) and any(map(unit_named, units)):
                whole = [
                    f"{name} ({unit.strip('()[]')})" if unit_named(unit) else name
                    for name, unit in zip(way, units, strict=True)
                ]
                return tuple(heading(text) if not each.unit else each for text, each in zip(whole, read, strict=True))
    return read


def _used(headings: tuple[Heading, ...], hints: Hints, wanted: str, place: str) -> dict[str, int]:
    """Return the column of each quantity that is used, or refuse what is missing, doubtful or there twice."""
    columns: dict[str, list[int]] = {}
    for at, each in enumerate(headings):
        if each.quantity:
            columns.setdefault(each.quantity, []).append(at)
    faults = _axis_faults(headings, columns.get(AXIS, []), hints)
    faults += [
        f"column {shown(headings[at[0]].text)} stands twice, expected one column of {quantity}; "
        "say which with --columns"
        for quantity, at in columns.items()
        if quantity != AXIS and len(at) > 1
    ]
    faults += _missing(headings, set(columns), hints, wanted)
    if faults:
        raise InputError(f"{place}: {fault}" for fault in faults)
    axis = next((at for at in columns[AXIS] if headings[at].unit), columns[AXIS][0])
    return {AXIS: axis, **{quantity: at[0] for quantity, at in columns.items() if quantity != AXIS}}


def _axis_faults(headings: tuple[Heading, ...], axes: list[int], hints: Hints) -> list[str]:
    doubtful = [each for each in headings if each.kind and each.doubt]
    plain = [headings[at] for at in axes]
    known = [each for each in plain if each.unit]
    if doubtful and not known:
        return [f"column {shown(each.text)} {each.doubt}, expected for example wavelength_nm" for each in doubtful]
    if len(known) > 1:
        names = " and ".join(bare(each.text) for each in known)
        return [f"found {names}, expected one of them; say which with --columns"]
    if not plain:
        return [_no_axis(headings)]
    if not known and not hints.unit:
        units = ", ".join(unit for unit, kind in AXIS_UNITS.items() if kind == plain[0].kind)
        return [
            f"column {shown(plain[0].text)} names no accepted unit, expected one of {', '.join(_named(plain[0]))}; "
            f"or say --unit when importing it ({units})"
        ]
    kinds = AXIS_UNITS.get(unit_named(hints.unit), "")
    if hints.unit and (plain[0].kind or kinds) != kinds:
        return [f"column {shown(plain[0].text)} is a {plain[0].kind}, and --unit {hints.unit} is one of a {kinds}"]
    return []


def _named(axis: Heading) -> list[str]:
    return [f"{axis.kind}_{unit}" for unit, kind in AXIS_UNITS.items() if kind == axis.kind]


def _no_axis(headings: tuple[Heading, ...]) -> str:
    doubts = [f"column {shown(each.text)} {each.doubt}" for each in headings if each.doubt]
    why = f" ({'; '.join(doubts)})" if doubts else ""
    return (
        f"found no column of wavelength or energy{why}, expected for example wavelength_nm, wavelength_um, energy_eV "
        f"or wavenumber_1/cm; found {', '.join(shown(each.text) for each in headings)}"
    )


def _missing(headings: tuple[Heading, ...], given: set[str], hints: Hints, wanted: str) -> list[str]:
    absorbs = given & {"k", "alpha"} or {"eps1", "eps2"} <= given
    faults = [
        f"column {shown(each.text)} {each.doubt}" for each in headings if each.doubt and not each.kind and not absorbs
    ]
    if wanted == "k":
        return faults or ([] if absorbs else [f"found no column k, expected {NEEDED['k']}{_meant(headings)}"])
    if {"eps1", "eps2"} <= given:
        return []
    faults += [
        f"column {one} without {other}, expected both"
        for one, other in (("eps1", "eps2"), ("eps2", "eps1"))
        if one in given and other not in given
    ]
    if not given & {"k", "alpha"} and not faults:
        faults.append(
            f"found no column k, expected {NEEDED['nk']}{_meant(headings)}; a clear material has a column of zeros"
        )
    if "n" not in given and hints.n_from is None and not faults:
        faults.append(
            f"found no column n, expected {NEEDED['nk']}{_meant(headings)}; or say --n-from when importing it"
        )
    return faults


def _meant(headings: tuple[Heading, ...]) -> str:
    """Return what unknown columns may have been meant to be."""
    unknown = [each.text for each in headings if not each.quantity and not each.doubt and each.text.strip()]
    hints = [
        f'column {shown(text)} is not known; did you mean "{near[0]}"?'
        if (near := get_close_matches(text.lower(), ("n", "k", "eps1", "eps2", "alpha_1/cm"), n=1))
        else f"column {shown(text)} is not known"
        for text in unknown[:5]
    ]
    return f" ({'; '.join(hints)})" if hints else ""


def _understood(
    grid: Grid,
    headings: tuple[Heading, ...],
    used: dict[str, int],
    unit: str,
    wavelength: Real,
    source: str,
    *,
    rising: bool,
) -> tuple[str, ...]:
    """Return how the file was read, one sentence each."""
    form = [each for each in (source, grid.dialect.said, *grid.passed) if each]
    if len(grid.above) > 1:
        form.append(f"{len(grid.above) - 1} more lines above the numbers passed over")
    taken = set(used.values())
    columns = []
    for at, each in enumerate(headings):
        name = f"column {at + 1}" + (f" {shown(each.text)}" if each.text.strip("- ") else "")
        if at not in taken:
            columns.append(f"{name} not used")
        else:
            meaning = f"{each.kind or 'axis'} in {unit}" if at == used[AXIS] else each.said
            columns.append(f"{name} read as {meaning}")
    ends = energy_eV(wavelength[[-1, 0]])
    rows = (
        f"{wavelength.size} rows, {wavelength[0]:.6g} to {wavelength[-1]:.6g} nm ({ends[0]:.4g} to {ends[1]:.4g} eV), "
        f"{'rising' if rising else 'falling'} in the file"
    )
    return (*([", ".join(form)] if form else []), "; ".join(columns), rows)
