"""A clear film on glass, by waves: numbers derived two ways by scripts apart from this package.

Uniform isotropic births, air / n = 2.5, 500 nm / half-space 1.5, 770 nm; powers in units of the dipole's in bulk.
"""

import pytest
from piles import amounts, drawn, end_at, ledger, pieces, scene_of

from optics.fate.exits import FREE_BELOW

EIGHT_DIGITS = 2e-8  # the digits given, and the quadrature's tolerance
MEDIA = [(1, 0), (2.5, 500), (1.5, 0)]


def test_rate_factor_and_ends():
    assert ledger(drawn(770, MEDIA)).rate_factor[0] == pytest.approx(0.94706664, abs=EIGHT_DIGITS)
    ends = amounts(drawn(770, MEDIA))
    assert ends["free_above"] == pytest.approx(0.03997496, abs=EIGHT_DIGITS)
    assert ends["free_below"] == pytest.approx(0.05933023 + 0.09295847, abs=EIGHT_DIGITS)
    assert ends["guided_unfinished"] == pytest.approx(0.75480298, abs=EIGHT_DIGITS)


@pytest.mark.parametrize(("low", "high", "expected"), [(0.0, 1.0, 0.05933023), (1.0, 1.5, 0.09295847)])
def test_light_below_inside_and_beyond_the_air_cone(low, high, expected):
    q, weight = pieces(low, high, (), 64)
    assert end_at(scene_of(drawn(770, MEDIA)), q, FREE_BELOW) @ weight == pytest.approx(expected, abs=EIGHT_DIGITS)
