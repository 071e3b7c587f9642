"""From the thin group outwards: plates on both sides, light that comes back from them, and where it all ends.

Shared by wave and ray optics; they differ in what the thin group itself does.
"""

from collections.abc import Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from optics.arrays import Index, Mask, Real
from optics.waves.plates import Shell, Waves, is_sink, shell
from optics.waves.scene import Scene, Side

FREE_ABOVE, FREE_BELOW, COVER, SUBSTRATE = range(4)


@dataclass(frozen=True)
class Response:
    """What the thin group does with one unit of power that returns to it from one side."""

    back: Real | float
    through: Real | float
    taken: Mapping[int, Real]  # film included


NO_RESPONSE = Response(0.0, 0.0, {})
"""Stands in where no plate can send light back."""


@dataclass(frozen=True)
class Layout:
    """Where the quantities of an integral stand on its leading axis."""

    media: int

    @property
    def size(self) -> int:
        """Number of quantities."""
        return 5 + 2 * self.media

    power = 0

    def end(self, which: int) -> int:
        """Position of one of the four ends."""
        return 1 + which

    def open(self, medium: int) -> int:
        """Position of what a medium takes of light that can leave."""
        return 5 + medium

    def held(self, medium: int) -> int:
        """Position of what a medium takes of light held in plates, on its first round trip."""
        return 5 + self.media + medium


def emerge(
    waves: Waves,
    out: Real,
    leaving: tuple[Real, Real],
    responses: Sequence[Response | None],
    layout: Layout,
) -> None:
    """Follow the power ``leaving`` the group (above, below) to its ends; add them to ``out``.

    Arrays are (polarisation, row, node). ``responses`` are the group's own, seen from above and below; None where
    no plate can send light back.
    """
    scene = waves.view.scene
    shells = [shell(waves, side) if side.plates else None for side in scene.sides]
    sinks = [is_sink(waves.view, side, waves.q) for side in scene.sides]
    returned = [0.0 if s is None else np.where(sink, 0.0, s.reflects) for s, sink in zip(shells, sinks, strict=True)]
    total = coupled(leaving, responses, returned)
    for k, (side, folded, sink) in enumerate(zip(scene.sides, shells, sinks, strict=True)):
        _settle(out, layout, k, side, folded, sink, total[k])
        response = responses[k]
        if response is not None:
            back = returned[k] * total[k]
            for medium, share in response.taken.items():
                out[layout.open(medium)] += (back * share).sum(axis=0)


def coupled(
    leaving: tuple[Real, Real], responses: Sequence[Response | None], returned: Sequence[Real | float]
) -> tuple[Real, Real]:
    """Solve the two-by-two system of both sides: all passes through the group and back."""
    if not any(responses):
        return leaving
    up, down = leaving
    above, below = (response or NO_RESPONSE for response in responses)
    self_up, self_down = 1.0 - above.back * returned[0], 1.0 - below.back * returned[1]
    to_down, to_up = above.through * returned[0], below.through * returned[1]
    whole = self_up * self_down - to_down * to_up
    return (up * self_down + to_up * down) / whole, (down * self_up + to_down * up) / whole


def _settle(out: Real, layout: Layout, k: int, side: Side, folded: Shell | None, sink: Mask, power: Real) -> None:
    """Book the power that leaves the group on one side, all passes counted."""
    free = (FREE_ABOVE, FREE_BELOW)[k] if side.free else (COVER, SUBSTRATE)[k]
    held = (COVER, SUBSTRATE)[k]
    if folded is None:
        leaves = power.sum(axis=0)
        out[layout.open(side.outer) if side.absorbs else layout.end(free)] += leaves
        return
    leaves = (folded.passes * power).sum(axis=0) * ~sink
    out[layout.open(side.outer) if side.absorbs else layout.end(free)] += leaves
    out[layout.end(held)] += (folded.reflects * power).sum(axis=0) * sink
    for medium, share in folded.taken(power).items():
        swallowed = share.sum(axis=0)
        out[layout.open(medium)] += swallowed * ~sink
        out[layout.held(medium)] += swallowed * sink


def light_lines(scene: Scene) -> Real:
    """Return the real indices at which a density may have a square-root end, (line, wavelength).

    Those of the film, all plates and the media that end the sides; finite thin layers have none.
    """
    lines = [scene.film, *scene.above.plates, *scene.below.plates, scene.above.outer, scene.below.outer]
    return scene.index[lines].real


def split_panels(low: Real, high: Real, lines: Real) -> tuple[Index, Real, Real]:
    """Return owners and ends of the pieces of [low, high], one such interval a wavelength, split at ``lines``."""
    marks = np.sort(np.vstack([low, np.clip(lines, low, np.maximum(low, high)), high]), axis=0)
    starts, stops = marks[:-1], marks[1:]
    which, owner = np.nonzero(stops - starts > 1e-12)
    return owner, starts[which, owner], stops[which, owner]
