"""Whether n and k of a table belong together: Kramers-Kronig consistency."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from optics.arrays import Real
from optics.units import energy_eV, wavelength_nm

__all__ = ["METHOD", "Consistency", "kramers_kronig", "transform"]


METHOD = "multiply subtractive Kramers-Kronig (Palmer, Williams & Budde, Appl. Opt. 37, 2660, 1998), 3 anchors"
ANCHORS = 3
MARGIN = 0.05  # of the span of energies, at either end: what lies just outside the table weighs most there
POINTS = 241  # energies at which n is compared
FINER = 4  # k is read so many times finer than its rows, by the same monotone cubics as everywhere
BEYOND = 20.0  # above the blue end k is taken to fall as a power of energy, over so many times its energy
POWERS = (3.0, 1.0, 6.0)  # the first counts, the others say how much hangs on it
SHORTEST = 20  # rows: fewer cannot be transformed


@dataclass(frozen=True)
class Consistency:
    """How n follows from k.

    Parameters
    ----------
    wavelength_nm
        Where they were compared [nm], ascending.
    n_table, n_from_k
        The table's n, and the n that its k implies.
    rms, worst
        Root mean square and largest difference of n.
    worst_nm
        Where it is largest [nm].
    doubt
        How much n, in root mean square, hangs on what is supposed beyond the blue end.
    """

    wavelength_nm: Real
    n_table: Real
    n_from_k: Real
    rms: float
    worst: float
    worst_nm: float
    doubt: float


def kramers_kronig(wavelengths_nm: Real, n: Real, k: Real) -> Consistency | None:
    """Compare a table's n with the n that its k implies; None for a table too short for that.

    n(E) - 1 is (2/pi) P int E' k/(E'^2 - E^2) dE'. A table ends, so its own integral lacks what absorbs outside. With
    anchors E_j at which n is taken as known, the integrand falls by a factor (E^2 - E_j^2)/(E'^2 - E_j^2) for each, and
    what lies outside matters little; by partial fractions this is the same as adding to the table's own integral the
    polynomial in E^2 that makes n right at the anchors, which is how it is computed. Beyond its ends k is continued
    without a step, to zero at zero energy and as 1/E^3 to the blue, so that the integral stays finite there; the same
    with 1/E and 1/E^6 says how much hangs on that.

    Parameters
    ----------
    wavelengths_nm, n, k
        A table in ascending wavelength [nm], (row,).
    """
    if len(k) < SHORTEST:
        return None
    from scipy.interpolate import PchipInterpolator

    rows = energy_eV(wavelengths_nm)[::-1]
    first, last = float(rows[0]), float(rows[-1])
    asked = np.linspace(first + MARGIN * (last - first), last - MARGIN * (last - first), POINTS)
    known, curve = (PchipInterpolator(rows, column[::-1]) for column in (n, k))
    implied, *others = (_implied(known, *_continued(rows, curve, power), asked) for power in POWERS)
    table = known(asked)
    off = implied - table
    worst = int(np.argmax(np.abs(off)))
    return Consistency(
        wavelength_nm=wavelength_nm(asked)[::-1],
        n_table=table[::-1],
        n_from_k=implied[::-1],
        rms=float(np.sqrt(np.mean(off**2))),
        worst=float(abs(off[worst])),
        worst_nm=float(wavelength_nm(asked[worst])),
        doubt=max(float(np.sqrt(np.mean((other - implied) ** 2))) for other in others),
    )


def transform(energy_eV: Real, k: Real, asked_eV: Real) -> Real:
    """Return 1 + (2/pi) P int E' k/(E'^2 - E^2) dE' for k that is straight between energies, zero outside.

    Exact for such k. An energy asked for must not be the first or last one unless k is zero there.

    Parameters
    ----------
    energy_eV, k
        Ascending energies [eV] and extinction, (node,).
    asked_eV
        Where n is wanted [eV], (point,).
    """
    slope = np.diff(k) / np.diff(energy_eV)
    level = k[:-1] - slope * energy_eV[:-1]
    total = np.empty_like(asked_eV)
    tiny = 1e-12 * float(energy_eV[-1])  # an energy on a node: its two logarithms cancel, and must not be infinite
    for place, energy in enumerate(asked_eV):
        near = np.log(np.maximum(np.abs(energy_eV - energy), tiny))
        far = np.log(energy_eV + energy)
        pieces = 2.0 * slope * np.diff(energy_eV)
        pieces += (level + slope * energy) * np.diff(near) + (level - slope * energy) * np.diff(far)
        total[place] = pieces.sum()
    return np.asarray(1.0 + total / np.pi)


def _implied(known: Callable[[Real], Real], grid: Real, k: Real, asked: Real) -> Real:
    """Return the n that k implies, made right at the anchors by the n that is known."""
    anchors = _anchors(float(asked[0]), float(asked[-1]))
    own = transform(grid, k, np.concatenate([asked, anchors]))
    missing = known(anchors) - own[asked.size :]
    return np.asarray(own[: asked.size] + _lagrange(anchors**2, missing, asked**2))


def _continued(rows: Real, curve: Callable[[Real], Real], power: float) -> tuple[Real, Real]:
    """Return k on energies finer than the rows, continued to zero energy and far into the blue."""
    steps = np.linspace(0.0, 1.0, FINER, endpoint=False)
    inside = np.append((rows[:-1, None] + np.diff(rows)[:, None] * steps).ravel(), rows[-1])
    values = np.maximum(curve(inside), 0.0)
    blue = rows[-1] * np.geomspace(1.0, BEYOND, 200)[1:]
    energy = np.concatenate([[0.0], inside, blue])
    return energy, np.concatenate([[0.0], values, values[-1] * (rows[-1] / blue) ** power])


def _anchors(first: float, last: float) -> Real:
    """Return the anchors: Chebyshev's points in E^2, which keep the polynomial small between them."""
    turns = np.cos(np.pi * (np.arange(ANCHORS) + 0.5) / ANCHORS)
    low, high = first**2, last**2
    return np.asarray(np.sqrt(0.5 * (low + high) + 0.5 * (high - low) * turns))


def _lagrange(nodes: Real, values: Real, asked: Real) -> Real:
    total = np.zeros_like(asked)
    for place, (node, value) in enumerate(zip(nodes, values, strict=True)):
        others = np.delete(nodes, place)
        total += value * np.prod((asked[:, None] - others) / (node - others), axis=1)
    return total
