"""What the `tmm` library (S. Byrnes, arXiv:1603.02720) says of a pile of layers: an independent transfer matrix."""

import numpy as np
import tmm


def solved(polarisation, media, wavelength_nm, q):
    """Return R, T and every medium's absorptance for light of in-plane wave number q (in units of k0) from the first.

    Media are (index, thickness in nm), as for `piles.drawn`; the first one is lossless.
    """
    index = [complex(medium[0]) for medium in media]
    thickness = [np.inf, *(float(medium[1]) for medium in media[1:-1]), np.inf]
    angle = np.arcsin(q / index[0].real)
    return tmm.coh_tmm(polarisation, index, thickness, angle, wavelength_nm)


def absorptances(polarisation, media, wavelength_nm, q):
    """Return what each medium takes, the first (reflected light) and the last (all that reaches it) included."""
    return np.asarray(tmm.absorp_in_each_layer(solved(polarisation, media, wavelength_nm, q)))


def unpolarised_absorptance(medium, media, wavelength_nm, q):
    """Return a layer's absorptance, the sum over s and p, at each q."""
    return np.array([sum(absorptances(pol, media, wavelength_nm, each)[medium] for pol in "sp") for each in q])
