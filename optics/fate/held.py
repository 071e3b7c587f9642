"""Light held in plates, followed to its end, in wave and in ray optics: integrals over the in-plane wave number.

The ledger books held light where it first enters a plate. Here it is followed on: taken by the film or another layer
on one of its returns, absorbed in a plate, out through the other side where that can be left, or at the sample's edge.
"""

from collections.abc import Callable
from dataclasses import dataclass
from itertools import pairwise

import numpy as np

from optics.arrays import Index, Real
from optics.fate import ray, wave
from optics.fate.exits import Response, light_lines, split_panels
from optics.fate.trips import MOST_COUNTED, Ends, Leaving, Network, endless, to_edge
from optics.fate.wave import Settings
from optics.waves import curves
from optics.waves.paths import Integral, Rows, integrate
from optics.waves.plates import Waves
from optics.waves.scene import Scene, Side

TOLERANCE = 1e-6
"""Of each row of the integrals: far below what plates and edges are known to."""

HALVINGS = 6
"""Where light changes sides the integrand jumps; a jump is cornered to this part of its panel, the rest is stated."""

FEW_JUMPS = 8
"""Jumps of either side at which panels are split where light may change sides: between them lie many more, smaller."""

MISSED = 5e-5
"""What the jumps between nodes may add up to where light changes sides (found by refining; 5e-6 in the mean)."""

ORDER = 16
SOURCES = ("births", "above", "below")
"""What enters the plates: light from births, and one unit scattered isotropically up or down from the film."""


@dataclass(frozen=True)
class Held:
    """Where light that left the group ends, (end, wavelength), in the order of :class:`Ends`.

    ``wide`` is a sample without edges, ``edged`` one with. Of births, held light alone; of scattered light (shares
    of one unit sent up and down), everything, and ``scattered_first`` without what is held in plates. ``straight`` is
    what births send into outer media that hold it.
    """

    ends: Ends
    wide: Real
    edged: Real
    scattered_first: Real  # (side, end, wavelength)
    scattered_wide: Real
    scattered_edged: Real
    straight: Real  # (side, wavelength)
    error: Real


def follow(scene: Scene, settings: Settings, reach: Real, *, model: str, scattered: bool) -> Held:
    """Follow held light to its end.

    Parameters
    ----------
    scene
        The stack.
    settings
        How finely to integrate.
    reach
        Distance from the spot to the edge in units of 1/k0, (wavelength,).
    model
        ``"wave"`` or ``"ray"``.
    scattered
        Whether scattered light is asked for too.
    """
    seen = ray.real_film(scene) if model == "ray" else scene
    end = ray.edge_of_open(seen) if model == "ray" else seen.open_end
    send = {"wave": _from_waves, "ray": _from_rays}[model]
    ends = Ends(scene.media)
    sources = SOURCES if scattered else SOURCES[:1]
    values, error = _integrated(seen, end, reach, send, sources, settings)
    start = values[: 2 * ends.size].reshape(2, ends.size, -1)
    straight = values[2 * ends.size : 2 * ends.size + 2]
    rest = values[2 * ends.size + 2 :].reshape(len(sources) - 1, 3, ends.size, scene.wavelengths)
    if all(side.plates for side in scene.sides):
        error = error + MISSED
    first, wide, edged = (_swallowed_at_once(seen, rest[:, variant], rest[:, 1]) for variant in (0, 1, 2))
    return Held(ends, start[0], start[1], first, wide, edged, straight, error)


Send = Callable[[Waves], tuple[Leaving, list[Response | None]]]


def _from_waves(waves: Waves) -> tuple[Leaving, list[Response | None]]:
    sent = wave.emission(waves)
    responses = [wave.response(waves, k) if side.plates else None for k, side in enumerate(waves.view.scene.sides)]
    return (sent.fluxes_up[-1], sent.fluxes_down[-1]), responses


def _from_rays(waves: Waves) -> tuple[Leaving, list[Response | None]]:
    rays = ray.trace(waves)
    sides = enumerate(waves.view.scene.sides)
    responses = [ray.response(waves, rays, k) if side.plates else None for k, side in sides]
    return (rays.up * rays.above.on, rays.down * rays.below.on), responses


def _integrated(
    scene: Scene, end: Real, reach: Real, send: Send, sources: tuple[str, ...], settings: Settings
) -> tuple[Real, Real]:
    size = Ends(scene.media).size * (3 * len(sources) - 1) + 2
    most = FEW_JUMPS if all(side.plates for side in scene.sides) else MOST_COUNTED
    marks = np.vstack([light_lines(scene), *(_jumps(scene, side, reach, most) for side in scene.sides)])
    owner, low, high = split_panels(np.zeros(scene.wavelengths), end, marks)
    if not len(owner):
        return np.zeros((size, scene.wavelengths)), np.zeros(scene.wavelengths)
    whole: Integral = integrate(
        lambda rows, u: _density(scene, rows, u, end=end, reach=reach, send=send, sources=sources),
        curves.panels(owner, low, high),
        wavelengths=scene.wavelengths,
        order=ORDER * settings.finer,
        tolerance=TOLERANCE,
        halvings=HALVINGS,
    )
    return whole.values, whole.error


def _density(
    scene: Scene, rows: Rows, u: Real, *, end: Real, reach: Real, send: Send, sources: tuple[str, ...]
) -> Real:
    """Return the ends of every source per node, (quantity, row, node), Jacobian included."""
    points = curves.on_panel(rows, u, scene.film_index[rows.owner, None])
    waves = Waves(scene.view(rows.owner), points.q, points.short_of_film)
    leaving, responses = send(waves)
    network = Network(waves, responses)
    trips = network.trips()
    edge = reach[rows.owner, None]
    out = []
    for source in sources:
        sent = leaving if source == "births" else _scattered(waves, SOURCES.index(source) - 1, end[rows.owner, None])
        total = network.entering(sent)
        held = network.held(total)
        variants = [endless(network.ends, trips, held), to_edge(network.ends, trips, held, edge)]
        at_once = np.zeros_like(variants[0])
        network.settle(at_once, total)
        if source == "births":
            straight = at_once[[network.ends.kept(0), network.ends.kept(1)]]
            out += [*(v.sum(axis=1) for v in variants), straight.sum(axis=1)]
        else:
            out += [at_once.sum(axis=1), *((v + at_once).sum(axis=1) for v in variants)]
    whole: Real = np.concatenate(out) * points.slope
    return whole


def _scattered(waves: Waves, k: int, end: Real) -> Leaving:
    """Return one unit of power, isotropic and unpolarised, that the group sends into the medium above or below.

    By Lambert's law in the medium that touches the group, over the directions that the group passes on.
    """
    index = waves.view.index[waves.view.scene.sides[k].touching].real
    top = np.minimum(index, end)
    density = np.where(waves.q <= top, waves.q / np.where(top > 0.0, top * top, 1.0), 0.0)
    one = np.broadcast_to(density, (2, *density.shape))
    nothing = np.zeros_like(one)
    return (one, nothing) if k == 0 else (nothing, one)


def _swallowed_at_once(scene: Scene, scattered: Real, whole: Real) -> Real:
    """Return the ends of scattered light per unit of the ``whole``; an absorber that touches the group takes all."""
    out = scattered.copy()
    for k in range(len(out)):
        side = scene.sides[k]
        if side.absorbs and not side.plates:
            out[k] = 0.0
            out[k, side.outer] = 1.0
        else:
            out[k] /= whole[k].sum(axis=0)
    return out


def _jumps(scene: Scene, side: Side, reach: Real, most: int) -> Real:
    """Return the in-plane wave numbers at which one round trip less fits before the edge, (jump, wavelength)."""
    low = np.zeros(scene.wavelengths)
    if not side.plates:
        return low[None]
    lines = np.sort(scene.index[list(side.clear)].real, axis=0)
    ends = pairwise(lines)
    return np.array([low, *(_where_trips(scene, side, *each, reach / n) for each in ends for n in range(1, most + 1))])


def _where_trips(scene: Scene, side: Side, low: Real, high: Real, step: Real) -> Real:
    """Return the q between two light lines at which a round trip carries ``step``; the lower line if none does."""
    low, high = low.copy(), high.copy()
    start = low.copy()
    if (_way(scene, side, low, low, high) > step).all():
        return start
    bottom = low.copy()
    top = high.copy()
    for _ in range(50):
        middle = 0.5 * (low + high)
        short = _way(scene, side, middle, bottom, top) < step
        low, high = np.where(short, middle, low), np.where(short, high, middle)
    inside = (low > bottom) & (high < top)
    return np.where(inside, 0.5 * (low + high), start)


def _way(scene: Scene, side: Side, q: Real, low: Real, high: Real) -> Real:
    """Return the way along of one round trip, through the plates up to the first that turns this light back."""
    total = np.zeros_like(q)
    open_so_far = np.ones(q.shape, dtype=bool)
    between = 0.5 * (low + high)
    for plate in side.plates:
        index = scene.index[plate].real
        open_so_far = open_so_far & (index > between)
        cosine = np.sqrt(np.maximum(index * index - q * q, 1e-300))
        total += np.where(open_so_far, 2.0 * scene.phase[plate] * q / cosine, 0.0)
    return total


ARRAYS = ("wide", "edged", "scattered_first", "scattered_wide", "scattered_edged", "straight", "error")


def scaled(ends: Held, weight: float) -> Held:
    """Return the ends times a weight."""
    return Held(ends=ends.ends, **{name: weight * getattr(ends, name) for name in ARRAYS})


def added(parts: list[tuple[Index, Held]], wavelengths: int) -> Held:
    """Add up results of some wavelengths each, the light of one wavelength in one part or several."""
    first = parts[0][1]
    fields = {}
    for name in ARRAYS:
        whole = np.zeros((*getattr(first, name).shape[:-1], wavelengths))
        for chosen, part in parts:
            whole[..., chosen] += getattr(part, name)
        fields[name] = whole
    return Held(ends=first.ends, **fields)
