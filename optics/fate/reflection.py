"""Reflectance, transmittance and each layer's absorptance at normal incidence: a first check against a spectrometer."""

from dataclasses import dataclass, replace

import numpy as np

from optics.waves.coherent import Real
from optics.waves.plates import Waves, shell
from optics.waves.scene import Scene, Side


@dataclass(frozen=True)
class Reflection:
    """One side's R and T and what every medium takes, (wavelength,) and (medium, wavelength)."""

    reflectance: Real
    transmittance: Real
    taken: Real


def at_normal(scene: Scene, side: int, *, film_is_plate: bool) -> Reflection:
    """Send light from the outer medium above (``side`` 0) or below (1) through everything.

    Thin layers with phases, plates without; the outer medium counts as lossless on the way in. Light that an outer
    medium swallows is taken by that medium, not transmitted.
    """
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
    every = np.arange(scene.wavelengths)
    waves = Waves(lit.view(every), np.zeros((scene.wavelengths, 1)))
    whole = shell(waves, Side(plates, coatings, far.outer, far.absorbs, far.free))
    taken = np.zeros((scene.media, scene.wavelengths))
    for medium, share in whole.taken(np.ones_like(whole.reflects)).items():
        taken[medium] = share[0, :, 0]
    passed = whole.passes[0, :, 0]
    if far.absorbs:
        taken[far.outer] += passed
        passed = np.zeros_like(passed)
    return Reflection(whole.reflects[0, :, 0], passed, taken)
