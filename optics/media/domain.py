"""Where a medium is known: its range of wavelengths, and the refusal outside it."""

import math

import numpy as np
from numpy.typing import ArrayLike, NDArray

from optics.errors import InputError

__all__ = ["ANY_RANGE", "RANGE_SLACK", "checked_range", "range_text", "wavelengths_inside"]

ANY_RANGE: tuple[float, float] = (0.0, math.inf)
"""The range of a medium whose index does not depend on wavelength."""

RANGE_SLACK = 1e-9
"""Relative reach beyond the ends of a range: a wavelength that went through eV or um and back may
miss an end by rounding (about 1e-16); a table is never read further out than a billionth."""


def range_text(range_nm: tuple[float, float]) -> str:
    """A range of wavelengths [nm] in words."""
    if range_nm == ANY_RANGE:
        return "any wavelength"
    return f"{range_nm[0]:.7g} to {range_nm[1]:.7g} nm"


def checked_range(range_nm: tuple[float, float]) -> tuple[float, float]:
    """A range of wavelengths [nm] as two floats, or InputError unless 0 < first < last."""
    first, last = (float(end) for end in range_nm)
    if not 0.0 < first < last < math.inf:
        raise InputError(f"range_nm: found {first:g} to {last:g}, expected two wavelengths in nm, 0 < first < last")
    return first, last


def wavelengths_inside(wavelength_nm: ArrayLike, range_nm: tuple[float, float]) -> NDArray[np.float64]:
    """The wavelengths [nm] as a new float64 array of the same shape, all inside the range.

    Raises
    ------
    InputError
        When a wavelength is not a positive number, or lies outside ``range_nm``.
    """
    try:
        asked = np.array(wavelength_nm, dtype=np.float64)
    except (TypeError, ValueError):
        raise InputError(f"wavelength: found {wavelength_nm!r}, expected numbers in nm") from None
    if not np.all(np.isfinite(asked) & (asked > 0.0)):
        bad = asked[~(np.isfinite(asked) & (asked > 0.0))].flat[0]
        raise InputError(f"wavelength: found {bad:g}, expected a positive number in nm")
    first, last = range_nm
    outside = (asked < first * (1.0 - RANGE_SLACK)) | (asked > last * (1.0 + RANGE_SLACK))
    if np.any(outside):
        raise InputError(_refusal(asked[outside], asked.size, range_nm))
    return np.clip(asked, first, last)


def _refusal(outside: NDArray[np.float64], asked: int, range_nm: tuple[float, float]) -> str:
    low, high = float(outside.min()), float(outside.max())
    if outside.size == 1:
        found = f"wavelength {low:.7g} nm lies"
    else:
        found = f"{outside.size} of {asked} wavelengths ({low:.7g} to {high:.7g} nm) lie"
    return (
        f"{found} outside the range {range_text(range_nm)} in which this index is known; "
        "keep the light inside that range or take a table that covers it"
    )
