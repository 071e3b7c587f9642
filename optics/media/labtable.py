"""Tables of n and k in the one strict form that cards use: CSV whose header names the units.

Columns ``n``, ``k`` and one of ``wavelength_nm``, ``wavelength_um``, ``energy_eV``, in any order, ascending or
descending; commas between cells, points in decimals, UTF-8; lines that start with # are comments.
"""

from collections.abc import Callable
from dataclasses import dataclass
from difflib import get_close_matches

import numpy as np
from numpy.typing import NDArray

from optics.errors import InputError
from optics.media.sheet import Sheet, parse_sheet, shortened, shown
from optics.units import nm_from_um, wavelength_nm

__all__ = ["AXES", "Columns", "parse_columns"]


@dataclass(frozen=True)
class _Axis:
    """A way to state wavelengths: how it becomes nm, and when its values betray another unit."""

    to_nm: Callable[[NDArray[np.float64]], NDArray[np.float64]]
    betrayed: Callable[[NDArray[np.float64]], str]


def _if(condition: bool, unit: str) -> str:
    return unit if condition else ""


# Tables of n and k lie between about 20 nm and 1 mm, 60 eV and 1 meV: values beyond are another unit.
AXES: dict[str, _Axis] = {
    "wavelength_nm": _Axis(np.array, lambda values: _if(values.max() < 20.0, "micrometres")),
    "wavelength_um": _Axis(nm_from_um, lambda values: _if(values.min() > 100.0, "nanometres")),
    "energy_eV": _Axis(wavelength_nm, lambda values: _if(values.min() > 60.0, "nanometres")),
}
"""The accepted columns of wavelength or energy."""


K_LIMIT = 2000.0
"""No k is that large from the ultraviolet to 1 mm; absorption coefficients [1/cm] of absorbers are."""


@dataclass(frozen=True)
class Columns:
    """A table in ascending wavelength [nm]; n or k is None when it was not asked for."""

    wavelength_nm: NDArray[np.float64]
    n: NDArray[np.float64] | None
    k: NDArray[np.float64] | None


def parse_columns(text: str, *, place: str, wanted: tuple[str, ...] = ("n", "k")) -> Columns:
    """Wavelengths and the wanted columns from CSV text.

    Parameters
    ----------
    text
        A header naming units, then rows.
    place
        What messages call the text.
    wanted
        Which of ``n`` and ``k`` the header must name beside the wavelength.
    """
    sheet = parse_sheet(text, place=place, header_faults=lambda header: _header_faults(header, wanted))
    axis = next(name for name in sheet.columns if name in AXES)
    faults = [*_value_faults(sheet, axis, wanted)] or _order_faults(sheet, axis) or _unit_faults(sheet, axis)
    if faults:
        raise InputError(shortened([f"{place}: {fault}" for fault in faults], place))
    wavelengths = AXES[axis].to_nm(sheet.column(axis))
    order = np.argsort(wavelengths)
    n, k = (sheet.column(name)[order] if name in wanted else None for name in ("n", "k"))
    return Columns(wavelengths[order], n, k)


def _header_faults(header: tuple[str, ...], wanted: tuple[str, ...]) -> list[str]:
    expected = f"{', '.join(wanted)} and one of {', '.join(AXES)}"
    if all(_is_float(name) for name in header):
        return [f"found numbers, expected a header that names {expected}"]
    faults = [_unknown(name, (*AXES, *wanted)) for name in header if name not in (*AXES, *wanted)]
    faults += [
        f"column {shown(name)} stands twice" for name in sorted({name for name in header if header.count(name) > 1})
    ]
    axes = [name for name in AXES if name in header]
    if len(axes) > 1:
        faults.append(f"found {' and '.join(axes)}, expected one of them")
    if not axes and not faults:
        faults.append(f"found no column of wavelength or energy, expected one of {', '.join(AXES)}")
    cures = {"n": "", "k": "; a clear material has a column of zeros"}
    faults += [f"found no column {name}, expected {expected}{cures[name]}" for name in wanted if name not in header]
    return faults


def _is_float(cell: str) -> bool:
    try:
        float(cell)
    except ValueError:
        return False
    return True


def _unknown(name: str, known: tuple[str, ...]) -> str:
    plain = name.lower()
    if plain.startswith(("wave", "lambda", "wl", "energy", "photon", "λ")):
        return f"column {shown(name)} names no accepted unit, expected one of {', '.join(AXES)}"
    near = get_close_matches(plain, known, n=1)
    hint = f'; did you mean "{near[0]}"?' if near else ""
    return f"column {shown(name)} is not known, expected {', '.join(known)}{hint}"


def _value_faults(sheet: Sheet, axis: str, wanted: tuple[str, ...]) -> list[str]:
    rules = {axis: (sheet.column(axis) > 0.0, "a number above 0")}
    if "n" in wanted:
        rules["n"] = (sheet.column("n") > 0.0, "a number above 0")
    if "k" in wanted:
        rules["k"] = (sheet.column("k") >= 0.0, "0 or more; absorption is a positive k here")
    return [
        f"line {sheet.lines[row]}: {name}: found {sheet.column(name)[row]:g}, expected {expected}"
        for name, (good, expected) in rules.items()
        for row in np.flatnonzero(~good)
    ]


def _order_faults(sheet: Sheet, axis: str) -> list[str]:
    values, lines = sheet.column(axis), sheet.lines
    order = np.argsort(values, kind="stable")
    twins = np.flatnonzero(np.diff(values[order]) == 0.0)
    if twins.size:
        return [
            f"line {lines[order[i + 1]]}: {axis}: found {values[order[i]]:.9g} again (first on line {lines[order[i]]}),"
            " expected every wavelength once"
            for i in twins
        ]
    steps = np.diff(values)
    if np.all(steps > 0.0) or np.all(steps < 0.0):
        return []
    direction = 1.0 if steps[0] > 0.0 else -1.0
    row = int(np.argmin(steps * direction > 0.0)) + 1
    expected = f"{'ascending' if direction > 0.0 else 'descending'} order as on the lines before"
    found = f"{values[row]:.9g} after {values[row - 1]:.9g}"
    return [f"line {lines[row]}: {axis}: found {found}, expected {expected}"]


def _unit_faults(sheet: Sheet, axis: str) -> list[str]:
    values = sheet.column(axis)
    faults = []
    looks_like = AXES[axis].betrayed(values)
    if looks_like:
        found = f"values from {values.min():.7g} to {values.max():.7g}, which look like {looks_like}"
        faults.append(f"column {axis}: found {found}; name the column after its unit ({', '.join(AXES)})")
    if "k" in sheet.columns and sheet.column("k").max() > K_LIMIT:
        found = f"values up to {sheet.column('k').max():.4g}, which look like an absorption coefficient"
        faults.append(f"column k: found {found}, expected the imaginary part of the index")
    return faults
