"""Text tables as instruments and spreadsheets write them: separators, decimal marks, encodings, lines that are no rows.

Nothing here knows about optics. The dialect is the one in which most lines are rows of numbers; where two dialects
read different numbers from the same lines, or commas may group thousands, the reader refuses and asks.
"""

import csv
import math
import re
from collections import Counter
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from itertools import islice

import numpy as np
from numpy.typing import NDArray

from optics.errors import InputError
from optics.media.sheet import bare, shortened, shown

__all__ = ["DECIMALS", "SEPARATORS", "Dialect", "Grid", "grid_of_cells", "grid_of_text", "text_of"]

SEPARATORS: dict[str, str | None] = {"comma": ",", "semicolon": ";", "tab": "\t", "space": None}
DECIMALS = {"point": ".", "comma": ","}
SAMPLE_LINES = 2000  # enough to tell the dialect; every line is then read in it, or refused
COMMENT = ("#", "%", "!", "//")

_NUMBER = re.compile(r"[+-]?(\d+\.?\d*|\.\d+)([eEdD][+-]?\d+)?")
_NOT_FINITE = ("nan", "inf", "+inf", "-inf", "infinity", "-infinity")
_GROUPED = re.compile(r"[+-]?[1-9]\d{0,2},\d{3}")  # 1,500 may be one and a half, or fifteen hundred

Lines = Sequence[tuple[int, str]]
Cells = list[str]


@dataclass(frozen=True)
class Dialect:
    """How lines become cells and cells numbers; ``separator`` is empty for cells of a spreadsheet."""

    separator: str
    decimal: str

    @property
    def said(self) -> str:
        """Say it in words, without what goes without saying."""
        parts = [f"columns separated by {self.separator}s"] if self.separator not in ("", "comma") else []
        parts += ["decimal comma"] if self.decimal == "comma" else []
        return ", ".join(parts)


@dataclass(frozen=True)
class Grid:
    """Rows of numbers with what stands above them.

    Parameters
    ----------
    headers
        Lines above the numbers, nearest first: line number and the ways in which it splits into as many headings as
        there are columns.
    above
        Lines above the numbers, nearest first, as text.
    lines
        Line number in the file of each row, (row,).
    values
        (row, column); not a number where the cell is empty or holds no finite number.
    texts
        The cells as they stand.
    dialect
        How the text was read.
    passed
        What was passed over, in words.
    """

    headers: tuple[tuple[int, tuple[tuple[str, ...], ...]], ...]
    above: tuple[tuple[int, str], ...]
    lines: NDArray[np.int64]
    values: NDArray[np.float64]
    texts: tuple[tuple[str, ...], ...]
    dialect: Dialect
    passed: tuple[str, ...]


def text_of(content: bytes, *, place: str) -> tuple[str, str]:
    """Return the text in a file and the name of its encoding: UTF-8, UTF-16 with its mark, else Latin-1.

    Raises
    ------
    InputError
        When it is no text.
    """
    if content.startswith((b"\xff\xfe", b"\xfe\xff")):
        encodings = ["utf-16"]
    elif b"\0" in content:
        raise InputError(f"{place}: found binary data, expected a text table")
    else:
        encodings = ["utf-8-sig", "latin-1"]
    for encoding in encodings:
        try:
            text = content.decode(encoding)
        except UnicodeDecodeError:
            continue
        odd = next((letter for letter in text if ord(letter) < 32 and letter not in "\t\n\r\f\v\x1b"), "")
        if odd or (encoding == "latin-1" and re.search("[\x80-\x9f]", text)):
            break
        if not text.strip():
            raise InputError(f"{place}: found an empty file, expected a header and rows of numbers")
        return text, {"utf-8-sig": "UTF-8", "latin-1": "Latin-1", "utf-16": "UTF-16"}[encoding]
    raise InputError(f"{place}: found bytes that are no text, expected a text table; save it as CSV UTF-8")


def grid_of_text(text: str, *, place: str, separator: str = "", decimal: str = "") -> Grid:
    """Return the rows of numbers in a text table.

    Parameters
    ----------
    text
        Decoded content.
    place
        What messages call it.
    separator, decimal
        Keys of `SEPARATORS` and `DECIMALS` where the user said them; empty lets the lines decide.

    Raises
    ------
    InputError
        When there are no two rows, a line between them is none, or two dialects fit.
    """
    lines = [(number, line) for number, line in enumerate(_lines(text), start=1) if line.strip()]
    choices = [
        Dialect(each, mark)
        for each in ([separator] if separator else SEPARATORS)
        for mark in ([decimal] if decimal else DECIMALS)
    ]
    sample = list(islice((pair for pair in lines if not _comment(pair[1])), SAMPLE_LINES))
    dialect, width = _chosen([(each, [(n, _split(line, each)) for n, line in sample]) for each in choices], place)
    cells = [(number, _split(line, dialect), line) for number, line in lines]
    return _grid(cells, dialect, width, place, decided=bool(decimal))


def grid_of_cells(rows: Sequence[Sequence[str]], *, place: str, decimal: str = "") -> Grid:
    """Return the rows of numbers in a sheet of a spreadsheet, whose cells are text; see `grid_of_text`."""
    filled = [(number, [cell.strip() for cell in row]) for number, row in enumerate(rows, start=1) if any(row)]
    choices = [Dialect("", mark) for mark in ([decimal] if decimal else DECIMALS)]
    dialect, width = _chosen([(each, filled[:SAMPLE_LINES]) for each in choices], place)
    cells = [(number, row, "\t".join(row)) for number, row in filled]
    return _grid(cells, dialect, width, place, decided=bool(decimal))


def number_in(cell: str, decimal: str) -> float | None:
    """Return the number in a cell, None when it holds none; Fortran's 1D3 is one, Python's 1_000 is none."""
    plain = cell.strip().replace("\u2212", "-")
    if plain.lower() in _NOT_FINITE:
        return math.nan
    if decimal == "comma":
        if "." in plain:
            return None
        plain = plain.replace(",", ".")
    if not _NUMBER.fullmatch(plain):
        return None
    return float(plain.replace("d", "e").replace("D", "e"))


def _lines(text: str) -> list[str]:
    return text.replace("\r\n", "\n").replace("\r", "\n").split("\n")


def _comment(line: str) -> bool:
    return line.lstrip().startswith(COMMENT)


def _split(line: str, dialect: Dialect) -> Cells:
    mark = SEPARATORS[dialect.separator]
    if mark is None:
        return line.split()
    if '"' not in line:
        return [cell.strip() for cell in line.split(mark)]
    try:
        return [cell.strip() for cell in next(csv.reader([line], delimiter=mark, strict=True))]
    except csv.Error:
        return [line]


def _row(cells: Cells, decimal: str) -> tuple[float, ...] | None:
    """Return the numbers of a row, not a number for an empty cell; None when it is no row of two or more numbers."""
    numbers = [math.nan if not cell else number_in(cell, decimal) for cell in cells]
    if len(cells) - cells.count("") < 2 or not cells[0] or any(each is None for each in numbers):
        return None
    return tuple(numbers)  # type: ignore[arg-type]  # none of them is None


def _chosen(choices: Sequence[tuple[Dialect, Sequence[tuple[int, Cells]]]], place: str) -> tuple[Dialect, int]:
    """Return the dialect in which most lines are rows, and the width of most of these rows."""
    best: list[tuple[int, int, Dialect, dict[int, tuple[float, ...]]]] = []
    for dialect, lines in choices:
        rows = {number: row for number, cells in lines if (row := _row(cells, dialect.decimal))}
        widths = Counter(len(row) for row in rows.values())
        width = max(widths, key=lambda each: (widths[each], each), default=0)
        kept = {number: row for number, row in rows.items() if len(row) == width}
        best.append((len(kept), width, dialect, kept))
    most = max(count for count, *_ in best)
    if most == 0:
        faults = _nothing_found([(dialect, list(lines)) for dialect, lines in choices])
        raise InputError(shortened([f"{place}: {fault}" for fault in faults], place))
    leading = [each for each in best if each[0] == most]
    _, width, dialect, rows = leading[0]
    for _, _, other, others in leading[1:]:
        if repr(others) != repr(rows):
            one, two = (
                f"{each.separator or 'cell'} between columns, decimal {each.decimal}" for each in (dialect, other)
            )
            raise InputError(
                f"{place}: line {min(rows)}: may be read in two ways ({one}; or {two}); "
                "say --separator and --decimal when importing it"
            )
    return dialect, width


def _nothing_found(readings: list[tuple[Dialect, list[tuple[int, Cells]]]]) -> list[str]:
    """Return why no line is a row of numbers: line by line where most of them begin with one."""
    if not any(lines for _, lines in readings):
        return ["found only comments, expected a header and rows of numbers"]
    for dialect, lines in readings:
        begun = [each for each in lines[1:] if len(each[1]) > 1 and number_in(each[1][0], dialect.decimal) is not None]
        if len(begun) * 2 > len(lines) - 1 and len(begun[0][1]) == len(lines[0][1]):
            names = tuple(map(bare, lines[0][1]))
            return [f"line {number}: {_broken(cells, names, dialect)}" for number, cells in begun]
    return ["found 0 row(s) of numbers, expected at least 2 under a header; text columns are not read"]


def _grid(cells: list[tuple[int, Cells, str]], dialect: Dialect, width: int, place: str, *, decided: bool) -> Grid:
    rows = {
        at: row
        for at, (_, each, line) in enumerate(cells)
        if not _comment(line) and len(each) == width and (row := _row(each, dialect.decimal))
    }
    first, last = min(rows), max(rows)
    above = tuple((number, line) for number, _, line in reversed(cells[:first]))
    names = tuple(bare(name) for name in next(_headings(above[0][1], dialect, width), ())) if above else ()
    faults, passed = _other_lines(cells, rows, dialect, names or tuple(f"column {each + 1}" for each in range(width)))
    if faults:
        raise InputError(shortened([f"{place}: {fault}" for fault in faults], place))
    texts = tuple(tuple(cells[each][1]) for each in rows)
    if dialect.decimal == "comma" and not decided:
        _refuse_grouped(texts, f"{place}: line {cells[first][0]}")
    values = np.array(list(rows.values()), dtype=np.float64)
    values[~np.isfinite(values)] = np.nan
    kept = width
    while kept > 2 and not any(text[kept - 1] for text in texts):  # a separator at the end of every line
        kept -= 1
    if last < len(cells) - 1:
        passed.append(f"{len(cells) - 1 - last} lines below the numbers passed over")
    return Grid(
        headers=tuple((number, tuple(_headings(line, dialect, kept))) for number, line in above),
        above=above,
        lines=np.array([cells[each][0] for each in rows], dtype=np.int64),
        values=values[:, :kept],
        texts=texts,
        dialect=dialect,
        passed=tuple(passed),
    )


def _other_lines(
    cells: list[tuple[int, Cells, str]], rows: dict[int, tuple[float, ...]], dialect: Dialect, names: tuple[str, ...]
) -> tuple[list[str], list[str]]:
    """Return what is wrong with lines that ought to be rows, and what was passed over."""
    first, last, width = min(rows), max(rows), len(names)
    faults = []
    comments = 0
    for place, (number, each, line) in enumerate(cells):
        if place in rows:
            continue
        if _comment(line):
            comments += first < place < last
            continue
        if place < first:  # a header or metadata; whoever reads the header looks for rows lost between it and the rest
            continue
        broken = number_in(each[0], dialect.decimal) is not None or (len(each) == width and _some(each, dialect))
        if place < last or broken:
            faults.append(f"line {number}: {_broken(each, names, dialect)}")
    return faults, [f"{comments} comment lines between the rows passed over"] if comments else []


def _some(cells: Cells, dialect: Dialect) -> bool:
    return any(number_in(cell, dialect.decimal) is not None for cell in cells)


def _broken(cells: Cells, names: tuple[str, ...], dialect: Dialect) -> str:
    width = len(names)
    if len(cells) == 1 and '"' in cells[0]:
        return f"found {shown(cells[0])}, expected quotes in pairs"
    if len(cells) != width:
        cure = "; decimals are written with a point where commas separate columns" if len(cells) > width else ""
        return f"found {len(cells)} cells, expected {width}{cure}"
    for name, cell in zip(names, cells, strict=True):
        if cell and number_in(cell, dialect.decimal) is None:
            cure = f"; decimals are written with a {dialect.decimal} here" if "," in cell or "." in cell else ""
            return f"{name}: found {shown(cell)}, expected a finite number{cure}"
    return f"{names[0]}: found nothing, expected a number"


def _refuse_grouped(texts: Sequence[Sequence[str]], place: str) -> None:
    """Refuse numbers whose only commas may group thousands: 1,500."""
    commas = [cell for row in texts for cell in row if "," in cell]
    if commas and all(_GROUPED.fullmatch(cell) for cell in commas):
        raise InputError(
            f"{place}: {shown(commas[0])} may be {commas[0].replace(',', '.')} or {commas[0].replace(',', '')}; "
            "say --decimal comma when importing it, or take the commas out"
        )


def _headings(line: str, dialect: Dialect, width: int) -> Iterator[tuple[str, ...]]:
    """Yield the ways in which a line above the numbers splits into one heading a column."""
    bare_line = line.strip().lstrip("".join(COMMENT)).strip() if _comment(line) else line
    ways = [_split(bare_line, Dialect("tab", "point"))] if not dialect.separator else [_split(bare_line, dialect)]
    if dialect.separator == "space":
        ways += [re.split(r"\s{2,}|\t", bare_line.strip()), [each.strip() for each in bare_line.split(",")]]
    ways += _grouped(bare_line.split() if dialect.separator == "space" else ways[0], width)
    seen = []
    for cells in ways:
        while len(cells) > width and not cells[-1]:
            cells = cells[:-1]
        if len(cells) == width and cells not in seen:
            seen.append(cells)
            yield tuple(cells)


def _grouped(words: Cells, width: int) -> Iterator[Cells]:
    """Yield the ways to join neighbours into so many headings: "Photon energy (eV)" is one, "Wavelength, nm" is one."""
    from itertools import combinations, pairwise

    if width < len(words) <= 12:
        for cuts in combinations(range(1, len(words)), width - 1):
            ends = (0, *cuts, len(words))
            yield [" ".join(words[start:stop]) for start, stop in pairwise(ends)]
