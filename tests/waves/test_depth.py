"""Closed forms of depth profiles against quadrature, at every size of exponent and next to their removable zeros."""

import numpy as np
import pytest

from optics.waves.depth import SheetProfile, decay, exponentials, pieces
from optics.waves.source import uniform

ROUNDING = 2e-15  # a few operations on numbers of order one
TABLE_ROUNDING = 1e-12  # of corners that grow with the number of rows
REAL = np.array([0.0, -1e-9, -1e-3, -0.2, -0.2999, -0.3001, -1.4999, -1.5001, -2.0, -30.0, -800.0])
COMPLEX = np.array([0.0, 1e-9j, -1e-3 + 0.2j, 0.2999j, 0.3001j, 1.4999j, 1.5001j, 3j, -2 + 20j, -50 + 3j, 40j])

FADE, TURN, AMPLITUDE = 3.0, 40.0, 0.3 + 0.2j
STANDING = exponentials(  # |exp(i k x) + r exp(i k (2 - x))|^2, as a pump leaves it
    [1.0, abs(AMPLITUDE) ** 2, AMPLITUDE, AMPLITUDE.conjugate()],
    [-FADE] * 4,
    [0.0, -2 * FADE, -FADE + 1j * TURN, -FADE - 1j * TURN],
)
PROFILES = {
    "decay from above": decay(2.0),
    "decay from below": decay(0.3, from_below=True),
    "hardly any decay": decay(1e-12),
    "standing wave": STANDING,
    "its square": STANDING.squared().normal(),
    "straight pieces": pieces([0.0, 0.1, 0.4, 1.0], [1.0, 3.0, 2.0, 0.0]),
}


def by_quadrature(profile, z):
    node, weight = np.polynomial.legendre.leggauss(40)
    ends = np.linspace(0.0, 1.0, 201)
    x = (ends[:-1, None] + 0.5 * np.diff(ends)[:, None] * (node + 1.0)).ravel()
    amount = (0.5 * np.diff(ends)[:, None] * weight).ravel() * profile.density(x)
    return np.exp(np.outer(z, x)) @ amount, np.exp(np.outer(z, 1.0 - x)) @ amount


@pytest.mark.parametrize("z", [REAL, COMPLEX], ids=["real", "complex"])
@pytest.mark.parametrize("name", PROFILES)
def test_means_of_exponentials_are_those_of_quadrature(name, z):
    found = PROFILES[name](z[None, :])
    for mean, expected in zip(found, by_quadrature(PROFILES[name], z), strict=True):
        assert mean.dtype == z.dtype
        assert mean[0] == pytest.approx(expected, abs=20 * ROUNDING)


def test_a_table_of_many_noisy_rows_keeps_its_digits():
    rows = np.random.default_rng(3).random(201)
    profile = pieces(np.linspace(0.0, 1.0, 201), rows)
    for z in (REAL, COMPLEX):
        for mean, expected in zip(profile(z[None, :]), by_quadrature(profile, z), strict=True):
            assert mean[0] == pytest.approx(expected, abs=TABLE_ROUNDING)


def test_strong_absorption_neither_overflows_nor_loses_the_births():
    for profile in (decay(5000.0), decay(5000.0, from_below=True)):
        above, below = profile(np.array([[-1.0, 0.0]]))
        assert {round(above[0, 0], 3), round(below[0, 0], 3)} == {1.0, round(np.exp(-1.0), 3)}
        assert above[0, 1] == below[0, 1] == pytest.approx(1.0, abs=ROUNDING)


def test_no_decay_and_a_flat_table_are_even_births():
    z = COMPLEX[None, :] * 0.9 - 0.1
    for profile in (decay(1e-14), pieces([0.0, 1.0], [2.0, 2.0]), exponentials([1.0], [0.0], [0.0])):
        for mean, expected in zip(profile(z), uniform(z), strict=True):
            assert mean == pytest.approx(expected, abs=20 * ROUNDING)


def test_a_sheet_is_the_limit_of_a_narrow_table():
    z = COMPLEX[None, :]
    narrow = pieces([0.0, 0.3 - 1e-4, 0.3, 0.3 + 1e-4, 1.0], [0.0, 0.0, 1.0, 0.0, 0.0])
    for mean, expected in zip(narrow(z), SheetProfile(0.3)(z), strict=True):
        assert mean == pytest.approx(expected, abs=2e-6)  # (40 x 1e-4)^2/6/2


def test_equal_exponentials_of_a_square_are_gathered():
    assert len(STANDING.amplitude) == 4
    assert len(STANDING.squared().amplitude) == 9  # of sixteen pairs
    x = np.linspace(0.0, 1.0, 50)
    assert STANDING.squared().density(x) == pytest.approx(STANDING.density(x) ** 2, rel=1e-12)
