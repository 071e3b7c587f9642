"""Rays in a planar film, all passes, Fresnel faces, s and p apart: derived by an independent script.

Film n = 2.5, air above, half-space 1.5 below; per birth: above, below inside the air cone, below beyond it, the rest.
"""

import numpy as np
import pytest
from piles import amounts, drawn

NINE_DIGITS = 1e-8  # the digits given, and what the quadrature of a clear film's corners may leave
ON_GLASS = {
    0.0: (0.034865008, 0.048619853, 0.116515139, 0.8),
    0.1: (0.032831204, 0.045137308, 0.098674709, 0.823356779),
    1.0: (0.020599754, 0.026142238, 0.038463602, 0.914794406),
}
IN_AIR = {0.0: 0.041742431, 0.1: 0.038157673, 1.0: 0.021593708}
WAVELENGTH_NM, THICKNESS_NM = 770.0, 500.0


def film(tau):
    return (2.5 + 1j * tau * WAVELENGTH_NM / (4.0 * np.pi * THICKNESS_NM), THICKNESS_NM)


@pytest.mark.parametrize("tau", ON_GLASS)
def test_ends_of_rays_in_a_film_on_glass(tau):
    above, in_cone, beyond, rest = ON_GLASS[tau]
    ends = amounts(drawn(WAVELENGTH_NM, [(1, 0), film(tau), (1.5, 0)]), model="ray")
    assert ends["free_above"] == pytest.approx(above, abs=NINE_DIGITS)
    assert ends["free_below"] == pytest.approx(in_cone + beyond, abs=NINE_DIGITS)
    assert ends["trapped"] == pytest.approx(rest, abs=NINE_DIGITS)


@pytest.mark.parametrize("tau", ON_GLASS)
def test_a_plate_of_the_same_glass_holds_what_lies_beyond_the_air_cone(tau):
    _, _, beyond, _ = ON_GLASS[tau]
    ends = amounts(drawn(WAVELENGTH_NM, [(1, 0), film(tau), (1.5, 1e6, "plate"), (1, 0)]), model="ray")
    assert ends["substrate"] == pytest.approx(beyond, abs=NINE_DIGITS)


@pytest.mark.parametrize("tau", IN_AIR)
def test_ends_of_rays_in_a_film_in_air(tau):
    ends = amounts(drawn(WAVELENGTH_NM, [(1, 0), film(tau), (1, 0)]), model="ray")
    assert ends["free_above"] == pytest.approx(IN_AIR[tau], abs=NINE_DIGITS)
    assert ends["free_below"] == pytest.approx(IN_AIR[tau], abs=NINE_DIGITS)
