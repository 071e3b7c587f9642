"""Thin layers: reflection, transmission and absorption against the `tmm` library, and energy in balance."""

import numpy as np
import pytest
from piles import meeting
from tmm_pile import absorptances, solved

from optics.waves.coherent import fold, look, normal_inside, normal_on_axis, normal_outside, outlook_at

AS_TMM = 1e-10  # two programs' rounding, through a few layers
METALS = (0.15 + 3.5j, 0.05 + 4.2j, 1.2 + 7.0j)


def random_media(rng):
    """One to five thin layers, clear, absorbing or metal, between a clear half-space and any other."""
    layers = []
    for _ in range(rng.integers(1, 6)):
        clear, absorbing = rng.uniform(1.2, 3.9), rng.uniform(1.2, 3.9) + 1j * 10 ** rng.uniform(-5, 0)
        index = (clear, absorbing, METALS[rng.integers(3)])[rng.choice(3, p=(0.3, 0.5, 0.2))]
        layers.append((index, rng.uniform(2, 40) if index in METALS else 10 ** rng.uniform(0.5, 2.9)))
    last = (rng.uniform(1, 3.9), rng.uniform(1, 3.9) + 0.3j)[rng.integers(2)]
    return [(rng.uniform(1, 3.9), 0), *layers, (last, 0)]


@pytest.mark.parametrize("seed", range(30))
def test_reflection_transmission_and_absorption_are_those_of_tmm(seed):
    rng = np.random.default_rng(seed)
    media, wavelength = random_media(rng), rng.uniform(350, 1200)
    for q in media[0][0] * rng.uniform(0.0, 0.99, 4):
        met = meeting(wavelength, media, q)
        for at, polarisation in enumerate("sp"):
            theirs = solved(polarisation, media, wavelength, q)
            assert met.back[at].item() == pytest.approx(theirs["R"], abs=AS_TMM)
            assert met.on[at].item() == pytest.approx(theirs["T"], abs=AS_TMM)
            taken = absorptances(polarisation, media, wavelength, q)
            for medium, share in met.taken.items():
                assert share[at].item() == pytest.approx(taken[medium], abs=AS_TMM)


@pytest.mark.parametrize("seed", range(30))
def test_what_comes_in_is_reflected_passed_on_or_taken(seed):
    rng = np.random.default_rng(1000 + seed)
    media = random_media(rng)
    met = meeting(rng.uniform(350, 1200), media, media[0][0] * rng.uniform(0.0, 0.999, 20))
    np.testing.assert_allclose(met.back + met.on + sum(met.taken.values()), 1.0, atol=1e-12)


@pytest.mark.parametrize("root", [normal_inside, normal_on_axis])
def test_normal_wave_numbers_of_layers_decay_away_from_a_source(root):
    eps = np.array([[2.25 + 0j], [2.25 + 0.1j], [-18 + 0.5j]])
    q = np.linspace(0.0, 5.0, 101)[None, :]
    kz = root(eps, q)
    assert kz.imag.min() >= 0.0
    np.testing.assert_allclose(kz * kz, eps - q * q, atol=1e-12)


def test_the_normal_wave_number_of_a_half_space_has_its_cut_straight_above_its_index():
    """Below the axis and to the right of the cut it goes over smoothly from light that runs to light that decays."""
    index = np.array([[1.5 + 0j]])
    angle = np.linspace(-np.pi + 1e-6, 0.5 * np.pi - 1e-6, 400)  # from left of the index, under it, up along its cut
    around = normal_outside(index, index + 0.1 * np.exp(1j * angle)[None, :])
    assert np.abs(np.diff(around[0])).max() < 0.05 * np.abs(around).max()
    assert normal_outside(index, np.array([[1.0 + 0j]])).item() == pytest.approx(np.sqrt(1.25))
    assert normal_outside(index, np.array([[2.0 + 0j]])).item() == pytest.approx(1j * np.sqrt(1.75))
    on_the_cut = normal_outside(index, np.array([[1.5 + 0.1j]])).item()
    just_right = normal_outside(index, np.array([[1.5 + 1e-9 + 0.1j]])).item()
    assert on_the_cut == pytest.approx(just_right, abs=1e-6)


@pytest.mark.parametrize("pairs", [1, 8, 12, 500])
def test_a_pile_is_folded_into_the_mirror_that_it_shows_when_looked_at(pairs):
    dense, rare = (np.full((2, 1, 1), own, dtype=complex) for own in (2.3 + 0.01j, 1.4))
    turns = [np.full((1, 1), np.exp(2j * phase)) for phase in (0.11 + 0.001j, 0.07)]
    layers = [(dense, turns[0]), (rare, turns[1])] * pairs
    own = np.full((2, 1, 1), 2.0 + 0.02j)
    seen = look(layers, outlook_at(rare)).mirror(own)
    np.testing.assert_allclose(fold(layers, rare).reflection(own), seen.reflection, rtol=1e-12)
    assert np.all(np.abs(seen.reflection) < 1.0)
