"""Ray optics over the depth of the film: Beer-Lambert flights between slices, all orders of reflection summed."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from optics.arrays import Index, Real
from optics.fate import ray
from optics.fate.exits import Response, light_lines, split_panels
from optics.fate.trips import Network
from optics.fate.wave import Settings
from optics.transport.landing import AT, ENDS, SEEN_FROM, Landed, Landing, gather, leave_group
from optics.transport.slices import MOST_FADING, gauss
from optics.waves import curves
from optics.waves.plates import Waves
from optics.waves.scene import Scene

ORDER = 16
BLOCK = 1200


def land(scene: Scene, edges: Real, settings: Settings) -> Landed:
    """Return where light from every slice lands, in units of the power radiated; arguments are those for waves."""
    seen = ray.real_film(scene)
    out = Landing.empty(edges.shape[1] - 1, scene.wavelengths)
    out.power[:] = 1.0
    edge, end = ray.edge_of_open(seen), seen.film_index.real
    nodes, weights = gauss(settings.finer * ORDER)
    step = max(1, BLOCK // len(nodes))
    for low, high, bound in ((np.zeros_like(edge), edge, False), (edge, end, True)):
        rows = curves.panels(*split_panels(low, high, light_lines(seen)))
        for first in range(0, len(rows), step):
            part = rows.take(slice(first, first + step))
            u = np.broadcast_to(nodes, (len(part), len(nodes)))
            points = curves.on_crowded_panel(part, u, seen.film_index[part.owner, None])
            waves = Waves(seen.view(part.owner), points.q, points.short_of_film)
            _add(out, waves, edges[part.owner], part.owner, points.slope * weights, bound=bound)
    return out.landed(np.diff(edges, axis=1))


@dataclass(frozen=True)
class _Flights:
    """Means and absorptances of the slices for one block, (row, slice, node); depths from the upper face."""

    reach_up: Real  # integral of exp(-t x) over a slice: what gets to the upper face
    reach_down: Real
    lands_down: Real  # of light that starts down from the upper face
    lands_up: Real
    leaves_down: Real  # what leaves a slice downwards; with what lands below it, a product
    below: Real


def _flights(edges: Real, slant: Real) -> _Flights:
    """Return flights for ``slant``, the absorption of one crossing, (row, node)."""
    x = (edges / edges[:, -1:])[:, :, None]
    t = slant[:, None, :]
    taken = -np.expm1(-t * np.diff(x, axis=1))
    thick = t * np.diff(x, axis=1)
    mean = np.where(thick > 0.0, taken / np.where(thick > 0.0, thick, 1.0), 1.0)
    mean *= np.diff(edges, axis=1)[:, :, None]  # amounts are those of a whole slice
    fade = np.exp(-t * x)
    rest = np.exp(-t * (1.0 - x[:, 1:]))
    # between slices exponents count from the middle; neighbours stay exact where they are cut, others get nothing
    from_middle = np.exp(np.minimum(t, 2.0 * MOST_FADING) * (0.5 - x))
    above, upper, lower = fade[:, :-1], from_middle[:, :-1], from_middle[:, 1:]
    return _Flights(mean * above, mean * rest, taken * above, taken * rest, mean / lower, taken * upper)


def _add(out: Landing, waves: Waves, edges: Real, owner: Index, weight: Real, *, bound: bool) -> None:
    scene = waves.view.scene
    rays = ray.trace(waves)
    flights = _flights(edges, rays.slant)
    responses = [ray.response(waves, rays, k) if s.plates and not bound else None for k, s in enumerate(scene.sides)]
    ends = _ends(waves, rays, responses, bound=bound)
    loop = ray.unclosed(rays.slant, rays.crossing, rays.above, rays.below)
    launched = 0.5 * rays.launched * weight
    onward = rays.crossing * rays.above.back, rays.crossing * rays.below.back  # (polarisation, row, node)
    each = launched / loop
    # what arrives above is each (reach_up + onward below reach_down), what arrives below the same turned over
    above, below = (each, each * onward[1]), (each * onward[0], each)
    spread = [
        sum(
            np.moveaxis(part * amount[: len(ENDS)], 0, -1).sum(axis=0) for part, amount in zip(parts, ends, strict=True)
        )
        for parts in zip(above, below, strict=True)
    ]
    gather(out.ends, owner, np.matmul(flights.reach_up, spread[0]) + np.matmul(flights.reach_down, spread[1]))
    if not rays.slant.any():
        return
    both = launched.sum(axis=0)[:, None]
    with np.errstate(over="ignore"):  # in the triangles that mean nothing
        gather(out.pairs, owner, np.matmul(both * flights.leaves_down, np.swapaxes(flights.below, 1, 2)))
    starts = [
        first.sum(axis=0)[:, None] * flights.reach_up + second.sum(axis=0)[:, None] * flights.reach_down
        for first, second in _sets_out(rays, onward, (above, below), ends)
    ]
    lands = np.concatenate([flights.lands_down, flights.lands_up], axis=2)
    gather(out.returned, owner, np.matmul(np.concatenate(starts, axis=2), np.swapaxes(lands, 1, 2)))


def _sets_out(
    rays: ray.Traced, onward: tuple[Real, Real], arrives: tuple[tuple[Real, Real], ...], ends: tuple[Real, Real]
) -> list[list[Real]]:
    """Return what sets out from the upper and the lower face: shares of ``reach_up`` and ``reach_down`` each.

    Faces send back what ``arrives``, and so do plates: what the film takes of the latter's lands on the way across and
    back.
    """
    halves = rays.above, rays.below
    out = [[part * half.back for part in parts] for parts, half in zip(arrives, halves, strict=True)]
    for k in (0, 1):
        seen = [
            above * ends[0][SEEN_FROM[k]] + below * ends[1][SEEN_FROM[k]] for above, below in zip(*arrives, strict=True)
        ]
        if not any(part.any() for part in seen):
            continue
        whole = -np.expm1(-rays.slant) * (1.0 + onward[1 - k])
        for i, part in enumerate(seen):
            entering = part / np.where(whole > 0.0, whole, 1.0)
            out[k][i] = out[k][i] + entering
            out[1 - k][i] = out[1 - k][i] + entering * onward[1 - k]
    return out


def _ends(waves: Waves, rays: ray.Traced, responses: Sequence[Response | None], *, bound: bool) -> tuple[Real, Real]:
    """Return what a unit of power that arrives at the upper, the lower face brings to each end."""
    scene = waves.view.scene
    out = []
    net = None if bound else Network(waves, responses)
    for k, half in enumerate((rays.above, rays.below)):
        amounts = np.zeros((len(ENDS) + 2, *half.back.shape))
        for share in half.taken.values():
            amounts[AT["guided_elsewhere" if bound else "elsewhere"]] += share
        if net is not None:
            nothing = np.zeros_like(half.on)
            leave_group(amounts, net, (half.on, nothing) if k == 0 else (nothing, half.on))
        elif scene.sides[k].absorbs and not scene.sides[k].plates:
            amounts[AT["elsewhere"]] += half.on
        out.append(amounts)
    return out[0], out[1]
