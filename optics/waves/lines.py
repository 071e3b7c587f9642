"""Guided and leaky lines: sharp resonances of the thin group, found and taken out of what is integrated.

Near a pole p of the group's response every flux and power on the real axis is a Lorentzian about Re p of half width
Im p, with an odd part, on a smooth ground. Taking fitted Lorentzians out before the quadrature and adding their
integrals in closed form changes nothing but the number of nodes; a line that was missed or badly fitted is left to the
refinement.
"""

from collections.abc import Callable, Sequence
from dataclasses import dataclass, fields, replace

import numpy as np
from numpy.typing import NDArray

from optics.arrays import Complex, Index, Real
from optics.waves.coherent import Pair, admittances, fold, normal_inside, normal_outside
from optics.waves.curves import Points, on_panel
from optics.waves.elementary import root, turn
from optics.waves.paths import Integral, Rows, integrate
from optics.waves.scene import Scene, View

FEWEST_NODES = 12.0
NODES_PER_PHASE = 1.0
"""Grid nodes, and more per radian of phase through a resonator; a line takes pi: none hides between two nodes."""

ROUNDING = 3e-15
"""Of a pole's place: nearer no secant leads."""

NARROWEST = 1e-12
"""Half width below which the flux of a line drowns in rounding; what such a line holds shows as error."""

FAINTEST = 2.0
"""Fading over a round trip, -log |X| on the real axis, beyond which there is no line to speak of."""

SAME_LINE = 1e-3
"""Poles closer than this, in units of their half width, are one line."""

ECHO_FROM_PHASE = 2.5
"""Phase through a layer at normal incidence from which a sharp line fits between a mirror and a denser medium."""

SECANTS = 6
POLISHED = 1e-5
"""Most steps towards a pole, and what may be missing before the last, in half widths."""

CLEARANCE = 2.5
"""Lines nearer to an end of their panel than this many half widths are not fitted: the ground there is not smooth."""

APART = 0.5
"""Lines that follow another by less than this many half widths are not fitted: they can hardly be told apart."""

CUT_FROM = 0.1
"""Half width, in units of the room around a line, from which a panel is cut there: a fit leaves too much of it."""

CUT_APART = 1.5
"""Lines that follow another by less than this many half widths share its cut."""

CELL_ORDER = 24
"""Order of the rule between two lines."""

MOST_PAIRS = 50_000
"""Pairs of lines of one panel held in memory at a time."""

_OFFSETS = np.array([-2.0, -1.0, 0.0, 1.0, 2.0])
_BELL = 1.0 / (1.0 + _OFFSETS**2)
_FIT = np.linalg.inv(np.stack([_BELL, _OFFSETS * _BELL, _OFFSETS**0, _OFFSETS, _OFFSETS**2], axis=1))[:2]
"""Turns five values about a line into its bell and odd amplitudes; a parabola takes up the ground."""

Value = Callable[[Index, Points], Real]
"""Takes owners (row,) and points (row, node); returns densities per unit q, (quantity, row, node)."""


Panel = Callable[[Rows, Real, Complex], Points]


@dataclass(frozen=True)
class Lines:
    """Lines of every panel, (panel, line), in the order of their centres; places without a line hold NaN centres.

    ``room`` is the distance to the next line or end of the panel, ``before`` that to the one at smaller q, ``inside``
    that to an end.
    """

    centre: Real
    width: Real
    room: Real
    before: Real
    inside: Real

    def take(self, which: slice) -> "Lines":
        """Return the lines of some panels."""
        return Lines(*(getattr(self, field.name)[which] for field in fields(self)))

    @property
    def fitted(self) -> NDArray[np.bool_]:
        """Which lines are taken out of what is integrated."""
        return (self.inside > CLEARANCE * self.width) & (self.before > APART * self.width)

    @property
    def cut(self) -> NDArray[np.bool_]:
        """Which lines a panel is cut at."""
        return (self.width > CUT_FROM * self.room) & (self.before > CUT_APART * self.width)


def integrate_with_lines(
    value: Value,
    panels: Rows,
    lines: Lines,
    *,
    scene: Scene,
    order: int,
    finer: int,
    tolerance: float,
    panel: Panel = on_panel,
) -> Integral:
    """Integrate ``value`` over real-axis panels with ``lines`` taken out and added in closed form.

    ``order`` is that of the rule on panels that no line cuts; ``finer`` multiplies it and that of cells between lines.
    """
    bell, odd = _amplitudes(value, panels, lines, scene)
    taken = replace(lines, centre=np.where(lines.fitted, lines.centre, 0.0))

    def density(rows: Rows, u: Real) -> Real:
        points = panel(rows, u, scene.film_index[rows.owner, None])
        out = value(rows.owner, points)
        if bell.any():
            out -= _profile(points.q, taken, bell, odd, rows.shape[2].astype(np.intp))
        out *= points.slope
        return out

    cut: NDArray[np.bool_] = np.any(lines.cut, axis=1)
    parts = [
        integrate(
            density,
            _cells(panels, lines, which),
            wavelengths=scene.wavelengths,
            order=rule,
            tolerance=tolerance,
        )
        for which, rule in ((cut, CELL_ORDER * finer), (~cut, order * finer))
        if which.any()
    ]
    values: Real = np.sum([part.values for part in parts], axis=0)
    if bell.any():
        np.add.at(values.T, panels.owner, _areas(panels, taken, bell, odd).T)
    return Integral(values, np.sum([part.error for part in parts], axis=0))


def _amplitudes(value: Value, panels: Rows, lines: Lines, scene: Scene) -> tuple[Real, Real]:
    """Return bell and odd amplitudes, (quantity, panel, line), collocated at five points about each line."""
    # every line is fitted with every other of its panel taken off: few panels at a time keep memory flat
    step = max(1, MOST_PAIRS // max(1, lines.centre.shape[1] ** 2))
    parts = [
        _fit(value, panels.take(slice(at, at + step)), lines.take(slice(at, at + step)), scene)
        for at in range(0, len(panels), step)
    ]
    size = max(len(bell) for bell, _ in parts)
    whole = np.zeros((2, size, *lines.centre.shape))
    for number, part in enumerate(parts):
        whole[:, :, number * step : (number + 1) * step] = part
    return whole[0], whole[1]


def _fit(value: Value, panels: Rows, lines: Lines, scene: Scene) -> tuple[Real, Real]:
    """Fit the lines of some panels together; one quantity of zeros where there is nothing to fit."""
    panel, line = np.nonzero(lines.fitted)
    if not len(panel):
        return np.zeros((1, *lines.centre.shape)), np.zeros((1, *lines.centre.shape))
    q = lines.centre[panel, line, None] + lines.width[panel, line, None] * _OFFSETS
    owner = panels.owner[panel]
    near = value(owner, Points(q, np.ones_like(q), scene.film_index[owner, None] - q))
    # each line's five values, the parabola taken off, see all lines of the panel
    used = np.where(lines.fitted, lines.centre, 0.0)[panel, None, :], lines.width[panel, None, :]
    offset = (q[:, :, None] - used[0]) / used[1]
    seen = 1.0 / (1.0 + offset * offset)
    seen = np.einsum("an,blnm->lamb", _FIT, np.stack([seen, offset * seen]))  # (line, amplitude, line, amplitude)
    count = lines.centre.shape[1]
    system = np.broadcast_to(np.eye(2 * count).reshape(count, 2, count, 2), (len(panels), count, 2, count, 2)).copy()
    system[panel, line] = np.where(lines.fitted[panel, None, :, None], seen, 0.0)
    given = np.zeros((len(panels), count, 2, len(near)))
    given[panel, line] = np.einsum("qln,kn->lkq", near, _FIT)
    size = (len(panels), 2 * count)
    found = np.linalg.solve(system.reshape(*size, 2 * count), given.reshape(*size, len(near)))
    amplitudes = found.reshape(given.shape).transpose(2, 3, 0, 1)
    return amplitudes[0], amplitudes[1]


def _profile(q: Real, lines: Lines, bell: Real, odd: Real, panel: Index) -> Real:
    """Return the lines of each row's panel, (quantity, row, node)."""
    count = lines.centre.shape[1]
    shape = np.empty((len(q), 2 * count, q.shape[1]))
    offset = np.subtract(q[:, None, :], lines.centre[panel, :, None], out=shape[:, count:])
    offset *= (1.0 / lines.width)[panel, :, None]
    np.multiply(offset, offset, out=shape[:, :count])
    shape[:, :count] += 1.0
    np.reciprocal(shape[:, :count], out=shape[:, :count])
    offset *= shape[:, :count]
    amplitude = np.concatenate([bell, odd], axis=2).transpose(1, 0, 2)[panel]
    out: Real = np.matmul(amplitude, shape).transpose(1, 0, 2)
    return out


def _areas(panels: Rows, lines: Lines, bell: Real, odd: Real) -> Real:
    low = (panels.shape[0][:, None] - lines.centre) / lines.width
    high = (panels.shape[1][:, None] - lines.centre) / lines.width
    arc = lines.width * (np.arctan(high) - np.arctan(low))
    swing = 0.5 * lines.width * np.log((1.0 + high * high) / (1.0 + low * low))
    area: Real = (bell * arc + odd * swing).sum(axis=2)
    return area


def no_lines(panels: Rows) -> Lines:
    """Return lines of panels that have none."""
    return Lines(*np.zeros((5, len(panels), 0)))


@dataclass(frozen=True)
class Resonator:
    """Thin layers between two media, from above to below, and the layer in which a round trip is closed."""

    layers: tuple[int, ...]
    above: int
    below: int
    core: int


def resonators(scene: Scene, layers: tuple[int, ...], above: int, below: int) -> tuple[Resonator, ...]:
    """Return a resonator for every layer that is optically denser than both its neighbours: what can guide."""
    order = [above, *layers, below]
    real = np.where(scene.eps[order].real < 0.0, 0.0, scene.index[order].real).mean(axis=1)
    guides = (real[1:-1] >= real[:-2]) & (real[1:-1] > real[2:])
    return tuple(Resonator(layers, above, below, core) for core in np.array(layers, dtype=int)[guides])


def echoes(scene: Scene, layers: tuple[int, ...], above: int, below: int) -> tuple[Resonator, ...]:
    """Return a resonator for every layer, metals apart, that is thick enough for light to fit in on its way."""
    fits = [
        core
        for core in layers
        if scene.eps[core].real.min() > 0.0 and (scene.index[core].real * scene.phase[core]).max() > ECHO_FROM_PHASE
    ]
    return tuple(Resonator(layers, above, below, core) for core in fits)


def find(scene: Scene, panels: Rows, candidates: Sequence[Resonator]) -> Lines:
    """Find the sharp lines on ``panels``: the loop through a resonator's core closes, X = 1, at a complex q.

    The phase of X on a grid brackets a line; secants on log X, which is nearly linear, polish it.
    """
    # a round trip may underflow or a secant go astray; what is not finite is no line
    with np.errstate(all="ignore"):
        parts = [_lines_of(scene, panels, resonator) for resonator in candidates]
    if not parts:
        return no_lines(panels)
    panel, pole = (np.concatenate(both) for both in zip(*parts, strict=True))
    return _packed(panel, pole, panels)


def _lines_of(scene: Scene, panels: Rows, resonator: Resonator) -> tuple[Index, Complex]:
    """Return the panels and poles of one resonator's lines."""
    count = int(np.ceil(FEWEST_NODES + NODES_PER_PHASE * scene.depth_through(resonator.layers)))
    u = np.broadcast_to((np.arange(count) + 0.5) / count, (len(panels), count))
    grid = on_panel(panels, u, scene.film_index[panels.owner, None]).q
    trip = _round_trip(scene.view(panels.owner), grid + 0j, resonator)
    phase = np.arctan2(trip.imag, trip.real)
    closes = (phase[..., 1:] * phase[..., :-1] <= 0.0) & (np.abs(np.diff(phase, axis=2)) < np.pi)
    which, panel, node = np.nonzero(closes)
    view = scene.view(panels.owner[panel])
    ends = (grid[panel, node] + 0j, grid[panel, node + 1] + 0j)
    logs = (np.log(trip[which, panel, node]), np.log(trip[which, panel, node + 1]))
    pole, per_log, mismatch = _secants(view, resonator, which, ends, logs)
    inside = (pole.real > panels.shape[0][panel]) & (pole.real < panels.shape[1][panel])
    sharp = (pole.imag > NARROWEST) & (pole.imag < FAINTEST * np.abs(per_log))
    found = inside & sharp & (np.abs(mismatch) < 1e-3)
    return panel[found], pole[found]


def _secants(
    view: View, resonator: Resonator, which: Index, ends: tuple[Complex, Complex], logs: tuple[Complex, Complex]
) -> tuple[Complex, Complex, Complex]:
    """Return poles, the step in q per unit of log X there, and log X just before the last step."""
    chosen = np.arange(len(which))
    (older, newer), (log_older, log_newer) = ends, logs
    rough, per_log = np.ones(len(which), dtype=bool), np.zeros_like(older)
    for _ in range(SECANTS):
        step = log_newer - log_older
        per_log = np.where(rough, (newer - older) / np.where(step == 0.0, 1.0, step), per_log)
        pole = newer - log_newer * per_log
        log = np.log(_round_trip(view, pole[:, None], resonator)[which, chosen, 0])
        # a line that is good enough stands still, whatever others still need
        older, log_older = np.where(rough, newer, older), np.where(rough, log_newer, log_older)
        newer, log_newer = np.where(rough, pole, newer), np.where(rough, log, log_newer)
        rough &= np.abs(log_newer * per_log) > np.maximum(POLISHED * np.abs(newer.imag), ROUNDING)
        if not rough.any():
            break
    return newer - log_newer * per_log, per_log, log_newer


def _round_trip(view: View, q: Complex, resonator: Resonator) -> Complex:
    """Return X, the round trip through the core, (polarisation, row, node)."""
    core, place = resonator.core, resonator.layers.index(resonator.core)
    kz = root(view.eps[core] - q * q)
    own = admittances(kz, view.eps[core])
    trip = turn(view.phase[core], kz)
    piles = (resonator.layers[:place][::-1], resonator.above), (resonator.layers[place + 1 :], resonator.below)
    for layers, behind in piles:
        trip = trip * _pair(view, q, layers, behind).reflection(own)
    return trip


def _pair(view: View, q: Complex, layers: tuple[int, ...], behind: int) -> Pair:
    pile = []
    for j in layers:
        kz = normal_inside(view.eps[j], q)
        pile.append((admittances(kz, view.eps[j]), turn(view.phase[j], kz)))
    return fold(pile, admittances(normal_outside(view.index[behind], q), view.eps[behind]))


def _packed(panel: Index, pole: Complex, panels: Rows) -> Lines:
    """Stand lines side by side, a row a panel, and measure the room around each."""
    order = np.lexsort((pole.real, panel))
    panel, pole = panel[order], pole[order]
    # coupled guides find the same line twice
    fresh = np.ones(len(panel), dtype=bool)
    fresh[1:] = (np.diff(panel) > 0) | (np.abs(np.diff(pole)) > SAME_LINE * pole.imag[1:])
    panel, pole = panel[fresh], pole[fresh]
    counts = np.bincount(panel, minlength=len(panels))
    place = np.arange(len(panel)) - np.repeat(np.cumsum(counts) - counts, counts)
    shape = (len(panels), int(counts.max(initial=0)))
    centre, width = np.full(shape, np.nan), np.ones(shape)
    room, before, inside = np.zeros((3, *shape))
    centre[panel, place], width[panel, place] = pole.real, pole.imag
    low, high = panels.shape[0][:, None], panels.shape[1][:, None]
    gaps = np.diff(np.hstack([low, np.where(np.isnan(centre), high, centre), high]))
    before[panel, place] = gaps[panel, place]
    room[panel, place] = np.minimum(gaps[panel, place], gaps[panel, place + 1])
    inside[panel, place] = np.minimum(pole.real - low[panel, 0], high[panel, 0] - pole.real)
    return Lines(centre, width, room, before, inside)


def _cells(panels: Rows, lines: Lines, which: NDArray[np.bool_]) -> Rows:
    """Cut the chosen panels at the lines that ask for it; cells remember their panel."""
    low, high = panels.shape[0], panels.shape[1]
    marks = np.where(lines.cut, lines.centre, high[:, None])
    marks = np.sort(np.hstack([low[:, None], marks, high[:, None]]), axis=1)
    panel, cell = np.nonzero((np.diff(marks) > 0.0) & which[:, None])
    ends = np.stack([marks[panel, cell], marks[panel, cell + 1], panel])
    return Rows(panels.owner[panel], np.zeros(len(panel)), np.ones(len(panel)), ends)
