"""The ends of all light in a real sample: the ledger's first entries, and where held and guided light goes then."""

from dataclasses import dataclass

import numpy as np

from optics.arrays import Index, Real
from optics.fate import held
from optics.fate.guided import VARIANTS, Along, Scatter, follow_modes, follow_rays
from optics.fate.held import Held
from optics.fate.ledger import Ledger
from optics.fate.scenes import Drawing, scenes
from optics.fate.trips import Ends
from optics.fate.uneven import evened
from optics.fate.wave import Settings
from optics.sample import Sample, at_wavelengths
from optics.waves.scene import Scene

PLACES = ("to_film", "to_layers", "to_free", "to_outer", "at_edge", "unfinished")
"""Where followed light ends: taken by the film, by other layers or plates, out through a face, in an outer medium that
holds it, at the edge, or nowhere (nothing absorbs it and there is no edge)."""

KINDS = ("held", "guided", "scattered")
FIRST = ("reabsorbed", "elsewhere", "free_below", "free_above")
"""Ends met before any light is held or guided."""

SAMPLES = ("faces", "wide", "edged")
"""Held light lost where it enters; a sample without edges; one with."""

PER_CM = 1e-7
"""1/cm in 1/nm."""


@dataclass(frozen=True)
class SampleEnds:
    """Ends per wavelength, shares of the photons born; each array is (place, wavelength) in the order of ``PLACES``.

    Attributes
    ----------
    model
        ``"wave"`` or ``"ray"``.
    rate_factor
        P, (wavelength,).
    first
        Ends of ``FIRST``, light that is neither held nor guided.
    entered, guided
        Shares of held and of guided light on first entry, (wavelength,).
    held, along, scattered
        By sample of ``SAMPLES``: held light, guided light (less what is scattered) and scattered guided light. In
        ``"faces"`` the light held in plates is in no place.
    error
        Estimated numerical error of held light, (wavelength,).
    """

    model: str
    rate_factor: Real
    first: dict[str, Real]
    entered: Real
    guided: Real
    held: dict[str, Real]
    along: dict[str, Real]
    scattered: dict[str, Real]
    error: Real

    def total(self, sample: str, place: str) -> Real:
        """Return all that ends in one of ``PLACES`` in one of ``SAMPLES``, first entries included, (wavelength,)."""
        at = PLACES.index(place)
        out: Real = self.held[sample][at] + self.along[sample][at] + self.scattered[sample][at]
        if place == "to_film":
            out = out + self.first["reabsorbed"]
        if place == "to_layers":
            out = out + self.first["elsewhere"]
        if place == "to_free":
            out = out + self.first["free_above"] + self.first["free_below"]
        return out

    def missing(self, sample: str) -> Real:
        """Return what is in no place: light held in plates, where that counts as lost; rounding elsewhere."""
        out: Real = 1.0 - np.sum([self.total(sample, place) for place in PLACES], axis=0)
        return out


def follow(drawing: Drawing, ledger: Ledger, sample: Sample, settings: Settings, *, model: str) -> SampleEnds:
    """Follow held and guided light of a stack to their ends.

    Parameters
    ----------
    drawing
        The stack.
    ledger
        Its ledger in the same model.
    sample
        Edges and scattering.
    settings
        How finely to integrate.
    model
        ``"wave"`` or ``"ray"``.
    """
    k0 = 2.0 * np.pi / drawing.wavelength_nm
    reach = k0 * sample.to_edge_mm * 1e6
    scatter = _scatter(sample, drawing.wavelength_nm, k0)
    parts: list[tuple[Index, Held]] = []
    along: list[tuple[Index, Along]] = []
    for weight, even in evened(drawing, drawing.uneven[0]) if drawing.uneven else [(1.0, drawing)]:
        for chosen, scene in scenes(even):
            ends = held.follow(scene, settings, reach[chosen], model=model, scattered=sample.scatters)
            parts.append((chosen, held.scaled(ends, weight)))
            along.append((chosen, _along(scene, settings, reach[chosen], scatter.at(chosen), model, weight)))
    whole = held.added(parts, len(k0))
    return _joined(drawing, ledger, whole, _guided_ends(ledger, drawing.film, along, len(k0)), sample, model)


def _along(scene: Scene, settings: Settings, reach: Real, scatter: Scatter, model: str, weight: float) -> Along:
    if model == "ray":
        ways = follow_rays(scene, settings, reach, scatter)
    else:
        ways = follow_modes(scene, reach, scatter)
    return {name: each.times(weight) for name, each in ways.items()}


def _scatter(sample: Sample, wavelength_nm: Real, k0: Real) -> Scatter:
    per_cm = at_wavelengths("guided_scatter_per_cm", sample.guided_scatter_per_cm, wavelength_nm)
    rough = np.ones_like(k0)
    return Scatter(
        per_cm * PER_CM / k0,
        k0 * (sample.rms_nm or 0.0) * rough,
        k0 * (sample.correlation_nm or 1.0) * rough,
    )


def _guided_ends(
    ledger: Ledger, film: int, parts: list[tuple[Index, Along]], count: int
) -> dict[str, tuple[Real, Real]]:
    """Return guided light's ends by sample, (place, wavelength), and what is scattered, shares of births.

    The ledger says what film and other layers take of bound light that nothing disturbs; the ways say what part of
    either is left when an edge or scattering comes first. The film's part is less the first flights that the ledger
    counts as reabsorbed already: below zero where those are cut short.
    """
    elsewhere = ledger.shares["guided_elsewhere"]
    flown = ledger.shares["reabsorbed"] - ledger.taken[0, film]
    bound = ledger.shares["waveguided"] + flown
    ways = {name: np.zeros((5, count)) for name in VARIANTS}
    for chosen, along in parts:
        for name, each in along.items():
            ways[name][:, chosen] += each.stacked()
    clear = ledger.shares["guided_unfinished"] != 0.0
    out = {}
    for sample, name in (("faces", "wide"), ("wide", "wide"), ("edged", "edged")):
        to_film = np.where(clear, 0.0, bound - elsewhere) * _left(ways, name, 0)
        to_others = elsewhere * _left(ways, name, 1)
        rest = bound - to_film - to_others
        other = _without_ways(ways[name][2:], edged=name == "edged")
        edge, scattered, endless = rest * other / other.sum(axis=0)
        places = np.zeros((len(PLACES), count))
        places[PLACES.index("to_film")] = to_film - flown
        places[PLACES.index("to_layers")] = to_others
        places[PLACES.index("at_edge")] = edge
        places[PLACES.index("unfinished")] = endless
        out[sample] = places, scattered
    return out


def _left(ways: dict[str, Real], name: str, which: int) -> Real:
    """Return what is left to a taker when edges or scattering come first; all where no way is known."""
    still = ways["still"][which]
    return np.where(still > 0.0, ways[name][which] / np.where(still > 0.0, still, 1.0), 1.0)


def _without_ways(shares: Real, *, edged: bool) -> Real:
    """Return the shares of edge, scattering and no end, with those of light that no way is known for or left to."""
    out = shares.copy()
    out[0 if edged else 2, shares.sum(axis=0) <= 0.0] = 1.0
    return out


def _joined(
    drawing: Drawing,
    ledger: Ledger,
    whole: Held,
    along: dict[str, tuple[Real, Real]],
    sample: Sample,
    model: str,
) -> SampleEnds:
    shares = ledger.shares
    # light in plates and in outer media, parted by the second integral; their sum stays that of the ledger
    both = shares["substrate"] + shares["cover"] + ledger.taken[1].sum(axis=0)
    in_plates = whole.wide.sum(axis=0) > 0.0
    entered = np.where(in_plates, both - whole.straight.sum(axis=0) / ledger.rate_factor, 0.0)
    straight = both - entered
    held_places = {name: np.zeros((len(PLACES), len(entered))) for name in SAMPLES}
    for name, part in (("wide", whole.wide), ("edged", whole.edged)):
        total = part.sum(axis=0)
        held_places[name] = _places(whole.ends, part, drawing.film) * entered / np.where(total > 0.0, total, 1.0)
    for places in held_places.values():
        places[PLACES.index("to_outer")] += straight
    up = sample.scatter_up_share
    scattered = {name: np.zeros((len(PLACES), len(entered))) for name in SAMPLES}
    if sample.scatters:
        lit = {"faces": whole.scattered_first, "wide": whole.scattered_wide, "edged": whole.scattered_edged}
        for name, (_, amount) in along.items():
            mixed = up * lit[name][0] + (1.0 - up) * lit[name][1]
            scattered[name] = amount * _places(whole.ends, mixed, drawing.film)
    return SampleEnds(
        model=model,
        rate_factor=ledger.rate_factor,
        first={name: shares[name] for name in FIRST} | {"elsewhere": shares["elsewhere"] - ledger.taken[1].sum(axis=0)},
        entered=entered,
        guided=shares["waveguided"],
        held=held_places,
        along={name: places for name, (places, _) in along.items()},
        scattered=scattered,
        error=whole.error / ledger.rate_factor,
    )


def _places(ends: Ends, amounts: Real, film: int) -> Real:
    """Return amounts per end, (end, wavelength), as (place, wavelength)."""
    taken = amounts[: ends.media]
    return np.array(
        [
            taken[film],
            taken.sum(axis=0) - taken[film],
            amounts[ends.free(0)] + amounts[ends.free(1)],
            amounts[ends.kept(0)] + amounts[ends.kept(1)],
            amounts[ends.edge],
            amounts[ends.unfinished],
        ]
    )
