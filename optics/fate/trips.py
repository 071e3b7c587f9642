"""Round trips of light held in plates: out to the face that turns it back, through the thin group, and again.

Per in-plane wave number q and polarisation. A side whose light cannot leave is a sink; what enters it comes back
reduced and some way along, meets the group, and re-enters the same side or crosses to the other one. A side that can
be left at this q is followed to its end at once, without any way along.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from optics.arrays import Index, Mask, Real
from optics.fate.exits import Response, coupled
from optics.waves.plates import Shell, Waves, is_sink, shell

Leaving = tuple[Real, Real]

MOST_COUNTED = 40
"""Round trips counted one by one; where more fit before the edge, their whole number is averaged over one trip."""

FAINTEST = 1e-10
"""Light below this part of what entered is not followed further."""

MOST_PAIRS = 20_000
"""Pairs of round trips above and below that are counted one by one."""


@dataclass(frozen=True)
class Ends:
    """Where the ends of followed light stand on a leading axis: what each medium takes, then the others."""

    media: int

    @property
    def size(self) -> int:
        """Number of ends."""
        return self.media + 6

    @property
    def edge(self) -> int:
        """Position of the sample's edge."""
        return self.media

    def free(self, k: int) -> int:
        """Position of free space above (0) or below (1)."""
        return self.media + 1 + k

    def kept(self, k: int) -> int:
        """Position of an outer medium that holds what enters it."""
        return self.media + 3 + k

    @property
    def unfinished(self) -> int:
        """Position of light that nothing ever ends."""
        return self.media + 5


@dataclass(frozen=True)
class Trip:
    """One unit of power entering a sink: where it ends on this trip, and where it enters anew.

    ``ends`` is (end, polarisation, row, node), ``across`` what re-enters the other side, ``way`` how far along in units
    of 1/k0, ``attenuated`` what one round trip through the plates leaves.
    """

    ends: Real
    across: Real
    lost: Real
    way: Real
    attenuated: Real
    in_plates: Real  # (medium, polarisation, row, node), the plates' part of ``ends``

    @property
    def again(self) -> Real:
        """What re-enters the same side."""
        return np.maximum(1.0 - self.lost - self.across, 0.0)


class Network:
    """Both sides of a group and the group between them, for one block of nodes."""

    def __init__(self, waves: Waves, responses: Sequence[Response | None]) -> None:
        scene = waves.view.scene
        self.scene, self.waves, self.responses = scene, waves, responses
        self.ends = Ends(scene.media)
        self.shells = [shell(waves, side) if side.plates else None for side in scene.sides]
        self.sinks = [is_sink(waves.view, side, waves.q) & bool(side.plates) for side in scene.sides]
        self.opened = [
            0.0 if s is None else np.where(sink, 0.0, s.reflects)
            for s, sink in zip(self.shells, self.sinks, strict=True)
        ]

    def entering(self, leaving: Leaving) -> Leaving:
        """Return what enters either side in all, open sides followed to their end, sinks on first entry."""
        return coupled(leaving, self.responses, self.opened)

    def settle(self, ends: Real, total: Leaving) -> None:
        """Book what enters the sides that can be left at this q."""
        for k, (side, folded, sink) in enumerate(zip(self.scene.sides, self.shells, self.sinks, strict=True)):
            power = np.where(sink, 0.0, total[k])
            out = side.outer if side.absorbs else self.ends.free(k) if side.free else self.ends.kept(k)
            if folded is None:
                ends[out] += power
                continue
            ends[out] += folded.passes * power
            for medium, share in folded.taken(power).items():
                ends[medium] += share
            self._meet_group(ends, k, self.opened[k] * total[k])

    def held(self, total: Leaving) -> Leaving:
        """Return the part of what enters the sides that cannot leave them."""
        return np.where(self.sinks[0], total[0], 0.0), np.where(self.sinks[1], total[1], 0.0)

    def trips(self) -> list[Trip | None]:
        """Return one round trip of a unit of power in either side; None for a side that is no sink anywhere."""
        return [self._trip(k) if self.sinks[k].any() else None for k in (0, 1)]

    def _trip(self, k: int) -> Trip:
        folded, response, sink = self.shells[k], self.responses[k], self.sinks[k]
        if folded is None or response is None:
            raise ValueError("a side without plates holds nothing")
        unit = np.where(sink, 1.0, np.zeros_like(folded.reflects))
        ends = np.zeros((self.ends.size, *unit.shape))
        for medium, share in folded.taken(unit).items():
            ends[medium] += share
        in_plates = ends[: self.scene.media].copy()
        back = unit * folded.reflects
        self._meet_group(ends, k, back)
        returned = (response.back * back, response.through * back)
        total = self.entering(returned if k == 0 else returned[::-1])
        self.settle(ends, total)
        across = np.where(self.sinks[1 - k], total[1 - k], 0.0)
        lost = np.where(sink, ends.sum(axis=0), 1.0)
        return Trip(ends, across, lost, way(self.waves, folded), folded.reflects, in_plates)

    def _meet_group(self, ends: Real, k: int, power: Real | float) -> None:
        response = self.responses[k]
        if response is not None:
            for medium, share in response.taken.items():
                ends[medium] += power * share


def way(waves: Waves, folded: Shell) -> Real:
    """Return how far along one round trip through the plates carries, in units of 1/k0; infinite along a plate.

    2 t tan(theta) for every plate on the way; where interfaces between plates send part of the light back early, the
    mean over the light that returns.
    """
    beyond = np.zeros_like(folded.reflects)
    for stage in reversed(folded.stages):
        if stage.inward is not None:
            series = 1.0 - stage.inward.back * stage.beyond
            part = stage.outward.on**2 * stage.beyond / series**2
            beyond = np.where(part > 0.0, part / np.where(part > 0.0, stage.far_face, 1.0) * beyond, 0.0)
        cosine = waves.kz(stage.plate).real
        travels = cosine > 0.0
        step = 2.0 * waves.view.phase[stage.plate] * waves.q / np.where(travels, cosine, 1.0)
        beyond = np.where(travels, beyond + step, 0.0)
    return np.where(beyond > 0.0, beyond, np.inf)


def endless(ends: Ends, trips: Sequence[Trip | None], entered: Leaving) -> Real:
    """Return where light that entered the sinks ends in a sample without edges, (end, polarisation, row, node)."""
    out = np.zeros((ends.size, *np.broadcast(*entered).shape))
    visits, ended = _visits(trips, entered)
    for trip, visit in zip(trips, visits, strict=True):
        if trip is not None:
            out += visit * trip.ends
    out[ends.unfinished] += np.where(ended, 0.0, entered[0] + entered[1])
    return out


def _visits(trips: Sequence[Trip | None], entered: Leaving) -> tuple[Leaving, Mask]:
    """Return how often light enters either sink, and where that is ever over.

    Both geometric series are summed from what each trip loses, without cancellation when that is little.
    """
    lost = [np.ones(1) if t is None else t.lost for t in trips]
    across = [np.zeros(1) if t is None else t.across for t in trips]
    whole = lost[0] * lost[1] + lost[0] * across[1] + lost[1] * across[0]
    ended = whole > 0.0
    each = np.where(ended, 1.0, 0.0) / np.where(ended, whole, 1.0)
    above = each * ((lost[1] + across[1]) * entered[0] + across[1] * entered[1])
    below = each * ((lost[0] + across[0]) * entered[1] + across[0] * entered[0])
    return (above, below), ended


def to_edge(ends: Ends, trips: Sequence[Trip | None], entered: Leaving, reach: Real) -> Real:
    """Return the same for a sample whose edge lies ``reach`` (units of 1/k0) from the spot, (row, 1).

    Whole round trips until the edge; the last, unfinished one is attenuated in the plates for its part.
    """
    shape = np.broadcast(*entered).shape
    out = np.zeros((ends.size, *shape))
    both = np.zeros(shape, dtype=bool)
    if trips[0] is not None and trips[1] is not None:
        both = np.broadcast_to((trips[0].across > 0.0) | (trips[1].across > 0.0), shape).copy()
    for trip, power in zip(trips, entered, strict=True):
        if trip is not None:
            _alone(out, ends, trip, np.where(both, 0.0, power), reach)
    rows = np.flatnonzero(both.any(axis=(0, 2)))
    if len(rows) and trips[0] is not None and trips[1] is not None:
        chosen = [_at(trip, rows) for trip in trips if trip is not None]
        part = np.zeros((ends.size, shape[0], len(rows), shape[2]))
        here = [np.where(both, power, 0.0)[:, rows] for power in entered]
        _between(part, ends, chosen, here, reach[rows])
        out[:, :, rows] += part
    return out


def _alone(out: Real, ends: Ends, trip: Trip, power: Real, reach: Real) -> None:
    """Follow light that stays on its side."""
    trips = reach / trip.way
    whole = np.floor(trips)
    many = whole >= MOST_COUNTED
    again = np.clip(1.0 - trip.lost, 0.0, 1.0)
    survive = again**whole
    if many.any():
        survive = np.where(many, _averaged(again, trip.lost, trips), survive)
    left = np.where(many, 0.5, trips - whole)
    lost = np.where(trip.lost > 0.0, trip.lost, 1.0)
    out += trip.ends * (power * (1.0 - survive) / lost)
    _last(out, ends, trip, power * survive, left)


def _averaged(again: Real, lost: Real, trips: Real) -> Real:
    """Return again^floor(trips) averaged over one trip."""
    inner = (again > 0.0) & (lost > 0.0)
    rate = -np.log(np.where(inner, again, 0.5))
    spread = np.where(inner, -np.expm1(-rate) / (np.where(inner, again, 0.5) * rate), 1.0)
    return np.where(inner, np.exp(-rate * trips) * spread, again)


def _last(out: Real, ends: Ends, trip: Trip, power: Real, left: Real) -> None:
    """Book light on its last trip: ``left`` of it is still made, through the plates."""
    lost = 1.0 - np.clip(trip.attenuated, 0.0, 1.0)
    survives = np.clip(trip.attenuated, 0.0, 1.0) ** left
    total = trip.in_plates.sum(axis=0)
    part = np.where(total > 0.0, 1.0 - survives, 0.0) * np.where(lost > 0.0, 1.0, 0.0)
    out[ends.edge] += power * (1.0 - part)
    out[: ends.media] += trip.in_plates * (power * part / np.where(total > 0.0, total, 1.0))


def _at(trip: Trip, rows: Index) -> Trip:
    return Trip(
        trip.ends[:, :, rows],
        trip.across[:, rows],
        trip.lost[:, rows],
        np.broadcast_to(trip.way, trip.lost.shape)[:, rows],
        trip.attenuated[:, rows],
        trip.in_plates[:, :, rows],
    )


def _between(out: Real, ends: Ends, trips: Sequence[Trip], entered: Sequence[Real], reach: Real) -> None:
    """Follow light that changes sides: every pair of numbers of round trips above and below is one arrival."""
    counts = [_most(trip.way, reach) for trip in trips]
    if (counts[0] + 1) * (counts[1] + 1) > MOST_PAIRS:
        _mean_field(out, ends, trips, entered, reach)
        return
    visits = [np.zeros_like(entered[0]) for _ in trips]
    faintest = FAINTEST * max(entered[0].max(), entered[1].max())
    nothing = np.zeros_like(entered[0])
    older: list[list[Real]] = [[nothing, nothing] for _ in range(counts[1] + 1)]
    for above in range(counts[0] + 1):
        newer: list[list[Real]] = []
        for below in range(counts[1] + 1):
            arriving = [entered[k] if above == below == 0 else nothing for k in (0, 1)]
            # what has finished a trip above came from one trip less there, at the same number below
            after = older[below] if above else [nothing, nothing]
            before = newer[below - 1] if below else [nothing, nothing]
            arriving[0] = arriving[0] + trips[0].again * after[0] + trips[1].across * before[1]
            arriving[1] = arriving[1] + trips[0].across * after[0] + trips[1].again * before[1]
            if max(arriving[0].max(), arriving[1].max()) < faintest:
                newer.append([nothing, nothing])
                continue
            way_made = above * trips[0].way + below * trips[1].way
            newer.append(_one_more(out, ends, trips, visits, arriving, reach - way_made))
        older = newer
    for trip, visit in zip(trips, visits, strict=True):
        out += trip.ends * visit


def _one_more(
    out: Real, ends: Ends, trips: Sequence[Trip], visits: list[Real], arriving: Sequence[Real], to_go: Real
) -> list[Real]:
    """Let light begin its next trip; return what finishes it, book what meets the edge first."""
    finished = []
    for k, trip in enumerate(trips):
        done = trip.way <= to_go
        finished.append(np.where(done, arriving[k], 0.0))
        visits[k] += finished[k]
        stopped = np.where(done, 0.0, arriving[k])
        if stopped.any():
            _last(out, ends, trip, stopped, np.clip(to_go / trip.way, 0.0, 1.0))
    return finished


def _most(way_along: Real, reach: Real) -> int:
    return int(np.floor((reach / way_along).max(initial=0.0)))


def _mean_field(out: Real, ends: Ends, trips: Sequence[Trip], entered: Sequence[Real], reach: Real) -> None:
    """Follow a great many changes of side as one decay over the mean way to an end."""
    power = entered[0] + entered[1]
    visits, ended = _visits(trips, (entered[0], entered[1]))
    ended = ended & (power > 0.0)
    along = [np.where(v > 0.0, v * np.where(v > 0.0, t.way, 0.0), 0.0) for t, v in zip(trips, visits, strict=True)]
    mean = (along[0] + along[1]) / np.where(ended, power, 1.0)
    survive = np.where(ended, np.exp(-reach / np.where(mean > 0.0, mean, np.inf)), 1.0)
    for trip, visit in zip(trips, visits, strict=True):
        out += trip.ends * (visit * (1.0 - survive))
    out[ends.edge] += survive * power
