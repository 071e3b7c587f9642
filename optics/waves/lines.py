"""Guided and leaky lines: sharp resonances of the thin group, found and taken out of what is integrated.

Near a pole p of the group's response every flux and power on the real axis is a Lorentzian about Re p of half width
Im p, with an odd part, on a smooth ground. Taking fitted Lorentzians out before the quadrature and adding their integrals
in closed form changes nothing but the number of nodes; a line that was missed or badly fitted is left to the refinement.
"""

from collections.abc import Callable
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from optics.waves.coherent import Complex, Real, admittances, fold, normal_inside, normal_outside, reflection
from optics.waves.curves import Points, on_panel
from optics.waves.paths import Index, Integral, Rows, integrate
from optics.waves.scene import Scene, View

NODES_PER_PHASE = 1.3
"""Grid nodes per radian of phase through the group; a line takes pi, so that none hides between two nodes."""

SECANTS = 4
CLEARANCE = 4.0
"""Lines nearer to another, or to an end of their panel, than this many half widths are not fitted: the ground under
them is not smooth."""

CUT_FROM = 0.03
"""Half width, in units of the room around a line, from which a panel is cut at the line: a fit leaves too much of it."""

CUT_APART = 1.0
"""Lines that follow another by less than this many half widths share its cut."""

_OFFSETS = np.array([-2.0, -1.0, 0.0, 1.0, 2.0])
_BELL = 1.0 / (1.0 + _OFFSETS**2)
_FIT = np.linalg.inv(np.stack([_BELL, _OFFSETS * _BELL, _OFFSETS**0, _OFFSETS, _OFFSETS**2], axis=1))[:2]
"""Turns five values about a line into its bell and odd amplitudes; a parabola takes up the ground."""

Value = Callable[[Index, Points], Real]
"""Takes owners (row,) and points (row, node); returns densities per unit q, (quantity, row, node)."""


@dataclass(frozen=True)
class Lines:
    """Lines of every panel, (panel, line), in the order of their centres; places without a line hold NaN centres.

    ``room`` is the distance to the next line or end of the panel, ``before`` that to the one at smaller q.
    """

    centre: Real
    width: Real
    room: Real
    before: Real

    @property
    def fitted(self) -> NDArray[np.bool_]:
        """Which lines are taken out of what is integrated."""
        return self.room > CLEARANCE * self.width

    @property
    def cut(self) -> NDArray[np.bool_]:
        """Which lines a panel is cut at."""
        return (self.width > CUT_FROM * self.room) & (self.before > CUT_APART * self.width)


def integrate_with_lines(
    value: Value, panels: Rows, lines: Lines, *, scene: Scene, order: int, tolerance: float
) -> Integral:
    """Integrate ``value`` over real-axis panels with ``lines`` taken out and added in closed form."""
    bell, odd = _amplitudes(value, panels, lines, scene)
    taken = replace(lines, centre=np.where(lines.fitted, lines.centre, 0.0))

    def density(rows: Rows, u: Real) -> Real:
        points = on_panel(rows, u, scene.film_index[rows.owner, None])
        out = value(rows.owner, points)
        if bell.any():
            panel = rows.shape[2].astype(np.intp)
            out -= _profile(points.q, taken, bell, odd, panel)
        out *= points.slope
        return out

    cells = _cells(panels, lines)
    rest = integrate(density, cells, wavelengths=scene.wavelengths, order=order, tolerance=tolerance)
    values = rest.values.copy()
    if bell.any():
        np.add.at(values, (slice(None), panels.owner), _areas(panels, taken, bell, odd))
    return Integral(values, rest.error)


def _amplitudes(value: Value, panels: Rows, lines: Lines, scene: Scene) -> tuple[Real, Real]:
    """Return bell and odd amplitudes, (quantity, panel, line), collocated at five points about each line."""
    panel, line = np.nonzero(lines.fitted)
    if not len(panel):
        return np.zeros((1, len(panels), 0)), np.zeros((1, len(panels), 0))
    q = lines.centre[panel, line, None] + lines.width[panel, line, None] * _OFFSETS
    owner = panels.owner[panel]
    near = value(owner, Points(q, np.ones_like(q), scene.film_index[owner, None] - q))
    fitted = near @ _FIT.T
    bell = np.zeros((len(near), *lines.centre.shape))
    odd = np.zeros_like(bell)
    bell[:, panel, line], odd[:, panel, line] = fitted[..., 0], fitted[..., 1]
    return bell, odd


def _profile(q: Real, lines: Lines, bell: Real, odd: Real, panel: Index) -> Real:
    offset = (q[:, None, :] - lines.centre[panel, :, None]) / lines.width[panel, :, None]
    shape = 1.0 / (1.0 + offset * offset)
    out: Real = np.matmul(bell[:, panel, None, :], shape)[:, :, 0]
    out += np.matmul(odd[:, panel, None, :], offset * shape)[:, :, 0]
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
    return Lines(*np.zeros((4, len(panels), 0)))


def find(scene: Scene, panels: Rows) -> Lines:
    """Find the sharp lines on ``panels``: the loop through the densest layer closes, X = 1, at a complex q.

    The phase of X on a grid brackets a line; secants on log X, which is nearly linear, polish it.
    """
    pile = _Pile(scene)
    view = scene.view(panels.owner)
    u = (np.arange(pile.grid) + 0.5) / pile.grid
    grid = on_panel(panels, np.broadcast_to(u, (len(panels), pile.grid)), scene.film_index[panels.owner, None]).q
    log = np.log(pile.loop(view, grid + 0j))
    phase = log.imag
    closes = (phase[..., 1:] * phase[..., :-1] <= 0.0) & (np.abs(np.diff(phase, axis=2)) < np.pi)
    which, panel, node = np.nonzero(closes)
    if not len(panel):
        return no_lines(panels)
    older, newer = grid[panel, node] + 0j, grid[panel, node + 1] + 0j
    pole, mismatch = _secants(
        pile, scene.view(panels.owner[panel]), which, older, newer, log[which, panel, node], log[which, panel, node + 1]
    )
    inside = (pole.real > panels.shape[0][panel]) & (pole.real < panels.shape[1][panel])
    found = inside & (pole.imag > 0.0) & (np.abs(mismatch) < 1e-3)
    return _packed(panel[found], pole[found], panels)


def _secants(
    pile: "_Pile", view: View, which: Index, older: Complex, newer: Complex, log_older: Complex, log_newer: Complex
) -> tuple[Complex, Complex]:
    chosen = np.arange(len(which))
    for _ in range(SECANTS):
        step = log_newer - log_older
        step = np.where(step == 0.0, 1.0, step)
        pole = newer - log_newer * (newer - older) / step
        older, log_older = newer, log_newer
        newer, log_newer = pole, np.log(pile.loop(view, pole[:, None])[which, chosen, 0])
    return newer, log_newer


def _packed(panel: Index, pole: Complex, panels: Rows) -> Lines:
    """Stand lines side by side, a row a panel, and measure the room around each."""
    order = np.lexsort((pole.real, panel))
    panel, pole = panel[order], pole[order]
    counts = np.bincount(panel, minlength=len(panels))
    place = np.arange(len(panel)) - np.repeat(np.cumsum(counts) - counts, counts)
    shape = (len(panels), int(counts.max(initial=0)))
    centre, width, room, before = np.full(shape, np.nan), np.ones(shape), np.zeros(shape), np.zeros(shape)
    centre[panel, place], width[panel, place] = pole.real, pole.imag
    low, high = panels.shape[0][:, None], panels.shape[1][:, None]
    gaps = np.diff(np.hstack([low, np.where(np.isnan(centre), high, centre), high]))
    before[panel, place] = gaps[panel, place]
    room[panel, place] = np.minimum(gaps[panel, place], gaps[panel, place + 1])
    return Lines(centre, width, room, before)


def _cells(panels: Rows, lines: Lines) -> Rows:
    """Cut panels at the lines that ask for it; cells remember their panel."""
    low, high = panels.shape[0], panels.shape[1]
    marks = np.where(lines.cut, lines.centre, high[:, None])
    marks = np.sort(np.hstack([low[:, None], marks, high[:, None]]), axis=1)
    panel, cell = np.nonzero(np.diff(marks) > 0.0)
    ends = np.stack([marks[panel, cell], marks[panel, cell + 1], panel])
    return Rows(panels.owner[panel], np.zeros(len(panel)), np.ones(len(panel)), ends)


class _Pile:
    """The thin group as one resonator: a reference layer, the densest that is no metal, between two piles."""

    def __init__(self, scene: Scene) -> None:
        self.scene = scene
        order = [*scene.layers_up[::-1], scene.film, *scene.layers_down]
        real = np.where(scene.eps[order].real < 0.0, 0.0, scene.index[order].real).mean(axis=1)
        at = int(np.argmax(real))
        self.core, self.up, self.down = order[at], order[:at][::-1], order[at + 1 :]
        phase = np.abs(scene.index[order] * scene.phase[order]).sum(axis=0).max()
        self.grid = int(np.ceil(16.0 + NODES_PER_PHASE * phase))

    def loop(self, view: View, q: Complex) -> Complex:
        """Return X, the round trip through the reference layer, (polarisation, row, node)."""
        kz = np.sqrt(view.eps[self.core] - q * q)
        own = admittances(kz, view.eps[self.core])
        trip: Complex = np.exp(2j * view.phase[self.core] * kz)
        for layers, side in zip((self.up, self.down), self.scene.sides, strict=True):
            trip = trip * reflection(own, self._face(view, q, layers, side.touching))
        return trip

    @staticmethod
    def _face(view: View, q: Complex, layers: list[int], touching: int) -> Complex:
        pile = []
        for j in layers:
            kz = normal_inside(view.eps[j], q)
            pile.append((admittances(kz, view.eps[j]), np.exp(2j * view.phase[j] * kz)))
        return fold(pile, admittances(normal_outside(view.index[touching], q), view.eps[touching]))

