"""Dipoles in a film between two reflecting halves: power densities and the power handed to either half.

Densities are per unit in-plane wave number, in units of the power that the same dipole radiates in the bulk film
material (Chance, Prock & Silbey 1978; Lukosz & Kunz 1977; source terms as in Benisty, Stanley & Mayer 1998).
Reflections are seen from inside the film, s for the electric and p for the magnetic field, so that a perfect
mirror has r_p = +1.
"""

from dataclasses import dataclass
from typing import Protocol, TypeVar

import numpy as np
from numpy.typing import NDArray
from scipy.special import exprel

from optics.waves.coherent import squared

Real = NDArray[np.float64]
Complex = NDArray[np.complex128]
Wave = TypeVar("Wave", Real, Complex)


class Moments(Protocol):
    """Depth profile of the births: takes z, real or complex, and returns the means of exp(z a/d) and exp(z b/d).

    a and b are the distances to the film's upper and lower face and d is its thickness.
    """

    def __call__(self, z: Wave) -> tuple[Wave, Wave]:
        """Return both means, of the shape and kind of ``z``."""


def uniform(z: Wave) -> tuple[Wave, Wave]:
    """Return the means of exp(z a/d) and exp(z b/d) over births spread evenly through the film."""
    if np.isrealobj(z):
        mean = exprel(z)
    else:
        z = np.where(z == 0.0, 1e-300, z)
        mean = np.expm1(z) / z
    return mean, mean


def first_flight(slant: Wave, moments: Moments) -> Wave:
    """Return 1 - S, the share absorbed before a first flight ends at a face of the film.

    S is the mean of exp(-slant a/d) over the births and both directions, slant = alpha d / cos(theta), continued
    to complex angles (for even births S = (1 - exp(-slant))/slant; Case, de Hoffmann & Placzek 1953).
    """
    up, down = moments(-slant)
    return 1.0 - 0.5 * (up + down)


@dataclass(frozen=True)
class Film:
    """The emitting film on arrays that broadcast over (row, node); lengths in units of 1/k0."""

    eps: Complex
    index: Complex
    phase: Real  # k0 d
    in_plane: float  # share of in-plane dipoles
    moments: Moments

    @property
    def real_index(self) -> Real:
        """Real part of the index."""
        return self.index.real

    def slant(self, kz: Complex) -> Complex:
        """Return alpha d / cos(theta) with cos(theta) = kz/kt; infinite slants are left to the caller's nodes."""
        out: Complex = 2.0 * self.index.imag * self.phase * self.index / kz
        return out


def density(film: Film, q: Complex, kz: Complex, up: Complex, down: Complex, turn_less_one: Complex) -> Complex:
    """Return the complex power density whose real part is the power per unit q.

    Parameters
    ----------
    film
        The emitting film.
    q, kz
        In-plane and normal wave number in the film, (row, node).
    up, down
        Reflections of the two halves, (polarisation, row, node).
    turn_less_one
        exp(2 i kz d) - 1, (row, node), kept so for thin films.
    """
    mean_up, mean_down = _means(film, kz, turn_less_one)
    loop = up * down
    loop *= 1.0 + turn_less_one
    one_way = up * mean_up
    one_way += down * mean_down
    both = 1.0 + loop
    damp = 1.0 / (1.0 - loop)
    s = (both[0] + one_way[0]) * damp[0]
    p_normal = (both[1] + one_way[1]) * damp[1]
    p_in_plane = (both[1] - one_way[1]) * damp[1]
    h = film.in_plane
    out: Complex = (0.75 * h * s + 1.5 * (1.0 - h) / film.eps * (q * q) * p_normal) / kz
    out += (0.75 * h / film.eps) * kz * p_in_plane
    out *= q / film.real_index
    return out


def _means(film: Film, kz: Complex, turn_less_one: Complex) -> tuple[Complex, Complex]:
    if film.moments is uniform:
        mean = turn_less_one / (2j * film.phase * kz)
        return mean, mean
    return film.moments(2j * film.phase * kz)


@dataclass(frozen=True)
class Handed:
    """Net power per unit q that leaves the film's faces, over Re(Z) |1 + r|^2 of that face: the source's part.

    Multiply with the squared field of a unit wave at the face; (polarisation, row, node).
    """

    up: Real
    down: Real


def handed(film: Film, q: Real, kz: Complex, up: Complex, down: Complex, turn_less_one: Complex) -> Handed:
    """Return what the dipoles send towards either face, all passes summed; real ``q``."""
    damping = np.exp(-2.0 * film.phase * kz.imag)
    loop = 1.0 - up * down * (1.0 + turn_less_one)
    strength = 1.0 / squared(loop)
    near_up, near_down, cross_up, cross_down = _intensities(film, kz, damping)
    return Handed(
        _towards(film, q, kz, strength, near_up + squared(down) * (damping * near_down), down, cross_down),
        _towards(film, q, kz, strength, near_down + squared(up) * (damping * near_up), up, cross_up),
    )


def _intensities(film: Film, kz: Complex, damping: Real) -> tuple[Real, Real, Complex, Complex]:
    """Return the means of exp(-2 Im kz a) and of b, and exp(-2 Im kz d) times those of exp(2 i Re kz a) and of b."""
    fade_up, fade_down = film.moments(-2.0 * film.phase * kz.imag)
    beat_up, beat_down = film.moments(2j * film.phase * kz.real)
    return fade_up, fade_down, damping * beat_up, damping * beat_down


def _towards(film: Film, q: Real, kz: Complex, strength: Real, direct: Real, mirror: Complex, cross: Complex) -> Real:
    beat = 2.0 * (mirror * cross).real
    h = film.in_plane
    scale = 0.375 * q / film.real_index
    out = np.empty_like(direct)
    out[0] = h * scale / squared(kz) * (direct[0] + beat[0])
    out[1] = h * scale * (direct[1] - beat[1])
    out[1] += 2.0 * (1.0 - h) * scale * (q * q) / squared(kz) * (direct[1] + beat[1])
    out *= strength
    return out
