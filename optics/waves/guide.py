"""A pile of thin layers as a guide: its dispersion function with slope, and the count of modes of a lossless pile.

Everything is flat: one entry is one q at one wavelength in one polarisation, (entry,). F is the tangential field
(electric for s, magnetic for p) and W = F'/w its other half, w = 1 for s and the permittivity for p; both are
continuous across interfaces (Yeh, Optical Waves in Layered Media, ch. 5 and 11).
"""

from dataclasses import dataclass, replace

import numpy as np

from optics.arrays import Complex, Index, Mask, Real
from optics.waves.coherent import normal_outside
from optics.waves.scene import Scene

SMALL_TURN = 1e-2
"""Phase of a layer below which the slope of sin(kz d)/kz comes from its series, exact to 1e-14 there."""


@dataclass(frozen=True)
class Guide:
    """Media of a thin group from above to below, half-spaces included, one column an entry.

    ``eps`` and ``weight`` (w above) are (medium, entry), ``phase`` is k0 d with zeros for the half-spaces.
    """

    eps: Complex
    index: Complex
    weight: Complex
    phase: Real

    def at(self, which: Index | Mask) -> "Guide":
        """Return the guide for some of the entries."""
        return Guide(self.eps[:, which], self.index[:, which], self.weight[:, which], self.phase[:, which])

    def with_eps(self, eps: Complex) -> "Guide":
        """Return the guide with other permittivities."""
        magnetic = (self.weight == self.eps).all(axis=0)
        index: Complex = np.sqrt(eps)
        return replace(self, eps=eps, index=index, weight=np.where(magnetic, eps, 1.0))


def media_of(scene: Scene) -> list[int]:
    """Return positions of the media of the thin group and of those that touch it, from above to below."""
    inner = [*scene.layers_up[::-1], scene.film, *scene.layers_down]
    return [scene.above.touching, *inner, scene.below.touching]


def guide(scene: Scene, owner: Index, polarisation: Index) -> Guide:
    """Return the thin group at the wavelengths ``owner``, in polarisation 0 (s) or 1 (p)."""
    media = media_of(scene)
    eps = scene.eps[media][:, owner]
    phase = scene.phase[media][:, owner]
    phase[[0, -1]] = 0.0
    return Guide(eps, scene.index[media][:, owner], np.where(polarisation == 1, eps, 1.0), phase)


def lossless(pile: Guide) -> Guide:
    """Return the guide without absorption: real index, or the real permittivity of a metal."""
    metal = pile.eps.real < 0.0
    return pile.with_eps(np.where(metal, pile.eps.real, pile.index.real**2) + 0j)


def outer_roots(pile: Guide, q: Complex, before: tuple[Complex, Complex] | None = None) -> tuple[Complex, Complex]:
    """Return the normal wave numbers of both half-spaces; continuous with those ``before`` when they are given.

    Without them it is the root that decays outwards right of the cut that rises from the half-space's index.
    """
    roots = [normal_outside(pile.index[j], q) for j in (0, -1)]
    if before is not None:
        roots = [np.where((r * b.conj()).real < 0.0, -r, r) for r, b in zip(roots, before, strict=True)]
    return roots[0], roots[1]


def mismatch(pile: Guide, q: Complex, roots: tuple[Complex, Complex]) -> tuple[Complex, Complex]:
    """Return the dispersion function and its slope in q^2, both times one common factor that keeps them finite.

    A field that decays upwards is carried down through the layers; the function is what it lacks to decay below.
    """
    top, bottom = roots
    field = np.ones_like(q)
    other = -1j * top / pile.weight[0]
    field_slope, other_slope = np.zeros_like(q), 0.5j / (top * pile.weight[0])
    for eps, weight, phase in zip(pile.eps[1:-1], pile.weight[1:-1], pile.phase[1:-1], strict=True):
        cosine, sine, sine_slope, squared = _turn(eps, phase, q)
        cosine_slope = 0.5 * phase * sine
        back = squared * sine / weight
        back_slope = (squared * sine_slope - sine) / weight
        field_slope, other_slope = (
            field_slope * cosine + field * cosine_slope + weight * (other_slope * sine + other * sine_slope),
            other_slope * cosine + other * cosine_slope - field_slope * back - field * back_slope,
        )
        field, other = field * cosine + other * weight * sine, other * cosine - field * back
        # a thick metal hides what lies above it: at a root of that alone nothing is left to the last digit
        size = np.abs(field) + np.abs(other)
        keep = 1.0 / np.where(size > 0.0, size, 1.0)
        field, other, field_slope, other_slope = field * keep, other * keep, field_slope * keep, other_slope * keep
    wanted = 1j * bottom / pile.weight[-1]
    wanted_slope = -0.5j / (bottom * pile.weight[-1])
    return field * wanted - other, field_slope * wanted + field * wanted_slope - other_slope


def _turn(eps: Complex, phase: Real, q: Complex) -> tuple[Complex, Complex, Complex, Complex]:
    """Return cos(kz d), sin(kz d)/kz, the slope of the latter in q^2, all times exp(i kz d), and kz^2."""
    squared = eps - q * q
    root = np.sqrt(-squared)
    kz = 1j * np.where(root == 0.0, 1e-150, root)
    turn_less_one: Complex = np.expm1(2j * kz * phase)
    cosine: Complex = 1.0 + 0.5 * turn_less_one
    sine: Complex = turn_less_one / (2j * kz)
    angle = squared * phase * phase
    near = np.abs(angle) < SMALL_TURN**2
    plain = (sine - phase * cosine) / (2.0 * np.where(near, 1.0, squared))
    series = np.exp(1j * kz * phase) * phase**3 / 6.0 * (1.0 - angle / 10.0 + angle * angle / 280.0)
    sine_slope: Complex = np.where(near, series, plain)
    return cosine, sine, sine_slope, squared


def nodes_and_angle(pile: Guide, q: Real) -> Real:
    """Return the phase of a lossless pile, which falls with q and equals m pi at the mode of order m.

    The nodes of the field that decays upwards are counted down to the lower half-space (oscillation theorem for
    Sturm-Liouville equations); the rest is the angle between that field and the one that decays below. It needs
    positive weights: for p no medium may be a metal.
    """
    weight = pile.weight.real
    fall = np.sqrt(np.maximum(q * q - pile.eps[[0, -1]].real, 0.0))
    field, other = np.ones_like(q), fall[0] / weight[0]
    nodes = np.zeros_like(q)
    for eps, own, phase in zip(pile.eps[1:-1].real, weight[1:-1], pile.phase[1:-1], strict=True):
        squared = eps - q * q
        kz = np.sqrt(np.maximum(np.abs(squared), 1e-30))
        waves = squared > 0.0
        start = np.arctan2(field, other * own / kz) + kz * phase
        passed = np.floor(start / np.pi)
        damp = np.tanh(kz * phase)
        grown, grown_other = field + other * own * damp / kz, field * kz * damp / own + other
        crossed = np.where(waves, passed, grown < 0.0)
        sign = np.where(grown < 0.0, -1.0, 1.0)
        field = np.where(waves, np.sin(start - np.pi * passed), sign * grown)
        other = np.where(waves, np.cos(start - np.pi * passed) * kz / own, sign * grown_other)
        nodes = nodes + crossed
    out: Real = np.pi * nodes + np.arctan2(field, other) - np.arctan2(1.0, -fall[1] / weight[-1])
    return out
