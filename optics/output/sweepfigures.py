"""Figures of sweeps: lines over one axis, marks over cases, maps over two axes."""

from collections.abc import Mapping, Sequence
from textwrap import shorten
from typing import TYPE_CHECKING, Any, NamedTuple

import numpy as np
from matplotlib.figure import Figure
from matplotlib.patheffects import withStroke

from optics.output.labels import spread
from optics.output.palette import DARK, ENDS, LIGHT, End
from optics.output.studyfigures import OUTLINE, PLOT, SHOWN_ABOVE, SMALL, framed

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from pandas import DataFrame

MAPPED = ("trapped", "substrate", "free_below", "free_above")
AVERAGED = "shares of the photons born, averaged over the spectrum"
MOST_NAMED_CASES = 8  # with more, their values do not fit below the axis
MOST_NAMED_KEYS = 3
MOST_TICKS = 16
LEADER_END = 1.045  # where the lines to the names end, in widths of the plot
POINT = "point"


class Ruler(NamedTuple):
    """Where values stand along an axis, and their names where they are no rising numbers."""

    places: list[float]
    ticks: list[str] | None


def sweep_figure(
    table: "DataFrame", keys: Sequence[str], *, own: Mapping[str, Any], title: str = "", share: str | None = None
) -> Figure | None:
    """Draw a sweep over a grid: shares as lines over one axis, maps over two; None for more axes.

    Parameters
    ----------
    table
        The sweep's table.
    keys
        The key paths varied.
    own
        What the stack file itself has at these keys: marked where it lies on the axes.
    title
        The stack's title.
    share
        The share looked for; maps show it first.
    """
    if len(keys) == 1:
        values = table[keys[0]].tolist()
        return _lines(table, keys[0], _positions(values), _place(own.get(keys[0]), values), title)
    if len(keys) == 2:
        return _maps(table, keys[0], keys[1], own, title, share)
    return None


def cases_figure(table: "DataFrame", keys: Sequence[str], *, own: Mapping[str, Any], title: str = "") -> Figure:
    """Draw a table of cases: marks over the cases, each named by its values, or by its point where there are many.

    Parameters
    ----------
    table
        The sweep's table.
    keys
        The key paths in the header of the cases.
    own
        What the stack file itself has at these keys; a case that has the same is marked.
    title
        The stack's title.
    """
    cases = table[list(keys)].to_dict("records")
    told = [key for key in keys if len({each[key] for each in cases}) > 1] or list(keys)
    if len(cases) <= MOST_NAMED_CASES and len(told) <= MOST_NAMED_KEYS:
        ticks = ["\n".join(_said(each[key]) for key in told) for each in cases]
        label = "\n".join(told)
    else:
        ticks, label = [str(each) for each in table[POINT]], f"case: column {POINT} of sweep.csv"
    same = [place for place, each in enumerate(cases) if all(each[key] == own.get(key) for key in keys)]
    ruler = Ruler([float(place) for place in range(len(cases))], ticks)
    return _lines(table, label, ruler, float(same[0]) if same else None, title)


def _said(value: Any) -> str:
    return f"{value:.6g}" if isinstance(value, float) else shorten(str(value), 16)


def _lines(table: "DataFrame", label: str, ruler: Ruler, own: float | None, title: str) -> Figure:
    """Draw every end over one axis, named at its right end."""
    figure = framed(title, AVERAGED + ("" if own is None else "; grey line: the stack as it is"))
    below = 0.035 * (max(map(_line_count, ruler.ticks)) + _line_count(label) - 2) if ruler.ticks else 0.0
    left, bottom, width, height = PLOT
    axes = figure.add_axes((left, bottom + below, width, height - below))
    shown = [end for end in ENDS if table[end.column].max() >= SHOWN_ABOVE]
    style: dict[str, Any] = {} if ruler.ticks is None and len(table) > 1 else {"marker": "o", "linestyle": "none"}
    for end in shown:
        axes.plot(ruler.places, table[end.column], color=end.colour, linewidth=1.8, path_effects=OUTLINE, **style)
    if own is not None:
        axes.axvline(own, color="#999999", linewidth=0.9, zorder=0)
    _frame(axes, label, ruler)
    _name_lines(axes, shown, [float(table[end.column].iloc[-1]) for end in shown], ruler.places[-1])
    axes.set_ylabel("share of photons born")
    return figure


def _line_count(text: str) -> int:
    return 1 + text.count("\n")


def _positions(values: list[Any]) -> Ruler:
    """Return where values stand on an axis, and their names when they are no numbers or stand in no order."""
    if all(isinstance(each, float) for each in values) and np.all(np.diff(values) > 0):
        return Ruler(values, None)
    return Ruler([float(place) for place in range(len(values))], [shorten(str(each), 24) for each in values])


def _place(value: Any, values: list[Any]) -> float | None:
    """Return where a value stands on the axis that values make, None when it is not on it."""
    if _positions(values).ticks is not None:
        return float(values.index(value)) if value in values else None
    return float(value) if isinstance(value, float) and min(values) <= value <= max(values) else None


def _frame(axes: "Axes", label: str, ruler: Ruler) -> None:
    axes.set_xlabel(label, parse_math=False)
    axes.set_ylim(bottom=0)
    axes.spines[["top", "right"]].set_visible(False)
    ticks = ruler.ticks
    if ticks is None:
        axes.margins(x=0)
        return
    step = -(-len(ticks) // MOST_TICKS)
    turned = len(ticks) > 5 and max(map(len, ticks)) > 8 and "\n" not in "".join(ticks)
    axes.set_xticks(range(0, len(ticks), step), ticks[::step], rotation=30 if turned else 0, parse_math=False)
    axes.set_xlim(-0.5, len(ticks) - 0.5)
    if any("\n" in tick for tick in ticks):
        axes.tick_params(axis="x", labelsize=SMALL)


def _name_lines(axes: "Axes", ends: Sequence[End], heights: Sequence[float], last: float) -> None:
    """Write names beside the plot, each with a leader from the last value of its end."""
    low, high = 0.0, axes.get_ylim()[1]
    order = np.argsort(heights, kind="stable")
    placed = spread([heights[place] for place in order], gap=0.052 * (high - low), low=low, high=high)
    first, end_of_axis = axes.get_xlim()
    start = (last - first) / (end_of_axis - first) if end_of_axis > first else 1.0
    for place, height in zip(order, placed, strict=True):
        end = ends[place]
        axes.text(LEADER_END + 0.005, height / high, end.name, transform=axes.transAxes, fontsize=SMALL, va="center")
        axes.plot(
            [start, 1.0, LEADER_END], [heights[place] / high, heights[place] / high, height / high],
            transform=axes.transAxes, clip_on=False, color=end.colour, linewidth=1.0, zorder=0.5,
            path_effects=[withStroke(linewidth=1.8, foreground="#8a8a8a")],
        )  # fmt: skip
    axes.set_ylim(low, high)


def _maps(table: "DataFrame", one: str, other: str, own: Mapping[str, Any], title: str, share: str | None) -> Figure:
    """Draw four shares over two axes as maps, each with its own scale."""
    names = list(dict.fromkeys([*([share] if share and share in table else []), *MAPPED]))[:4]
    rows, columns = (list(dict.fromkeys(table[key].tolist())) for key in (one, other))
    flip = _positions(columns).ticks is not None and _positions(rows).ticks is None
    (ykey, ys), (xkey, xs) = ((other, columns), (one, rows)) if flip else ((one, rows), (other, columns))
    across, upwards = _place(own.get(xkey), xs), _place(own.get(ykey), ys)
    cross = None if across is None or upwards is None else (across, upwards)
    figure = framed(title, AVERAGED + ("; cross: the stack as it is" if cross else ""), (8.0, 6.4))
    x, y = _positions(xs), _positions(ys)
    for number, name in enumerate(names):
        axes = figure.add_axes((0.15 + 0.43 * (number % 2), 0.53 - 0.45 * (number // 2), 0.31, 0.32))
        values = table[name].to_numpy(dtype=float).reshape(len(rows), len(columns))
        shown = values.T if flip else values
        mesh = axes.pcolormesh(x.places, y.places, shown, shading="nearest", cmap="cividis", rasterized=True)
        axes.set_title(name.replace("_", " "), fontsize=SMALL + 1, loc="left")
        bar = figure.colorbar(mesh, ax=axes, fraction=0.06, pad=0.03)
        bar.ax.tick_params(labelsize=SMALL - 1)
        _frame_map(axes, (xkey, x.ticks), (ykey, y.ticks), first=number % 2 == 0)
        if cross:
            _draw_cross(axes, cross)
    return figure


def _frame_map(axes: "Axes", x: tuple[str, list[str] | None], y: tuple[str, list[str] | None], *, first: bool) -> None:
    """Name the axes of a map; the upright one on the first of its row alone."""
    for (key, ticks), put, label in ((x, axes.set_xticks, axes.set_xlabel), (y, axes.set_yticks, axes.set_ylabel)):
        if ticks is not None:
            put(range(len(ticks)), ticks)
        if put == axes.set_xticks or first:
            label(key, fontsize=SMALL)
    if not first:
        axes.set_yticklabels([])
    axes.tick_params(labelsize=SMALL - 1)


def _draw_cross(axes: "Axes", at: tuple[float, float]) -> None:
    halo = [withStroke(linewidth=3, foreground=DARK)]
    axes.plot(*at, marker="+", markersize=9, color=LIGHT, markeredgewidth=1.6, path_effects=halo)
