"""Dipoles in a film between two reflecting halves: power densities and the power handed to either half.

Densities are per unit in-plane wave number, in units of the power that the same dipole radiates in the bulk film
material (Chance, Prock & Silbey 1978; Lukosz & Kunz 1977; source terms as in Benisty, Stanley & Mayer 1998).
Reflections are seen from inside the film, s for the electric and p for the magnetic field, so that a perfect
mirror has r_p = +1.
"""

from dataclasses import dataclass
from typing import Any, Protocol, TypeVar

import numpy as np
from scipy.special import exprel

from optics.arrays import Complex, Real
from optics.waves.coherent import squared
from optics.waves.elementary import Crossing, expm1

Wave = TypeVar("Wave", Real, Complex)


class Moments(Protocol):
    """Depth profile of the births: takes z, real or complex, and returns the means of exp(z a/d) and exp(z b/d).

    a and b are the distances to the film's upper and lower face and d is its thickness.
    """

    def __call__(self, z: Wave) -> tuple[Wave, Wave]:
        """Return both means, of the shape and kind of ``z``."""


def uniform(z: Wave) -> tuple[Wave, Wave]:
    """Return the means of exp(z a/d) and exp(z b/d) over births spread evenly through the film."""
    argument: Any = z
    mean: Any = exprel(argument) if np.isrealobj(z) else _complex_exprel(argument)
    return mean, mean


def _complex_exprel(z: Complex) -> Complex:
    out = expm1(z)
    still = z == 0.0
    if still.any():
        z, out = np.where(still, 1.0, z), np.where(still, 1.0, out)
    out /= z
    return out


def first_flight(slant: Wave, moments: Moments) -> Wave:
    """Return 1 - S, the share absorbed before a first flight ends at a face of the film.

    S is the mean of exp(-slant a/d) over the births and both directions, slant = alpha d / cos(theta), continued
    to complex angles (for even births S = (1 - exp(-slant))/slant; Case, de Hoffmann & Placzek 1953).
    """
    up, down = moments(-slant)
    mean = up if up is down else 0.5 * (up + down)
    out: Wave = 1.0 - mean
    return out


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


@dataclass(frozen=True)
class Cavity:
    """The film between its halves at one set of wave numbers: reflections, round trip and its resonance.

    ``up`` and ``down`` are the reflections of the two halves, (polarisation, row, node); ``turn_less_one`` is
    exp(2 i kz d) - 1, (row, node), kept so for thin films.
    """

    film: Film
    q: Any
    kz: Complex
    up: Complex
    down: Complex
    turn_less_one: Complex
    loop: Complex
    gain: Complex  # 1/(1 - loop)
    crossing: Crossing


def cavity(film: Film, q: Any, kz: Complex, up: Complex, down: Complex) -> Cavity:
    """Close the round trip through the film."""
    crossing = Crossing(film.phase * kz.real, film.phase * kz.imag)
    turn_less_one = crossing.turn_less_one()
    loop = up * down
    loop *= 1.0 + turn_less_one
    gain = 1.0 - loop
    np.reciprocal(gain, out=gain)
    return Cavity(film, q, kz, up, down, turn_less_one, loop, gain, crossing)


def density(at: Cavity) -> Complex:
    """Return the complex power density, (row, node), whose real part is the power per unit q."""
    film = at.film
    mean_up, mean_down = _means(at)
    one_way = at.up * mean_up
    one_way += at.down * mean_down
    both = 1.0 + at.loop
    plus = both + one_way
    plus *= at.gain
    minus = both[1]
    minus -= one_way[1]
    minus *= at.gain[1]
    h = film.in_plane
    out: Complex = plus[1]
    out *= at.q * at.q
    out *= 1.5 * (1.0 - h) / film.eps
    out += (0.75 * h) * plus[0]
    out /= at.kz
    minus *= at.kz
    minus *= 0.75 * h / film.eps
    out += minus
    out *= at.q / film.real_index
    return out


def _means(at: Cavity) -> tuple[Complex, Complex]:
    step = 2j * at.film.phase * at.kz
    if at.film.moments is uniform:
        mean = at.turn_less_one / step
        return mean, mean
    return at.film.moments(step)


@dataclass(frozen=True)
class Handed:
    """Net power per unit q that leaves the film's faces, over Re(Z) |1 + r|^2 of that face: the source's part.

    Multiply with the squared field of a unit wave at the face; (polarisation, row, node).
    """

    up: Real
    down: Real


def handed(at: Cavity) -> Handed:
    """Return what the dipoles send towards either face, all passes summed; real ``q``."""
    crossing = at.crossing
    damping = 1.0 + crossing.damping_less_one
    near_up, near_down, beat_up, beat_down = _intensities(at.film, crossing)
    weight = _weights(at)
    # light that goes up comes straight, over a, or by the lower half, over b: the two beat with exp(2 i Re kz b)
    up = _towards(weight, near_up + squared(at.down) * (damping * near_down), at.down, damping * beat_down)
    down = _towards(weight, near_down + squared(at.up) * (damping * near_up), at.up, damping * beat_up)
    return Handed(up, down)


def _intensities(film: Film, crossing: Crossing) -> tuple[Real, Real, Complex, Complex]:
    """Return the means of exp(-2 Im kz a) and of b, and those of exp(2 i Re kz a) and of b."""
    moments, angle, fading = film.moments, crossing.angle, crossing.fading
    if moments is uniform:
        still = fading == 0.0
        near = np.where(still, 1.0, crossing.damping_less_one / np.where(still, 1.0, -2.0 * fading))
        beat = np.empty(angle.shape, dtype=complex)
        # the mean of exp(2 i angle x) is exp(i angle) sin(angle)/angle
        level = angle == 0.0
        over = 1.0 / np.where(level, 1.0, angle)
        np.multiply(crossing.sine_squared, over, out=beat.imag)
        np.multiply(np.where(level, 1.0, crossing.sine_cosine), over, out=beat.real)
        return near, near, beat, beat
    fade_up, fade_down = moments(-2.0 * fading)
    turn: Complex = np.zeros(angle.shape, dtype=complex)
    turn.imag = 2.0 * angle
    beat_up, beat_down = moments(turn)
    return fade_up, fade_down, beat_up, beat_down


def _weights(at: Cavity) -> tuple[Real, Real]:
    """Return what multiplies the direct and the beating part, (polarisation, row, node)."""
    h, gain = at.film.in_plane, squared(at.gain)
    scale = 0.375 * at.q / at.film.real_index
    over = scale / squared(at.kz)
    in_plane = h * scale
    normal = (2.0 * (1.0 - h)) * over * (at.q * at.q)
    direct, beating = np.empty_like(gain), np.empty_like(gain)
    np.multiply(h * over, gain[0], out=direct[0])
    beating[0] = direct[0]
    np.multiply(normal + in_plane, gain[1], out=direct[1])
    np.multiply(normal - in_plane, gain[1], out=beating[1])
    beating *= 2.0
    return direct, beating


def _towards(weight: tuple[Real, Real], direct: Real, mirror: Complex, cross: Complex) -> Real:
    direct *= weight[0]
    beat = mirror.real * cross.real
    beat -= mirror.imag * cross.imag
    beat *= weight[1]
    direct += beat
    return direct
