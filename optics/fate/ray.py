"""Ray optics: isotropic (or weighted) launch in the film, Fresnel-exact faces, Beer-Lambert crossings, all orders.

The halves of the thin group keep their own interference (transfer matrix, the film's real index as the incident
medium); the film itself carries intensities. s and p are traced apart.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np

from optics.arrays import Index, Real
from optics.fate.exits import Layout, Response, emerge, light_lines, split_panels
from optics.fate.ledger import Account, merge
from optics.fate.wave import Settings
from optics.fate.wave_account import THINNEST_ZONE, absorbers
from optics.waves import curves
from optics.waves.curves import Points
from optics.waves.lines import Resonator, Value, echoes, find, integrate_with_lines, resonators
from optics.waves.paths import Integral, Rows
from optics.waves.plates import Meeting, Waves, meet
from optics.waves.scene import Scene, View
from optics.waves.source import first_flight

ORDER = 40
"""Order of the rule: without phases in the film there is little for it to follow."""


@dataclass(frozen=True)
class Traced:
    """Rays of one film: power launched, what first flights leave, and what arrives at either face; (pol, row, node)."""

    launched: Real
    flown: Real  # absorbed on first flights
    up: Real  # arriving at the upper face, all orders
    down: Real
    crossing: Real  # exp(-alpha d/cos), (row, node)
    above: Meeting
    below: Meeting
    slant: Real


def trace(waves: Waves) -> Traced:
    """Launch rays per unit q and sum all their orders; ``waves`` sees the film with its real index."""
    view, scene = waves.view, waves.view.scene
    film, q = view.film, waves.q
    above = meet(waves, scene.film, scene.layers_up, scene.above.touching)
    below = meet(waves, scene.film, scene.layers_down, scene.below.touching)
    cosine = waves.kz(scene.film).real / film.real_index
    slant = 2.0 * view.loss[scene.film] * view.phase[scene.film] / cosine
    crossing = np.exp(-slant)
    near_up, near_down = scene.moments(-slant)
    launched = launch(view, q, cosine)
    up, down = 0.5 * launched * near_up, 0.5 * launched * near_down
    loop = unclosed(slant, crossing, above, below)
    return Traced(
        launched,
        launched - up - down,
        (up + crossing * below.back * down) / loop,
        (down + crossing * above.back * up) / loop,
        crossing,
        above,
        below,
        slant,
    )


def unclosed(slant: Real, crossing: Real, above: Meeting, below: Meeting) -> Real:
    """Return 1 - a^2 R_u R_d from what is lost, so that nearly lossless loops keep their digits; never zero."""
    lost_above = above.on + sum(above.taken.values())
    lost_below = below.on + sum(below.taken.values())
    loop: Real = -np.expm1(-2.0 * slant) + crossing * crossing * (lost_above + above.back * lost_below)
    return np.where(loop > 0.0, loop, 1.0)


def launch(view: View, q: Real, cosine: Real) -> Real:
    """Return the power launched per unit q by in-plane and normal dipoles, (polarisation, row, node)."""
    n, h = view.film.real_index, view.film.in_plane
    sine_squared = (q / n) ** 2
    out = np.empty((2, *q.shape))
    out[0] = 0.75 * h
    out[1] = 0.75 * h * cosine * cosine + 1.5 * (1.0 - h) * sine_squared
    out *= q / (n * n * cosine)
    return out


def real_film(scene: Scene) -> Scene:
    """Return the scene as rays see it: the film's index real, its absorption kept in ``loss``."""
    index = scene.index.copy()
    index[scene.film] = index[scene.film].real
    return replace(scene, index=index)


def open_density(scene: Scene, rows: Rows, u: Real) -> Real:
    """Return everything the open zone needs per node, (quantity, row, node), Jacobian included."""
    points = curves.on_panel(rows, u, scene.film_index[rows.owner, None])
    out = open_values(scene, rows.owner, points)
    out *= points.slope
    return out


def open_values(scene: Scene, owner: Index, points: Points) -> Real:
    """Return everything the open zone needs per unit q, (quantity, row, node), in the order of ``Layout``."""
    waves = Waves(scene.view(owner), points.q, points.short_of_film)
    layout = Layout(scene.media)
    out = np.zeros((layout.size, *points.q.shape))
    rays = trace(waves)
    out[layout.power] = rays.launched.sum(axis=0)
    taken = _crossings(rays)
    out[layout.open(scene.film)] = (rays.flown + taken).sum(axis=0)
    _book_halves(out, rays, layout.open)
    responses = [response(waves, rays, k) if side.plates else None for k, side in enumerate(scene.sides)]
    emerge(waves, out, (rays.up * rays.above.on, rays.down * rays.below.on), responses, layout)
    return out


def _crossings(rays: Traced) -> Real:
    """Return what the film takes after the first flight."""
    lost = -np.expm1(-rays.slant)
    return lost * (rays.above.back * rays.up + rays.below.back * rays.down)


def _book_halves(out: Real, rays: Traced, place: Callable[[int], int]) -> None:
    for half, power in ((rays.above, rays.up), (rays.below, rays.down)):
        for medium, share in half.taken.items():
            out[place(medium)] += (power * share).sum(axis=0)


def response(waves: Waves, rays: Traced, k: int) -> Response:
    """Return what the group does with light that comes back from side ``k``: in through one half, then all orders."""
    scene = waves.view.scene
    near, far = (rays.above, rays.below) if k == 0 else (rays.below, rays.above)
    layers = scene.layers_up if k == 0 else scene.layers_down
    outside = meet(waves, scene.sides[k].touching, layers[::-1], scene.film)
    a = rays.crossing
    loop = unclosed(rays.slant, a, near, far)
    at_far = outside.on * a / loop
    at_near = at_far * far.back * a
    lost = -np.expm1(-rays.slant)
    taken = {scene.film: lost * (outside.on + at_far * far.back + at_near * near.back)}
    for medium, share in outside.taken.items():
        taken[medium] = share + at_near * near.taken[medium]
    for medium, share in far.taken.items():
        taken[medium] = at_far * share
    return Response(outside.back + at_near * near.on, at_far * far.on, taken)


def bound_values(scene: Scene, owner: Index, points: Points, *, passes: bool) -> Real:
    """Return power, first-flight absorption and what each medium takes per unit q of the bound zone.

    Without ``passes`` only first flights are followed: where nothing absorbs, later ones never end.
    """
    waves = Waves(scene.view(owner), points.q, points.short_of_film)
    out = np.zeros((2 + scene.media, *points.q.shape))
    view = waves.view
    cosine = waves.kz(scene.film).real / view.film.real_index
    launched = launch(view, waves.q, cosine)
    out[0] = launched.sum(axis=0)
    if passes:
        rays = trace(waves)
        out[1] = rays.flown.sum(axis=0)
        _book_halves(out, rays, lambda medium: 2 + medium)
        for side, half, power in zip(scene.sides, (rays.above, rays.below), (rays.up, rays.down), strict=True):
            if side.absorbs and not side.plates:
                out[2 + side.outer] += (half.on * power).sum(axis=0)
    else:
        slant = 2.0 * view.loss[scene.film] * view.phase[scene.film] / cosine
        out[1] = first_flight(slant, scene.moments) * out[0]
    return out


def account(scene: Scene, settings: Settings) -> Account:
    """Integrate everything that the ledger of ray optics needs; ``scene`` as waves see it."""
    clear = scene.film_index.imag == 0.0
    kinds = np.stack([clear, absorbers(scene) > 0])
    seen = real_film(scene)
    parts = []
    for kind in np.unique(kinds, axis=1).T:
        chosen = np.flatnonzero((kinds == kind[:, None]).all(axis=0))
        parts.append((chosen, _account_alike(seen.at(chosen), settings, clear=bool(kind[0]), others=bool(kind[1]))))
    return merge(parts, scene.wavelengths)


def _account_alike(scene: Scene, settings: Settings, *, clear: bool, others: bool) -> Account:
    edge = scene.film_index.real
    layout = Layout(scene.media)
    zone = _integrated(
        lambda owner, points: open_values(scene, owner, points),
        scene,
        np.zeros_like(edge),
        edge_of_open(scene),
        layout.size,
        settings,
    )
    bound = _integrated(
        lambda owner, points: bound_values(scene, owner, points, passes=others),
        scene,
        edge_of_open(scene),
        edge,
        2 + scene.media,
        settings,
    )
    has_bound = edge - scene.open_end > THINNEST_ZONE
    miss = zone.values[1:].sum(axis=0) + bound.values[0] - 1.0
    return Account(
        power=np.ones(scene.wavelengths),
        zone=zone.values,
        bound_first_flight=bound.values[1],
        bound_taken=_shared_out(bound.values, clear=clear),
        has_bound=has_bound,
        unfinished=has_bound & clear & (not others),
        miss=miss,
        path_error=bound.error + np.abs(miss),
        open_error=zone.error,
        guided_error=bound.error,
    )


def edge_of_open(scene: Scene) -> Real:
    """Return where rays stop leaving the group: no ray runs beyond the film's own light line."""
    return np.minimum(scene.open_end, scene.film_index.real)


def _shared_out(bound: Real, *, clear: bool) -> Real:
    """Return what each medium but the film takes of bound rays; all of it where the film is clear."""
    taken = bound[2:]
    total = taken.sum(axis=0)
    return taken * np.where(clear & (total > 0.0), bound[0] / np.where(total > 0.0, total, 1.0), 1.0)


def _integrated(value: Value, scene: Scene, low: Real, high: Real, size: int, settings: Settings) -> Integral:
    guides = guides_of(scene)
    # sharp lines crowd towards the light line of the layer that holds them
    marks = np.vstack([light_lines(scene), scene.index[[guide.core for guide in guides]].real])
    owner, start, stop = split_panels(low, high, marks)
    if not len(owner):
        return Integral(np.zeros((size, scene.wavelengths)), np.zeros(scene.wavelengths))
    panels = curves.panels(owner, start, stop)
    return integrate_with_lines(
        value,
        panels,
        find(scene, panels, guides),
        scene=scene,
        order=ORDER,
        finer=settings.finer,
        tolerance=settings.unchecked,
        panel=curves.on_crowded_panel,
    )


def guides_of(scene: Scene) -> tuple[Resonator, ...]:
    """Return the layers of both halves that can guide or echo, the film being one of the media behind them."""
    up = scene.layers_up[::-1], scene.above.touching, scene.film
    down = scene.layers_down, scene.film, scene.below.touching
    every = [*resonators(scene, *up), *echoes(scene, *up), *resonators(scene, *down), *echoes(scene, *down)]
    return tuple(dict.fromkeys(every))
