"""Waves and rays over the slices of a film: closed forms of everything that is averaged or summed over a slice.

Depths are counted from the film's upper face in units of 1/k0. A standing wave that decays upwards,
e^(-i kz a) + r e^(i kz a), or downwards, e^(i kz a) + r e^(i kz (2d - a)), has |F|^2 and |F'|^2 made of e^(2 Im kz a),
e^(-2 Im kz a), and the real and imaginary part of e^(2 i Re kz a): their integrals over the slices are all it takes.
"""

from dataclasses import dataclass
from functools import cache
from typing import Any

import numpy as np

from optics.arrays import Complex, Real
from optics.waves.coherent import squared

MOST_FADING = 690.0
"""Exponents beyond which exp overflows; films this dark pass nothing from slice to slice."""


@cache
def gauss(order: int) -> tuple[Real, Real]:
    """Return nodes on (0, 1) and weights of the Gauss-Legendre rule."""
    nodes, weights = np.polynomial.legendre.leggauss(order)
    return 0.5 + 0.5 * nodes, 0.5 * weights


@dataclass(frozen=True)
class Standing:
    """Integrals over slices, (row, slice, node): of both exponentials and of the beat, of which ``beat`` is complex."""

    growing: Real
    fading: Real
    cosine: Real
    sine: Real
    whole: Real  # exp(-2 Im kz d), (row, 1, node)


def standing(edges: Real, kz: Complex) -> Standing:
    """Integrate over the slices between ``edges`` (row, edge), from zero to the thickness; ``kz`` is (row, node)."""
    depth = edges[:, -1, None]
    fade = np.minimum(2.0 * kz.imag, MOST_FADING / depth)[:, None, :]
    turn = 2.0 * kz.real[:, None, :]
    at = edges[:, :, None]
    middle, half = 0.5 * (at[:, 1:] + at[:, :-1]), 0.5 * (at[:, 1:] - at[:, :-1])
    even = _even(edges)
    half = half[:, :1] if even else half
    width = 2.0 * half * _sinhc(fade * half)
    beat = 2.0 * half * np.sinc(turn * half / np.pi)
    if even:
        grown = _powers(np.exp(fade * middle[:, :1]), np.exp(2.0 * fade * half), middle.shape[1])
        waves = _powers(np.exp(1j * turn * middle[:, :1]), np.exp(2j * turn * half), middle.shape[1])
        cosine, sine = beat * waves.real, beat * waves.imag
    else:
        grown = np.exp(fade * middle)
        angle = turn * middle
        cosine, sine = beat * np.cos(angle), beat * np.sin(angle)
    return Standing(width * grown, width / grown, cosine, sine, np.exp(-fade * depth[:, :, None]))


EVEN = 1e-12
"""Relative difference of the slices' widths up to which they are taken as even: then exponentials are powers."""


def _even(edges: Real) -> bool:
    width = np.diff(edges, axis=1)
    return bool((np.ptp(width, axis=1) <= EVEN * edges[:, -1]).all())


def _powers(first: Any, ratio: Any, count: int) -> Any:
    """Return first, first ratio, first ratio^2, ... along the second axis, (row, count, node)."""
    out = np.empty((first.shape[0], count, first.shape[2]), dtype=first.dtype)
    out[:, :1] = first
    for place in range(1, count):
        np.multiply(out[:, place - 1], ratio[:, 0], out=out[:, place])
    return out


def _sinhc(x: Real) -> Real:
    small = x < 1e-2
    if small.all():
        out: Real = 1.0 + x * x / 6.0 * (1.0 + x * x / 20.0)
        return out
    safe = np.where(small, 1.0, x)
    return np.where(small, 1.0 + x * x / 6.0 * (1.0 + x * x / 20.0), np.sinh(safe) / safe)


def from_above(over: Standing, mirror: Complex, plain: Real, slope: Real) -> Real:
    """Return plain |F|^2 + slope |F'/kz|^2 over the slices for the wave that is right above, (row, slice, node).

    ``mirror`` is the reflection of the upper half, (row, node); so are the weights ``plain`` and ``slope``.
    """
    direct, mixed = (plain + slope)[:, None], 2.0 * (plain - slope)
    out: Real = direct * over.growing
    out += (direct * squared(mirror)[:, None]) * over.fading
    out += (mixed * mirror.real)[:, None] * over.cosine
    out -= (mixed * mirror.imag)[:, None] * over.sine
    return out


def from_below(over: Standing, mirror: Complex, twice: Complex, plain: Real, slope: Real) -> Real:
    """Return the same for the wave that is right below; ``twice`` is exp(2 i Re kz d), (row, node)."""
    direct, mixed = (plain + slope)[:, None], 2.0 * (plain - slope)
    beat = mirror * twice * over.whole[:, 0]
    out: Real = direct * over.fading
    out += (direct * (squared(mirror) * over.whole[:, 0] ** 2)[:, None]) * over.growing
    out += (mixed * beat.real)[:, None] * over.cosine
    out += (mixed * beat.imag)[:, None] * over.sine
    return out


def path_means(edges: Real, kz: Complex) -> tuple[Complex, Complex]:
    """Return the means over each slice of exp(2 i kz a) and exp(2 i kz (d - a)), (row, slice, node); Im kz >= 0."""
    if _even(edges):
        step = 2j * kz[:, None, :] * edges[:, 1:2, None]
        mean = _mean_exp(step)
        up: Complex = _powers(mean, np.exp(step), edges.shape[1] - 1)
        return up, up[:, ::-1]
    at = edges[:, :, None]
    depth = at[:, -1:, :]
    mean = _mean_exp(2j * kz[:, None, :] * np.diff(at, axis=1))
    return np.exp(2j * kz[:, None, :] * at[:, :-1]) * mean, np.exp(2j * kz[:, None, :] * (depth - at[:, 1:])) * mean


def _mean_exp(step: Complex) -> Complex:
    step = np.where(step == 0.0, 1e-300, step)
    mean: Complex = np.expm1(step) / step
    return mean
