"""The absorption edge of a table: how fast it falls below the gap, and where it stops falling on a floor."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from optics.arrays import Real
from optics.media.dispersion import Joined, Medium, Tabulated
from optics.units import absorption_per_cm, energy_eV, wavelength_nm

__all__ = ["DEEPEST_FLOOR", "SLOWEST_TAIL_EV", "Floor", "find_floor", "log_slope", "rows_of"]


SLOWEST_TAIL_EV = 0.1
"""A band tail falls by a factor e within this energy or less (common practice, no source: Urbach energies of usable
emitters lie between 10 and 60 meV); what falls more slowly is taken for a floor."""

DEEPEST_FLOOR = 1e-5
"""An extinction below this takes too little of the light in any thin film to matter."""

LEAST_FALL = 0.3
"""A stretch counts as part of the edge when the absorption falls by this much on it, as a logarithm; wiggles of a noisy
floor fall by less once they are averaged over `WINDOW_EV`."""

MOST_FALL = 2.5
"""A floor falls by less than this over all its length, as a logarithm (a factor 12); an indirect gap that is cut off
high up falls slowly too, but by orders of magnitude."""

SHORTEST_FLOOR_EV = 0.015  # about the energy of a good tail: less cannot be told from its end
STEP_EV = 0.001
WINDOW_EV = 0.024  # slopes are averaged over about kT, so that rows 1 nm apart and their noise do not matter
SPAN_EV = 20.0  # how far above the red end an edge is looked for
TINY_PER_CM = 1e-9  # stands for no absorption in logarithms


@dataclass(frozen=True)
class Floor:
    """An absorption that stops falling below the gap.

    Parameters
    ----------
    onset_nm
        Wavelength [nm] at which it stops falling like a tail.
    k
        Extinction there.
    decay_meV
        Energy [meV] over which the floor itself falls by a factor e, infinite when it does not.
    steepest_nm, steepest_meV
        Where the edge above falls fastest [nm], and the energy [meV] over which it falls by a factor e there.
    """

    onset_nm: float
    k: float
    decay_meV: float
    steepest_nm: float
    steepest_meV: float


def rows_of(medium: Medium) -> tuple[Real, Real] | None:
    """Return wavelengths [nm] and k of a medium's own table, None when its k is in none."""
    table = medium.k_from if isinstance(medium, Joined) else medium
    return (table.wavelength_nm, table.k) if isinstance(table, Tabulated) else None


def log_slope(wavelengths_nm: Real, k: Real, *, window_eV: float = WINDOW_EV) -> tuple[Real, Real, Real]:
    """Return even energies [eV], ln(alpha [1/cm]) on them and its slope [1/eV].

    Parameters
    ----------
    wavelengths_nm, k
        A table in ascending wavelength, (row,); ln(alpha) is taken as straight in energy between rows.
    window_eV
        Width [eV] over which a straight line is fitted for the slope (Savitzky & Golay, Anal. Chem. 36, 1627, 1964).
    """
    from scipy.signal import savgol_filter

    rows_eV = energy_eV(wavelengths_nm)[::-1]
    log_alpha = np.log(np.maximum(absorption_per_cm(k, wavelengths_nm), TINY_PER_CM))[::-1]
    last = min(float(rows_eV[-1]), float(rows_eV[0]) + SPAN_EV)
    energy = np.linspace(rows_eV[0], last, max(2, round((last - rows_eV[0]) / STEP_EV) + 1))
    value = np.interp(energy, rows_eV, log_alpha)
    step = energy[1] - energy[0]
    points = min(2 * round(window_eV / step / 2) + 1, 2 * ((energy.size - 1) // 2) + 1)
    if points < 3:
        return energy, value, np.gradient(value, step)
    return energy, value, np.asarray(savgol_filter(value, points, 1, deriv=1, delta=step))


def find_floor(wavelengths_nm: Real, k: Real) -> Floor | None:
    """Return the floor on which the absorption edge of a table ends, or None when there is none.

    The edge is the stretch furthest to the red on which ln(alpha) falls faster than ``SLOWEST_TAIL_EV`` allows, by
    ``LEAST_FALL`` or more; the floor is what lies beyond, if it is no shorter than ``SHORTEST_FLOOR_EV``, falls by
    no more than ``MOST_FALL``, and absorbs more than ``DEEPEST_FLOOR``.

    Parameters
    ----------
    wavelengths_nm, k
        A table in ascending wavelength [nm], (row,).
    """
    if len(k) < 4:
        return None
    energy, value, slope = log_slope(wavelengths_nm, np.maximum(k, 0.0))
    stretch = _lowest_stretch(slope >= 1.0 / SLOWEST_TAIL_EV, value)
    if stretch is None:
        return None
    low, high = stretch
    length = float(energy[low] - energy[0])
    onset_nm = float(wavelength_nm(energy[low]))
    k_onset = float(np.interp(onset_nm, wavelengths_nm, k))
    fall = float(value[low] - value[0])
    if length < SHORTEST_FLOOR_EV or k_onset <= DEEPEST_FLOOR or fall > MOST_FALL:
        return None
    steepest = low + int(np.argmax(slope[low : high + 1]))
    return Floor(
        onset_nm=onset_nm,
        k=k_onset,
        decay_meV=1e3 * length / fall if fall > 0.0 else float("inf"),
        steepest_nm=float(wavelength_nm(energy[steepest])),
        steepest_meV=1e3 / float(slope[steepest]),
    )


def _lowest_stretch(steep: NDArray[np.bool_], value: Real) -> tuple[int, int] | None:
    """Return first and last place of the lowest run of steep places that falls by enough."""
    edges = np.flatnonzero(np.diff(np.concatenate([[False], steep, [False]]).astype(np.int8)))
    for start, stop in zip(edges[::2], edges[1::2], strict=True):
        if value[stop - 1] - value[start] >= LEAST_FALL:
            return int(start), int(stop) - 1
    return None
