"""Plane waves and emission checked against each other and against an independent library."""

import warnings
from collections.abc import Iterator
from dataclasses import replace
from itertools import combinations, pairwise

import numpy as np

from optics.arrays import Real
from optics.fate.account import ledger_of
from optics.fate.drawing import drawn
from optics.fate.ledger import Ledger
from optics.fate.reflection import PlaneWaves, plane_waves
from optics.fate.scenes import Drawing, scenes, swallows
from optics.fate.wave import Settings
from optics.stack import Stack
from optics.waves.source import uniform

ANGLES_DEG = (0.0, 35.0, 65.0)
LEAST_K = 1e-3
"""A film or layer that absorbs less is given this much k where its absorption is what is compared."""

NODES = 240
ISOTROPIC = 2.0 / 3.0
SIDES = ("above", "below")


def plain(stack: Stack, wavelength_nm: Real) -> Drawing:
    """Return the drawing of a stack with even isotropic births in an even film, all outer media free."""
    drawing = drawn(stack, wavelength_nm)
    return replace(drawing, in_plane=ISOTROPIC, moments=uniform, uneven=(), free=(True, True))


def lit_sides(drawing: Drawing) -> list[int]:
    """Return the sides from which light can come: those whose outer medium does not swallow it."""
    ends = (0, len(drawing.index) - 1)
    return [side for side in (0, 1) if not swallows(drawing, ends[side]).any()]


def waves_met(drawing: Drawing, side: int, q: Real) -> PlaneWaves:
    """Return what becomes of plane waves from one side; ``q`` is (wavelength, node)."""
    parts = list(scenes(drawing))
    film_is_plate = drawing.plate[drawing.film]
    shape = (2, *q.shape)
    whole = PlaneWaves(np.zeros(shape), np.zeros(shape), np.zeros((len(drawing.index), *shape)))
    for chosen, scene in parts:
        met = plane_waves(scene, side, q[chosen], film_is_plate=film_is_plate)
        whole.reflectance[:, chosen] = met.reflectance
        whole.transmittance[:, chosen] = met.transmittance
        whole.taken[:, :, chosen] = met.taken
    return whole


def against_tmm(stack: Stack, wavelength_nm: Real) -> tuple[float, int]:
    """Return the largest difference of R, T and any layer's absorptance from what the `tmm` library says, and how many.

    The library (S. Byrnes, arXiv:1603.02720) gets its layers from the stack itself. Plates and outer media enter it
    with their real index at interfaces, as they do here; k of a plate attenuates.
    """
    drawing = plain(stack, wavelength_nm)
    worst, count = 0.0, 0
    for side in lit_sides(drawing):
        outer = (stack.above if side == 0 else stack.below).material.index(wavelength_nm).real
        q = outer[:, None] * np.sin(np.radians(ANGLES_DEG))
        met = waves_met(drawing, side, q)
        for row, wavelength in enumerate(wavelength_nm):
            for node, angle in enumerate(ANGLES_DEG):
                for pol in (0, 1):
                    ours = [met.reflectance[pol, row, node], *met.taken[1:-1, pol, row, node]]
                    theirs = _tmm(stack, float(wavelength), np.radians(angle), "sp"[pol], side)
                    worst = max(worst, float(np.abs(np.array(ours) - theirs).max()))
                    count += len(ours)
    return worst, count


def _tmm(stack: Stack, wavelength: float, angle: float, pol: str, side: int) -> Real:
    """Return R and the absorptance of every layer, from above to below, by the `tmm` library."""
    import tmm  # type: ignore[import-untyped]  # it has no annotations

    step = 1 if side == 0 else -1
    materials = [material for _, material, _ in stack.media][::step]
    index = [complex(material.index(np.array([wavelength]))[0]) for material in materials]
    plates = [True, *(layer.plate for layer in stack.layers[::step]), True]
    thickness = [np.inf, *(layer.thickness_nm for layer in stack.layers[::step]), np.inf]
    index[0] = complex(index[0].real)
    kinds = ["i" if plate else "c" for plate in plates]
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # it says when a layer is opaque
        found = tmm.inc_tmm(pol, index, thickness, kinds, angle, wavelength)
        taken = tmm.inc_absorp_in_each_layer(found)
    return np.array([found["R"], *taken[1:-1][::step]], dtype=float)


def reciprocity(stack: Stack, wavelength_nm: Real, settings: Settings) -> Iterator[tuple[str, float]]:
    """Yield, a side, how far emission to it is from what the film's absorption of light from it demands.

    Light that gets out on one side, per unit of what the film radiates in its bulk, equals the film's absorptance of
    light from there over all directions, times n_out^2/(4 n^2 alpha d) and integrated over sin^2 of the angle
    (Wuerfel 1982; Rau 2007). Plates, with all their passes, obey it as layers do.
    """
    drawing = absorbing(plain(stack, wavelength_nm), [stack.film_index + 1])
    model = "ray" if stack.film.plate else "wave"
    ledger = ledger_of(drawing, settings, model=model)
    film = drawing.index[drawing.film]
    depth = 4.0 * np.pi * film.imag * drawing.thickness_nm[drawing.film] / wavelength_nm
    for side in lit_sides(drawing):
        outer = drawing.index[0 if side == 0 else -1].real
        q, steps = _nodes(drawing, outer)
        absorbed = waves_met(drawing, side, q).taken[drawing.film].sum(axis=0)
        expected = (absorbed * q * steps).sum(axis=1) / (4.0 * film.real**2 * depth)
        sent = ledger.shares[("free_above", "free_below")[side]] * ledger.rate_factor
        yield SIDES[side], float(np.abs(sent - expected).max())


def _nodes(drawing: Drawing, outer: Real) -> tuple[Real, Real]:
    """Return q and its weights, (wavelength, node), between the light lines that lie below that of the outer medium."""
    nodes, weights = np.polynomial.legendre.leggauss(NODES)
    u, du = 0.5 * (nodes + 1.0), 0.5 * weights
    solid = [m for m in range(len(drawing.index)) if drawing.plate[m] or m == drawing.film]
    lines = np.sort(np.minimum(drawing.index[solid].real, outer), axis=0)
    marks = np.vstack([np.zeros_like(outer), lines])
    # sin^2 maps tame the square roots at light lines
    pieces = [
        (
            low[:, None] + (high - low)[:, None] * np.sin(0.5 * np.pi * u) ** 2,
            (high - low)[:, None] * 0.5 * np.pi * np.sin(np.pi * u) * du,
        )
        for low, high in pairwise(marks)
    ]
    return np.concatenate([q for q, _ in pieces], axis=1), np.concatenate([w for _, w in pieces], axis=1)


def absorbing(drawing: Drawing, media: list[int]) -> Drawing:
    """Return the drawing with at least `LEAST_K` of absorption in some media."""
    index = drawing.index.copy()
    index[media] = index[media].real + 1j * np.maximum(index[media].imag, LEAST_K)
    return replace(drawing, index=index)


def exchange(stack: Stack, wavelength_nm: Real, settings: Settings) -> tuple[float, list[str]]:
    """Return the largest asymmetry of what layers send each other, and the layers compared; none: not applicable.

    n_i^2 alpha_i d_i times the power that layer j takes of light born evenly in layer i is symmetric in i and j
    (Polder & Van Hove 1971). The figure is relative to the larger n^2 alpha d of the pair.
    """
    drawing = plain(stack, wavelength_nm)
    group = thin_group(drawing)
    dense = [m for m in group if (drawing.index[m] ** 2).real.min() > 0.0]
    if drawing.plate[drawing.film] or len(dense) < 2:
        return 0.0, []
    drawing = absorbing(drawing, dense)
    names = ["above", *(layer.name for layer in stack.layers), "below"]
    weight = {m: _weight(drawing, m) for m in dense}
    sent = {m: _taken(replace(drawing, film=m), settings) * weight[m] for m in dense}
    worst = 0.0
    for i, j in combinations(dense, 2):
        scale = np.maximum(weight[i], weight[j])
        worst = max(worst, float((np.abs(sent[i][j] - sent[j][i]) / scale).max()))
    return worst, [names[m] for m in dense]


def thin_group(drawing: Drawing) -> list[int]:
    """Return the film and the thin layers that touch it, up to the next plate or outer medium."""
    first = last = drawing.film
    while not drawing.plate[first - 1]:
        first -= 1
    while not drawing.plate[last + 1]:
        last += 1
    return list(range(first, last + 1))


def _weight(drawing: Drawing, medium: int) -> Real:
    index = drawing.index[medium]
    out: Real = index.real**2 * index.imag * drawing.thickness_nm[medium]
    return out


def _taken(drawing: Drawing, settings: Settings) -> Real:
    """Return the power each medium takes of light born in the film, (medium, wavelength), in units of the bulk's."""
    found: Ledger = ledger_of(drawing, settings, model="wave")
    out: Real = found.taken.sum(axis=0) * found.rate_factor
    return out
