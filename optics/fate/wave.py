"""Wave optics: dipoles in the thin group, from the power density to the integrals that the ledger needs."""

from dataclasses import dataclass

import numpy as np

from optics.fate.exits import Layout, Response, emerge, light_lines, split_panels
from optics.waves import curves, source
from optics.waves.coherent import (
    Complex,
    Outlook,
    Real,
    admittances,
    fold,
    normal_inside,
    normal_outside,
    reflection,
    squared,
)
from optics.waves.curves import Points
from optics.waves.paths import Index, Integral, Rows, integrate
from optics.waves.plates import Meeting, Waves, meet
from optics.waves.scene import Scene, View


@dataclass(frozen=True)
class Settings:
    """How finely to integrate; the defaults meet 1e-8 a row."""

    tolerance: float = 1e-9
    finer: int = 1  # multiplies the order of every rule


def power_on_path(view: View, points: Points, *, flights: bool) -> Complex:
    """Return the complex power density on a path and, with ``flights``, it times the first-flight absorption."""
    scene, film = view.scene, view.film
    q = points.q
    kz = 1j * np.sqrt(-points.short_of_film * (film.index + q))
    own = admittances(kz, film.eps)
    faces = [
        _face_on_path(view, q, layers, side.touching)
        for layers, side in zip((scene.layers_up, scene.layers_down), scene.sides, strict=True)
    ]
    turn_less_one = np.expm1(2j * film.phase * kz)
    up, down = (reflection(own, face) for face in faces)
    density = source.density(film, q, kz, up, down, turn_less_one) * points.slope
    if not flights:
        return density[None]
    return np.stack([density, density * source.first_flight(film.slant(kz), film.moments)])


def _face_on_path(view: View, q: Complex, layers: tuple[int, ...], touching: int) -> Complex:
    pile = []
    for j in layers:
        kz = normal_inside(view.eps[j], q)
        pile.append((admittances(kz, view.eps[j]), np.exp(2j * view.phase[j] * kz)))
    behind = admittances(normal_outside(view.index[touching], q), view.eps[touching])
    return fold(pile, behind)


@dataclass(frozen=True)
class Emission:
    """Emission of the group at real ``q``: halves, their fluxes and the total, (polarisation, row, node)."""

    power: Complex  # (row, node), complex density
    kz: Complex
    fluxes_up: list[Real]  # through each face from the film upwards
    fluxes_down: list[Real]


def emission(waves: Waves) -> Emission:
    """Return what the dipoles radiate into both halves at real ``q``."""
    scene, film = waves.view.scene, waves.view.film
    kz, own = waves.kz(scene.film), waves.own(scene.film)
    looks = (
        waves.look(scene.layers_up, scene.above.touching),
        waves.look(scene.layers_down, scene.below.touching),
    )
    up, down = (reflection(own, o.face) for o in looks)
    turn_less_one = np.expm1(2j * film.phase * kz)
    sent = source.handed(film, waves.q, kz, up, down, turn_less_one)
    return Emission(
        source.density(film, waves.q, kz, up, down, turn_less_one),
        kz,
        _fluxes(looks[0], up, sent.up),
        _fluxes(looks[1], down, sent.down),
    )


def _fluxes(outlook: Outlook, amplitude: Complex, sent: Real) -> list[Real]:
    return outlook.fluxes(sent * squared(1.0 + amplitude))


def open_density(scene: Scene, rows: Rows, u: Real) -> Real:
    """Return everything the open zone needs per node, (quantity, row, node), Jacobian included."""
    q, slope = curves.on_panel(rows, u)
    waves = Waves(scene.view(rows.owner), q)
    layout = Layout(scene.media)
    out = np.zeros((layout.size, *q.shape))
    sent = emission(waves)
    out[layout.power] = sent.power.real
    if scene.film_index.imag.any():
        flights = source.first_flight(waves.view.film.slant(sent.kz), scene.moments)
        inside = curves.middle(q) < waves.view.film.real_index
        out[layout.first_flight] = (sent.power * flights).real * inside
    _book_group(out, layout, waves, sent)
    responses = [_response(waves, k) if side.plates else None for k, side in enumerate(scene.sides)]
    emerge(waves, out, (sent.fluxes_up[-1], sent.fluxes_down[-1]), responses, layout)
    out *= slope
    return out


def _book_group(out: Real, layout: Layout, waves: Waves, sent: Emission) -> None:
    """Book what the film and the layers of the group take of light that has not left it yet."""
    scene = waves.view.scene
    kept = sent.power.real - (sent.fluxes_up[0] + sent.fluxes_down[0]).sum(axis=0)
    out[layout.open(scene.film)] += kept
    for layers, fluxes in ((scene.layers_up, sent.fluxes_up), (scene.layers_down, sent.fluxes_down)):
        for i, medium in enumerate(layers):
            if scene.index[medium].imag.any():
                out[layout.open(medium)] += (fluxes[i] - fluxes[i + 1]).sum(axis=0)


def _response(waves: Waves, k: int) -> Response:
    """Return what the whole group does with light that comes back from side ``k`` (0 above, 1 below)."""
    scene = waves.view.scene
    origin, behind = scene.sides[k].touching, scene.sides[1 - k].touching
    near, far = (scene.layers_up, scene.layers_down) if k == 0 else (scene.layers_down, scene.layers_up)
    met: Meeting = meet(waves, origin, (*near[::-1], scene.film, *far), behind)
    return Response(met.back, met.on, met.taken)


def bound_density(scene: Scene, rows: Rows, u: Real) -> Real:
    """Return power and what each medium takes per node of the bound zone, (1 + medium, row, node)."""
    q, slope = curves.on_panel(rows, u)
    waves = Waves(scene.view(rows.owner), q)
    sent = emission(waves)
    out = np.zeros((1 + scene.media, *q.shape))
    out[0] = sent.power.real
    for layers, fluxes, side in zip(
        (scene.layers_up, scene.layers_down), (sent.fluxes_up, sent.fluxes_down), scene.sides, strict=True
    ):
        for i, medium in enumerate(layers):
            if scene.index[medium].imag.any():
                out[1 + medium] += (fluxes[i] - fluxes[i + 1]).sum(axis=0)
        if side.absorbs and not side.plates:
            out[1 + side.outer] += fluxes[-1].sum(axis=0)
    out *= slope
    return out


def exchange_with_itself(scene: Scene) -> Real:
    """Return the film's near-field exchange with its own bulk beyond its light line, (wavelength,); H in the theory.

    Zero where no neighbour has a higher index than the film; it comes off the integral that runs past the film's
    own light line, so that the rate factor of the bulk stays exactly one.
    """
    n = scene.film_index
    beyond = np.maximum(scene.far_end / n.real, 1.0)
    kz = 1j * n * np.sqrt(beyond * beyond - 1.0)
    h = scene.in_plane
    cubed = kz**3 / (n * n)
    total = -0.75 * h * kz - 0.25 * h * cubed - 1.5 * (1.0 - h) * (kz - cubed / 3.0)
    return total.real / n.real


def _rows(owner: Index, end: Real) -> Rows:
    return Rows(owner, np.zeros(len(owner)), np.ones(len(owner)), end[None, owner])


def path_order(scene: Scene, settings: Settings) -> int:
    """Return the order of the rule on dips: phases through the group set the pace."""
    return settings.finer * int(np.clip(4 * np.ceil(10.0 + _depth(scene) / 12.0), 48, 256))


def panel_order(scene: Scene, settings: Settings, *, film: bool = True) -> int:
    """Return the order of the rule on real-axis panels; ``film`` tells whether its phases count."""
    return settings.finer * int(np.clip(4 * np.ceil(3.0 + _depth(scene, film=film) / 8.0), 16, 128))


def _depth(scene: Scene, *, film: bool = True) -> float:
    """Return the largest phase through the group at normal incidence."""
    layers = [scene.film, *scene.group] if film else list(scene.group)
    return float(np.abs(scene.index[layers] * scene.phase[layers]).sum(axis=0).max()) if layers else 0.0


def dip(scene: Scene, end: Real, settings: Settings, *, start: Real | None = None, flights: bool = False) -> Integral:
    """Integrate the power density below the real axis from ``start`` to ``end``."""

    def density(rows: Rows, u: Real) -> Real:
        view = scene.view(rows.owner)
        first = None if start is None else start[rows.owner, None]
        return power_on_path(view, curves.on_dip(rows, u, view.film.index, first), flights=flights).real

    owner = np.arange(scene.wavelengths) if start is None else np.flatnonzero(end - start > 1e-12)
    if not len(owner):
        return Integral(np.zeros((1, scene.wavelengths)), np.zeros(scene.wavelengths))
    return integrate(
        density,
        _rows(owner, end),
        wavelengths=scene.wavelengths,
        order=path_order(scene, settings),
        tolerance=settings.tolerance,
    )


def riser(scene: Scene, end: Real, settings: Settings, *, flights: bool = False) -> Integral:
    """Integrate the power density straight up from the real point ``end``; nothing to do where the film is clear."""

    def density(rows: Rows, u: Real) -> Real:
        view = scene.view(rows.owner)
        return power_on_path(view, curves.on_riser(rows, u, view.film.index), flights=flights).real

    owner = np.flatnonzero(scene.film_index.imag > 0.0)
    if not len(owner):
        return Integral(np.zeros((2 if flights else 1, scene.wavelengths)), np.zeros(scene.wavelengths))
    return integrate(
        density,
        _rows(owner, end),
        wavelengths=scene.wavelengths,
        order=32 * settings.finer,
        tolerance=settings.tolerance,
    )


def open_zone(scene: Scene, settings: Settings) -> Integral:
    """Integrate fluxes, absorption and ends on the real axis, from 0 to the largest q that can leave the group."""
    layout = Layout(scene.media)
    owner, low, high = split_panels(np.zeros(scene.wavelengths), scene.open_end, light_lines(scene))
    if not len(owner):
        return Integral(np.zeros((layout.size, scene.wavelengths)), np.zeros(scene.wavelengths))
    return integrate(
        lambda rows, u: open_density(scene, rows, u),
        curves.panels(owner, low, high),
        wavelengths=scene.wavelengths,
        order=panel_order(scene, settings),
        tolerance=settings.tolerance,
    )


def bound_zone(scene: Scene, settings: Settings) -> Integral:
    """Integrate what each medium takes of the light that cannot leave the group, on the real axis."""
    lines = scene.index[[scene.film, scene.above.touching, scene.below.touching]].real
    owner, low, high = split_panels(scene.open_end, scene.far_end, lines)
    if not len(owner):
        return Integral(np.zeros((1 + scene.media, scene.wavelengths)), np.zeros(scene.wavelengths))
    return integrate(
        lambda rows, u: bound_density(scene, rows, u),
        curves.panels(owner, low, high),
        wavelengths=scene.wavelengths,
        order=panel_order(scene, settings),
        tolerance=settings.tolerance,
    )
