"""Transport over the depth: where in the film a photon born in one slice is taken back, and where else it ends."""

from __future__ import annotations

from dataclasses import dataclass, field, replace

import numpy as np

from optics.arrays import Index, Real
from optics.assumptions import assumptions
from optics.errors import InputError
from optics.fate import births
from optics.fate.account import ledger_of
from optics.fate.drawing import drawing_of
from optics.fate.ledger import Ledger
from optics.fate.scenes import Drawing, scenes
from optics.fate.wave import Settings
from optics.roughness import graded
from optics.spectrum import weights
from optics.stack import Stack
from optics.transport import depthray, depthwave
from optics.transport.landing import AT, ENDS, Landed
from optics.waves.source import uniform

SLICES = 50
MOST_SLICES = 400
ROUNDING = 1e-12
MISSED = 3e-5
"""Share by which ends may miss the ledger's before they are computed again, finer."""

ROUNDS = 3

LAND = {"wave": depthwave.land, "ray": depthray.land}

WORTH_SAYING = 0.01
"""Share of a slice's light, or of births, from which mending and misses are told of."""

TURNS = 500
"""Most turns of scaling rows and columns to what they should add to."""

CONVENTIONS = (
    "over the depth: births spread evenly in each slice; averages weigh wavelengths with the births in it, not slices",
    "over the depth: each end's profile is scaled to the ledger of even births; scaled_by says how far it was off",
    "over the depth, waves: what is left of a slice's power once all other slices and ends have their part lands in "
    "the slice itself; where that is negative (weak absorption, a convention's rest) it is set to its neighbours' mean",
)


UNEVEN = "over the depth: an uneven film's matrix has the shape of its mean thickness and the amounts of the whole spot"


@dataclass(frozen=True)
class DepthMatrix:
    """One model's answer over the depth.

    Attributes
    ----------
    matrix
        Share of the photons born in a slice (row) that the film takes back in a slice (column), over all births.
    ends
        Share of the same that ends elsewhere, (slice, end), ends as `optics.transport.landing.ENDS`; with the row of
        ``matrix`` they add to one.
    rate_factor
        Mean rate factor of births in each slice.
    by_wavelength
        The matrix wavelength by wavelength, (wavelength, birth slice, landing slice).
    ends_by_wavelength
        (wavelength, birth slice, end).
    rate_by_wavelength
        (slice, wavelength).
    scaled_by
        Largest difference between shares of even births summed here and by the ledger, before they were scaled to it.
    mended
        Largest share by which a negative diagonal was mended.
    """

    matrix: Real
    ends: Real
    rate_factor: Real
    by_wavelength: Real
    ends_by_wavelength: Real
    rate_by_wavelength: Real
    scaled_by: float
    mended: float


@dataclass(frozen=True)
class InDepth:
    """Where in the film's depth photons are taken back.

    Attributes
    ----------
    stack
        The stack.
    edges_nm
        Edges of the slices [nm], 0 at the film's upper face.
    wave, ray
        By model; ``wave`` is None for a film that is a plate.
    """

    stack: Stack
    edges_nm: Real
    wavelength_nm: Real
    wave: DepthMatrix | None
    ray: DepthMatrix
    warnings: tuple[str, ...] = field(default=())
    assumptions: tuple[str, ...] = field(default=())

    @property
    def lead(self) -> DepthMatrix:
        """Waves, or rays where they are alone."""
        return self.ray if self.wave is None else self.wave


def even_edges_nm(thickness_nm: float, slices: int = SLICES) -> Real:
    """Return the edges [nm] of even slices of a film."""
    return np.linspace(0.0, thickness_nm, slices + 1)


def indepth(
    stack: Stack, *, edges_nm: Real | None = None, slices: int = SLICES, settings: Settings | None = None
) -> InDepth:
    """Work out where over the depth of the film photons are taken back.

    Parameters
    ----------
    stack
        The stack.
    edges_nm
        Ascending edges of the slices [nm], from 0 at the film's upper face to its thickness; None: even slices.
    slices
        Number of even slices.
    settings
        How finely to integrate.

    Raises
    ------
    InputError
        Where edges are not ascending or do not span the film; as `optics.solve`.
    """
    settings = settings or Settings()
    if edges_nm is None:
        edges = even_edges_nm(stack.film.thickness_nm, slices)
    else:
        edges = checked_edges(np.asarray(edges_nm, dtype=float), stack)
    smooth = graded(stack)  # its film is thinner by its rough faces, and so is every slice
    drawing = replace(drawing_of(smooth), moments=uniform)
    scale = smooth.film.thickness_nm / stack.film.thickness_nm
    models = ("ray",) if stack.film.plate else ("wave", "ray")
    ledgers = {model: ledger_of(drawing, settings, model=model) for model in models}
    born = births.born_inside(smooth, drawing, ledgers[models[0]], model=models[0], settings=settings).per_nm
    share = born * weights(drawing.wavelength_nm)
    found = {model: _matrix(drawing, edges * scale, ledgers[model], share, settings, model) for model in models}
    said = (*assumptions(stack), *CONVENTIONS, *((UNEVEN,) if stack.film.varies_nm else ()))
    warned = [line for model in models for line in _warnings(found[model], ledgers[model], model)]
    return InDepth(stack, edges, drawing.wavelength_nm, found.get("wave"), found["ray"], tuple(warned), said)


def _warnings(matrix: DepthMatrix, ledger: Ledger, model: str) -> list[str]:
    """Say where slices were mended, ends were far off, or the film has a share below zero, which no matrix holds."""
    said = []
    if matrix.mended > WORTH_SAYING:
        said.append(
            f"over the depth, {model}: some slices had {matrix.mended:.2g} of their light less than nothing left for "
            "themselves (near field between thin slices or from denser neighbours); they were mended, and rows and "
            "ends scaled in turns until even births give the ledger again"
        )
    if matrix.scaled_by > WORTH_SAYING:
        said.append(
            f"over the depth, {model}: ends missed the ledger by {matrix.scaled_by:.2g} of the births before they were "
            "scaled to it: a sharp line was not resolved, and profiles over the slices are that uncertain"
        )
    film = ledger.shares["reabsorbed"] + ledger.shares["guided_reabsorbed"]
    low = min(float(film.min()), float(ledger.rate_factor.min()))
    if low < -ROUNDING:
        said.append(
            f"over the depth, {model}: at some wavelengths the ledger itself has a film share or a rate factor below "
            f"zero (down to {low:.2g}): no matrix of shares adds up to that, and even births do not give it back there"
        )
    return said


def checked_edges(edges: Real, stack: Stack, *, place: str = "mesh") -> Real:
    """Return edges that span the film, or refuse them."""
    thickness = stack.film.thickness_nm
    faults = []
    if edges.ndim != 1 or not 3 <= edges.size <= MOST_SLICES + 1 or not np.isfinite(edges).all():
        raise InputError(f"{place}: found {edges.size} edges, expected 3 to {MOST_SLICES + 1} numbers in nm")
    if (np.diff(edges) <= 0.0).any():
        at = int(np.argmax(np.diff(edges) <= 0.0)) + 1
        faults.append(
            f"{place}: edge {at + 1}: found {edges[at]:.12g} after {edges[at - 1]:.12g}, expected ascending edges"
        )
    if abs(edges[0]) > 1e-9 * thickness or abs(edges[-1] - thickness) > 1e-6 * thickness:
        faults.append(
            f"{place}: found edges from {edges[0]:.12g} to {edges[-1]:.12g} nm, expected 0 to {thickness:.12g} nm, the "
            f'thickness of layer "{stack.film.name}"'
        )
    if faults:
        raise InputError(faults)
    whole = edges.copy()
    whole[0], whole[-1] = 0.0, thickness
    return whole


def _matrix(
    drawing: Drawing, edges_nm: Real, ledger: Ledger, share: Real, settings: Settings, model: str
) -> DepthMatrix:
    width = np.diff(edges_nm) / edges_nm[-1]
    landing = _landed(drawing, edges_nm, settings, model)
    _done_again(landing, drawing, edges_nm, settings, ledger, model)
    power, ends, scaled = _scaled(landing, width, ledger)
    clear = drawing.index[drawing.film].imag == 0.0
    matrix = landing.matrix
    matrix[clear] = 0.0
    own = power.T - ends.sum(axis=2) - matrix.sum(axis=2)
    ends, own = _unabsorbed(ends, own, clear, ledger)
    mended = max(_mended(matrix, own, power), _balanced(matrix, ends, power, width, ledger))
    spectrum = share @ power.T
    births_in = share[:, None] * power.T / spectrum
    matrix /= power.T[:, :, None]
    ends = ends / power.T[:, :, None]
    return DepthMatrix(
        matrix=np.einsum("wi,wij->ij", births_in, matrix),
        ends=np.einsum("wi,wie->ie", births_in, ends),
        rate_factor=spectrum / share.sum(),
        by_wavelength=matrix,
        ends_by_wavelength=ends,
        rate_by_wavelength=power,
        scaled_by=scaled,
        mended=mended,
    )


def _landed(drawing: Drawing, edges_nm: Real, settings: Settings, model: str) -> Landed:
    """Return what each wavelength's scene gives."""
    whole = Landed.empty(len(edges_nm) - 1, len(drawing.wavelength_nm))
    for chosen, scene in scenes(drawing):
        edges = edges_nm * (2.0 * np.pi / drawing.wavelength_nm[chosen])[:, None]
        whole.put(chosen, LAND[model](scene, edges, settings))
    return whole


def _done_again(
    landing: Landed, drawing: Drawing, edges_nm: Real, settings: Settings, ledger: Ledger, model: str
) -> None:
    """Land light again, on more nodes, at wavelengths where the ends miss the ledger's: a line slipped through."""
    width = np.diff(edges_nm) / edges_nm[-1]
    for _ in range(ROUNDS):
        miss = _missed(landing, width, ledger)
        if miss.max() < MISSED:
            break
        settings = settings.strict
        for chosen, scene in scenes(drawing):
            some = np.flatnonzero(miss[chosen] >= MISSED)
            if not len(some):
                continue
            at = chosen[some]
            edges = edges_nm * (2.0 * np.pi / drawing.wavelength_nm[at])[:, None]
            landing.put(at, LAND[model](scene.at(some), edges, settings))


def _missed(landing: Landed, width: Real, ledger: Ledger) -> Real:
    """Return by what share even births miss the ledger's ends at most, (wavelength,)."""
    wanted = np.array([ledger.shares[name] for name in ENDS[:-1]])
    got = np.einsum("i,wie->ew", width, landing.ends)[:-1]
    out: Real = np.abs(got / ledger.rate_factor - wanted).max(axis=0)
    return out


def _scaled(landing: Landed, width: Real, ledger: Ledger) -> tuple[Real, Real, float]:
    """Return power and ends scaled so that even births give the ledger's, and the largest miss of a share."""
    rate = ledger.rate_factor
    power = landing.power * (rate / (width @ landing.power))
    wanted = np.array([ledger.shares[name] for name in ENDS[:-1]]) * rate
    got = np.einsum("i,wie->ew", width, landing.ends)[:-1]
    factor = np.ones((len(ENDS), len(rate)))
    factor[:-1] = np.where(got > 0.0, wanted / np.where(got > 0.0, got, 1.0), 1.0)
    return power, landing.ends * factor.T[:, None, :], float(_missed(landing, width, ledger).max())


def _unabsorbed(ends: Real, own: Real, clear: Real, ledger: Ledger) -> tuple[Real, Real]:
    """Where the film is clear, hand what is left of the power to the guided light's own end."""
    if not clear.any():
        return ends, own
    rest = np.where(clear[:, None], own, 0.0)
    never = ledger.shares["guided_unfinished"] > 0.0
    place = np.where(never, AT["guided_unfinished"], AT["guided_elsewhere"])
    ends = ends.copy()
    rows = np.arange(len(ends))
    ends[rows, :, place] += rest
    return ends, own - rest


def _balanced(matrix: Real, ends: Real, power: Real, width: Real, ledger: Ledger) -> float:
    """Let rows close and even births give the ledger again where cutting at zero has undone it, in place.

    Births of a slice (row) and every end (column) take turns in being scaled to what they should add to (Deming &
    Stephan 1940); the largest share that moved is returned. A slice that radiates less than nothing, as near field of
    its neighbours can leave it, keeps that to itself.
    """
    low = float((-ends.min(axis=2) / np.abs(power.T)).max())
    off = np.abs(power.T - matrix.sum(axis=2) - ends.sum(axis=2)).max(axis=1)
    cut = np.flatnonzero((ends.min(axis=(1, 2)) < 0.0) | (off > ROUNDING) | (power.min(axis=0) <= 0.0))
    if not len(cut):
        return 0.0
    births = width * power.T[cut]
    film, other = np.maximum(matrix[cut], 0.0) * width[:, None], np.maximum(ends[cut], 0.0) * width[:, None]
    dead = births <= 0.0
    film[dead], other[dead] = 0.0, 0.0
    wanted = _columns(ledger, cut) * ledger.rate_factor[cut, None]
    wanted[:, -1] -= np.where(dead, births, 0.0).sum(axis=1)
    live = np.where(dead, 0.0, births)
    before = film.sum(axis=2), other.copy()
    for _ in range(TURNS):
        got = np.concatenate([other.sum(axis=1), film.sum(axis=(1, 2))[:, None]], axis=1)
        scale = np.where(got > 0.0, np.maximum(wanted, 0.0) / np.where(got > 0.0, got, 1.0), 1.0)
        other *= scale[:, None, :-1]
        film *= scale[:, -1, None, None]
        rows = film.sum(axis=2) + other.sum(axis=2)
        scale_rows = np.where(rows > 0.0, live / np.where(rows > 0.0, rows, 1.0), 1.0)
        other *= scale_rows[:, :, None]
        film *= scale_rows[:, :, None]
        if np.abs(scale_rows - 1.0).max() < ROUNDING:
            break
    moved = max(np.abs(film.sum(axis=2) - before[0]).max(), np.abs(other - before[1]).max())
    row, slice_ = np.nonzero(dead)
    film[row, slice_, slice_] = births[dead]
    matrix[cut], ends[cut] = film / width[:, None], other / width[:, None]
    share = float(moved / np.abs(births).max())
    return max(low, share)


def _columns(ledger: Ledger, at: Index) -> Real:
    """Return the ledger's shares in the order of ``ENDS``, the film's last, (wavelength, end)."""
    shares = [ledger.shares[name][at] for name in ENDS]
    return np.array([*shares, ledger.shares["reabsorbed"][at] + ledger.shares["guided_reabsorbed"][at]]).T


def _mended(matrix: Real, own: Real, power: Real) -> float:
    """Put what lands in its own slice on the diagonal, in place; return the largest share that had to be mended."""
    slices = np.arange(own.shape[1])
    diagonal = matrix[:, slices, slices] + own
    low = diagonal < 0.0
    worst = float((np.where(low, -diagonal, 0.0) / np.abs(power.T)).max())
    if low.any():
        upper = np.pad(matrix[:, slices[:-1], slices[1:]], ((0, 0), (0, 1)))
        lower = np.pad(matrix[:, slices[1:], slices[:-1]], ((0, 0), (1, 0)))
        sides = np.where((upper > 0.0) & (lower > 0.0), 0.5, 1.0) * (upper + lower)
        total = matrix.sum(axis=2) + own
        new = np.where(low, sides, diagonal)
        others = matrix.sum(axis=2) - matrix[:, slices, slices]
        sum_now = others + new
        factor = np.where(low & (sum_now > 0.0), np.maximum(total, 0.0) / np.where(sum_now > 0.0, sum_now, 1.0), 1.0)
        matrix[:, slices, slices] = new
        matrix *= factor[:, :, None]
    else:
        matrix[:, slices, slices] = diagonal
    return worst
