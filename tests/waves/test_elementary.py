"""Complex functions from real ones have the digits of NumPy's own, at every place where they could lose them."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from optics.waves.elementary import Crossing, expm1, root, turn, upper_root

ROUNDING = 4e-15

parts = st.floats(-1e6, 1e6).map(lambda x: x if abs(x) > 1e-9 else 0.0)
numbers = st.builds(complex, parts, parts)


@given(numbers)
def test_a_root_squared_is_the_number_and_lies_on_its_side(z):
    z = np.array([z])
    upper, principal = upper_root(z), root(z)
    assert upper.imag >= 0.0
    assert principal.real >= 0.0
    for found in (upper, principal):
        assert found * found == pytest.approx(z, rel=ROUNDING, abs=1e-299)
    assert principal == pytest.approx(np.sqrt(z), rel=ROUNDING, abs=1e-149)


def test_the_small_part_of_a_root_keeps_its_digits():
    z = np.array([4.0 + 1e-14j, -4.0 + 1e-14j])
    assert upper_root(z)[0].imag == pytest.approx(2.5e-15, rel=ROUNDING)
    assert upper_root(z)[1].real == pytest.approx(2.5e-15, rel=ROUNDING)


def test_the_root_of_zero_can_be_divided_by():
    assert 0.0 < abs(upper_root(np.zeros(1, complex))[0]) < 1e-140


@given(st.floats(0.0, 1e3), st.builds(complex, st.floats(-50.0, 50.0), st.floats(0.0, 50.0)))
def test_a_turn_is_the_exponential(depth, kz):
    angle = abs(depth * kz.real)
    assert turn(depth, np.array([kz])) == pytest.approx(
        np.exp(2j * np.array([kz]) * depth), rel=ROUNDING, abs=ROUNDING * (1.0 + angle)
    )


def test_a_quarter_turn_passes_the_pole_of_the_tangent():
    angles = np.array([0.5 * np.pi, 1.5 * np.pi, np.pi, 0.0]) + 0j
    np.testing.assert_allclose(turn(1.0, angles), [-1.0, -1.0, 1.0, 1.0], atol=ROUNDING)


@given(st.floats(-12.0, 0.0).map(lambda power: 10.0**power), st.floats(0.0, 6.3))
def test_the_exponential_less_one_keeps_the_digits_of_small_numbers(size, direction):
    z = np.array([size * np.exp(1j * direction)])
    assert expm1(z) == pytest.approx(np.expm1(z), rel=1e-14)


def test_a_crossing_knows_sine_and_cosine_of_its_angle():
    angle = np.linspace(-7.0, 7.0, 57)
    crossing = Crossing(angle, np.full_like(angle, 0.3))
    np.testing.assert_allclose(crossing.sine_squared, np.sin(angle) ** 2, atol=ROUNDING)
    np.testing.assert_allclose(crossing.sine_cosine, np.sin(angle) * np.cos(angle), atol=ROUNDING)
    np.testing.assert_allclose(crossing.damping_less_one, np.expm1(-0.6), rtol=ROUNDING)
    np.testing.assert_allclose(crossing.turn_less_one(), np.exp(2j * angle - 0.6) - 1.0, atol=2 * ROUNDING)
