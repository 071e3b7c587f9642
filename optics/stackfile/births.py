"""The birth spectrum of a stack file: its kinds, and tables of births."""

import hashlib
from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any

import numpy as np

from optics.arrays import Real
from optics.byvalue import read_only
from optics.errors import InputError
from optics.faults import Faults, closest, found, quoted
from optics.media.labtable import AXES
from optics.media.sheet import Sheet, decode, parse_sheet, read_bytes, shortened
from optics.radiation import PLACE, FromAbsorption
from optics.spectrum import Gaussian, Spectrum, SpectrumTable
from optics.stackfile.keys import Keys
from optics.units import energy_eV

KINDS = ("gaussian", "table", "from-absorption")
GAUSSIAN_KEYS = ("kind", "seen", "na", "peak_nm", "fwhm_nm")
TABLE_KEYS = ("kind", "seen", "na", "file", "wavelength_nm", "per_nm")
ABSORPTION_KEYS = ("temperature_K", "splitting_eV", "n_i_per_cm3", "seen")
BIRTHS = ("births_per_nm", "births_per_um", "births_per_eV", "light_per_nm", "light_per_um", "light_per_eV")
HEADER = f"one of {', '.join(AXES)}, and one of {', '.join(BIRTHS)}"


def spectrum_from(table: Mapping[str, Any], *, home: Path) -> Spectrum:
    """Return the spectrum that the table ``[light.spectrum]`` describes; files start at `home`."""
    kind = table.get("kind")
    if kind == "gaussian":
        return _gaussian(table)
    if kind == "table":
        return _table(table, home)
    words = ", ".join(f'"{word}"' for word in KINDS)
    if kind is None:
        raise InputError(f"{PLACE}: kind: missing, expected one of {words}")
    if kind == "from-absorption":
        return _from_absorption(table)
    close = closest(kind, KINDS) if isinstance(kind, str) else None
    cure = f'; did you mean "{close}"?' if close else ""
    raise InputError(f"{PLACE}: kind: found {found(kind)}, expected one of {words}{cure}")


def read_births(path: Path, *, place: str) -> tuple[Real, Real, str]:
    """Read a table of births.

    Parameters
    ----------
    path
        A CSV file with a header that names units: ``wavelength_nm``, ``wavelength_um`` or ``energy_eV``, and
        ``births_per_nm``, ``births_per_um`` or ``births_per_eV`` (for what was seen outside also ``light_per_nm``
        and so on); rows rising or falling.
    place
        What messages call the file.

    Returns
    -------
    wavelength_nm, per_nm, sha256
        Ascending wavelengths [nm], births per nm at each (a density: per eV becomes per nm with E/wavelength),
        and the hash of the file.

    Raises
    ------
    InputError
        One line a fault: file, line and column.
    """
    content = read_bytes(path, place=place)
    sheet = parse_sheet(decode(content, place=place), place=place, header_faults=_header_faults)
    axis, births = (next(name for name in names if name in sheet.columns) for names in (AXES, BIRTHS))
    faults = _value_faults(sheet, axis, births) or _order_faults(sheet, axis)
    if faults:
        raise InputError(shortened([f"{place}: {fault}" for fault in faults], place))
    wavelength = AXES[axis].to_nm(sheet.column(axis))
    order = np.argsort(wavelength)
    per_nm = sheet.column(births) * _per_nm(births, wavelength)
    return wavelength[order], per_nm[order], hashlib.sha256(content).hexdigest()


def _gaussian(table: Mapping[str, Any]) -> Gaussian:
    faults = Faults(PLACE)
    keys = Keys(table, faults, GAUSSIAN_KEYS)
    peak = keys.need("peak_nm", "the wavelength of the maximum in nm, for example 768")
    width = keys.need("fwhm_nm", "the full width at half maximum in nm, for example 40")
    spectrum = Gaussian(peak_nm=1.0, fwhm_nm=1.0)  # stands in where something is missing
    given = {key: value for key, value in (("peak_nm", peak), ("fwhm_nm", width)) if value is not None}
    with faults.taking_over():
        spectrum = replace(spectrum, **given, seen=keys.get("seen", spectrum.seen), na=keys.get("na"))
    faults.settle()
    return spectrum


def _from_absorption(table: Mapping[str, Any]) -> FromAbsorption:
    faults = Faults(PLACE)
    keys = Keys(table, faults, ("kind", *ABSORPTION_KEYS))
    spectrum = FromAbsorption()
    with faults.taking_over():
        spectrum = FromAbsorption(**{key: keys.given[key] for key in ABSORPTION_KEYS if key in keys.given})
    faults.settle()
    return spectrum


def _table(table: Mapping[str, Any], home: Path) -> SpectrumTable:
    faults = Faults(PLACE)
    keys = Keys(table, faults, TABLE_KEYS)
    spectrum = SpectrumTable(wavelength_nm=read_only([1.0, 2.0]), per_nm=read_only([1.0, 1.0]))  # stands in likewise
    rows: dict[str, Any] = {}
    source = keys.which(("file", "per_nm"), 'a table of births, for example file = "births.csv"')
    if source == "file":
        rows = _file(keys, home)
    elif source == "per_nm" and keys.need("wavelength_nm", "a list of wavelengths in nm, one for each per_nm"):
        rows = {"wavelength_nm": keys.get("wavelength_nm"), "per_nm": keys.get("per_nm")}
    with faults.taking_over():
        spectrum = replace(spectrum, **rows, seen=keys.get("seen", spectrum.seen), na=keys.get("na"))
    faults.settle()
    return spectrum


def _file(keys: Keys, home: Path) -> dict[str, Any]:
    """Return the fields of a `SpectrumTable` that its file gives; none when it was refused."""
    name = keys.get("file")
    if "wavelength_nm" in keys.given:
        keys.faults.add("wavelength_nm", "found together with file, expected one or the other")
    if not isinstance(name, str) or not name:
        keys.faults.add("file", f'found {found(name)}, expected the name of a table, for example "births.csv"')
        return {}
    with keys.faults.collecting("file"):
        wavelength, per_nm, sha256 = read_births(home / name, place=name)
        return {"wavelength_nm": wavelength, "per_nm": per_nm, "path": str((home / name).resolve()), "sha256": sha256}
    return {}


def _per_nm(births: str, wavelength: Real) -> Real:
    """Return what turns a density per the column's unit into one per nm."""
    if births.endswith("_per_eV"):
        return energy_eV(wavelength) / wavelength  # |dE/dwavelength|
    return np.full(wavelength.shape, 1e-3 if births.endswith("_per_um") else 1.0)


def _header_faults(header: tuple[str, ...]) -> list[str]:
    faults = []
    for name in header:
        if name not in (*AXES, *BIRTHS):
            close = closest(name, (*AXES, *BIRTHS))
            cure = f'; did you mean "{close}"?' if close else ""
            faults.append(f"column {quoted(name)} is not known, expected {HEADER}{cure}")
    for names in (tuple(AXES), BIRTHS):
        given = [name for name in header if name in names]
        if len(given) > 1:
            faults.append(f"found columns {' and '.join(given)}, expected one of {', '.join(names)}")
        elif not given and not faults:
            faults.append(f"found no column of {' or '.join(names)}, expected {HEADER}")
    return faults


def _value_faults(sheet: Sheet, axis: str, births: str) -> list[str]:
    rules = {
        axis: (sheet.column(axis) > 0, "a number above 0"),
        births: (sheet.column(births) >= 0, "births of 0 or more; set noise below zero to 0"),
    }
    return [
        f"line {sheet.lines[row]}: {name}: found {sheet.column(name)[row]:g}, expected {expected}"
        for name, (good, expected) in rules.items()
        for row in np.flatnonzero(~good)
    ]


def _order_faults(sheet: Sheet, axis: str) -> list[str]:
    values = sheet.column(axis)
    rising = values[-1] > values[0]
    wrong = np.flatnonzero(np.diff(values) <= 0 if rising else np.diff(values) >= 0) + 1
    return [
        f"line {sheet.lines[row]}: {axis}: found {values[row]:.9g} after {values[row - 1]:.9g}, "
        f"expected {'rising' if rising else 'falling'} values, none twice; sort them"
        for row in wrong
    ]
