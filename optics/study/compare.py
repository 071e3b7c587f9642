"""Comparisons: stacks side by side, where each change comes from, and at which wavelengths."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from concurrent.futures import Executor
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from optics.errors import InputError
from optics.fate.ledger import ENDS, SHARES
from optics.fate.solve import Result, solve
from optics.stack import Stack
from optics.study.engine import Place, run

if TYPE_CHECKING:
    import pandas as pd

POINTS_PER_SHARE = 100.0  # differences are in percentage points
LEFT = ("substrate", "cover", "free_below", "free_above", "guided_unfinished")
"""Shares that no layer takes; the others are told apart by layer and zone."""


@dataclass(frozen=True)
class Comparison:
    """Stacks side by side; the first is what the others are measured against.

    Attributes
    ----------
    names
        What the stacks are called.
    results
        Each solved, as `optics.solve` solves it.
    shares
        A row a share (and the rate factor), a column a stack.
    differences
        Shares less those of the first, in percentage points; a column for every other stack.
    by_wavelength
        Tidy: stack, wavelength_nm, then a column a share, the difference to the first in percentage points.
    why
        Tidy: stack, zone, layer, the share there in the first and in this stack, and the change in percentage points.
        Rows of zone "out" are the ends that no layer takes. The changes of a stack add to zero.
    """

    names: tuple[str, ...]
    results: tuple[Result, ...]
    shares: pd.DataFrame
    differences: pd.DataFrame
    by_wavelength: pd.DataFrame
    why: pd.DataFrame


def compare(
    stacks: Mapping[str, Stack], *, workers: int = 1, cluster: str = "", executor: Executor | None = None
) -> Comparison:
    """Solve stacks and set them side by side.

    Parameters
    ----------
    stacks
        Two or more by name; all on the same wavelengths.
    workers, cluster, executor
        Where to work; see `optics.study.engine.Place`.

    Raises
    ------
    InputError
        When there are fewer than two, or their wavelengths differ.
    """
    check_comparable(stacks)
    names = tuple(stacks)
    solved: dict[int, Result] = {}
    packed = [stacks[name] for name in names]
    for places, answers in run(
        _work, lambda at: [packed[place] for place in at], range(len(names)), Place(workers, cluster, executor)
    ):
        solved.update(zip(places, answers, strict=True))
    return compared({name: solved[place] for place, name in enumerate(names)})


def check_comparable(stacks: Mapping[str, Stack]) -> None:
    """Refuse fewer than two stacks, and wavelengths that differ: nothing is interpolated."""
    if len(stacks) < 2:
        raise InputError(f"compare: found {len(stacks)} stack, expected two or more")
    first, *others = stacks
    grid = stacks[first].light.wavelengths_nm
    differing = [name for name in others if not np.array_equal(stacks[name].light.wavelengths_nm, grid)]
    if differing:
        raise InputError(
            f"{name}: light: the wavelengths differ from those of {first}; give both the same [light]"
            for name in differing
        )


def compared(results: Mapping[str, Result]) -> Comparison:
    """Return the comparison of solved stacks."""
    import pandas as pd

    first, *others = results
    shares = pd.DataFrame(
        {name: {key: result.averages[key] for key in (*SHARES, "rate_factor")} for name, result in results.items()}
    )
    shares.index.name = "share"
    ends = shares.loc[list(SHARES)]
    differences = POINTS_PER_SHARE * ends[others].sub(ends[first], axis=0)
    spectral = [_spectral(name, results[name], results[first]) for name in others]
    parts = {name: parts_of(result) for name, result in results.items()}
    why = [_why(name, parts[first], parts[name]) for name in others]
    return Comparison(
        tuple(results),
        tuple(results.values()),
        shares,
        differences,
        pd.concat(spectral, ignore_index=True),
        pd.concat(why, ignore_index=True),
    )


def parts_of(result: Result) -> dict[tuple[str, str], float]:
    """Return the averaged share of each layer in each zone and of the ends that no layer takes; they add to one."""
    table = result.ray_table if result.table is None else result.table
    weight = dict(zip(table["wavelength_nm"], table["birth_weight"], strict=True))
    taken = result.where.assign(part=result.where["share"] * result.where["wavelength_nm"].map(weight))
    parts: dict[tuple[str, str], float] = {}
    for zone, layer, part in zip(taken["zone"], taken["layer"], taken["part"], strict=True):
        parts[zone, layer] = parts.get((zone, layer), 0.0) + float(part)
    parts |= {("out", end.replace("_", " ")): result.averages[end] for end in LEFT if result.averages[end]}
    return parts


def _work(stacks: Sequence[Stack]) -> list[Any]:
    return [solve(stack) for stack in stacks]


def _spectral(name: str, result: Result, first: Result) -> pd.DataFrame:
    one, other = ((r.ray_table if r.table is None else r.table) for r in (first, result))
    columns = {end: POINTS_PER_SHARE * (other[end] - one[end]) for end in (*ENDS, "trapped")}
    import pandas as pd

    return pd.DataFrame({"stack": name, "wavelength_nm": one["wavelength_nm"], **columns})


def _why(name: str, first: dict[tuple[str, str], float], own: dict[tuple[str, str], float]) -> pd.DataFrame:
    import pandas as pd

    rows = [
        {"stack": name, "zone": key[0], "layer": key[1], "first": first.get(key, 0.0), "share": own.get(key, 0.0)}
        for key in dict.fromkeys((*first, *own))
    ]
    table = pd.DataFrame(rows)
    table["change_points"] = POINTS_PER_SHARE * (table["share"] - table["first"])
    return table.sort_values("change_points", key=lambda column: -column.abs(), kind="stable", ignore_index=True)
