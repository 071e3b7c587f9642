"""The ledger: shares of the photons born at each wavelength, and which layer takes what."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from optics.arrays import Index, Mask, Real
from optics.fate.exits import COVER, FREE_ABOVE, FREE_BELOW, SUBSTRATE, Layout

ENDS = ("reabsorbed", "waveguided", "substrate", "cover", "free_below", "free_above", "elsewhere")
"""The ends a photon can meet; their shares add to one."""

GUIDED = ("guided_reabsorbed", "guided_elsewhere", "guided_unfinished")
"""The parts of ``waveguided``."""

SHARES = (*ENDS, "trapped", *GUIDED)
"""Every share that the ledger holds."""

ZONES = ("open", "held", "guided")


@dataclass(frozen=True)
class Account:
    """Integrals from which a ledger is drawn up, in units of the bulk power; (…, wavelength).

    Attributes
    ----------
    power
        All that is radiated (the rate factor).
    zone
        Quantities of the open zone in the order of ``Layout``.
    bound_first_flight
        What the film takes in the bound zone before a first flight ends.
    bound_taken
        What each medium but the film takes in the bound zone, (medium, wavelength).
    has_bound
        Where a bound zone exists.
    unfinished
        Where nothing in the group absorbs, so that guided light never ends.
    miss
        Open-zone power plus bound-zone power, on other paths than that of ``power``, less ``power``.
    path_error, open_error, guided_error
        Estimated numerical errors, in units of the bulk power: of the power and the first flights (what ``miss``
        shows included), of the open zone, and of what is taken in the bound zone.
    """

    power: Real
    zone: Real
    bound_first_flight: Real
    bound_taken: Real
    has_bound: Mask
    unfinished: Mask
    miss: Real
    path_error: Real
    open_error: Real
    guided_error: Real

    def at(self, which: Index) -> "Account":
        """Return the account of some wavelengths."""
        return Account(**{name: getattr(self, name)[..., which] for name in Account.__dataclass_fields__})


def merge(parts: Sequence[tuple[Index, Account]], wavelengths: int) -> Account:
    """Join accounts of some wavelengths each into one of all."""
    fields = {}
    for name in Account.__dataclass_fields__:
        first = getattr(parts[0][1], name)
        whole = np.zeros((*first.shape[:-1], wavelengths), dtype=first.dtype)
        for chosen, part in parts:
            whole[..., chosen] = getattr(part, name)
        fields[name] = whole
    return Account(**fields)


def replaced(whole: Account, at: Index, part: Account, which: Mask) -> Account:
    """Return ``whole`` with the wavelengths ``at`` taken from those of ``part`` that ``which`` marks."""
    fields = {}
    for name in Account.__dataclass_fields__:
        fields[name] = getattr(whole, name).copy()
        fields[name][..., at] = getattr(part, name)[..., which]
    return Account(**fields)


@dataclass(frozen=True)
class Ledger:
    """Shares per wavelength; ``taken`` is (zone, medium, wavelength) in the order of ``ZONES``."""

    rate_factor: Real
    shares: dict[str, Real]
    taken: Real
    closure: Real
    errors: dict[str, Real]

    @property
    def error(self) -> Real:
        """Largest estimated error of any share, (wavelength,)."""
        worst: Real = np.max(list(self.errors.values()), axis=0)
        return worst


def draw_up(account: Account, *, film: int, walls: Sequence[int]) -> Ledger:
    """Turn integrals into shares.

    Parameters
    ----------
    account
        The integrals.
    film
        Position of the film.
    walls
        Positions of outer media and plates; what an absorbing one takes of bound light counts as elsewhere.
    """
    zone = account.zone
    media = len(account.bound_taken)
    layout = Layout(media)
    taken = np.zeros((3, media, zone.shape[1]))
    taken[0] = zone[layout.open(0) : layout.open(media)]
    taken[1] = zone[layout.held(0) : layout.held(media)]
    rest = account.power - zone[layout.power]
    taken[0, film] += np.where(account.has_bound, 0.0, rest)
    bound = np.where(account.has_bound, rest, 0.0)
    guided = account.bound_taken.copy()
    for medium in walls:
        taken[0, medium] += guided[medium]
        bound -= guided[medium]
        guided[medium] = 0.0
    guided_elsewhere = guided.sum(axis=0)
    waveguided = bound - account.bound_first_flight
    taken[2] = guided
    taken[2, film] = np.where(account.unfinished, 0.0, bound - guided_elsewhere)
    others = np.arange(media) != film
    amounts = {
        "reabsorbed": taken[0, film] + account.bound_first_flight,
        "waveguided": waveguided,
        "substrate": zone[layout.end(SUBSTRATE)],
        "cover": zone[layout.end(COVER)],
        "free_below": zone[layout.end(FREE_BELOW)],
        "free_above": zone[layout.end(FREE_ABOVE)],
        "elsewhere": taken[0][others].sum(axis=0) + taken[1].sum(axis=0),
        "guided_reabsorbed": np.where(account.unfinished, 0.0, waveguided - guided_elsewhere),
        "guided_elsewhere": guided_elsewhere,
        "guided_unfinished": np.where(account.unfinished, waveguided, 0.0),
    }
    amounts["trapped"] = amounts["reabsorbed"] + amounts["waveguided"]
    return Ledger(
        account.power,
        {name: amounts[name] / account.power for name in SHARES},
        taken / account.power,
        account.miss / account.power,
        {name: error / np.abs(account.power) for name, error in _errors(account, amounts).items()},
    )


def _errors(account: Account, amounts: dict[str, Real]) -> dict[str, Real]:
    """Return the estimated error of every share times the power: that of its own integrals and of the power."""
    path, zone, guided = account.path_error, account.open_error, account.guided_error
    own = dict.fromkeys(ENDS, zone)
    own |= {"reabsorbed": zone + path, "waveguided": zone + path, "trapped": zone + path}
    own |= {"guided_reabsorbed": zone + path + guided, "guided_elsewhere": guided, "guided_unfinished": zone + path}
    return {name: own[name] + np.abs(amounts[name] / account.power) * path for name in SHARES}
