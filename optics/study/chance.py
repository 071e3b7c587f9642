"""Rays followed by chance: a small Monte Carlo of one stack at one wavelength, with its own statistical error.

Nothing of the series and integrals of ray optics is used: rays are born, fly, are absorbed, reflected or passed on by
lot, until each has met its end. What faces do to a ray (power reflected, passed on, absorbed) comes from the kernels.
"""

from dataclasses import dataclass

import numpy as np

from optics.arrays import Index, Mask, Real
from optics.fate.ledger import ENDS
from optics.fate.ray import real_film
from optics.waves.plates import Waves, meet
from optics.waves.scene import Scene, Side

MOST_STEPS = 100_000
GOING = -1
REABSORBED, WAVEGUIDED, SUBSTRATE, COVER, FREE_BELOW, FREE_ABOVE, ELSEWHERE = range(len(ENDS))


@dataclass(frozen=True)
class Followed:
    """Shares of the rays that met each end, in the order of ``ENDS``, and their statistical errors."""

    shares: Real
    errors: Real
    rays: int


def follow(scene: Scene, *, rays: int, seed: int) -> Followed:
    """Follow rays born evenly in the film of a scene of one wavelength.

    Parameters
    ----------
    scene
        As waves see it; one wavelength.
    rays
        How many.
    seed
        Of the lots.
    """
    walk = _Walk(real_film(scene), rays, np.random.default_rng(seed))
    shares = np.bincount(walk.ends(), minlength=len(ENDS)) / rays
    # an end that no ray met may still be met by one in as many more
    errors = np.sqrt(np.maximum(shares * (1.0 - shares), 1.0 / rays) / rays)
    return Followed(shares, errors, rays)


class _Walk:
    """All rays at once; rooms are plates and film from above to below, walls the thin layers between them."""

    def __init__(self, scene: Scene, rays: int, lots: np.random.Generator) -> None:
        self.scene, self.lots, self.count = scene, lots, rays
        above, below = scene.sides
        self.rooms = (*above.plates[::-1], scene.film, *below.plates)
        self.home = len(above.plates)
        cosine, self.pol, self.down = self._born()
        n = float(scene.film_index[0].real)
        self.q = n * np.sqrt(1.0 - cosine * cosine)
        waves = Waves(scene.view(np.zeros(1, dtype=np.intp)), self.q[None])
        self.depth = np.array([self._crossing(waves, room) for room in self.rooms])
        self.walls = self._walls(waves)
        self.sink = [self._sink(side) for side in scene.sides]
        self.bound = self.q > scene.open_end[0]

    def _born(self) -> tuple[Real, Index, Mask]:
        """Return cosines, polarisations (s 0, p 1) and ways of rays from dipoles of the film's share in the plane."""
        h, kept = self.scene.in_plane, np.zeros(0)
        pol = np.zeros(0, dtype=np.intp)
        while len(kept) < self.count:
            cosine = self.lots.random(2 * self.count)
            s = np.full_like(cosine, 0.75 * h)
            p = 0.75 * h * cosine**2 + 1.5 * (1.0 - h) * (1.0 - cosine**2)
            accepted = self.lots.random(len(cosine)) * max(1.5 * h, 1.5 - 0.75 * h) < s + p
            which = self.lots.random(len(cosine)) * (s + p) >= s
            kept = np.concatenate([kept, cosine[accepted]])
            pol = np.concatenate([pol, which[accepted].astype(np.intp)])
        return kept[: self.count], pol[: self.count], self.lots.random(self.count) < 0.5

    def _crossing(self, waves: Waves, room: int) -> Real:
        """Return the optical depth of one crossing of a room for every ray, infinite where it cannot travel there."""
        view = waves.view
        kz = waves.kz(room).real[0]
        depth = 2.0 * view.loss[room, 0, 0] * view.phase[room, 0, 0] * view.index[room, 0, 0].real
        out: Real = np.divide(depth, kz, out=np.full_like(kz, np.inf), where=kz > 0.0)
        return out

    def _walls(self, waves: Waves) -> list[tuple[tuple[Real, Real], tuple[Real, Real]]]:
        """Return, wall by wall, what it reflects and passes on of light from above and of light from below."""
        above, below = self.scene.sides
        coatings = (
            *(c[::-1] for c in above.coatings[::-1]),
            self.scene.layers_up[::-1],
            self.scene.layers_down,
            *below.coatings,
        )
        solids = (above.outer, *self.rooms, below.outer)
        walls = []
        for upper, lower, coating in zip(solids[:-1], solids[1:], coatings, strict=True):
            met = [meet(waves, upper, coating, lower), meet(waves, lower, coating[::-1], upper)]
            walls.append(tuple((self._own(each.back), self._own(each.on)) for each in met))
        return walls  # type: ignore[return-value]  # two of two

    def _own(self, both: Real) -> Real:
        """Return what belongs to each ray's polarisation, (ray,), of (polarisation, 1, ray)."""
        own: Real = both[self.pol, 0, np.arange(self.count)]
        return own

    def _sink(self, side: Side) -> Mask:
        least = min((self.scene.index[m, 0].real for m in side.clear), default=np.inf)
        return (self.q > least) & bool(side.plates)

    def ends(self) -> Index:
        """Return the end of every ray, by its place in ``ENDS``."""
        end = np.full(self.count, GOING)
        room = np.full(self.count, self.home)
        down = self.down.copy()
        left = self.lots.random(self.count)  # part of the first crossing that is left
        first = np.ones(self.count, dtype=bool)
        for _ in range(MOST_STEPS):
            go = np.flatnonzero(end == GOING)
            if not len(go):
                break
            self._fly(go, end, room, left, first)
            first[go], left[go] = False, 1.0
            go = go[end[go] == GOING]
            self._meet(go, end, room, down)
        end[end == GOING] = WAVEGUIDED
        return end

    def _fly(self, go: Index, end: Index, room: Index, left: Real, first: Mask) -> None:
        lost = self.lots.random(len(go)) < -np.expm1(-self.depth[room[go], go] * left[go])
        at_home = room[go] == self.home
        later_bound = self.bound[go] & ~first[go]
        end[go[lost & at_home & ~later_bound]] = REABSORBED
        end[go[lost & at_home & later_bound]] = WAVEGUIDED
        end[go[lost & ~at_home]] = ELSEWHERE
        if not any(side.absorbs and not side.plates for side in self.scene.sides):
            end[go[~lost & self.bound[go]]] = WAVEGUIDED  # nothing but the group can take it any more

    def _meet(self, go: Index, end: Index, room: Index, down: Mask) -> None:
        """Let rays meet the wall ahead: back, on, or swallowed by its layers."""
        lot = self.lots.random(len(go))
        back, on = np.zeros(len(go)), np.zeros(len(go))
        for at, wall in enumerate(self.walls):
            for way, (reflects, passes) in enumerate(wall):
                here = (room[go] == (at - 1 if way == 0 else at)) & (down[go] == (way == 0))
                back[here], on[here] = reflects[go[here]], passes[go[here]]
        self._held(go, end, room, down)
        go_on = end[go] == GOING
        turned, passed = go_on & (lot < back), go_on & (lot >= back) & (lot < back + on)
        swallowed = go[go_on & ~turned & ~passed]
        end[swallowed] = np.where(self.bound[swallowed], WAVEGUIDED, ELSEWHERE)
        down[go[turned]] ^= True
        moved = go[passed]
        room[moved] += np.where(down[moved], 1, -1)
        self._out(moved, end, room)

    def _held(self, go: Index, end: Index, room: Index, down: Mask) -> None:
        """End rays that come back to the group through plates which they cannot leave."""
        for side, sink in enumerate(self.sink):
            nearest = self.home + (-1 if side == 0 else 1)
            back = (room[go] == nearest) & (down[go] == (side == 0)) & sink[go]
            end[go[back]] = (COVER, SUBSTRATE)[side]

    def _out(self, moved: Index, end: Index, room: Index) -> None:
        for side, outside in enumerate((-1, len(self.rooms))):
            given = self.scene.sides[side]
            kind = (FREE_ABOVE, FREE_BELOW)[side] if given.free else (COVER, SUBSTRATE)[side]
            end[moved[room[moved] == outside]] = ELSEWHERE if given.absorbs else kind
