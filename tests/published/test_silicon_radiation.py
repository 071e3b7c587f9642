"""The bundled silicon absorbs as much below its gap as its radiative coefficient demands.

Van Roosbroeck & Shockley, Phys. Rev. 94, 1558 (1954): the rate at which a semiconductor in the dark emits into
itself follows from n and alpha alone. The trace of absorption at the gap decides it, six decades below the visible.
"""

import numpy as np
import pytest
from scipy.constants import Boltzmann, c, e, h
from scipy.integrate import trapezoid

from optics import units
from optics.media import find

KELVIN = 300.0
TOLERANCE = 0.01  # quadrature and interpolation of a table with a row every 10 nm


def test_emission_into_silicon_in_the_dark_follows_from_its_table() -> None:
    energies = np.linspace(units.energy_eV(1450.0), units.energy_eV(900.0), 4001)
    wavelengths = units.wavelength_nm(energies).clip(900.0, 1450.0)
    index = find("silicon").index(wavelengths)
    alpha_per_m = units.absorption_per_cm(index.imag, wavelengths) * 100.0
    joule = energies * e
    density = index.real**2 * alpha_per_m * joule**2 / np.expm1(joule / (Boltzmann * KELVIN))
    rate_per_cm3 = 8.0 * np.pi / (h**3 * c**2) * trapezoid(density, joule) * 1e-6
    # The same integral over the tables of Green 2008 (Sol. Energy Mater. Sol. Cells 92, 1305) by another script
    assert rate_per_cm3 == pytest.approx(4.431e5, rel=TOLERANCE)
    # Trupke et al., J. Appl. Phys. 94, 4930 (2003): 4.73e-15 cm^3/s (value from memory), n_i = 9.65e9 1/cm^3
    assert rate_per_cm3 / 9.65e9**2 == pytest.approx(4.73e-15, rel=0.02)
