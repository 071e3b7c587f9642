"""The files of one solved stack."""

import json
from dataclasses import asdict
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from optics.output.folder import writing
from optics.output.inputs import STACK_FILE, copy_inputs, inputs_of, settings_of
from optics.output.numbers import decimals_for
from optics.output.readings import ENDS_CSV, READINGS_CSV, readings_table, sample_summary
from optics.output.record import RECORD, write_record
from optics.output.tables import write_summary, write_table

if TYPE_CHECKING:
    from optics.fate.solve import Result
    from optics.study.inputs import InputUncertainty

SUFFIXES = (".svg", ".png")
SUMMARY = "summary.json"
INPUTS = "inputs.csv"


def result_folder(stack_file: Path) -> Path:
    """Return where the result of a stack file goes when nothing else is said: ``<stack>-result`` beside it."""
    return stack_file.with_name(f"{stack_file.stem}-result")


def averages_on_file(folder: Path) -> dict[str, float] | None:
    """Return the averages that a result folder holds, None when there is none that can be read."""
    try:
        found = json.loads((folder / SUMMARY).read_text(encoding="utf-8"))["averages"]
        return {str(name): float(value) for name, value in found.items() if value is not None}
    except (OSError, ValueError, KeyError, TypeError, AttributeError):
        return None


def write_result(
    result: "Result",
    folder: str | Path,
    *,
    stack_file: str | Path | None = None,
    replace: bool = False,
    inputs: "InputUncertainty | None" = None,
) -> Path:
    """Write a result folder, whole or not at all.

    Parameters
    ----------
    result
        What `optics.solve` returned.
    folder
        The folder to write. One that this tool wrote and nobody touched since is replaced.
    stack_file
        Where the stack was read from, to be copied; None writes the stack anew.
    replace
        Whether to replace any other folder too.
    inputs
        What the answer owes to its inputs, where that is known.

    Returns
    -------
    Path
        The folder.

    Raises
    ------
    InputError
        When the folder is to be kept, or cannot be written.
    """
    source = None if stack_file is None else Path(stack_file)
    with writing(Path(folder), replace=replace) as part:
        tables = _tables(result)
        for name, table in tables.items():
            write_table(table, part / name)
        if inputs is not None:
            write_table(inputs.by_input, part / INPUTS)
        write_summary(summary(result, inputs), part / SUMMARY)
        figures = _draw(result, part)
        taken = (*tables, *figures, INPUTS, SUMMARY, RECORD, STACK_FILE)
        copy_inputs(result.stack, part, stack_file=source, taken=taken)
        made_from = inputs_of(result.stack, source) | {"measured": _measured(result)}
        write_record(part, command="solve", inputs=made_from, settings=settings_of(result.stack))
    return Path(folder)


def summary(result: "Result", inputs: "InputUncertainty | None" = None) -> dict[str, Any]:
    """Return the averages and what to think of them, in plain values."""
    return {
        "title": result.stack.title,
        "averages": result.averages,
        "ray_averages": result.ray_averages,
        "wave_minus_ray": result.wave_minus_ray,
        "input_uncertainty": None if inputs is None else _inputs(inputs),
        "advised_model": result.advised_model,
        "advised_because": result.advice,
        "numerical_error": result.numerical_error,
        "numerical_error_by_share": result.error_by_share,
        "largest_closure": largest_closure(result),
        "depth_averages": result.depth_averages,
        "pump": _pump(result),
        "radiation": None if result.radiation is None else asdict(result.radiation),
        "measured": _measured(result),
        "moved_by_tail": result.moved_by_tail,
        "sample": None if result.sample is None else sample_summary(result.sample),
        "warnings": result.warnings,
        "assumptions": result.assumptions,
    }


def _inputs(inputs: "InputUncertainty") -> dict[str, Any]:
    key, share = inputs.most_sensitive
    return {
        "by_share": inputs.by_share,
        "most_sensitive": {"input": key, "share": share},
        "inputs": [
            {"key": each.key, "value": each.value, "sd": each.sd, "shape": each.shape, "stated": each.stated}
            for each in inputs.inputs
        ],
    }


def largest_closure(result: "Result") -> float:
    """Return the closure of the wavelength where it is worst (of ray optics when there is no other)."""
    table = result.ray_table if result.table is None else result.table
    return float(np.abs(table["closure"]).max())


def _pump(result: "Result") -> dict[str, Any] | None:
    if result.pump is None:
        return None
    names = ("absorbed", "carriers_per_cm3", "peak_carriers_per_cm3")
    return {"fluence_uJ_per_cm2": 1.0} | {name: getattr(result.pump, name) for name in names}


def _measured(result: "Result") -> dict[str, Any] | None:
    measured = result.measured
    if measured is None:
        return None
    return {name: getattr(measured, name) for name in ("curve", "misfit", "path", "sha256")}


def _tables(result: "Result") -> dict[str, Any]:
    wave = {} if result.table is None else {"outcomes.csv": result.table}
    asked = {"pattern.csv": result.pattern, "depth.csv": result.depth}
    if result.sample is not None:
        asked |= {READINGS_CSV: readings_table(result.sample), ENDS_CSV: result.sample.ends}
    given = {name: table for name, table in asked.items() if table is not None}
    return (
        wave
        | given
        | {
            "spectra.csv": result.spectra,
            "outcomes_ray.csv": result.ray_table,
            "where.csv": result.where,
            "reflection.csv": result.reflection,
            "index.csv": result.index,
        }
    )


def _draw(result: "Result", folder: Path) -> tuple[str, ...]:
    """Draw everything; return the names of the files."""
    from optics.fate.outside import aperture_deg
    from optics.output.figures import births_figure, save
    from optics.output.lightfigures import pattern_figure, spectra_figure

    decimals = min(3, decimals_for(result.numerical_error))
    tables = (result.table, result.ray_table)
    title = result.stack.title
    figures = {"births": births_figure(*tables, averages=result.averages, decimals=decimals, title=title)}
    if len(result.spectra) > 1:
        figures["spectra"] = spectra_figure(result.spectra, measured=result.measured, title=title)
    if result.pattern is not None and result.stack.collection is not None:
        side, na = result.stack.collection.side, result.stack.collection.na
        angle = aperture_deg(result.stack)
        figures["pattern"] = pattern_figure(result.pattern, side=side, aperture_deg=angle, na=na, title=title)
    names = {f"{name}{suffix}": figure for name, figure in figures.items() for suffix in SUFFIXES}
    for name, figure in names.items():
        save(figure, folder / name)
    return tuple(names)
