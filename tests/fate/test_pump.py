"""The pump over depth against position-resolved absorption by the `tmm` library (S. J. Byrnes, arXiv:1603.02720)."""

import numpy as np
import pytest
import tmm
from piles import drawn
from scipy.constants import c, h

from optics.errors import InputError
from optics.fate.pump import pumped

SAME = 1e-8  # relative, at every depth
STACKS = 50
DEPTHS = np.linspace(0.0, 1.0, 21)


def random_pile(seed):
    """Return wavelength, media and film: one to five layers, thin or plates, absorbing or clear.

    Plates absorb along metres of glass with a k that no interface notices: interfaces of plates use the real index
    by convention, and `tmm` the complex one.
    """
    draw = np.random.default_rng(seed)
    count = int(draw.integers(1, 6))
    film = int(draw.integers(1, count + 1))
    layers = []
    for place in range(1, count + 1):
        plate = place != film and draw.random() < 0.4
        n, clear = draw.uniform(1.3, 2.6), draw.random() < 0.3
        k = 10 ** draw.uniform(-10.5, -9.5) if plate else 10 ** draw.uniform(-3, -0.3)
        thickness = 10 ** draw.uniform(8, 9.3) if plate else draw.uniform(10, 800)
        index = n + 1j * k * (place == film or not clear)
        layers.append((index, thickness, "plate") if plate else (index, thickness))
    ends = [(1.0, 0), (draw.uniform(1, 2), 0)]
    if draw.random() < 0.5:
        ends.reverse()
    return draw.uniform(350, 900), [ends[0], *layers, ends[1]], film


def absorption_by_tmm(wavelength_nm, media, film):
    """Return the share of light from the first medium that the film absorbs per unit of its depth, at `DEPTHS`."""
    index = [medium[0] for medium in media]
    thickness = [np.inf, *(medium[1] for medium in media[1:-1]), np.inf]
    kind = ["i", *("i" if "plate" in medium else "c" for medium in media[1:-1]), "i"]
    data = tmm.inc_tmm("s", index, thickness, kind, 0, wavelength_nm)
    profile = tmm.inc_find_absorp_analytic_fn(film, data)
    return np.array([profile.run(thickness[film] * x).real for x in DEPTHS]) * thickness[film]


@pytest.mark.parametrize("seed", range(STACKS))
def test_the_pump_profile_is_that_of_the_tmm_library(seed):
    wavelength, media, film = random_pile(seed)
    drawing = drawn(wavelength, media, film=film)
    from_above = pumped(drawing, from_below=False)
    assert from_above.absorbed * from_above.linear.density(DEPTHS) == pytest.approx(
        absorption_by_tmm(wavelength, media, film), rel=SAME
    )
    from_below = pumped(drawing, from_below=True)
    assert from_below.absorbed * from_below.linear.density(DEPTHS) == pytest.approx(
        absorption_by_tmm(wavelength, media[::-1], len(media) - 1 - film)[::-1], rel=SAME
    )


def test_a_film_that_is_a_plate_is_lit_by_beer_and_lambert_from_both_sides():
    n, k, thickness, wavelength = 2.0, 1e-4, 50_000.0, 500.0
    drawing = drawn(wavelength, [(1, 0), (n + 1j * k, thickness, "plate"), (1.5, 0)])
    found = pumped(drawing, from_below=False)
    optical = 4 * np.pi * k * thickness / wavelength
    first, second = ((n - 1) / (n + 1)) ** 2, ((n - 1.5) / (n + 1.5)) ** 2
    passing = np.exp(-optical)
    entering = (1 - first) / (1 - first * second * passing**2)
    returning = entering * passing * second
    expected = optical * (entering * np.exp(-optical * DEPTHS) + returning * np.exp(-optical * (1 - DEPTHS)))
    assert found.absorbed * found.linear.density(DEPTHS) == pytest.approx(expected, rel=1e-12)
    turned = pumped(drawn(wavelength, [(1.5, 0), (n + 1j * k, thickness, "plate"), (1, 0)]), from_below=True)
    assert turned.linear.density(1 - DEPTHS) == pytest.approx(found.linear.density(DEPTHS), rel=1e-12)


def test_births_by_the_square_follow_the_square_of_the_absorption():
    found = pumped(drawn(532, [(1, 0), (2.4 + 0.3j, 400), (1.5, 0)]), from_below=False)
    x = np.linspace(0, 1, 4001)
    square = found.linear.density(x) ** 2
    assert found.square.density(x) == pytest.approx(square / np.trapezoid(square, x), rel=1e-5)  # trapezoid rule
    assert np.trapezoid(found.linear.density(x), x) == pytest.approx(1.0, abs=1e-6)


def test_carriers_are_the_photons_absorbed_over_the_films_thickness():
    found = pumped(drawn(532, [(1, 0), (2.4 + 0.3j, 400), (1.5, 0)]), from_below=False)
    photons = found.absorbed * 1e-6 / (h * c / 532e-9)  # per cm2 for 1 uJ/cm2
    assert found.carriers_per_cm3 == pytest.approx(photons / 400e-7, rel=1e-12)
    assert found.peak_carriers_per_cm3 == pytest.approx(
        found.carriers_per_cm3 * found.linear.density(np.linspace(0, 1, 1001)).max(), rel=1e-3
    )


def test_a_pump_from_behind_a_metal_is_refused():
    drawing = drawn(532, [(1, 0), (2.4 + 0.3j, 400), (0.05 + 3j, 0)])
    with pytest.raises(InputError, match='side: found "below", where an opaque medium lies'):
        pumped(drawing, from_below=True)
    assert pumped(drawing, from_below=False).absorbed > 0.5
