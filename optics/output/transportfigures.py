"""Figures of transport: the kernel in the plane, the matrix over the depth."""

from collections.abc import Sequence
from itertools import product
from typing import TYPE_CHECKING, Any

import numpy as np
from matplotlib.figure import Figure

if TYPE_CHECKING:
    from matplotlib.lines import Line2D
    from matplotlib.transforms import Bbox

    from optics.transport.depth import InDepth
    from optics.transport.inplane import InPlane

SIZE = (7.2, 4.2)
UPWARDS = (4, 10, 18, 28, 40, 56, 75, 100)  # how far above a peak its name may stand [points], the nearest first
DARK, MIDDLE, LIGHT = "#1b3a4b", "#3e7cb1", "#81b29a"


def plane_figure(found: "InPlane") -> Figure:
    """Draw the share taken back per decade of radius, by its parts, and the cumulative share."""
    kernel = found.kernel.iloc[1:]
    low, high = kernel["radius_from_um"].to_numpy(), kernel["radius_to_um"].to_numpy()
    middle, decades = np.sqrt(low * high), np.log10(high / low)
    figure = Figure(figsize=SIZE, layout="constrained")
    axes = figure.subplots()
    top = 0.0
    peaks: list[tuple[str, float, float, str]] = []
    for column, name, colour in (
        ("share_guided", "guided", DARK),
        ("share_rays", "rays", MIDDLE),
        ("share_held", "held in plates, later", LIGHT),
    ):
        density = kernel[column].to_numpy() / decades
        if density.max() > 1e-6:
            axes.plot(middle, density, color=colour, lw=1.8)
            at = int(np.argmax(density))
            peaks.append((name, float(middle[at]), float(density[at]), colour))
            top = max(top, float(density[at]))
    axes.set_xscale("log")
    axes.set_xlim(middle[0], middle[-1])
    axes.set_ylim(0.0, 1.15 * top if top else 1.0)
    axes.set_xlabel("in-plane distance from the birth (um)")
    axes.set_ylabel("share of births taken back, per decade")
    right = axes.twinx()
    right.plot(high, kernel["cumulative"], color="0.45", lw=1.0, ls="--")
    right.set_ylim(0.0, 1.0)
    right.set_ylabel("share taken back within the distance (dashed)")
    axes.set_title(found.stack.title or "Transport in the plane", fontsize=10)
    _plain(axes)
    _name_peaks(axes, peaks, [*axes.lines, *right.lines])
    return figure


def _name_peaks(axes: Any, peaks: "list[tuple[str, float, float, str]]", lines: "Sequence[Line2D]") -> None:
    """Write the names of curves beside their peaks, where no line runs through them."""
    axes.figure.draw_without_rendering()  # the layout is known from here on
    paths = [line.get_transform().transform_path(line.get_path()) for line in lines]
    frame = axes.get_window_extent()
    placed: list[Bbox] = []
    for name, x, y, colour in peaks:
        text = axes.annotate(name, (x, y), (0, 0), textcoords="offset points", color=colour)
        boxes = {}
        for side, up in product(("left", "right", "center"), UPWARDS):
            text.set(ha=side, position=({"left": 6, "right": -6, "center": 0}[side], up))
            box = text.get_window_extent()
            inside = frame.x0 <= box.x0 and box.x1 <= frame.x1 and frame.y0 <= box.y0 and box.y1 <= frame.y1
            crossed = sum(path.intersects_bbox(box.padded(2), filled=False) for path in paths)
            boxes[side, up] = (not inside, crossed + sum(box.overlaps(other) for other in placed), up)
        side, up = min(boxes, key=lambda each: boxes[each])
        text.set(ha=side, position=({"left": 6, "right": -6, "center": 0}[side], up))
        placed.append(text.get_window_extent())


def depth_figure(found: "InDepth") -> Figure:
    """Draw the leading model's matrix, per nm of landing depth, and what gets out of the film against birth depth."""
    edges, matrix = found.edges_nm, found.lead
    figure = Figure(figsize=SIZE, layout="constrained")
    axes, side = figure.subplots(1, 2, width_ratios=(1.35, 1.0))
    density = matrix.matrix / np.diff(edges)
    mesh = axes.pcolormesh(edges, edges, density, cmap="cividis", rasterized=True, vmax=_top(density))
    axes.invert_yaxis()
    axes.set_aspect("equal")
    axes.set_xlabel("landing depth (nm)")
    axes.set_ylabel("birth depth (nm)")
    figure.colorbar(mesh, ax=axes, label="share of births a nm", shrink=0.8, extend="max")
    middle = 0.5 * (edges[:-1] + edges[1:])
    for each, colour, width in ((found.ray, "0.55", 1.0), (found.wave, DARK, 1.8)):
        if each is not None:
            side.plot(1.0 - each.matrix.sum(axis=1), middle, color=colour, lw=width)
    side.invert_yaxis()
    side.set_ylim(edges[-1], edges[0])
    side.set_xlim(left=0.0)
    side.set_xlabel("share not taken back" + ("" if found.wave is None else "\n(thin line: rays)"))
    side.set_ylabel("birth depth (nm)")
    figure.suptitle(found.stack.title or "Transport over the depth", fontsize=10)
    _plain(side)
    return figure


def _top(density: Any) -> float:
    """Return the top of the colour scale: the largest value off the diagonal, which would hide the rest."""
    off = density[~np.eye(len(density), dtype=bool)]
    return float(off.max()) if off.size and off.max() > 0.0 else 1.0


def _plain(axes: Any) -> None:
    axes.spines["top"].set_visible(False)
