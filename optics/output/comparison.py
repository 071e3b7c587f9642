"""The files of a comparison, and what the screen shows of it."""

from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import TYPE_CHECKING, Any

from optics.output.folder import writing
from optics.output.inputs import inputs_of, settings_of
from optics.output.record import write_record
from optics.output.report import ROWS, stack_line
from optics.output.tables import write_summary, write_table

if TYPE_CHECKING:
    from optics.study.compare import Comparison

SUMMARY = "summary.json"
SHOWN_CHANGES = 6  # lines of the "why" table on the screen, for each stack
WORTH_A_LINE = 0.05  # percentage points
ROUNDING = 1e-9  # percentage points that rounding alone may leave


def write_comparison(
    found: "Comparison", folder: Path, *, stack_files: Sequence[Path], title: str = "", replace: bool = False
) -> Path:
    """Write the folder of a comparison, whole or not at all."""
    from optics.output.figures import save
    from optics.output.studyfigures import difference_figure, ladder_figure

    with writing(folder, replace=replace) as part:
        write_table(found.shares.reset_index(), part / "shares.csv")
        write_table(found.differences.reset_index(), part / "differences.csv")
        write_table(found.by_wavelength, part / "differences_by_wavelength.csv")
        write_table(found.why, part / "why.csv")
        write_summary(_summary(found), part / SUMMARY)
        for figure, name in (
            (ladder_figure(found.shares, title=title), "ladder"),
            (difference_figure(found.by_wavelength, title=title), "differences"),
        ):
            for suffix in ("svg", "png"):
                save(figure, part / f"{name}.{suffix}")
        inputs = {
            name: inputs_of(r.stack, file)
            for name, r, file in zip(found.names, found.results, stack_files, strict=True)
        }
        settings = {name: settings_of(r.stack) for name, r in zip(found.names, found.results, strict=True)}
        write_record(part, command="compare", inputs=inputs, settings=settings)
    return folder


def report(found: "Comparison", *, folder: Path | None = None) -> str:
    """Return what to show of a comparison."""
    lines = [f"{name}: {stack_line(result.stack)}" for name, result in zip(found.names, found.results, strict=True)]
    width = max(12, *(len(name) + 2 for name in found.names))
    first, *others = found.names
    lines += ["", f"{'Share of photons born':<21}" + "".join(f"{name:>{width}}" for name in found.names)]
    for share, name in ROWS:
        lines.append(f"{name:<21}" + "".join(f"{float(found.shares[each][share]):>{width}.4f}" for each in found.names))
    lines += [
        "",
        f"{f'Against {first}, points':<21}" + " " * (width * 1) + "".join(f"{name:>{width}}" for name in others),
    ]
    for share, name in ROWS:
        cells = "".join(f"{float(found.differences[each][share]):>+{width}.2f}" for each in others)
        lines.append(f"{name:<21}" + " " * width + cells)
    for name in others:
        lines += ["", *_why(found, name)]
    error = max(result.numerical_error for result in found.results)
    lines += ["", f"Numerical error of the shares: {error:.0e} (largest estimate; inputs not counted)"]
    warnings = [
        f"{name}: {line}" for name, result in zip(found.names, found.results, strict=True) for line in result.warnings
    ]
    lines += ["", "Warnings:", *(f"  - {line}" for line in warnings)] if warnings else []
    return "\n".join([*lines, *(["", f"Files: {folder}"] if folder else [])])


def _why(found: "Comparison", name: str) -> Iterator[str]:
    rows = found.why[found.why["stack"] == name]
    largest = float(rows["change_points"].abs().max()) if len(rows) else 0.0
    if largest < WORTH_A_LINE:
        same = max(largest, float(found.differences[name].abs().max())) < ROUNDING
        yield f"{name} differs in nothing." if same else f"{name}: nothing differs by {WORTH_A_LINE} points or more."
        return
    yield f"Why {name} differs (percentage points, largest first):"
    for row in rows[rows["change_points"].abs() >= WORTH_A_LINE].head(SHOWN_CHANGES).to_dict("records"):
        what = row["layer"] if row["zone"] == "out" else f"taken by {row['layer']}, {row['zone']} light"
        yield f"  {row['change_points']:+7.2f}  {what}"


def _summary(found: "Comparison") -> dict[str, Any]:
    return {
        "against": found.names[0],
        "averages": {name: result.averages for name, result in zip(found.names, found.results, strict=True)},
        "differences_points": {name: found.differences[name].to_dict() for name in found.names[1:]},
        "numerical_error": {
            name: result.numerical_error for name, result in zip(found.names, found.results, strict=True)
        },
        "wave_minus_ray": {
            name: result.wave_minus_ray for name, result in zip(found.names, found.results, strict=True)
        },
        "warnings": {name: result.warnings for name, result in zip(found.names, found.results, strict=True)},
    }
