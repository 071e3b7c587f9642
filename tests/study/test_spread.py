"""Draws, indices and bands of tolerance studies."""

from dataclasses import replace

import numpy as np
import pytest
from studied import small_stack

import optics
from optics.errors import InputError
from optics.fate.ledger import SHARES
from optics.media import find
from optics.study.inputs import Input, input_uncertainty
from optics.study.spread import drawn_points, indices_of, tolerance, values_drawn
from optics.tolerances import Alternatives, Tolerance

SAMPLES = 4096
INDEX = 0.02  # error of an index at 4096 samples; the formulas are exact
SAME = 1e-10


def inputs(*sds, shape="uniform"):
    return [Input(f"x{place}", 0.0, sd, shape, True) for place, sd in enumerate(sds)]


def test_indices_of_the_ishigami_function():
    # Ishigami & Homma, Proc. ISUMA 90, 398 (1990); a = 7, b = 0.1 on (-pi, pi); indices in closed form
    a, b, pi = 7.0, 0.1, np.pi
    drawn = values_drawn(inputs(*[pi / 3**0.5] * 3), samples=SAMPLES, seed=3)
    values = np.sin(drawn[:, 0]) + a * np.sin(drawn[:, 1]) ** 2 + b * drawn[:, 2] ** 4 * np.sin(drawn[:, 0])
    first, total = indices_of(values[:, None], samples=SAMPLES, inputs=3)
    v1, v2, v13 = 0.5 * (1 + b * pi**4 / 5) ** 2, a**2 / 8, b**2 * pi**8 * (1 / 18 - 1 / 50)
    whole = v1 + v2 + v13
    np.testing.assert_allclose(first[0], [v1 / whole, v2 / whole, 0.0], atol=INDEX)
    np.testing.assert_allclose(total[0], [(v1 + v13) / whole, v2 / whole, v13 / whole], atol=INDEX)


def test_indices_of_a_linearised_stack():
    """With small tolerances a share is linear in its inputs: an index is a squared move over the sum of them."""
    known = (
        Tolerance(key="film.thickness_nm", sd=0.6),
        Tolerance(key="film.n_offset", sd=0.002),
        Tolerance(key="film.k_scale", sd=0.01),
    )
    stack = replace(small_stack(wavelengths_nm=(760.0,)), tolerances=known)
    moves = input_uncertainty(optics.solve(stack)).by_input
    found = tolerance(stack, samples=64)
    for share in ("trapped", "substrate", "free_above"):
        expected = (moves[share] ** 2 / (moves[share] ** 2).sum()).to_numpy()
        rows = found.indices[found.indices["share"] == share]
        # 64 samples of a linear function; what is not linear is about a hundredth of the variance
        np.testing.assert_allclose(rows["total"], expected, atol=0.05)
        np.testing.assert_allclose(rows["first_order"], expected, atol=0.1)


def test_draws_have_the_mean_and_spread_that_were_asked_for():
    for shape in ("normal", "uniform"):
        drawn = values_drawn(
            [replace(each, value=5.0) for each in inputs(2.0, 0.5, shape=shape)], samples=1024, seed=0
        )[:2048]
        np.testing.assert_allclose(drawn.mean(axis=0), 5.0, atol=0.01)
        np.testing.assert_allclose(drawn.std(axis=0), [2.0, 0.5], rtol=0.01)
        if shape == "uniform":
            assert np.abs(drawn - 5.0).max() <= 3**0.5 * 2.0


@pytest.fixture(scope="module")
def doubted():
    known = (Tolerance(key="film.thickness_nm", sd=6.0), Tolerance(key="film.k_scale", sd=0.1, shape="uniform"))
    others = Alternatives(key="film.material", materials=(find(2.3 + 0.03j), find(2.5 + 0.01j)))
    return replace(small_stack(), tolerances=known, alternatives=(others,))


@pytest.fixture(scope="module")
def spread_of(doubted):
    return tolerance(doubted, samples=16)


def test_every_draw_equals_a_separate_solve(doubted):
    from optics.study.sweep import work

    draws = drawn_points(doubted, samples=16, seed=0)
    bare = replace(doubted, tolerances=(), alternatives=())
    for point in (0, 17, 40, draws.own + 1):
        (found,) = work(draws.plan.pack([point]))
        values = draws.plan.points.values(point)
        index = 2.4 + values["film.n_offset"] + 0.02j * values["film.k_scale"]
        material = index if point < draws.own else values["film.material"]
        own = bare.with_layer("film", thickness_nm=values["film.thickness_nm"], material=material)
        averages = optics.solve(own).averages
        for share in SHARES:
            assert found[share] == pytest.approx(averages[share], abs=SAME)


def test_bands_are_nested_and_hold_the_median(spread_of):
    bands = spread_of.bands
    order = bands[["low_95", "low_68", "median", "high_68", "high_95"]].to_numpy()
    assert (np.diff(order, axis=1) >= 0).all()
    own = optics.solve(replace(small_stack())).averages
    assert bands.loc["trapped", "own"] == pytest.approx(own["trapped"], abs=SAME)
    assert set(spread_of.by_wavelength["wavelength_nm"]) == {740.0, 760.0, 780.0}


def test_other_tables_stand_apart(spread_of, doubted):
    assert spread_of.alternatives["material"].tolist() == ["as in the stack", "2.3+0.03i", "2.5+0.01i"]
    other = replace(doubted, tolerances=(), alternatives=()).with_layer("film", material=2.5 + 0.01j)
    assert spread_of.alternatives["trapped"].iloc[2] == pytest.approx(optics.solve(other).averages["trapped"], abs=SAME)


def test_convergence_is_stated_and_models_stand_beside(spread_of):
    assert 0.0 < spread_of.convergence["band"] < 0.1
    assert spread_of.own["model"] == "wave"
    assert spread_of.own["ray_trapped"] != spread_of.own["trapped"]


@pytest.mark.parametrize("samples", [0, 8, 100, -16])
def test_a_number_of_samples_that_is_no_power_of_two_is_refused_with_one_that_is(samples):
    with pytest.raises(InputError, match="expected a power of two from 16, for example"):
        drawn_points(small_stack(), samples=samples, seed=0)


def test_an_input_that_moves_nothing_has_no_index():
    drawn = values_drawn(inputs(1.0, 1.0), samples=64, seed=0)
    first, total = indices_of(np.stack([drawn[:, 0], np.ones(len(drawn))], axis=1), samples=64, inputs=2)
    assert total[0] == pytest.approx([1.0, 0.0], abs=0.05)
    assert first[1].tolist() == total[1].tolist() == [0.0, 0.0]
