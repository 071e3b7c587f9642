"""Modes beside metals, where nodes cannot be counted: all are found, and their power is that of the bound zone."""

import numpy as np
import pytest
from piles import drawn, ledger, scene_of
from scipy.optimize import newton

from optics.waves.modes import bound_modes

FILM, METAL = 2.4 + 0.001j, 0.05 + 4.5j
WAVELENGTH_NM = 700.0
SOLVED = 1e-9


def dispersion(q, weights, thickness_nm):
    """Return what a film under air and on a metal lacks for a mode (Yeh, Optical Waves in Layered Media, ch. 11)."""
    film, air, metal = weights
    kz = np.sqrt(FILM**2 - q * q)
    inside, above, below = kz / film, np.sqrt(q * q - 1.0) / air, np.sqrt(q * q - METAL**2) / metal
    phase = kz * 2.0 * np.pi * thickness_nm / WAVELENGTH_NM
    return np.sin(phase) * (inside**2 - above * below) - np.cos(phase) * inside * (above + below)


def solved_directly(polarisation, thickness_nm):
    """Return all roots between the light lines, from many starts."""
    weights = (1.0, 1.0, 1.0) if polarisation == 0 else (FILM**2, 1.0, METAL**2)
    found = []
    for start in np.linspace(1.002, 2.399, 80):
        try:
            root = newton(dispersion, start + 2e-3j, args=(weights, thickness_nm), tol=1e-13, maxiter=60)
        except RuntimeError:
            continue
        inside = 1.001 < root.real < 2.4 and root.imag > 0.0 and abs(dispersion(root, weights, thickness_nm)) < 1e-10
        if inside and all(abs(root - other) > 1e-6 for other in found):
            found.append(root)
    return np.array(sorted(found, key=lambda each: -each.real))


@pytest.mark.parametrize("thickness_nm", [60, 300, 900, 2500])
@pytest.mark.parametrize("polarisation", [0, 1])
def test_every_mode_of_a_film_on_a_metal_is_found(polarisation, thickness_nm):
    scene = scene_of(drawn(WAVELENGTH_NM, [(1.0, 0), (FILM, thickness_nm), (METAL, 0)]))
    modes = bound_modes(scene)
    ours = modes.index[(modes.polarisation == polarisation) & (modes.index.real > 1.001)]
    np.testing.assert_allclose(ours, solved_directly(polarisation, thickness_nm), rtol=0, atol=SOLVED)


@pytest.mark.parametrize(
    ("metal", "thickness_nm"), [(METAL, 100), (METAL, 2), (0.2 + 3.2j, 20)], ids=["thick", "thin", "gold-like"]
)
def test_modes_under_a_metal_carry_the_power_of_the_bound_zone(metal, thickness_nm):
    media = [(1.0, 0), (metal, thickness_nm), (FILM, 320), (1.9 + 0.006j, 140), (1.52, 0)]
    drawing = drawn(WAVELENGTH_NM, media, film=2)
    found = ledger(drawing)
    bound = found.taken[2].sum() * found.rate_factor
    assert bound_modes(scene_of(drawing)).power.sum() == pytest.approx(bound[0], abs=0.02)  # the rest is continuum
