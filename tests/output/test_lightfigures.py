"""Figures of light outside: what they show, and that no words of theirs overlap."""

import numpy as np
import pandas as pd
import pytest
from made_results import made_result

from optics.fate.overlay import Measured
from optics.output.figures import save
from optics.output.lightfigures import pattern_figure, spectra_figure


def words(figure):
    """Return every text of a figure with its box."""
    figure.canvas.draw()
    texts = [*figure.texts, *(text for axes in figure.axes for text in axes.texts)]
    return {text.get_text(): text.get_window_extent() for text in texts if text.get_text()}


def overlapping(boxes):
    pairs = [(a, b) for i, a in enumerate(boxes) for b in list(boxes)[i + 1 :]]
    return [(a, b) for a, b in pairs if boxes[a].overlaps(boxes[b])]


def measured():
    nm = np.linspace(740.0, 800.0, 16)
    return Measured("above", nm, 1e-3 * np.exp(-(((nm - 766.0) / 20.0) ** 2)), 0.02)


@pytest.mark.parametrize("over", [None, measured()], ids=["computed", "with a measurement"])
def test_every_curve_is_named_once_beside_the_plot(over):
    spectra = made_result().spectra
    spectra["collected_per_nm"] = 0.5 * spectra["above_per_nm"]
    figure = spectra_figure(spectra, measured=over, title="A title of the usual length for a film on glass")
    found = words(figure)
    for name in ("born inside", "out above", "out below", "collected", *(["measured"] if over else [])):
        assert sum(text.startswith(name) for text in found) == 1
    assert overlapping(found) == []
    assert all(box.x0 >= 0 and box.x1 <= figure.bbox.width for box in found.values())


def test_a_measurement_is_said_to_be_fitted_and_not_to_peak_at_one():
    for over in (None, measured()):
        figure = spectra_figure(made_result().spectra, measured=over)
        axis = figure.axes[0].get_ylabel()
        assert axis == ("light per nm, peak = 1" if over is None else "light per nm, peak of each curve = 1")
        assert any("measured points to fit theirs" in text for text in words(figure)) is (over is not None)


def test_what_is_called_dotted_is_dotted():
    figure = spectra_figure(made_result().spectra)
    dotted = [line for line in figure.axes[0].lines if line.get_dash_capstyle() == "round"]
    assert len(dotted) == 1
    _, (on, off) = dotted[0]._unscaled_dash_pattern
    assert on < 0.2 < off


def test_curves_without_light_are_left_out_and_the_others_peak_at_one():
    figure = spectra_figure(made_result({"reabsorbed": 0.9, "free_above": 0.1}).spectra)
    names = " ".join(words(figure))
    assert "out above" in names
    assert "out below" not in names
    for line in figure.axes[0].lines:
        assert line.get_ydata().max() == pytest.approx(1.0)


def pattern():
    angle = np.arange(0.0, 90.5, 0.5)
    lambertian = 0.012 * np.cos(np.deg2rad(angle)).clip(0)
    columns = {"wave": lambertian**1.1, "ray": 0.9 * lambertian}
    table = {f"{name}_per_sr": values for name, values in columns.items()}
    return pd.DataFrame(
        {"angle_deg": angle, **table, "wave_lambertian_per_sr": lambertian, "ray_lambertian_per_sr": 0.9 * lambertian}
    )


@pytest.mark.parametrize("aperture", [None, 64.2, 2.0])
@pytest.mark.parametrize("ray", [False, True])
def test_the_pattern_shows_models_a_dashed_lambertian_and_the_aperture(aperture, ray):
    table = pattern()
    if ray:
        table = table[[name for name in table if not name.startswith("wave")]]
    figure = pattern_figure(table, side="above", aperture_deg=aperture, na=0.9, title="A film")
    found = words(figure)
    assert sum("Lambertian" in text for text in found) == 1
    assert ("wave optics" in found) is not ray
    assert ("NA 0.9" in found) is (aperture is not None)
    assert overlapping(found) == []
    dashed = [line for line in figure.axes[0].lines if line.get_linestyle() == "--"]
    assert len(dashed) == 1


def test_a_figure_is_written_the_same_twice(tmp_path):
    for name in ("one.svg", "two.svg"):
        save(spectra_figure(made_result().spectra), tmp_path / name)
    assert (tmp_path / "one.svg").read_bytes() == (tmp_path / "two.svg").read_bytes()
