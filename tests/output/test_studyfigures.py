"""Figures of studies: every stack, end and input is named, and the stack as it is marked."""

import numpy as np
import pandas as pd
import pytest
from matplotlib.colors import to_rgb
from matplotlib.text import Text

from optics.output.figures import save
from optics.output.studyfigures import bands_figure, difference_figure, ladder_figure, sensitivity_figure
from optics.output.sweepfigures import cases_figure, sweep_figure

ENDS = ("reabsorbed", "waveguided", "substrate", "cover", "elsewhere", "free_below", "free_above")
SHARES = (*ENDS, "trapped")


def words(figure):
    return [each.get_text() for each in figure.findobj(Text)]


def overlapping(figure):
    figure.canvas.draw()
    shown = [text for text in figure.findobj(Text) if text.get_text() and text.get_visible()]
    boxes = [(text.get_text(), text.get_window_extent()) for text in shown]
    return [(a, b) for i, (a, one) in enumerate(boxes) for b, other in boxes[i + 1 :] if one.overlaps(other)]


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


def test_the_stack_as_it_is_is_spoken_of_only_where_it_is_drawn():
    line = made(3).assign(**{"film.thickness_nm": [100.0, 200.0, 300.0]})
    rows = [(a, b) for a in (100.0, 200.0) for b in (1.0, 2.0, 3.0)]
    two = pd.concat([made(6), pd.DataFrame(rows, columns=["film.thickness_nm", "top.thickness_nm"])], axis=1)
    cases = line.assign(point=range(3))
    for own, on in ((200.0, True), (900.0, False)):
        values = {"film.thickness_nm": own, "top.thickness_nm": 2.0}
        figures = (
            sweep_figure(line, ["film.thickness_nm"], own=values),
            sweep_figure(two, ["film.thickness_nm", "top.thickness_nm"], own=values),
            cases_figure(cases, ["film.thickness_nm"], own=values),
        )
        for figure in figures:
            assert any("the stack as it is" in word for word in words(figure)) is on


def test_cases_are_named_by_their_values_and_many_by_their_point():
    keys = ["film.thickness_nm", "glass.material"]
    values = {keys[0]: [100.0, 200.0, 1250.0], keys[1]: ["pmma", "pmma", "sapphire"]}
    few = made(3).assign(point=range(3), **values)
    figure = cases_figure(few, keys, own={})
    assert {"100\npmma", "1250\nsapphire", "film.thickness_nm\nglass.material"} <= set(words(figure))
    assert overlapping(figure) == []
    many = made(40).assign(point=range(40), **{"film.thickness_nm": np.linspace(100.0, 900.0, 40)})
    figure = cases_figure(many, ["film.thickness_nm"], own={})
    assert any("column point of sweep.csv" in word for word in words(figure))
    assert overlapping(figure) == []


def test_lines_to_the_names_start_at_the_last_case():
    table = made(2).assign(**{"glass.material": ["pmma", "sapphire"]})
    (axes,) = sweep_figure(table, ["glass.material"], own={}).axes
    leaders = [line for line in axes.lines if line.get_transform() == axes.transAxes]
    starts = [axes.transData.inverted().transform(axes.transAxes.transform(line.get_xydata()[0])) for line in leaders]
    assert sorted(y for _, y in starts) == pytest.approx(sorted(table[end].iloc[-1] for end in ENDS))
    assert [x for x, _ in starts] == pytest.approx([1.0] * len(ENDS))


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


def test_stacks_that_do_not_differ_are_said_so_over_the_wavelengths_of_the_light():
    flat = pd.DataFrame(0.0, index=range(3), columns=list(SHARES))
    figure = difference_figure(flat.assign(stack="other", wavelength_nm=[610.0, 680.0, 750.0]))
    (axes,) = figure.axes
    assert axes.get_xlim() == (610.0, 750.0)
    assert "no difference" in words(figure)
    assert figure.legends == []


@pytest.mark.parametrize("inputs", [1, 3, 9])
def test_no_words_of_sensitivities_overlap_and_their_axes_are_named(inputs):
    names = [f"a layer with a name.thickness_nm {number}" for number in range(inputs)]
    indices = pd.DataFrame([{"share": s, "input": i, "first_order": 0.4, "total": 0.5} for s in SHARES for i in names])
    bands = pd.DataFrame({"sd": 0.01}, index=list(SHARES))
    figure = sensitivity_figure(indices, bands, title="Invented red emitter between clear contacts on float glass")
    assert "part of the variance of the share" in words(figure)
    assert overlapping(figure) == []


def test_the_palest_band_has_an_outline_that_is_seen_on_white(tmp_path):
    levels = {"low_95": 0.1, "low_68": 0.2, "median": 0.3, "high_68": 0.4, "high_95": 0.5}
    rows = [{"wavelength_nm": w, "share": "free_above", **levels} for w in (700.0, 710.0)]
    figure = bands_figure(pd.DataFrame(rows))
    (axes,) = figure.axes
    outlines = axes.lines[:-1]
    assert len(outlines) == 4
    for each in outlines:
        assert _contrast_on_white(each.get_color()) > 3.0  # WCAG 2.1, 1.4.11: graphical objects
    save(figure, tmp_path / "bands.png")


def _contrast_on_white(colour):
    """WCAG 2.1, relative luminance and contrast ratio."""
    channels = np.array(to_rgb(colour))
    linear = np.where(channels <= 0.04045, channels / 12.92, ((channels + 0.055) / 1.055) ** 2.4)
    return 1.05 / (float(linear @ [0.2126, 0.7152, 0.0722]) + 0.05)


def test_bands_and_sensitivities_name_shares_and_inputs():
    levels = {"low_95": 0.1, "low_68": 0.2, "median": 0.3, "high_68": 0.4, "high_95": 0.5}
    rows = [{"wavelength_nm": w, "share": share, **levels} for share in SHARES for w in (700.0, 710.0)]
    assert {"trapped", "free above"} <= set(words(bands_figure(pd.DataFrame(rows))))
    indices = pd.DataFrame(
        [{"share": s, "input": i, "first_order": 0.4, "total": 0.5} for s in SHARES for i in ("film.n", "film.k")]
    )
    bands = pd.DataFrame({"sd": 0.01}, index=list(SHARES))
    assert {"film.n", "film.k"} <= set(words(sensitivity_figure(indices, bands)))
