"""Radiation that follows from absorption: a step in closed form, silicon as published, generalised Planck.

Van Roosbroeck & Shockley, Phys. Rev. 94, 1558 (1954); Wuerfel, J. Phys. C 15, 3967 (1982); Katahara & Hillhouse,
J. Appl. Phys. 116, 173504 (2014).
"""

import numpy as np
import pytest
from scipy.constants import Boltzmann, c, e, h

from optics import units
from optics.media import find
from optics.radiation import bleaching, emission_per_nm, equilibrium_rate

KELVIN = 300.0
KT = Boltzmann * KELVIN / e
ONE_PERCENT = 0.01  # a table with a row every 10 nm, read between its rows
QUADRATURE = 1e-7  # the trapezoid rule on a fine grid


def test_silicon_emits_in_equilibrium_as_published():
    wavelength = np.arange(900.0, 1450.5, 0.5)
    index = find("silicon").index(wavelength)
    rate = equilibrium_rate(wavelength, n=index.real, k=index.imag, temperature_K=KELVIN)
    # From the tables of Green, Sol. Energy Mater. Sol. Cells 92, 1305 (2008), by a script apart from this package.
    assert rate == pytest.approx(4.431e5, rel=ONE_PERCENT)
    # Trupke et al., J. Appl. Phys. 94, 4930 (2003): 4.73e-15 cm3/s (value published, attribution from memory).
    assert rate / 9.65e9**2 == pytest.approx(4.76e-15, rel=ONE_PERCENT)


def step(wavelength):
    """Return k of 1e4 1/cm above 1.6 eV and nothing below."""
    alpha = np.where(units.energy_eV(wavelength) >= 1.6 * (1 - 1e-12), 1e4, 0.0)
    return units.k_from_absorption(alpha, wavelength)


def test_a_step_absorber_emits_as_its_closed_form():
    wavelength = units.wavelength_nm(np.linspace(3.2, 1.6, 200_001))
    rate = equilibrium_rate(wavelength, n=2.5, k=step(wavelength), temperature_K=KELVIN)
    assert rate == pytest.approx(2.23249516, rel=QUADRATURE)  # the figure given; and the closed form itself:
    x, m = 1.6 / KT, np.arange(1, 6)
    series = (np.exp(-m * x) * (x**2 / m + 2 * x / m**2 + 2 / m**3)).sum()  # of x^2/(e^x - 1) from x on
    closed = 8 * np.pi * 2.5**2 * 1e6 / (h**3 * c**2) * (KT * e) ** 3 * series * 1e-6
    assert rate == pytest.approx(closed, rel=QUADRATURE)


def test_a_splitting_multiplies_the_tail_by_its_boltzmann_factor_and_bleaches_by_the_tanh():
    wavelength = np.linspace(700.0, 780.0, 9)
    k = np.full(9, 0.1)
    dark = emission_per_nm(wavelength, n=2.5, k=k, temperature_K=KELVIN)
    lit = emission_per_nm(wavelength, n=2.5, k=k, temperature_K=KELVIN, splitting_eV=1.3)
    over = (units.energy_eV(wavelength) - 1.3) / KT
    tall = units.energy_eV(wavelength) / KT
    expected = np.tanh(over / 4) * np.expm1(tall) / np.expm1(over)
    assert lit / dark == pytest.approx(expected, rel=1e-12)
    assert bleaching(over) == pytest.approx(np.tanh(over / 4))


def test_emission_per_nm_is_a_density_in_wavelength():
    energy = np.linspace(1.6, 2.2, 30_001)
    wavelength = units.wavelength_nm(energy[::-1])
    in_nm = equilibrium_rate(wavelength, n=2.0, k=0.05, temperature_K=KELVIN)
    joule = energy * e
    alpha = 4 * np.pi * 0.05 / (units.wavelength_nm(energy) * 1e-9)
    per_joule = 8 * np.pi * 4.0 * alpha * joule**2 / (h**3 * c**2) / np.expm1(energy / KT)
    assert in_nm == pytest.approx(np.trapezoid(per_joule, joule) * 1e-6, rel=1e-6)


def test_clear_wavelengths_emit_nothing_even_below_the_splitting():
    rate = emission_per_nm(np.array([700.0, 900.0]), n=2.0, k=np.array([0.1, 0.0]), splitting_eV=1.5)
    assert rate[0] > 0.0
    assert rate[1] == 0.0
