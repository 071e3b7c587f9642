"""A bundle for other models: data in one format, a page to begin with, methods, and the stack to compute it again."""

import csv
import io
import re
from collections.abc import Iterator, Mapping, Sequence
from datetime import UTC, datetime
from pathlib import Path
from typing import TYPE_CHECKING

from optics.output.folder import writing
from optics.output.handoff_bands import bands_beside
from optics.output.handoff_columns import Sheet, numbers, sheet
from optics.output.handoff_formats import DATA, FORMATS, Contents, write_data
from optics.output.handoff_methods import methods_text, references_text
from optics.output.handoff_text import page, ten
from optics.output.inputs import STACK_FILE, copy_inputs, inputs_of, settings_of
from optics.output.record import RECORD, tool_version, write_record
from optics.output.report import stack_line

if TYPE_CHECKING:
    from pandas import DataFrame

    from optics.fate.solve import Result
    from optics.transport.handover import Handover

README = "README.txt"
METHODS = "methods.md"
REFERENCES = "references.bib"

LIMIT_BYTES = 5_000_000
"""Largest bundle unless all is asked for; the user's own tables come on top."""

ROOM_BYTES = LIMIT_BYTES * 9 // 10
"""What tables may take of it, counted as text."""

LARGE = ("mode_absorbers", "kernel_spectra", "depth_spectra")
"""Tables of a row a wavelength and something else: the first to go when room is short."""


def bundle_folder(stack_file: Path) -> Path:
    """Return where a bundle goes when nothing else is said: ``<stack>-handoff`` beside the stack file."""
    return stack_file.with_name(f"{stack_file.stem}-handoff")


def write_handoff(
    handed: "Handover",
    folder: str | Path,
    *,
    kind: str = "csv",
    stack_file: str | Path | None = None,
    full: bool = False,
    replace: bool = False,
) -> Path:
    """Write a bundle, whole or not at all.

    Parameters
    ----------
    handed
        What `optics.transport.handover.hand_over` returned.
    folder
        The folder to write. One that this tool wrote and nobody touched since is replaced.
    kind
        ``"csv"``, ``"xlsx"``, ``"mat"``, ``"json"`` or ``"hdf5"``.
    stack_file
        Where the stack was read from, to be copied; None writes the stack anew.
    full
        Whether tables are kept that make the bundle larger than ``LIMIT_BYTES``.
    replace
        Whether to replace any other folder too.

    Raises
    ------
    InputError
        When the folder is to be kept, or cannot be written.
    """
    result, stack = handed.result, handed.result.stack
    source = None if stack_file is None else Path(stack_file)
    bands = bands_beside(stack, source)
    sheets = [sheet(name, table) for name, table in _ordered(handed.tables, bands.tables)]
    kept, left_out = (sheets, {}) if full else fitting(sheets, room=ROOM_BYTES)
    title = stack.title or stack_line(stack)
    name, when = _slug(Path(folder).name), datetime.now(UTC)
    contents = Contents(name, title, numbers(handed.numbers), tuple(kept), when)
    warnings = (*handed.warnings, *bands.warnings)
    with writing(Path(folder), replace=replace) as part:
        write_data(contents, part, kind=kind)
        said = {"warnings": warnings, "assumptions": handed.assumptions}
        _write_texts(result, contents, part, kind=kind, left_out=left_out, **said)
        taken = (*FORMATS[kind].files, DATA, README, METHODS, REFERENCES, RECORD, STACK_FILE)
        copy_inputs(stack, part, stack_file=source, taken=taken)
        settings = settings_of(stack) | {"format": kind, "left_out": list(left_out)}
        write_record(part, command="handoff", inputs=inputs_of(stack, source), settings=settings)
    return Path(folder)


def _write_texts(
    result: "Result",
    contents: Contents,
    folder: Path,
    *,
    kind: str,
    warnings: Sequence[str],
    assumptions: Sequence[str],
    left_out: Mapping[str, int],
) -> None:
    version = tool_version()
    texts = {
        README: page(result, contents, kind=kind, warnings=warnings, left_out=left_out, version=version),
        METHODS: methods_text(result, assumptions=assumptions, version=version),
        REFERENCES: references_text(result),
    }
    for name, text in texts.items():
        (folder / name).write_text(text, encoding="utf-8", newline="\n")


def report(handed: "Handover", folder: Path, *, stack_file: Path | None = None) -> str:
    """Return what to show of a bundle: the numbers of its page, warnings, and where it is."""
    result = handed.result
    lines = [result.stack.title] if result.stack.title else []
    lines += [stack_line(result.stack), ""]
    advised, error = result.advised_model, result.numerical_error
    lines += ten(numbers(handed.numbers), advised=advised, numerical_error=error)
    warnings = (*handed.warnings, *bands_beside(result.stack, stack_file).warnings)
    lines += ["", "Warnings:", *(f"  - {line}" for line in warnings)] if warnings else []
    size = sum(path.stat().st_size for path in folder.rglob("*") if path.is_file())
    return "\n".join([*lines, "", f"Bundle: {folder} ({size / 1e6:.2f} MB); begin with {README} in it"])


def _ordered(tables: Mapping[str, "DataFrame"], bands: Mapping[str, "DataFrame"]) -> Iterator[tuple[str, "DataFrame"]]:
    """Yield all tables, those of bands before those that may not fit."""
    yield from ((name, table) for name, table in tables.items() if name not in LARGE)
    yield from bands.items()
    yield from ((name, table) for name, table in tables.items() if name in LARGE)


def fitting(sheets: Sequence[Sheet], *, room: int) -> tuple[list[Sheet], Mapping[str, int]]:
    """Return the sheets that fit, the most wanted first, and the sizes in bytes of those that do not."""
    kept, left_out = [], {}
    for each in sheets:
        size = text_bytes(each)
        if size <= room:
            kept.append(each)
            room -= size
        else:
            left_out[each.name] = size
    return kept, left_out


def text_bytes(sheet: Sheet) -> int:
    """Return the size of a sheet written as plain text, text in quotes [bytes]; no format takes more."""
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n", quoting=csv.QUOTE_NONNUMERIC)
    writer.writerows(zip(*(value.tolist() for value in sheet.values), strict=True))
    return len(text.getvalue().encode())


def _slug(name: str) -> str:
    """Return a name as Data Packages want it: small letters, digits, dots, dashes and underscores."""
    return re.sub(r"[^a-z0-9._-]+", "-", name.lower()).strip("-.") or "bundle"
