"""What is shown of materials."""

import os
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

import numpy as np

from optics.errors import InputError
from optics.media.domain import range_text
from optics.media.material import Material

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from optics.media.checks import Fitness
    from optics.media.importing import Imported

FIGURE_KINDS = (".png", ".svg", ".pdf")


def material_list(materials: Sequence[Material]) -> str:
    """Return a line a material: name, range, title."""
    rows = [(each.name, range_text(each.range_nm), each.title) for each in materials]
    wide = [max(len(row[column]) for row in rows) for column in (0, 1)]
    return "\n".join(f"{name:<{wide[0]}}  {span:<{wide[1]}}  {title}" for name, span, title in rows)


def material_report(material: Material, wavelengths_nm: Sequence[float]) -> str:
    """Return what is known of a material.

    Parameters
    ----------
    material
        What to show.
    wavelengths_nm
        Wavelengths [nm] at which n and k are shown; none shows five over the range, if that has limits.

    Raises
    ------
    InputError
        For a wavelength outside the range.
    """
    facts = {
        "title": material.title,
        "range": range_text(material.range_nm),
        "source": material.source,
        "licence": material.licence,
        "caution": material.cautions,
        "sha256": material.sha256,
    }
    lines = [material.name, *(f"  {name}: {fact}" for name, fact in facts.items() if fact)]
    wavelengths = np.array(wavelengths_nm) if len(wavelengths_nm) else _survey(material)
    index = material.index(wavelengths)
    lines += ["", f"{'wavelength_nm':>13}{'n':>12}{'k':>14}"]
    lines += [f"{nm:>13.6g}{each.real:>12.6f}{each.imag:>14.4e}" for nm, each in zip(wavelengths, index, strict=True)]
    return "\n".join(lines)


def import_report(done: "Imported") -> str:
    """Return what was understood of an imported table, what was converted, and where its card is."""
    lines = ["Understood:", *(f"  - {sentence}" for sentence in done.table.understood)]
    if done.table.converted:
        lines += ["Converted:", *(f"  - {sentence}" for sentence in done.table.converted)]
    word = "Card" if done.written else "Nothing changed, the card is there already"
    lines += ["", f"{word}: {done.path}", f'In a stack file: material = "{done.material.name}"']
    return "\n".join(lines)


def fitness_report(found: "Fitness") -> str:
    """Return what was found in a table, a line each; what makes it unfit is marked."""
    lines = [f"{'!' if finding.fault else ' '} {finding.kind}: {finding.said}" for finding in found.findings]
    faults = sum(finding.fault for finding in found.findings)
    verdict = "fit" if not faults else f"unfit as it is, for {faults} reason{'s' if faults > 1 else ''} (marked !)"
    return "\n".join([f"{found.name}: {verdict}", *lines])


def check_figure_path(found: "Fitness", asked: str | None, *, beside: str) -> Path | None:
    """Return where a figure of a check goes, None when none is asked for, before anything is drawn."""
    if asked is None:
        return None
    path = Path(f"{found.name.replace('/', '-')}{beside}") if asked == beside else Path(asked)
    _check_figure(path)
    return path


def write_fitness_figure(found: "Fitness", path: Path) -> None:
    """Draw n, k and the absorption of a table with what was found into a new file, whole or not at all."""
    from optics.output.fitnessfigures import fitness_figure

    _write_figure(fitness_figure(found), path)


def write_material_figure(material: Material, path: Path) -> None:
    """Draw n and k into a new file, whole or not at all.

    Raises
    ------
    InputError
        When the suffix names no known format, the file exists, or it cannot be written.
    """
    _check_figure(path)
    from optics.output.figures import material_figure

    _write_figure(material_figure(material), path)


def _check_figure(path: Path) -> None:
    if path.suffix not in FIGURE_KINDS:
        raise InputError(f"{path}: found {path.suffix or 'no suffix'}, expected one of {', '.join(FIGURE_KINDS)}")
    if path.exists():
        raise InputError(f"{path}: exists and is kept; name another file")


def _write_figure(figure: "Figure", path: Path) -> None:
    from optics.output.figures import save

    part = path.with_name(f".{path.stem}.{os.getpid()}.part{path.suffix}")
    try:
        save(figure, part)
        part.rename(path)
    except OSError as error:
        raise InputError(f"{path}: cannot be written ({error.strerror or error})") from None
    finally:
        part.unlink(missing_ok=True)


def _survey(material: Material) -> np.ndarray[tuple[int], np.dtype[np.float64]]:
    first, last = material.range_nm
    return np.linspace(first, last, 5) if np.isfinite(last) else np.array([550.0])
