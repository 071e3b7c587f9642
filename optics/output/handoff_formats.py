"""The data of a bundle in one of five formats. The same numbers in each, to be read by what each is usually read by."""

import csv
import hashlib
import json
import math
import re
from collections.abc import Callable, Iterator, Sequence
from datetime import datetime
from importlib.util import find_spec
from pathlib import Path
from typing import Any, NamedTuple

import numpy as np

from optics.errors import InputError
from optics.output.handoff_columns import TITLES, Column, Number, Sheet
from optics.output.tables import write_json

DATA = "data"
PACKAGE = "datapackage.json"
NUMBERS = "numbers"
LONGEST_FIELD = 31  # of a name in a mat file of version 5
VARIABLE = "photonfate"
SHORTER = (
    ("reading_spectra", "reading_wl"),
    ("kernel_spectra", "kernel_wl"),
    ("depth_spectra", "depth_wl"),
    ("mode_absorbers", "mode_abs"),
    ("guided_spectrum", "guided"),
    ("taken_back_beyond", "back_beyond"),
    ("guided_mean_wavelength", "guided_mean"),
    ("absorption", "abs"),
    ("wavelength", "wl"),
    ("velocity", "vel"),
    ("radiative", "rad"),
    ("coefficient", "coef"),
    ("diffusivity", "diff"),
    ("diffusion", "diff"),
    ("reabsorbed", "reabs"),
    ("unfinished", "unfin"),
)
"""Tried in this order on names that are too long for a mat file."""


class Contents(NamedTuple):
    """What a bundle's data hold."""

    name: str
    title: str
    numbers: tuple[Number, ...]
    sheets: tuple[Sheet, ...]
    when: datetime


def write_data(contents: Contents, folder: Path, *, kind: str) -> None:
    """Write the data into a folder, in a format of ``FORMATS``."""
    FORMATS[kind].write(contents, folder)


def check_format(kind: str) -> None:
    """Refuse a format whose library is not installed, before any work.

    Raises
    ------
    InputError
        With the cure.
    """
    needed = FORMATS[kind].needs
    if needed and find_spec(needed) is None:
        raise InputError(
            f'--as {kind}: the library {needed} is not installed; pip install "photonfate[handoff]", or take csv, '
            "mat or json"
        )


def number_sheet(numbers: Sequence[Number]) -> Sheet:
    """Return the numbers as a table of name, value, unit and meaning."""
    columns = (
        Column("name", "", "name of the number"),
        Column("value", "", "the number, in its unit"),
        Column("unit", "", "its unit; 1 for shares and ratios"),
        Column("meaning", "", "what it is"),
    )
    name, unit, meaning = (
        np.array([getattr(each.column, part) for each in numbers], dtype=object) for part in ("name", "unit", "meaning")
    )
    values = np.array([each.value for each in numbers])
    return Sheet(NUMBERS, TITLES[NUMBERS], columns, (name, values, unit, meaning))


def _rows(sheet: Sheet, missing: Any) -> Iterator[list[Any]]:
    """Yield rows of plain Python values, ``missing`` in the place of what is not a number."""
    for row in zip(*(value.tolist() for value in sheet.values), strict=True):
        yield [missing if isinstance(cell, float) and math.isnan(cell) else cell for cell in row]


def _write_csv(contents: Contents, folder: Path) -> None:
    """Write a file a table and a Data Package (v1 of the open standard, frictionlessdata.io) that describes them."""
    data = folder / DATA
    data.mkdir()
    resources = []
    for sheet in (number_sheet(contents.numbers), *contents.sheets):
        path = data / f"{sheet.name}.csv"
        with path.open("w", encoding="utf-8", newline="") as file:
            writer = csv.writer(file, lineterminator="\n")
            writer.writerow([column.name for column in sheet.columns])
            writer.writerows(_rows(sheet, ""))  # a float is written with as many digits as tell it from others
        resources.append(_resource(sheet, path.read_bytes()))
    package = {
        "profile": "tabular-data-package",
        "name": contents.name,
        "title": contents.title,
        "created": contents.when.isoformat(timespec="seconds"),
        "resources": resources,
    }
    write_json(package, folder / PACKAGE)


def _resource(sheet: Sheet, content: bytes) -> dict[str, Any]:
    fields = [
        {"name": column.name, "type": _type(values), "description": column.meaning}
        | ({"unit": column.unit} if column.unit else {})
        for column, values in zip(sheet.columns, sheet.values, strict=True)
    ]
    return {
        "profile": "tabular-data-resource",
        "name": sheet.name,
        "title": sheet.title,
        "path": f"{DATA}/{sheet.name}.csv",
        "format": "csv",
        "mediatype": "text/csv",
        "encoding": "utf-8",
        "bytes": len(content),
        "hash": f"sha256:{hashlib.sha256(content).hexdigest()}",
        "schema": {"fields": fields, "missingValues": [""]},
    }


def _type(values: np.ndarray[Any, Any]) -> str:
    return {"f": "number", "i": "integer"}.get(values.dtype.kind, "string")


def _write_json(contents: Contents, folder: Path) -> None:
    """Write one file, tables column by column; what is not a number is null."""
    tables = {
        sheet.name: {
            "title": sheet.title,
            "columns": {
                column.name: {"unit": column.unit, "meaning": column.meaning, "values": _plain(values)}
                for column, values in zip(sheet.columns, sheet.values, strict=True)
            },
        }
        for sheet in contents.sheets
    }
    numbers = {
        each.column.name: {"value": each.value, "unit": each.column.unit, "meaning": each.column.meaning}
        for each in contents.numbers
    }
    numbers = {name: part | {"value": _or_none(part["value"])} for name, part in numbers.items()}
    content = {"title": contents.title, NUMBERS: numbers, "tables": tables}
    # neither lines nor spaces: with a number a line they would be most of the file
    text = json.dumps(content, ensure_ascii=False, allow_nan=False, separators=(",", ":"))
    (folder / "bundle.json").write_text(text + "\n", encoding="utf-8", newline="\n")


def _or_none(value: Any) -> Any:
    return None if isinstance(value, float) and math.isnan(value) else value


def _plain(values: np.ndarray[Any, Any]) -> list[Any]:
    return [_or_none(value) for value in values.tolist()]


def _write_xlsx(contents: Contents, folder: Path) -> None:
    """Write a workbook: a sheet a table, numbers as numbers, empty cells for what is not a number."""
    from openpyxl import Workbook

    book = Workbook(write_only=True)
    for sheet in (number_sheet(contents.numbers), *contents.sheets, _dictionary(contents.sheets)):
        page = book.create_sheet(sheet.name)
        page.freeze_panes = "A2"
        page.append([column.name for column in sheet.columns])
        for row in _rows(sheet, None):
            page.append([_cell(page, value) for value in row])
    book.properties.title = contents.title
    book.properties.created = contents.when.replace(tzinfo=None)
    book.save(folder / "bundle.xlsx")


def _cell(page: Any, value: Any) -> Any:
    """Return a cell that holds text as text: a name that begins with = would be taken for a formula."""
    if not isinstance(value, str) or not value.startswith("="):
        return value
    from openpyxl.cell import WriteOnlyCell

    cell = WriteOnlyCell(page, value)
    cell.data_type = "s"
    return cell


def _dictionary(sheets: Sequence[Sheet]) -> Sheet:
    """Return a table of all columns with unit and meaning."""
    rows = [(sheet.name, each.name, each.unit, each.meaning) for sheet in sheets for each in sheet.columns]
    heads = tuple(Column(name, "", "") for name in ("table", "column", "unit", "meaning"))
    values = tuple(np.array(part, dtype=object) for part in zip(*rows, strict=True))
    return Sheet("columns", "every column with its unit", heads, values)


def _write_mat(contents: Contents, folder: Path) -> None:
    """Write one flat struct: a field a column, and what each field is in four columns of text."""
    from scipy.io import savemat

    fields: dict[str, Any] = {"title": contents.title}
    named: list[tuple[str, str, str, str]] = []
    for each in contents.numbers:
        field = field_name(each.column.name, fields)
        fields[field] = each.value
        named.append((field, f"{NUMBERS}: {each.column.name}", each.column.unit, each.column.meaning))
    for sheet in contents.sheets:
        for column, values in zip(sheet.columns, sheet.values, strict=True):
            field = field_name(f"{sheet.name}_{column.name}", fields)
            fields[field] = values.astype(float) if values.dtype.kind == "i" else values
            named.append((field, f"{sheet.name}: {column.name}", column.unit, column.meaning))
    for name, part in zip(("field", "column", "unit", "meaning"), zip(*named, strict=True), strict=True):
        fields[f"fields_{name}"] = np.array(part, dtype=object)
    savemat(folder / "bundle.mat", {VARIABLE: fields}, format="5", do_compression=True, oned_as="column")


def field_name(name: str, taken: Any) -> str:
    """Return a name for a mat field: letters, digits and underscores, 31 at most, not ``taken``."""
    field = re.sub(r"\W", "_", name, flags=re.ASCII)
    for long, short in SHORTER:
        if len(field) > LONGEST_FIELD:
            field = field.replace(long, short)
    field = field[:LONGEST_FIELD]
    plain, number = field, 2
    while field in taken:
        field, number = f"{plain[: LONGEST_FIELD - len(str(number)) - 1]}_{number}", number + 1
    return field


def _write_hdf5(contents: Contents, folder: Path) -> None:
    """Write a group a table, a dataset a column, with unit and meaning as attributes."""
    import h5py

    with h5py.File(folder / "bundle.h5", "w") as file:
        file.attrs["title"] = contents.title
        group = file.create_group(NUMBERS)
        for each in contents.numbers:
            _describe(group.create_dataset(each.column.name, data=each.value), each.column)
        for sheet in contents.sheets:
            group = file.create_group(sheet.name)
            group.attrs["title"] = sheet.title
            group.attrs["columns"] = np.array([column.name for column in sheet.columns], dtype=h5py.string_dtype())
            for column, values in zip(sheet.columns, sheet.values, strict=True):
                kind = h5py.string_dtype() if values.dtype == object else values.dtype
                squeeze = {"compression": "gzip", "shuffle": True} if len(values) > 100 else {}  # small ones grow by it
                _describe(group.create_dataset(column.name, data=values, dtype=kind, **squeeze), column)


def _describe(dataset: Any, column: Column) -> None:
    dataset.attrs["unit"] = column.unit
    dataset.attrs["meaning"] = column.meaning


class Format(NamedTuple):
    """A format: how it is written, the library that takes, and the files it makes."""

    write: Callable[[Contents, Path], None]
    needs: str
    files: tuple[str, ...]


FORMATS = {
    "csv": Format(_write_csv, "", (DATA, PACKAGE)),
    "xlsx": Format(_write_xlsx, "openpyxl", ("bundle.xlsx",)),
    "mat": Format(_write_mat, "", ("bundle.mat",)),
    "json": Format(_write_json, "", ("bundle.json",)),
    "hdf5": Format(_write_hdf5, "h5py", ("bundle.h5",)),
}
