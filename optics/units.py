"""Units at the border: wavelengths in nm, photon energies in eV, absorption in 1/cm.

Every conversion of the package lives here. All functions take scalars or arrays and return new
float64 values of the same shape. Constants are the exact SI values (2019) as given by SciPy.
"""

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.constants import c, e, h

__all__ = [
    "HC_EV_NM",
    "absorption_per_cm",
    "energy_eV",
    "k_from_absorption",
    "nm_from_mm",
    "nm_from_um",
    "um_from_nm",
    "wavelength_nm",
]

HC_EV_NM: float = h * c / e * 1e9
"""Photon energy times vacuum wavelength [eV nm], 1239.841984..."""

_NM_PER_CM = 1e7


def _floats(values: ArrayLike) -> NDArray[np.float64]:
    return np.asarray(values, dtype=np.float64)


def energy_eV(wavelength_nm: ArrayLike) -> NDArray[np.float64]:
    """Photon energy [eV] at a vacuum wavelength [nm]."""
    return np.asarray(HC_EV_NM / _floats(wavelength_nm))


def wavelength_nm(energy_eV: ArrayLike) -> NDArray[np.float64]:
    """Vacuum wavelength [nm] of a photon energy [eV]."""
    return np.asarray(HC_EV_NM / _floats(energy_eV))


def nm_from_um(length_um: ArrayLike) -> NDArray[np.float64]:
    """Micrometres to nanometres."""
    return np.asarray(_floats(length_um) * 1e3)


def um_from_nm(length_nm: ArrayLike) -> NDArray[np.float64]:
    """Nanometres to micrometres."""
    return np.asarray(_floats(length_nm) / 1e3)


def nm_from_mm(length_mm: ArrayLike) -> NDArray[np.float64]:
    """Millimetres to nanometres."""
    return np.asarray(_floats(length_mm) * 1e6)


def absorption_per_cm(k: ArrayLike, wavelength_nm: ArrayLike) -> NDArray[np.float64]:
    """Absorption coefficient alpha = 4 pi k / wavelength [1/cm].

    Parameters
    ----------
    k
        Imaginary part of the refractive index, >= 0.
    wavelength_nm
        Vacuum wavelength [nm].
    """
    return np.asarray(4.0 * np.pi * _floats(k) / _floats(wavelength_nm) * _NM_PER_CM)


def k_from_absorption(absorption_per_cm: ArrayLike, wavelength_nm: ArrayLike) -> NDArray[np.float64]:
    """Imaginary part of the index that gives an absorption coefficient [1/cm] at a wavelength [nm]."""
    return np.asarray(_floats(absorption_per_cm) * _floats(wavelength_nm) / (4.0 * np.pi * _NM_PER_CM))
