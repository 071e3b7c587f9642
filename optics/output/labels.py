"""Where the names of stacked bands go: inside when they fit, else in a column beside the plot. Pure geometry."""

from collections.abc import Sequence
from typing import NamedTuple

import numpy as np

from optics.arrays import Real

CANDIDATES = 401  # places along the plot that are tried; at one pixel in two nothing better is missed


class Spot(NamedTuple):
    """Centre of a label."""

    x: float
    y: float


def spot_inside(x: Real, lower: Real, upper: Real, *, width: float, height: float, right: float) -> Spot | None:
    """Return where a label of this size fits best between two curves, or None.

    Parameters
    ----------
    x, lower, upper
        The band, shape (point,), x ascending; any one unit.
    width, height
        Size of the label with its margin, in units of x and of the curves.
    right
        The label ends left of it.
    """
    grid = np.linspace(x[0], x[-1], CANDIDATES)
    reach = int(np.ceil(width / 2 / (grid[1] - grid[0])))
    if 2 * reach + 1 > CANDIDATES:
        return None
    floor = np.interp(grid, x, lower)
    roof = np.interp(grid, x, upper)
    windows = np.lib.stride_tricks.sliding_window_view
    highest_floor = windows(floor, 2 * reach + 1).max(axis=-1)
    lowest_roof = windows(roof, 2 * reach + 1).min(axis=-1)
    centre = grid[reach : CANDIDATES - reach]
    room = np.where(centre + width / 2 <= right, lowest_roof - highest_floor, -np.inf)
    best = int(np.argmax(room))
    if room[best] < height:
        return None
    return Spot(float(centre[best]), float(lowest_roof[best] + highest_floor[best]) / 2)


def spread(wanted: Sequence[float], *, gap: float, low: float, high: float) -> list[float]:
    """Return heights near the wanted ones, ascending, at least `gap` apart, from `low` to `high` if there is room.

    Parameters
    ----------
    wanted
        Ascending heights.
    gap, low, high
        In the same unit.
    """
    placed: list[float] = []
    for height in wanted:
        placed.append(max(height, low, placed[-1] + gap if placed else low))
    ceiling = high
    for place in reversed(range(len(placed))):
        placed[place] = min(placed[place], ceiling)
        ceiling = placed[place] - gap
    return placed


def anchor(x: Real, total: Real, *, part: float) -> float:
    """Return the last x at which a curve still has this part of its maximum: where leaders start."""
    return float(x[np.flatnonzero(total >= part * total.max())[-1]])
