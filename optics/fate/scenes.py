"""From a drawn stack to scenes: which media are thin, which are plates, what ends a side, wavelength by wavelength."""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np

from optics.arrays import Complex, Index, Mask, Real
from optics.waves.scene import Scene, Side
from optics.waves.source import Moments, uniform

SWALLOWED_WITHIN_NM = 20_000.0
"""An outer medium that absorbs within this length (1/alpha) swallows what enters it: the length that parts thin
layers from plates, so that a thick absorber and an outer one of the same material mean the same."""


@dataclass(frozen=True)
class Drawing:
    """A stack as plain arrays, outer media included; lengths in nm.

    ``index`` is (medium, wavelength), ``thickness_nm`` and ``plate`` run over the media (outer ones: 0 and True),
    ``free`` tells of either outer medium whether light in it counts as free. ``uneven`` holds two rules,
    weights and film thicknesses over which answers are averaged, the second a coarser one; empty for an even film.
    """

    wavelength_nm: Real
    index: Complex
    thickness_nm: Real
    plate: tuple[bool, ...]
    film: int
    free: tuple[bool, bool]
    in_plane: float
    moments: Moments = uniform
    uneven: tuple[tuple[tuple[float, float], ...], ...] = ()


def swallows(drawing: Drawing, medium: int) -> Mask:
    """Tell per wavelength whether an outer medium (or a metallic plate) swallows what enters it."""
    index = drawing.index[medium]
    metal: Mask = (index * index).real < 0.0
    outer = medium in (0, len(drawing.index) - 1)
    opaque: Mask = 4.0 * np.pi * index.imag * SWALLOWED_WITHIN_NM >= drawing.wavelength_nm
    return metal | opaque if outer else metal


def scenes(drawing: Drawing) -> Iterator[tuple[Index, Scene]]:
    """Yield wavelengths (positions) and their scene, a scene for every way in which the sides may end."""
    reach = [_side_ends(drawing, step) for step in (-1, 1)]
    kinds = np.stack([*reach[0], *reach[1]])
    patterns, which = np.unique(kinds, axis=1, return_inverse=True)
    for number, pattern in enumerate(patterns.T):
        chosen = np.flatnonzero(which.ravel() == number)
        yield chosen, _scene(drawing, chosen, pattern)


def _side_ends(drawing: Drawing, step: int) -> tuple[Index, Mask]:
    """Return per wavelength the medium that ends a side and whether it swallows: a metallic plate ends it early."""
    outermost = 0 if step < 0 else len(drawing.index) - 1
    ends = np.full(len(drawing.wavelength_nm), outermost)
    swallowing = swallows(drawing, outermost)
    for medium in range(outermost - step, drawing.film, -step):
        if drawing.plate[medium]:
            opaque = swallows(drawing, medium)
            ends = np.where(opaque, medium, ends)
            swallowing = np.where(opaque, True, swallowing)
    return ends, swallowing


def _scene(drawing: Drawing, chosen: Index, pattern: Sequence[int]) -> Scene:
    top, top_swallows, bottom, bottom_swallows = (int(v) for v in pattern)
    index = np.take(drawing.index, chosen, axis=1)
    loss = index.imag.copy()
    waves = [m for m in range(len(index)) if not drawing.plate[m] or m == drawing.film]
    waves += [top] * bool(top_swallows) + [bottom] * bool(bottom_swallows)
    passive = np.setdiff1d(np.arange(len(index)), waves)
    index[passive] = index[passive].real
    layers_up, above = _side(drawing, top, bool(top_swallows), -1)
    layers_down, below = _side(drawing, bottom, bool(bottom_swallows), 1)
    phase = 2.0 * np.pi * drawing.thickness_nm[:, None] / drawing.wavelength_nm[chosen]
    depths = tuple(np.abs(index * phase).max(axis=1).tolist())
    sides = above, below, layers_up, layers_down
    return Scene(index, loss, phase, drawing.film, *sides, drawing.in_plane, drawing.moments, depths)


def _side(drawing: Drawing, outer: int, swallowing: bool, step: int) -> tuple[tuple[int, ...], Side]:
    """Return the thin layers of the group and the rest of a side, both outwards."""
    group: list[int] = []
    plates: list[int] = []
    coatings: list[list[int]] = []
    for medium in range(drawing.film + step, outer, step):
        if drawing.plate[medium]:
            plates.append(medium)
            coatings.append([])
        elif plates:
            coatings[-1].append(medium)
        else:
            group.append(medium)
    free = drawing.free[0 if step < 0 else 1] and not swallowing
    return tuple(group), Side(tuple(plates), tuple(map(tuple, coatings)), outer, swallowing, free)
