"""What an answer owes to its inputs, one at a time."""

from dataclasses import replace

import numpy as np
import pytest
from studied import small_stack

import optics
from optics.study.inputs import FIGURES, input_uncertainty, inputs_of
from optics.tolerances import Tolerance

ROUNDING = 1e-12


def test_the_films_thickness_n_and_k_are_in_doubt_in_any_case():
    inputs = inputs_of(small_stack())
    assert [(i.key, i.sd, i.stated) for i in inputs] == [
        ("film.thickness_nm", 15.0, False),  # 5 % of 300 nm
        ("film.n_offset", 0.02, False),
        ("film.k_scale", 0.10, False),
    ]


def test_what_the_file_says_stands_in_the_place_of_defaults():
    known = (
        Tolerance(key="film.thickness_nm", sd=3.0),
        Tolerance(key="film.material.k", sd=0.001, shape="uniform"),
        Tolerance(key="contact.thickness_nm", sd=2.0),
    )
    inputs = inputs_of(replace(small_stack(), tolerances=known))
    assert [i.key for i in inputs] == ["contact.thickness_nm", "film.material.k", "film.thickness_nm", "film.n_offset"]
    assert [i.stated for i in inputs] == [True, True, True, False]


def test_a_clear_film_has_no_k_in_doubt():
    assert "film.k_scale" not in [i.key for i in inputs_of(small_stack(2.4))]


def test_small_moves_are_derivatives_times_standard_deviations():
    stack = replace(small_stack(), tolerances=(Tolerance(key="film.thickness_nm", sd=0.01),))
    found = input_uncertainty(optics.solve(stack))
    up, down = (optics.solve(stack.with_layer("film", thickness_nm=300.0 + step)).averages for step in (0.01, -0.01))
    row = found.by_input.set_index("key").loc["film.thickness_nm"]
    for name in FIGURES:
        # curvature is in the second order of the step: 1e-4 of it
        assert row[name] == pytest.approx(abs(up[name] - down[name]) / 2, rel=1e-2, abs=1e-9)


def test_inputs_add_as_independent_ones_do():
    found = input_uncertainty(optics.solve(small_stack()))
    for name in FIGURES:
        assert found.by_share[name] == pytest.approx(np.sqrt((found.by_input[name] ** 2).sum()), abs=ROUNDING)


def test_the_most_sensitive_input_is_the_one_that_moves_a_share_most():
    known = (Tolerance(key="contact.thickness_nm", sd=15.0), Tolerance(key="film.thickness_nm", sd=0.01))
    known += (Tolerance(key="film.n_offset", sd=1e-6), Tolerance(key="film.k_scale", sd=1e-6))
    found = input_uncertainty(optics.solve(replace(small_stack(), tolerances=known)))
    assert found.most_sensitive[0] == "contact.thickness_nm"
    assert any("Most sensitive to contact.thickness_nm" in line for line in found.lines())


def test_a_share_at_its_maximum_is_not_taken_for_one_that_nothing_moves():
    stack = small_stack()
    at = np.linspace(250.0, 350.0, 41)
    shares = [optics.solve(stack.with_layer("film", thickness_nm=each)).averages["free_above"] for each in at]
    top = int(np.argmax(shares[1:-1])) + 1
    if not 0 < top < 40:
        pytest.skip("no maximum here")
    own = replace(
        stack.with_layer("film", thickness_nm=float(at[top])), tolerances=(Tolerance(key="film.thickness_nm", sd=15.0),)
    )
    row = input_uncertainty(optics.solve(own)).by_input.set_index("key").loc["film.thickness_nm"]
    assert row["free_above"] > 1e-4
