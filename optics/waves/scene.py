"""A stack as arrays over wavelength: what the kernels see.

Media run from the outer medium above (position 0) to the one below. The film and the thin layers that touch it form
the thin group; outside it stand plates, which carry intensities, with thin coatings between them.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np

from optics.arrays import Complex, Index, Real
from optics.waves.source import Film, Moments

DEPTH_STEP = 4.0


@dataclass(frozen=True)
class Side:
    """One side of the thin group, from the group outwards.

    ``plates`` are positions of plates, ``coatings[i]`` those of the thin layers behind plate i (outwards), and
    ``outer`` that of the medium that ends the side. ``absorbs``: the outer medium swallows what enters it.
    """

    plates: tuple[int, ...]
    coatings: tuple[tuple[int, ...], ...]
    outer: int
    absorbs: bool
    free: bool

    @property
    def touching(self) -> int:
        """Position of the medium that touches the thin group."""
        return self.plates[0] if self.plates else self.outer

    @property
    def clear(self) -> tuple[int, ...]:
        """Positions of the media that light must be able to enter to leave by this side."""
        return self.plates if self.absorbs else (*self.plates, self.outer)


@dataclass(frozen=True)
class Scene:
    """Arrays of a stack; ``index`` and ``phase`` are (medium, wavelength).

    ``index`` is what waves see: plates and outer media that pass light on enter with the real part; ``loss`` holds
    the imaginary part that attenuates plates. ``phase`` is k0 d, zero for outer media. ``depths`` are the largest
    phases through each medium, over all wavelengths that the scene was drawn for: they set the pace of every rule.
    ``twins`` are numbers by which to know wavelengths that differ in the film's phase alone, None where there are none.
    """

    index: Complex
    loss: Real
    phase: Real
    film: int
    above: Side
    below: Side
    layers_up: tuple[int, ...]  # thin layers from the film upwards
    layers_down: tuple[int, ...]
    in_plane: float
    moments: Moments
    depths: tuple[float, ...]
    twins: Index | None = None

    @property
    def media(self) -> int:
        """Number of media, outer ones included."""
        return len(self.index)

    @property
    def wavelengths(self) -> int:
        """Number of wavelengths."""
        return int(self.index.shape[1])

    @property
    def sides(self) -> tuple[Side, Side]:
        """Both sides, above first."""
        return self.above, self.below

    @cached_property
    def eps(self) -> Complex:
        """Permittivity, (medium, wavelength)."""
        return self.index * self.index

    @cached_property
    def film_index(self) -> Complex:
        """Film index, (wavelength,)."""
        own: Complex = self.index[self.film]
        return own

    @cached_property
    def group(self) -> tuple[int, ...]:
        """Thin layers of the group without the film."""
        return (*self.layers_up, *self.layers_down)

    @cached_property
    def open_end(self) -> Real:
        """Largest q at which light can leave the thin group, (wavelength,); zero if it cannot."""
        ends = [self.index[s.touching].real for s in self.sides if not (s.absorbs and not s.plates)]
        return np.max(ends, axis=0) if ends else np.zeros(self.wavelengths)

    @cached_property
    def far_end(self) -> Real:
        """Where photons end and near field begins: the largest real index in or touching the group, metals apart."""
        return np.maximum(self.film_index.real, self.highest_neighbour)

    @cached_property
    def highest_neighbour(self) -> Real:
        """Largest real index of the other media of the group and those that touch it, metals (Re eps < 0) apart."""
        others = [*self.group, *(s.touching for s in self.sides)]
        real = np.where(self.eps[others].real < 0.0, 0.0, self.index[others].real)
        highest: Real = np.max(real, axis=0)
        return highest

    def depth_through(self, layers: Sequence[int]) -> float:
        """Return the phase through layers at normal incidence, in steps: scenes much alike ask for equal nodes."""
        return DEPTH_STEP * float(np.ceil(sum(self.depths[layer] for layer in layers) / DEPTH_STEP))

    @property
    def depth(self) -> float:
        """Phase through the whole group."""
        return self.depth_through((self.film, *self.group))

    def repeats(self, owner: Index, *marks: Real) -> tuple[Index, Index] | None:
        """Tell which rows differ from the one before in the film's phase alone.

        ``marks`` are what tells rows of one wavelength apart, (row,). Returns the rows that do not, and for each row
        which of these it repeats; None where no row repeats another.
        """
        if self.twins is None:
            return None
        fresh = np.ones(len(owner), dtype=bool)
        fresh[1:] = np.any([mark[1:] != mark[:-1] for mark in (self.twins[owner], *marks)], axis=0)
        if fresh.all():
            return None
        return np.flatnonzero(fresh), np.cumsum(fresh) - 1

    def view(self, rows: Index) -> "View":
        """Return the scene at chosen wavelengths, shaped to broadcast over nodes."""
        return View(self, rows)

    def at(self, which: Index) -> "Scene":
        """Return the scene at some of its wavelengths only."""
        return replace(
            self,
            index=np.take(self.index, which, axis=1),
            loss=np.take(self.loss, which, axis=1),
            phase=np.take(self.phase, which, axis=1),
            twins=None if self.twins is None else self.twins[which],
        )


def side_by_side(scenes: Sequence[Scene]) -> tuple[Scene, list[Index]]:
    """Return scenes of one structure as one, and where in it the wavelengths of each are.

    Those that differ in the film's phase alone stand next to each other and are marked as twins.
    """
    first = scenes[0]
    if len(scenes) == 1:
        return first, [np.arange(first.wavelengths)]
    known: dict[tuple[bytes, ...], int] = {}
    twins: list[Index] = []
    start = 0
    for scene in scenes:
        phase = scene.phase.copy()
        phase[scene.film] = 0.0
        key = (scene.index.tobytes(), scene.loss.tobytes(), phase.tobytes())
        twins.append(known.setdefault(key, start) + np.arange(scene.wavelengths))
        start += scene.wavelengths
    marks = np.concatenate(twins)
    order = np.argsort(marks, kind="stable")
    place = np.empty_like(order)
    place[order] = np.arange(len(order))
    whole = replace(
        first,
        index=np.take(np.concatenate([scene.index for scene in scenes], axis=1), order, axis=1),
        loss=np.take(np.concatenate([scene.loss for scene in scenes], axis=1), order, axis=1),
        phase=np.take(np.concatenate([scene.phase for scene in scenes], axis=1), order, axis=1),
        twins=marks[order] if len(known) < len(scenes) else None,
    )
    return whole, np.split(place, np.cumsum([scene.wavelengths for scene in scenes])[:-1])


class View:
    """A scene at the wavelengths of some rows, (medium, row, 1)."""

    def __init__(self, scene: Scene, owner: Index) -> None:
        self.scene, self.owner = scene, owner
        self.index = scene.index[:, owner, None]
        self.eps = scene.eps[:, owner, None]
        self.loss = scene.loss[:, owner, None]
        self.phase = scene.phase[:, owner, None]

    @cached_property
    def film(self) -> Film:
        """The emitting film."""
        at = self.scene.film
        return Film(self.eps[at], self.index[at], self.phase[at], self.scene.in_plane, self.scene.moments)
