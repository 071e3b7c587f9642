"""Figures of studies: every stack, end and input is named, and the stack as it is marked."""

import numpy as np
import pandas as pd
import pytest
from matplotlib.text import Text

from optics.output.studyfigures import bands_figure, difference_figure, ladder_figure, sensitivity_figure, sweep_figure

ENDS = ("reabsorbed", "waveguided", "substrate", "cover", "elsewhere", "free_below", "free_above")
SHARES = (*ENDS, "trapped")


def words(figure):
    return [each.get_text() for each in figure.findobj(Text)]


def made(points):
    rng = np.random.default_rng(1)
    shares = rng.dirichlet(np.ones(len(ENDS)), size=points)
    table = pd.DataFrame(shares, columns=list(ENDS))
    return table.assign(trapped=table["reabsorbed"] + table["waveguided"])


def test_lines_of_a_sweep_are_named_and_the_stack_as_it_is_marked():
    table = made(5).assign(**{"film.thickness_nm": [100.0, 200.0, 300.0, 400.0, 500.0]})
    figure = sweep_figure(table, ["film.thickness_nm"], own={"film.thickness_nm": 250.0})
    assert {"free above", "waveguided", "film.thickness_nm"} <= set(words(figure))
    (axes,) = figure.axes
    assert any(list(each.get_xdata()) == [250.0, 250.0] for each in axes.lines)


def test_an_end_that_nothing_meets_gets_no_line():
    table = made(3).assign(cover=0.0, **{"film.thickness_nm": [1.0, 2.0, 3.0]})
    assert "cover" not in words(sweep_figure(table, ["film.thickness_nm"], own={}))


@pytest.mark.parametrize("keys", [("film.thickness_nm", "glass.material"), ("glass.material", "film.thickness_nm")])
def test_maps_put_numbers_across_and_materials_upwards(keys):
    sizes, names = [100.0, 200.0, 300.0], ["float-glass", "sapphire"]
    values = {"film.thickness_nm": sizes, "glass.material": names}
    rows = [(a, b) for a in values[keys[0]] for b in values[keys[1]]]
    table = pd.concat([made(6), pd.DataFrame(rows, columns=list(keys))], axis=1)
    figure = sweep_figure(table, list(keys), own={"film.thickness_nm": 200.0, "glass.material": "sapphire"})
    mesh = figure.axes[0].collections[0]
    shown = np.asarray(mesh.get_array()).reshape(2, 3)
    for x, size in enumerate(sizes):
        for y, name in enumerate(names):
            row = table[(table["film.thickness_nm"] == size) & (table["glass.material"] == name)]
            assert shown[y, x] == row["trapped"].iloc[0]
    assert {"sapphire", "trapped", "free above"} <= set(words(figure))


def test_three_axes_are_not_drawn():
    assert sweep_figure(made(1), ["a", "b", "c"], own={}) is None


def test_a_ladder_has_a_mark_a_stack_at_its_share():
    shares = pd.DataFrame(made(2).to_numpy().T, index=list(SHARES), columns=["bare", "covered"])
    figure = ladder_figure(shares)
    (axes,) = figure.axes
    marks = [line for line in axes.lines if line.get_label() == "covered"]
    assert sorted(marks[0].get_xdata()) == pytest.approx(sorted(shares["covered"]))
    assert {"bare", "covered", "trapped", "free below"} <= set(words(figure))


def test_differences_have_a_panel_a_stack_on_one_scale():
    parts = [made(4).assign(stack=name, wavelength_nm=[1.0, 2.0, 3.0, 4.0]) for name in ("one", "two")]
    figure = difference_figure(pd.concat(parts))
    assert len(figure.axes) == 2
    assert figure.axes[0].get_ylim() == figure.axes[1].get_ylim()
    assert {"one", "two"} <= set(words(figure))


def test_bands_and_sensitivities_name_shares_and_inputs():
    levels = {"low_95": 0.1, "low_68": 0.2, "median": 0.3, "high_68": 0.4, "high_95": 0.5}
    rows = [{"wavelength_nm": w, "share": share, **levels} for share in SHARES for w in (700.0, 710.0)]
    assert {"trapped", "free above"} <= set(words(bands_figure(pd.DataFrame(rows))))
    indices = pd.DataFrame(
        [{"share": s, "input": i, "first_order": 0.4, "total": 0.5} for s in SHARES for i in ("film.n", "film.k")]
    )
    bands = pd.DataFrame({"sd": 0.01}, index=list(SHARES))
    assert {"film.n", "film.k"} <= set(words(sensitivity_figure(indices, bands)))
