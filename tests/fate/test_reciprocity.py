"""Light that leaves a film and light that it takes are one.

Wuerfel, J. Phys. C 15, 3967 (1982); Rau, Phys. Rev. B 76, 085303 (2007).

With uniform isotropic births, free_above x P per in-plane wave number q (in units of k0) is

    (A_s + A_p) q / (4 n^2 alpha d),

A the film's absorptance for light from above, n its real index, alpha d = 2 k k0 d; integrated over outside angles
it is the mean absorptance, weighted with cos(theta) n_above^2. The absorptances are those of the `tmm` library,
which knows nothing of dipoles.
"""

import numpy as np
import pytest
import tmm
from piles import amounts, drawn, end_at, panel, pieces, scene_of
from tmm_pile import unpolarised_absorptance

from optics.fate.exits import FREE_ABOVE, FREE_BELOW

MATCHED = 1e-8  # at the same nodes only rounding is left
INTEGRATED = 2e-8  # what the package's own nodes may leave; ours leave 1e-10
STACKS = 200
NODES = 6


def random_stack(rng):
    """A film, thin neighbours that may absorb, outer media up to indices above the film's; light leaves both sides."""

    def layer():
        return (
            rng.uniform(1.3, 3.9) + 1j * rng.choice([0.0, 10 ** rng.uniform(-4, -0.3)]),
            10 ** rng.uniform(0.7, 2.7),
        )

    above = [layer() for _ in range(rng.integers(0, 3))]
    below = [layer() for _ in range(rng.integers(0, 3))]
    film = (rng.uniform(1.4, 3.7) + 1j * 10 ** rng.uniform(-2.5, 0.0), 10 ** rng.uniform(0.7, 3.2))
    first, last = rng.choice([1.0, 1.5, rng.uniform(1.3, 3.9)], 2)
    media = [(first, 0), *above, film, *below, (last, 0)]
    return rng.uniform(350, 1200), media, 1 + len(above)


def taken_times_weight(film, media, wavelength_nm, q):
    """Return what reciprocity demands of the light that leaves on the side where ``media`` begin."""
    index, thickness = complex(media[film][0]), media[film][1]
    optical = 4.0 * np.pi * index.imag * thickness / wavelength_nm
    return unpolarised_absorptance(film, media, wavelength_nm, q) * q / (4.0 * index.real**2 * optical)


@pytest.mark.parametrize("seed", range(STACKS))
def test_light_that_leaves_is_what_tmm_says_the_film_takes_at_every_node(seed):
    wavelength, media, film = random_stack(np.random.default_rng(seed))
    scene = scene_of(drawn(wavelength, media, film=film))
    ends = ((FREE_ABOVE, film, media), (FREE_BELOW, len(media) - 1 - film, media[::-1]))
    for end, place, seen in ends:
        q, weight = panel(0.0, seen[0][0], NODES)
        leaves = end_at(scene, q, end)
        taken = taken_times_weight(place, seen, wavelength, q)
        np.testing.assert_allclose(leaves, taken, rtol=MATCHED)
        assert leaves @ weight == pytest.approx(taken @ weight, rel=MATCHED)


@pytest.mark.parametrize("seed", range(0, STACKS, 20))
def test_shares_that_leave_are_the_mean_of_what_tmm_says_the_film_takes(seed):
    wavelength, media, film = random_stack(np.random.default_rng(seed))
    ends = amounts(drawn(wavelength, media, film=film))
    lines = [complex(index).real for index, _ in (media[0], media[film], media[-1])]
    for end, place, seen in (("free_above", film, media), ("free_below", len(media) - 1 - film, media[::-1])):
        q, weight = pieces(0.0, seen[0][0], lines, 160)
        taken = taken_times_weight(place, seen, wavelength, q) @ weight
        assert ends[end] == pytest.approx(taken, abs=INTEGRATED)


@pytest.mark.parametrize("pairs", [9, 25, 400])
def test_light_that_leaves_through_a_tall_mirror_is_what_tmm_says_the_film_takes(pairs):
    """Thinner layers the more there are; a pile of hundreds neither overflows nor loses what passes it."""
    thin = min(1.0, 12.0 / pairs)
    mirror = [(2.3 + 1e-3j, 76 * thin), (1.45, 121 * thin)] * pairs
    media = [(1.0, 0), *mirror, (2.4 + 0.02j, 180), *mirror[::-1], (1.5, 0)]
    film = 1 + len(mirror)
    scene = scene_of(drawn(700.0, media, film=film))
    for end, place, seen in ((FREE_ABOVE, film, media), (FREE_BELOW, len(media) - 1 - film, media[::-1])):
        q, _ = panel(0.0, seen[0][0], NODES)
        np.testing.assert_allclose(end_at(scene, q, end), taken_times_weight(place, seen, 700.0, q), rtol=MATCHED)


def plates_and_films(rng):
    """A film between thin layers and plates in air, as piles of `piles` and as lists for `tmm.inc_tmm`."""

    def thin():
        return (rng.uniform(1.3, 2.6) + 1j * rng.choice([0.0, 10 ** rng.uniform(-3, -1)]), rng.uniform(5, 200))

    def plate():
        return (rng.uniform(1.4, 1.9) + 1j * rng.choice([0.0, 1e-7]), rng.uniform(1e5, 2e6), "plate")

    film = (rng.uniform(1.6, 2.6) + 1j * 10 ** rng.uniform(-2.5, -0.5), rng.uniform(20, 800))
    above = [[], [plate()], [plate(), thin(), plate()], [thin(), plate()]][rng.integers(4)]
    below = [[plate()], [plate(), plate()], [plate(), thin()]][rng.integers(3)]
    media = [(1, 0), *above, *[thin() for _ in range(rng.integers(2))], film, thin(), *below, (1, 0)]
    return rng.uniform(400, 1000), media, media.index(film)


def taken_through_plates(film, media, wavelength_nm, q):
    index = [complex(medium[0]) for medium in media]
    thickness = [np.inf, *(float(medium[1]) for medium in media[1:-1]), np.inf]
    coherent = ["i", *("i" if "plate" in medium else "c" for medium in media[1:-1]), "i"]
    total = []
    for each in q:
        data = [tmm.inc_tmm(pol, index, thickness, coherent, np.arcsin(each), wavelength_nm) for pol in "sp"]
        total.append(sum(tmm.inc_absorp_in_each_layer(one)[film] for one in data))
    optical = 4.0 * np.pi * index[film].imag * thickness[film] / wavelength_nm
    return np.array(total) * q / (4.0 * index[film].real ** 2 * optical)


THROUGH_PLATES = 2e-6  # `tmm` gives plates their complex index at their faces, too: terms of their k


@pytest.mark.parametrize("seed", range(60))
def test_light_that_leaves_through_plates_is_what_tmm_says_the_film_takes(seed):
    wavelength, media, film = plates_and_films(np.random.default_rng(seed))
    scene = scene_of(drawn(wavelength, media, film=film))
    q, _ = panel(0.0, 1.0, NODES)
    above = taken_through_plates(film, media, wavelength, q)
    np.testing.assert_allclose(end_at(scene, q, FREE_ABOVE), above, rtol=THROUGH_PLATES)
    below = taken_through_plates(len(media) - 1 - film, media[::-1], wavelength, q)
    np.testing.assert_allclose(end_at(scene, q, FREE_BELOW), below, rtol=THROUGH_PLATES)
