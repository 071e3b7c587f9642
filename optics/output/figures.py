"""Figures. They take data and draw; a display is never needed."""

from collections.abc import Mapping, Sequence
from pathlib import Path
from textwrap import fill, shorten
from typing import TYPE_CHECKING, NamedTuple

import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.patheffects import withStroke
from matplotlib.ticker import MaxNLocator

from optics.arrays import Real
from optics.output.labels import Spot, anchor, spot_inside, spread
from optics.output.palette import DARK, ENDS, LIGHT, End
from optics.units import energy_eV, wavelength_nm

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from pandas import DataFrame

    from optics.media.material import Material

SIZE_INCH = (8.0, 4.8)
PLOT = (0.09, 0.12, 0.70, 0.64)  # left, bottom, width, height: labels have their column on the right
DPI = 160
SMALL = 8.5
TITLE_CHARACTERS = 90  # what fits over the width
NOTE_CHARACTERS = 105
ROOM = 1.25  # a label's box is that much larger than its text
RIGHT_OF_PLOT = 1.035  # where outer labels begin, in widths of the plot
LEADER_PART = 0.75  # leaders start on the falling side, where births have fallen to this part


class Band(NamedTuple):
    """An end's slice of the birth spectrum."""

    end: End
    label: str
    lower: Real
    upper: Real


class Leader(NamedTuple):
    """A line from a band to its name beside the plot."""

    label: str
    start: Spot
    stop: Spot


def births_figure(
    table: "DataFrame | None", ray_table: "DataFrame", *, averages: Mapping[str, float], decimals: int, title: str = ""
) -> Figure:
    """Draw the birth spectrum cut into the ends its photons meet, so that areas are averages.

    Parameters
    ----------
    table
        Outcomes by wave optics, or None when there are none.
    ray_table
        Outcomes by ray optics: thin lines, or the bands when there is no `table`.
    averages
        Shares written beside the names.
    decimals
        Decimals of these shares.
    title
        The stack's title.
    """
    figure = Figure(figsize=SIZE_INCH, dpi=DPI)
    FigureCanvasAgg(figure)
    axes = figure.add_axes(PLOT)
    shown = ray_table if table is None else table
    x, bands = _bands(shown, averages, decimals)
    _frame(axes, x, top=1.06 * max(_edges(each)[1][-1].max() for each in (shown, ray_table)))
    for band in bands:
        axes.fill_between(x, band.lower, band.upper, color=band.end.colour, linewidth=0)
        axes.plot(x, band.upper, color=LIGHT, linewidth=0.5)
    if table is not None:
        _draw_ray(axes, ray_table)
    _write_names(axes, x, [band for band in bands if float(f"{averages[band.end.column]:.{decimals}f}")])
    absent = [band.end.name for band in bands if not float(f"{averages[band.end.column]:.{decimals}f}")]
    _write_title(figure, title, _note(ray_alone=table is None, absent=absent))
    return figure


def material_figure(material: "Material") -> Figure:
    """Draw n and k of a material over its range, or over the visible and near infrared when it has no limits."""
    first, last = material.range_nm
    x = np.linspace(max(first, 200.0), min(last, 2500.0), 1001)
    index = material.index(x)
    figure = Figure(figsize=(6.4, 5.0), dpi=DPI)
    FigureCanvasAgg(figure)
    upper, lower = figure.subplots(2, 1, sharex=True)
    upper.plot(x, index.real, color=ENDS[1].colour)
    upper.set_ylabel("n")
    lower.plot(x, index.imag, color=ENDS[0].colour)
    lower.set_ylabel("k")
    k = index.imag[index.imag > 0]
    if k.size and k.max() > 100 * k.min():
        lower.set_yscale("log")
    lower.set_xlabel("wavelength (nm)")
    upper.set_title(shorten(material.title or material.name, 80), fontsize=11, loc="left", parse_math=False)
    for axes in (upper, lower):
        axes.spines[["top", "right"]].set_visible(False)
    return figure


def save(figure: Figure, path: Path) -> None:
    """Write a figure in the format that the file's suffix names; the same figure gives the same bytes."""
    from matplotlib import rc_context

    metadata = {"Date": None} if path.suffix == ".svg" else {"Software": None} if path.suffix == ".png" else None
    with rc_context({"svg.hashsalt": "photonfate"}):
        figure.savefig(path, metadata=metadata)


def _bands(table: "DataFrame", averages: Mapping[str, float], decimals: int) -> tuple[Real, list[Band]]:
    x, edges = _edges(table)
    labels = [f"{end.name} {averages[end.column]:.{decimals}f}" for end in ENDS]
    return x, [Band(*each) for each in zip(ENDS, labels, edges[:-1], edges[1:], strict=True)]


def _edges(table: "DataFrame") -> tuple[Real, Real]:
    """Return wavelengths and the curves between the bands from bottom to top, (end + 1, wavelength)."""
    x = table["wavelength_nm"].to_numpy(dtype=float)
    births = table["births_per_nm"].to_numpy(dtype=float)
    pieces = births * table[[end.column for end in ENDS]].to_numpy(dtype=float).T
    edges = np.vstack([np.zeros_like(births), np.cumsum(pieces, axis=0)])
    if x.size == 1:  # a line has no area: the one wavelength is given its width of 1 nm
        return x + np.array([-0.5, 0.5]), np.repeat(edges, 2, axis=1)
    return x, edges


def _frame(axes: "Axes", x: Real, *, top: float) -> None:
    axes.set_xlim(x[0], x[-1])
    axes.set_ylim(0, top)
    axes.set_xlabel("wavelength (nm)")
    axes.set_ylabel("births per nm")
    axes.spines[["top", "right"]].set_visible(False)
    last, first = energy_eV(x[[0, -1]])
    energies = [energy for energy in MaxNLocator(8).tick_values(first, last) if first <= energy <= last]
    upper = axes.secondary_xaxis("top")
    upper.set_xticks(wavelength_nm(energies).tolist(), [f"{energy:.10g}" for energy in energies])
    upper.set_xlabel("photon energy (eV)")


def _draw_ray(axes: "Axes", ray_table: "DataFrame") -> None:
    x, edges = _edges(ray_table)
    for edge in edges[1:]:
        axes.plot(x, edge, color=DARK, linewidth=0.6, path_effects=[withStroke(linewidth=1.4, foreground=LIGHT)])


def _write_names(axes: "Axes", x: Real, bands: Sequence[Band]) -> None:
    """Write every name inside its band if it fits there without touching a leader, else beside the plot."""
    if not bands:
        return
    start = anchor(x, bands[-1].upper, part=LEADER_PART)
    sizes = {band.end: _size(axes, band.label) for band in bands}
    limits = dict.fromkeys(sizes, float(x[-1]))
    while True:
        spots = {band.end: _spot(x, band, sizes[band.end], limits[band.end]) for band in bands}
        leaders = _leaders(axes, x, start, [band for band in bands if spots[band.end] is None], sizes)
        crossed = [end for end, spot in spots.items() if limits[end] > start and _crosses(spot, sizes[end], leaders)]
        if not crossed:
            break
        limits |= dict.fromkeys(crossed, start)
    for band in bands:
        spot = spots[band.end]
        if spot is not None:
            name = axes.text(*spot, band.label, ha="center", va="center", fontsize=SMALL, color=band.end.text)
            name.set_path_effects([withStroke(linewidth=2.5, foreground=band.end.colour)])
    for leader in leaders:
        _write_outside(axes, leader)


def _spot(x: Real, band: Band, size: tuple[float, float], right: float) -> Spot | None:
    width, height = size
    return spot_inside(x, band.lower, band.upper, width=ROOM * width, height=ROOM * height, right=right)


def _leaders(
    axes: "Axes", x: Real, start: float, bands: Sequence[Band], sizes: Mapping[End, tuple[float, float]]
) -> list[Leader]:
    """Return leaders to a column on the right; in the order of the bands, so that they never cross."""
    heights = [float(np.interp(start, x, band.lower) + np.interp(start, x, band.upper)) / 2 for band in bands]
    low, high = axes.get_ylim()
    gap = ROOM * max((sizes[band.end][1] for band in bands), default=0.0)
    ends = spread(heights, gap=gap, low=low, high=high)
    edge = float(x[0] + RIGHT_OF_PLOT * (x[-1] - x[0]))
    return [
        Leader(band.label, Spot(start, height), Spot(edge, end))
        for band, height, end in zip(bands, heights, ends, strict=True)
    ]


def _crosses(spot: Spot | None, size: tuple[float, float], leaders: Sequence[Leader]) -> bool:
    """Say whether a label and a leader may touch, taking the leader's whole height for where it runs."""
    if spot is None:
        return False
    width, height = (ROOM * extent for extent in size)
    return any(
        spot.x + width / 2 > leader.start.x
        and min(leader.start.y, leader.stop.y) < spot.y + height / 2
        and max(leader.start.y, leader.stop.y) > spot.y - height / 2
        for leader in leaders
    )


def _write_outside(axes: "Axes", leader: Leader) -> None:
    halo = [withStroke(linewidth=1.8, foreground=LIGHT)]
    xs, ys = zip(leader.start, leader.stop, strict=True)
    axes.plot(xs, ys, color=DARK, linewidth=0.6, clip_on=False, path_effects=halo)
    axes.plot(*leader.start, marker="o", markersize=3, color=DARK, markeredgecolor=LIGHT, markeredgewidth=0.5)
    name = axes.annotate(leader.label, leader.stop, (3, 0), textcoords="offset points", va="center")
    name.set(fontsize=SMALL, color=DARK, annotation_clip=False)


def _size(axes: "Axes", label: str) -> tuple[float, float]:
    """Return width and height of a label in units of the axes."""
    text = axes.text(0, 0, label, fontsize=SMALL)
    box = text.get_window_extent().transformed(axes.transData.inverted())
    text.remove()
    return box.width, box.height


def _note(*, ray_alone: bool, absent: Sequence[str]) -> str:
    parts = ["areas are shares of all births", "by ray optics" if ray_alone else "thin lines: ray optics"]
    parts += [f"no share: {', '.join(absent)}"] if absent else []
    return fill("; ".join(parts), NOTE_CHARACTERS)


def _write_title(figure: Figure, title: str, note: str) -> None:
    figure.text(PLOT[0], 0.965, shorten(title, TITLE_CHARACTERS), fontsize=11, va="center", parse_math=False)
    figure.text(PLOT[0], 0.93, note, fontsize=SMALL, va="top", color="#444444")
