"""Guided light until the sample's edge: it decays by its own absorption and scattering along its way.

In wave optics mode by mode. In ray optics direction by direction: each loses per round trip what the film and both
halves take, over the distance that the round trip carries. Light counts from its birth: first flights along the film
are cut short by an edge, and scattered, like all other ways.
"""

from dataclasses import dataclass, fields

import numpy as np

from optics.arrays import Real
from optics.fate import ray
from optics.fate.exits import light_lines, split_panels
from optics.fate.wave import Settings
from optics.waves import curves
from optics.waves.modes import bound_modes
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
    """Shares of guided light, (wavelength,) or of any other shape."""

    film: Real
    others: Real
    edge: Real
    scattered: Real
    unfinished: Real

    def times(self, weight: Real | float) -> "Guided":
        """Return the shares times a weight."""
        return Guided(**{part.name: weight * getattr(self, part.name) for part in fields(self)})

    def stacked(self) -> Real:
        """Return the shares on a leading axis, in the order of the fields."""
        return np.array([getattr(self, part.name) for part in fields(self)])


VARIANTS = ("still", "wide", "edged")
"""Without scattering and edges, with scattering, with both."""

Along = dict[str, Guided]


def decays(film: Real, others: Real, scattered: Real, reach: Real | float) -> Guided:
    """Return the ends of light that loses these shares per length on its way of length ``reach``."""
    total = film + others + scattered
    dies = total > 0.0
    safe = np.where(dies, total, 1.0)
    nothing = np.zeros_like(total)
    if np.isinf(reach).all():
        gone, left, endless = np.where(dies, 1.0, 0.0), nothing, np.where(dies, 0.0, 1.0)
    else:
        gone, left, endless = -np.expm1(-total * reach), np.exp(-total * reach) + nothing, nothing
    part = gone / safe
    return Guided(film * part, others * part, left, scattered * part, endless)


def variants(film: Real, others: Real, scattered: Real, reach: Real) -> Along:
    """Return the ends in every one of ``VARIANTS``."""
    return {
        "still": decays(film, others, np.zeros_like(film), np.inf),
        "wide": decays(film, others, scattered, np.inf),
        "edged": decays(film, others, scattered, reach),
    }


def follow_modes(scene: Scene, reach: Real, scatter: Scatter) -> Along:
    """Return the ends of guided light mode by mode: each decays by its own loss, births shared out by its power."""
    modes = bound_modes(scene)
    power = np.maximum(modes.power, 0.0)
    if not len(modes):
        return dict.fromkeys(VARIANTS, Guided(*np.zeros((5, scene.wavelengths))))
    waves = Waves(scene.view(modes.wavelength), modes.index.real[:, None])
    scattered = scatter.at(modes.wavelength).rate(waves)[:, 0]
    loss = 2.0 * modes.index.imag
    taken = modes.taken.sum(axis=0)
    film = loss * np.where(taken > 0.0, modes.taken[scene.film] / np.where(taken > 0.0, taken, 1.0), 0.0)
    ends = variants(film, np.maximum(loss - film, 0.0), scattered, reach[modes.wavelength])
    total = modes.summed(power, scene.wavelengths)
    safe = np.where(total > 0.0, total, 1.0)
    return {
        name: Guided(*(modes.summed(power * part, scene.wavelengths) / safe for part in each.stacked()))
        for name, each in ends.items()
    }


def follow_rays(scene: Scene, settings: Settings, reach: Real, scatter: Scatter) -> Along:
    """Return the ends of guided light, averaged over the bound directions of rays.

    Where rays have no bound zone nothing is guided; every share is zero.
    """
    seen = ray.real_film(scene)
    owner, low, high = split_panels(ray.edge_of_open(seen), seen.film_index.real, light_lines(seen))
    if not len(owner):
        return dict.fromkeys(VARIANTS, Guided(*np.zeros((5, scene.wavelengths))))

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
    amounts = whole.values.reshape(len(VARIANTS), 5, -1)
    total = amounts[0].sum(axis=0)
    shares = amounts / np.where(total > 0.0, total, 1.0)
    return {name: Guided(*each) for name, each in zip(VARIANTS, shares, strict=True)}


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
    film = np.broadcast_to(2.0 * slant / along, launched.shape)
    others = (halves[0] + halves[1]) / along
    scattered = np.broadcast_to(scatter.rate(waves), launched.shape)
    ends = variants(film, others, scattered, reach)
    return np.concatenate([(launched * each.stacked()).sum(axis=1) for each in ends.values()])


def _loss(half: Meeting) -> Real:
    """Return -ln of what a half reflects, from what it takes: exactly zero where it takes nothing."""
    taken = sum(half.taken.values(), start=np.zeros_like(half.back)) + half.on
    return -np.log1p(-np.minimum(taken, 1.0 - 1e-15))
