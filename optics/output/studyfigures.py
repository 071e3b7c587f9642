"""Figures of studies: ladders and differences of comparisons, bands and sensitivities of tolerances."""

from collections.abc import Sequence
from textwrap import shorten
from typing import TYPE_CHECKING, Any

import numpy as np
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.colors import to_rgba
from matplotlib.figure import Figure
from matplotlib.patheffects import withStroke

from optics.output.palette import DARK, ENDS, LIGHT, ON_WHITE, End

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.lines import Line2D
    from pandas import DataFrame

DPI = 160
SMALL = 8.5
SIZE_INCH = (8.0, 4.8)
PLOT = (0.09, 0.12, 0.70, 0.76)
TITLE_DOWN, NOTE_DOWN = 0.17, 0.37  # from the upper edge [inch]
SHOWN_ABOVE = 5e-4  # an end that takes less everywhere gets no line
OUTLINE = [withStroke(linewidth=2.6, foreground="#8a8a8a")]  # pale colours stay visible on white
STACKS = ("#1d4a7d", "#b5562b", "#146c69", "#8a3b78", "#7a6a00", "#3b1a4f", "#5f8f3f", "#777777")
MARKERS = "osD^vPX*"
ROUNDING = 1e-9  # percentage points that rounding alone may leave
SPREADS_ABOVE = 1e-6  # standard deviation of a share from which it gets a panel
PANELS_DOWN, PANELS_UP = 0.95, 0.50  # room above and below panels of sensitivities [inch]
LETTER_INCH = 0.078  # width of a letter of SMALL


def framed(title: str, note: str = "", size: tuple[float, float] = SIZE_INCH) -> Figure:
    """Return an empty figure with a title and a grey line below it, as far from the top whatever its height.

    Parameters
    ----------
    title, note
        The two lines.
    size
        Width and height [inch].
    """
    figure = Figure(figsize=size, dpi=DPI)
    FigureCanvasAgg(figure)
    figure.text(PLOT[0], 1 - TITLE_DOWN / size[1], shorten(title, 90), fontsize=11, va="center", parse_math=False)
    down = 1 - NOTE_DOWN / size[1]
    figure.text(PLOT[0], down, note, fontsize=SMALL, va="center", color="#444444", parse_math=False)
    return figure


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
    figure = framed(title, "share of the photons born; a row an end, a mark a stack", (8.0, 5.0))
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
    figure = framed(title, "change of each share against the first stack, percentage points", (8.0, height))
    limit = 1.08 * max(float(differences[end.column].abs().max()) for end in shown) if shown else 1.0
    named: dict[str, Line2D] = {}
    for number, name in enumerate(names):
        axes = figure.add_axes((0.09, 1 - (0.85 + 2.1 * (number + 1) - 0.35) / height, 0.72, 1.75 / height))
        named |= _changes(axes, differences[differences["stack"] == name], shown)
        axes.set_ylim(-limit, limit)
        axes.set_title(shorten(name, 60), fontsize=SMALL + 1, loc="left", pad=3, parse_math=False)
        if number < len(names) - 1:
            axes.set_xticklabels([])
    axes.set_xlabel("wavelength (nm)")
    if named:
        corner = (0.82, 1 - 0.6 / height)
        figure.legend(named.values(), named, loc="upper left", bbox_to_anchor=corner, fontsize=SMALL, frameon=False)
    return figure


def _changes(axes: "Axes", rows: "DataFrame", shown: Sequence[End]) -> "dict[str, Line2D]":
    """Draw the changes of one stack over the wavelengths of the light, or say that there are none; return the lines."""
    x = rows["wavelength_nm"].to_numpy(dtype=float)
    aside = 0.5 if len(x) == 1 else 0.0  # a single wavelength is given its width of 1 nm
    axes.set_xlim(x[0] - aside, x[-1] + aside)
    axes.axhline(0.0, color=DARK, linewidth=0.7, zorder=0)
    axes.spines[["top", "right"]].set_visible(False)
    largest = max(float(rows[end.column].abs().max()) for end in ENDS)
    if largest < 100 * SHOWN_ABOVE:
        said = "no difference" if largest < ROUNDING else f"no difference above {100 * SHOWN_ABOVE:g} points"
        axes.text(0.5, 0.56, said, transform=axes.transAxes, ha="center", va="bottom", fontsize=SMALL + 1, color=DARK)
        return {}
    style: dict[str, Any] = {"linewidth": 1.8, "path_effects": OUTLINE, "marker": "o" if aside else None}
    return {end.name: axes.plot(x, rows[end.column], color=end.colour, **style)[0] for end in shown}


BANDED = ("trapped", "substrate", "cover", "free_below", "free_above", "elsewhere")


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
    note = "median (line), 68 % (inner band) and 95 % (outer) of draws of the inputs; share of photons born at each"
    figure = framed(title, f"{note} wavelength", (8.0, 5.4))
    columns = 2 if len(shown) > 1 else 1
    lines = max(1, -(-len(shown) // columns))
    for number, share in enumerate(shown):
        left, line = 0.09 + 0.48 * (number % columns), number // columns
        axes = figure.add_axes((left, 0.86 - (line + 1) * 0.80 / lines + 0.075, 0.40, 0.80 / lines - 0.115))
        _draw_bands(axes, rows[share], ON_WHITE[share])
        axes.set_title(share.replace("_", " "), fontsize=SMALL + 1, loc="left", pad=3)
        axes.spines[["top", "right"]].set_visible(False)
        axes.tick_params(labelsize=SMALL - 1)
        axes.margins(x=0)
        if line == lines - 1 or number + columns >= len(shown):
            axes.set_xlabel("wavelength (nm)", fontsize=SMALL)
    return figure


def _draw_bands(axes: "Axes", table: "DataFrame", colour: str) -> None:
    """Draw both bands with an outline, so that the palest is seen on white and in print, and the median over them."""
    x = table["wavelength_nm"].to_numpy(dtype=float)
    if len(x) == 1:  # a band needs a width to be seen
        x, table = x + np.array([-0.5, 0.5]), table.loc[table.index.repeat(2)]
    for level, strength in ((95, 0.22), (68, 0.42)):
        low, high = table[f"low_{level}"], table[f"high_{level}"]
        axes.fill_between(x, low, high, color=colour, alpha=strength, linewidth=0)
        for edge in (low, high):
            axes.plot(x, edge, color=colour, linewidth=0.6)
    axes.plot(x, table["median"], color=DARK, linewidth=1.2)


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
    shares = [share for share in BANDED if spread_of[share] > SPREADS_ABOVE]
    inputs = list(dict.fromkeys(indices["input"]))
    high = 0.30 + 0.42 * len(inputs)  # of the panels [inch], between what stands above and below them
    size = (8.0, PANELS_DOWN + high + PANELS_UP)
    note = (
        "part of a share's variance due to each input: dark alone, pale with others; ±: standard deviation of the share"
    )
    figure = framed(title, note if shares else "no share spreads within the inputs", size)
    left = min(0.45, 0.03 + LETTER_INCH * max((len(each) for each in inputs), default=0) / size[0])
    width = (0.985 - left) / max(len(shares), 1)
    for number, share in enumerate(shares):
        axes = figure.add_axes((left + number * width, PANELS_UP / size[1], width - 0.025, high / size[1]))
        rows = indices[indices["share"] == share].set_index("input").loc[inputs]
        _draw_parts(axes, rows, ON_WHITE[share], name_inputs=number == 0)
        axes.set_title(f"{share.replace('_', ' ')}\n±{spread_of[share]:.4f}", fontsize=SMALL, loc="left")
    if shares:
        middle = left + 0.5 * (width * len(shares) - 0.025)
        figure.text(middle, 0.12 / size[1], "part of the variance of the share", fontsize=SMALL, ha="center")
    return figure


def _draw_parts(axes: "Axes", rows: "DataFrame", colour: str, *, name_inputs: bool) -> None:
    """Draw a bar an input: its total index pale, the first order over it."""
    y = np.arange(len(rows))[::-1]
    edge: dict[str, Any] = {"height": 0.62, "edgecolor": colour, "linewidth": 0.6}
    axes.barh(y, rows["total"], facecolor=to_rgba(colour, 0.25), **edge)
    axes.barh(y, rows["first_order"].clip(lower=0), facecolor=colour, **edge)
    axes.set_xlim(0, 1.05)
    axes.set_xticks([0, 0.5, 1], ["0", "0.5", "1"], fontsize=SMALL - 1)
    axes.set_yticks(y, rows.index if name_inputs else [""] * len(rows), fontsize=SMALL, parse_math=False)
    axes.spines[["top", "right"]].set_visible(False)
