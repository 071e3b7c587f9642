"""Rate factors and shares against numbers computed apart from this package, by another program.

Uniform isotropic emission; 760 nm and a film of index 2.5 + 0.02i, 500 nm thick, unless a case says otherwise.
"""

import numpy as np
import pytest
from piles import drawn, ledger

SIX_DIGITS = 0.5e-6 + 1e-8  # half a unit of the last digit printed, and what the quadrature adds
FIVE_DIGITS = 0.5e-5 + 1e-8
SEVEN_DIGITS = 0.5e-7 + 1e-9

FILM = (2.5 + 0.02j, 500)
GLASS = (1.52, 1.1e6, "plate")
COLUMNS = ("free_above", "free_below", "cover", "substrate", "elsewhere", "reabsorbed", "waveguided")

CASES = {
    "on a half-space of glass": (
        drawn(760, [(1, 0), FILM, (1.52, 0)]),
        (0.947004, 0.035946, 0.140745, 0, 0, 0, 0.175746, 0.647563),
    ),
    "on a plate of glass": (
        drawn(760, [(1, 0), FILM, GLASS, (1, 0)]),
        (0.947004, 0.039379, 0.046045, 0, 0.088988, 0, 0.178025, 0.647563),
    ),
    "between two plates and one, on an absorbing layer": (
        drawn(
            760,
            [(1, 0), (1.52, 2e6, "plate"), (1.49, 4e5, "plate"), FILM, (1.8 + 0.005j, 120), GLASS, (1, 0)],
            film=3,
        ),
        (0.955251, 0.038227, 0.041729, 0.049890, 0.068888, 0.002003, 0.169810, 0.629452),
    ),
    "of low index on a guide of higher index": (
        drawn(520, [(1, 0), (1.65 + 0.005j, 60), (1.95 + 0.005j, 150), GLASS, (1, 0)]),
        (0.925146, 0.104865, 0.123775, 0, 0.419335, 0.014501, 0.005886, 0.331638),
    ),
}


@pytest.mark.parametrize("case", CASES)
def test_rate_factor_and_shares_of_a_film(case):
    drawing, expected = CASES[case]
    found = ledger(drawing)
    values = [found.rate_factor[0], *(found.shares[name][0] for name in COLUMNS)]
    np.testing.assert_allclose(values, expected, atol=SIX_DIGITS, rtol=0)


def test_what_other_layers_take_of_guided_light():
    thin_absorber = ledger(CASES["between two plates and one, on an absorbing layer"][0])
    guide = ledger(CASES["of low index on a guide of higher index"][0])
    assert thin_absorber.shares["guided_elsewhere"][0] == pytest.approx(0.017243, abs=SIX_DIGITS)
    assert guide.shares["guided_elsewhere"][0] == pytest.approx(0.28116, abs=FIVE_DIGITS)


RATE_FACTORS = {
    0.0: {50: 0.60068, 100: 0.64876, 300: 0.88996, 500: 0.94749, 1000: 0.96681, 3000: 0.98790},
    0.02: {50: 0.60091, 100: 0.65197, 300: 0.89216, 500: 0.94677, 1000: 0.96771, 3000: 0.98912},
    0.3: {50: 0.60080, 100: 0.69168, 300: 0.91253, 500: 0.94952, 1000: 0.97491, 3000: 0.99179},
}


@pytest.mark.parametrize(("k", "thickness_nm"), [(k, d) for k, row in RATE_FACTORS.items() for d in row])
def test_rate_factor_of_a_film_on_glass_for_any_absorption_and_thickness(k, thickness_nm):
    found = ledger(drawn(760, [(1, 0), (2.5 + 1j * k, thickness_nm), (1.5, 0)]))
    assert found.rate_factor[0] == pytest.approx(RATE_FACTORS[k][thickness_nm], abs=FIVE_DIGITS)


@pytest.mark.parametrize(
    ("k", "below", "expected"),
    [(0.02, 2.49, 0.9746213), (0.02, 2.50, 0.9776905), (0.02, 2.51, 0.9751711), (1.0, 2.4, 1.0056743)],
)
def test_rate_factor_as_the_index_below_passes_the_films(k, below, expected):
    found = ledger(drawn(760, [(1, 0), (2.5 + 1j * k, 500), (below, 0)]))
    assert found.rate_factor[0] == pytest.approx(expected, abs=SEVEN_DIGITS)


# A half-space of higher index than the film ends in a square root whose cut starts on the path. Its side follows
# from two limits, neither of which has a cut: a thick absorbing layer in its place, even in its own root, and an
# index below the film's, whose cut lies off the path.

HIGH = 3.7
ON_HIGH = {0.02: 0.992488, 1.0: 0.979504}  # this package's values, held by the two tests after the next


@pytest.mark.parametrize("k", ON_HIGH)
def test_rate_factor_on_a_half_space_of_high_index(k):
    found = ledger(drawn(760, [(1, 0), (2.5 + 1j * k, 500), (HIGH, 0)]))
    assert found.rate_factor[0] == pytest.approx(ON_HIGH[k], abs=SIX_DIGITS)


LAYER_ERROR = 3e-6  # second order in the layer's k, left by the extrapolation (measured 1.2e-6)


@pytest.mark.parametrize("k", ON_HIGH)
def test_a_half_space_of_high_index_is_the_limit_of_a_thick_weakly_absorbing_layer(k):
    """A finite layer is even in its normal wave number: no root, no cut, no choice.

    At 80 um (k = 0.01) and 300 um (k = 0.001) no light comes back from its far side; what is left of its
    absorption, linear in its k, is extrapolated away. Another branch of the half-space would be off by 3e-4.
    """

    def rate_factor(layer_k, thickness_nm):
        layer = (HIGH + 1j * layer_k, thickness_nm)
        return ledger(drawn(760, [(1, 0), (2.5 + 1j * k, 500), layer, (1, 0)])).rate_factor[0]

    coarse, fine = rate_factor(0.01, 8e4), rate_factor(0.001, 3e5)
    assert fine + (fine - coarse) / 9.0 == pytest.approx(ON_HIGH[k], abs=LAYER_ERROR)


def test_what_stands_behind_such_a_layer_does_not_matter():
    rates = [
        ledger(drawn(760, [(1, 0), FILM, (HIGH + 0.01j, 8e4), (behind, 0)])).rate_factor[0]
        for behind in (1.0, 1.5, 3.0)
    ]
    np.testing.assert_allclose(rates, rates[0], atol=SEVEN_DIGITS, rtol=0)


CUSP = 0.8  # P has a cusp where light lines meet: it falls by this times the root of their distance (measured 0.54)


@pytest.mark.parametrize("k", [0.0, 0.02, 1.0])
@pytest.mark.parametrize("in_plane", [0.0, 2.0 / 3.0, 1.0])
def test_the_rate_factor_is_continuous_as_the_index_below_crosses_the_films(k, in_plane):
    def rate_factor(below):
        return ledger(drawn(760, [(1, 0), (2.5 + 1j * k, 500), (below, 0)], in_plane=in_plane)).rate_factor[0]

    for step in (1e-4, 1e-6, 1e-8, 1e-10):
        jump = abs(rate_factor(2.5 + step) - rate_factor(2.5 - step))
        assert jump < CUSP * np.sqrt(step)
