"""The births figure: areas are averages, names never overlap, colours survive grey print."""

from itertools import combinations

import numpy as np
import pytest
from made_results import ENDS, EVEN, SEVEN, made_result, made_stack
from matplotlib.collections import PolyCollection

from optics.media import find
from optics.output import palette
from optics.output.figures import births_figure, material_figure, save
from optics.output.labels import spot_inside, spread

ONE = {"waveguided": 1.0}
THIN = {"reabsorbed": 0.9, "waveguided": 0.03, "substrate": 0.02, "cover": 0.02, "free_below": 0.02}
TINY = {name: 0.004 for name in ENDS if name != "free_above"} | {"free_above": 0.97}
SHARES = {"seven": SEVEN, "even": EVEN, "one": ONE, "thin": THIN, "tiny": TINY}
GRIDS = {
    "whole line": np.arange(700.0, 861.0),
    "cut at its peak": np.arange(700.0, 771.0),
    "falling side": np.arange(770.0, 861.0, 5.0),
    "one wavelength": np.array([770.0]),
    "two wavelengths": np.array([760.0, 770.0]),
    "wide": np.arange(400.0, 1601.0, 4.0),
}


def drawn(shares, wavelengths, *, ray=False):
    result = made_result(shares, stack=made_stack(wavelengths_nm=wavelengths), ray=ray)
    figure = births_figure(result.table, result.ray_table, averages=result.averages, decimals=3, title="Invented $x")
    return result, figure


def names_in(figure):
    axes = figure.axes[0]
    return [text for text in axes.texts if text.get_text()]


@pytest.mark.parametrize("shares", SHARES.values(), ids=SHARES)
@pytest.mark.parametrize("wavelengths", GRIDS.values(), ids=GRIDS)
def test_every_end_with_a_share_is_named_once_and_no_names_overlap(shares, wavelengths):
    result, figure = drawn(shares, wavelengths)
    figure.canvas.draw()
    names = names_in(figure)
    labels = sorted(name.get_text() for name in names)
    present = {end: share for end, share in result.averages.items() if end in ENDS and round(share, 3)}
    assert labels == sorted(f"{end.replace('_', ' ')} {share:.3f}" for end, share in present.items())
    boxes = [name.get_window_extent() for name in names]
    assert not [1 for one, other in combinations(boxes, 2) if one.overlaps(other)]
    canvas = figure.bbox
    for box in boxes:
        assert canvas.x0 <= box.x0
        assert box.x1 <= canvas.x1
        assert canvas.y0 <= box.y0
        assert box.y1 <= canvas.y1


@pytest.mark.parametrize("shares", SHARES.values(), ids=SHARES)
def test_the_areas_of_the_bands_are_the_averages(shares):
    result, figure = drawn(shares, GRIDS["whole line"])
    bands = [each for each in figure.axes[0].collections if isinstance(each, PolyCollection)]
    for end, band in zip(palette.ENDS, bands, strict=True):
        (corners,) = band.get_paths()
        x, y = corners.vertices.T
        area = abs(np.sum(x[:-1] * y[1:] - x[1:] * y[:-1])) / 2  # shoelace rule
        # Both are trapezoid sums of the same numbers; the outline starts and ends on the band.
        assert area == pytest.approx(abs(result.averages[end.column]), abs=1e-9)


def test_a_result_by_rays_alone_draws_the_rays_as_bands():
    _, figure = drawn(SEVEN, GRIDS["whole line"], ray=True)
    assert any("by ray optics" in text.get_text() for text in figure.texts)


def test_a_figure_has_no_legend_box_and_names_both_axes():
    _, figure = drawn(SEVEN, GRIDS["whole line"])
    axes = figure.axes[0]
    assert axes.get_legend() is None
    assert axes.get_xlabel() == "wavelength (nm)"
    assert axes.child_axes[0].get_xlabel() == "photon energy (eV)"


def test_energies_stand_where_their_wavelengths_are():
    _, figure = drawn(SEVEN, GRIDS["whole line"])
    upper = figure.axes[0].child_axes[0]
    energies = [float(label.get_text()) for label in upper.get_xticklabels()]
    assert len(energies) >= 4
    # hc = 1239.841984 eV nm (CODATA 2018, exact in the revised SI)
    np.testing.assert_allclose(upper.get_xticks(), 1239.841984 / np.array(energies), rtol=1e-9)


def test_the_same_figure_gives_the_same_bytes(tmp_path):
    for suffix in ("svg", "png"):
        for name in ("a", "b"):
            save(drawn(SEVEN, GRIDS["whole line"])[1], tmp_path / f"{name}.{suffix}")
        assert (tmp_path / f"a.{suffix}").read_bytes() == (tmp_path / f"b.{suffix}").read_bytes()


def lightness(colour):
    """Return CIE L* of an sRGB colour (IEC 61966-2-1; CIE 15)."""
    channels = np.array([int(colour[place : place + 2], 16) / 255 for place in (1, 3, 5)])
    linear = np.where(channels <= 0.04045, channels / 12.92, ((channels + 0.055) / 1.055) ** 2.4)
    return 116 * float(linear @ [0.2126, 0.7152, 0.0722]) ** (1 / 3) - 16


def test_bands_grow_lighter_in_steps_that_grey_print_keeps():
    steps = np.diff([lightness(end.colour) for end in palette.ENDS])
    assert steps.min() > 9  # four times a just noticeable step of about 2.3


def test_names_stand_out_from_their_bands():
    for end in palette.ENDS:
        assert abs(lightness(end.text) - lightness(end.colour)) > 40


def test_the_palette_has_every_end_once():
    assert sorted(end.column for end in palette.ENDS) == sorted(ENDS)


def test_a_label_is_put_where_the_band_has_most_room():
    x = np.linspace(0.0, 10.0, 11)
    spot = spot_inside(x, 0 * x, np.minimum(x, 10 - x), width=2.0, height=1.0, right=10.0)
    assert spot is not None
    assert spot.x == pytest.approx(5.0, abs=0.05)
    assert spot.y == pytest.approx(2.0, abs=0.05)


def test_a_label_that_fits_nowhere_has_no_spot():
    x = np.linspace(0.0, 10.0, 11)
    assert spot_inside(x, 0 * x, 0 * x + 0.5, width=2.0, height=1.0, right=10.0) is None
    assert spot_inside(x, 0 * x, 0 * x + 5.0, width=20.0, height=1.0, right=10.0) is None
    assert spot_inside(x, 0 * x, 0 * x + 5.0, width=4.0, height=1.0, right=3.0) is None


def test_heights_are_spread_to_their_gap_within_the_limits():
    placed = spread([0.1, 0.1, 0.9, 1.0], gap=0.2, low=0.0, high=1.0)
    assert placed == pytest.approx([0.1, 0.3, 0.8, 1.0])


@pytest.mark.parametrize("name", ["ch3nh3pbi3", "air", "silver", "tio2"])
def test_a_material_is_drawn_over_its_range(name):
    figure = material_figure(find(name))
    assert [axes.get_ylabel() for axes in figure.axes] == ["n", "k"]
    figure.canvas.draw()
