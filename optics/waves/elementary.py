"""Roots and exponentials of complex arrays from real functions.

NumPy runs real square roots, exponentials and tangents several numbers at a time and complex functions one by one: the
same digits come in a third of the time.
"""

import numpy as np

from optics.arrays import Complex, Real

NO_ROOT = 1e-300
"""Keeps the root of zero from being zero, which is divided by."""


def upper_root(z: Complex) -> Complex:
    """Return the square root with Im >= 0; of a positive number the positive one, of zero one too small to count."""
    larger = np.abs(z.real)
    larger += np.abs(z)
    larger *= 0.5
    larger += NO_ROOT
    np.sqrt(larger, out=larger)
    smaller = 0.5 * z.imag
    smaller /= larger
    right = z.real >= 0.0
    out = np.empty_like(z)
    out.real = np.where(right, np.copysign(larger, z.imag), smaller)
    out.imag = np.where(right, np.abs(smaller), larger)
    return out


def root(z: Complex) -> Complex:
    """Return the principal square root, Re >= 0."""
    turned = upper_root(-z)
    out = np.empty_like(turned)
    out.real = turned.imag
    np.negative(turned.real, out=out.imag)
    return out


def turn(depth: Real | float, kz: Complex) -> Complex:
    """Return exp(2 i kz depth)."""
    tangent = np.tan(depth * kz.real)
    squared = tangent * tangent
    scale = np.exp((-2.0 * depth) * kz.imag)
    scale /= 1.0 + squared
    out = np.empty(scale.shape, dtype=complex)
    np.multiply(1.0 - squared, scale, out=out.real)
    scale *= 2.0
    np.multiply(tangent, scale, out=out.imag)
    return out


def expm1(z: Complex) -> Complex:
    """Return exp(z) - 1 without cancellation."""
    return Crossing(0.5 * z.imag, -0.5 * z.real).turn_less_one()


class Crossing:
    """One crossing of a layer: ``angle`` Re kz d, ``fading`` Im kz d, and functions of the two."""

    def __init__(self, angle: Real, fading: Real) -> None:
        self.angle, self.fading = angle, fading
        tangent = np.tan(angle)
        square = tangent * tangent
        scale = 1.0 / (1.0 + square)
        self.sine_squared = square * scale
        self.sine_cosine = tangent * scale
        self.damping_less_one = np.expm1(-2.0 * fading)  # exp(-2 fading) - 1

    def turn_less_one(self) -> Complex:
        """Return exp(2 i kz d) - 1 without cancellation."""
        damping = 1.0 + self.damping_less_one
        out = np.empty(self.angle.shape, dtype=complex)
        np.multiply(-2.0 * self.sine_squared, damping, out=out.real)
        out.real += self.damping_less_one
        np.multiply(2.0 * damping, self.sine_cosine, out=out.imag)
        return out
