"""Reflectance, transmittance and each layer's absorptance at normal incidence: a first check against a spectrometer."""

from dataclasses import dataclass, replace

import numpy as np

from optics.arrays import Real
from optics.waves.plates import Waves, shell
from optics.waves.scene import Scene, Side


@dataclass(frozen=True)
class Reflection:
    """One side's R and T and what every medium takes, (wavelength,) and (medium, wavelength)."""

    reflectance: Real
    transmittance: Real
    taken: Real


@dataclass(frozen=True)
class PlaneWaves:
    """What becomes of plane waves of either polarisation from one side, (polarisation, wavelength, node)."""

    reflectance: Real
    transmittance: Real
    taken: Real  # (medium, polarisation, wavelength, node)


def at_normal(scene: Scene, side: int, *, film_is_plate: bool) -> Reflection:
    """Send light at normal incidence from the outer medium above (``side`` 0) or below (1) through everything.

    Thin layers with phases, plates without; the outer medium counts as lossless on the way in. Light that an outer
    medium swallows is taken by that medium, not transmitted.
    """
    met = plane_waves(scene, side, np.zeros((scene.wavelengths, 1)), film_is_plate=film_is_plate)
    return Reflection(met.reflectance[0, :, 0], met.transmittance[0, :, 0], met.taken[:, 0, :, 0])


def plane_waves(scene: Scene, side: int, q: Real, *, film_is_plate: bool) -> PlaneWaves:
    """Send plane waves of in-plane wave number ``q``, (wavelength, node), through everything; see `at_normal`."""
    near, far = scene.sides if side == 0 else scene.sides[::-1]
    before, behind = (scene.layers_up, scene.layers_down) if side == 0 else (scene.layers_down, scene.layers_up)
    plates = (near.outer, *near.plates[::-1], *far.plates)
    coatings = (*(c[::-1] for c in near.coatings[::-1]), (*before[::-1], scene.film, *behind), *far.coatings)
    if film_is_plate:
        place = 1 + len(near.plates)
        plates = (*plates[:place], scene.film, *plates[place:])
        coatings = (*coatings[: place - 1], before[::-1], behind, *coatings[place:])
    index, loss = scene.index.copy(), scene.loss.copy()
    for plate in plates:
        index[plate] = index[plate].real
    loss[near.outer] = 0.0
    lit = replace(scene, index=index, loss=loss)
    waves = Waves(lit.view(np.arange(scene.wavelengths)), q)
    whole = shell(waves, Side(plates, coatings, far.outer, far.absorbs, far.free))
    taken = np.zeros((scene.media, *whole.reflects.shape))
    for medium, share in whole.taken(np.ones_like(whole.reflects)).items():
        taken[medium] = share
    passed = whole.passes
    if far.absorbs:
        taken[far.outer] += passed
        passed = np.zeros_like(passed)
    return PlaneWaves(whole.reflects, passed, taken)
