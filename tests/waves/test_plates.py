"""Plates: piles of panes in closed form, and stacks of plates and coatings against the `tmm` library."""

import numpy as np
import pytest
import tmm
from piles import drawn, scene_of

from optics.fate.reflection import at_normal

EXACT = 1e-12
AS_TMM = 1e-6  # `tmm` gives plates their complex index at their faces, too: terms of their k


def normal(media, *, side=0, film, wavelength_nm=600.0):
    scene = scene_of(drawn(wavelength_nm, media, film=film))
    return at_normal(scene, side, film_is_plate="plate" in media[film])


@pytest.mark.parametrize("panes", [1, 2, 3, 6])
def test_a_pile_of_clear_panes_passes_what_stokes_found(panes):
    """T = (1 - r)/(1 + (2 m - 1) r) for m panes: Stokes, Proc. R. Soc. 11, 545 (1862)."""
    n = 1.5
    face = ((n - 1.0) / (n + 1.0)) ** 2
    pane, gap = (n, 1e6, "plate"), (1.0, 1e6, "plate")
    media = [(1, 0), *([pane, gap] * panes)[:-1], (1, 0)]
    found = normal(media, film=1)
    assert found.transmittance.item() == pytest.approx((1 - face) / (1 + (2 * panes - 1) * face), abs=EXACT)
    assert found.reflectance.item() == pytest.approx(2 * panes * face / (1 + (2 * panes - 1) * face), abs=EXACT)


def test_an_absorbing_pane_passes_the_sum_of_its_series():
    """T = (1 - r)^2 a/(1 - r^2 a^2), R = r (1 + T a): the textbook formula of spectrometry."""
    wavelength, thickness, k = 600.0, 1e6, 3e-7
    passed = np.exp(-4.0 * np.pi * k * thickness / wavelength)
    face = 0.04
    found = normal([(1, 0), (1.5 + 1j * k, thickness, "plate"), (1, 0)], film=1, wavelength_nm=wavelength)
    through = (1 - face) ** 2 * passed / (1 - face**2 * passed**2)
    assert found.transmittance.item() == pytest.approx(through, abs=EXACT)
    assert found.reflectance.item() == pytest.approx(face * (1 + through * passed), abs=EXACT)
    assert found.taken.sum() == pytest.approx(1 - through - face * (1 + through * passed), abs=EXACT)


def random_media(rng):
    """Plates in air with thin layers on and between them, a film among them."""

    def plate():
        return (rng.uniform(1.4, 1.9) + 1e-7j * rng.integers(2), rng.uniform(1e5, 1e6), "plate")

    def thin():
        return (rng.uniform(1.3, 2.6) + 1j * rng.choice([0.0, 0.02]), rng.uniform(5, 300))

    media = [(1, 0), thin(), plate(), thin(), plate(), *[thin() for _ in range(rng.integers(1, 4))], plate(), (1, 0)]
    return media, 5


@pytest.mark.parametrize("side", [0, 1])
@pytest.mark.parametrize("seed", range(20))
def test_reflectance_transmittance_and_absorptances_are_those_of_tmm(seed, side):
    media, film = random_media(np.random.default_rng(seed))
    found = normal(media, side=side, film=film)
    seen = media if side == 0 else media[::-1]
    index = [complex(medium[0]) for medium in seen]
    thickness = [np.inf, *(float(medium[1]) for medium in seen[1:-1]), np.inf]
    coherent = ["i", *("i" if "plate" in medium else "c" for medium in seen[1:-1]), "i"]
    theirs = tmm.inc_tmm("s", index, thickness, coherent, 0.0, 600.0)
    assert found.reflectance.item() == pytest.approx(theirs["R"], abs=AS_TMM)
    assert found.transmittance.item() == pytest.approx(theirs["T"], abs=AS_TMM)
    taken = np.asarray(tmm.inc_absorp_in_each_layer(theirs))[1:-1]
    ours = found.taken[:, 0] if side == 0 else found.taken[::-1, 0]
    np.testing.assert_allclose(ours[1:-1], taken, atol=AS_TMM)
