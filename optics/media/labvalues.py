"""The numbers of a laboratory's table: checked, ordered, and turned into wavelengths, n and k."""

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray
from scipy.constants import c as LIGHT_SPEED

from optics.arrays import Real
from optics.errors import InputError
from optics.media.sheet import shortened, shown
from optics.units import k_from_absorption, nm_from_um, wavelength_nm

if TYPE_CHECKING:
    from optics.media.labfile import Hints

__all__ = ["Values", "index_from", "nm_of", "ordered", "value_faults"]


PLAUSIBLE_NM = (150.0, 1e5)
"""A table that lies wholly outside is taken for one whose unit is wrong: no film emits below 150 nm or above 0.1 mm."""

K_LIMIT = 2000.0
"""No k is that large from the ultraviolet to 1 mm; absorption coefficients [1/cm] of absorbers are."""

DISAGREEMENT = 0.02
"""Two columns that say the same may differ by rounding; a median beyond this says that one of them is not what it
seems (a wrong unit is a factor of 10 or more)."""

_UNIT_WORDS = {"nm": "nanometres", "um": "micrometres", "eV": "electron-volts", "angstrom": "angstroms"}
_PER_CM = {"1/cm": 1.0, "1/m": 1e-2, "1/um": 1e4, "1/nm": 1e7}


@dataclass(frozen=True)
class Values:
    """The columns in use as they stand in the file, one value a row.

    Parameters
    ----------
    axis, unit
        Wavelengths, energies, wavenumbers or frequencies, and their unit.
    columns
        Quantity: values and unit.
    lines
        Line in the file of each row.
    names, texts
        Quantity (also ``"axis"``): its heading, its cells as text.
    """

    axis: Real
    unit: str
    columns: Mapping[str, tuple[Real, str]]
    lines: NDArray[np.int64]
    names: Mapping[str, str]
    texts: Mapping[str, tuple[str, ...]]


def nm_of(values: Real, unit: str) -> Real:
    """Return wavelengths in vacuum [nm] from values in one of `headings.AXIS_UNITS`."""
    if unit == "nm":
        return values.copy()
    lengths = {"angstrom": 0.1, "cm": 1e7, "mm": 1e6, "m": 1e9}
    if unit in lengths:
        # Dividing by 10 rounds once; multiplying by 0.1 would round twice.
        return values / 10.0 if unit == "angstrom" else values * lengths[unit]
    if unit == "um":
        return nm_from_um(values)
    if unit in ("eV", "meV"):
        return wavelength_nm(values if unit == "eV" else values / 1e3)
    inverse = {"1/cm": 1e7, "1/m": 1e9, "THz": LIGHT_SPEED * 1e-3, "Hz": LIGHT_SPEED * 1e9}
    return np.asarray(inverse[unit] / values)


def value_faults(values: Values, hints: "Hints", *, signed: bool) -> list[str]:
    """Return what is wrong with single numbers, or with the unit of the axis unless the user insisted on it.

    A negative absorption passes when it is `signed` or the user said what to do with it.
    """
    rules = {"axis": (values.axis > 0.0, "a number above 0")}
    for name, (column, _) in values.columns.items():
        if name == "n":
            rules[name] = column > 0.0, "a number above 0"
        elif name == "eps1" or signed or hints.zero_negative or hints.conjugate:
            rules[name] = np.isfinite(column), "a finite number"
        else:
            rules[name] = column >= 0.0, f"0 or more; absorption is a positive k here{_sign_cure(column)}"
    faults = [
        _fault(values, name, int(row), expected)
        for name, (good, expected) in rules.items()
        for row in np.flatnonzero(~good)
    ]
    return faults or ([] if hints.unit else _unit_faults(values))


def _fault(values: Values, name: str, row: int, expected: str) -> str:
    number = _column(values, name)[row]
    found = f"{number:g}" if np.isfinite(number) else shown(values.texts[name][row])
    wanted = expected if np.isfinite(number) else "a finite number"
    return f"line {values.lines[row]}: {values.names[name]}: found {found}, expected {wanted}"


def _sign_cure(absorption: Real) -> str:
    """Return what to do about negative absorption, if there is any."""
    if (absorption <= 0.0).all():
        return "; the table may write n - i k: say --conjugate when importing it"
    return "; noise below zero: say --zero-negative-k when importing it"


def _column(values: Values, name: str) -> Real:
    return values.axis if name == "axis" else values.columns[name][0]


def _unit_faults(values: Values) -> list[str]:
    nm = nm_of(values.axis, values.unit)
    low, high = PLAUSIBLE_NM
    if nm.max() >= low and nm.min() <= high:
        return []
    ends = values.axis.min(), values.axis.max()
    like = [
        word
        for unit, word in _UNIT_WORDS.items()
        if unit != values.unit and all(low <= end <= 3e4 for end in nm_of(np.array(ends), unit))
    ]
    looks = f", which look like {like[0]}" if like else ""
    return [
        f"column {values.names['axis']}: found values from {ends[0]:.7g} to {ends[1]:.7g}{looks}; in {values.unit} the "
        f"table would run from {nm.min():.4g} to {nm.max():.4g} nm; mend the unit in the header, "
        f"or say --unit {values.unit} "
        "when importing it"
    ]


def ordered(values: Values, place: str) -> tuple[Real, NDArray[np.intp]]:
    """Return ascending wavelengths [nm] and the rows they stand in; InputError unless rows rise or fall throughout."""
    axis, lines, name = values.axis, values.lines, values.names["axis"]
    order = np.argsort(axis, kind="stable")
    twins = np.flatnonzero(np.diff(axis[order]) == 0.0)
    if twins.size:
        raise InputError(
            shortened(
                [
                    f"{place}: line {lines[order[i + 1]]}: {name}: found {axis[order[i]]:.9g} again (first on line "
                    f"{lines[order[i]]}), expected every wavelength once"
                    for i in twins
                ],
                place,
            )
        )
    steps = np.diff(axis)
    rising = bool((steps > 0).sum() * 2 >= steps.size)
    wrong = np.flatnonzero(steps < 0 if rising else steps > 0)
    if wrong.size:
        row = int(wrong[0]) + 1
        raise InputError(
            f"{place}: line {lines[row]}: {name}: found {axis[row]:.9g} after {axis[row - 1]:.9g}, expected "
            f"{'ascending' if rising else 'descending'} order as on the other lines"
        )
    nm = nm_of(axis, values.unit)
    order = np.argsort(nm)
    return nm[order], order


def index_from(
    values: Values,
    wavelength: Real,
    order: NDArray[np.intp],
    *,
    place: str,
    hints: "Hints",
    wanted: str,
    signed: bool,
) -> tuple[Real | None, Real, tuple[str, ...]]:
    """Return n (None unless wanted), k and what was converted, in ascending wavelength [nm]."""
    columns = {name: (column[order], unit) for name, (column, unit) in values.columns.items()}
    converted = [] if values.unit == "nm" else [f"{values.names['axis']} in {values.unit} to wavelength in nm"]
    sign = -1.0 if hints.conjugate else 1.0
    if hints.conjugate:
        converted.append("sign of k or eps2 changed (the table writes n - i k)")
    candidates = _candidates(columns, wavelength, sign)
    n, k, how = candidates[0]
    for _, other, name in candidates[1:]:
        _refuse_disagreement(k, other, how, name, place)
    if how not in ("n and k", "k"):
        converted.append(f"{'n and k' if 'eps1' in how else 'k'} from {how}")
    if n is not None and not (n > 0.0).all():
        row = values.lines[order][int(np.argmin(n > 0.0))]
        raise InputError(f"{place}: line {row}: n from {how} is {n.min():g}, expected a number above 0")
    if n is None and wanted == "nk":
        n, said = _n_elsewhere(hints, wavelength)
        converted.append(said)
    _refuse_large(k, place)
    k, signs = _signs(k, values.lines[order], place, hints, signed=signed)
    return (n if wanted == "nk" else None), k, (*converted, *signs)


def _candidates(
    columns: Mapping[str, tuple[Real, str]], wavelength: Real, sign: float
) -> list[tuple[Real | None, Real, str]]:
    """Return every way in which the columns give n and k, the most direct first, and its name."""
    n = columns["n"][0] if "n" in columns else None
    ways: list[tuple[Real | None, Real, str]] = []
    if "k" in columns:
        ways.append((n, sign * columns["k"][0], "n and k" if n is not None else "k"))
    if "alpha" in columns:
        alpha, unit = columns["alpha"]
        ways.append((n, k_from_absorption(alpha * _PER_CM[unit], wavelength), f"alpha in {unit}"))
    if "eps1" in columns and "eps2" in columns:
        # The root with the sign of eps2; + 0.0 makes -0.0 plain, which would flip it.
        index = np.sqrt(columns["eps1"][0] + 1j * (sign * columns["eps2"][0] + 0.0))
        ways.append((index.real, index.imag, "eps1 and eps2"))
    return sorted(ways, key=lambda way: way[0] is None)


def _refuse_disagreement(k: Real, other: Real, how: str, name: str, place: str) -> None:
    both = (np.abs(k) > 1e-6) & (np.abs(other) > 1e-6)
    if both.any() and np.median(np.abs(other[both] / k[both] - 1.0)) > DISAGREEMENT:
        ratio = float(np.median(other[both] / k[both]))
        raise InputError(
            f"{place}: k from {name} is {ratio:.3g} times the k from {how}, expected the same; "
            "take one of them out, or say which columns to use with --columns"
        )


def _n_elsewhere(hints: "Hints", wavelength: Real) -> tuple[Real, str]:
    """Return n from the medium the user named; not a number outside its range."""
    if hints.n_from is None:
        raise InputError("n: missing")  # the headings were held against what is wanted
    low, high = hints.n_from.range_nm
    known = (wavelength >= low) & (wavelength <= high)
    if known.sum() < 2:
        raise InputError(f"--n-from covers {low:.6g} to {high:.6g} nm and shares fewer than 2 rows with the table")
    n = np.full(wavelength.shape, np.nan)
    n[known] = hints.n_from.index(wavelength[known]).real
    left = "" if known.all() else f"; {int((~known).sum())} rows outside its range left out"
    return n, f"n taken from {hints.n_from.name}{left}"


def _refuse_large(k: Real, place: str) -> None:
    if np.abs(k).max() > K_LIMIT:
        found = f"values up to {np.abs(k).max():.4g}, which look like an absorption coefficient"
        raise InputError(f"{place}: column k: found {found}, expected the imaginary part of the index")


def _signs(
    k: Real, lines: NDArray[np.int64], place: str, hints: "Hints", *, signed: bool
) -> tuple[Real, tuple[str, ...]]:
    """Return k with its negative values as the user wants them, or refuse them."""
    negative = k < 0.0
    if not negative.any() or signed:
        return k, ()
    if hints.zero_negative:
        return np.where(negative, 0.0, k), (f"{int(negative.sum())} negative k (down to {k.min():.3g}) set to 0",)
    row = lines[int(np.argmax(negative))]
    raise InputError(f"{place}: line {row}: k is negative ({k[negative][0]:.3g}), expected 0 or more")
