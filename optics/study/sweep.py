"""Sweeps: the answer at every point of a grid or a table of cases."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from concurrent.futures import Executor
from dataclasses import dataclass
from functools import cached_property
from itertools import groupby
from pathlib import Path
from typing import TYPE_CHECKING, Any

from optics.errors import InputError
from optics.stack import Stack
from optics.study.answer import FIGURES, SPECTRAL, WORDS, Answer, answers, side_by_side
from optics.study.axes import Points, from_cases, from_values
from optics.study.engine import Place, Unit, run
from optics.study.keypath import all_changed, without_doubts

if TYPE_CHECKING:
    import pandas as pd

Packed = tuple[Stack, list[list[tuple[dict[str, Any], bool]]]]
"""A stack, and unit by unit the values of points by key path, and whether to keep the wavelengths of each."""

FEWEST_UNITS = 8
"""Parts that a small study is cut into at least, for workers to share and for its progress to show."""

Progress = Callable[[int, int], None]
"""Called with how many points are done and how many there are."""


@dataclass(frozen=True)
class Plan:
    """A study: a stack, its points, and whether answers are kept per wavelength, of all points or of the first ones."""

    stack: Stack
    points: Points
    spectra: bool = False
    spectral: int | None = None

    @cached_property
    def unit(self) -> int:
        """How many points are solved side by side."""
        return min(side_by_side(self.stack), -(-len(self.points) // FEWEST_UNITS))

    @property
    def units(self) -> list[Unit]:
        """All points, those together that are solved side by side: always the same, whatever is still to do."""
        count = len(self.points)
        return [tuple(range(at, min(at + self.unit, count))) for at in range(0, count, self.unit)]

    def pack(self, points: Sequence[int]) -> Packed:
        """Return what a worker needs for some points."""
        first = len(self.points) if self.spectral is None else self.spectral
        units = [
            [(self.points.values(point), self.spectra and point < first) for point in unit]
            for _, unit in groupby(points, key=lambda point: point // self.unit)
        ]
        return without_doubts(self.stack), units


@dataclass(frozen=True)
class Sweep:
    """What a sweep found.

    Attributes
    ----------
    table
        A row a point: ``point``, a column a key path, then the columns of `optics.study.answer`.
    spectra
        With ``spectra``, a row a point and wavelength; None without.
    """

    table: pd.DataFrame
    spectra: pd.DataFrame | None


def sweep(
    stack: Stack,
    vary: Mapping[str, Sequence[Any]] | None = None,
    *,
    cases: str | Path | None = None,
    folder: str | Path | None = None,
    spectra: bool = False,
    workers: int = 1,
    cluster: str = "",
    executor: Executor | None = None,
    progress: Progress | None = None,
) -> Sweep:
    """Solve a stack at every point of a grid.

    Parameters
    ----------
    stack
        The stack.
    vary
        Values by key path, for example ``{"film.thickness_nm": [50, 100], "glass.material": ["sapphire"]}``; every
        combination is a point.
    cases
        Instead, a CSV file with a row a case, its columns key paths.
    folder
        Where tables of materials are looked for.
    spectra
        Whether to keep every wavelength.
    workers, cluster, executor
        Where to work; see `optics.study.engine.Place`. Local processes import the caller's script: keep what it does
        under ``if __name__ == "__main__":``.
    progress
        Called as points are done.

    Raises
    ------
    InputError
        With every key and value that the stack cannot have.
    UnfinishedError
        When workers died again and again on some points.
    """
    if (vary is None) == (cases is None):
        raise InputError("sweep: found both or none of vary and cases, expected one of them")
    home = None if folder is None else Path(folder)
    points = (
        from_values(stack, vary, folder=home) if vary is not None else from_cases(stack, Path(cases or ""), folder=home)
    )
    plan = Plan(stack, points, spectra)
    place = Place(workers, cluster, executor)
    found: dict[int, Answer] = {}
    for at, got in run(work, plan.pack, range(len(points)), place, units=plan.units):
        found.update(zip(at, got, strict=True))
        if progress:
            progress(len(found), len(points))
    return collected(plan, ((point, found[point]) for point in range(len(points))))


def work(packed: Packed) -> list[Answer]:
    """Return the answers of some points; what a worker does."""
    stack, units = packed
    found: list[Answer] = []
    for unit in units:
        values, spectra = zip(*unit, strict=True)
        found += answers([all_changed(stack, each) for each in values], spectra=spectra)
    return found


def row(plan: Plan, point: int, found: Answer) -> dict[str, Any]:
    """Return a row of the table."""
    return {"point": point, **plan.points.labels(point), **{name: found[name] for name in (*WORDS, *FIGURES)}}


def spectral_rows(plan: Plan, point: int, found: Answer) -> Iterator[dict[str, Any]]:
    """Yield a point's rows of the table per wavelength."""
    head = {"point": point, **plan.points.labels(point)}
    for values in zip(*(found["spectra"][name] for name in SPECTRAL), strict=True):
        yield head | dict(zip(SPECTRAL, values, strict=True))


def collected(plan: Plan, answers: Iterator[tuple[int, Answer]]) -> Sweep:
    """Return the answers, which come in the order of the points, as tables."""
    import pandas as pd

    rows: list[dict[str, Any]] = []
    spectral: list[dict[str, Any]] = []
    for point, found in answers:
        rows.append(row(plan, point, found))
        if plan.spectra:
            spectral += spectral_rows(plan, point, found)
    return Sweep(pd.DataFrame(rows), pd.DataFrame(spectral) if plan.spectra else None)
