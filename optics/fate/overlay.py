"""Measured light laid over a computed spectrum: scaled to it, and how far the two are apart."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import ArrayLike

from optics.arrays import Real
from optics.errors import InputError

if TYPE_CHECKING:
    from optics.fate.solve import Result

CURVES = ("collected", "above", "below")  # in the order in which one is chosen


@dataclass(frozen=True)
class Measured:
    """Measured light over a computed curve.

    Attributes
    ----------
    curve
        The curve of ``Result.spectra`` that it was laid over: ``"collected"``, ``"above"`` or ``"below"``.
    wavelength_nm, per_nm
        The measurement within the light's range [nm], scaled to the curve by least squares [1/nm].
    misfit
        Root mean square of the difference over the peak of the curve.
    path, sha256
        The file it came from, empty where there is none.
    """

    curve: str
    wavelength_nm: Real
    per_nm: Real
    misfit: float
    path: str = ""
    sha256: str = ""


def lay_over(
    result: Result,
    wavelength_nm: ArrayLike,
    per_nm: ArrayLike,
    *,
    curve: str | None = None,
    path: str = "",
    sha256: str = "",
) -> Result:
    """Return a result with measured light laid over one of its spectra.

    Parameters
    ----------
    result
        What was solved.
    wavelength_nm, per_nm
        The measurement [nm], ascending, in any unit per nm.
    curve
        ``"collected"``, ``"above"`` or ``"below"``; None: the first of these that gets any light.
    path, sha256
        Where it came from.

    Returns
    -------
    Result
        With ``measured`` and the column ``measured_per_nm`` in ``spectra``: the measurement at the light's
        wavelengths, scaled, not a number where it does not reach.
    """
    spectra = result.spectra
    lit = [name for name in CURVES if f"{name}_per_nm" in spectra and spectra[f"{name}_per_nm"].any()]
    chosen = curve or next(iter(lit), "")
    if chosen not in lit:
        known = f"expected one with light: {', '.join(lit)}" if lit else "no light gets out of this stack"
        raise InputError(f"measured: no light to lay it over ({chosen or 'none named'}); {known}")
    x = spectra["wavelength_nm"].to_numpy(dtype=float)
    model = spectra[f"{chosen}_per_nm"].to_numpy(dtype=float)
    at, given = np.asarray(wavelength_nm, dtype=float), np.asarray(per_nm, dtype=float)
    inside = (at >= x[0]) & (at <= x[-1])
    if inside.sum() < 2 or not given[inside].any():
        span = f"{x[0]:g} to {x[-1]:g} nm"
        raise InputError(f"measured: found {inside.sum()} rows with light within {span}, expected at least two")
    at, given = at[inside], given[inside]
    curve_there = np.interp(at, x, model)
    scale = float(curve_there @ given / (given @ given))
    misfit = float(np.sqrt(np.mean((scale * given - curve_there) ** 2)) / model.max())
    column = np.interp(x, at, scale * given, left=np.nan, right=np.nan)
    measured = Measured(chosen, at, scale * given, misfit, path, sha256)
    return replace(result, spectra=spectra.assign(measured_per_nm=column), measured=measured)
