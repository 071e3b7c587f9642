"""Rays in the plane: how far from their birth the film takes them back, angle by angle and summed over angles.

In a film of thickness d a ray at the angle theta to the normal crosses in s = d/cos(theta). With births spread evenly,
the part of the rays that have met m faces after a path s is a straight line between whole numbers of crossings, so that
the power left is exp(-alpha s) times a straight line between the products of m reflectances: all orders have a closed
form. Cut after the first crossing it is the first flight of Case, de Hoffmann & Placzek (1953).
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from optics.arrays import Real
from optics.fate import ray, wave
from optics.fate.exits import Response, light_lines, split_panels
from optics.fate.trips import Network, way
from optics.waves import curves
from optics.waves.paths import Rows, fejer
from optics.waves.plates import Waves
from optics.waves.scene import Scene

ORDER = 24
"""Order of the rule over angles on each panel: shapes need no more, totals come from the ledger."""

HELD_ORDER = 48

BLOCK_ROWS = 64
"""Wavelength panels done at a time, few enough for arrays over angle and radius to stay in cache."""

MOST = 60.0
"""Absorption lengths after which nothing is left to take."""


@dataclass(frozen=True)
class Taken:
    """Power that the film takes within given radii, in units of the bulk power.

    ``within`` is (radius, wavelength), ``total`` (wavelength,).
    """

    within: Real
    total: Real

    def scaled(self, total: Real) -> "Taken":
        """Return the same shape with another total; nothing where the shape holds nothing."""
        factor = np.where(self.total > 0.0, total / np.where(self.total > 0.0, self.total, 1.0), 0.0)
        return Taken(self.within * factor, np.where(self.total > 0.0, total, 0.0))

    def plus(self, other: "Taken") -> "Taken":
        """Return the sum of both."""
        return Taken(self.within + other.within, self.total + other.total)


def nothing(radii: int, wavelengths: int) -> Taken:
    """Return that nothing is taken."""
    return Taken(np.zeros((radii, wavelengths)), np.zeros(wavelengths))


def flights(scene: Scene, radius: Real, *, bound: bool) -> Taken:
    """Return what the film takes of rays on their way through it, in the open or the bound zone.

    Parameters
    ----------
    scene
        The stack, as waves see it.
    radius
        Ascending radii in units of 1/k0, (radius, wavelength).
    bound
        Whether the rays are those that cannot leave the thin group.
    """
    seen = ray.real_film(scene)
    edge, end = ray.edge_of_open(seen), seen.film_index.real
    low, high = (edge, end) if bound else (np.zeros_like(edge), edge)
    return _summed(seen, radius, low, high, _film_takes)


def returns(scene: Scene, radius: Real) -> Taken:
    """Return what the film takes of light that plates send back on sides which it can leave (ray optics)."""
    seen = ray.real_film(scene)
    edge = ray.edge_of_open(seen)
    if not any(side.plates for side in seen.sides):
        return nothing(len(radius), scene.wavelengths)
    return _summed(seen, radius, np.zeros_like(edge), edge, _plates_return)


def held(scene: Scene, radius: Real, *, model: str) -> Taken:
    """Return what the film takes of light held in plates, trip by trip, were the sample endless.

    The ledger books this light as held; it is no part of the film's share there. Light that crosses from one plate to
    the other is not followed.
    """
    seen = ray.real_film(scene) if model == "ray" else scene
    end = ray.edge_of_open(seen) if model == "ray" else seen.open_end
    if not any(side.plates for side in seen.sides):
        return nothing(len(radius), scene.wavelengths)
    take = _held_rays if model == "ray" else _held_waves
    return _summed(seen, radius, np.zeros_like(end), end, take, order=HELD_ORDER)


Take = Callable[[Waves, Real, Real], tuple[Real, Real]]
"""Takes waves, radii (radius, row) and weights (row, node); returns what is taken within them and in all."""


def _summed(scene: Scene, radius: Real, low: Real, high: Real, take: Take, order: int = ORDER) -> Taken:
    """Integrate over q on real-axis panels, a block of panels at a time."""
    out = nothing(len(radius), scene.wavelengths)
    owner, start, stop = split_panels(low, high, light_lines(scene))
    nodes, weights = fejer(order)
    rows = curves.panels(owner, start, stop)
    for first in range(0, len(rows), BLOCK_ROWS):
        part: Rows = rows.take(slice(first, first + BLOCK_ROWS))
        u = np.broadcast_to(nodes, (len(part), len(nodes)))
        points = curves.on_crowded_panel(part, u, scene.film_index[part.owner, None])
        waves = Waves(scene.view(part.owner), points.q, points.short_of_film)
        within, total = take(waves, radius[:, part.owner], points.slope * weights[:, 0])
        np.add.at(out.within.T, part.owner, within.T)
        np.add.at(out.total, part.owner, total)
    return out


def _film_takes(waves: Waves, radius: Real, weight: Real) -> tuple[Real, Real]:
    """Return what the film takes on the rays' way through it."""
    rays = ray.trace(waves)
    if not rays.slant.any():
        return np.zeros(radius.shape), np.zeros(radius.shape[1])
    film = waves.view.scene.film
    crossings = waves.kz(film).real / (waves.q * waves.view.phase[film])  # a unit of radius
    launched = rays.launched * weight
    passes = Passes(rays.slant, rays.above.back, rays.below.back)
    total = (launched * passes.total).sum(axis=(0, 2))
    out = np.broadcast_to(total, radius.shape).copy()
    last = int((radius.max(axis=1) * (rays.slant * crossings).min() < MOST).sum())
    within = passes.within(radius[:last, :, None] * crossings)
    out[:last] = np.einsum("prn,kprn->kr", launched, within)
    return out, total


@dataclass(frozen=True)
class Passes:
    """Rays that cross a film again and again.

    ``slant`` is the absorption of a crossing, (row, node); ``up`` and ``down`` are the reflectances met, (polarisation,
    row, node).
    """

    slant: Real
    up: Real
    down: Real

    @property
    def total(self) -> Real:
        """Share that the film takes in all."""
        both, mean = self.up * self.down, 0.5 * (self.up + self.down)
        return self._two(both, mean) / self._loss(both)

    def within(self, crossings: Real) -> Real:
        """Return the share taken within a path of so many crossings, (radius, polarisation, row, node)."""
        both, mean = self.up * self.down, 0.5 * (self.up + self.down)
        turns = np.floor(0.5 * crossings)
        left = (crossings - 2.0 * turns)[:, None]
        turns = turns[:, None]
        fade = np.log(np.maximum(both, 1e-300)) - 2.0 * self.slant
        gone = np.exp(turns * fade)
        whole = self._two(both, mean) * np.where(turns > 0.0, 1.0 - gone, 0.0) / self._loss(both)
        first, second = np.minimum(left, 1.0), np.maximum(left - 1.0, 0.0)
        part = _segment(self.slant, first, 1.0, mean)
        part = part + np.exp(-self.slant) * _segment(self.slant, second, mean, both)
        out: Real = whole + np.where(turns > 0.0, gone, 1.0) * part
        return out

    def _two(self, both: Real, mean: Real) -> Real:
        one = np.ones_like(self.slant)
        return _segment(self.slant, one, 1.0, mean) + np.exp(-self.slant) * _segment(self.slant, one, mean, both)

    def _loss(self, both: Real) -> Real:
        """Return 1 - R_u R_d exp(-2 alpha s), one where nothing is ever lost: then nothing is taken either."""
        loss = (1.0 - both) - both * np.expm1(-2.0 * self.slant)
        return np.where(loss > 0.0, loss, 1.0)


def _segment(slant: Real, length: Real, start: Real | float, end: Real) -> Real:
    """Return what is taken up to ``length`` of light that would fall from ``start`` to ``end`` over one crossing."""
    depth = slant * length
    taken = -np.expm1(-depth)
    # integral of t x exp(-t x); its series where the difference has lost its digits
    near = depth < 1e-3
    slope = np.where(near, depth * depth * (0.5 - depth / 3.0), taken - depth * (1.0 - taken))
    out: Real = start * taken + (end - start) * slope / np.where(slant > 0.0, slant, 1.0)
    return out


def _plates_return(waves: Waves, radius: Real, weight: Real) -> tuple[Real, Real]:
    """Return what the film takes of light that open sides send back; the share of each trip is the same."""
    scene = waves.view.scene
    rays = ray.trace(waves)
    responses = [ray.response(waves, rays, k) if side.plates else None for k, side in enumerate(scene.sides)]
    net = Network(waves, responses)
    total = net.entering((rays.up * rays.above.on * weight, rays.down * rays.below.on * weight))
    within, whole = np.zeros(radius.shape), np.zeros(radius.shape[1])
    for folded, response, opened, sink, power in zip(net.shells, responses, net.opened, net.sinks, total, strict=True):
        if folded is None or response is None:
            continue
        taken = np.where(sink, 0.0, opened * power * response.taken.get(scene.film, 0.0))
        again = np.asarray(opened * response.back)
        part, every = _by_trips(np.asarray(taken * (1.0 - again)), again, 1.0 - again, way(waves, folded), radius)
        within, whole = within + part, whole + every
    return within, whole


def _held_rays(waves: Waves, radius: Real, weight: Real) -> tuple[Real, Real]:
    rays = ray.trace(waves)
    sides = enumerate(waves.view.scene.sides)
    responses = [ray.response(waves, rays, k) if side.plates else None for k, side in sides]
    return _held(waves, responses, (rays.up * rays.above.on, rays.down * rays.below.on), radius, weight)


def _held_waves(waves: Waves, radius: Real, weight: Real) -> tuple[Real, Real]:
    sent = wave.emission(waves)
    responses = [wave.response(waves, k) if side.plates else None for k, side in enumerate(waves.view.scene.sides)]
    return _held(waves, responses, (sent.fluxes_up[-1], sent.fluxes_down[-1]), radius, weight)


def _held(
    waves: Waves, responses: Sequence[Response | None], leaving: tuple[Real, Real], radius: Real, weight: Real
) -> tuple[Real, Real]:
    net = Network(waves, responses)
    entered = net.held(net.entering((leaving[0] * weight, leaving[1] * weight)))
    within, whole = np.zeros(radius.shape), np.zeros(radius.shape[1])
    for trip, power in zip(net.trips(), entered, strict=True):
        if trip is not None:
            taken = power * trip.ends[waves.view.scene.film]
            again = np.clip(1.0 - trip.lost - trip.across, 0.0, 1.0)
            part, every = _by_trips(taken, again, trip.lost + trip.across, trip.way, radius)
            within, whole = within + part, whole + every
    return within, whole


def _by_trips(taken: Real, again: Real, lost: Real, along: Real, radius: Real) -> tuple[Real, Real]:
    """Return what is taken at whole numbers of round trips: ``taken`` on the first, times ``again`` on every next.

    ``along`` is how far one trip carries.
    """
    lost = np.where(lost > 0.0, lost, np.inf)
    whole = taken / lost
    total = whole.sum(axis=(0, 2))
    along = along[None] if along.ndim == taken.ndim else along[None, None]
    trips = radius[:, None, :, None] / np.where(np.isfinite(along), along, np.inf)
    count = np.floor(trips)
    fade = np.log(np.maximum(again, 1e-300))
    out = np.einsum("prn,kprn->kr", whole, -np.expm1(count * fade))
    return out, total
