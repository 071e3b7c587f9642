"""Figures of studies: lines and maps of sweeps, ladders and differences of comparisons, bands of tolerances."""

from collections.abc import Mapping, Sequence
from textwrap import shorten
from typing import TYPE_CHECKING, Any

import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure
from matplotlib.patheffects import withStroke

from optics.output.labels import spread
from optics.output.palette import DARK, ENDS, LIGHT, End

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from pandas import DataFrame

DPI = 160
SMALL = 8.5
SIZE_INCH = (8.0, 4.8)
PLOT = (0.09, 0.12, 0.70, 0.76)
SHOWN_ABOVE = 5e-4  # an end that takes less everywhere gets no line
OUTLINE = [withStroke(linewidth=2.6, foreground="#8a8a8a")]  # pale colours stay visible on white
MAPPED = ("trapped", "substrate", "free_below", "free_above")
STACKS = ("#1d4a7d", "#b5562b", "#146c69", "#8a3b78", "#7a6a00", "#3b1a4f", "#5f8f3f", "#777777")
MARKERS = "osD^vPX*"


def sweep_figure(
    table: "DataFrame", keys: Sequence[str], *, own: Mapping[str, Any], title: str = "", share: str | None = None
) -> Figure | None:
    """Draw a sweep: shares as lines over one axis, maps over two; None for more axes.

    Parameters
    ----------
    table
        The sweep's table.
    keys
        The key paths varied.
    own
        What the stack file itself has at these keys: marked.
    title
        The stack's title.
    share
        The share looked for; maps show it first.
    """
    if len(keys) == 1:
        return _lines(table, keys[0], own.get(keys[0]), title)
    if len(keys) == 2:
        return _maps(table, keys[0], keys[1], own, title, share)
    return None


def _figure(title: str, note: str = "", size: tuple[float, float] = SIZE_INCH) -> Figure:
    figure = Figure(figsize=size, dpi=DPI)
    FigureCanvasAgg(figure)
    figure.text(PLOT[0], 0.965, shorten(title, 90), fontsize=11, va="center", parse_math=False)
    if note:
        figure.text(PLOT[0], 0.925, note, fontsize=SMALL, va="center", color="#444444", parse_math=False)
    return figure


def _lines(table: "DataFrame", key: str, own: Any, title: str) -> Figure:
    """Draw every end over one axis, named at its right end."""
    figure = _figure(title, "shares of the photons born, averaged over the spectrum; grey line: the stack as it is")
    axes = figure.add_axes(PLOT)
    x, ticks = _positions(table[key].tolist())
    shown = [end for end in ENDS if table[end.column].max() >= SHOWN_ABOVE]
    style: dict[str, Any] = {} if ticks is None else {"marker": "o", "linestyle": "none"}
    for end in shown:
        axes.plot(x, table[end.column], color=end.colour, linewidth=1.8, path_effects=OUTLINE, **style)
    if (own is not None and own in table[key].tolist()) or (
        isinstance(own, float) and ticks is None and min(x) <= own <= max(x)
    ):
        axes.axvline(own if ticks is None else table[key].tolist().index(own), color="#999999", linewidth=0.9, zorder=0)
    _name_lines(axes, shown, [float(table[end.column].iloc[-1]) for end in shown])
    _frame(axes, key, ticks)
    axes.set_ylabel("share of photons born")
    return figure


def _positions(values: list[Any]) -> tuple[list[float], list[str] | None]:
    """Return where values stand on an axis, and their names when they are no numbers or stand in no order."""
    if all(isinstance(each, float) for each in values) and np.all(np.diff(values) > 0):
        return values, None
    return [float(place) for place in range(len(values))], [shorten(str(each), 24) for each in values]


def _frame(axes: "Axes", key: str, ticks: list[str] | None) -> None:
    axes.set_xlabel(key)
    axes.set_ylim(bottom=0)
    axes.spines[["top", "right"]].set_visible(False)
    if ticks is not None:
        axes.set_xticks(range(len(ticks)), ticks, rotation=30 if len(ticks) > 5 else 0)
        axes.set_xlim(-0.5, len(ticks) - 0.5)
    else:
        axes.margins(x=0)


def _name_lines(axes: "Axes", ends: Sequence[End], heights: Sequence[float]) -> None:
    low, high = 0.0, axes.get_ylim()[1]
    order = np.argsort(heights, kind="stable")
    gap = 0.052 * (high - low)
    placed = spread([heights[place] for place in order], gap=gap, low=low, high=high)
    right = axes.get_position().x1
    for place, height in zip(order, placed, strict=True):
        end = ends[place]
        y = axes.get_position().y0 + axes.get_position().height * height / high
        axes.figure.text(right + 0.035, y, end.name, fontsize=SMALL, va="center", color=DARK)
        axes.plot(
            [1.0, 1.045], [heights[place] / high, height / high], transform=axes.transAxes, clip_on=False,
            color=end.colour, linewidth=1.2, path_effects=[withStroke(linewidth=2.0, foreground="#8a8a8a")],
        )  # fmt: skip
    axes.set_ylim(low, high)


def _maps(table: "DataFrame", one: str, other: str, own: Mapping[str, Any], title: str, share: str | None) -> Figure:
    """Draw four shares over two axes as maps, each with its own scale."""
    figure = _figure(
        title, "shares of the photons born, averaged over the spectrum; cross: the stack as it is", (8.0, 6.4)
    )
    names = list(dict.fromkeys([*([share] if share and share in table else []), *MAPPED]))[:4]
    rows, columns = (list(dict.fromkeys(table[key].tolist())) for key in (one, other))
    flip = _positions(columns)[1] is not None and _positions(rows)[1] is None
    (ykey, ys), (xkey, xs) = ((other, columns), (one, rows)) if flip else ((one, rows), (other, columns))
    (x, xticks), (y, yticks) = _positions(xs), _positions(ys)
    for number, name in enumerate(names):
        axes = figure.add_axes((0.15 + 0.43 * (number % 2), 0.53 - 0.45 * (number // 2), 0.31, 0.32))
        values = table[name].to_numpy(dtype=float).reshape(len(rows), len(columns))
        mesh = axes.pcolormesh(x, y, values.T if flip else values, shading="nearest", cmap="cividis", rasterized=True)
        axes.set_title(name.replace("_", " "), fontsize=SMALL + 1, loc="left")
        bar = figure.colorbar(mesh, ax=axes, fraction=0.06, pad=0.03)
        bar.ax.tick_params(labelsize=SMALL - 1)
        for ticks, put, label, place in (
            (xticks, axes.set_xticks, axes.set_xlabel, xkey),
            (yticks, axes.set_yticks, axes.set_ylabel, ykey),
        ):
            if ticks is not None:
                put(range(len(ticks)), ticks)
            if put == axes.set_xticks or number % 2 == 0:
                label(place, fontsize=SMALL)
        if number % 2:
            axes.set_yticklabels([])
        axes.tick_params(labelsize=SMALL - 1)
        across, upwards = _place(own.get(xkey), xs, xticks), _place(own.get(ykey), ys, yticks)
        if across is not None and upwards is not None:
            axes.plot(
                across,
                upwards,
                marker="+",
                markersize=9,
                color=LIGHT,
                markeredgewidth=1.6,
                path_effects=[withStroke(linewidth=3, foreground=DARK)],
            )
    return figure


def _place(value: Any, values: list[Any], ticks: list[str] | None) -> float | None:
    """Return where a value stands on a map's axis, None when it is not on it."""
    if ticks is not None:
        return float(values.index(value)) if value in values else None
    return float(value) if isinstance(value, float) and min(values) <= value <= max(values) else None


def ladder_figure(shares: "DataFrame", *, title: str = "") -> Figure:
    """Draw a ladder: a row an end, a dot a stack.

    Parameters
    ----------
    shares
        A row a share, a column a stack.
    title
        Put above.
    """
    rows = ["trapped", *(end.column for end in ENDS)]
    figure = _figure(title, "share of the photons born; a row an end, a mark a stack", (8.0, 5.0))
    axes = figure.add_axes((0.15, 0.11, 0.80, 0.70))
    heights = np.arange(len(rows))[::-1]
    for height, row in zip(heights, rows, strict=True):
        values = shares.loc[row].to_numpy(dtype=float)
        axes.plot(
            [values.min(), values.max()],
            [height, height],
            color="#bbbbbb",
            linewidth=4,
            solid_capstyle="round",
            zorder=1,
        )
    step = 0.16 if len(shares.columns) > 1 else 0.0
    offsets = (
        step * (np.arange(len(shares.columns)) - (len(shares.columns) - 1) / 2) * min(1.0, 4 / len(shares.columns))
    )
    for number, (name, down) in enumerate(zip(shares.columns, offsets, strict=True)):
        axes.plot(
            shares.loc[rows, name], heights - down, linestyle="none", marker=MARKERS[number % len(MARKERS)],
            markersize=6.5, color=STACKS[number % len(STACKS)], markeredgecolor=LIGHT, label=shorten(name, 30),
        )  # fmt: skip
    axes.set_yticks(heights, [row.replace("_", " ") for row in rows])
    axes.axhline(heights[0] - 0.5, color="#dddddd", linewidth=0.8)
    axes.set_xlim(left=min(0.0, 1.1 * float(shares.loc[rows].min().min())))
    axes.set_ylim(-0.6, len(rows) - 0.4)
    axes.set_xlabel("share of photons born")
    axes.spines[["top", "right"]].set_visible(False)
    axes.legend(
        loc="lower right",
        bbox_to_anchor=(1.0, 1.0),
        ncols=min(4, len(shares.columns)),
        fontsize=SMALL,
        frameon=False,
        handletextpad=0.2,
    )
    return figure


def difference_figure(differences: "DataFrame", *, title: str = "") -> Figure:
    """Draw what changes against the first stack, by wavelength: a panel a stack, a line an end.

    Parameters
    ----------
    differences
        Tidy: stack, wavelength_nm and a column a share, in percentage points.
    title
        Put above.
    """
    names = list(dict.fromkeys(differences["stack"]))
    shown = [end for end in ENDS if differences[end.column].abs().max() >= 100 * SHOWN_ABOVE]
    height = 1.2 + 2.1 * len(names)
    figure = _figure("", "", (8.0, height))
    figure.text(PLOT[0], 1 - 0.18 / height, shorten(title, 90), fontsize=11, va="center", parse_math=False)
    note = "change of each share against the first stack, percentage points"
    figure.text(PLOT[0], 1 - 0.40 / height, note, fontsize=SMALL, va="center", color="#444444")
    limit = 1.08 * max(float(differences[end.column].abs().max()) for end in shown) if shown else 1.0
    for number, name in enumerate(names):
        axes = figure.add_axes((0.09, 1 - (0.85 + 2.1 * (number + 1) - 0.35) / height, 0.72, 1.75 / height))
        rows = differences[differences["stack"] == name]
        for end in shown:
            style: dict[str, Any] = {"marker": "o"} if len(rows) == 1 else {}
            axes.plot(
                rows["wavelength_nm"],
                rows[end.column],
                color=end.colour,
                linewidth=1.8,
                path_effects=OUTLINE,
                label=end.name,
                **style,
            )
        axes.axhline(0.0, color=DARK, linewidth=0.7, zorder=0)
        axes.set_ylim(-limit, limit)
        axes.margins(x=0)
        axes.set_title(shorten(name, 60), fontsize=SMALL + 1, loc="left", pad=3, parse_math=False)
        axes.spines[["top", "right"]].set_visible(False)
        if number < len(names) - 1:
            axes.set_xticklabels([])
    axes.set_xlabel("wavelength (nm)")
    handles, labels = axes.get_legend_handles_labels()
    figure.legend(
        handles, labels, loc="upper left", bbox_to_anchor=(0.82, 1 - 0.6 / height), fontsize=SMALL, frameon=False
    )
    return figure


BANDED = ("trapped", "substrate", "cover", "free_below", "free_above", "elsewhere")
COLOUR_OF = {end.column: end.colour for end in ENDS} | {"trapped": "#2b3070"}


def bands_figure(by_wavelength: "DataFrame", *, title: str = "") -> Figure:
    """Draw median and 68 and 95 % bands of shares by wavelength, a panel a share with its own scale.

    Parameters
    ----------
    by_wavelength
        Tidy: wavelength_nm, share, median and bands.
    title
        Put above.
    """
    rows = {share: by_wavelength[by_wavelength["share"] == share] for share in BANDED}
    shown = [share for share in BANDED if rows[share]["high_95"].max() >= SHOWN_ABOVE]
    figure = _figure(
        title,
        "median (line), 68 % and 95 % of draws of the inputs; share of photons born at each wavelength",
        (8.0, 5.4),
    )
    columns = 2 if len(shown) > 1 else 1
    lines = max(1, -(-len(shown) // columns))
    for number, share in enumerate(shown):
        left, line = 0.09 + 0.48 * (number % columns), number // columns
        axes = figure.add_axes((left, 0.86 - (line + 1) * 0.80 / lines + 0.075, 0.40, 0.80 / lines - 0.115))
        table, colour = rows[share], COLOUR_OF[share]
        x = table["wavelength_nm"].to_numpy(dtype=float)
        axes.fill_between(x, table["low_95"], table["high_95"], color=colour, alpha=0.25, linewidth=0)
        axes.fill_between(x, table["low_68"], table["high_68"], color=colour, alpha=0.45, linewidth=0)
        axes.plot(x, table["median"], color=DARK, linewidth=1.0, marker="o" if len(x) == 1 else None)
        axes.set_title(share.replace("_", " "), fontsize=SMALL + 1, loc="left", pad=3)
        axes.spines[["top", "right"]].set_visible(False)
        axes.tick_params(labelsize=SMALL - 1)
        axes.margins(x=0)
        if line == lines - 1 or number + columns >= len(shown):
            axes.set_xlabel("wavelength (nm)", fontsize=SMALL)
    return figure


def sensitivity_figure(indices: "DataFrame", bands: "DataFrame", *, title: str = "") -> Figure:
    """Draw what spreads each share: bars of total indices, the part of first order dark.

    Parameters
    ----------
    indices
        Tidy: share, input, first_order, total.
    bands
        A row a share with its standard deviation ``sd``.
    title
        Put above.
    """
    spread_of = bands["sd"].to_dict()
    shares = [share for share in BANDED if spread_of[share] > 1e-6]
    inputs = list(dict.fromkeys(indices["input"]))
    figure = _figure(
        title,
        "part of a share's variance due to each input: dark alone, pale with others",
        (8.0, 1.6 + 0.42 * len(inputs)),
    )
    width = 0.76 / max(len(shares), 1)
    for number, share in enumerate(shares):
        rows = indices[indices["share"] == share].set_index("input").loc[inputs]
        axes = figure.add_axes((0.20 + number * width, 0.20, width - 0.025, 0.52))
        y = np.arange(len(inputs))[::-1]
        axes.barh(y, rows["total"], color=COLOUR_OF[share], alpha=0.35, height=0.62, edgecolor="#8a8a8a", linewidth=0.4)
        axes.barh(
            y,
            rows["first_order"].clip(lower=0),
            color=COLOUR_OF[share],
            height=0.62,
            edgecolor="#8a8a8a",
            linewidth=0.4,
        )
        axes.set_xlim(0, 1.05)
        axes.set_xticks([0, 0.5, 1], ["0", "0.5", "1"], fontsize=SMALL - 1)
        axes.set_yticks(y, inputs if number == 0 else [""] * len(inputs), fontsize=SMALL, parse_math=False)
        axes.set_title(f"{share.replace('_', ' ')}\n±{spread_of[share]:.4f}", fontsize=SMALL, loc="left")
        axes.spines[["top", "right"]].set_visible(False)
    return figure
