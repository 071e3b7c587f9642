"""The sample and the near field in a stack file."""

from collections.abc import Mapping
from dataclasses import fields
from pathlib import Path
from typing import Any

import numpy as np

from optics.errors import InputError
from optics.faults import Faults, found, quoted
from optics.media.sheet import decode, parse_sheet, read_bytes
from optics.sample import PLACE, Amount, NearField, PerWavelength, Sample
from optics.stackfile.keys import Keys

NEAR_FIELD = "emission: near_field"
NEAR_FIELD_KEYS = ("stand_off_nm", "to_index")
FIELDS = tuple(field.name for field in fields(Sample))
SAMPLE_KEYS = ("to_edge_mm", "diameter_mm", *FIELDS[1:])
TABLES = ("guided_scatter_per_cm", "recycling_share")
AMOUNT = 'a number, a table { file = "rows.csv" }, or rows { wavelength_nm = [...], values = [...] }'


def sample_from(table: Mapping[str, Any], *, home: Path) -> Sample:
    """Return the sample that the table ``[sample]`` describes; files start at `home`."""
    faults = Faults(PLACE)
    keys = Keys(table, faults, SAMPLE_KEYS)
    parts = {key: keys.get(key) for key in FIELDS if key in keys.given}
    if "diameter_mm" in keys.given:
        if "to_edge_mm" in keys.given:
            faults.add("to_edge_mm", "found to_edge_mm and diameter_mm, expected one of them")
        diameter = faults.number("diameter_mm", keys.get("diameter_mm"), unit="mm", at_least=0, example=25)
        parts["to_edge_mm"] = diameter / 2.0 if diameter >= 0 else 1.0
    for key in TABLES:
        if key in parts and isinstance(parts[key], Mapping):
            spec = parts.pop(key)
            with faults.taking_over():
                parts[key] = _amount(key, spec, home)
    made = Sample()
    with faults.taking_over():
        made = Sample(**parts)
    faults.settle()
    return made


def near_field_from(spec: Any) -> NearField:
    """Return what the key ``near_field`` of ``[emission]`` describes."""
    if isinstance(spec, NearField):
        return spec
    example = "expected a table, for example { stand_off_nm = 5, to_index = 4 }"
    if not isinstance(spec, Mapping):
        raise InputError(f"{NEAR_FIELD}: found {found(spec)}, {example}")
    faults = Faults(NEAR_FIELD)
    keys = Keys(spec, faults, NEAR_FIELD_KEYS)
    stand_off = keys.need("stand_off_nm", "the distance from a face within which births are left out, in nm")
    top = keys.need("to_index", "where the integral is cut off, as an index, for example 4")
    made = NearField(stand_off_nm=1.0, to_index=1.0)
    with faults.taking_over():
        made = NearField(stand_off_nm=1.0 if stand_off is None else stand_off, to_index=1.0 if top is None else top)
    faults.settle()
    return made


def _amount(key: str, spec: Mapping[str, Any], home: Path) -> Amount:
    """Return a number per wavelength from a file or from rows."""
    faults = Faults(f"{PLACE}: {key}")
    keys = Keys(spec, faults, ("file",) if "file" in spec else ("wavelength_nm", "values"))
    made: Amount = 0.0
    if "file" in spec:
        with faults.collecting("file"):
            made = _rows(keys.get("file"), key, home)
    else:
        wavelength = keys.need("wavelength_nm", AMOUNT)
        values = keys.need("values", AMOUNT)
        if wavelength is not None and values is not None:
            with faults.collecting():
                made = PerWavelength(wavelength_nm=wavelength, values=values)
    faults.settle()
    return made


def _rows(name: Any, key: str, home: Path) -> PerWavelength:
    if not isinstance(name, str) or not name:
        raise InputError(f'found {found(name)}, expected the name of a table, for example "rows.csv"')
    wanted = ("wavelength_nm", key)

    def header_faults(header: tuple[str, ...]) -> list[str]:
        if sorted(header) == sorted(wanted):
            return []
        return [f"found columns {', '.join(map(quoted, header))}, expected {' and '.join(wanted)}"]

    content = read_bytes(home / name, place=name)
    sheet = parse_sheet(decode(content, place=name), place=name, header_faults=header_faults)
    order = np.argsort(sheet.column("wavelength_nm"), kind="stable")
    return PerWavelength(wavelength_nm=sheet.column("wavelength_nm")[order], values=sheet.column(key)[order])
