"""The limit of light scrambled at every bounce: isotropic in every thick region, exchanged through the faces.

Yablonovitch, J. Opt. Soc. Am. 72, 899 (1982): light that fills phase space evenly carries n^2 times the intensity of
the space outside, loses 4 n^2 alpha d per pass-through of a layer and 1 through an open face. Here the film and every
plate are such regions; faces between them pass what their layers pass of isotropic light.
"""

from dataclasses import dataclass, replace
from itertools import pairwise

import numpy as np

from optics.arrays import Real
from optics.fate.scenes import Drawing, scenes
from optics.waves.plates import Waves, meet
from optics.waves.scene import Scene, Side

NODES = 64


@dataclass(frozen=True)
class Scrambled:
    """Averages over the births: the same three shares as a reading's, and whether faces were taken as open."""

    p_r: float
    p_e: float
    p_a: float
    open_faces: bool


@dataclass(frozen=True)
class Exchange:
    """What a face does with isotropic light, in units of what an open face of index 1 passes, (wavelength,).

    ``passed`` is symmetric; ``near`` and ``far`` are what the face's own layers take of light from either side.
    """

    passed: Real
    near: Real
    far: Real


def textbook(*, index: Real, optical_depth: Real) -> Real:
    """Return the escape of a scrambled film on a mirror under an open face, 1/(1 + 4 n^2 alpha d)."""
    return 1.0 / (1.0 + 4.0 * index**2 * optical_depth)


def scrambled(drawing: Drawing, *, births: Real, recycling_share: Real, open_faces: bool) -> Scrambled:
    """Return the shares of scrambled light, averaged over the births.

    Parameters
    ----------
    drawing
        The stack; its film and plates are regions of isotropic light.
    births
        Weights of the wavelengths, photons born, sum 1.
    recycling_share
        Share of film absorption that makes carriers, (wavelength,).
    open_faces
        Whether faces pass all the light for which there is room on both sides (the textbook's faces), or what this
        stack's smooth faces pass. Thin layers take nothing in the first case; opaque outer media stay as they are.
    """
    film, out = np.zeros((2, len(drawing.wavelength_nm)))
    for chosen, scene in scenes(drawing):
        film[chosen], out[chosen] = _balance(scene, open_faces=open_faces)
    kept = float(births @ (recycling_share * film))
    leaves = float(births @ out)
    return Scrambled(kept, leaves, 1.0 - kept - leaves, open_faces)


def _balance(scene: Scene, *, open_faces: bool) -> tuple[Real, Real]:
    """Return what the film takes and what leaves of a unit born in the film, (wavelength,)."""
    up, down = scene.above.plates[::-1], scene.below.plates
    regions = [*up, scene.film, *down]
    count = len(regions)
    system = np.zeros((scene.wavelengths, count, count))
    for place, medium in enumerate(regions):
        # 4 n^2 alpha d with alpha d = 2 k k0 d
        system[:, place, place] += 8.0 * scene.index[medium].real ** 2 * scene.loss[medium] * scene.phase[medium]
    place = len(up)
    leaving = np.zeros((count, scene.wavelengths))
    for k, side in enumerate(scene.sides):
        _join(system, leaving, scene, side, place, -1 if k == 0 else 1, k, open_faces=open_faces)
    source = np.zeros((scene.wavelengths, count, 1))
    source[:, place, 0] = 1.0
    empty = ~(np.abs(system).sum(axis=(1, 2)) > 0.0)
    system[empty] = np.eye(count)
    light = np.linalg.solve(system, source)[:, :, 0].T
    taken = 8.0 * scene.index[scene.film].real ** 2 * scene.loss[scene.film] * scene.phase[scene.film]
    return np.where(empty, 0.0, taken * light[place]), np.where(empty, 0.0, (leaving * light).sum(axis=0))


def _join(
    system: Real, leaving: Real, scene: Scene, side: Side, place: int, step: int, k: int, *, open_faces: bool
) -> None:
    """Enter the faces of one side, from the film outwards."""
    layers = (scene.layers_up if k == 0 else scene.layers_down, *side.coatings)
    media = (scene.film, *side.plates, side.outer)
    for number, between in enumerate(layers):
        here, there = media[number], media[number + 1]
        face = _face(scene, here, between, there, swallows=side.absorbs and there == side.outer, open_faces=open_faces)
        at = place + step * number
        system[:, at, at] += face.passed + face.near
        if there == side.outer:
            if side.free and not side.absorbs:
                leaving[at] += face.passed
            continue
        beyond = at + step
        system[:, beyond, beyond] += face.passed + face.far
        system[:, at, beyond] -= face.passed
        system[:, beyond, at] -= face.passed


def _face(
    scene: Scene, here: int, layers: tuple[int, ...], there: int, *, swallows: bool, open_faces: bool
) -> Exchange:
    """Return what layers between two regions do with isotropic light from either."""
    nothing = np.zeros(scene.wavelengths)
    if open_faces and not swallows:
        return Exchange(np.minimum(scene.index[here].real, scene.index[there].real) ** 2, nothing, nothing)
    passed, near = _isotropic(scene, here, layers, there)
    if swallows:
        return Exchange(passed, near, nothing)
    return Exchange(passed, near, _isotropic(scene, there, layers[::-1], here)[1])


def _isotropic(scene: Scene, here: int, layers: tuple[int, ...], there: int) -> tuple[Real, Real]:
    """Return what is passed and taken of isotropic light, n^2 times the mean over 2 sin cos d(theta)."""
    x, weight = np.polynomial.legendre.leggauss(NODES)
    top = scene.index[here].real
    marks = np.sort(np.vstack([np.zeros_like(top), np.minimum(scene.index[there].real, top), top]), axis=0)
    passed, taken = np.zeros((2, len(top)))
    clear = _clear(scene, here)
    for low, high in pairwise(marks):
        half = 0.25 * np.pi * (1.0 + x)
        span = (high - low)[:, None]
        q = low[:, None] + span * np.sin(half) ** 2
        waves = Waves(clear.view(np.arange(len(top))), q)
        met = meet(waves, here, layers, there)
        measure = q * weight * span * 0.25 * np.pi * np.sin(2.0 * half)  # q dq; two polarisations make 2 q dq
        passed += (met.on.sum(axis=0) * measure).sum(axis=1)
        for share in met.taken.values():
            taken += (share.sum(axis=0) * measure).sum(axis=1)
    return passed, taken


def _clear(scene: Scene, medium: int) -> Scene:
    """Return the scene with one medium's index real, to send light from."""
    index = scene.index.copy()
    index[medium] = index[medium].real
    return replace(scene, index=index)
