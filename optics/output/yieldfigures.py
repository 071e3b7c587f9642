"""The figure of yields: external against internal, a curve a reading, and what a measured value drops to."""

from collections.abc import Sequence
from textwrap import fill, shorten
from typing import TYPE_CHECKING

import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

from optics.fate.yields import external_yield
from optics.output.figures import DPI, NOTE_CHARACTERS, SIZE_INCH, SMALL, TITLE_CHARACTERS
from optics.output.labels import spread
from optics.output.numbers import MOST_DECIMALS

if TYPE_CHECKING:
    from matplotlib.axes import Axes

    from optics.fate.implied import Given, Implied
    from optics.fate.sampled import Sampled

# Apart in grey print and for every kind of colour vision: lightness falls from the first to the last.
COLOURS = {"faces": "#c98a1b", "wide": "#2a8f86", "sphere": "#3b1a4f", "lost edges": "#8f4a3a"}
SCRAMBLED = "#777777"
FRAME = (0.09, 0.12, 0.66, 0.74)
GAP = 0.055  # between names beside the plot, in heights of the plot
LEAST_TOP = 0.1


def yields_figure(sampled: "Sampled", rows: Sequence["Implied"], known: "Given | None", *, reading: str) -> Figure:
    """Draw external against internal yield.

    Parameters
    ----------
    sampled
        The readings.
    rows
        What a known yield implies; may be empty.
    known
        That yield.
    reading
        The reading in which it is followed by thick lines and, with a deviation, a strip; the others by thin lines.
    """
    figure = Figure(figsize=SIZE_INCH, dpi=DPI)
    FigureCanvasAgg(figure)
    axes = figure.add_axes(FRAME)
    internal = np.linspace(0.0, 1.0, 1001)
    curves = {each.name: (each.p_r, each.p_e) for each in sampled.readings}
    names = []
    for name, (p_r, p_e) in curves.items():
        external = np.array([external_yield(float(q), p_r=p_r, p_e=p_e) for q in internal])
        axes.plot(internal, external, color=COLOURS[name], linewidth=2.2 if name == reading else 1.5)
        names.append((name, float(external[-1]), COLOURS[name]))
    limit = sampled.scrambled[0]
    external = np.array([external_yield(float(q), p_r=limit.p_r, p_e=limit.p_e) for q in internal])
    axes.plot(internal, external, color=SCRAMBLED, linewidth=1.2, linestyle=(0, (5, 2)))
    names.append(("fully scrambled", float(external[-1]), SCRAMBLED))
    top = max(LEAST_TOP, *(value for _, value, _ in names))
    axes.set_xlim(0.0, 1.0)
    axes.set_ylim(0.0, 1.04 * top)
    if known is not None:
        for row in rows:
            _follow(axes, row, known, wide=row.reading.name == reading)
    axes.set_xlabel("internal yield in this stack")
    axes.set_ylabel("external yield")
    axes.spines[["top", "right"]].set_visible(False)
    _write_names(axes, names)
    _write_title(figure, sampled, known, reading)
    return figure


def _follow(axes: "Axes", row: "Implied", known: "Given", *, wide: bool) -> None:
    """Draw the way from the known yield to the curve and on to the other axis."""
    if row.values is None:
        return
    colour = COLOURS[row.reading.name]
    x, y = row.values.internal, row.values.external
    path = ([0.0, x, x], [y, y, 0.0]) if known.kind == "external" else ([x, x, 0.0], [0.0, y, y])
    axes.plot(*path, color=colour, linewidth=1.4 if wide else 0.7, zorder=1)
    axes.plot([x], [y], marker="o", markersize=4, color=colour)
    if not wide or not known.sd:
        return
    own = (max(known.value - known.sd, 0.0), min(known.value + known.sd, 1.0))
    other = row.between
    (left, right), (bottom, roof) = (other, own) if known.kind == "external" else (own, other)
    axes.fill_between([0.0, right], [bottom, bottom], [roof, roof], color=colour, alpha=0.18, linewidth=0, zorder=0)
    axes.fill_betweenx([0.0, bottom], [left, left], [right, right], color=colour, alpha=0.18, linewidth=0, zorder=0)


def _write_names(axes: "Axes", names: Sequence[tuple[str, float, str]]) -> None:
    """Write the curves' names at their right ends, apart from each other."""
    order = sorted(names, key=lambda each: each[1])
    low, high = axes.get_ylim()
    heights = spread([value for _, value, _ in order], gap=GAP * (high - low), low=low, high=high)
    decimals = _decimals([value for _, value, _ in names])
    for (name, value, colour), height in zip(order, heights, strict=True):
        axes.plot([1.0, 1.02], [value, height], color=colour, linewidth=0.6, clip_on=False)
        axes.text(1.03, height, f"{name}, up to {value:.{decimals}f}", color=colour, fontsize=SMALL, va="center")


def _decimals(values: Sequence[float]) -> int:
    """Return how many decimals all values are shown with: three, or four where the smallest is below a tenth."""
    return 3 if min(values) >= 0.1 else MOST_DECIMALS


def _write_title(figure: Figure, sampled: "Sampled", known: "Given | None", reading: str) -> None:
    title = sampled.stack.title or "External yield against internal"
    sample = f"edge at {sampled.sample.to_edge_mm:g} mm; {sampled.model} optics"
    spread_text = f" +- {known.sd:g}" if known is not None and known.sd else ""
    mark = "strip" if spread_text else "thick"
    asked = "" if known is None else f"; {known.kind} {known.value:g}{spread_text} followed, {mark}: {reading}"
    figure.text(FRAME[0], 0.965, shorten(title, TITLE_CHARACTERS), fontsize=11, va="center", parse_math=False)
    figure.text(FRAME[0], 0.93, fill(sample + asked, NOTE_CHARACTERS), fontsize=SMALL, va="top", color="#444444")
