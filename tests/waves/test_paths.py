"""Quadrature: exact where it should be, honest where it cannot be."""

import numpy as np
import pytest
from scipy.special import ellipk

from optics.waves.curves import panels
from optics.waves.paths import fejer, integrate

ROUNDING = 1e-13
ORDER = 16
ESTIMATE = 2.0  # an estimate, not a bound: it may fall short by this factor


def rows(count=1, stop=1.0):
    ends = np.full(count, stop)
    return panels(np.arange(count), np.zeros(count), ends)


def integrated(function, *, tolerance=1e-10, order=ORDER, halvings=30):
    """Integrate a function of u over (0, 1)."""
    return integrate(
        lambda pieces, u: function(u)[None], rows(), wavelengths=1, order=order, tolerance=tolerance, halvings=halvings
    )


@pytest.mark.parametrize("order", [8, 16, 48, 128])
def test_fejers_rule_is_exact_for_polynomials_below_its_order(order):
    """Waldvogel, BIT 46, 195 (2006): n - 1 nodes, exact to degree n - 2 at least."""
    nodes, weights = fejer(order)
    for degree in range(order - 1):
        assert nodes**degree @ weights[:, 0] == pytest.approx(1.0 / (degree + 1), abs=ROUNDING)


def test_fejers_rule_keeps_off_both_ends():
    nodes, _ = fejer(128)
    assert nodes.min() > 0.0
    assert nodes.max() < 1.0


@pytest.mark.parametrize(
    ("function", "expected"),
    [
        (np.exp, np.e - 1.0),
        (lambda u: np.cos(40.0 * u), np.sin(40.0) / 40.0),
        (lambda u: 1.0 / (1e-6 + (u - 0.3) ** 2), (np.arctan(0.7e3) + np.arctan(0.3e3)) * 1e3),
        (np.sqrt, 2.0 / 3.0),
    ],
    ids=["smooth", "swinging", "a sharp line", "a square-root end"],
)
@pytest.mark.parametrize("tolerance", [1e-6, 1e-8, 1e-10])
def test_what_is_left_out_is_within_the_tolerance_and_the_estimate(function, expected, tolerance):
    found = integrated(function, tolerance=tolerance)
    error = abs(found.values.item() - expected)
    pieces = 60  # that a row may have been cut into
    assert error <= max(pieces * tolerance, 1e-13 * expected)
    assert error <= max(ESTIMATE * found.error.item(), 1e-13 * expected)


def test_a_line_too_sharp_for_the_pieces_allowed_is_told_by_the_error():
    found = integrated(lambda u: 1.0 / (1e-6 + (u - 0.3) ** 2), halvings=1)
    missed = abs(found.values.item() - (np.arctan(0.7e3) + np.arctan(0.3e3)) * 1e3)
    assert missed > 1.0
    assert found.error.item() >= 0.1 * missed


def test_every_wavelength_gets_the_sum_of_its_own_rows():
    owner = np.array([2, 0, 2])
    pieces = panels(owner, np.zeros(3), np.array([1.0, 2.0, 3.0]))
    found = integrate(
        lambda some, u: (some.shape[1][:, None] * np.ones_like(u))[None],
        pieces,
        wavelengths=3,
        order=ORDER,
        tolerance=1e-12,
    )
    np.testing.assert_allclose(found.values[0], [2.0, 0.0, 4.0], atol=ROUNDING)


def test_a_density_that_is_not_finite_is_an_error_not_a_number():
    with pytest.raises(FloatingPointError, match="not finite"):
        integrated(lambda u: np.where(u > 0.5, np.nan, 1.0))


def test_an_elliptic_integral_with_both_ends_singular_converges_under_the_sine_map():
    """K(m) = integral of 1/sqrt((1 - t^2)(1 - m t^2)): Abramowitz & Stegun 17.3.1."""
    found = integrated(lambda u: 0.5 * np.pi / np.sqrt(1.0 - 0.5 * np.sin(0.5 * np.pi * u) ** 2), tolerance=1e-12)
    assert found.values.item() == pytest.approx(ellipk(0.5), abs=1e-12)
