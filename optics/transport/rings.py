"""Distributions over the in-plane distance: rings on a logarithmic grid, their projection on a line, exponentials.

A distribution is held as what lies within each radius (its cumulative), so that rings are exact differences.
"""

from collections.abc import Sequence
from functools import cache

import numpy as np

from optics.arrays import Real

FIRST_NM, LAST_NM = 10.0, 1e8
"""The grid runs from 10 nm to 10 cm."""

PER_DECADE = 10

LENGTHS_PER_DECADE = 8
"""Exponentials tried in a fit, a decade of lengths."""

PATIENCE = 1000
"""Steps of a fit for every length tried; few kernels need more than three."""

SPREAD_NODES = 8
"""Nodes over the logarithm of the radius by which a ring is spread when it is projected."""


def edges_nm() -> Real:
    """Return the edges of the rings [nm]; the first ring runs from zero."""
    decades = round(np.log10(LAST_NM / FIRST_NM))
    grid: Real = FIRST_NM * 10.0 ** (np.arange(decades * PER_DECADE + 1) / PER_DECADE)
    return grid


def within_of_exponential(rate: Real, radius: Real) -> Real:
    """Return the share of an exponential exp(-rate r) in radius that lies within ``radius``."""
    out: Real = -np.expm1(-rate * radius)
    return out


def on_line_of_exponential(rate: Real, distance: Real) -> Real:
    """Return the share of the same whose projection on a line through the birth lies within ``distance``.

    An exponential in r becomes K0 on a line: (2/pi) times the integral of K0 from 0 to rate times distance
    (Abramowitz & Stegun 11.1).
    """
    reach = rate * distance
    known, share = _k0_within()
    inside = np.clip(np.log(np.maximum(reach, 1e-300)), known[0], known[-1])
    # below the table the integral is x (1 - ln(x/2) - 0.5772...), of which the slope is all there is to see
    out: Real = np.interp(inside, known, share) * np.minimum(reach / np.exp(known[0]), 1.0)
    return out


@cache
def _k0_within() -> tuple[Real, Real]:
    """Return ln x and (2/pi) times the integral of K0 from 0 to x, fine enough for 1e-7 by straight lines."""
    from scipy.special import iti0k0

    known = np.linspace(np.log(1e-8), np.log(50.0), 12_001)
    share = 2.0 / np.pi * np.asarray(iti0k0(np.exp(known))[1])
    return known, share


def on_line(within: Real, radius: Real) -> Real:
    """Return what lies within ``radius`` once projected on a line through the birth.

    A ring of radius r gives (2/pi) arcsin(x/r) within x; mass is spread over each ring evenly in the logarithm of r.
    """
    nodes, weights = np.polynomial.legendre.leggauss(SPREAD_NODES)
    mass = np.diff(within, prepend=0.0)
    low = np.concatenate([[radius[0] ** 2 / radius[1]], radius[:-1]])
    at = low[:, None] * (radius / low)[:, None] ** (0.5 + 0.5 * nodes)  # (ring, node)
    share = 2.0 / np.pi * np.arcsin(np.minimum(radius[:, None, None] / at, 1.0))
    out: Real = (share @ (0.5 * weights)) @ mass
    return out


def on_disc_of_diffusion(length: Real, radius: Real) -> Real:
    """Return the share within ``radius`` in the diffusion picture, 1 - (r/L) K1(r/L): density K0(r/L)/(2 pi L^2)."""
    from scipy.special import k1

    x = np.minimum(radius / length, 700.0)
    out: Real = 1.0 - np.where(x > 0.0, x * k1(np.where(x > 0.0, x, 1.0)), 1.0)
    return out


def quantile(within: Real, radius: Real, share: float) -> float:
    """Return the radius within which ``share`` of the whole (the last of ``within``) lies; nan where nothing does."""
    whole = within[-1]
    if not whole > 0.0:
        return float("nan")
    at = int(np.searchsorted(within, share * whole))
    if at == 0:
        return float(radius[0] * share * whole / within[0])
    low, high = within[at - 1], within[at]
    part = (share * whole - low) / (high - low)
    return float(radius[at - 1] * (radius[at] / radius[at - 1]) ** part)


def ring_means(radius: Real) -> Real:
    """Return a mean radius of each ring: logarithmic, and half the edge for the first."""
    ratio = radius[1:] / radius[:-1]
    return np.concatenate([[0.5 * radius[0]], np.diff(radius) / np.log(ratio)])


def fitted_exponentials(within: Real, radius: Real) -> tuple[Real, Real, float]:
    """Return weights and lengths of a non-negative sum of exponentials fitted to a cumulative, and the largest miss.

    Parameters
    ----------
    within
        Share within each radius.
    radius
        Ascending radii, any unit; lengths come in the same.

    Returns
    -------
    weights, lengths, miss
        Share within r is about the sum of weight (1 - exp(-r/length)); ``miss`` is the largest difference on the grid.
    """
    from scipy.optimize import nnls

    decades = np.log10(radius[-1] / radius[0]) + 2.0
    tried = 0.1 * radius[0] * 10.0 ** np.linspace(0.0, decades, int(np.ceil(decades * LENGTHS_PER_DECADE)) + 1)
    if not within[-1] > 0.0:
        return np.zeros(0), np.zeros(0), 0.0
    base = within_of_exponential(1.0 / tried, radius[:, None])
    weights, _ = nnls(base, within, maxiter=PATIENCE * len(tried))
    lengths, weights = _merged(tried, weights)
    weights, _ = nnls(within_of_exponential(1.0 / lengths, radius[:, None]), within, maxiter=PATIENCE * len(tried))
    kept = weights > 1e-9 * within[-1]
    weights, lengths = weights[kept], lengths[kept]
    miss = np.abs(within_of_exponential(1.0 / lengths, radius[:, None]) @ weights - within).max()
    return weights, lengths, float(miss)


def _merged(lengths: Real, weights: Real) -> tuple[Real, Real]:
    """Join pairs of neighbouring lengths, which stand for one between them, and leave longer runs alone."""
    used = np.flatnonzero(weights > 0.0)
    runs: Sequence[Real] = np.split(used, np.flatnonzero(np.diff(used) > 1) + 1)
    out: list[tuple[float, float]] = []
    for run in runs:
        if len(run) == 2:
            out.append((float(np.exp(np.average(np.log(lengths[run]), weights=weights[run]))), weights[run].sum()))
        else:
            out += [(float(lengths[i]), float(weights[i])) for i in run]
    length, weight = np.array(out).T
    return length, weight
