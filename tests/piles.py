"""Stacks written as plain lists, and what the tests of the optics ask of them again and again.

A medium is (index, thickness in nm) or (index, thickness in nm, "plate"); the outer ones have no thickness.
"""

from itertools import pairwise

import numpy as np

from optics.fate import wave
from optics.fate.exits import Layout
from optics.fate.scenes import Drawing, scenes
from optics.fate.solve import ledger_of
from optics.fate.wave import Settings
from optics.waves.curves import Points
from optics.waves.plates import Waves, meet
from optics.waves.source import uniform

ISOTROPIC = 2.0 / 3.0


def drawn(wavelength_nm, media, *, film=1, free=(True, True), in_plane=ISOTROPIC, moments=uniform):
    """Return a drawing of one wavelength or several; indices may vary with wavelength."""
    wavelength = np.atleast_1d(np.asarray(wavelength_nm, float))
    index = [np.broadcast_to(np.asarray(medium[0], complex), wavelength.shape) for medium in media]
    return Drawing(
        wavelength_nm=wavelength,
        index=np.array(index),
        thickness_nm=np.array([float(medium[1]) for medium in media]),
        plate=(True, *("plate" in medium for medium in media[1:-1]), True),
        film=film,
        free=free,
        in_plane=in_plane,
        moments=moments,
    )


def ledger(drawing, *, model="wave", finer=1):
    return ledger_of(drawing, Settings(finer=finer), model=model)


def amounts(drawing, *, model="wave", finer=1):
    """Return shares times the rate factor at the first wavelength: power in units of the same dipole's in bulk."""
    drawn_up = ledger(drawing, model=model, finer=finer)
    return {name: float(share[0] * drawn_up.rate_factor[0]) for name, share in drawn_up.shares.items()}


def scene_of(drawing):
    """Return the one scene of a drawing whose sides end alike at all wavelengths."""
    ((_, scene),) = scenes(drawing)
    return scene


def panel(low, high, order):
    """Return Gauss-Legendre nodes and weights on [low, high] under q = low + (high - low) sin^2(pi u/2)."""
    x, weight = np.polynomial.legendre.leggauss(order)
    angle = 0.25 * np.pi * (1.0 + x)
    q = low + (high - low) * np.sin(angle) ** 2
    return q, weight * (high - low) * 0.25 * np.pi * np.sin(2.0 * angle)


def pieces(low, high, lines, order):
    """Return nodes and weights on [low, high], cut at those of ``lines`` that lie between."""
    marks = [low, *sorted(line for line in set(lines) if low < line < high), high]
    parts = [panel(a, b, order) for a, b in pairwise(marks)]
    return np.concatenate([q for q, _ in parts]), np.concatenate([weight for _, weight in parts])


def _points(scene, q):
    q = np.asarray(q, float)[None, :]
    return np.zeros(1, dtype=np.intp), Points(q, np.ones_like(q), scene.film_index[:1, None] - q)


def open_at(scene, q):
    """Return the open zone's densities at some q, (quantity, node); q within one panel."""
    return wave.open_values(scene, *_points(scene, q))[:, 0]


def bound_at(scene, q):
    """Return power, first flights and what each medium takes of bound light at some q, (2 + medium, node)."""
    return np.delete(wave.bound_values(scene, *_points(scene, q))[:, 0], 1, axis=0)


def end_at(scene, q, end):
    """Return the density of one of the four ends at some q."""
    return open_at(scene, q)[Layout(scene.media).end(end)]


def meeting(wavelength_nm, media, q):
    """Send light through the layers of ``media`` from the first to the last; arrays of the answer are (pol, 1, q)."""
    scene = scene_of(drawn(wavelength_nm, media))
    waves = Waves(scene.view(np.zeros(1, dtype=np.intp)), np.atleast_1d(np.asarray(q, float))[None, :])
    return meet(waves, 0, tuple(range(1, len(media) - 1)), len(media) - 1)
