"""Figures of transport: no line runs through a word."""

from types import SimpleNamespace

import numpy as np
import pandas as pd
import pytest

from optics.output.transportfigures import plane_figure


def kernel(rays_at):
    """Return a kernel with rays near the birth, guided light further out and a cumulative share through both."""
    edges = np.concatenate([[0.0], np.geomspace(1e-2, 1e5, 71)])
    middle = np.sqrt(edges[1:-1] * edges[2:])
    guided = 0.34 * np.exp(-(((np.log10(middle) - 0.2) / 0.7) ** 2))
    rays = 0.02 * np.exp(-(((np.log10(middle) - rays_at) / 0.5) ** 2))
    held = 0.05 * np.exp(-(((np.log10(middle) - 3.6) / 0.4) ** 2))
    shares = {
        name: np.concatenate([[0.0], 0.1 * each])
        for name, each in (("share_guided", guided), ("share_rays", rays), ("share_held", held))
    }
    cumulative = np.cumsum(shares["share_guided"] + shares["share_rays"])
    table = pd.DataFrame({"radius_from_um": edges[:-1], "radius_to_um": edges[1:], **shares, "cumulative": cumulative})
    return SimpleNamespace(kernel=table, stack=SimpleNamespace(title="A film"))


@pytest.mark.parametrize("rays_at", [-1.0, 0.2, 1.5, 4.5])
def test_no_curve_runs_through_a_name_and_no_names_meet(rays_at):
    figure = plane_figure(kernel(rays_at))
    figure.draw_without_rendering()
    axes, right = figure.axes
    boxes = {text.get_text(): text.get_window_extent() for text in axes.texts}
    assert set(boxes) == {"guided", "rays", "held in plates, later"}
    for line in (*axes.lines, *right.lines):
        path = line.get_transform().transform_path(line.get_path())
        assert not any(path.intersects_bbox(box, filled=False) for box in boxes.values())
    names = list(boxes)
    assert not any(boxes[a].overlaps(boxes[b]) for i, a in enumerate(names) for b in names[i + 1 :])
