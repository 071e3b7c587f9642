"""Wave optics: dipoles in the thin group, from the power density to the integrals that the ledger needs."""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from optics.arrays import Complex, Index, Real
from optics.fate.exits import Layout, Response, emerge, light_lines, split_panels
from optics.waves import curves, source
from optics.waves.coherent import Pair, admittances, along, fold, normal_inside, normal_outside
from optics.waves.curves import Points
from optics.waves.elementary import turn, upper_root
from optics.waves.lines import Resonator, find, integrate_with_lines, resonators
from optics.waves.paths import Integral, Rows, integrate
from optics.waves.plates import Meeting, Waves, meet
from optics.waves.repeated import handed_out
from optics.waves.scene import Scene, View

CHECKED = 1.0
"""Trust in the nested rules on paths whose sums must agree with each other: what one misses shows in the closure."""

SHARP_FROM_DEPTH = 25.0
"""Phase through the group from which leaky lines are looked for in the open zone."""


@dataclass(frozen=True)
class Settings:
    """How finely to integrate.

    ``tolerance`` bounds the error of a piece of a path, ``finer`` multiplies the order of every rule. The defaults
    keep closure within 1e-7 and shares within 1e-6.
    """

    tolerance: float = 3e-8
    finer: int = 1

    @property
    def unchecked(self) -> float:
        """Tolerance for rays, which no other path checks."""
        return self.tolerance / 3.0

    @property
    def strict(self) -> "Settings":
        """Settings a step finer, for what the defaults have missed."""
        return replace(self, tolerance=0.1 * self.tolerance, finer=2 * self.finer)


Curve = Callable[[Rows, Real, Complex], Points]
"""Takes rows, their curve parameters and the film's index; returns nodes."""

Halves = tuple[Complex, Complex, Complex]
"""The film's normal wave number and the reflections of both halves: what its thickness does not touch."""


def power_on_path(view: View, points: Points, *, flights: bool, halves: Halves | None = None) -> Complex:
    """Return the complex power density on a path and, with ``flights``, it times the first-flight absorption."""
    film = view.film
    kz, up, down = halves or _halves_on_path(view, points)
    density = source.density(source.cavity(film, points.q, kz, up, down))
    density *= points.slope
    if not flights:
        return density[None]
    return np.stack([density, density * source.first_flight(film.slant(kz), film.moments)])


def _power_along(
    scene: Scene, rows: Rows, u: Real, curve: Curve, *, flights: bool, dips: bool = False, start: Real | None = None
) -> Real:
    """Return the power density on rows of a curve as `power_on_path` does, halves computed once for twins."""
    marks = () if start is None else (start[rows.owner],)
    copies = scene.repeats(rows.owner, rows.start, rows.stop, *rows.shape, *marks)
    if copies is None:
        one = rows
    else:
        one = rows.take(copies[0])
        u = u if len(u) == 1 else u[copies[0]]
    view = scene.view(one.owner)
    points = curve(one, u, view.film.index)
    halves = _halves_on_path(view, points, dips=dips)
    if copies is not None:
        view = scene.view(rows.owner)
        points, halves = handed_out((points, halves), copies[1])
    return power_on_path(view, points, flights=flights, halves=halves).real


def _halves_on_path(view: View, points: Points, *, dips: bool = False) -> Halves:
    """Return both halves at the points of a path.

    A path that ``dips`` below the real axis meets no cut of the half-spaces: the decaying root is the right one there.
    """
    scene, film, q = view.scene, view.film, points.q
    kz = upper_root(points.short_of_film * (film.index + q))
    own = admittances(kz, film.eps)
    up, down = (
        _pair_on_path(view, q, layers, side.touching, dips=dips).reflection(own)
        for layers, side in zip((scene.layers_up, scene.layers_down), scene.sides, strict=True)
    )
    return kz, up, down


def _pair_on_path(view: View, q: Complex, layers: tuple[int, ...], touching: int, *, dips: bool) -> Pair:
    pile = []
    for j in layers:
        kz = normal_inside(view.eps[j], q)
        pile.append((admittances(kz, view.eps[j]), turn(view.phase[j], kz)))
    kz = normal_inside(view.eps[touching], q) if dips else normal_outside(view.index[touching], q)
    return fold(pile, admittances(kz, view.eps[touching]))


@dataclass(frozen=True)
class Emission:
    """Emission of the group at real ``q``: halves, their fluxes and the total, (polarisation, row, node)."""

    power: Complex  # (row, node), complex density
    fluxes_up: list[Real]  # through each face from the film upwards
    fluxes_down: list[Real]


def emission(waves: Waves) -> Emission:
    """Return what the dipoles radiate into both halves at real ``q``."""
    scene, film = waves.view.scene, waves.view.film
    up = waves.mirror(scene.layers_up, scene.above.touching)
    down = waves.mirror(scene.layers_down, scene.below.touching)
    cavity = source.cavity(film, waves.q, waves.kz(scene.film), up.reflection, down.reflection)
    handed = source.handed(cavity)
    return Emission(source.density(cavity), up.sent(handed.up), down.sent(handed.down))


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
    sent = emission(waves)
    out[layout.power] = sent.power.real
    _book_group(out, layout, waves, sent)
    responses = [response(waves, k) if side.plates else None for k, side in enumerate(scene.sides)]
    emerge(waves, out, (sent.fluxes_up[-1], sent.fluxes_down[-1]), responses, layout)
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


def response(waves: Waves, k: int) -> Response:
    """Return what the whole group does with light that comes back from side ``k`` (0 above, 1 below)."""
    scene = waves.view.scene
    origin, behind = scene.sides[k].touching, scene.sides[1 - k].touching
    near, far = (scene.layers_up, scene.layers_down) if k == 0 else (scene.layers_down, scene.layers_up)
    met: Meeting = meet(waves, origin, (*near[::-1], scene.film, *far), behind)
    return Response(met.back, met.on, met.taken)


def bound_values(scene: Scene, owner: Index, points: Points) -> Real:
    """Return what the bound zone needs per unit q, (quantity, row, node).

    Power, first-flight absorption (an absorbing film's, up to its own light line) and what each medium takes.
    """
    waves = Waves(scene.view(owner), points.q, points.short_of_film)
    sent = emission(waves)
    film = waves.view.film
    out = np.zeros((2 + scene.media, *points.q.shape))
    out[0] = sent.power.real
    if flies_to_the_end(scene):
        out[1] = along(source.first_flight(film.slant(waves.kz(scene.film)), film.moments).conj(), sent.power)
    for layers, fluxes, side in zip(
        (scene.layers_up, scene.layers_down), (sent.fluxes_up, sent.fluxes_down), scene.sides, strict=True
    ):
        for i, medium in enumerate(layers):
            if scene.index[medium].imag.any():
                out[2 + medium] += (fluxes[i] - fluxes[i + 1]).sum(axis=0)
        if side.absorbs and not side.plates:
            out[2 + side.outer] += fluxes[-1].sum(axis=0)
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
    return settings.finer * int(np.clip(8 * np.ceil(7.0 + scene.depth / 24.0), 64, 256))


def panel_order(scene: Scene) -> int:
    """Return the order of the rule on real-axis panels."""
    return int(np.clip(8 * np.ceil(4.0 + scene.depth / 16.0), 24, 128))


def dip(scene: Scene, end: Real, settings: Settings, *, start: Real | None = None, flights: bool = False) -> Integral:
    """Integrate the power density below the real axis from ``start`` to ``end``."""

    def curve(rows: Rows, u: Real, film: Complex) -> Points:
        return curves.on_dip(rows, u, film, None if start is None else start[rows.owner, None])

    def density(rows: Rows, u: Real) -> Real:
        return _power_along(scene, rows, u, curve, flights=flights, dips=True, start=start)

    owner = np.arange(scene.wavelengths) if start is None else np.flatnonzero(end - start > 1e-12)
    if not len(owner):
        return Integral(np.zeros((2 if flights else 1, scene.wavelengths)), np.zeros(scene.wavelengths))
    return integrate(
        density,
        _rows(owner, end),
        wavelengths=scene.wavelengths,
        order=path_order(scene, settings),
        tolerance=settings.tolerance,
        trust=CHECKED,
    )


def riser(scene: Scene, end: Real, settings: Settings, *, flights: bool = False) -> Integral:
    """Integrate the power density straight up from the real point ``end``; nothing to do where the film is clear."""

    def density(rows: Rows, u: Real) -> Real:
        return _power_along(scene, rows, u, curves.on_riser, flights=flights)

    owner = np.flatnonzero(scene.film_index.imag > 0.0)
    if not len(owner):
        return Integral(np.zeros((2 if flights else 1, scene.wavelengths)), np.zeros(scene.wavelengths))
    return integrate(
        density,
        riser_rows(scene, owner, end),
        wavelengths=scene.wavelengths,
        order=32 * settings.finer,
        tolerance=settings.tolerance,
    )


def riser_rows(scene: Scene, owner: Index, end: Real) -> Rows:
    """Return risers cut at the height of the branch points of absorbing media that touch the group."""
    height = end[owner] * scene.film_index.imag[owner] / scene.film_index.real[owner]
    cuts = [np.clip(scene.index[side.touching, owner].imag / height, 0.0, 1.0) for side in scene.sides]
    marks = 2.0 / np.pi * np.arcsin(np.sqrt(np.sort(cuts, axis=0)))
    marks = np.vstack([np.zeros_like(height), marks, np.ones_like(height)])
    piece, row = np.nonzero(np.diff(marks, axis=0) > 1e-9)
    return Rows(owner[row], marks[piece, row], marks[piece + 1, row], end[None, owner[row]])


def open_zone(scene: Scene, settings: Settings) -> Integral:
    """Integrate fluxes, absorption and ends on the real axis, from 0 to the largest q that can leave the group."""
    ends = np.zeros(scene.wavelengths), scene.open_end
    sharp = guides_of(scene) if leaky_lines_matter(scene, settings) else ()
    return _on_axis(open_values, Layout(scene.media).size, scene, ends, settings, sharp)


def leaky_lines_matter(scene: Scene, settings: Settings) -> bool:
    """Tell whether leaky lines may be sharp: many phases meet little loss, or a guide leaks through denser media."""
    return settings.finer > 1 or len(guides_of(scene)) > 1 or scene.depth > SHARP_FROM_DEPTH


def bound_zone(scene: Scene, settings: Settings) -> Integral:
    """Integrate power and what becomes of it where light cannot leave the group, on the real axis."""
    ends = scene.open_end, scene.far_end
    return _on_axis(bound_values, 2 + scene.media, scene, ends, settings, guides_of(scene))


def flies_to_the_end(scene: Scene) -> bool:
    """Tell whether the film absorbs and bound light ends at its own light line: first flights then fill the zone."""
    return bool(scene.film_index[0].imag > 0.0) and bool(scene.far_end[0] <= scene.film_index[0].real)


def guides_of(scene: Scene) -> tuple[Resonator, ...]:
    """Return the layers of the group that can guide."""
    order = (*scene.layers_up[::-1], scene.film, *scene.layers_down)
    return resonators(scene, order, scene.above.touching, scene.below.touching)


def _on_axis(
    values: Callable[[Scene, Index, Points], Real],
    size: int,
    scene: Scene,
    ends: tuple[Real, Real],
    settings: Settings,
    guides: Sequence[Resonator],
) -> Integral:
    owner, low, high = split_panels(*ends, light_lines(scene))
    if not len(owner):
        return Integral(np.zeros((size, scene.wavelengths)), np.zeros(scene.wavelengths))
    panels = curves.panels(owner, low, high)
    return integrate_with_lines(
        lambda rows, points: values(scene, rows, points),
        panels,
        find(scene, panels, guides),
        scene=scene,
        order=panel_order(scene),
        finer=settings.finer,
        tolerance=settings.tolerance,
    )
