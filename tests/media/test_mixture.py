"""Bruggeman mixtures: limits, symmetry, the known closed cases."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from optics.errors import InputError
from optics.media.dispersion import Constant, Tabulated
from optics.media.mixture import Bruggeman, bruggeman

INDEX = st.tuples(st.floats(0.05, 4), st.floats(0, 5)).map(lambda nk: complex(*nk))


@given(INDEX, INDEX, st.floats(0, 1))
def test_a_mixture_solves_its_equation_and_absorbs(one, two, share):
    index = bruggeman(np.array(one), np.array(two), share)
    eps, first, second = complex(index) ** 2, one**2, two**2
    assert index.imag >= 0.0
    left = share * (first - eps) * (second + 2 * eps) + (1 - share) * (second - eps) * (first + 2 * eps)
    assert abs(left) <= 1e-9 * (abs(first) + abs(second)) ** 2


@given(INDEX, INDEX, st.floats(0, 1))
def test_either_part_may_be_named_first(one, two, share):
    there = bruggeman(np.array(one), np.array(two), share)
    back = bruggeman(np.array(two), np.array(one), 1.0 - share)
    assert complex(there) == pytest.approx(complex(back), rel=1e-6, abs=1e-6)


def test_a_mixture_of_clear_media_lies_between_them():
    shares = np.linspace(0.0, 1.0, 11)
    index = [complex(bruggeman(np.array(2.5 + 0j), np.array(1.0 + 0j), share)) for share in shares]
    assert all(each.imag == 0.0 for each in index)
    assert index[0] == pytest.approx(1.0)
    assert index[-1] == pytest.approx(2.5)
    assert np.all(np.diff([each.real for each in index]) > 0)


def test_a_mixture_is_known_where_both_parts_are():
    table = Tabulated(np.array([500.0, 600.0, 700.0]), np.array([2.0, 2.1, 2.2]), np.zeros(3))
    mixed = Bruggeman(table, Constant(1.0), 0.5)
    assert mixed.range_nm == (500.0, 700.0)
    with pytest.raises(InputError):
        mixed.index(800.0)
