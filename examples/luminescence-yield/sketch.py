"""Draw where-light-goes.svg: what becomes of light born in a film on glass. Run: python sketch.py."""

from itertools import pairwise
from pathlib import Path

from matplotlib import rc_context
from matplotlib.axes import Axes
from matplotlib.backends.backend_agg import FigureCanvasAgg
from matplotlib.figure import Figure

Spot = tuple[float, float]

AIR, GLASS, FILM = "#ffffff", "#dcecf2", "#e8b7a0"
OUT, HELD, GUIDED, INK = "#b06f00", "#146c69", "#7a1f4f", "#222222"
TOP, FACE, BOTTOM, EDGE = 3.4, 3.0, 1.0, 9.0  # upper face, film on glass, lower face, rim


def arrow(axes: Axes, points: list[Spot], colour: str) -> None:
    """Draw a ray through points, with a head at its end."""
    for start, stop in pairwise(points[:-1]):
        axes.plot(*zip(start, stop, strict=True), color=colour, linewidth=1.6, solid_capstyle="round")
    style = {"arrowstyle": "-|>", "color": colour, "linewidth": 1.6, "shrinkA": 0, "shrinkB": 0}
    axes.annotate("", points[-1], points[-2], arrowprops=style)


def say(axes: Axes, x: float, y: float, text: str, colour: str = INK) -> None:
    """Write a label."""
    axes.text(x, y, text, color=colour, fontsize=9, va="center")


def sketch() -> Figure:
    """Return the figure."""
    figure = Figure(figsize=(8.6, 4.3), dpi=150)
    FigureCanvasAgg(figure)
    axes = figure.add_axes((0, 0, 1, 1))
    axes.set_xlim(0, 12.2)
    axes.set_ylim(-0.4, 5.2)
    axes.axis("off")
    axes.fill_between([0.6, EDGE], BOTTOM, FACE, color=GLASS, linewidth=0)
    axes.fill_between([0.6, EDGE], FACE, TOP, color=FILM, linewidth=0)
    axes.plot([EDGE, EDGE], [BOTTOM, TOP], color=INK, linewidth=1.2)
    for y in (BOTTOM, FACE, TOP):
        axes.plot([0.6, EDGE], [y, y], color=INK, linewidth=0.6)
    spot = (2.2, 3.2)
    axes.plot(*spot, marker="*", markersize=13, color=INK)
    say(axes, 0.7, 3.2, "film")
    say(axes, 0.7, 1.3, "glass")
    arrow(axes, [spot, (2.1, TOP), (1.2, 4.5)], OUT)
    say(axes, 0.3, 4.85, "out through a face: leaves in every reading", OUT)
    arrow(axes, [spot, (2.12, FACE), (1.45, BOTTOM), (0.9, 0.25)], OUT)
    arrow(axes, [spot, (2.3, FACE), (4.9, BOTTOM), (7.5, FACE), (EDGE, 1.85), (9.5, 0.7)], HELD)
    axes.plot([7.5], [FACE], marker="o", markersize=6, color=HELD)
    say(axes, 3.55, 2.6, "held in the glass: on every return\nthe film takes a part back (p_r)", HELD)
    say(axes, 2.3, 0.2, 'held light: lost in "faces"; followed, round trip by round trip, in "wide" and "sphere"', HELD)
    arrow(axes, [(2.4, 3.2), (3.1, 3.2), (6.2, 3.2)], GUIDED)
    say(axes, 2.5, 3.75, "guided in the film: taken back on its way (p_r)", GUIDED)
    arrow(axes, [(7.1, 3.2), (7.22, TOP), (8.2, 4.5)], GUIDED)
    axes.plot([7.1], [3.2], marker="x", markersize=7, color=GUIDED, markeredgewidth=1.8)
    say(axes, 8.4, 4.4, "or scattered out (guided_scatter_per_cm)", GUIDED)
    say(axes, 9.7, 1.5, "at the edge:", HELD)
    say(axes, 9.7, 1.15, 'leaves in "sphere" (p_e)', HELD)
    say(axes, 9.7, 0.8, '"wide" has no edge', HELD)
    axes.annotate("", (EDGE, 0.7), (2.2, 0.7), arrowprops={"arrowstyle": "<->", "color": INK, "linewidth": 0.8})
    axes.text(7.2, 0.7, "to_edge_mm", fontsize=9, ha="center", va="center", backgroundcolor=AIR)
    say(axes, 0.3, -0.2, "What other layers and plates absorb on any of these ways is lost (p_a).")
    return figure


if __name__ == "__main__":
    with rc_context({"svg.hashsalt": "photonfate"}):
        sketch().savefig(Path(__file__).with_name("where-light-goes.svg"), metadata={"Date": None})
