"""Conversions at the border."""

import numpy as np
import pytest

from optics import units

ROUND_TRIP = 4e-16 * 4  # relative: four roundings of float64


def test_hc_is_the_exact_si_value() -> None:
    # 2019 SI: h = 6.62607015e-34 J s, c = 299792458 m/s, e = 1.602176634e-19 C, all exact
    assert pytest.approx(6.62607015e-34 * 299792458 / 1.602176634e-19 * 1e9, rel=ROUND_TRIP) == units.HC_EV_NM
    # CODATA 2018 prints hc = 1.239 841 984... e-6 eV m
    assert f"{units.HC_EV_NM:.6f}" == "1239.841984"


def test_energy_and_wavelength_are_inverse() -> None:
    wavelengths = np.linspace(200.0, 3000.0, 281)
    assert units.wavelength_nm(units.energy_eV(wavelengths)) == pytest.approx(wavelengths, rel=ROUND_TRIP)
    assert units.energy_eV(1239.841984) == pytest.approx(1.0, rel=1e-9)  # the digits above


def test_lengths_convert_both_ways() -> None:
    assert units.nm_from_um(0.55) == pytest.approx(550.0, rel=ROUND_TRIP)
    assert units.um_from_nm(550.0) == pytest.approx(0.55, rel=ROUND_TRIP)
    assert units.nm_from_mm(1.1) == pytest.approx(1.1e6, rel=ROUND_TRIP)


def test_absorption_follows_from_k_and_back() -> None:
    # closed form: k = 1 at 4 pi * 100 nm means alpha = 1 / (100 nm) = 1e5 / cm
    assert units.absorption_per_cm(1.0, 400.0 * np.pi) == pytest.approx(1e5, rel=ROUND_TRIP)
    k = np.array([0.0, 1e-9, 0.03, 1.0])
    back = units.k_from_absorption(units.absorption_per_cm(k, 770.0), 770.0)
    assert back == pytest.approx(k, rel=ROUND_TRIP, abs=0.0)


def test_conversions_return_new_arrays() -> None:
    lengths = np.array([1.0, 2.0])
    lengths.flags.writeable = False
    for convert in (units.nm_from_um, units.um_from_nm, units.nm_from_mm, units.energy_eV, units.wavelength_nm):
        assert not np.shares_memory(convert(lengths), lengths)
