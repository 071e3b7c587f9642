"""Plane waves in a pile of thin layers: admittances looking outwards and the net flux at every interface.

The tangential field (electric for s, magnetic for p) and its admittance are continuous across interfaces, so a
pile is folded into the one admittance Z that its inner face shows (Yeh, Optical Waves in Layered Media, ch. 5).
With the tangential field F of a face the net flux through it is Re(Z) |F|^2, whatever stands behind.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from optics.waves.elementary import Complex, Real, root, upper_root


def squared(z: Complex) -> Real:
    """Return the squared modulus, without the square root that ``abs`` would take."""
    return z.real * z.real + z.imag * z.imag


OFF_THE_LINE = 1e-16
"""Added to the square of a normal wave number, below its rounding: the wave is then large enough to count beside the
admittance of what stands behind its layer."""


def normal_on_axis(eps: Complex, q: Real) -> Complex:
    """Return the normal wave number sqrt(eps - q^2) for real ``q``, the root with Im >= 0.

    """
    # a node may round to a layer's own light line, where the layer's admittance would be an exact zero over zero
    if eps.imag.any():
        gap = eps - q * q
        gap += OFF_THE_LINE
        return upper_root(gap)
    height = eps.real - q * q
    height += OFF_THE_LINE
    clear = np.empty(height.shape, dtype=complex)
    np.sqrt(np.maximum(height, 0.0), out=clear.real)
    np.sqrt(np.maximum(-height, 0.0), out=clear.imag)
    return clear


def normal_inside(eps: Complex, q: Complex) -> Complex:
    """Return the normal wave number of a finite layer for complex ``q``: the root with Im >= 0.

    Results are even in it, so either root would serve; this one lets exp(2 i kz d) decay.
    """
    return upper_root(eps - q * q)


def normal_outside(index: Complex, q: Complex) -> Complex:
    """Return the normal wave number of a half-space for ``q`` on a path below the real axis or on its riser.

    The cut runs straight up from q = index, so that a path may dip under the branch point and rise beside the
    cut on the side of larger q, where light is evanescent; on the real axis it is the root with Im >= 0.
    """
    gap = index - q
    turned = np.empty_like(gap)
    turned.real = gap.imag
    # a riser that starts at the branch point runs along the cut: the shift puts it on the evanescent side
    turned.imag = 1e-300 - gap.real
    out = root(turned)
    out *= root(index + q)
    out *= np.exp(0.25j * np.pi)
    return out


def admittances(kz: Complex, eps: Complex) -> Complex:
    """Stack the admittances of a medium, (polarisation, row, node): kz for s, kz/eps for p."""
    out = np.empty((2, *kz.shape), dtype=complex)
    out[0] = kz
    np.multiply(kz, 1.0 / eps, out=out[1])
    return out


@dataclass(frozen=True)
class Outlook:
    """What a face sees when it looks outwards through thin layers.

    ``faces[j]`` is the admittance at the inner face of layer j, the last one that of the medium behind them all;
    ``gains[j]`` is |F|^2 at the outer face of layer j over |F|^2 at its inner face.
    """

    faces: tuple[Complex, ...]
    gains: tuple[Real, ...]

    @property
    def face(self) -> Complex:
        """Admittance at the innermost face."""
        return self.faces[0]

    def fluxes(self, field: Real) -> list[Real]:
        """Return the net flux at each face, inner to outer, for the squared field ``field`` at the innermost."""
        flux = [self.faces[0].real * field]
        for face, gain in zip(self.faces[1:], self.gains, strict=True):
            field = field * gain
            flux.append(face.real * field)
        return flux


def fold(layers: Sequence[tuple[Complex, Complex]], behind: Complex) -> Complex:
    """Return the admittance that layers (admittance, exp(2 i kz d)), inner to outer, show before ``behind``."""
    face = behind
    for own, turn in reversed(layers):
        onward = own + face
        back = own - face
        back *= turn
        face = onward - back
        onward += back
        face /= onward
        face *= own
    return face


def look(layers: Sequence[tuple[Complex, Complex]], behind: Complex) -> Outlook:
    """Fold as :func:`fold` does and keep what the fluxes at every face need."""
    faces, gains = [behind], []
    for own, turn in reversed(layers):
        onward = own + faces[-1]
        back = own - faces[-1]
        back *= turn
        face = onward - back
        onward += back
        face /= onward
        face *= own
        faces.append(face)
        gains.append((4.0 * np.abs(turn)) * squared(own) / squared(onward))
    return Outlook(tuple(reversed(faces)), tuple(reversed(gains)))


def reflection(own: Complex, face: Complex) -> Complex:
    """Return the amplitude reflection at a face of admittance ``face`` met from a medium of admittance ``own``."""
    amplitude: Complex = own - face
    amplitude /= own + face
    return amplitude
