"""How an index depends on wavelength: constant, closed formulas, tables, and a formula joined with a table of k.

Convention: index n + i k, k >= 0 for an absorber (time dependence exp(-i w t)).
All media are frozen, compare by value, can be hashed and pickled, and never write into a caller's array.
"""

import math
from collections.abc import Callable
from dataclasses import dataclass
from functools import cached_property
from typing import Protocol

import numpy as np
from numpy.typing import ArrayLike, NDArray

from optics.errors import InputError
from optics.media.domain import ANY_RANGE, range_text, wavelengths_inside
from optics.media.formulas import Cauchy, Sellmeier

__all__ = ["Cauchy", "Constant", "Joined", "Medium", "Sellmeier", "Tabulated", "extinction_table"]


class Medium(Protocol):
    """Anything that knows a complex index inside a range of wavelengths."""

    @property
    def range_nm(self) -> tuple[float, float]:
        """First and last wavelength [nm] at which the index is known."""

    def index(self, wavelength_nm: ArrayLike) -> NDArray[np.complex128]:
        """Complex index n + i k, same shape as ``wavelength_nm`` [nm]; InputError outside the range."""


@dataclass(frozen=True)
class Constant:
    """The same index at every wavelength.

    Parameters
    ----------
    n
        Real part, > 0.
    k
        Imaginary part, >= 0.
    """

    n: float
    k: float = 0.0

    def __post_init__(self) -> None:
        faults = [fault for fault in (_n_fault(self.n), _k_fault(self.k)) if fault]
        if faults:
            raise InputError(faults)
        object.__setattr__(self, "n", float(self.n))
        object.__setattr__(self, "k", float(self.k) + 0.0)  # -0.0 becomes 0.0: roots of the index must not flip

    @property
    def range_nm(self) -> tuple[float, float]:
        """Any wavelength."""
        return ANY_RANGE

    def index(self, wavelength_nm: ArrayLike) -> NDArray[np.complex128]:
        """Complex index, same shape as ``wavelength_nm`` [nm]."""
        return np.full(wavelengths_inside(wavelength_nm, ANY_RANGE).shape, complex(self.n, self.k))


def _is_number(value: object) -> bool:
    return isinstance(value, int | float | np.integer | np.floating) and not isinstance(value, bool)


def _n_fault(n: object) -> str:
    if _is_number(n) and 0.0 < n < math.inf:  # type: ignore[operator]
        return ""
    return f"n: found {n!r}, expected a finite number above 0"


def _k_fault(k: object) -> str:
    if _is_number(k) and 0.0 <= k < math.inf:  # type: ignore[operator]
        return ""
    cure = "; absorption is a positive k here (index n + i k)" if _is_number(k) and k < 0.0 else ""  # type: ignore[operator]
    return f"k: found {k!r}, expected a finite number, 0 or more{cure}"


@dataclass(frozen=True, eq=False)
class Tabulated:
    """A table of n and k, read between its rows by monotone cubics.

    n and k are each interpolated over wavelength [nm] by the piecewise cubic Hermite polynomial whose
    slopes are chosen to keep the data's shape (PCHIP; Fritsch & Butland, SIAM J. Sci. Stat. Comput. 5,
    300, 1984): between two rows the value stays between theirs, so k never goes below 0 and no
    overshoot appears at an absorption edge.

    Parameters
    ----------
    wavelength_nm
        At least two wavelengths [nm], strictly ascending.
    n, k
        As many values; n > 0, k >= 0, all finite. Stored as read-only copies.
    """

    wavelength_nm: NDArray[np.float64]
    n: NDArray[np.float64]
    k: NDArray[np.float64]

    def __post_init__(self) -> None:
        for name in ("wavelength_nm", "n", "k"):
            object.__setattr__(self, name, _stored(name, getattr(self, name)))
        faults = list(_table_faults(self.wavelength_nm, self.n, self.k))
        if faults:
            raise InputError(faults)

    @property
    def range_nm(self) -> tuple[float, float]:
        """First and last wavelength [nm] of the table."""
        return float(self.wavelength_nm[0]), float(self.wavelength_nm[-1])

    def index(self, wavelength_nm: ArrayLike) -> NDArray[np.complex128]:
        """Complex index, same shape as ``wavelength_nm`` [nm]; InputError outside the table."""
        both = self._curves(wavelengths_inside(wavelength_nm, self.range_nm))
        # The cubics are bounded by their rows; the maximum only takes back rounding near rows with k = 0.
        return np.asarray(both[..., 0] + 1j * np.maximum(both[..., 1], 0.0))

    @cached_property
    def _curves(self) -> Callable[[NDArray[np.float64]], NDArray[np.float64]]:
        from scipy.interpolate import PchipInterpolator

        return PchipInterpolator(self.wavelength_nm, np.stack([self.n, self.k], axis=-1), extrapolate=False)

    def _key(self) -> tuple[bytes, bytes, bytes]:
        return self.wavelength_nm.tobytes(), self.n.tobytes(), self.k.tobytes()

    def __eq__(self, other: object) -> bool:
        return self._key() == other._key() if isinstance(other, Tabulated) else NotImplemented

    def __hash__(self) -> int:
        return hash(self._key())

    def __reduce__(self) -> tuple[type["Tabulated"], tuple[NDArray[np.float64], ...]]:
        # Rebuilt through the constructor, since NumPy drops the read-only flag when it unpickles.
        return type(self), (self.wavelength_nm, self.n, self.k)


def _stored(name: str, values: ArrayLike) -> NDArray[np.float64]:
    try:
        stored = np.array(values, dtype=np.float64) + 0.0  # a copy; -0.0 becomes 0.0
    except (TypeError, ValueError):
        raise InputError(f"table column {name}: expected numbers") from None
    stored.flags.writeable = False
    return stored


def _table_faults(wavelength: NDArray[np.float64], n: NDArray[np.float64], k: NDArray[np.float64]) -> list[str]:
    if wavelength.ndim != 1 or not wavelength.shape == n.shape == k.shape:
        return [f"table: found {wavelength.shape}, {n.shape} and {k.shape} values, expected three equal columns"]
    if wavelength.size < 2:
        return [f"table: found {wavelength.size} row(s), expected at least 2"]
    rules = (
        ("wavelength_nm", wavelength, np.isfinite(wavelength) & (wavelength > 0.0), "a finite number above 0"),
        ("n", n, np.isfinite(n) & (n > 0.0), "a finite number above 0"),
        ("k", k, np.isfinite(k) & (k >= 0.0), "a finite number, 0 or more"),
    )
    faults = [
        f"table row {int(np.argmin(good)) + 1}: {name}: found {values[np.argmin(good)]:g}, expected {expected}"
        for name, values, good, expected in rules
        if not np.all(good)
    ]
    return faults or _order_faults(wavelength)


def _order_faults(wavelength: NDArray[np.float64]) -> list[str]:
    steps = np.diff(wavelength)
    if np.all(steps > 0.0):
        return []
    row = int(np.argmin(steps > 0.0))
    found = f"{wavelength[row + 1]:.9g} nm after {wavelength[row]:.9g} nm"
    return [f"table row {row + 2}: wavelength_nm: found {found}, expected strictly ascending wavelengths"]


@dataclass(frozen=True)
class Joined:
    """The real part of one medium with the imaginary part of another.

    Known where both are: a formula for n with a table of k, or two tables on their own grids.

    Parameters
    ----------
    n_from
        The medium whose real part is taken.
    k_from
        The medium whose imaginary part is taken, for instance an `extinction_table`.
    """

    n_from: Medium
    k_from: Medium

    def __post_init__(self) -> None:
        first, last = self.range_nm
        if first >= last:
            found = f"{range_text(self.n_from.range_nm)} and {range_text(self.k_from.range_nm)}"
            raise InputError(f"n and k are known at different wavelengths, {found}, expected ranges that overlap")

    @property
    def range_nm(self) -> tuple[float, float]:
        """The wavelengths [nm] at which both parts are known."""
        n, k = self.n_from.range_nm, self.k_from.range_nm
        return max(n[0], k[0]), min(n[1], k[1])

    def index(self, wavelength_nm: ArrayLike) -> NDArray[np.complex128]:
        """Complex index, same shape as ``wavelength_nm`` [nm]; InputError outside the range."""
        inside = wavelengths_inside(wavelength_nm, self.range_nm)
        return np.asarray(self.n_from.index(inside).real + 1j * self.k_from.index(inside).imag)


def extinction_table(wavelength_nm: ArrayLike, k: ArrayLike) -> Tabulated:
    """A table of k alone (its n is 1), to be joined with a medium that gives n."""
    wavelengths = _stored("wavelength_nm", wavelength_nm)
    return Tabulated(wavelengths, np.ones_like(wavelengths), _stored("k", k))
