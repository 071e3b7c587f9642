"""The files of a sample, and what the screen shows of it: ends of held and guided light, readings, yields."""

from collections.abc import Sequence
from dataclasses import asdict, fields
from pathlib import Path
from typing import TYPE_CHECKING

from optics.assumptions import assumptions
from optics.output.folder import writing
from optics.output.inputs import STACK_FILE, copy_inputs, inputs_of, settings_of
from optics.output.readings import ENDS_CSV, READINGS_CSV, readings_table, readings_text, sample_summary, yields_text
from optics.output.record import RECORD, write_record
from optics.output.report import heading, listed
from optics.output.tables import write_summary, write_table
from optics.sample import sample_notes

if TYPE_CHECKING:
    from pandas import DataFrame

    from optics.fate.implied import Given, Implied
    from optics.fate.sampled import Sampled

YIELDS_CSV = "yields.csv"
FIGURES = ("yields.svg", "yields.png")
SUMMARY = "summary.json"


def sample_report(
    sampled: "Sampled",
    rows: Sequence["Implied"],
    known: "Given | None",
    *,
    temperature_K: float,
    folder: Path | None = None,
) -> str:
    """Return what to show of a sample: the stack, what was assumed, ends, all readings, yields."""
    parts = [
        "\n".join(heading(sampled.stack)),
        listed("Assumed", (*assumptions(sampled.stack), *_defaults(sampled))),
        listed("Warnings", sampled.warnings),
        "\n".join(readings_text(sampled)),
        "\n".join(yields_text(rows, known, temperature_K=temperature_K)) if known is not None else "",
        f"Numerical error of held light: {sampled.error:.0e} (largest estimate)",
        f"Files: {folder}" if folder else "",
    ]
    return "\n\n".join(part for part in parts if part)


def _defaults(sampled: "Sampled") -> tuple[str, ...]:
    """Return what stands in for a sample that the stack does not have."""
    return () if sampled.stack.sample is not None else sample_notes(sampled.sample, asked=False)


def yields_table(rows: Sequence["Implied"], known: "Given") -> "DataFrame":
    """Return what a yield implies, a row a reading; no deviation is written where none was given."""
    import pandas as pd

    from optics.fate.yields import Yields

    blank = dict.fromkeys(field.name for field in fields(Yields))
    out = []
    for row in rows:
        values = {} if row.values is None else asdict(row.values)
        low, high = row.between
        told = {"sd": row.sd, "low": low, "high": high} if known.sd and values else {}
        tail = dict.fromkeys(("sd", "low", "high")) | told | {"largest_external": row.largest}
        out.append({"reading": row.reading.name} | blank | values | tail)
    return pd.DataFrame(out)


def write_yields(
    sampled: "Sampled",
    rows: Sequence["Implied"],
    known: "Given | None",
    folder: Path,
    *,
    stack_file: Path,
    reading: str,
    temperature_K: float,
    replace: bool = False,
) -> Path:
    """Write the folder of ``yields``, whole or not at all."""
    from optics.output.figures import save
    from optics.output.yieldfigures import yields_figure

    with writing(folder, replace=replace) as part:
        write_table(readings_table(sampled), part / READINGS_CSV)
        write_table(sampled.ends, part / ENDS_CSV)
        if rows and known is not None:
            write_table(yields_table(rows, known), part / YIELDS_CSV)
        asked = {"reading": reading, "temperature_K": temperature_K}
        given = {} if known is None else {known.kind: known.value, "sd": known.sd or None}
        write_summary({"title": sampled.stack.title} | sample_summary(sampled) | {"given": given}, part / SUMMARY)
        figure = yields_figure(sampled, rows, known, reading=reading)
        for name in FIGURES:
            save(figure, part / name)
        taken = (READINGS_CSV, ENDS_CSV, YIELDS_CSV, SUMMARY, *FIGURES, RECORD, STACK_FILE)
        copy_inputs(sampled.stack, part, stack_file=stack_file, taken=taken)
        settings = settings_of(sampled.stack) | asked | given
        write_record(part, command="yields", inputs=inputs_of(sampled.stack, stack_file), settings=settings)
    return folder
