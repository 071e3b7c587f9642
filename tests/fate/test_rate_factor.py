"""The rate factor against a second program: plain Fresnel recursion, one q at a time, integrated by scipy.

The same published theory (Chance, Prock & Silbey 1978; Lukosz & Kunz 1977) in its textbook form: amplitudes of
interfaces folded by Airy's formula, the density as written, the path as stated, adaptive quadrature.
"""

import numpy as np
import pytest
from piles import ISOTROPIC, drawn, ledger
from scipy.integrate import quad_vec

AGREE = 3e-8  # the package's tolerance; the other quadrature leaves 1e-11
DIP = 0.5


class Textbook:
    """A film between two piles of layers, in units of the vacuum wave number."""

    def __init__(self, wavelength_nm, media, film, in_plane):
        self.index = [complex(medium[0]) for medium in media]
        self.phase = [2.0 * np.pi * medium[1] / wavelength_nm for medium in media]
        self.film, self.h = film, in_plane
        others = [n for at, n in enumerate(self.index) if at != film and (n * n).real > 0.0]
        self.stretch = max(1.0, *(n.real / self.index[film].real for n in others))

    def normal(self, at, q):
        n = self.index[at]
        if at in (0, len(self.index) - 1):
            return np.exp(0.25j * np.pi) * np.sqrt(-1j * (n - q)) * np.sqrt(n + q)
        return 1j * np.sqrt(q * q - n * n)

    def amplitude(self, pile, q, kz, magnetic):
        """Airy's formula from the outermost interface of a pile inwards; the film is its first medium."""
        normal = [kz, *(self.normal(at, q) for at in pile[1:])]
        slant = [one / (self.index[at] ** 2 if magnetic else 1.0) for at, one in zip(pile, normal, strict=True)]
        r = (slant[-2] - slant[-1]) / (slant[-2] + slant[-1])
        for step in range(len(pile) - 3, -1, -1):
            face = (slant[step] - slant[step + 1]) / (slant[step] + slant[step + 1])
            layer = pile[step + 1]
            r = r * np.exp(2j * normal[step + 1] * self.phase[layer])
            r = (face + r) / (1.0 + face * r)
        return r

    def density(self, q, short):
        """Return the density at q; ``short`` is the film's index less q, which loses its digits where a path ends."""
        kt = self.index[self.film]
        kz = 1j * np.sqrt(-short * (kt + q))
        kr, h = kt.real, self.h
        up, down = list(range(self.film, -1, -1)), list(range(self.film, len(self.index)))
        step = 2j * kz * self.phase[self.film]
        turn, mean = np.exp(step), np.expm1(step) / step
        plus, minus = [], []
        for magnetic in (False, True):
            r_up, r_down = self.amplitude(up, q, kz, magnetic), self.amplitude(down, q, kz, magnetic)
            damp = 1.0 - r_up * r_down * turn
            plus.append((1.0 + (r_up + r_down) * mean + r_up * r_down * turn) / damp)
            minus.append((1.0 - (r_up + r_down) * mean + r_up * r_down * turn) / damp)
        s = 0.75 * q / (kz * kr) * plus[0]
        p = 0.75 * q * kz / (kt**2 * kr) * minus[1]
        return h * (s + p) + (1.0 - h) * 1.5 * q**3 / (kt**2 * kz * kr) * plus[1]

    def rate_factor(self):
        kt, s = self.index[self.film], self.stretch
        kr, k = kt.real, kt.imag

        def dipped(u):
            rest = (1.0 - u) ** 2
            left = 0.5 * np.pi * rest + 1j * DIP * np.sin(np.pi * rest)  # pi/2 - phi
            slope = (0.5 * np.pi + 1j * DIP * np.pi * np.cos(np.pi * rest)) * 2.0 * (1.0 - u)
            short = kt - s * kr + 2.0 * s * kr * np.sin(0.5 * left) ** 2
            return (self.density(s * kr * np.cos(left), short) * s * kr * np.sin(left) * slope).real

        def rising(u):
            t = 1.0 - (1.0 - u) ** 2
            short = kr - s * kr + 1j * k * (1.0 - s) + 1j * s * k * (1.0 - u) ** 2
            return (self.density(s * kr + 1j * s * k * t, short) * 2j * s * k * (1.0 - u)).real

        total = quad_vec(dipped, 0.0, 1.0, epsabs=1e-11, epsrel=0, limit=5000)[0]
        if k:
            total += quad_vec(rising, 0.0, 1.0, epsabs=1e-11, epsrel=0, limit=5000)[0]
        kz = 1j * kt * np.sqrt(s * s - 1.0)
        itself = -0.75 * self.h * kz - 0.25 * self.h * kz**3 / kt**2
        itself -= 1.5 * (1.0 - self.h) * (kz - kz**3 / (3.0 * kt**2))
        return total - itself.real / kr


def random_stack(seed):
    rng = np.random.default_rng(seed)

    def layer():
        return (rng.uniform(1.3, 3.0) + 1j * rng.choice([0.0, 10 ** rng.uniform(-4, -1)]), rng.uniform(5, 300))

    above, below = ([layer() for _ in range(rng.integers(0, 3))] for _ in range(2))
    film = (rng.uniform(1.5, 3.5) + 1j * rng.choice([0.0, 10 ** rng.uniform(-4, 0)]), 10 ** rng.uniform(1, 3.3))
    last = (1.5, 3.7, 0.15 + 3.5j, 2.0 + 0.4j)[rng.integers(4)]
    media = [(1.0, 0), *above, film, *below, (last, 0)]
    return rng.uniform(400, 1000), media, 1 + len(above), rng.choice([0.0, ISOTROPIC, 1.0])


@pytest.mark.parametrize("seed", range(24))
def test_the_rate_factor_is_that_of_a_second_program(seed):
    wavelength, media, film, in_plane = random_stack(seed)
    ours = ledger(drawn(wavelength, media, film=film, in_plane=in_plane)).rate_factor[0]
    assert ours == pytest.approx(Textbook(wavelength, media, film, in_plane).rate_factor(), abs=AGREE)
