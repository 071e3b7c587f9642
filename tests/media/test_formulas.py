"""Each formula solves the equation its docstring prints, written here a second time with plain numbers."""

import math
import pickle

import numpy as np
import pytest

from optics.errors import InputError
from optics.media import formulas
from optics.media.formulas import Formula

RANGE = (400.0, 900.0)
UM = 0.65
EXACT = 1e-14  # relative: the same few operations in another order


def _n(formula: Formula) -> float:
    return float(formula.index(UM * 1e3).real)


def test_sellmeier_solves_its_equation() -> None:
    n = _n(formulas.Sellmeier(range_nm=RANGE, terms=((0.7, 0.005), (0.4, 0.013), (0.9, 98.0)), constant=1.2))
    expected = 1.2
    for b, c in ((0.7, 0.005), (0.4, 0.013), (0.9, 98.0)):
        expected += b * UM * UM / (UM * UM - c)
    assert n**2 == pytest.approx(expected, rel=EXACT)


def test_cauchy_solves_its_equation() -> None:
    n = _n(formulas.Cauchy(range_nm=RANGE, constant=1.5, terms=((0.004, -2.0), (-0.003, 2.0))))
    assert n == pytest.approx(1.5 + 0.004 / UM**2 - 0.003 * UM**2, rel=EXACT)


def test_polynomial_solves_its_equation() -> None:
    n = _n(formulas.Polynomial(range_nm=RANGE, constant=2.2, terms=((0.01, 2.0), (0.02, -4.0))))
    assert n**2 == pytest.approx(2.2 + 0.01 * UM**2 + 0.02 / UM**4, rel=EXACT)


def test_mixed_solves_its_equation() -> None:
    formula = formulas.Mixed(range_nm=RANGE, constant=2.0, poles=((0.3, 2.0, 0.2, 2.0),), terms=((-0.01, 2.0),))
    assert _n(formula) ** 2 == pytest.approx(2.0 + 0.3 * UM**2 / (UM**2 - 0.2**2) - 0.01 * UM**2, rel=EXACT)


def test_gas_solves_its_equation() -> None:
    n = _n(formulas.Gas(range_nm=RANGE, terms=((0.0579, 238.0), (0.00168, 57.4)), constant=1e-6))
    assert n - 1.0 == pytest.approx(1e-6 + 0.0579 / (238.0 - UM**-2) + 0.00168 / (57.4 - UM**-2), rel=1e-11)


def test_herzberger_solves_its_equation() -> None:
    n = _n(formulas.Herzberger(range_nm=RANGE, coefficients=(3.4, 0.16, -0.012, 1e-3, -2e-3, 3e-3)))
    h = 1.0 / (UM**2 - 0.028)
    assert n == pytest.approx(3.4 + 0.16 * h - 0.012 * h * h + 1e-3 * UM**2 - 2e-3 * UM**4 + 3e-3 * UM**6, rel=EXACT)


def test_retro_solves_its_equation() -> None:
    n = _n(formulas.Retro(range_nm=RANGE, coefficients=(0.45, 0.1, 0.07, -0.002)))
    expected = 0.45 + 0.1 * UM**2 / (UM**2 - 0.07) - 0.002 * UM**2
    assert (n**2 - 1.0) / (n**2 + 2.0) == pytest.approx(expected, rel=EXACT)


def test_exotic_solves_its_equation() -> None:
    n = _n(formulas.Exotic(range_nm=RANGE, coefficients=(2.5, 0.024, 0.03, 0.02, 1.52, 0.877)))
    expected = 2.5 + 0.024 / (UM**2 - 0.03) + 0.02 * (UM - 1.52) / ((UM - 1.52) ** 2 + 0.877)
    assert n**2 == pytest.approx(expected, rel=EXACT)


def test_shapes_are_kept_and_nothing_absorbs() -> None:
    formula = formulas.Cauchy(range_nm=RANGE, constant=1.5, terms=((0.004, -2.0),))
    wavelengths = np.linspace(400.0, 900.0, 6).reshape(2, 3)
    index = formula.index(wavelengths)
    assert index.shape == (2, 3)
    assert index.dtype == np.complex128
    assert np.all(index.imag == 0.0)
    assert formula.index(500.0).shape == ()


def test_a_formula_refuses_wavelengths_outside_its_range() -> None:
    formula = formulas.Cauchy(range_nm=RANGE, constant=1.5)
    with pytest.raises(InputError, match="wavelength 950 nm lies outside the range 400 to 900 nm"):
        formula.index([500.0, 950.0])


def test_a_formula_refuses_where_it_has_no_real_index() -> None:
    pole = formulas.Sellmeier(range_nm=RANGE, terms=((1.0, 0.36),))
    with pytest.raises(InputError, match="no real positive index at 590 nm"):
        pole.index(590.0)
    with pytest.raises(InputError, match="no real positive index at 600 nm"):
        pole.index(600.0)


@pytest.mark.parametrize("bad", [math.nan, math.inf, "1.5", None, True])
def test_coefficients_must_be_finite_numbers(bad: object) -> None:
    with pytest.raises(InputError, match="expected a finite number"):
        formulas.Cauchy(range_nm=RANGE, constant=bad)  # type: ignore[arg-type]
    with pytest.raises(InputError, match="expected a finite number"):
        formulas.Sellmeier(range_nm=RANGE, terms=((1.0, bad),))  # type: ignore[arg-type]


@pytest.mark.parametrize("bad", [(900.0, 400.0), (0.0, 900.0), (400.0, math.inf), (math.nan, 900.0)])
def test_ranges_must_ascend_and_be_finite(bad: tuple[float, float]) -> None:
    with pytest.raises(InputError, match="range_nm"):
        formulas.Cauchy(range_nm=bad, constant=1.5)


def test_formulas_compare_by_value_hash_and_pickle() -> None:
    one = formulas.Sellmeier(range_nm=RANGE, terms=((1.0, 0.01),))
    same = formulas.Sellmeier(range_nm=RANGE, terms=[[1, 0.01]])  # type: ignore[arg-type]
    other = formulas.Sellmeier(range_nm=RANGE, terms=((1.0, 0.02),))
    assert one == same == pickle.loads(pickle.dumps(one))
    assert hash(one) == hash(same)
    assert one != other
