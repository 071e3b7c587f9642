"""A dipole in air 50 nm above a metal, eps = -18 + 0.5i, 633 nm: derived from the integrals of Chance, Prock & Silbey,
Adv. Chem. Phys. 37, 1 (1978), by an independent script; powers in units of the free dipole's."""

import numpy as np
import pytest
from piles import amounts, bound_at, drawn, pieces, scene_of

NINE_DIGITS = 2e-8
METAL = np.sqrt(-18.0 + 0.5j)
PLASMON = 1.028967149  # index of the surface plasmon, sqrt(eps/(1 + eps)); its half width is 0.00084
RADIATED = {"normal": 0.81866688, "in plane": 0.44511888}
TOTAL = {"normal": 2.7528884, "in plane": 0.51517474}
DIRECTIONS = {"normal": 0.0, "in plane": 1.0}


def dipole(direction):
    """A film of air 50 nm thick, light born at its upper face."""
    return drawn(
        633,
        [(1, 0), (1, 50), (METAL, 0)],
        in_plane=DIRECTIONS[direction],
        moments=lambda z: (np.ones_like(z), np.exp(z)),
    )


@pytest.mark.parametrize("direction", DIRECTIONS)
def test_light_that_leaves_the_metal_behind(direction):
    assert amounts(dipole(direction))["free_above"] == pytest.approx(RADIATED[direction], abs=NINE_DIGITS)


@pytest.mark.parametrize("direction", DIRECTIONS)
def test_light_and_near_field_together(direction):
    """On the axis up to q = 60 k0, where exp(-2 q k0 d) has ended, cut about the plasmon's line."""
    cuts = (1.0, *(PLASMON + np.array([-0.02, -0.005, -0.001, 0.0, 0.001, 0.005, 0.02])), 1.1, 1.5, 4.0, 15.0)
    q, weight = pieces(0.0, 60.0, cuts, 40)
    assert bound_at(scene_of(dipole(direction)), q)[0] @ weight == pytest.approx(TOTAL[direction], abs=1e-7)


def test_the_plasmon_lies_where_its_closed_form_says():
    eps = METAL**2
    index = np.sqrt(eps / (1.0 + eps))
    assert index == pytest.approx(1.028967149 + 0.000839973j, abs=1e-9)
    q = PLASMON + np.linspace(-0.002, 0.002, 4001)
    power = bound_at(scene_of(dipole("normal")), q)[0]
    assert q[np.argmax(power)] == pytest.approx(PLASMON, abs=1e-5)
