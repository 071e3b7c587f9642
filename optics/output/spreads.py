"""The files of a tolerance study, and what the screen shows of it."""

from collections.abc import Iterator
from pathlib import Path
from typing import TYPE_CHECKING, Any

from optics.output.folder import writing
from optics.output.inputs import STACK_FILE, copy_inputs, inputs_of, settings_of
from optics.output.record import RECORD, write_record
from optics.output.report import ROWS, stack_line
from optics.output.tables import write_summary, write_table
from optics.study.inputs import named

if TYPE_CHECKING:
    from optics.stack import Stack
    from optics.study.spread import Spread

SUMMARY = "summary.json"
TABLES = ("bands.csv", "bands_by_wavelength.csv", "indices.csv", "alternatives.csv")
FIGURES = ("bands.svg", "bands.png", "sensitivity.svg", "sensitivity.png")
WORTH_A_LINE = 0.01  # total index of an input that the screen names


def write_spread(
    found: "Spread", stack: "Stack", folder: Path, *, stack_file: Path, seed: int, replace: bool = False
) -> Path:
    """Write the folder of a tolerance study, whole or not at all."""
    with writing(folder, replace=replace) as part:
        tables = (found.bands.reset_index(), found.by_wavelength, found.indices, found.alternatives)
        for table, name in zip(tables, TABLES, strict=True):
            write_table(table, part / name)
        write_summary(summary(found, stack), part / SUMMARY)
        _draw(found, stack, part)
        copy_inputs(stack, part, stack_file=stack_file, taken=(*TABLES, *FIGURES, SUMMARY, RECORD, STACK_FILE))
        settings = settings_of(stack) | {"samples": found.samples, "seed": seed}
        write_record(part, command="tolerance", inputs=inputs_of(stack, stack_file), settings=settings)
    return folder


def summary(found: "Spread", stack: "Stack") -> dict[str, Any]:
    """Return the bands and what to think of them, in plain values."""
    own, spans = found.own, _spans(found)
    return {
        "title": stack.title,
        "samples": found.samples,
        "inputs": [
            {"key": i.key, "value": i.value, "sd": i.sd, "shape": i.shape, "stated": i.stated} for i in found.inputs
        ],
        "bands": found.bands.to_dict("index"),
        "total_indices": {
            share: dict(zip(rows["input"], rows["total"], strict=True))
            for share, rows in found.indices.groupby("share")
        },
        "span_over_alternative_tables": {share: list(span) for share, span in spans.items()},
        "convergence": found.convergence,
        "wave_minus_ray": {share: own[share] - own[f"ray_{share}"] for share, _ in ROWS}
        if own["model"] == "wave"
        else {},
        "numerical_error": own["numerical_error"],
    }


def report(found: "Spread", stack: "Stack", *, folder: Path | None = None) -> str:
    """Return what to show of a tolerance study."""
    solved = found.samples * (len(found.inputs) + 2)
    lines = [stack.title] if stack.title else []
    lines += [
        stack_line(stack),
        f"{found.samples} samples of {len(found.inputs)} inputs, {solved} stacks solved",
        "",
        "Inputs:",
    ]
    lines += [f"  - {each} ({each.shape})" for each in found.inputs]
    spans = _spans(found)
    own = found.own
    head = f"{'Share of photons born':<21}{'as given':>10}{'median':>10}{'68 %':>20}{'95 %':>20}"
    lines += [
        "",
        head + (f"{'wave - ray':>12}" if own["model"] == "wave" else "") + (f"{'other tables':>20}" if spans else ""),
    ]
    lines += [_row(found, share, name, spans) for share, name in ROWS]
    lines += ["", *_indices(found)]
    error = own["numerical_error"]
    lines += [
        "",
        f"Convergence: doubling the samples moved a band by {found.convergence['band']:.1e} at most, "
        f"an index by {found.convergence['index']:.1e}",
        f"Numerical error of the shares: {error:.0e} (largest estimate), apart from the bands",
    ]
    return "\n".join([*lines, *(["", f"Files: {folder}"] if folder else [])])


def _row(found: "Spread", share: str, name: str, spans: dict[str, tuple[float, float]]) -> str:
    band, own = found.bands.loc[share], found.own
    cells = f"{name:<21}{band['own']:>10.4f}{band['median']:>10.4f}"
    for low, high in (("low_68", "high_68"), ("low_95", "high_95")):
        cells += f"{f'{band[low]:.4f} to {band[high]:.4f}':>20}"
    cells += f"{own[share] - own[f'ray_{share}']:>+12.4f}" if own["model"] == "wave" else ""
    return cells + (f"{f'{spans[share][0]:.4f} to {spans[share][1]:.4f}':>20}" if spans else "")


def _spans(found: "Spread") -> dict[str, tuple[float, float]]:
    """Return the smallest and largest share over the stack's own and the alternative tables; empty without any."""
    if len(found.alternatives) < 2:
        return {}
    return {
        share: (float(found.alternatives[share].min()), float(found.alternatives[share].max())) for share, _ in ROWS
    }


def _indices(found: "Spread") -> Iterator[str]:
    yield "What spreads the shares (total index, in brackets first order):"
    for share in ("trapped", "substrate", "cover", "free_below", "free_above"):
        rows = found.indices[found.indices["share"] == share].sort_values("total", ascending=False)
        parts = [
            f"{named(row['input'])} {row['total']:.2f} ({row['first_order']:.2f})"
            for row in rows.to_dict("records")
            if row["total"] >= WORTH_A_LINE
        ]
        if parts:
            yield f"  {share.replace('_', ' ')}: {', '.join(parts)}"


def _draw(found: "Spread", stack: "Stack", folder: Path) -> None:
    from optics.output.figures import save
    from optics.output.studyfigures import bands_figure, sensitivity_figure

    figures = {
        "bands": bands_figure(found.by_wavelength, title=stack.title),
        "sensitivity": sensitivity_figure(
            found.indices.assign(input=found.indices["input"].map(named)), found.bands, title=stack.title
        ),
    }
    for name, figure in figures.items():
        for suffix in ("svg", "png"):
            save(figure, folder / f"{name}.{suffix}")
