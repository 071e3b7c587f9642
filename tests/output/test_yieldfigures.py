"""The figure of yields: its numbers have the same digits, and it speaks of a strip only where it draws one."""

import pytest
from matplotlib.text import Text
from studied import FILM_ON_GLASS

from optics.fate.implied import Given, implied
from optics.fate.sampled import sampled
from optics.output.yieldfigures import yields_figure
from optics.stackfile import parse_stack


def words(figure):
    return [each.get_text() for each in figure.findobj(Text)]


@pytest.fixture(scope="module")
def found(tmp_path_factory):
    return sampled(parse_stack(FILM_ON_GLASS, folder=tmp_path_factory.mktemp("yields")))


@pytest.mark.parametrize("sd", [0.0, 0.02])
def test_values_have_the_same_digits_and_a_strip_is_named_where_it_is_drawn(found, sd):
    known = Given("internal", 0.9, sd)
    figure = yields_figure(found, implied(found, known, reading="wide"), known, reading="wide")
    said = words(figure)
    decimals = {len(word.partition("up to ")[2].partition(".")[2]) for word in said if "up to " in word}
    assert len(decimals) == 1
    assert any("strip: wide" in word for word in said) is bool(sd)
    assert bool(figure.axes[0].collections) is bool(sd)
    figure.canvas.draw()
    assert all(text.get_window_extent().x1 <= figure.bbox.width for text in figure.findobj(Text))
