"""Guided and leaky lines: sharp resonances of the thin group, found and taken out of what is integrated.

Near a pole p of the group's response every flux and power on the real axis is a Lorentzian about Re p of half width
Im p, with an odd part, on a smooth ground. Taking fitted Lorentzians out before the quadrature and adding their integrals
in closed form changes nothing but the number of nodes; a line that was missed or badly fitted is left to the refinement.
"""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from optics.waves.coherent import Complex, Real, admittances, fold, normal_inside, normal_outside, reflection
from optics.waves.curves import Points, on_panel
from optics.waves.paths import Index, Integral, Rows, integrate
from optics.waves.scene import Scene, View

NODES_PER_PHASE = 1.3
"""Grid nodes per radian of phase through the group; a line takes pi, so that none hides between two nodes."""

SECANTS = 4
CLEARANCE = 4.0
"""Lines nearer to an end of their panel than this many half widths are left alone: the ground is not smooth there."""

WIDEST = 0.1
"""Lines wider than this, in units of their panel, are what the plain rule resolves."""

_OFFSETS = np.array([-2.0, -1.0, 0.0, 1.0, 2.0])
_BELL = 1.0 / (1.0 + _OFFSETS**2)
_FIT = np.linalg.inv(np.stack([_BELL, _OFFSETS * _BELL, _OFFSETS**0, _OFFSETS, _OFFSETS**2], axis=1))[:2]
"""Turns five values about a line into its bell and odd amplitudes; a parabola takes up the ground."""

Value = Callable[[Index, Points], Real]
"""Takes owners (row,) and points (row, node); returns densities per unit q, (quantity, row, node)."""


@dataclass(frozen=True)
class Lines:
    """Lines of every panel, (panel, line); panels with fewer lines are filled up with ones of zero ``there``."""

    centre: Real
    width: Real
    there: Real


NO_LINES = Lines(*np.zeros((3, 1, 0)))


def integrate_with_lines(
    value: Value, panels: Rows, lines: Lines, *, scene: Scene, order: int, tolerance: float
) -> Integral:
    """Integrate ``value`` over real-axis panels with ``lines`` taken out and added in closed form."""
    bell, odd = _amplitudes(value, panels, lines, scene)

    def density(rows: Rows, u: Real) -> Real:
        points = on_panel(rows, u, scene.film_index[rows.owner, None])
        out = value(rows.owner, points)
        if bell.shape[2]:
            panel = rows.shape[2].astype(np.intp)
            out -= _profile(points.q, lines, bell, odd, panel)
        out *= points.slope
        return out

    rest = integrate(density, panels, wavelengths=scene.wavelengths, order=order, tolerance=tolerance)
    values = rest.values.copy()
    np.add.at(values, (slice(None), panels.owner), _areas(panels, lines, bell, odd))
    return Integral(values, rest.error)


def _amplitudes(value: Value, panels: Rows, lines: Lines, scene: Scene) -> tuple[Real, Real]:
    """Return bell and odd amplitudes, (quantity, panel, line), collocated at five points about each line."""
    panel, line = np.nonzero(lines.there)
    if not len(panel):
        return np.zeros((1, len(panels), 0)), np.zeros((1, len(panels), 0))
    q = lines.centre[panel, line, None] + lines.width[panel, line, None] * _OFFSETS
    owner = panels.owner[panel]
    near = value(owner, Points(q, np.ones_like(q), scene.film_index[owner, None] - q))
    fitted = near @ _FIT.T
    bell = np.zeros((len(near), *lines.there.shape))
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
        return Lines(*np.zeros((3, len(panels), 0)))
    older, newer = grid[panel, node] + 0j, grid[panel, node + 1] + 0j
    pole, mismatch = _secants(
        pile, scene.view(panels.owner[panel]), which, older, newer, log[which, panel, node], log[which, panel, node + 1]
    )
    low, high = panels.shape[0][panel], panels.shape[1][panel]
    width = pole.imag
    clear = CLEARANCE * width
    sharp = (width > 0.0) & (width < WIDEST * (high - low)) & (np.abs(mismatch) < 1e-3)
    sharp &= (pole.real - clear > low) & (pole.real + clear < high)
    return _packed(panel[sharp], pole[sharp], len(panels))


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


def _packed(panel: Index, pole: Complex, panels: int) -> Lines:
    """Stand lines side by side, a row a panel."""
    counts = np.bincount(panel, minlength=panels)
    order = np.argsort(panel, kind="stable")
    place = np.arange(len(panel)) - np.repeat(np.cumsum(counts) - counts, counts)
    shape = (panels, int(counts.max()) if len(panel) else 0)
    centre, width, there = np.zeros(shape), np.ones(shape), np.zeros(shape)
    at = (panel[order], place)
    centre[at], width[at], there[at] = pole[order].real, pole[order].imag, 1.0
    return Lines(centre, width, there)


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

