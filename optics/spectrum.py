"""The spectrum of a light: its kinds, where it is seen, and its values per nm on the wavelengths of a calculation."""

import math
from dataclasses import dataclass, field
from typing import TypeAlias

import numpy as np
from numpy.typing import ArrayLike, NDArray

from optics.arrays import Real
from optics.byvalue import ByValue, read_only
from optics.errors import InputError
from optics.faults import Faults, as_float, found, is_number
from optics.radiation import PLACE, FromAbsorption, births_from_absorption

SEEN = ("inside", "above", "below")
LARGEST_NA = 5.0  # no medium that passes light on has a higher index in the optical range
NARROWEST_NM = 1e-3  # a narrower Gaussian is a slip, and its exponents leave the range of floats
TAIL_WORTH_SAYING = 1e-3  # share of a Gaussian's births outside the light's range that is mentioned
ComplexArray: TypeAlias = NDArray[np.complex128]
FWHM_PER_SIGMA = 2.0 * math.sqrt(2.0 * math.log(2.0))


@dataclass(frozen=True, kw_only=True)
class Gaussian:
    """Births per nm that follow a Gaussian in wavelength.

    Parameters
    ----------
    peak_nm
        Wavelength of the maximum [nm].
    fwhm_nm
        Full width at half maximum [nm].
    seen
        Where the spectrum is the one seen: ``"inside"``, what the film gives birth to; ``"above"`` or ``"below"``,
        what was measured there.
    na
        Numerical aperture with which it was measured outside; None: all light that gets out.
    """

    peak_nm: float
    fwhm_nm: float
    seen: str = "inside"
    na: float | None = None

    def __post_init__(self) -> None:
        faults = Faults(PLACE)
        peak = faults.number("peak_nm", self.peak_nm, unit="nm", above=0, example=768)
        width = faults.number("fwhm_nm", self.fwhm_nm, unit="nm", at_least=NARROWEST_NM, example=40)
        _check_seen(faults, self.seen, self.na)
        faults.settle()
        object.__setattr__(self, "peak_nm", peak)
        object.__setattr__(self, "fwhm_nm", width)


@dataclass(frozen=True, kw_only=True, eq=False)
class SpectrumTable(ByValue):
    """Births per nm from a table, linear between its rows.

    Parameters
    ----------
    wavelength_nm
        Ascending wavelengths [nm].
    per_nm
        Births per nm at each, in any unit, none negative.
    seen
        Where the spectrum is the one seen: ``"inside"``, what the film gives birth to; ``"above"`` or ``"below"``,
        what was measured there.
    na
        Numerical aperture with which it was measured outside; None: all light that gets out.
    path, sha256
        The file it was read from and that file's hash; no part of the value.
    """

    wavelength_nm: Real
    per_nm: Real
    seen: str = "inside"
    na: float | None = None
    path: str = field(default="", compare=False)
    sha256: str = field(default="", compare=False)

    def __post_init__(self) -> None:
        faults = Faults(PLACE)
        wavelength = ascending(faults, "wavelength_nm", self.wavelength_nm)
        births = numbers(faults, "per_nm", self.per_nm)
        if wavelength.size == 1:
            faults.add("wavelength_nm", "found 1 row, expected two or more")
        if not faults.lines and births.size != wavelength.size:
            faults.add("per_nm", f"found {births.size} values, expected {wavelength.size}, one a wavelength")
        if births.size and births.min() < 0:
            where = int(np.argmax(births < 0))
            faults.add("per_nm", f"value {where + 1}: found {births[where]:g}, expected births of 0 or more")
        elif births.size and not births.any():
            faults.add("per_nm", "found zeros alone, expected births somewhere")
        _check_seen(faults, self.seen, self.na)
        faults.settle()
        object.__setattr__(self, "wavelength_nm", wavelength)
        object.__setattr__(self, "per_nm", births)


Spectrum: TypeAlias = Gaussian | SpectrumTable | FromAbsorption


def births_per_nm(spectrum: Spectrum, wavelengths_nm: ArrayLike, *, film_index: ComplexArray | None = None) -> Real:
    """Return the births per nm [1/nm], scaled so that they integrate to 1 by the trapezoid rule.

    Parameters
    ----------
    spectrum
        A spectrum born inside. One seen outside needs the solved stack: `optics.fate.births.born_per_nm`.
    wavelengths_nm
        Ascending wavelengths [nm]; one alone takes all births.
    film_index
        The film's complex index at each, for a spectrum that follows from its absorption.

    Raises
    ------
    InputError
        When a table does not reach over the wavelengths, or no births fall on them.
    """
    if spectrum.seen != "inside":
        raise InputError(
            f'{PLACE}: seen: found "{spectrum.seen}": what is born inside follows only from a solved stack'
        )
    return given_per_nm(spectrum, wavelengths_nm, film_index=film_index)


def given_per_nm(spectrum: Spectrum, wavelengths_nm: ArrayLike, *, film_index: ComplexArray | None = None) -> Real:
    """Return a spectrum as it is given, wherever it is seen; parameters, scale and refusals of `births_per_nm`."""
    wavelength = np.asarray(wavelengths_nm, dtype=np.float64)
    _check_reach(spectrum, wavelength)
    raw = _raw(spectrum, wavelength, film_index)
    total = float(raw @ weights(wavelength))
    # Below the smallest normal number the scaled births would carry no digits.
    if total < np.finfo(np.float64).tiny:
        span = f"{wavelength[0]:.12g} to {wavelength[-1]:.12g} nm"
        raise InputError(f"{PLACE}: no births fall on the light's wavelengths, {span}; widen them or move the spectrum")
    return raw / total


def weights(wavelengths_nm: ArrayLike) -> Real:
    """Return the trapezoid rule's step [nm] that belongs to each of the ascending wavelengths [nm].

    One wavelength alone counts as a step of 1 nm.
    """
    wavelength = np.asarray(wavelengths_nm, dtype=np.float64)
    if wavelength.size == 1:
        return np.ones(1)
    half = np.diff(wavelength) / 2.0
    steps = np.zeros_like(wavelength)
    steps[:-1] += half
    steps[1:] += half
    return steps


def spectrum_notes(spectrum: Spectrum, wavelengths_nm: ArrayLike) -> tuple[str, ...]:
    """Return what is worth saying about a spectrum cut to the light's wavelengths [nm], one sentence each."""
    if isinstance(spectrum, FromAbsorption):
        return _absorption_notes(spectrum)
    if isinstance(spectrum, SpectrumTable):
        return ("the spectrum is read from its table by linear interpolation",)
    wavelength = np.asarray(wavelengths_nm, dtype=np.float64)
    first, last = float(wavelength[0]), float(wavelength[-1])
    outside = 1.0 - (_cumulative(spectrum, last) - _cumulative(spectrum, first))
    if wavelength.size == 1 or outside <= TAIL_WORTH_SAYING:
        return ()
    span = f"{first:.12g} to {last:.12g} nm"
    what = "births lie" if spectrum.seen == "inside" else "light lies"
    return (f"{100 * outside:.2g} % of the Gaussian's {what} outside the light's {span} and are left out",)


def _absorption_notes(spectrum: FromAbsorption) -> tuple[str, ...]:
    excited = "low excitation (splitting_eV not given)"
    if spectrum.splitting_eV is not None:
        excited = f"splitting_eV = {spectrum.splitting_eV:g}, which bleaches what is born but not what is taken back"
    return (
        f"births follow from the film's own absorption at temperature_K = {spectrum.temperature_K:g} "
        f"(300 when not given), {excited}",
    )


def ascending(faults: Faults, key: str, values: object) -> Real:
    """Return wavelengths as a read-only ascending array, or note why they are none and return an empty one."""
    array = numbers(faults, key, values)
    if not array.size:
        return array
    if array.min() <= 0:
        where = int(np.argmax(array <= 0))
        faults.add(key, f"value {where + 1}: found {array[where]:g}, expected wavelengths in nm above 0")
        return array[:0]
    falls = np.flatnonzero(np.diff(array) <= 0)
    if falls.size:
        where = int(falls[0]) + 1
        one, other = array[where - 1], array[where]
        said = f"{other:.12g} twice" if one == other else f"{other:.12g} after {one:.12g}"
        more = f" (and {falls.size - 1} more such places)" if falls.size > 1 else ""
        faults.add(key, f"value {where + 1}: found {said}{more}, expected ascending wavelengths, none twice; sort them")
        return array[:0]
    return array


def numbers(faults: Faults, key: str, values: object) -> Real:
    """Return finite numbers as a read-only array, or note why they are none and return an empty one."""
    nothing = read_only([])
    if isinstance(values, np.ndarray):
        values = values.tolist()
    if not isinstance(values, list | tuple) or not values:
        faults.add(key, f"found {found(values)}, expected a list of numbers")
        return nothing
    for place, value in enumerate(values, start=1):
        if not is_number(value) or not math.isfinite(as_float(value)):
            faults.add(key, f"value {place}: found {found(value)}, expected a number")
            return nothing
    return read_only(values)


def check_na(faults: Faults, na: object) -> float:
    """Return a numerical aperture, or note why it is none."""
    return faults.number("na", na, above=0, at_most=LARGEST_NA, example=0.9)


def _raw(spectrum: Spectrum, wavelength: Real, film_index: ComplexArray | None) -> Real:
    if isinstance(spectrum, FromAbsorption):
        if film_index is None:
            raise InputError(f'{PLACE}: kind "from-absorption" needs the index of the film')
        return births_from_absorption(spectrum, wavelength, film_index)
    if isinstance(spectrum, SpectrumTable):
        return np.interp(wavelength, spectrum.wavelength_nm, spectrum.per_nm)
    sigma = spectrum.fwhm_nm / FWHM_PER_SIGMA
    with np.errstate(over="ignore"):  # a peak out of all reach: its births are zero
        births: Real = np.exp(-0.5 * ((wavelength - spectrum.peak_nm) / sigma) ** 2)
    return births


def _cumulative(spectrum: Gaussian, wavelength: float) -> float:
    sigma = spectrum.fwhm_nm / FWHM_PER_SIGMA
    return 0.5 * math.erfc((spectrum.peak_nm - wavelength) / (sigma * math.sqrt(2.0)))


def _check_reach(spectrum: Spectrum, wavelength: Real) -> None:
    if not isinstance(spectrum, SpectrumTable):
        return
    first, last = float(spectrum.wavelength_nm[0]), float(spectrum.wavelength_nm[-1])
    if wavelength[0] < first or wavelength[-1] > last:
        raise InputError(
            f"{PLACE}: the table covers {first:.12g} to {last:.12g} nm, the light asks for {wavelength[0]:.12g} to "
            f"{wavelength[-1]:.12g} nm; shorten the light's range, or add rows that reach, zeros where nothing is born"
        )


def _check_seen(faults: Faults, seen: object, na: object) -> None:
    faults.choice("seen", seen, SEEN)
    if na is None:
        return
    check_na(faults, na)
    if seen == "inside":
        faults.add("na", 'found an aperture with seen = "inside", expected one with "above" or "below" alone')
