"""The files of a sweep, and what the screen shows of it."""

import csv
from collections.abc import Iterable, Iterator, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any, TextIO

from optics.output.folder import writing
from optics.output.inputs import STACK_FILE, copy_inputs, inputs_of, settings_of
from optics.output.record import RECORD, write_record
from optics.output.report import stack_line
from optics.output.tables import write_summary
from optics.study.answer import SPECTRAL, Answer
from optics.study.best import Best
from optics.study.keypath import value_at
from optics.study.sweep import Plan, row, spectral_rows

if TYPE_CHECKING:
    from matplotlib.figure import Figure
    from pandas import DataFrame

SWEEP = "sweep.csv"
SPECTRA = "spectra.csv"
SUMMARY = "summary.json"
FIGURES = ("sweep.svg", "sweep.png")
EXACT = "%.12g"  # a sweep is compared with separate solves to 1e-10


def write_sweep(
    plan: Plan,
    answers: Iterable[tuple[int, Answer]],
    folder: Path,
    *,
    stack_file: Path,
    goals: Sequence[Any] = (),
    replace: bool = False,
) -> tuple["DataFrame", list[Best]]:
    """Write the folder of a sweep, whole or not at all, and return its table and the best points.

    Answers are taken one at a time, in the order of the points: those of every wavelength are never held together.
    """
    import pandas as pd

    from optics.study.best import best

    with writing(folder, replace=replace) as part:
        rows = list(_written(plan, answers, part))
        table = pd.DataFrame(rows)
        found = [best(plan.points, table, goal) for goal in goals]
        write_summary(summary(plan, table, found), part / SUMMARY)
        _draw(plan, table, found, part)
        taken = (SWEEP, SPECTRA, SUMMARY, *FIGURES, RECORD, STACK_FILE)
        copy_inputs(plan.stack, part, stack_file=stack_file, taken=taken)
        settings = settings_of(plan.stack) | {
            "varied": list(plan.points.keys),
            "points": len(plan.points),
            "spectra": plan.spectra,
        }
        write_record(part, command="sweep", inputs=inputs_of(plan.stack, stack_file), settings=settings)
    return table, found


def summary(plan: Plan, table: "DataFrame", found: Sequence[Best]) -> dict[str, Any]:
    """Return what was varied and what came of it, in plain values."""
    shares = [name for name in table.columns if name not in plan.points.keys and table[name].dtype == float]
    return {
        "title": plan.stack.title,
        "points": len(plan.points),
        "varied": {axis.key: list(axis.labels) for axis in plan.points.axes},
        "own": own_values(plan),
        "smallest": {name: float(table[name].min()) for name in shares},
        "largest": {name: float(table[name].max()) for name in shares},
        "best": [
            {
                "goal": str(each.goal),
                "point": each.point,
                "value": each.value,
                "at": each.values,
                "neighbours": each.neighbours.to_dict("records"),
                "within_0.005": each.holds,
            }
            for each in found
        ],
        "numerical_error": float(table["numerical_error"].max()),
        "largest_closure": float(table["largest_closure"].max()),
    }


def own_values(plan: Plan) -> dict[str, Any]:
    """Return what the stack itself has at the keys varied, as tables show it."""
    found = {key: value_at(plan.stack, key) for key in plan.points.keys}
    return {key: getattr(value, "name", value) for key, value in found.items()}


def report(plan: Plan, table: "DataFrame", found: Sequence[Best], *, folder: Path) -> str:
    """Return what to show of a sweep."""
    lines = [plan.stack.title] if plan.stack.title else []
    lines += [stack_line(plan.stack), f"{len(plan.points)} points of {', '.join(plan.points.keys)}", ""]
    lines.append(f"{'Share of photons born':<21}{'smallest':>12}{'largest':>12}")
    for name in ("trapped", "reabsorbed", "waveguided", "substrate", "cover", "free_below", "free_above", "elsewhere"):
        lines.append(f"{name.replace('_', ' '):<21}{table[name].min():>12.4f}{table[name].max():>12.4f}")
    for each in found:
        lines += ["", *_best(each)]
    lines += [
        "",
        f"Numerical error of the shares: {table['numerical_error'].max():.0e} (largest estimate; inputs not counted)",
    ]
    return "\n".join([*lines, "", f"Files: {folder}"])


def _best(found: Best) -> Iterator[str]:
    at = ", ".join(f"{key} = {_shown(value)}" for key, value in found.values.items())
    yield f"Best {found.goal}: {found.value:.4f} at point {found.point}: {at}"
    for near in found.neighbours.to_dict("records"):
        yield f"  one step to {near['key']} = {_shown(near['value'])}: worse by {near['worse_by']:.4f}"
    for key, (first, last) in found.holds.items():
        yield f"  stays within 0.005 for {key} from {first:g} to {last:g}"


def _shown(value: Any) -> str:
    return f"{value:g}" if isinstance(value, float) else str(value)


def _written(plan: Plan, answers: Iterable[tuple[int, Answer]], folder: Path) -> Iterator[dict[str, Any]]:
    """Write the tables a point at a time and yield the rows of the shorter one."""
    with (folder / SWEEP).open("w", encoding="utf-8", newline="") as file:
        table: Any = None
        spectra = _Spectra(plan, folder)
        with spectra:
            for point, found in answers:
                cells = row(plan, point, found)
                table = table or _header(file, list(cells))
                table.writerow(_cells(cells))
                spectra.write(point, found)
                yield cells


class _Spectra:
    """The table with a row a wavelength, where it is asked for."""

    def __init__(self, plan: Plan, folder: Path) -> None:
        self.plan = plan
        self.file = (folder / SPECTRA).open("w", encoding="utf-8", newline="") if plan.spectra else None
        self.table = _header(self.file, ["point", *plan.points.keys, *SPECTRAL]) if self.file else None

    def __enter__(self) -> None:
        return None

    def __exit__(self, *_: object) -> None:
        if self.file:
            self.file.close()

    def write(self, point: int, found: Answer) -> None:
        """Write the rows of a point."""
        if self.table:
            self.table.writerows(_cells(cells) for cells in spectral_rows(self.plan, point, found))


def _header(file: TextIO, names: list[str]) -> Any:
    table = csv.writer(file, lineterminator="\n")
    table.writerow(names)
    return table


def _cells(values: dict[str, Any]) -> list[Any]:
    return [EXACT % value if isinstance(value, float) else value for value in values.values()]


def _draw(plan: Plan, table: "DataFrame", found: Sequence[Best], folder: Path) -> None:
    from optics.output.figures import save
    from optics.output.sweepfigures import cases_figure, sweep_figure

    keys, own, title = list(plan.points.keys), own_values(plan), plan.stack.title
    figure: Figure | None
    if plan.points.cases:
        figure = cases_figure(table, keys, own=own, title=title)
    else:
        share = found[0].goal.column if found else None
        figure = sweep_figure(table, keys, own=own, title=title, share=share)
    if figure is not None:
        for name in FIGURES:
            save(figure, folder / name)
