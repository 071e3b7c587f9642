"""Where births are and what collects light, in a stack file."""

import hashlib
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import numpy as np

from optics.arrays import Real
from optics.collection import PLACE as COLLECTION
from optics.collection import Collection
from optics.depth import EXAMPLE, PLACE, Decay, Depth, DepthTable, Pump, Sheet
from optics.errors import InputError
from optics.faults import Faults, found, quoted
from optics.media.sheet import decode, parse_sheet, read_bytes
from optics.stackfile.keys import Keys
from optics.units import nm_from_um

SIDE = 'the side, "above" or "below"'
DEPTHS = ("depth_nm", "depth_um")
BIRTHS = "births"
PUMP_KEYS, DECAY_KEYS, SHEET_KEYS = ("pump_nm", "side", "births"), ("decay_nm", "side"), ("at_nm",)
TABLE_KEYS, ROW_KEYS = ("table",), ("depth_nm", "births")
VALID = ("pump_nm", "decay_nm", "at_nm", "table", "depth_nm")  # each of them starts a kind


def depth_from(spec: Any, *, home: Path) -> Depth:
    """Return the depth that the key ``depth`` describes; files start at `home`."""
    if isinstance(spec, Pump | Decay | Sheet | DepthTable) or spec == "uniform":
        return spec  # type: ignore[no-any-return]  # what it is has just been looked at
    if not isinstance(spec, Mapping):
        raise InputError(f"{PLACE}: found {found(spec)}, {EXAMPLE}")
    kinds = [key for key in VALID if spec.get(key) is not None]
    if len(kinds) != 1:
        some = " and ".join(kinds) if kinds else found(spec)
        raise InputError(f"{PLACE}: found {some}, {EXAMPLE}")
    faults = Faults(PLACE)
    made: Depth = "uniform"
    with faults.taking_over():
        made = _kind(kinds[0], spec, faults, home)
    faults.settle()
    return made


def _kind(kind: str, spec: Mapping[str, Any], faults: Faults, home: Path) -> Depth:
    if kind == "at_nm":
        return Sheet(at_nm=Keys(spec, faults, SHEET_KEYS).get("at_nm"))
    if kind == "table":
        return _table(Keys(spec, faults, TABLE_KEYS).get("table"), home)
    if kind == "depth_nm":
        rows = Keys(spec, faults, ROW_KEYS)
        return DepthTable(depth_nm=rows.get("depth_nm"), births=rows.need("births", "a list, one for each depth_nm"))
    keys = Keys(spec, faults, PUMP_KEYS if kind == "pump_nm" else DECAY_KEYS)
    side: Any = keys.need("side", SIDE) or "above"  # stands in where it is missing
    if kind == "decay_nm":
        return Decay(decay_nm=keys.get("decay_nm"), side=side)
    return Pump(pump_nm=keys.get("pump_nm"), side=side, births=keys.get("births", "linear"))


def _table(name: Any, home: Path) -> DepthTable:
    if not isinstance(name, str) or not name:
        raise InputError(f'{PLACE}: table: found {found(name)}, expected the name of a table, such as "profile.csv"')
    path = home / name
    faults = Faults(PLACE)
    with faults.collecting("table"):
        depth, births, sha256 = read_profile(path, place=name)
        return DepthTable(depth_nm=depth, births=births, path=str(path.resolve()), sha256=sha256)
    raise InputError(faults.lines)


def read_profile(path: Path, *, place: str) -> tuple[Real, Real, str]:
    """Read births against depth.

    Parameters
    ----------
    path
        A CSV file with the columns ``depth_nm`` or ``depth_um``, below the film's upper face, and ``births``.
    place
        What messages call the file.

    Returns
    -------
    depth_nm, births, sha256
        Ascending depths [nm], births in the file's unit, and the hash of the file.
    """
    content = read_bytes(path, place=place)
    sheet = parse_sheet(decode(content, place=place), place=place, header_faults=_header_faults)
    axis = next(name for name in DEPTHS if name in sheet.columns)
    depth = sheet.column(axis) if axis == "depth_nm" else nm_from_um(sheet.column(axis))
    order = np.argsort(depth, kind="stable")
    return depth[order], sheet.column(BIRTHS)[order], hashlib.sha256(content).hexdigest()


def collection_from(table: Mapping[str, Any]) -> Collection:
    """Return the aperture that the table ``[collection]`` describes."""
    faults = Faults(COLLECTION)
    keys = Keys(table, faults, ("na", "side"))
    na = keys.need("na", "the numerical aperture, for example 0.9")
    side = keys.need("side", SIDE)
    made = Collection(na=0.5, side="above")  # stands in where something is missing
    with faults.taking_over():
        made = Collection(na=made.na if na is None else na, side=made.side if side is None else side)
    faults.settle()
    return made


def _header_faults(header: tuple[str, ...]) -> list[str]:
    expected = "depth_nm or depth_um, and births"
    faults = [
        f"column {quoted(name)} is not known, expected {expected}" for name in header if name not in (*DEPTHS, BIRTHS)
    ]
    given = [name for name in header if name in DEPTHS]
    if len(given) > 1:
        faults.append(f"found columns {' and '.join(given)}, expected one of them")
    if (not given or BIRTHS not in header) and not faults:
        faults.append(f"found {', '.join(header)}, expected {expected}")
    return faults
