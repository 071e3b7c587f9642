"""Wave optics over the depth of the film: from which slice to which slice, and from each slice to every other end.

Below a dipole at depth a the field is u(a) v(a')/D at depth a', u the wave that is right above and v the one that is
right below; above it the same with a and a' exchanged. Source and landing slices therefore part, and a matrix is a
product over the nodes of the in-plane wave number (fluxes and power as in Chance, Prock & Silbey 1978 and Neyts 1998).
Light that lands in the slice it was born in is what is left of the power, which is integrated on the path of
`optics.fate.wave`.
"""

from dataclasses import dataclass

import numpy as np

from optics.arrays import Complex, Real
from optics.fate import wave
from optics.fate.wave import Settings
from optics.transport.landing import ENDS, SEEN_FROM, Landed, Landing, end_amounts, gather
from optics.transport.nodes import BLOCK, Nodes, bound_nodes, open_nodes
from optics.transport.slices import Standing, from_above, from_below, gauss, path_means, standing
from optics.waves import curves
from optics.waves.coherent import admittances, squared
from optics.waves.curves import Points
from optics.waves.elementary import turn, upper_root
from optics.waves.modes import pairs
from optics.waves.paths import Rows
from optics.waves.plates import Waves
from optics.waves.scene import Scene, View
from optics.waves.source import Film


def land(scene: Scene, edges: Real, settings: Settings) -> Landed:
    """Return where light from every slice lands, in units of the bulk power.

    Parameters
    ----------
    scene
        The stack.
    edges
        Edges of the slices in units of 1/k0, (wavelength, edge), from zero to the film's thickness.
    settings
        How finely to integrate.
    """
    out = Landing.empty(edges.shape[1] - 1, scene.wavelengths)
    out.power[:] = _power(scene, edges, settings)
    for zone in (open_nodes(scene, settings), bound_nodes(scene, settings.finer)):
        for nodes in zone:
            _add(out, scene, edges, nodes)
    return out.landed(np.diff(edges, axis=1))


def _power(scene: Scene, edges: Real, settings: Settings) -> Real:
    """Return the power radiated by births in each slice, (slice, wavelength)."""
    out = np.zeros((edges.shape[1] - 1, scene.wavelengths)) - wave.exchange_with_itself(scene)
    every = np.arange(scene.wavelengths)
    dips = Rows(every, np.zeros(len(every)), np.ones(len(every)), scene.far_end[None])
    dark = np.flatnonzero(scene.film_index.imag > 0.0)
    risers = wave.riser_rows(scene, dark, scene.far_end) if len(dark) else dips.take(dark)
    for rows, curve, order in (
        (dips, curves.on_dip, wave.path_order(scene, settings) * 5 // 8),
        (risers, curves.on_riser, 20 * settings.finer),
    ):
        nodes, weights = gauss(order)
        step = max(1, BLOCK // len(nodes))
        for first in range(0, len(rows), step):
            part = rows.take(slice(first, first + step))
            width = (part.stop - part.start)[:, None]
            view = scene.view(part.owner)
            points = curve(part, part.start[:, None] + width * nodes, view.film.index)
            value = _power_on_path(view, edges[part.owner], points, width * weights)
            np.add.at(out.T, part.owner, value)
    return out


def _power_on_path(view: View, edges: Real, points: Points, weight: Real) -> Real:
    """Return the power of every slice from the nodes of some rows, (row, slice); see `optics.waves.source.density`."""
    film = view.film
    kz = upper_root(points.short_of_film * (film.index + points.q))
    own = admittances(kz, film.eps)
    up, down = (pair.reflection(own) for pair in pairs(view, points.q))
    loop = up * down * turn(film.phase, kz)
    scale = points.q / film.real_index * points.slope * weight / (1.0 - loop)
    h = film.in_plane
    s = 0.75 * h / kz * scale[0]
    along = 0.75 * h / film.eps * kz * scale[1]
    upright = 1.5 * (1.0 - h) / film.eps * points.q**2 / kz * scale[1]
    same = (s * (1.0 + loop[0]) + (along + upright) * (1.0 + loop[1])).sum(axis=1)
    up_weight = s * up[0] + (upright - along) * up[1]
    down_weight = s * down[0] + (upright - along) * down[1]
    mean_up, mean_down = path_means(edges, kz)
    moved = np.matmul(mean_up, up_weight[:, :, None]) + np.matmul(mean_down, down_weight[:, :, None])
    out: Real = (same[:, None] + moved[:, :, 0]).real
    return out


def _add(out: Landing, scene: Scene, edges: Real, nodes: Nodes) -> None:
    """Add what the nodes of one block say about every pair of slices and every end."""
    waves = Waves(scene.view(nodes.owner), nodes.points.q, nodes.points.short_of_film)
    film = waves.view.film
    kz = waves.kz(scene.film)
    halves = (
        waves.mirror(scene.layers_up, scene.above.touching),
        waves.mirror(scene.layers_down, scene.below.touching),
    )
    mirrors = (halves[0].reflection, halves[1].reflection)
    over = standing(edges[nodes.owner], kz)
    responses = [wave.response(waves, k) if s.plates and not nodes.bound else None for k, s in enumerate(scene.sides)]
    ends = end_amounts(waves, responses, halves, over.whole[:, 0], bound=nodes.bound)
    if nodes.bound:
        photons = nodes.points.q < scene.far_end[nodes.owner, None]
        ends = (ends[0] * photons, ends[1] * photons)
    strength = nodes.weight / squared(1.0 - mirrors[0] * mirrors[1] * turn(film.phase, kz))
    twice = np.exp(2j * film.phase * kz.real)
    sums: Sums = {}
    for polarisation in nodes.polarisations:
        block = _Block(over, twice, *_weights(film, nodes.points.q, kz, polarisation))
        pair = (mirrors[0][polarisation], mirrors[1][polarisation])
        mine = (ends[0][:, polarisation], ends[1][:, polarisation])
        _add_block(sums, block, pair, mine, strength[polarisation])
    for name, part in sums.items():
        gather(getattr(out, name), nodes.owner, part)


Sums = dict[str, Real]
"""Parts of a `Landing`, row by row: gathered once, for both polarisations."""


def _add_to(sums: Sums, name: str, part: Real) -> None:
    if name in sums:
        sums[name] += part
    else:
        sums[name] = part


@dataclass(frozen=True)
class _Block:
    """Integrals over the slices, and the weights of |F|^2 and |F'/kz|^2 in what they send and take, (row, node)."""

    over: Standing
    twice: Complex
    plain: Real
    slope: Real
    send: Real  # what is sent, over plain |F|^2 + slope |F'/kz|^2
    take: Real
    upright: Real  # what is sent beyond that, over |F|^2

    def of(self, up: Complex | None, down: Complex | None, plain: Real, slope: Real) -> Real:
        """Integrate over slices the wave that is right above (``up``) or below (``down``)."""
        if up is not None:
            return from_above(self.over, up, plain, slope)
        if down is None:
            raise ValueError("one of the mirrors is needed")
        return from_below(self.over, down, self.twice, plain, slope)


def _weights(film: Film, q: Real, kz: Complex, polarisation: int) -> tuple[Real, Real, Real, Real, Real]:
    """Return plain, slope, send, take and upright of `_Block`, (row, node).

    s: in-plane dipoles and absorption both go with |F|^2. p: a dipole in the plane goes with |F'|^2, an upright one
    with q^2 |F|^2, absorption with their sum; when all directions are alike, sending and taking are the same.
    """
    h, size = film.in_plane, squared(kz)
    one, scale = np.ones_like(q), 0.375 * q / film.real_index
    loss = film.eps.imag * one
    if polarisation == 0:
        return one, 0.0 * one, h * scale / size, loss, 0.0 * one
    send = h * scale / size
    return q * q, size, send, loss / squared(film.eps), (2.0 - 3.0 * h) * scale * q * q / size


def _add_block(
    sums: Sums,
    block: _Block,
    mirrors: tuple[Complex, Complex],
    ends: tuple[Real, Real],
    strength: Real,
) -> None:
    """Add one polarisation's rows: products over the nodes of what slices send and what slices and ends take.

    Amounts are those of a whole slice, not yet divided by its width.
    """
    up = block.of(mirrors[0], None, block.plain, block.slope)
    down = block.of(None, mirrors[1], block.plain, block.slope)
    load = block.send * strength
    with np.errstate(over="ignore"):  # in the triangles that mean nothing
        pairs = np.matmul(up * (load * block.take)[:, None], np.swapaxes(down, 1, 2))
    _add_to(sums, "pairs", pairs)
    _add_ends(sums, (up, down), (up, down), ends, load)
    if block.upright.any():
        nothing = np.zeros_like(block.plain)
        more_up = block.of(mirrors[0], None, block.upright, nothing)
        more_down = block.of(None, mirrors[1], block.upright, nothing)
        taken = (strength * block.take)[:, None]
        with np.errstate(over="ignore"):
            below = np.matmul(more_up * taken, np.swapaxes(down, 1, 2))
            _add_to(sums, "pairs", below)
            above = np.matmul(more_down * taken, np.swapaxes(up, 1, 2))
            _add_to(sums, "above", above - np.swapaxes(below, 1, 2))
        _add_ends(sums, (more_up, more_down), (up, down), ends, strength)


def _add_ends(
    sums: Sums,
    sent: tuple[Real, Real],
    lands: tuple[Real, Real],
    ends: tuple[Real, Real],
    load: Real,
) -> None:
    """Add what gets to the ends, and what the film takes of light that plates send back.

    Births send the wave that is right below upwards, and the other one down.
    """
    for k in (0, 1):
        _add_to(sums, "ends", np.matmul(sent[1 - k], np.moveaxis(ends[k][: len(ENDS)] * load, 0, 2)))
        back = [ends[way][SEEN_FROM[k]] * load for way in (0, 1)]
        if back[0].any() or back[1].any():
            there = lands[1 - k]  # light from above is right below
            part = 1.0 / there.sum(axis=1)
            coming = sent[1] * (back[0] * part)[:, None]
            coming += sent[0] * (back[1] * part)[:, None]
            _add_to(sums, "returned", np.matmul(coming, np.swapaxes(there, 1, 2)))
