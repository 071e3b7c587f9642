"""Guided light until the sample's edge: it decays by its own absorption and scattering along its way.

Along the film by the rays of the bound zone: each direction loses per round trip what the film and both halves take,
over the distance that the round trip carries. Light counts from its birth: first flights along the film are cut short
by an edge, and scattered, like all other ways.
"""

from dataclasses import dataclass

import numpy as np

from optics.fate import ray
from optics.fate.exits import light_lines, split_panels
from optics.fate.wave import Settings
from optics.waves import curves
from optics.waves.coherent import Real
from optics.waves.paths import Rows, integrate
from optics.waves.plates import Meeting, Waves, meet
from optics.waves.scattering import guided_loss
from optics.waves.scene import Scene

ORDER = 32
TOLERANCE = 1e-8


@dataclass(frozen=True)
class Scatter:
    """What scatters guided light, per wavelength, in units of k0: a loss per length, or roughness of both faces."""

    per_length: Real
    rms: Real
    correlation: Real

    def at(self, which: np.ndarray) -> "Scatter":
        """Return the scatter at some wavelengths."""
        return Scatter(self.per_length[which], self.rms[which], self.correlation[which])

    def rate(self, waves: Waves) -> Real:
        """Return the scattered share per length over k0 of light with the in-plane wave number ``q``, (row, node)."""
        view, scene = waves.view, waves.view.scene
        if not self.rms.any():
            return np.broadcast_to(self.per_length[..., None], waves.q.shape)
        near = [
            (layers or (side.touching,))[0]
            for layers, side in zip((scene.layers_up, scene.layers_down), scene.sides, strict=True)
        ]
        rough = guided_loss(
            q=waves.q,
            film=view.film.real_index,
            phase=view.phase[scene.film],
            neighbours=(view.index[near[0]].real, view.index[near[1]].real),
            rms=self.rms[..., None],
            correlation=self.correlation[..., None],
        )
        return rough + self.per_length[..., None]


@dataclass(frozen=True)
class Guided:
    """Shares of guided light, (wavelength,): kept by absorbers, at the edge, scattered, never ended."""

    kept: Real
    edge: Real
    scattered: Real
    unfinished: Real


def decays(absorbed: Real, scattered: Real, reach: Real | float) -> Guided:
    """Return the ends of light that loses ``absorbed`` and ``scattered`` per length on its way of length ``reach``."""
    total = absorbed + scattered
    dies = total > 0.0
    safe = np.where(dies, total, 1.0)
    if np.isinf(reach).all():
        gone, left = np.where(dies, 1.0, 0.0), np.zeros_like(total)
        return Guided(absorbed / safe * gone, left, scattered / safe * gone, np.where(dies, 0.0, 1.0))
    gone = -np.expm1(-total * reach)
    nothing = np.zeros_like(total)
    return Guided(absorbed / safe * gone, np.exp(-total * reach) + nothing, scattered / safe * gone, nothing)


def follow_rays(scene: Scene, settings: Settings, reach: Real, scatter: Scatter) -> tuple[Guided, Guided]:
    """Return the ends of guided light, averaged over the bound directions, in a sample without edges and with.

    Where rays have no bound zone nothing is guided; every share is zero.
    """
    seen = ray.real_film(scene)
    owner, low, high = split_panels(ray.edge_of_open(seen), seen.film_index.real, light_lines(seen))
    if not len(owner):
        none = Guided(*np.zeros((4, scene.wavelengths)))
        return none, none

    def density(rows: Rows, u: Real) -> Real:
        points = curves.on_panel(rows, u, seen.film_index[rows.owner, None])
        waves = Waves(seen.view(rows.owner), points.q, points.short_of_film)
        out: Real = _values(waves, reach[rows.owner, None], scatter.at(rows.owner)) * points.slope
        return out

    whole = integrate(
        density,
        curves.panels(owner, low, high),
        wavelengths=scene.wavelengths,
        order=ORDER * settings.finer,
        tolerance=TOLERANCE,
    )
    total = whole.values[:8].reshape(2, 4, -1).sum(axis=1)
    shares = whole.values.reshape(2, 4, -1) / np.where(total > 0.0, total, 1.0)[:, None]
    return Guided(*shares[0]), Guided(*shares[1])


def scaled(both: tuple[Guided, Guided], weight: float) -> tuple[Guided, Guided]:
    """Return the ends times a weight."""
    first, second = (
        Guided(weight * g.kept, weight * g.edge, weight * g.scattered, weight * g.unfinished) for g in both
    )
    return first, second


def _values(waves: Waves, reach: Real, scatter: Scatter) -> Real:
    scene = waves.view.scene
    view = waves.view
    cosine = waves.kz(scene.film).real / view.film.real_index
    slant = 2.0 * view.loss[scene.film] * view.phase[scene.film] / cosine
    launched = ray.launch(view, waves.q, cosine)
    along = 2.0 * view.phase[scene.film] * waves.q / (cosine * view.film.real_index)
    halves = [
        _loss(meet(waves, scene.film, layers, side.touching))
        for layers, side in zip((scene.layers_up, scene.layers_down), scene.sides, strict=True)
    ]
    absorbed = (2.0 * slant + halves[0] + halves[1]) / along
    scattered = scatter.rate(waves) + np.zeros_like(absorbed)
    out = []
    for ways in (np.array(np.inf), reach):
        ends = decays(absorbed, scattered, ways)
        out += [(launched * part).sum(axis=0) for part in (ends.kept, ends.edge, ends.scattered, ends.unfinished)]
    return np.array(out)


def _loss(half: Meeting) -> Real:
    """Return -ln of what a half reflects, from what it takes: exactly zero where it takes nothing."""
    taken = sum(half.taken.values(), start=np.zeros_like(half.back)) + half.on
    return -np.log1p(-np.minimum(taken, 1.0 - 1e-15))
