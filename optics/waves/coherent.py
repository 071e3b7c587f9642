"""Plane waves in a pile of thin layers: admittances looking outwards and the net flux at every interface.

The tangential field F (electric for s, magnetic for p) and its partner G, the admittance that stands there times F,
are continuous across interfaces, so a pile is folded from its far side into the pair at its inner face (Yeh, Optical
Waves in Layered Media, ch. 5). The net flux through a face is Re(F* G). Pairs are free to a common factor, which is
never divided out before the end.
"""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from optics.arrays import Complex, Real
from optics.waves.elementary import root, upper_root


def squared(z: Complex) -> Real:
    """Return the squared modulus, without the square root that ``abs`` would take."""
    return z.real * z.real + z.imag * z.imag


def along(one: Complex, other: Complex) -> Real:
    """Return Re(one* other)."""
    out: Real = one.real * other.real
    out += one.imag * other.imag
    return out


OFF_THE_LINE = 1e-16
"""Added to the square of a normal wave number, below its rounding: the wave is then large enough to count beside the
admittance of what stands behind its layer."""


def normal_on_axis(eps: Complex, q: Real) -> Complex:
    """Return the normal wave number sqrt(eps - q^2) for real ``q``, the root with Im >= 0."""
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
class Pair:
    """Field and partner at a face, up to a common factor; what a wave of admittance ``own`` meets there."""

    field: Complex | float
    partner: Complex

    def behind(self, own: Complex, turn: Complex) -> "Pair":
        """Return the pair at the inner face of a layer (admittance, exp(2 i kz d)) that has this one at its outer."""
        there = own * self.field
        back = there - self.partner
        back *= turn
        there += self.partner
        partner = there - back
        partner *= own
        there += back
        return Pair(there, partner)

    def eased(self) -> "Pair":
        """Return the pair with a field of modulus one."""
        field = np.asarray(self.field, dtype=complex)
        ease = 1.0 / np.abs(field)
        return Pair(field * ease, self.partner * ease)

    @property
    def flux(self) -> Real:
        """Net flux outwards."""
        if isinstance(self.field, float):
            return self.field * self.partner.real
        return along(self.field, self.partner)

    def reflection(self, own: Complex) -> Complex:
        """Return the amplitude reflection met from a medium of admittance ``own``."""
        there = own * self.field
        amplitude = there - self.partner
        there += self.partner
        amplitude /= there
        return amplitude


EASE_EVERY = 16
"""Layers after which a pair is scaled back, lest a tall pile overflow."""


def fold(layers: Sequence[tuple[Complex, Complex]], behind: Complex) -> Pair:
    """Return the pair that layers (admittance, exp(2 i kz d)), inner to outer, show before ``behind``."""
    pair = Pair(1.0, behind)
    for count, (own, turn) in enumerate(reversed(layers), 1):
        pair = pair.behind(own, turn)
        if not count % EASE_EVERY:
            pair = pair.eased()
    return pair


@dataclass(frozen=True)
class Outlook:
    """What a face sees when it looks outwards through thin layers: the pair there and the net flux at each face.

    Fluxes run from the inner to the outer face, in units of the pair's.
    """

    pair: Pair
    fluxes: tuple[Real, ...]

    def through(self, own: Complex, turn: Complex) -> "Outlook":
        """Return the outlook from the inner face of a layer more."""
        pair = self.pair.behind(own, turn)
        loss = squared(own)
        loss *= 4.0 * np.abs(turn)
        return Outlook(pair, (pair.flux, *(flux * loss for flux in self.fluxes)))

    def eased(self) -> "Outlook":
        """Return the outlook with a field of modulus one."""
        ease = 1.0 / squared(np.asarray(self.pair.field, dtype=complex))
        return Outlook(self.pair.eased(), tuple(flux * ease for flux in self.fluxes))

    def mirror(self, own: Complex) -> "Mirror":
        """Return what a wave from a medium of admittance ``own`` meets."""
        there = own * self.pair.field
        amplitude = there - self.pair.partner
        there += self.pair.partner
        scale = 1.0 / squared(there)
        amplitude *= np.conj(there, out=there)
        amplitude *= scale
        scale *= 4.0
        scale *= squared(own)
        return Mirror(amplitude, scale, self.fluxes)


@dataclass(frozen=True)
class Mirror:
    """One half as a wave meets it: its amplitude reflection, and the fluxes that the wave sends through its faces.

    ``per_wave`` turns ``fluxes``, those of an outlook, into those of a wave of amplitude one.
    """

    reflection: Complex
    per_wave: Real
    fluxes: tuple[Real, ...]

    def sent(self, power: Real | float) -> list[Real]:
        """Return the net flux at each face, inner to outer, for a wave of squared amplitude ``power``."""
        scale = self.per_wave * power
        return [flux * scale for flux in self.fluxes]


def outlook_at(behind: Complex) -> Outlook:
    """Return what is seen at the face of a medium without end."""
    pair = Pair(1.0, behind)
    return Outlook(pair, (pair.flux,))


def look(layers: Sequence[tuple[Complex, Complex]], beyond: Outlook) -> Outlook:
    """Look through layers (admittance, exp(2 i kz d)), inner to outer, at what is ``beyond``."""
    for count, (own, turn) in enumerate(reversed(layers), 1):
        beyond = beyond.through(own, turn)
        if not count % EASE_EVERY:
            beyond = beyond.eased()
    return beyond
