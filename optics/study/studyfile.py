"""A study file: what `photonfate sweep` is told on its command line, kept in a file."""

import tomllib
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from optics.errors import InputError
from optics.faults import Faults, found
from optics.media.sheet import decode, read_bytes
from optics.stack import Stack
from optics.study.axes import EXAMPLE, Points, even_values, from_cases, from_values, parsed_lines

KEYS = ("stack", "vary", "cases", "spectra", "best")
VARY_KEYS = ("key", "values", "from", "to", "step")


@dataclass(frozen=True)
class Study:
    """A study as it was asked for, by options or by a file."""

    stack_file: Path
    vary: Mapping[str, list[Any]]
    cases: Path | None
    spectra: bool
    best: tuple[str, ...]

    def points(self, stack: Stack) -> Points:
        """Return the points; tables they name stand beside the stack file, as those named in it do.

        Raises
        ------
        InputError
            When nothing or two things are varied, or the stack refuses a value.
        """
        if bool(self.vary) == (self.cases is not None):
            what = (
                "both axes and cases, expected one of them"
                if self.vary
                else f"nothing to vary, expected for example {EXAMPLE}"
            )
            raise InputError(f"sweep: found {what}")
        home = self.stack_file.parent
        return (
            from_values(stack, self.vary, folder=home)
            if self.vary
            else from_cases(stack, self.cases or Path(), folder=home)
        )


def asked(
    file: Path,
    *,
    vary: tuple[str, ...] = (),
    cases: Path | None = None,
    spectra: bool = False,
    best: tuple[str, ...] = (),
) -> Study:
    """Return the study of a stack file and options, or of a study file, whose entries the options add to."""
    tables = _tables(file)
    axes = parsed_lines(vary)
    if not isinstance(tables.get("stack"), str):
        return Study(file, axes, cases, spectra, best)
    faults = Faults(str(file))
    faults.known_keys(tables, KEYS)
    with faults.collecting():
        axes = _axes(tables.get("vary", [])) | axes
    if not isinstance(tables.get("spectra", False), bool):
        faults.flag("spectra", tables["spectra"])
    named = tables.get("cases")
    if named is not None and not isinstance(named, str):
        faults.add("cases", f'found {found(named)}, expected the name of a table, "cases.csv"')
    goals = tables.get("best", [])
    goals = [goals] if isinstance(goals, str) else goals
    if not isinstance(goals, list) or not all(isinstance(each, str) for each in goals):
        faults.add("best", f'found {found(goals)}, expected for example "max:free_above"')
    faults.settle()
    table = cases or (file.parent / named if named else None)
    return Study(file.parent / tables["stack"], axes, table, spectra or tables.get("spectra", False), (*goals, *best))


def _tables(file: Path) -> dict[str, Any]:
    """Return the content of a TOML file, nothing when it is none: the stack file's own reader says what is wrong."""
    try:
        return tomllib.loads(decode(read_bytes(file, place=str(file)), place=str(file)))
    except (InputError, ValueError, RecursionError):
        return {}


def _axes(given: Any) -> dict[str, list[Any]]:
    if not isinstance(given, list):
        raise InputError(f"vary: found {found(given)}, expected a list of lines or [[vary]] tables")
    axes = parsed_lines([each for each in given if isinstance(each, str)])
    faults = Faults()
    for number, table in enumerate((each for each in given if not isinstance(each, str)), start=1):
        faults.place = f"vary {number}"
        with faults.collecting():
            key, values = _axis(table)
            axes[key] = values
    faults.settle()
    return axes


def _axis(table: Any) -> tuple[str, list[Any]]:
    if not isinstance(table, dict):
        raise InputError(f"found {found(table)}, expected a line of text or a table")
    faults = Faults()
    faults.known_keys(table, VARY_KEYS)
    key = table.get("key")
    if not isinstance(key, str):
        faults.add("key", f'found {found(key)}, expected a key path, "film.thickness_nm"')
    steps = [name for name in VARY_KEYS[2:] if name in table]
    if ("values" in table) == bool(steps) or len(steps) not in (0, 3):
        faults.add("", "expected either values or all of from, to and step")
    if "values" in table and not isinstance(table["values"], list):
        faults.add("values", f"found {found(table['values'])}, expected a list")
    faults.settle()
    return str(key), table["values"] if "values" in table else even_values(
        str(key), *(table[name] for name in VARY_KEYS[2:])
    )
