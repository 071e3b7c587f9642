"""Where light from every slice of the film lands: the other slices, and the ends of the ledger, slice by slice."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from optics.arrays import Index, Real
from optics.fate.exits import Response
from optics.fate.trips import Network
from optics.waves.coherent import Mirror
from optics.waves.plates import Waves
from optics.waves.scene import Scene

ENDS = ("substrate", "cover", "free_below", "free_above", "elsewhere", "guided_elsewhere", "guided_unfinished")
"""Ends other than the film; light in the bound zone that the ledger calls waveguided stands under what takes it."""

AT = {name: place for place, name in enumerate(ENDS)}
SEEN_FROM = (len(ENDS), len(ENDS) + 1)
"""After the ends: what the film takes of light that plates above and below send back."""


@dataclass(frozen=True)
class Landing:
    """Amounts in units of the bulk power, each that of a birth slice as a whole, summed up node by node.

    Attributes
    ----------
    power
        What births in each slice radiate, a mean over it, (slice, wavelength).
    pairs
        What the film takes below the slice of birth, (wavelength, birth slice, landing slice); above the diagonal alone
        it means anything. What it takes above the slice of birth is the same with the slices exchanged.
    above
        What comes to the latter where sending and taking are not alike; below the diagonal alone it means anything.
    returned
        What the film takes of light that faces and plates send back, of the same shape.
    ends
        What every other end takes, (wavelength, birth slice, end).
    """

    power: Real
    pairs: Real
    above: Real
    returned: Real
    ends: Real

    @classmethod
    def empty(cls, slices: int, wavelengths: int) -> "Landing":
        """Return that nothing is known yet."""
        square = (wavelengths, slices, slices)
        ends = np.zeros((wavelengths, slices, len(ENDS)))
        return cls(np.zeros((slices, wavelengths)), np.zeros(square), np.zeros(square), np.zeros(square), ends)

    def landed(self, width: Real) -> "Landed":
        """Return all of it per unit of ``width``, (wavelength, slice)."""
        slices = np.arange(width.shape[1])
        below = slices[:, None] < slices
        matrix = np.where(below, self.pairs, np.swapaxes(self.pairs, 1, 2))
        matrix[:, slices, slices] = 0.0
        if self.above.any():
            matrix += np.where(below.T, self.above, 0.0)
        if self.returned.any():
            matrix += self.returned
        matrix /= width[:, :, None]
        return Landed(self.power, matrix, self.ends / width[:, :, None])


@dataclass(frozen=True)
class Landed:
    """Amounts in units of the bulk power for births spread evenly over each slice.

    ``power`` is (slice, wavelength), ``matrix`` what the film takes, (wavelength, birth slice, landing slice), but for
    light that lands where it was born, and ``ends`` (wavelength, birth slice, end).
    """

    power: Real
    matrix: Real
    ends: Real

    @classmethod
    def empty(cls, slices: int, wavelengths: int) -> "Landed":
        """Return room for some wavelengths."""
        return cls(
            np.empty((slices, wavelengths)),
            np.empty((wavelengths, slices, slices)),
            np.empty((wavelengths, slices, len(ENDS))),
        )

    def put(self, at: Index, part: "Landed") -> None:
        """Take over some wavelengths."""
        self.power[:, at], self.matrix[at], self.ends[at] = part.power, part.matrix, part.ends


def end_amounts(
    waves: Waves,
    responses: Sequence[Response | None],
    halves: tuple[Mirror, Mirror],
    whole: Real,
    *,
    bound: bool,
) -> tuple[Real, Real]:
    """Return what a unit wave that meets the upper, the lower face brings to each end, (end, polarisation, row, node).

    ``whole`` is exp(-2 Im kz d): the lower one is the wave that starts at the film's upper face. Two rows follow the
    ends, ``SEEN_FROM``.
    """
    scene = waves.view.scene
    up, down = halves[0].sent(1.0), halves[1].sent(whole)
    out = []
    net = None if bound else Network(waves, responses)
    for k, (layers, flux) in enumerate(((scene.layers_up, up), (scene.layers_down, down))):
        amounts = np.zeros((len(ENDS) + 2, *up[0].shape))
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
    for k, (folded, sink) in enumerate(zip(net.shells, net.sinks, strict=True)):
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


def gather(whole: Real, owner: Index, part: Real) -> None:
    """Add the rows of ``part`` to their wavelengths."""
    order = np.argsort(owner, kind="stable")
    starts = np.flatnonzero(np.diff(owner[order], prepend=-1))
    if len(starts) == len(owner):
        whole[owner] += part
    else:
        whole[owner[order][starts]] += np.add.reduceat(part[order], starts, axis=0)
