"""Guided modes of the thin group: effective indices, the power births put into them and who absorbs it.

A bound mode is a pole of the power density in the in-plane wave number q beyond every light line of what touches the
group (cuts running straight up from them). Without absorption the modes are counted exactly by their nodes; then the
absorption is raised in steps and every pole followed by Newton's method (zeros of the dispersion function as in Yeh,
Optical Waves in Layered Media, ch. 11; residues as guided power as in Novotny & Hecht, ch. 10).
"""

from collections.abc import Callable
from dataclasses import dataclass, fields

import numpy as np

from optics.arrays import Complex, Index, Mask, Real
from optics.waves.coherent import Pair, admittances, fold, normal_inside, normal_outside
from optics.waves.elementary import turn
from optics.waves.guide import Guide, guide, lossless, mismatch, nodes_and_angle, outer_roots
from optics.waves.modefields import absorbed_shares
from optics.waves.scene import Scene, View

POLARISATIONS = ("s", "p")

BISECTIONS = 8
"""Halvings before the faster rule takes over: they get it past the kinks where waves turn evanescent in a layer."""

CLOSE = 1e-13
"""Relative change of an effective index at which it is taken as found."""

PER_STEP = 0.05
"""Rise of the largest k in one step from the lossless guide to the real one."""

NUDGE = 1e-6
"""Rise of the absorption, in units of its own, that shows where a pole is heading."""

GROWING = 1e-12
"""Rounding that an effective index may leave the real axis by."""

ROUNDS = 2
"""How often steps are halved where two modes ran into one."""

CIRCLE = 8
"""Points of the circle about a pole whose mean gives the residue; with RADIUS its error is below 1e-12."""

RADIUS = 0.03
"""Radius of that circle in units of the distance to the next singularity."""


@dataclass(frozen=True)
class Modes:
    """Bound modes, one entry a mode at one wavelength, (mode,), by wavelength, polarisation and order.

    Attributes
    ----------
    wavelength
        Position of the wavelength.
    polarisation
        0: s (TE), 1: p (TM).
    order
        0 for the mode of the highest effective index; the same number is the same mode at every wavelength.
    index
        Complex effective index q/k0; the power decays as exp(-2 Im(q) r) in the plane.
    power
        Power that the births put into the mode, in units of what they radiate in the bulk of the film's material.
    taken
        Share of that power which each medium of the scene absorbs, (medium, mode); zeros where nothing absorbs.
    """

    wavelength: Index
    polarisation: Index
    order: Index
    index: Complex
    power: Real
    taken: Real

    def __len__(self) -> int:
        return len(self.index)

    def summed(self, amount: Real, wavelengths: int) -> Real:
        """Return the sum of an amount (mode,) over the modes of every wavelength."""
        total: Real = np.bincount(self.wavelength, weights=amount, minlength=wavelengths).astype(float)
        return total

    def take(self, which: Index) -> "Modes":
        """Return some of the modes."""
        return Modes(**{part.name: getattr(self, part.name)[..., which] for part in fields(self)})


@dataclass(frozen=True)
class Found:
    """Poles before anything is known of their power: as in `Modes`, sorted as there."""

    wavelength: Index
    polarisation: Index
    order: Index
    index: Complex

    def take(self, which: Index) -> "Found":
        """Return some of the poles."""
        return Found(self.wavelength[which], self.polarisation[which], self.order[which], self.index[which])


def bound_modes(scene: Scene) -> Modes:
    """Return every bound mode of the thin group of a scene.

    Parameters
    ----------
    scene
        The group; its film may have any k from 0 to about 1.

    Returns
    -------
    Modes
        Poles with an effective index between `Scene.open_end` and `Scene.far_end`.
    """
    found = find(scene)
    return Modes(
        found.wavelength,
        found.polarisation,
        found.order,
        found.index,
        powers(scene, found),
        absorbed_shares(scene, found.wavelength, found.polarisation, found.index),
    )


def find(scene: Scene) -> Found:
    """Return the poles: counted without absorption, followed into it.

    Strong absorption brings more poles across the light line from below the cut-off (two in 20 um at k = 0.3, six in
    7 um at k = 1); they fade to 1/e within a sixth of a wavelength, are not followed, and count as light in no mode.
    """
    start = _lossless_modes(scene)
    index, lost = _followed(scene, start, _steps(scene))
    for again in range(1, ROUNDS + 1):
        bad = lost | _doubled(start, index)
        if not bad.any():
            break
        rows = np.flatnonzero(np.isin(_key(start), _key(start)[bad]))
        index[rows], lost[rows] = _followed(scene, start.take(rows), _steps(scene) * 4**again)
    kept = ~(lost | _doubled(start, index)) & (index.real > scene.open_end[start.wavelength])
    kept &= index.imag > -GROWING  # a pole below the axis belongs to no passive guide
    kept &= (index.real < scene.far_end[start.wavelength]) & (index.real > _outer_ends(scene)[start.wavelength])
    whole = Found(start.wavelength, start.polarisation, start.order, index.real + 1j * np.maximum(index.imag, 0.0))
    return whole.take(np.flatnonzero(kept))


def _key(found: Found) -> Index:
    return 2 * found.wavelength + found.polarisation


def _doubled(start: Found, index: Complex) -> Mask:
    """Tell which poles are the same as another of their wavelength and polarisation."""
    order = np.lexsort((index.imag, index.real, _key(start)))
    key, sorted_index = _key(start)[order], index[order]
    same = (np.diff(key) == 0) & (np.abs(np.diff(sorted_index)) < 1e-10)
    twin = np.zeros(len(index), dtype=bool)
    twin[order[1:][same]] = True
    twin[order[:-1][same]] = True
    return twin


def _steps(scene: Scene) -> int:
    media = [scene.film, *scene.group]
    loss = np.where(scene.eps[media].real < 0.0, 0.0, scene.index[media].imag).max()
    walls = any(scene.index[side.touching].imag.any() for side in scene.sides)
    metal = bool((scene.eps[media].real < 0.0).any()) or walls
    return int(np.ceil(loss / PER_STEP)) + 3 * metal if loss > 0.0 or metal else 0


def _outer_ends(scene: Scene) -> Real:
    """Return the real index beyond which light decays in both media that touch the group; metals let none in."""
    touching = [side.touching for side in scene.sides]
    real = np.where(scene.eps[touching].real < 0.0, 0.0, scene.index[touching].real)
    ends: Real = real.max(axis=0)
    return ends


def _lossless_modes(scene: Scene) -> Found:
    """Count and bracket the modes of the group without absorption."""
    count = scene.wavelengths
    owner = np.tile(np.arange(count), 2)
    polarisation = np.repeat([0, 1], count)
    pile = lossless(guide(scene, owner, polarisation))
    low = np.maximum(scene.open_end, _outer_ends(scene))[owner]
    high = np.where(pile.eps.real > 0.0, pile.index.real, 0.0).max(axis=0)
    metal = (pile.weight.real < 0.0).any(axis=0)
    parts = [_by_nodes(pile, low, high, np.flatnonzero(~metal)), _by_signs(pile, low, high, np.flatnonzero(metal))]
    row, order, q = (np.concatenate([part[i] for part in parts]) for i in range(3))
    at = np.lexsort((order, polarisation[row], owner[row]))
    row = row[at]
    return Found(owner[row], polarisation[row], order[at], q[at] + 0j)


def _by_nodes(pile: Guide, low: Real, high: Real, rows: Index) -> tuple[Index, Index, Real]:
    """Return row, order and effective index of every mode, by the exact count of nodes."""
    reach = nodes_and_angle(pile.at(rows), low[rows] * (1.0 + 1e-15))
    counts = np.where(high[rows] > low[rows], np.maximum(np.floor(reach / np.pi) + 1.0, 0.0), 0.0).astype(np.intp)
    row = np.repeat(rows, counts)
    order = np.arange(len(row)) - np.repeat(np.cumsum(counts) - counts, counts)
    chosen = pile.at(row)
    q = _falling_root(lambda at: nodes_and_angle(chosen, at) - np.pi * order, low[row] * (1.0 + 1e-15), high[row])
    return row, order, q


def _falling_root(call: Callable[[Real], Real], low: Real, high: Real) -> Real:
    """Return the root of a falling function between ``low`` and ``high``: halving, then Illinois' false position."""
    above, below = call(low), np.minimum(call(high), -1e-300)
    for step in range(BISECTIONS + 60):
        blend = low + (high - low) * above / (above - below)
        middle = 0.5 * (low + high) if step < BISECTIONS else blend
        value = call(middle)
        right = value >= 0.0
        low, high = np.where(right, middle, low), np.where(right, high, middle)
        above, below = np.where(right, value, above * 0.5), np.where(right, below * 0.5, value)
        above = np.where(above == 0.0, 1e-300, above)
        if step >= BISECTIONS and ((high - low <= 4e-16 * high) | (np.abs(value) < 1e-10)).all():
            break
    return middle


def _by_signs(pile: Guide, low: Real, high: Real, rows: Index) -> tuple[Index, Index, Real]:
    """Return modes of piles with a metal in p, where no count of nodes holds: sign changes on a grid, halved."""
    if not len(rows):
        return rows, rows, np.zeros(0)
    phases = float((np.abs(pile.index) * pile.phase)[:, rows].sum(axis=0).max())
    u = np.sin(np.linspace(0.0, 0.5 * np.pi, int(200 + 24 * phases)))
    u = u * (1.0 - 2e-9) + 1e-9
    width = np.maximum(high - low, 0.0)[rows]
    grid = low[rows, None] + width[:, None] * u
    value = np.stack([_real_mismatch(pile.at(rows), grid[:, k]) for k in range(len(u))], axis=1)
    which, node = np.nonzero((value[:, 1:] * value[:, :-1] < 0.0) & (width[:, None] > 0.0))
    left, right = grid[which, node], grid[which, node + 1]
    chosen, sign = pile.at(rows[which]), np.sign(value[which, node])
    for _ in range(50):
        middle = 0.5 * (left + right)
        same = _real_mismatch(chosen, middle) * sign > 0.0
        left, right = np.where(same, middle, left), np.where(same, right, middle)
    counts = np.bincount(which, minlength=len(rows))
    order = np.repeat(np.cumsum(counts), counts) - 1 - np.arange(len(which))
    return rows[which], order, left


def _real_mismatch(pile: Guide, q: Real) -> Real:
    """Return the dispersion function of a lossless pile, real but for the scaling phase of its layers."""
    at = q.astype(complex)
    value, _ = mismatch(pile, at, outer_roots(pile, at))
    turned = np.zeros_like(q)
    for eps, phase in zip(pile.eps[1:-1].real, pile.phase[1:-1], strict=True):
        turned = turned + np.sqrt(np.maximum(eps - q * q, 0.0)) * phase
    out: Real = (value * np.exp(-1j * turned)).real
    return out


def _followed(scene: Scene, start: Found, steps: int) -> tuple[Complex, Mask]:
    """Follow poles while the absorption rises to its own value in ``steps``; tell which were lost."""
    real = guide(scene, start.wavelength, start.polarisation)
    clear = lossless(real)
    q = start.index.copy()
    roots = outer_roots(clear, q)
    q, roots, lost = _newton(clear, q, roots)
    rise = real.eps - clear.eps
    for step in range(steps):
        now, then = step / steps, (step + 1) / steps
        q = _ahead(clear.with_eps(clear.eps + (now + NUDGE) * rise), q, roots, (then - now) / NUDGE)
        pile = real if step + 1 == steps else clear.with_eps(clear.eps + then * rise)
        q, roots, missed = _newton(pile, q, outer_roots(pile, q, roots))
        lost = lost | missed
    return q, lost


def _ahead(nudged: Guide, q: Complex, roots: tuple[Complex, Complex], times: float) -> Complex:
    """Return where poles go when absorption rises ``times`` as far as in the ``nudged`` guide: q^2 is nearly linear."""
    moved = q * q
    for _ in range(2):  # poles of thick guides stand so close that one step of Newton's method is not straight enough
        at = np.sqrt(moved)
        value, slope = mismatch(nudged, at, outer_roots(nudged, at, roots))
        flat = slope == 0.0  # two poles that are one to the last digit
        moved = moved - np.where(flat, 0.0, value) / np.where(flat, 1.0, slope)
    ahead: Complex = np.sqrt(q * q + (moved - q * q) * times)
    return ahead


def _newton(
    pile: Guide, q: Complex, roots: tuple[Complex, Complex], most: int = 16
) -> tuple[Complex, tuple[Complex, Complex], Mask]:
    """Polish poles; return them, the roots of the half-spaces there, and which did not settle."""
    q, last = q.copy(), (roots[0].copy(), roots[1].copy())
    open_rows = np.arange(len(q))
    with np.errstate(all="ignore"):
        for _ in range(most):
            part, at = pile.at(open_rows), q[open_rows]
            sides = last[0][open_rows], last[1][open_rows]
            value, slope = mismatch(part, at, sides)
            new = np.sqrt(at * at - value / slope)
            new = np.where(np.isfinite(new), new, at)
            for side, root in zip(last, outer_roots(part, new, sides), strict=True):
                side[open_rows] = root
            q[open_rows] = new
            open_rows = open_rows[np.abs(new - at) > CLOSE * np.abs(new)]
            if not len(open_rows):
                break
    # a last digit may go on jumping
    lost = np.zeros(len(q), dtype=bool)
    lost[open_rows] = True
    if len(open_rows):
        value, slope = mismatch(pile.at(open_rows), q[open_rows], (last[0][open_rows], last[1][open_rows]))
        lost[open_rows] = ~(np.abs(value) < 1e-9 * np.abs(slope))
    return q, last, lost


def powers(scene: Scene, found: Found) -> Real:
    """Return the power put into every mode, in units of the bulk power: Re(i pi residue) of the power density.

    On the real axis a mode is a Lorentzian about Re q of half width Im q; its area is pi times the imaginary part of
    the residue with the opposite sign, and half the full turn about the pole.
    """
    if not len(found.index):
        return np.zeros(0)
    turn = np.exp(2j * np.pi * (np.arange(CIRCLE) + 0.5) / CIRCLE)
    step = RADIUS * _room(scene, found)[:, None] * turn
    q = found.index[:, None] + step
    value = polarised_density(scene.view(found.wavelength), q, found.polarisation)
    residue = (value * step).mean(axis=1)
    power: Real = -np.pi * residue.imag
    return power


def _room(scene: Scene, found: Found) -> Real:
    """Return the distance of every pole to the next singularity of the density."""
    marks = [scene.film, scene.above.touching, scene.below.touching]
    room: Real = np.abs(scene.index[marks][:, found.wavelength] - found.index).min(axis=0)
    order = np.lexsort((found.index.real, _key(found)))
    gap = np.abs(np.diff(found.index[order]))
    gap = np.where(np.diff(_key(found)[order]) == 0, gap, np.inf)
    near = np.minimum(np.append(gap, np.inf), np.append(np.inf, gap))
    out = room.copy()
    out[order] = np.minimum(room[order], near)
    return out


def neighbours(scene: Scene, found: Modes | Found) -> Complex:
    """Return the effective index of each mode in a ``scene`` close by, (mode,): at a wavelength next to its own."""
    pile = guide(scene, found.wavelength, found.polarisation)
    return _newton(pile, found.index, outer_roots(pile, found.index))[0]


def polarised_density(view: View, q: Complex, polarisation: Index) -> Complex:
    """Return one polarisation's part of the complex power density of `optics.waves.source`, (row, node)."""
    film = view.film
    kz = normal_inside(film.eps, q)
    magnetic = (polarisation == 1)[:, None]
    own = admittances(kz, film.eps)
    up, down = (np.where(magnetic, r[1], r[0]) for r in (pair.reflection(own) for pair in pairs(view, q)))
    mean_up, mean_down = film.moments(2j * film.phase * kz)
    loop = up * down * turn(film.phase, kz)
    both, one_way = 1.0 + loop, up * mean_up + down * mean_down
    h = film.in_plane
    s = 0.75 * h / kz * (both + one_way)
    p = 0.75 * h / film.eps * kz * (both - one_way) + 1.5 * (1.0 - h) / film.eps * q * q / kz * (both + one_way)
    out: Complex = np.where(magnetic, p, s) * q / (film.real_index * (1.0 - loop))
    return out


def pairs(view: View, q: Complex) -> tuple[Pair, Pair]:
    """Return what the film sees above and below at complex q."""
    scene = view.scene
    out = []
    for layers, side in zip((scene.layers_up, scene.layers_down), scene.sides, strict=True):
        pile = []
        for j in layers:
            kz = normal_inside(view.eps[j], q)
            pile.append((admittances(kz, view.eps[j]), turn(view.phase[j], kz)))
        touching = side.touching
        out.append(fold(pile, admittances(normal_outside(view.index[touching], q), view.eps[touching])))
    return out[0], out[1]
