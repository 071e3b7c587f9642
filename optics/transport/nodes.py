"""Nodes over the in-plane wave number for matrices over the depth: fixed rules, crowded about leaky and guided lines.

Every matrix element needs the same nodes, so that no adaptive rule will do: lines are found first.
"""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from optics.arrays import Index, Mask, Real
from optics.fate import wave
from optics.fate.exits import light_lines, split_panels
from optics.fate.wave import Settings
from optics.transport.slices import gauss
from optics.waves import curves
from optics.waves.curves import Points
from optics.waves.lines import Resonator, echoes, find, no_lines, resonators
from optics.waves.modes import find as find_modes
from optics.waves.paths import Rows
from optics.waves.scene import Scene

PER_LINE, PER_END = 8, 7
"""Nodes on each side of a guided line, and towards an end of the bound zone."""

FEW_WIDTHS, MANY_WIDTHS = 3.0, 7.0
"""Logarithms of the cell over the line's width beyond which twice and three times as many nodes are needed."""

BLOCK = 2000
"""Nodes done at a time: fewer cost more in calls than they save in cache."""


@dataclass(frozen=True)
class Nodes:
    """Nodes of one block: owners (row,), points and weights (row, node), and the polarisations that they serve."""

    owner: Index
    points: Points
    weight: Real
    polarisations: tuple[int, ...]
    bound: bool


def open_nodes(scene: Scene, settings: Settings) -> Iterator[Nodes]:
    """Yield nodes of the open zone, polarisations together: plain panels, or cells about leaky lines."""
    owner, low, high = split_panels(np.zeros(scene.wavelengths), scene.open_end, light_lines(scene))
    rows = curves.panels(owner, low, high)
    lines = find(scene, rows, _echoing(scene)) if _lines_matter(scene, settings) else no_lines(rows)
    lined: Mask = np.asarray(np.isfinite(lines.centre).any(axis=1))
    order = settings.finer * max(16, wave.panel_order(scene) // 2)
    yield from _on_panels(scene, rows.take(~lined), order)
    if lined.any():
        yield from _on_cells(scene, rows.take(lined), lines.centre[lined], lines.width[lined], settings.finer)


def _echoing(scene: Scene) -> tuple[Resonator, ...]:
    """Return the layers of the group that can guide, and the others in which light fits in and may leak slowly."""
    order = (*scene.layers_up[::-1], scene.film, *scene.layers_down)
    guides = resonators(scene, order, scene.above.touching, scene.below.touching)
    cores = {each.core for each in guides}
    others = echoes(scene, order, scene.above.touching, scene.below.touching)
    return (*guides, *(each for each in others if each.core not in cores))


def _lines_matter(scene: Scene, settings: Settings) -> bool:
    """Tell whether leaky lines are looked for: a plain film that is thin and rests on thinner media has broad ones."""
    dense = max(float(scene.index[side.touching].real.max()) for side in scene.sides) >= float(
        scene.film_index.real.min()
    )
    return dense or wave.leaky_lines_matter(scene, settings)


def _on_panels(scene: Scene, rows: Rows, order: int) -> Iterator[Nodes]:
    nodes, weights = gauss(order)
    step = max(1, BLOCK // order)
    for first in range(0, len(rows), step):
        part = rows.take(slice(first, first + step))
        u = np.broadcast_to(nodes, (len(part), order))
        points = curves.on_panel(part, u, scene.film_index[part.owner, None])
        yield Nodes(part.owner, points, points.slope * weights, (0, 1), bound=False)


def _on_cells(scene: Scene, rows: Rows, centre: Real, width: Real, finer: int) -> Iterator[Nodes]:
    """Yield nodes of panels cut at lines, half a cell a row: from each line or end to the middle."""
    low, high = rows.shape[0], rows.shape[1]
    marks = np.hstack([low[:, None], np.where(np.isfinite(centre), centre, high[:, None]), high[:, None]])
    wide = np.pad(np.where(np.isfinite(centre), width, 0.0), ((0, 0), (1, 1)))
    panel, cell = np.nonzero(np.diff(marks, axis=1) > 1e-13)
    half = 0.5 * (marks[panel, cell + 1] - marks[panel, cell])
    owner = np.tile(rows.owner[panel], 2)
    anchor = np.concatenate([marks[panel, cell], marks[panel, cell + 1]])
    length, wide = np.concatenate([half, -half]), np.concatenate([wide[panel, cell], wide[panel, cell + 1]])
    for sharp in (False, True):
        which = np.flatnonzero((wide > 0.0) == sharp)
        if not len(which):
            continue
        q, weight = (
            _about_lines(anchor[which], length[which], wide[which], finer)
            if sharp
            else _to_ends(anchor[which], length[which], finer)
        )
        step = max(1, BLOCK // q.shape[1])
        for first in range(0, len(which), step):
            part = slice(first, first + step)
            mine = owner[which][part]
            points = Points(q[part], np.ones_like(q[part]), scene.film_index[mine, None] - q[part])
            yield Nodes(mine, points, weight[part], (0, 1), bound=False)


def bound_nodes(scene: Scene, finer: int = 1) -> Iterator[Nodes]:
    """Yield nodes of the bound zone, crowded about every guided line with a sinh map, a row a wavelength.

    There are ``finer`` times as many of them as ought to do.
    """
    owner, polarisation, anchor, length, width = _half_cells(scene)
    if not len(owner):
        return
    marks: list[Index] = []
    at: list[Real] = []
    weights: list[Real] = []
    for sharp in (False, True):
        which = np.flatnonzero((width > 0.0) == sharp)
        q, weight = (
            _about_lines(anchor[which], length[which], width[which], finer)
            if sharp
            else _to_ends(anchor[which], length[which], finer)
        )
        marks.append(np.repeat(2 * owner[which] + polarisation[which], q.shape[1]))
        at.append(q.ravel())
        weights.append(weight.ravel())
    key, spread, loads = _side_by_side(np.concatenate(marks), np.concatenate(at), np.concatenate(weights))
    columns = min(BLOCK, spread.shape[1])
    for mode in (0, 1):
        chosen = np.flatnonzero(key % 2 == mode)
        for first in range(0, len(chosen), max(1, BLOCK // columns)):
            part = chosen[first : first + max(1, BLOCK // columns)]
            mine = key[part] // 2
            for left in range(0, spread.shape[1], columns):
                nodes, load = spread[part, left : left + columns], loads[part, left : left + columns]
                points = Points(nodes, np.ones_like(nodes), scene.film_index[mine, None] - nodes)
                yield Nodes(mine, points, load, (mode,), bound=True)


def _about_lines(line: Real, length: Real, width: Real, finer: int) -> tuple[Real, Real]:
    """Return nodes and weights, (cell, node), from lines of half width ``width`` on, to a signed ``length`` away."""
    top = np.arcsinh(np.abs(length) / width)
    reach = float(top.max(initial=0.0))
    times = 1 if reach < FEW_WIDTHS else 2 if reach < MANY_WIDTHS else 3
    nodes, weights = gauss(times * finer * PER_LINE)
    turn, wide = top[:, None] * nodes, width[:, None]
    return line[:, None] + np.sign(length)[:, None] * wide * np.sinh(turn), wide * top[:, None] * np.cosh(
        turn
    ) * weights


def _to_ends(end: Real, length: Real, finer: int) -> tuple[Real, Real]:
    """Return nodes and weights, (cell, node), from ends of the zone on, where square roots may sit."""
    nodes, weights = gauss(finer * PER_END)
    reach = length[:, None]
    return end[:, None] + reach * nodes * nodes, np.abs(reach) * 2.0 * nodes * weights


def _leaky_while_bound(scene: Scene) -> tuple[Index, Real, Real]:
    """Return owner, centre and width of lines that leak into an absorbing medium, or are held by a metal: no modes."""
    media = [*scene.group, scene.above.touching, scene.below.touching]
    if not (scene.eps[media].real < 0.0).any() and not any(s.absorbs and not s.plates for s in scene.sides):
        return np.zeros(0, dtype=np.intp), np.zeros(0), np.zeros(0)
    owner, low, high = split_panels(scene.open_end, scene.far_end, light_lines(scene))
    if not len(owner):
        return np.zeros(0, dtype=np.intp), np.zeros(0), np.zeros(0)
    lines = find(scene, curves.panels(owner, low, high), _echoing(scene))
    panel, line = np.nonzero(np.isfinite(lines.centre))
    return owner[panel], lines.centre[panel, line], np.maximum(lines.width[panel, line], 1e-14)


def _side_by_side(key: Index, q: Real, weight: Real) -> tuple[Index, Real, Real]:
    """Stand nodes of a key in a row, (key, node); rows with fewer than others are filled with nodes of no weight."""
    order = np.argsort(key, kind="stable")
    key, q, weight = key[order], q[order], weight[order]
    keys, starts, counts = np.unique(key, return_index=True, return_counts=True)
    own = np.repeat(np.arange(len(keys)), counts)
    place = np.arange(len(key)) - np.repeat(starts, counts)
    spread = np.repeat(q[starts, None], int(counts.max()), axis=1)
    loads = np.zeros_like(spread)
    spread[own, place], loads[own, place] = q, weight
    return keys, spread, loads


def landing_end(scene: Scene) -> Real:
    """Return the q up to which light landing in the film is followed on the real axis, (wavelength,).

    Grazing light is spread to q beyond the film's own light line, by about the square root of k, and lands far from its
    birth like any other. In the bulk the flux that leaves a thin sheet of births, integrated to this q, is all they
    radiate; near field beyond it is left in the slice it comes from. Metals guide plasmons out there: with one in or at
    the group, light is followed to `Scene.far_end` alone.
    """
    media = [*scene.group, scene.above.touching, scene.below.touching]
    metal = (scene.eps[media].real < 0.0).any(axis=0)
    low, high = scene.film_index.real.copy(), 3.0 * scene.film_index.real
    for _ in range(45):
        middle = 0.5 * (low + high)
        beyond = bulk_flux(scene, middle) > 1.0
        low, high = np.where(beyond, low, middle), np.where(beyond, middle, high)
    followed = (scene.film_index.imag > 0.0) & ~metal
    return np.where(followed, np.maximum(scene.far_end, low), scene.far_end)


def bulk_flux(scene: Scene, q: Real) -> Real:
    """Return the flux that leaves a sheet of births in the bulk of the film's material on both sides, up to ``q``.

    The integral of 2 Re(Z) |F|^2 over q in closed form, with Z and F of `optics.waves.coherent` next to the sheet.
    """
    n, eps, h = scene.film_index, scene.eps[scene.film], scene.in_plane
    ends = []
    for kz in (n, 1j * np.sqrt(q * q - eps)):
        back = kz.conj()
        upright = (back**3 / 3.0 - eps.conj() * back) / eps
        ends.append(-0.75 * h * (kz + kz**3 / (3.0 * eps)) + 1.5 * (1.0 - h) * upright)
    flux: Real = (ends[1] - ends[0]).real / n.real
    return flux


def _half_cells(scene: Scene) -> tuple[Index, Index, Real, Real, Real]:
    """Return owner, polarisation, anchor, signed length and line width of half the distance between marks."""
    found = find_modes(scene)
    lines = np.vstack([light_lines(scene), scene.far_end[None]])
    low, high = scene.open_end, landing_end(scene)
    there = high - low > 1e-9
    leaky = _leaky_while_bound(scene)
    owners = [found.wavelength, leaky[0], leaky[0]]
    pols = [found.polarisation, np.zeros_like(leaky[0]), np.ones_like(leaky[0])]
    marks, widths = [found.index.real, leaky[1], leaky[1]], [np.maximum(found.index.imag, 1e-14), leaky[2], leaky[2]]
    for row in (low, high, *lines):
        inside = np.flatnonzero(there & (row >= low) & (row <= high))
        for polarisation in (0, 1):
            owners.append(inside)
            pols.append(np.full(len(inside), polarisation))
            marks.append(row[inside])
            widths.append(np.zeros(len(inside)))
    owner, pol, mark, width = (np.concatenate(each) for each in (owners, pols, marks, widths))
    order = np.lexsort((mark, pol, owner))
    owner, pol, mark, width = owner[order], pol[order], mark[order], width[order]
    gap = np.where((np.diff(owner) == 0) & (np.diff(pol) == 0), np.diff(mark), 0.0)
    cell = np.flatnonzero(gap > 1e-13)
    half = 0.5 * gap[cell]
    parts = (
        np.concatenate([owner[cell], owner[cell + 1]]),
        np.concatenate([pol[cell], pol[cell + 1]]),
        np.concatenate([mark[cell], mark[cell + 1]]),
        np.concatenate([half, -half]),
        np.concatenate([width[cell], width[cell + 1]]),
    )
    order = np.lexsort((parts[1], parts[0]))
    return parts[0][order], parts[1][order], parts[2][order], parts[3][order], parts[4][order]
