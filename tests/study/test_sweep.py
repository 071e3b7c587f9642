"""Sweeps equal separate solves, wherever they run, and show fragile optima as such."""

import numpy as np
import pytest
from studied import small_stack

import optics
from optics.errors import InputError
from optics.fate.ledger import SHARES
from optics.study.answer import RAY
from optics.study.axes import from_values
from optics.study.best import best, goal
from optics.study.sweep import sweep

SAME = 1e-10  # a sweep asks the same integrals as separate solves; their last digits may differ by threads
VARY = {"film.thickness_nm": [90.0, 300.0, 1400.0], "glass.material": ["float-glass", "sapphire"]}


def test_every_point_equals_a_separate_solve():
    stack = small_stack()
    found = sweep(stack, VARY, spectra=True)
    assert list(found.table["point"]) == list(range(6))
    for row in found.table.to_dict("records"):
        own = stack.with_layer("film", thickness_nm=row["film.thickness_nm"])
        result = optics.solve(own.with_layer("glass", material=row["glass.material"]))
        for name in (*SHARES, "rate_factor"):
            assert row[name] == pytest.approx(result.averages[name], abs=SAME)
        for name in SHARES:
            assert row[f"{RAY}{name}"] == pytest.approx(result.ray_averages[name], abs=SAME)
        spectra = found.spectra[found.spectra["point"] == row["point"]]
        assert spectra["wavelength_nm"].tolist() == [740.0, 760.0, 780.0]
        for name in (*SHARES, "births_per_nm", "birth_weight", "rate_factor"):
            np.testing.assert_allclose(spectra[name], result.table[name], rtol=0, atol=SAME)


def test_two_processes_find_what_one_finds():
    alone, together = (sweep(small_stack(), VARY, workers=workers) for workers in (1, 2))
    assert together.table.equals(alone.table)


def test_a_film_known_badly_is_swept_to_thicknesses_that_its_tolerance_would_not_allow():
    from dataclasses import replace

    from optics.tolerances import Tolerance

    known = replace(small_stack(), tolerances=(Tolerance(key="film.thickness_nm", sd=60.0),))
    table = sweep(known, {"film.thickness_nm": [100.0]}).table
    assert table["trapped"].equals(sweep(small_stack(), {"film.thickness_nm": [100.0]}).table["trapped"])


def test_axes_or_cases_not_both_and_not_neither():
    for asked in ({}, {"vary": VARY, "cases": "cases.csv"}):
        with pytest.raises(InputError, match="expected one of them"):
            sweep(small_stack(), **asked)


def made_table(values):
    import pandas as pd

    return pd.DataFrame({"free_above": values})


def test_a_fragile_optimum_shows_beside_a_flat_one():
    points = from_values(small_stack(), {"film.thickness_nm": [100.0, 200.0, 300.0, 400.0, 500.0]})
    fragile = best(points, made_table([0.02, 0.03, 0.09, 0.02, 0.02]), goal("max:free_above"))
    flat = best(points, made_table([0.02, 0.087, 0.09, 0.086, 0.02]), goal("max:free_above"))
    assert fragile.point == flat.point == 2
    assert fragile.neighbours["worse_by"].tolist() == pytest.approx([0.06, 0.07])
    assert fragile.holds == {"film.thickness_nm": (300.0, 300.0)}
    assert flat.holds == {"film.thickness_nm": (200.0, 400.0)}


def test_the_smallest_is_found_on_a_grid_with_its_neighbours_on_each_axis():
    points = from_values(small_stack(), {"film.thickness_nm": [1.0, 2.0, 3.0], "contact.thickness_nm": [1.0, 2.0]})
    found = best(points, made_table([5.0, 4.0, 3.0, 0.5, 2.0, 1.0]), goal("min:free_above"))
    assert found.values == {"film.thickness_nm": 2.0, "contact.thickness_nm": 2.0}
    assert found.neighbours["free_above"].tolist() == [3.0, 4.0, 1.0]


@pytest.mark.parametrize("text", ["free_above", "max:free", "most:trapped", "max:", ""])
def test_a_goal_that_is_none_is_refused_with_an_example(text):
    with pytest.raises(InputError, match="expected max:COLUMN or min:COLUMN, for example max:free_above"):
        goal(text)
