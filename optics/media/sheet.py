"""Reading small CSV files strictly: bytes, text, header, rows of numbers, every fault with its place.

Nothing here knows about optics: `read_bytes` refuses what is no ordinary file of sensible size,
`parse_sheet` turns text into columns of numbers or one line per fault.
"""

import csv
import io
import math
import os
import stat
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import TypeVar

import numpy as np
from numpy.typing import NDArray

from optics.errors import InputError

__all__ = ["LIMIT_BYTES", "SHOWN_FAULTS", "Sheet", "bare", "decode", "parse_sheet", "read_bytes", "shortened", "shown"]

Result = TypeVar("Result")

LIMIT_BYTES = 50_000_000
"""Larger files are refused: a table of n and k at every 0.1 nm from 200 nm to 3 um has 1 MB."""

SHOWN_FAULTS = 10
"""Faults told one by one before the rest is only counted: a wrong separator faults every row alike."""


@dataclass(frozen=True)
class Sheet:
    """Columns of numbers as they stand in a file.

    Parameters
    ----------
    place
        What messages call the file.
    columns
        Names in the header, in order.
    lines
        Line number in the file of each row, shape (row,).
    values
        Shape (row, column), all finite.
    """

    place: str
    columns: tuple[str, ...]
    lines: NDArray[np.int64]
    values: NDArray[np.float64]

    def column(self, name: str) -> NDArray[np.float64]:
        """The values under one name of the header, shape (row,)."""
        return self.values[:, self.columns.index(name)]


def read_bytes(path: Path, *, place: str, kind: str = "CSV file") -> bytes:
    """The bytes of an ordinary file of at most `LIMIT_BYTES`, or InputError saying what is wrong with it.

    ``kind`` is what messages expect.
    """
    _refuse_unfit(_attempt(path.stat, path, place, kind), place, kind)
    return _attempt(path.read_bytes, path, place, kind)


def _attempt(act: Callable[[], Result], path: Path, place: str, kind: str) -> Result:
    try:
        return act()
    except (FileNotFoundError, NotADirectoryError):
        raise InputError(f"{place}: no such file; looked for {path.absolute()}") from None
    except (OSError, ValueError) as error:  # ValueError: a path with a null character
        reason = getattr(error, "strerror", None) or str(error)
        raise InputError(f"{place}: cannot be read ({reason}), expected a readable {kind}") from None


def _refuse_unfit(state: os.stat_result, place: str, kind: str) -> None:
    if stat.S_ISDIR(state.st_mode):
        raise InputError(f"{place}: found a directory, expected a {kind}")
    if not stat.S_ISREG(state.st_mode):
        raise InputError(f"{place}: found a device or pipe, expected a {kind}")
    if state.st_size > LIMIT_BYTES:
        size = f"{state.st_size / 1e6:.1f} MB"
        raise InputError(f"{place}: found {size}, expected at most {LIMIT_BYTES / 1e6:.0f} MB; thin the table out")


def decode(content: bytes, *, place: str) -> str:
    """UTF-8 text, with or without byte-order mark, or InputError for anything that is not text."""
    if content.startswith((b"\xff\xfe", b"\xfe\xff")):
        raise InputError(f"{place}: found UTF-16 text, expected UTF-8; save it as CSV UTF-8")
    if b"\0" in content:
        raise InputError(f"{place}: found binary data, expected a CSV file in UTF-8 text")
    try:
        text = content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        found = f"byte 0x{content[error.start]:02x} at position {error.start + 1}"
        raise InputError(f"{place}: found {found}, expected UTF-8 text; save it as CSV UTF-8") from None
    if not text.strip():
        raise InputError(f"{place}: found an empty file, expected a header and rows of numbers")
    return text


def parse_sheet(text: str, *, place: str, header_faults: Callable[[tuple[str, ...]], list[str]]) -> Sheet:
    """Columns of numbers from comma-separated text; lines that start with # and blank lines are passed over.

    Parameters
    ----------
    text
        Decoded content.
    place
        What messages call the file.
    header_faults
        Given the names in the header, says what is wrong with them, each without the place.

    Raises
    ------
    InputError
        One line a fault, with place, line and column.
    """
    lines = _cells(text, place)
    start, header = next(lines, (0, []))
    if not header:
        raise InputError(f"{place}: found only comments, expected a header and rows of numbers")
    _refuse_other_separators(header, f"{place}: line {start}")
    columns = tuple(header)
    faults = header_faults(columns)
    if faults:
        raise InputError(f"{place}: line {start}: {fault}" for fault in faults)
    return _numbers(lines, columns, place)


def _cells(text: str, place: str) -> Iterator[tuple[int, list[str]]]:
    for number, line in enumerate(io.StringIO(text, newline=None), start=1):
        if not line.strip() or line.lstrip().startswith("#"):
            continue
        try:
            cells = next(csv.reader([line.rstrip("\n")], strict=True))
        except csv.Error as error:
            raise InputError(f"{place}: line {number}: not comma-separated text ({error})") from None
        yield number, [cell.strip() for cell in cells]


def _refuse_other_separators(header: list[str], place: str) -> None:
    if len(header) > 1:
        return
    for mark, word in ((";", "semicolons"), ("\t", "tabs")):
        if mark in header[0]:
            raise InputError(f"{place}: found columns separated by {word}, expected commas, with points in decimals")


def _numbers(lines: Iterator[tuple[int, list[str]]], columns: tuple[str, ...], place: str) -> Sheet:
    faults: list[str] = []
    numbers: list[int] = []
    rows: list[list[float]] = []
    for number, cells in lines:
        row, row_faults = _row(cells, columns)
        faults += [f"{place}: line {number}: {fault}" for fault in row_faults]
        numbers.append(number)
        rows.append(row)
    if faults:
        raise InputError(shortened(faults, place))
    if len(rows) < 2:
        raise InputError(f"{place}: found {len(rows)} row(s) of numbers, expected at least 2")
    return Sheet(place, columns, np.array(numbers, dtype=np.int64), np.array(rows, dtype=np.float64))


def shortened(faults: list[str], place: str) -> list[str]:
    """The first `SHOWN_FAULTS` faults and a line that counts the rest."""
    more = len(faults) - SHOWN_FAULTS
    return [*faults[:SHOWN_FAULTS], f"{place}: and {more} more faults"] if more > 0 else faults


def _row(cells: list[str], columns: tuple[str, ...]) -> tuple[list[float], list[str]]:
    if len(cells) != len(columns):
        cure = "; decimals are written with a point here" if len(cells) > len(columns) else ""
        return [], [f"found {len(cells)} cells, expected {len(columns)} ({', '.join(columns)}){cure}"]
    numbers = [_number(cell) for cell in cells]
    faults = [
        f"{column}: found {shown(cell)}, expected a finite number{_comma_cure(cell)}"
        for column, cell, number in zip(columns, cells, numbers, strict=True)
        if not math.isfinite(number)
    ]
    return numbers, faults


def _number(cell: str) -> float:
    """The number in a cell, NaN when there is none; Python's 1_000 is none."""
    try:
        return float(cell) if "_" not in cell else math.nan
    except ValueError:
        return math.nan


def shown(cell: str) -> str:
    """A cell as messages quote it: short, and without characters that would move a terminal's cursor."""
    if not cell:
        return "nothing"
    printable = "".join(letter if letter.isprintable() else "?" for letter in cell[:41])
    return f'"{printable}"' if len(cell) <= 40 else f'"{printable[:37]}..."'


def bare(name: str) -> str:
    """A column's name as messages call it: as `shown`, without quotes."""
    return shown(name).removeprefix('"').removesuffix('"')


def _comma_cure(cell: str) -> str:
    return "; decimals are written with a point here" if "," in cell else ""
