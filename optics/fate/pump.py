"""The excitation: where in the film a pump is absorbed, computed at normal incidence in the same stack.

Thin layers keep its phases, plates and what lies behind them send intensities back and forth: the film is lit from
both sides, and its profile is a sum of exponentials, |forward + backward|^2 of either lighting.
"""

from dataclasses import dataclass, replace

import numpy as np
from scipy.constants import c, h

from optics.arrays import Complex
from optics.depth import PLACE, Births
from optics.errors import InputError
from optics.fate.scenes import Drawing, scenes
from optics.waves.depth import Exponentials, gathered
from optics.waves.plates import Meeting, Waves, meet
from optics.waves.scene import Scene

FINE = 4001  # places at which the largest density is looked for: a hundred in a fringe of a 20 um film


@dataclass(frozen=True)
class Pumped:
    """A pump in the film.

    Attributes
    ----------
    absorbed
        Share of the incident pump that the film takes.
    linear, square
        Its absorption over depth and the square of that, each scaled to a mean of 1.
    carriers_per_cm3
        Carriers born per volume in the mean over the film, for an incident fluence of 1 uJ/cm2 [1/cm3].
    peak_carriers_per_cm3
        The same where most are born [1/cm3].
    """

    absorbed: float
    linear: Exponentials
    square: Exponentials
    carriers_per_cm3: float
    peak_carriers_per_cm3: float

    def profile(self, births: Births) -> Exponentials:
        """Return the births over depth."""
        return self.square if births == "square" else self.linear


def pumped(drawing: Drawing, *, from_below: bool) -> Pumped:
    """Send light of the drawing's one wavelength, intensity 1, through the stack at normal incidence.

    Raises
    ------
    InputError
        When an opaque medium lies between the pump and the film, or the film takes none of it.
    """
    (_, scene), *_ = scenes(drawing)
    side = "below" if from_below else "above"
    if scene.sides[from_below].absorbs:
        raise InputError(f'{PLACE}: side: found "{side}", where an opaque medium lies between the pump and the film')
    profile = _absorbed(scene, from_below=from_below, film_is_plate=drawing.plate[drawing.film])
    absorbed = profile.total
    if not absorbed > 0.0:
        raise InputError(f'{PLACE}: pump_nm: the film takes none of the pump from "{side}", so that nothing is born')
    per_cm3 = _carriers(absorbed, drawing)
    linear = profile.normal()
    largest = float(linear.density(np.linspace(0.0, 1.0, FINE)).max())
    return Pumped(absorbed, linear, linear.squared().normal(), per_cm3, per_cm3 * largest)


def _carriers(absorbed: float, drawing: Drawing) -> float:
    """Return carriers per cm3 in the mean over the film, for 1 uJ/cm2."""
    photon_uJ = h * c / (drawing.wavelength_nm[0] * 1e-9) * 1e6
    return float(absorbed / photon_uJ / (drawing.thickness_nm[drawing.film] * 1e-7))


@dataclass(frozen=True)
class _Chain:
    """Media that carry intensities, from the pump on, and what lies between them."""

    media: tuple[int, ...]
    piles: tuple[tuple[int, ...], ...]
    lit_film: int  # number of the pile that holds the film, or of the medium that is the film


def _absorbed(scene: Scene, *, from_below: bool, film_is_plate: bool) -> Exponentials:
    """Return the absorption per unit x = a/d of a pump of intensity 1."""
    chain = _chain(scene, from_below=from_below, film_is_plate=film_is_plate)
    index = scene.index.copy()
    for medium in chain.media[:-1]:
        index[medium] = index[medium].real
    waves = Waves(replace(scene, index=index).view(np.arange(1)), np.zeros((1, 1)))
    onwards, backwards, links = _intensities(scene, waves, chain)
    place = chain.lit_film
    near = "upper" if not from_below else "lower"
    if film_is_plate:
        before, behind = links[place - 1], links[place]
        entering = before[0].on * onwards[place - 1] + before[1].back * backwards[place - 1]
        returning = behind[0].back * onwards[place] + behind[1].on * backwards[place]
        optical = _optical(scene, scene.film)
        profile = _fading(optical, float(entering), float(returning))
        return profile if near == "upper" else _turned(profile)
    forwards = _standing(waves, float(links[place][0].taken[scene.film] * onwards[place]), from_below=from_below)
    if backwards[place] <= 0.0:
        return forwards
    back = _standing(waves, float(links[place][1].taken[scene.film] * backwards[place]), from_below=not from_below)
    return _sum(forwards, back)


def _chain(scene: Scene, *, from_below: bool, film_is_plate: bool) -> _Chain:
    near, far = scene.sides[::-1] if from_below else scene.sides
    before, behind = (scene.layers_up, scene.layers_down)[:: -1 if from_below else 1]
    media = (near.outer, *near.plates[::-1])
    piles = tuple(coating[::-1] for coating in near.coatings[::-1])
    beyond = (*far.plates, far.outer)
    if film_is_plate:
        return _Chain((*media, scene.film, *beyond), (*piles, before[::-1], behind, *far.coatings), len(piles) + 1)
    return _Chain((*media, *beyond), (*piles, (*before[::-1], scene.film, *behind), *far.coatings), len(piles))


def _intensities(
    scene: Scene, waves: Waves, chain: _Chain
) -> tuple[np.ndarray, np.ndarray, list[tuple[Meeting, Meeting]]]:
    """Return what arrives at every pile from the pump's side and from behind, and what piles do with either.

    With F onwards and B backwards at pile i, a the pass of the medium behind it: F(i+1) = a (on F + back' B) and
    B(i) = a (back F(i+1) + on' B(i+1)) of the next pile; nothing comes back from behind the last one.
    """
    links = [
        (_met(waves, one, pile, other), _met(waves, other, pile[::-1], one))
        for one, pile, other in zip(chain.media, chain.piles, chain.media[1:], strict=False)
    ]
    count = len(links)
    system, given = np.eye(2 * count), np.zeros(2 * count)
    given[0] = 1.0
    for i, medium in enumerate(chain.media[1:-1]):
        passing = np.exp(-_optical(scene, medium))
        system[i + 1, [i, count + i]] = -passing * np.array([links[i][0].on, links[i][1].back])
        system[count + i, [i + 1, count + i + 1]] = -passing * np.array([links[i + 1][0].back, links[i + 1][1].on])
    solved = np.linalg.solve(system, given)
    return solved[:count], solved[count:], links


def _met(waves: Waves, origin: int, pile: tuple[int, ...], behind: int) -> Meeting:
    """Return what a pile does with light of one wavelength at normal incidence, as plain numbers."""
    met = meet(waves, origin, pile, behind)
    taken = {medium: share[0, 0, 0] for medium, share in met.taken.items()}
    return Meeting(met.back[0, 0, 0], met.on[0, 0, 0], taken)


def _optical(scene: Scene, medium: int) -> float:
    """Return alpha d."""
    return float(2.0 * scene.loss[medium, 0] * scene.phase[medium, 0])


def _standing(waves: Waves, absorbed: float, *, from_below: bool) -> Exponentials:
    """Return the absorption over depth of one coherent lighting that gives the film ``absorbed``.

    The field is exp(i k x) + r exp(i k (2 d - x)) with r the reflection of the far half, x from the near face.
    """
    scene = waves.view.scene
    layers, behind = (scene.layers_up, scene.above) if from_below else (scene.layers_down, scene.below)
    amplitude = complex(waves.mirror(layers, behind.touching).reflection[0, 0, 0])
    phase = complex(scene.index[scene.film, 0] * scene.phase[scene.film, 0])
    fade = 2.0 * phase.imag
    far: Complex = np.array([-fade, -fade, -fade, -fade], dtype=complex)
    near: Complex = np.array([0.0, -2.0 * fade, 2j * phase, (2j * phase).conjugate()])
    strength: Complex = np.array([1.0, abs(amplitude) ** 2, amplitude, amplitude.conjugate()])
    profile = gathered(strength, *((near, far) if from_below else (far, near)))
    return profile.scaled(absorbed / profile.total)


def _fading(optical: float, entering: float, returning: float) -> Exponentials:
    """Return the absorption of intensities that enter a plate at its near face and come back at its far one."""
    amplitude: Complex = np.array([optical * entering, optical * returning], dtype=complex)
    ends: Complex = np.array([-optical, 0.0], dtype=complex)
    return gathered(amplitude, ends, ends[::-1])


def _turned(profile: Exponentials) -> Exponentials:
    return Exponentials(profile.amplitude, profile.upper, profile.lower)


def _sum(one: Exponentials, other: Exponentials) -> Exponentials:
    return gathered(
        *(
            np.concatenate(pair)
            for pair in ((one.amplitude, other.amplitude), (one.lower, other.lower), (one.upper, other.upper))
        )
    )
