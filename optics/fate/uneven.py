"""A film that is uneven within the spot: the ledger of light from all its thicknesses together."""

from collections.abc import Sequence
from dataclasses import replace

import numpy as np

from optics.arrays import Real
from optics.fate.ledger import Ledger
from optics.fate.scenes import Drawing

FEWEST, MOST = 12, 40
NODES_PER_PHASE = 12.0
WIDEST_SD = 5.9
"""Nodes farther out stand for fewer than 1 in 10^8 births, and the film may not be there."""

Rule = tuple[tuple[float, float], ...]
"""Weights and film thicknesses [nm]."""


def rules(*, thickness_nm: float, sd_nm: float, index: float, wavelength_nm: float) -> tuple[Rule, Rule]:
    """Return Gauss-Hermite quadrature over a normal distribution of thicknesses, and one of half the order.

    Parameters
    ----------
    thickness_nm, sd_nm
        Mean and standard deviation [nm].
    index, wavelength_nm
        The film's largest real index and the shortest wavelength [nm]: fringes 4 pi n sd/wavelength wide in phase set
        the order. Modes that begin at some thickness leave kinks there, so that no order is exact: the difference
        between both rules says how far.
    """
    phase = 4.0 * np.pi * index * sd_nm / wavelength_nm
    order = int(np.clip(np.ceil(FEWEST + NODES_PER_PHASE * phase), FEWEST, MOST))
    fine, coarse = (_rule(each, thickness_nm, sd_nm) for each in (order, order // 2))
    return fine, coarse


def _rule(order: int, mean: float, sd: float) -> Rule:
    nodes, weights = np.polynomial.hermite_e.hermegauss(order)
    kept = np.abs(nodes) < WIDEST_SD
    weights = weights[kept] / weights[kept].sum()
    return tuple((float(w), float(mean + sd * x)) for w, x in zip(weights, nodes[kept], strict=True))


def evened(drawing: Drawing, rule: Rule | None = None) -> list[tuple[float, Drawing]]:
    """Return weights and drawings with one thickness of the film each, by the drawing's finer rule if none is given."""
    parts = []
    for weight, thickness in drawing.uneven[0] if rule is None else rule:
        layers = drawing.thickness_nm.copy()
        layers[drawing.film] = thickness
        parts.append((weight, replace(drawing, thickness_nm=layers, uneven=())))
    return parts


def mean_of(parts: Sequence[tuple[float, Ledger]]) -> Ledger:
    """Return the ledger of patches with these weights taken together.

    Patches give birth in proportion to their weight and rate factor, so that shares are averaged with both.
    """
    births = [weight * ledger.rate_factor for weight, ledger in parts]
    rate: Real = np.sum(births, axis=0)
    ledgers = [ledger for _, ledger in parts]

    def mean(values: Sequence[Real]) -> Real:
        out: Real = np.sum([each * value for each, value in zip(births, values, strict=True)], axis=0) / rate
        return out

    return Ledger(
        rate,
        {name: mean([ledger.shares[name] for ledger in ledgers]) for name in ledgers[0].shares},
        mean([ledger.taken for ledger in ledgers]),
        mean([ledger.closure for ledger in ledgers]),
        {name: mean([ledger.errors[name] for ledger in ledgers]) for name in ledgers[0].errors},
    )


def doubted(fine: Ledger, coarse: Ledger) -> Ledger:
    """Return the finer ledger with its difference from a coarser one added to its errors."""
    errors = {name: error + np.abs(fine.shares[name] - coarse.shares[name]) for name, error in fine.errors.items()}
    return replace(fine, errors=errors)
