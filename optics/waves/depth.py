"""Depth profiles of births in closed form: a sheet, exponentials, straight pieces.

x = a/d runs from 0 at the film's upper face to 1 at its lower one, b = d - a. Every profile is a ``Moments`` of
``optics.waves.source`` and returns the means of exp(z a/d) and exp(z b/d): wave and ray optics average over it
without a loop over depths.
"""

from dataclasses import dataclass
from functools import cached_property
from itertools import product

import numpy as np
from numpy.typing import ArrayLike

from optics.arrays import Complex, Real
from optics.waves.source import Wave

NEAR = 0.3
"""Below this size of an exponent (e^w - 1)/w is taken by expm1: beyond it the plain form loses a digit at most."""

SAME = 1e-9
"""Exponentials whose decay constants differ by less than this, relatively, are one and the same."""


@dataclass(frozen=True)
class SheetProfile:
    """All births in one plane at ``at`` = a/d."""

    at: float

    def __call__(self, z: Wave) -> tuple[Wave, Wave]:
        """Return the means of exp(z a/d) and exp(z b/d)."""
        return np.exp(z * self.at), np.exp(z * (1.0 - self.at))


@dataclass(frozen=True)
class Exponentials:
    """Births per unit x = sum of amplitude exp(lower x + upper (1 - x)): exponents at the lower and the upper face.

    ``amplitude``, ``lower`` and ``upper`` are (term,), complex, conjugate terms in pairs, so that the sum is real;
    :func:`exponentials` scales it to integrate to 1. The two exponents of a term, neither above zero, keep strong
    absorption from overflowing.
    """

    amplitude: Complex
    lower: Complex
    upper: Complex

    def __call__(self, z: Wave) -> tuple[Wave, Wave]:
        """Return the means of exp(z a/d) and exp(z b/d)."""
        real = np.isrealobj(z)
        grown = np.exp(z)
        down, up = np.zeros(z.shape, dtype=complex), np.zeros(z.shape, dtype=complex)
        for amplitude, lower, upper in zip(self.amplitude, self.lower, self.upper, strict=True):
            down += amplitude * _between(z, grown, lower, upper)
            up += amplitude * _between(z, grown, upper, lower)
        return (down.real, up.real) if real else (down, up)

    def density(self, x: ArrayLike) -> Real:
        """Return the births per unit x at x = a/d; the mean over the film is 1."""
        x = np.asarray(x, dtype=float)[..., None]
        whole: Real = (self.amplitude * np.exp(self.lower * x + self.upper * (1.0 - x))).sum(axis=-1).real
        return whole

    @property
    def total(self) -> float:
        """Integral over the film."""
        at_zero = np.zeros(1)
        means = [_between(at_zero, at_zero + 1.0, *ends)[0] for ends in zip(self.lower, self.upper, strict=True)]
        return float((self.amplitude * np.array(means)).sum().real)

    def scaled(self, factor: float) -> "Exponentials":
        """Return the profile times a number."""
        return Exponentials(self.amplitude * factor, self.lower, self.upper)

    def squared(self) -> "Exponentials":
        """Return the square of the profile, not scaled: what pairs of carriers give."""
        pairs = list(product(range(len(self.amplitude)), repeat=2))
        one, other = (np.array(each) for each in zip(*pairs, strict=True))
        return gathered(
            self.amplitude[one] * self.amplitude[other],
            self.lower[one] + self.lower[other],
            self.upper[one] + self.upper[other],
        )

    def normal(self) -> "Exponentials":
        """Return the profile scaled to integrate to 1."""
        return self.scaled(1.0 / self.total)


def exponentials(amplitude: ArrayLike, lower: ArrayLike, upper: ArrayLike) -> Exponentials:
    """Return a profile of exponentials scaled to integrate to 1; see `Exponentials`."""
    return gathered(*(np.asarray(each, dtype=complex) for each in (amplitude, lower, upper))).normal()


def decay(optical: float, *, from_below: bool = False) -> Exponentials:
    """Return births that fall as exp(-optical a/d), or with b from below."""
    ends = (0.0, -optical) if from_below else (-optical, 0.0)
    return exponentials([1.0], [ends[0]], [ends[1]])


def gathered(amplitude: Complex, lower: Complex, upper: Complex) -> Exponentials:
    """Return terms with the larger exponent moved into the amplitude and equal exponentials made one.

    Equal ones come in numbers from a square, and each costs its own divisions at every node.
    """
    shift = np.maximum(lower.real, upper.real) + 1j * upper.imag
    amplitude, lower, upper = amplitude * np.exp(shift), lower - shift, upper - shift
    kept: list[int] = []
    sums = amplitude.copy()
    for term, constant in enumerate(lower - upper):
        same = [k for k in kept if abs(lower[k] - upper[k] - constant) <= SAME * (1.0 + abs(constant))]
        if same:
            sums[same[0]] += amplitude[term]
        else:
            kept.append(term)
    return Exponentials(sums[kept], lower[kept], upper[kept])


def _between(z: Real | Complex, grown: Real | Complex, near: complex, far: complex) -> Complex:
    """Return the integral of exp((near + z) x + far (1 - x)) over x from 0 to 1; ``grown`` is exp(z)."""
    gap = np.asarray(z + (near - far), dtype=complex)
    small = np.abs(gap) < NEAR
    out = np.exp(near) * grown - np.exp(far)
    if small.any():
        close = gap[small]
        close = np.where(close == 0.0, 1e-300, close)
        gap = np.where(small, 1.0, gap)
        out[small] = np.exp(far) * np.expm1(close) / close
    whole: Complex = out / gap
    return whole


@dataclass(frozen=True, eq=False)
class Pieces:
    """Births per unit x on straight pieces between ``x``, ascending from 0 to 1; scaled to integrate to 1.

    With p(x) the profile and z not small, partial integration twice leaves one exponential a corner,
    (p e^(zx)/z) from 0 to 1 plus the sum of corners e^(z x_j)/z^2; for small z the power series is used.
    """

    x: Real
    births: Real

    def __call__(self, z: Wave) -> tuple[Wave, Wave]:
        """Return the means of exp(z a/d) and exp(z b/d)."""
        from_above, from_below = self._ways
        return _mean(z, *from_above), _mean(z, *from_below)

    def density(self, x: ArrayLike) -> Real:
        """Return the births per unit x at x = a/d; the mean over the film is 1."""
        return np.asarray(np.interp(np.asarray(x, dtype=float), self.x, self.births))

    @cached_property
    def _ways(self) -> tuple[tuple[Real, Real, Real], tuple[Real, Real, Real]]:
        """Places, births and power means, counted from above and from below."""
        ways = ((self.x, self.births), (1.0 - self.x[::-1], self.births[::-1]))
        first, second = ((x, births, _power_means(x, births)) for x, births in ways)
        return first, second


SERIES_UP_TO = 1.5
"""Size of z up to which the series of 24 powers is used: exact to 1e-17 there, and 1/z^2 costs no digits beyond."""

_POWERS = 24


def _mean(z: Wave, x: Real, births: Real, powers: Real) -> Wave:
    """Return the mean of exp(z x)."""
    small = np.abs(z) < SERIES_UP_TO
    safe = np.where(small, 1.0, z)
    corner = np.diff(np.diff(births) / np.diff(x), prepend=0.0, append=0.0)
    bend = _sum_of_exponentials(safe, x, corner)
    out: Wave = (births[-1] * np.exp(safe) - births[0]) / safe + bend / (safe * safe)
    if small.any():
        out[small] = np.polynomial.polynomial.polyval(z[small], powers)
    return out


def _sum_of_exponentials(z: Wave, x: Real, amounts: Real) -> Wave:
    """Return the sum of amounts exp(z x); on even steps as a polynomial in exp(z step), five times as fast.

    The last step may differ: a table is cut where the film ends.
    """
    step = np.diff(x)
    if len(x) < 4 or np.ptp(step[:-1]) > SAME * step[0]:
        used = amounts != 0.0
        whole: Wave = np.tensordot(amounts[used], np.exp(np.multiply.outer(x[used], z)), axes=1)
        return whole
    even: Wave = np.polynomial.polynomial.polyval(np.exp(z * step[0]), amounts[:-1])
    even += amounts[-1] * np.exp(z)
    return even


def _power_means(x: Real, births: Real) -> Real:
    """Return the means of x^k over k!, k from 0: the coefficients of the mean of exp(z x) in z."""
    nodes, weights = np.polynomial.legendre.leggauss(_POWERS // 2 + 1)  # exact to degree _POWERS + 1
    width = np.diff(x)[:, None]
    at = x[:-1, None] + width * (0.5 + 0.5 * nodes)
    amount = 0.5 * width * weights * np.interp(at, x, births)
    factorial = np.cumprod(np.concatenate([[1.0], np.arange(1.0, _POWERS)]))
    return np.array([(amount * at**k).sum() for k in range(_POWERS)]) / factorial


def pieces(x: ArrayLike, births: ArrayLike) -> Pieces:
    """Return a profile of straight pieces from ``births`` at ``x`` = a/d, ascending from 0 to 1, scaled to 1."""
    x, births = np.asarray(x, dtype=float), np.asarray(births, dtype=float)
    total = float((0.5 * (births[1:] + births[:-1]) * np.diff(x)).sum())
    return Pieces(x, births / total)
