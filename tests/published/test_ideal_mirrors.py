"""Dipoles near ideal mirrors: closed forms.

One mirror: Drexhage, Prog. Opt. 12, 163 (1974); Chance, Prock & Silbey, Adv. Chem. Phys. 37, 1 (1978).
Two mirrors: Milonni & Knight, Opt. Commun. 9, 119 (1973).
"""

import numpy as np
import pytest
from piles import drawn, ledger, scene_of

from optics.fate import wave

WAVELENGTH_NM = 600.0
MIRROR = 1e8j  # an index of this size reflects all but about 1e-8 of the field
MIRROR_ERROR = 1e-7
ONE_MIRROR = {  # distance over wavelength: normal, in-plane dipole; the closed forms, evaluated apart
    0.1: (1.85073648104, 0.290128147561),
    0.25: (1.30396355093, 1.15198177546),
    1.0: (0.981002278067, 0.990501139034),
}
TWO_MIRRORS = {0.75: (1.0, 13.0 / 9.0), 0.3: (2.5, 0.0)}  # cavity length over wavelength, births at the centre


def born_at(fraction):
    """Return births at one depth, a fraction of the film's thickness below its upper face."""
    return lambda z: (np.exp(z * fraction), np.exp(z * (1.0 - fraction)))


@pytest.mark.parametrize("side", ["below", "above"])
@pytest.mark.parametrize("distance", ONE_MIRROR)
def test_one_ideal_mirror_changes_the_rate_as_drexhage_found(distance, side):
    media = [(1, 0), (1, distance * WAVELENGTH_NM), (MIRROR, 0)]
    media, depth = (media, 0.0) if side == "below" else (media[::-1], 1.0)
    for in_plane, expected in zip((0.0, 1.0), ONE_MIRROR[distance], strict=True):
        found = ledger(drawn(WAVELENGTH_NM, media, in_plane=in_plane, moments=born_at(depth)))
        assert found.rate_factor[0] == pytest.approx(expected, abs=MIRROR_ERROR)


@pytest.mark.parametrize("distance", ONE_MIRROR)
def test_the_numbers_are_those_of_the_closed_forms(distance):
    x = 4.0 * np.pi * distance
    normal = 1.0 - 3.0 * (np.cos(x) / x**2 - np.sin(x) / x**3)
    in_plane = 1.0 - 1.5 * (np.sin(x) / x + np.cos(x) / x**2 - np.sin(x) / x**3)
    assert (normal, in_plane) == pytest.approx(ONE_MIRROR[distance], rel=1e-10)


@pytest.mark.parametrize("length", TWO_MIRRORS)
def test_two_ideal_mirrors_change_the_rate_at_their_centre(length):
    """Light of normal dipoles fills the cavity's TM0 mode, which runs along the film's own light line: just there the
    rate factor ends, so the path is led past it."""
    media = [(MIRROR, 0), (1, length * WAVELENGTH_NM), (MIRROR, 0)]
    for in_plane, expected in zip((0.0, 1.0), TWO_MIRRORS[length], strict=True):
        scene = scene_of(drawn(WAVELENGTH_NM, media, in_plane=in_plane, moments=born_at(0.5)))
        beyond_the_mode = np.array([1.5])
        found = wave.dip(scene, beyond_the_mode, wave.Settings()).values[0, 0]
        assert found == pytest.approx(expected, abs=MIRROR_ERROR)


def test_births_spread_through_a_film_on_a_mirror_feel_the_mean_of_the_closed_form():
    thickness = 0.8  # of a wavelength
    distance, weight = np.polynomial.legendre.leggauss(40)
    x = 4.0 * np.pi * thickness * 0.5 * (1.0 + distance)
    in_plane = 1.0 - 1.5 * (np.sin(x) / x + np.cos(x) / x**2 - np.sin(x) / x**3)
    found = ledger(drawn(WAVELENGTH_NM, [(1, 0), (1, thickness * WAVELENGTH_NM), (MIRROR, 0)], in_plane=1.0))
    assert found.rate_factor[0] == pytest.approx(0.5 * weight @ in_plane, abs=MIRROR_ERROR)
