"""Constants, tables and joined media."""

import math
import pickle

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from numpy.typing import NDArray

from optics.errors import InputError
from optics.media import find
from optics.media.dispersion import Cauchy, Constant, Joined, Tabulated, extinction_table


def _table() -> Tabulated:
    return Tabulated(
        np.array([400.0, 500.0, 550.0, 700.0]), np.array([2.0, 2.2, 2.1, 1.9]), np.array([0.5, 0.1, 0.0, 0.0])
    )


def test_a_constant_is_the_same_everywhere() -> None:
    index = Constant(2.5, 0.02).index([[1.0, 500.0], [1e6, 1e9]])
    assert np.array_equal(index, np.full((2, 2), 2.5 + 0.02j))


@pytest.mark.parametrize("n", [0.0, -1.0, math.nan, math.inf, "1.5", True, None])
def test_a_constant_refuses_an_impossible_n(n: object) -> None:
    with pytest.raises(InputError, match="n: found"):
        Constant(n)  # type: ignore[arg-type]


@pytest.mark.parametrize("k", [-1e-9, math.nan, math.inf, "0", True])
def test_a_constant_refuses_an_impossible_k(k: object) -> None:
    with pytest.raises(InputError, match="k: found"):
        Constant(1.5, k)  # type: ignore[arg-type]


def test_a_constant_tells_both_faults_at_once() -> None:
    with pytest.raises(InputError) as caught:
        Constant(-1.0, -1.0)
    assert len(caught.value.faults) == 2


def test_a_table_returns_its_own_rows_exactly() -> None:
    table = _table()
    assert np.array_equal(table.index(table.wavelength_nm), table.n + 1j * table.k)


def test_a_table_refuses_outside_naming_range_wavelength_and_cure() -> None:
    with pytest.raises(InputError) as caught:
        _table().index([350.0, 500.0, 800.0])
    (fault,) = caught.value.faults
    for part in ("2 of 3 wavelengths", "350 to 800 nm", "400 to 700 nm", "take a table that covers it"):
        assert part in fault


def test_a_range_end_that_went_through_energy_is_still_inside() -> None:
    outwards = np.array([400.0 * (1 - 1e-12), 700.0 * (1 + 1e-12)])
    assert np.array_equal(_table().index(outwards), _table().index([400.0, 700.0]))
    with pytest.raises(InputError):
        _table().index(700.0 * (1 + 1e-8))


@pytest.mark.parametrize("bad", [math.nan, math.inf, 0.0, -500.0, "blue", None])
def test_wavelengths_must_be_positive_numbers(bad: object) -> None:
    with pytest.raises(InputError, match="wavelength: found"):
        _table().index(bad)  # type: ignore[arg-type]


def test_the_callers_arrays_are_neither_kept_nor_written() -> None:
    wavelengths, n, k = np.array([400.0, 500.0]), np.array([1.5, 1.6]), np.array([0.1, 0.2])
    asked = np.array([400.0, 450.0])
    table = Tabulated(wavelengths, n, k)
    table.index(asked)
    wavelengths[:] = n[:] = k[:] = -1.0
    assert np.array_equal(table.index(400.0), np.array(1.5 + 0.1j))
    assert np.array_equal(asked, [400.0, 450.0])
    with pytest.raises(ValueError, match="read-only"):
        table.n[0] = 3.0


def test_tables_compare_by_value_hash_and_stay_read_only_through_pickle() -> None:
    copy = pickle.loads(pickle.dumps(_table()))
    assert copy == _table()
    assert hash(copy) == hash(_table())
    assert not copy.n.flags.writeable
    assert copy != Tabulated(copy.wavelength_nm, copy.n, copy.k + 1e-12)
    assert copy != "table"


@pytest.mark.parametrize(
    ("wavelengths", "n", "k", "fault"),
    [
        ([500.0, 400.0], [1.5, 1.5], [0.0, 0.0], "table row 2: wavelength_nm: found 400 nm after 500 nm"),
        ([400.0, 400.0], [1.5, 1.5], [0.0, 0.0], "expected strictly ascending"),
        ([400.0, math.nan], [1.5, 1.5], [0.0, 0.0], "table row 2: wavelength_nm: found nan"),
        ([0.0, 400.0], [1.5, 1.5], [0.0, 0.0], "table row 1: wavelength_nm: found 0"),
        ([400.0, 500.0], [1.5, 0.0], [0.0, 0.0], "table row 2: n: found 0"),
        ([400.0, 500.0], [1.5, math.inf], [0.0, 0.0], "table row 2: n: found inf"),
        ([400.0, 500.0], [1.5, 1.5], [-1e-9, 0.0], "table row 1: k: found -1e-09"),
        ([400.0], [1.5], [0.0], "expected at least 2"),
        ([400.0, 500.0], [1.5], [0.0, 0.0], "expected three equal columns"),
        ([[400.0, 500.0]], [[1.5, 1.5]], [[0.0, 0.0]], "expected three equal columns"),
        (["a", "b"], [1.5, 1.5], [0.0, 0.0], "expected numbers"),
    ],
)
def test_a_table_refuses_impossible_rows(wavelengths: list, n: list, k: list, fault: str) -> None:  # type: ignore[type-arg]
    with pytest.raises(InputError, match=fault):
        Tabulated(wavelengths, n, k)  # type: ignore[arg-type]


@st.composite
def _tables(draw: st.DrawFn) -> Tabulated:
    rows = draw(st.integers(2, 12))
    steps = draw(st.lists(st.floats(1e-3, 300.0), min_size=rows, max_size=rows))
    n = draw(st.lists(st.floats(1e-3, 8.0), min_size=rows, max_size=rows))
    k = draw(st.lists(st.one_of(st.just(0.0), st.floats(1e-12, 8.0)), min_size=rows, max_size=rows))
    return Tabulated(200.0 + np.cumsum(steps), np.array(n), np.array(k))


@given(_tables())
def test_between_two_rows_the_value_stays_between_theirs(table: Tabulated) -> None:
    rounding = 1e-13  # relative to the largest value: cubics evaluated in float64
    steps = np.linspace(0.0, 1.0, 9)
    left, right = table.wavelength_nm[:-1, None], table.wavelength_nm[1:, None]
    index = table.index(left + (right - left) * steps)  # (interval, step)
    for read, rows in ((index.real, table.n), (index.imag, table.k)):
        slack = rounding * rows.max()
        assert np.all(read >= np.minimum(rows[:-1], rows[1:])[:, None] - slack)
        assert np.all(read <= np.maximum(rows[:-1], rows[1:])[:, None] + slack)
    assert np.all(index.imag >= 0.0)


# Dense published tables, every second (fourth) row removed and read back: the largest error measured in n and k,
# rounded up; reading the same tables along straight lines errs by the factor in the last column or more.
THINNED = [
    ("ch3nh3pbi3", 2, 4e-4, 4e-4, 3.0),
    ("ch3nh3pbi3", 4, 1e-3, 1.1e-3, 3.0),
    ("ito", 2, 3e-4, 8e-5, 5.0),
    ("cspbbr3", 2, 1.4e-3, 2.3e-3, 2.0),
    ("tio2", 2, 7e-4, 3e-4, 5.0),
    ("tio2", 4, 1.7e-3, 9e-4, 4.0),
]


@pytest.mark.parametrize(("name", "step", "n_error", "k_error", "better_than_lines"), THINNED)
def test_thinned_published_tables_are_read_back(
    name: str, step: int, n_error: float, k_error: float, better_than_lines: float
) -> None:
    dense = find(name).medium
    assert isinstance(dense, Tabulated)
    thin = Tabulated(dense.wavelength_nm[::step], dense.n[::step], dense.k[::step])
    inside = slice(2 * step, thin.wavelength_nm.size * step - 2 * step)  # interior: ends have one-sided slopes
    wavelengths, n, k = dense.wavelength_nm[inside], dense.n[inside], dense.k[inside]
    read = thin.index(wavelengths)
    assert np.abs(read.real - n).max() < n_error
    assert np.abs(read.imag - k).max() < k_error
    lines = np.interp(wavelengths, thin.wavelength_nm, thin.n)
    assert _rms(lines - n) > better_than_lines * _rms(read.real - n)


def _rms(values: NDArray[np.float64]) -> float:
    return float(np.sqrt(np.mean(values**2)))


def test_joined_media_take_n_from_one_and_k_from_the_other() -> None:
    clear = Cauchy(range_nm=(300.0, 900.0), constant=1.5)
    joined = Joined(clear, extinction_table([350.0, 1000.0], [0.1, 0.3]))
    assert joined.range_nm == (350.0, 900.0)
    assert joined.index(675.0) == pytest.approx(1.5 + 0.2j, rel=1e-14)  # halfway along a straight line
    with pytest.raises(InputError, match="350 to 900 nm"):
        joined.index(340.0)
    assert joined == pickle.loads(pickle.dumps(joined))


def test_joined_media_must_overlap() -> None:
    clear = Cauchy(range_nm=(300.0, 400.0), constant=1.5)
    with pytest.raises(InputError, match="expected ranges that overlap"):
        Joined(clear, extinction_table([500.0, 600.0], [0.0, 0.0]))
