"""Bound light that neither modes nor rays carry: how far in the plane it gets, wave number by wave number.

Where the film's index lies below that of what touches the group, light that cannot leave the group only reaches into
the film and fades there; what of it no mode holds is a continuum. A field with the spectrum G(q) in the plane has the
mean square distance <r^2> = integral of |dG/dq|^2 over that of |G|^2 (Parseval's theorem; the turn of the
polarisation about the birth, of the order of 1/q, is left out). Node by node that is a local distance, and what the
film takes there is spread as the exponential exp(-a r) of the same mean square, 2/a^2. On a guided line,
G = 1/(q - q_m), the mean over the line is the mode's own 2/(2 Im q_m)^2.
"""

from dataclasses import dataclass

import numpy as np

from optics.arrays import Complex, Index, Real
from optics.transport import rings
from optics.transport.flights import Taken, nothing
from optics.transport.nodes import Nodes, bound_nodes
from optics.transport.slices import gauss
from optics.waves.coherent import squared
from optics.waves.elementary import turn
from optics.waves.modes import Modes
from optics.waves.plates import Waves
from optics.waves.scene import Scene

DEPTHS = 8
"""Depths of birth, and of landing, at which fields are compared."""

APART = 1e-7
"""Distance in q over which a field's slope is taken."""

LEAST_RATE, MOST_RATE = 1e-12, 1e12


@dataclass(frozen=True)
class Field:
    """What the film takes per unit of q in units of the bulk power, and the rate of its exponential; (pol, row, node).

    ``rate`` is in units of k0.
    """

    taken: Real
    rate: Real


def continuum(scene: Scene, radius: Real, modes: Modes) -> Taken:
    """Return what the film takes of bound light within radii, lines of modes left out.

    Parameters
    ----------
    scene
        The stack, as waves see it.
    radius
        Ascending radii in units of 1/k0, (radius, wavelength).
    modes
        The bound modes of the scene.
    """
    out = nothing(len(radius), scene.wavelengths)
    for nodes in bound_nodes(scene):
        field = field_at(scene, nodes)
        inside = nodes.weight * (nodes.points.q < scene.far_end[nodes.owner, None])
        for polarisation in nodes.polarisations:
            lines = _lines(scene, modes, nodes, polarisation)
            taken = np.maximum(field.taken[polarisation] - lines, 0.0) * inside
            reach = radius[:, nodes.owner, None] * field.rate[polarisation]
            within = (taken * -np.expm1(-reach)).sum(axis=2)
            np.add.at(out.within.T, nodes.owner, within.T)
            np.add.at(out.total, nodes.owner, taken.sum(axis=1))
    return out


def along_the_plane(scene: Scene, radius: Real) -> Taken:
    """Return what the film takes of light that runs along the plane in its own material."""
    rate = 2.0 * scene.film_index.imag
    return Taken(rings.within_of_exponential(rate, radius), np.where(rate > 0.0, 1.0, 0.0))


def field_at(scene: Scene, nodes: Nodes) -> Field:
    """Return what the film takes at nodes of the bound zone, and how far from its birth."""
    near = [_amplitudes(scene, nodes, side * APART) for side in (-1.0, 1.0)]
    film = scene.view(nodes.owner).film
    load = 0.375 * nodes.points.q / film.real_index * film.eps.imag * film.phase
    taken, rate = [], []
    for before, after in zip(*near, strict=True):
        size = sum(_mean(0.5 * (a + b)) for a, b in zip(before, after, strict=True))
        spread = sum(_mean((b - a) / (2.0 * APART)) for a, b in zip(before, after, strict=True))
        taken.append(load * size)
        ratio = 2.0 * size / np.where(spread > 0.0, spread, 1.0)
        rate.append(np.sqrt(np.clip(ratio, LEAST_RATE**2, MOST_RATE**2)))
    return Field(np.array(taken), np.array(rate))


def _mean(amplitude: Complex) -> Real:
    """Return the mean of |G|^2 over births and landings, (row, node)."""
    weights = gauss(DEPTHS)[1]
    out: Real = np.einsum("i,j,ijrn->rn", weights, weights, squared(amplitude))
    return out


def _amplitudes(scene: Scene, nodes: Nodes, aside: float) -> tuple[list[Complex], list[Complex]]:
    """Return the parts of the field at q + ``aside``, s and p, each (birth, landing, row, node).

    Their squares carry the weights of `optics.transport.depthwave`: in s dipoles in the plane; in p those and upright
    ones (q F), each taken by both parts of the electric field.
    """
    points = nodes.points
    waves = Waves(scene.view(nodes.owner), points.q + aside, points.short_of_film - aside)
    film, h = waves.view.film, scene.in_plane
    kz, q = waves.kz(scene.film), points.q + aside
    up = waves.mirror(scene.layers_up, scene.above.touching).reflection
    down = waves.mirror(scene.layers_down, scene.below.touching).reflection
    loop = 1.0 - up * down * turn(film.phase, kz)
    depth = gauss(DEPTHS)[0][:, None, None] * film.phase
    fields = [_Fields(kz, depth, film.phase, up[pol], down[pol]) for pol in (0, 1)]
    s = [np.sqrt(h) * fields[0].pair(False, False) / (loop[0] * kz)]
    scale = 1.0 / (loop[1] * kz * film.eps)
    plane, upright = np.sqrt(h) * kz * scale, np.sqrt(2.0 * (1.0 - h)) * q * scale
    p = [
        own * part * fields[1].pair(sloped, landing)
        for own, sloped in ((plane, True), (upright, False))
        for part, landing in ((q, False), (kz, True))
    ]
    return s, p


class _Fields:
    """Standing waves that are right above and right below the film, at a few depths, (depth, row, node)."""

    def __init__(self, kz: Complex, depth: Real, thickness: Real, up: Complex, down: Complex) -> None:
        self.kz, self.depth = kz, depth
        self.up = up * np.exp(2j * kz * depth)
        self.down = down * np.exp(2j * kz * (thickness - depth))

    def pair(self, sloped: bool, landing: bool) -> Complex:
        """Return u(a) v(b) for a above b and v(a) u(b) below, F or F'/kz of birth a and landing b, but for signs."""
        signs = (-1.0 if sloped else 1.0), (-1.0 if landing else 1.0)
        above = (1.0 + signs[0] * self.up)[:, None] * (1.0 + signs[1] * self.down)[None]
        below = (1.0 + signs[0] * self.down)[:, None] * (1.0 + signs[1] * self.up)[None]
        gap = self.depth[None] - self.depth[:, None]
        out: Complex = np.where(gap >= 0.0, above, below) * np.exp(1j * self.kz * np.abs(gap))
        return out


def _lines(scene: Scene, modes: Modes, nodes: Nodes, polarisation: int) -> Real:
    """Return what the film takes per unit of q of the modes' lines, (row, node)."""
    out = np.zeros(nodes.points.q.shape)
    for mode in np.flatnonzero(modes.polarisation == polarisation):
        rows: Index = np.flatnonzero(nodes.owner == modes.wavelength[mode])
        half = max(float(modes.index[mode].imag), 1e-14)
        away = nodes.points.q[rows] - modes.index[mode].real
        power = modes.power[mode] * modes.taken[scene.film, mode]
        out[rows] += power * half / np.pi / (away * away + half * half)
    return out
