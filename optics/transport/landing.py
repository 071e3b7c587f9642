"""Where light from every slice of the film lands: the other slices, and the ends of the ledger, slice by slice."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from optics.fate.exits import Response
from optics.fate.trips import Network
from optics.waves.coherent import Complex, Outlook, Real, squared
from optics.waves.plates import Waves
from optics.waves.scene import Scene

ENDS = ("substrate", "cover", "free_below", "free_above", "elsewhere", "guided_elsewhere", "guided_unfinished")
"""Ends other than the film; light in the bound zone that the ledger calls waveguided stands under what takes it."""

AT = {name: place for place, name in enumerate(ENDS)}
SEEN_FROM = (len(ENDS), len(ENDS) + 1)
"""After the ends: what the film takes of light that plates above and below send back."""


@dataclass(frozen=True)
class Landing:
    """Amounts in units of the bulk power; births spread evenly over each slice.

    ``power`` is (slice, wavelength), ``matrix`` (wavelength, birth slice, landing slice) and ``ends`` (wavelength, birth
    slice, end). Until it is closed the diagonal of ``matrix`` holds only what plates send back.
    """

    power: Real
    matrix: Real
    ends: Real

    @classmethod
    def empty(cls, slices: int, wavelengths: int) -> "Landing":
        """Return that nothing is known yet."""
        return cls(
            np.zeros((slices, wavelengths)),
            np.zeros((wavelengths, slices, slices)),
            np.zeros((wavelengths, slices, len(ENDS))),
        )


def end_amounts(
    waves: Waves,
    responses: Sequence[Response | None],
    looks: tuple[Outlook, Outlook],
    mirrors: tuple[Complex, Complex],
    whole: Real,
    *,
    bound: bool,
) -> tuple[Real, Real]:
    """Return what a unit wave that meets the upper, the lower face brings to each end, (end, polarisation, row, node).

    ``whole`` is exp(-2 Im kz d): the lower one is the wave that starts at the film's upper face. Two rows follow the ends,
    ``SEEN_FROM``.
    """
    scene = waves.view.scene
    up = looks[0].fluxes(squared(1.0 + mirrors[0]))
    down = looks[1].fluxes(squared(1.0 + mirrors[1]) * whole)
    out = []
    net = None if bound else Network(waves, responses)
    for k, (layers, flux) in enumerate(((scene.layers_up, up), (scene.layers_down, down))):
        amounts = np.zeros((len(ENDS) + 2, *mirrors[0].shape))
        place = AT["guided_elsewhere"] if bound else AT["elsewhere"]
        for i, medium in enumerate(layers):
            if scene.index[medium].imag.any():
                amounts[place] += flux[i] - flux[i + 1]
        if net is None:
            side = scene.sides[k]
            if side.absorbs and not side.plates:
                amounts[AT["elsewhere"]] += flux[-1]
        else:
            nothing = np.zeros_like(flux[-1])
            leave_group(amounts, net, (flux[-1], nothing) if k == 0 else (nothing, flux[-1]))
        out.append(amounts)
    return out[0], out[1]


def leave_group(amounts: Real, net: Network, leaving: tuple[Real, Real]) -> None:
    """Follow what leaves the group to its ends, as the ledger does, polarisations apart."""
    scene = net.scene
    total = net.entering(leaving)
    for k, (side, folded, sink) in enumerate(zip(scene.sides, net.shells, net.sinks, strict=True)):
        out = _end_of(scene, k)
        if folded is None:
            amounts[out] += total[k]
            continue
        amounts[out] += np.where(sink, 0.0, folded.passes * total[k])
        amounts[AT[("cover", "substrate")[k]]] += np.where(sink, folded.reflects * total[k], 0.0)
        for share in folded.taken(total[k]).values():
            amounts[AT["elsewhere"]] += share
        response, back = net.responses[k], net.opened[k] * total[k]
        if response is not None:
            for medium, taken in response.taken.items():
                amounts[SEEN_FROM[k] if medium == scene.film else AT["elsewhere"]] += back * taken


def _end_of(scene: Scene, k: int) -> int:
    side = scene.sides[k]
    if side.absorbs:
        return AT["elsewhere"]
    return AT[("free_above", "free_below")[k]] if side.free else AT[("cover", "substrate")[k]]
