"""Files and screen of transport in the plane and over the depth."""

import csv
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

from optics.arrays import Real
from optics.errors import InputError
from optics.output.folder import writing
from optics.output.inputs import STACK_FILE, copy_inputs, inputs_of, settings_of
from optics.output.numbers import plain
from optics.output.record import RECORD, write_record
from optics.output.report import stack_line
from optics.output.tables import write_summary, write_table

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from optics.stack import Stack
    from optics.transport.depth import InDepth
    from optics.transport.inplane import InPlane
    from optics.transport.receivers import Receivers

SUMMARY = "summary.json"


def write_inplane(
    found: "InPlane", folder: str | Path, *, stack_file: str | Path | None = None, replace: bool = False
) -> Path:
    """Write a result folder of `optics.inplane`, whole or not at all; see `optics.write_result`."""
    tables = {
        "kernel.csv": found.kernel,
        "kernel_by_wavelength.csv": found.by_wavelength,
        "guided_spectrum.csv": found.guided_spectrum,
        "compact.csv": found.compact,
        "exponentials.csv": found.exponentials,
    }
    if len(found.modes):
        tables["modes.csv"] = found.modes
    summary = {"model": found.model, "averages": found.averages, **_said(found)}
    from optics.output.transportfigures import plane_figure

    return _write(
        found.stack, Path(folder), "inplane", plane_figure(found), tables, summary, stack_file, replace=replace
    )


def write_indepth(
    found: "InDepth",
    folder: str | Path,
    *,
    by_wavelength: bool = False,
    stack_file: str | Path | None = None,
    replace: bool = False,
) -> Path:
    """Write a result folder of `optics.indepth`, whole or not at all; see `optics.write_result`."""
    from optics.output.transportfigures import depth_figure
    from optics.transport.depthtables import by_wavelength_table, escape_table, matrix_table

    tables = {"depth_ray.csv": matrix_table(found, found.ray), "escape.csv": escape_table(found)}
    summary: dict[str, Any] = {"edges_nm": found.edges_nm}
    for name, matrix in (("wave", found.wave), ("ray", found.ray)):
        if matrix is not None:
            summary[name] = {"scaled_by": matrix.scaled_by, "mended": matrix.mended}
    if found.wave is not None:
        tables = {"depth_wave.csv": matrix_table(found, found.wave), **tables}
    if by_wavelength:
        tables["depth_by_wavelength.csv"] = by_wavelength_table(found)
    summary |= _said(found)
    return _write(
        found.stack, Path(folder), "indepth", depth_figure(found), tables, summary, stack_file, replace=replace
    )


def write_receivers(
    found: "Receivers", folder: str | Path, *, stack_file: str | Path | None = None, replace: bool = False
) -> Path:
    """Write a result folder of `optics.receivers`, whole or not at all; see `optics.write_result`."""
    tables = {"receivers.csv": found.table, "receivers_by_wavelength.csv": found.by_wavelength}
    summary = {"models": found.models, **_said(found)}
    return _write(found.stack, Path(folder), "receivers", None, tables, summary, stack_file, replace=replace)


def _said(found: "InPlane | InDepth | Receivers") -> dict[str, Any]:
    return {"title": found.stack.title, "warnings": found.warnings, "assumptions": found.assumptions}


def _write(
    stack: "Stack",
    folder: Path,
    command: str,
    drawn: "Figure | None",
    tables: dict[str, Any],
    summary: dict[str, Any],
    stack_file: str | Path | None,
    *,
    replace: bool,
) -> Path:
    from optics.output.figures import save

    source = None if stack_file is None else Path(stack_file)
    figures = () if drawn is None else tuple(f"{command}.{kind}" for kind in ("svg", "png"))
    with writing(folder, replace=replace) as part:
        for name, table in tables.items():
            write_table(table, part / name)
        write_summary(summary, part / SUMMARY)
        if drawn is not None:
            for name in figures:
                save(drawn, part / name)
        copy_inputs(stack, part, stack_file=source, taken=(*tables, *figures, SUMMARY, RECORD, STACK_FILE))
        write_record(part, command=command, inputs=inputs_of(stack, source), settings=settings_of(stack))
    return folder


def read_mesh(path: Path) -> "Real":
    """Read edges of slices [nm] from a CSV file with one column, ``edge_nm``.

    Raises
    ------
    InputError
        When it is no such file.
    """
    try:
        with path.open(encoding="utf-8-sig", newline="") as file:
            rows = [row for row in csv.reader(file) if any(cell.strip() for cell in row)]
    except (OSError, UnicodeDecodeError) as error:
        raise InputError(f"{path}: cannot be read ({getattr(error, 'strerror', None) or error})") from None
    if not rows or [cell.strip() for cell in rows[0]] != ["edge_nm"]:
        found = ",".join(rows[0]) if rows else "nothing"
        raise InputError(f"{path}: found {found[:60]!r} as the header, expected the one column edge_nm")
    edges = []
    for number, row in enumerate(rows[1:], start=2):
        try:
            (cell,) = row
            edges.append(float(cell))
        except ValueError:
            raise InputError(f"{path}: row {number}: found {','.join(row)[:60]!r}, expected a number in nm") from None
    return np.array(edges)


def inplane_report(found: "InPlane", folder: Path) -> str:
    """Return what the screen shows of transport in the plane."""
    said = found.averages
    lines = [
        *_heading(found),
        f"Taken back by the film: {said['taken_back']:.4f} of the photons born ({found.model} optics)",
        f"  by rays {said['taken_back_rays']:.4f}, guided {said['taken_back_guided']:.4f}",
        f"  and of light held in plates, were the sample endless, {said['taken_back_held']:.4f} more",
        f"  bound light in no mode: {said['bound_in_no_mode']:+.4f}",
        f"Distance: mean {plain(said['mean_um'])} um, median {plain(said['median_um'])} um, 90 % within "
        f"{plain(said['within_90_um'])} um, 99 % within {plain(said['within_99_um'])} um",
    ]
    if "absorption_in_plane_per_cm" in said:
        lines.append(
            f"Guided light: absorption in the plane {plain(said['absorption_in_plane_per_cm'])} /cm, "
            f"group velocity {plain(said['group_velocity_um_per_ps'])} um/ps, "
            f"absorption rate {plain(said['absorption_rate_per_ps'])} /ps"
        )
    if "diffusion_miss" in said:
        lines.append(
            f"Diffusion picture: {plain(said['diffusivity_cm2_per_s'])} cm2/s; off the kernel by up to "
            f"{said['diffusion_miss']:.2f} of the guided share: "
            + ("take the kernel" if said["diffusion_miss"] > 0.05 else "it will do")
        )
    return "\n".join([*lines, "", f"Files: {folder}"])


def indepth_report(found: "InDepth", folder: Path) -> str:
    """Return what the screen shows of transport over the depth."""
    lines = [*_heading(found), f"{len(found.edges_nm) - 1} slices of {found.stack.film.name}"]
    lines.append(f"{'Born in the slice':<24}{'upper face':>12}{'middle':>12}{'lower face':>12}")
    for name, matrix in (("wave", found.wave), ("ray", found.ray)):
        if matrix is not None:
            rows = (0, len(matrix.matrix) // 2, len(matrix.matrix) - 1)
            back = "".join(f"{matrix.matrix[row].sum():>12.4f}" for row in rows)
            own = "".join(f"{matrix.matrix[row, row]:>12.4f}" for row in rows)
            lines += [f"{name}: taken back".ljust(24) + back, f"{name}: in the same slice".ljust(24) + own]
    return "\n".join([*lines, "", f"Files: {folder}"])


def receivers_report(found: "Receivers", folder: Path) -> str:
    """Return what the screen shows of several receivers: a column a source, a row an end."""
    table = found.table.set_index("source")
    if len(table) == 2:
        table = table.iloc[:1]  # one source is all there is
    wide = max(12, *(len(str(name)) + 2 for name in table.index))
    lines = [
        *_heading(found),
        "Share of photons born in".ljust(26) + "".join(f"{name:>{wide}}" for name in table.index),
    ]
    for column in table.columns:
        values = table[column].to_numpy()
        if column in ("births_share", "rate_factor") or values.any():
            name = column.replace("to:", "taken by ").replace("_", " ")
            lines.append(name.ljust(26) + "".join(f"{value:>{wide}.4f}" for value in values))
    return "\n".join([*lines, "", f"Files: {folder}"])


def _heading(found: "InPlane | InDepth | Receivers") -> list[str]:
    lines = [found.stack.title] if found.stack.title else []
    lines += [stack_line(found.stack), ""]
    lines += [f"Warning: {line}" for line in found.warnings]
    return lines
