"""Three readings of one ledger: what counts as kept, out and lost when light is held or guided.

For every photon born, p_r (the film takes it back and makes carriers), p_e (it leaves: light that counts as out) and
p_a (it is lost: absorbed by other layers or plates, absorbed by the film without making carriers, or held where the
reading counts held light as lost); p_r + p_e + p_a = 1.

faces
    Light that leaves through the faces is out, light held in plates or in an outer medium is lost. Guided light runs
    to its end in the film.
wide
    A sample without edges: held light is followed until the film, another layer, a plate or the other face has it.
sphere
    As wide, until the sample's edge; what arrives there is out. (An integrating sphere sees it.)
lost edges
    The same, with what arrives at an edge lost.

Convention: the power P in units of the bulk's, and p_r, depend on where the film's exchange with itself is cut: light
taken back within a wavelength may be counted as never emitted, which lowers both. P (p_e + p_a) does not depend
on it. The bulk-normalised set refers all to emission in the bulk: p_e^b = P p_e, p_a^b = P p_a and
p_r^b = 1 - P (1 - p_r) (Kirchartz, Staub & Rau, ACS Energy Lett. 1, 731 (2016); Rau et al., Phys. Rev. Applied 2,
014013 (2014)); the efficiency that goes with it is the bulk's q, the one that goes with p is
q_stack = P q/(1 - q + P q) (Furno et al., Phys. Rev. B 85, 115205 (2012)). Both give the same external yield.
"""

from dataclasses import dataclass

import numpy as np

from optics.arrays import Real
from optics.fate.ends import PLACES, SampleEnds

SPHERE, LOST_EDGES = "sphere", "lost edges"
READINGS = ("faces", "wide", SPHERE)


@dataclass(frozen=True)
class Reading:
    """One reading, averaged over the photons born.

    Attributes
    ----------
    name
        One of ``READINGS``, or ``LOST_EDGES``.
    p_r, p_e, p_a
        Shares of the photons born.
    rate_factor
        Mean P over the spectrum.
    """

    name: str
    p_r: float
    p_e: float
    p_a: float
    rate_factor: float

    @property
    def bulk(self) -> tuple[float, float, float]:
        """The bulk-normalised set (p_r, p_e, p_a); its p_r may be negative where the stack emits more than the bulk."""
        factor = self.rate_factor
        return 1.0 - factor * (1.0 - self.p_r), factor * self.p_e, factor * self.p_a


def readings(
    ends: SampleEnds, *, births: Real, rate_factor: float, recycling_share: Real, edges_lost: bool = False
) -> tuple[Reading, ...]:
    """Return all readings of a sample, averaged over its births.

    Parameters
    ----------
    ends
        Where light ends.
    births
        Weights of the wavelengths, photons born, sum 1.
    rate_factor
        Mean P over the spectrum.
    recycling_share
        Share of film absorption that makes carriers, (wavelength,).
    edges_lost
        Whether light at edges is lost: adds the reading ``LOST_EDGES``.
    """
    names = (*READINGS, LOST_EDGES) if edges_lost else READINGS
    out = []
    for name in names:
        p_r, p_e, p_a = (float(births @ part) for part in per_wavelength(ends, name, recycling_share))
        out.append(Reading(name, p_r, p_e, p_a, rate_factor))
    return tuple(out)


def per_wavelength(ends: SampleEnds, name: str, recycling_share: Real) -> tuple[Real, Real, Real]:
    """Return p_r, p_e and p_a of one reading, (wavelength,)."""
    sample = name if name in ("faces", "wide") else "edged"
    place = {each: ends.total(sample, each) for each in PLACES}
    film, out = place["to_film"], place["to_free"]
    lost = place["to_layers"] + place["to_outer"] + place["unfinished"]
    if name == "faces":
        lost = lost + np.maximum(ends.missing(sample), 0.0)
    if name == "sphere":
        out = out + place["at_edge"]
    else:
        lost = lost + place["at_edge"]
    return recycling_share * film, out, lost + (1.0 - recycling_share) * film
