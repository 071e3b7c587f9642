"""First flights out of a slab without refraction: Case, de Hoffmann & Placzek, Introduction to the Theory of
Neutron Diffusion (1953): escape = (1 - 2 E3(tau))/(2 tau)."""

import numpy as np
import pytest
from piles import amounts, drawn
from scipy.special import expn

ESCAPE = {  # derived by an independent high-precision script
    0.1: 0.837085420917,
    0.5: 0.556791271450,
    1.0: 0.390308032802,
    2.0: 0.234933310101,
    5.0: 0.0998244398214,
}
RAYS = 2e-8  # the panels' tolerance
EDGE = 0.16  # waves feel the absorption end at a face: they fall short by about 0.12 over the slab's phase thickness
SECOND_ORDER = (
    1e-4  # what is left when that first order is extrapolated away between 10 and 20 um (0.6e-4 at tau = 0.1)
)
WAVELENGTH_NM, INDEX = 770.0, 2.0


def slab(tau, thickness_nm):
    k = tau * WAVELENGTH_NM / (4.0 * np.pi * thickness_nm)
    return drawn(WAVELENGTH_NM, [(INDEX, 0), (INDEX + 1j * k, thickness_nm), (INDEX, 0)])


def test_the_exponential_integral_is_that_of_the_tables():
    assert expn(3, 0.5) == pytest.approx(0.2216044, abs=5e-8)  # Abramowitz & Stegun, Table 5.4


@pytest.mark.parametrize("tau", ESCAPE)
def test_rays_leave_a_slab_as_the_exponential_integral_says(tau):
    ends = amounts(slab(tau, 500.0), model="ray")
    assert ends["free_above"] + ends["free_below"] == pytest.approx(ESCAPE[tau], abs=RAYS)
    assert ends["free_above"] == pytest.approx(ends["free_below"], abs=RAYS)
    assert ends["reabsorbed"] == pytest.approx(1.0 - ESCAPE[tau], abs=RAYS)


def waves_leave(tau, thickness_nm):
    ends = amounts(slab(tau, thickness_nm))
    return ends["free_above"] + ends["free_below"]


@pytest.mark.parametrize("tau", ESCAPE)
def test_waves_leave_a_thick_slab_as_rays_do(tau):
    thickness_nm = 20_000.0
    phase = 2.0 * np.pi * INDEX * thickness_nm / WAVELENGTH_NM
    assert waves_leave(tau, thickness_nm) == pytest.approx(ESCAPE[tau], abs=EDGE / phase)
    limit = 2.0 * waves_leave(tau, thickness_nm) - waves_leave(tau, 0.5 * thickness_nm)
    assert limit == pytest.approx(ESCAPE[tau], abs=SECOND_ORDER)
