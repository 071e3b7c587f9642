"""The best point of a sweep with its neighbourhood, so that an optimum which a small slip destroys shows as such."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from optics.errors import InputError
from optics.fate.ledger import SHARES
from optics.faults import closest, is_number, quoted
from optics.study.axes import Points

if TYPE_CHECKING:
    import pandas as pd

KINDS = ("max", "min")
NAMES = (*SHARES, "rate_factor")
HOLDS_WITHIN = 0.005
"""A neighbourhood that stays within this of the best share is called flat."""


@dataclass(frozen=True)
class Goal:
    """What is looked for: the largest or smallest value of a column."""

    kind: str
    column: str

    def __str__(self) -> str:
        return f"{self.kind}:{self.column}"


@dataclass(frozen=True)
class Best:
    """The best point.

    Attributes
    ----------
    goal
        What was looked for.
    point, value
        The point and what it reaches.
    values
        Its values by key path.
    neighbours
        A row a neighbour: key, value there, the column, and how much worse it is; one step along each axis.
    holds
        By numeric key path, the range around the best point, others kept, within `HOLDS_WITHIN` of it.
    """

    goal: Goal
    point: int
    value: float
    values: dict[str, object]
    neighbours: pd.DataFrame
    holds: dict[str, tuple[float, float]]


def goal(text: str) -> Goal:
    """Return the goal that a text such as ``max:free_above`` names."""
    kind, _, column = text.partition(":")
    if kind not in KINDS or column not in NAMES:
        near = closest(column, NAMES) if column else None
        hint = f"; did you mean {near}?" if near and near != column else f"; columns: {', '.join(NAMES)}"
        raise InputError(
            f"best: found {quoted(text)}, expected max:COLUMN or min:COLUMN, for example max:free_above{hint}"
        )
    return Goal(kind, column)


def best(points: Points, table: pd.DataFrame, wanted: Goal) -> Best:
    """Return the best point of a sweep's table, in which every point has its row in order."""
    import pandas as pd

    values = table[wanted.column].to_numpy(dtype=float)
    sign = 1.0 if wanted.kind == "max" else -1.0
    top = int(np.argmax(sign * values))
    rows = [
        {
            "key": key,
            "value": points.labels(near)[key],
            wanted.column: values[near],
            "worse_by": sign * (values[top] - values[near]),
        }
        for key, near in points.neighbours(top)
    ]
    columns = ["key", "value", wanted.column, "worse_by"]
    return Best(
        wanted,
        top,
        float(values[top]),
        points.labels(top),
        pd.DataFrame(rows, columns=columns),
        _holds(points, values, top),
    )


def _holds(points: Points, values: np.ndarray, top: int) -> dict[str, tuple[float, float]]:
    """Return how far each numeric axis can move, the others kept, before the value moves by `HOLDS_WITHIN`."""
    out: dict[str, tuple[float, float]] = {}
    if points.cases:
        return out
    stride = 1
    for axis, place in reversed(list(zip(points.axes, points.places(top), strict=True))):
        line = values[top + (np.arange(len(axis.values)) - place) * stride]
        stride *= len(axis.values)
        if not all(is_number(each) for each in axis.labels):
            continue
        far = np.abs(line - line[place]) > HOLDS_WITHIN
        first = int(np.flatnonzero(far[:place])[-1]) + 1 if far[:place].any() else 0
        last = place + int(np.argmax(far[place:])) - 1 if far[place:].any() else len(line) - 1
        ends = sorted((float(axis.labels[first]), float(axis.labels[last])))
        out[axis.key] = (ends[0], ends[1])
    return out
