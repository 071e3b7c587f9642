"""Closed formulas for the real index of clear media, wavelength in micrometres inside.

The kinds are the nine "dispersion formulas" in which the open CC0 index database states its pages
(its documentation, "Dispersion formulas", numbers them 1 to 9); kinds 1 and 2 are both `Sellmeier`.
Each is evaluated exactly as printed, holds inside its ``range_nm`` and refuses outside it.
Formulas carry no absorption: k = 0. Join them with a table of k by `optics.media.dispersion.Joined`.
"""

import math
from abc import ABC, abstractmethod
from collections.abc import Iterable
from dataclasses import dataclass, fields

import numpy as np
from numpy.typing import ArrayLike, NDArray

from optics.arrays import Real
from optics.errors import InputError
from optics.media.domain import checked_range, wavelengths_inside
from optics.units import um_from_nm

__all__ = [
    "Cauchy",
    "Exotic",
    "Formula",
    "Gas",
    "Herzberger",
    "Mixed",
    "Polynomial",
    "Retro",
    "Sellmeier",
]

Pairs = tuple[tuple[float, float], ...]
Quads = tuple[tuple[float, float, float, float], ...]


@dataclass(frozen=True, kw_only=True)
class Formula(ABC):
    """A real index as a closed function of wavelength.

    Parameters
    ----------
    range_nm
        First and last wavelength [nm] for which the formula was fitted.
    """

    range_nm: tuple[float, float]

    def __post_init__(self) -> None:
        object.__setattr__(self, "range_nm", checked_range(self.range_nm))
        for field in fields(self):
            if field.name != "range_nm":
                object.__setattr__(self, field.name, _coefficients(field.name, getattr(self, field.name)))

    def index(self, wavelength_nm: ArrayLike) -> NDArray[np.complex128]:
        """Complex refractive index, same shape as ``wavelength_nm`` [nm].

        Raises
        ------
        InputError
            Outside ``range_nm``, or where the formula has no real positive value.
        """
        wavelengths = wavelengths_inside(wavelength_nm, self.range_nm)
        with np.errstate(all="ignore"):  # poles and negative squares are refused just below
            n = np.asarray(self._n(um_from_nm(wavelengths)))
        bad = ~(np.isfinite(n) & (n > 0.0))
        if np.any(bad):
            where = wavelengths[bad].flat[0]
            raise InputError(f"{type(self).__name__} formula: no real positive index at {where:.7g} nm")
        return n.astype(np.complex128)

    @abstractmethod
    def _n(self, um: Real) -> Real:
        """Real index at wavelengths [um]."""


def _coefficients(name: str, value: object) -> object:
    """A number, or nested tuples of numbers, as finite floats."""
    if isinstance(value, Iterable) and not isinstance(value, str):
        return tuple(_coefficients(name, entry) for entry in value)
    if isinstance(value, bool) or not isinstance(value, int | float | np.number) or not math.isfinite(value):
        raise InputError(f"formula coefficient {name}: found {value!r}, expected a finite number")
    return float(value)


def _powers(terms: Pairs, um: Real) -> Real:
    return sum((c * um**power for c, power in terms), np.zeros_like(um))


@dataclass(frozen=True, kw_only=True)
class Sellmeier(Formula):
    """n^2 = constant + sum_i B_i L^2 / (L^2 - C_i), L the wavelength [um] (kinds 1 and 2).

    Parameters
    ----------
    terms
        Pairs (B_i, C_i), C_i in um^2. Sources that print resonance wavelengths [um] give C_i as their squares.
    constant
        1 in the classical form; more where far resonances are lumped together.
    """

    terms: Pairs
    constant: float = 1.0

    def _n(self, um: Real) -> Real:
        square = um**2
        return np.sqrt(self.constant + sum((b * square / (square - c) for b, c in self.terms), np.zeros_like(um)))


@dataclass(frozen=True, kw_only=True)
class Cauchy(Formula):
    """n = constant + sum_i c_i L^p_i, L the wavelength [um] (kind 5); ``terms`` are pairs (c_i, p_i)."""

    constant: float
    terms: Pairs = ()

    def _n(self, um: Real) -> Real:
        return self.constant + _powers(self.terms, um)


@dataclass(frozen=True, kw_only=True)
class Polynomial(Formula):
    """n^2 = constant + sum_i c_i L^p_i, L the wavelength [um] (kind 3); ``terms`` are pairs (c_i, p_i)."""

    constant: float
    terms: Pairs

    def _n(self, um: Real) -> Real:
        return np.sqrt(self.constant + _powers(self.terms, um))


@dataclass(frozen=True, kw_only=True)
class Mixed(Formula):
    """n^2 = constant + sum_i B_i L^p_i / (L^2 - C_i^q_i) + sum_j c_j L^p_j, L in um (kind 4).

    Parameters
    ----------
    poles
        Quadruples (B_i, p_i, C_i, q_i).
    terms
        Pairs (c_j, p_j).
    """

    constant: float
    poles: Quads
    terms: Pairs = ()

    def _n(self, um: Real) -> Real:
        poles = sum((b * um**p / (um**2 - c**q) for b, p, c, q in self.poles), np.zeros_like(um))
        return np.sqrt(self.constant + poles + _powers(self.terms, um))


@dataclass(frozen=True, kw_only=True)
class Gas(Formula):
    """n = 1 + constant + sum_i B_i / (C_i - L^-2), L in um, B_i and C_i in 1/um^2 (kind 6, gases)."""

    terms: Pairs
    constant: float = 0.0

    def _n(self, um: Real) -> Real:
        return 1.0 + self.constant + sum((b / (c - um**-2) for b, c in self.terms), np.zeros_like(um))


@dataclass(frozen=True, kw_only=True)
class Herzberger(Formula):
    """n = c1 + c2 H + c3 H^2 + c4 L^2 + c5 L^4 + c6 L^6, H = 1/(L^2 - 0.028), L in um (kind 7)."""

    coefficients: tuple[float, float, float, float, float, float]

    def _n(self, um: Real) -> Real:
        c1, c2, c3, c4, c5, c6 = self.coefficients
        h = 1.0 / (um**2 - 0.028)
        return c1 + c2 * h + c3 * h**2 + c4 * um**2 + c5 * um**4 + c6 * um**6


@dataclass(frozen=True, kw_only=True)
class Retro(Formula):
    """(n^2 - 1)/(n^2 + 2) = c1 + c2 L^2/(L^2 - c3) + c4 L^2, L in um (kind 8)."""

    coefficients: tuple[float, float, float, float]

    def _n(self, um: Real) -> Real:
        c1, c2, c3, c4 = self.coefficients
        ratio = c1 + c2 * um**2 / (um**2 - c3) + c4 * um**2
        return np.sqrt((1.0 + 2.0 * ratio) / (1.0 - ratio))


@dataclass(frozen=True, kw_only=True)
class Exotic(Formula):
    """n^2 = c1 + c2/(L^2 - c3) + c4 (L - c5)/((L - c5)^2 + c6), L in um (kind 9)."""

    coefficients: tuple[float, float, float, float, float, float]

    def _n(self, um: Real) -> Real:
        c1, c2, c3, c4, c5, c6 = self.coefficients
        away = um - c5
        return np.sqrt(c1 + c2 / (um**2 - c3) + c4 * away / (away**2 + c6))
