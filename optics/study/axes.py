"""What a study varies: axes written in one line, in a study file, or cases in a table."""

import csv
import io
import math
import re
import tomllib
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from optics.errors import InputError
from optics.faults import Faults, found, is_number, quoted
from optics.media.cabinet import find
from optics.media.material import Material
from optics.media.sheet import decode, read_bytes
from optics.stack import Stack
from optics.study.keypath import all_changed, changed, is_material, place_of, without_doubts

RANGE = re.compile(r"\s*(\S+)\s+to\s+(\S+)\s+step\s+(\S+)\s*")
OUTSIDE_BRACES = re.compile(r",(?![^{]*\})")
MOST_POINTS = 1_000_000
EXAMPLE = '"film.thickness_nm = 50 to 1000 step 10" or "glass.material = float-glass, sapphire"'
CHECKED_TOGETHER = 2000  # points that are built one by one before any work; of more, every value is tried alone


@dataclass(frozen=True)
class Axis:
    """One key path and the values it takes.

    ``labels`` are what tables show: numbers, or names of materials as they were given.
    """

    key: str
    values: tuple[Any, ...]
    labels: tuple[Any, ...]


@dataclass(frozen=True)
class Points:
    """The points of a study: every combination of the axes, or the rows of a table of cases.

    Parameters
    ----------
    axes
        The axes; the last one runs fastest.
    cases
        For a table of cases all axes have as many values, and a point takes the same row of each.
    """

    axes: tuple[Axis, ...]
    cases: bool = False

    def __len__(self) -> int:
        if self.cases:
            return len(self.axes[0].values)
        return math.prod(len(axis.values) for axis in self.axes)

    @property
    def keys(self) -> tuple[str, ...]:
        """The key paths varied."""
        return tuple(axis.key for axis in self.axes)

    def places(self, point: int) -> tuple[int, ...]:
        """Return where a point stands on each axis."""
        if self.cases:
            return (point,) * len(self.axes)
        places = []
        for axis in reversed(self.axes):
            point, place = divmod(point, len(axis.values))
            places.append(place)
        return tuple(reversed(places))

    def values(self, point: int) -> dict[str, Any]:
        """Return the values of a point by key path."""
        return {a.key: a.values[place] for a, place in zip(self.axes, self.places(point), strict=True)}

    def labels(self, point: int) -> dict[str, Any]:
        """Return what tables show of a point by key path."""
        return {a.key: a.labels[place] for a, place in zip(self.axes, self.places(point), strict=True)}

    def neighbours(self, point: int) -> Iterator[tuple[str, int]]:
        """Yield the points one step away along each axis; none in a table of cases, whose rows have no order."""
        if self.cases:
            return
        places, stride = self.places(point), 1
        for axis, place in reversed(list(zip(self.axes, places, strict=True))):
            for step in (-1, 1):
                if 0 <= place + step < len(axis.values):
                    yield axis.key, point + step * stride
            stride *= len(axis.values)


def axis(stack: Stack, key: str, given: Sequence[Any], *, folder: Path | None = None) -> Axis:
    """Return an axis whose every value the stack can have; all that it cannot have are refused at once."""
    faults = Faults()
    values: list[Any] = []
    with faults.taking_over():
        place_of(stack, key)
        if not given:
            faults.add(key, f"found no values, expected for example {EXAMPLE}")
        for each in given:
            with faults.taking_over():
                values.append(_value(stack, key, each, folder))
    faults.settle()
    labels = tuple(_label(each, value) for each, value in zip(given, values, strict=True))
    return Axis(key, tuple(values), labels)


def grid(axes: Sequence[Axis], stack: Stack) -> Points:
    """Return every combination of axes; InputError when there are too many or one cannot be built."""
    return _checked(Points(tuple(axes)), stack)


def from_lines(stack: Stack, lines: Sequence[str], *, folder: Path | None = None) -> Points:
    """Return the points of lines such as ``film.thickness_nm = 50 to 1000 step 10``.

    Raises
    ------
    InputError
        With every line that cannot be read, key that the stack lacks and value that it cannot have.
    """
    return from_values(stack, parsed_lines(lines), folder=folder)


def from_values(stack: Stack, given: Mapping[str, Sequence[Any]], *, folder: Path | None = None) -> Points:
    """Return the points of values by key path."""
    faults = Faults()
    axes: list[Axis] = []
    for key, values in given.items():
        with faults.taking_over():
            axes.append(axis(stack, key, values, folder=folder))
    if not given:
        faults.add("", f"nothing to vary, expected for example {EXAMPLE}")
    faults.settle()
    return grid(axes, stack)


def from_cases(stack: Stack, path: Path, *, folder: Path | None = None) -> Points:
    """Return the points of a table of cases: a row a case, its header the key paths.

    Raises
    ------
    InputError
        With every fault of the table, by row and key.
    """
    header, rows = _case_rows(path)
    faults = Faults()
    columns: dict[str, tuple[list[Any], list[Any]]] = {key: ([], []) for key in header}
    for number, row in rows:
        for key, text in zip(header, row, strict=True):
            given = _scalar(text)
            faults.place = f"{path}: line {number}"
            with faults.collecting():
                columns[key][0].append(_value(stack, key, given, folder))
                columns[key][1].append(given)
    faults.settle()
    axes = tuple(Axis(key, tuple(values), tuple(labels)) for key, (values, labels) in columns.items())
    return _checked(Points(axes, cases=True), stack)


def parsed_values(key: str, text: str) -> list[Any]:
    """Return the values that a text such as ``50 to 1000 step 10`` or ``float-glass, sapphire`` lists."""
    match = RANGE.fullmatch(text)
    if match:
        return even_values(key, *(_scalar(part) for part in match.groups()))
    return [_scalar(part) for part in OUTSIDE_BRACES.split(text) if part.strip()]


def even_values(key: str, first: Any, last: Any, step: Any) -> list[float]:
    """Return values from ``first`` to ``last``, both included, a whole number of steps apart."""
    faults = Faults(key)
    one, other, by = (faults.number("", value, example=50) for value in (first, last, step))
    faults.settle()
    steps = (other - one) / by if by else math.nan
    if not 0.0 <= steps <= MOST_POINTS:
        raise InputError(
            f"{key}: found {one:g} to {other:g} step {by:g}, expected a step that leads from one to the other"
        )
    whole = round(steps)
    if abs(steps - whole) > 1e-9 * max(whole, 1):
        end = one + int(steps) * by
        raise InputError(f"{key}: steps of {by:.12g} from {one:.12g} do not end at {other:.12g}; {end:.12g} would do")
    return [float(f"{one + place * by:.12g}") for place in range(whole + 1)]


def parsed_lines(lines: Sequence[str]) -> dict[str, list[Any]]:
    """Return values by key path of lines such as ``film.thickness_nm = 50 to 1000 step 10``."""
    faults = Faults()
    axes: dict[str, list[Any]] = {}
    for line in lines:
        key, mark, text = (part.strip() for part in line.partition("="))
        if not mark or not key or not text:
            faults.add("", f"found {quoted(line)}, expected KEY = VALUES, for example {EXAMPLE}")
        elif key in axes:
            faults.add(key, "varied twice, expected one line with all its values")
        else:
            with faults.taking_over():
                axes[key] = parsed_values(key, text)
    faults.settle()
    return axes


def _value(stack: Stack, key: str, given: Any, folder: Path | None) -> Any:
    """Return a value as the stack takes it, tried on the stack; a material is found once, here."""
    value = given
    if is_material(key):
        try:
            value = find(given, folder=folder)
        except InputError as error:
            raise InputError(f"{key} = {found(given)}: {fault}" for fault in error.faults) from None
    changed(without_doubts(stack), key, value)
    return value


def _label(given: Any, value: Any) -> Any:
    if isinstance(value, Material):
        return given if isinstance(given, str) else value.name
    return float(given) if is_number(given) else given


def _checked(points: Points, stack: Stack) -> Points:
    if len(points) > MOST_POINTS:
        raise InputError(f"found {len(points)} points, expected at most {MOST_POINTS}; widen a step")
    faults = Faults()
    if len(points.axes) > 1 and len(points) <= CHECKED_TOGETHER:
        for point in range(len(points)):
            faults.place = f"point {point}"
            with faults.collecting():
                all_changed(without_doubts(stack), points.values(point))
            if len(faults.lines) > 10:
                faults.add("", "and perhaps more after it")
                break
    faults.settle()
    return points


def _case_rows(path: Path) -> tuple[list[str], list[tuple[int, list[str]]]]:
    text = decode(read_bytes(path, place=str(path)), place=str(path))
    lines = [
        (number, [cell.strip() for cell in cells])
        for number, cells in enumerate(csv.reader(io.StringIO(text, newline=None)), start=1)
        if cells and any(cell.strip() for cell in cells) and not cells[0].lstrip().startswith("#")
    ]
    if len(lines) < 2:
        raise InputError(f"{path}: found no cases, expected a header of key paths and a row a case")
    (start, header), rows = lines[0], lines[1:]
    faults = Faults(str(path))
    for key in dict.fromkeys(key for key in header if header.count(key) > 1 or not key):
        faults.add(
            f"line {start}", f"column {quoted(key)}: found {header.count(key)} times, expected key paths, each once"
        )
    for number, row in rows:
        if len(row) != len(header) or not all(row):
            filled = sum(bool(cell) for cell in row)
            faults.add(f"line {number}", f"found {filled} values, expected {len(header)} ({', '.join(header)})")
    faults.settle()
    return header, rows


def _scalar(text: str) -> Any:
    """Return a number where the text is one, a table where it is in braces as in TOML, else the text."""
    text = text.strip()
    if text.startswith("{"):
        try:
            return tomllib.loads(f"value = {text}")["value"]
        except (tomllib.TOMLDecodeError, RecursionError, ValueError):
            return text
    try:
        number = float(text)
    except ValueError:
        return text.strip("\"'")
    return number if math.isfinite(number) and "_" not in text else text
