"""Fitness of a film's absorption below its gap: does it fall like a tail, or stop on a floor?"""

import numpy as np
from numpy.typing import NDArray

from optics.media.dispersion import Constant
from optics.media.material import Material
from optics.units import energy_eV

Real = NDArray[np.float64]

SLOWEST_TAIL_EV = 0.1
"""A band tail falls by a factor e within this energy or less (common practice, no source: Urbach energies of usable
emitters lie between 10 and 60 meV); what falls more slowly is taken for a floor."""

DEEPEST_FLOOR = 1e-5
"""An extinction below this takes too little of the light in any thin film to matter."""

SHARE_WORTH_A_WORD = 0.01
"""Share of the births that must lie on the floor before a warning is given."""


def floor_onset(wavelength_nm: Real, k: Real) -> float | None:
    """Return the wavelength [nm] from which ln(alpha) stops falling like a tail, or None if it does not.

    Parameters
    ----------
    wavelength_nm, k
        Ascending wavelengths [nm] and extinction, (wavelength,).

    Returns
    -------
    float or None
        The shortest wavelength beyond which the local decay energy dE/d(ln alpha) stays above ``SLOWEST_TAIL_EV``
        to the end, with k above ``DEEPEST_FLOOR`` throughout.
    """
    if len(k) < 3 or (k <= DEEPEST_FLOOR).any():
        usable = np.flatnonzero(k <= DEEPEST_FLOOR)
        if len(k) < 3 or usable[-1] > len(k) - 3:
            return None
        wavelength_nm, k = wavelength_nm[usable[-1] + 1 :], k[usable[-1] + 1 :]
    log_alpha = np.log(k / wavelength_nm)
    steepness = np.diff(log_alpha) / np.diff(energy_eV(wavelength_nm))
    slow = steepness < 1.0 / SLOWEST_TAIL_EV
    if not slow[-1]:
        return None
    steep = np.flatnonzero(~slow)
    first = 0 if not len(steep) else int(steep[-1]) + 1
    return float(wavelength_nm[first])


def floor_warning(name: str, material: Material, wavelength_nm: Real, k: Real, weight: Real) -> str | None:
    """Return a warning where a share of the births worth a word lies on an absorption floor, else None.

    A constant index is the user's own word and is not questioned.
    """
    if isinstance(material.medium, Constant):
        return None
    peak = int(np.argmax(weight))
    onset = floor_onset(wavelength_nm[peak:], k[peak:])
    if onset is None:
        return None
    share = float(weight[wavelength_nm >= onset].sum() / weight.sum())
    if share < SHARE_WORTH_A_WORD:
        return None
    level = float(np.interp(onset, wavelength_nm, k))
    return (
        f'layer "{name}": k stops falling at {onset:.0f} nm (k = {level:.2g}) instead of dying off below the gap; '
        f"{share:.0%} of the births lie beyond, and a floor that a fit left there overstates what the film takes back"
    )
