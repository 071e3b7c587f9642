"""Fields of guided modes: which medium absorbs what share of a mode.

A field is built outwards from the film; in each medium the absorption is Im(eps) times the integral of |E|^2 (Novotny &
Hecht, ch. 2). In a layer F = A (exp(i kz z) + r exp(i kz (2d - z))), z counted outwards, r the reflection at its outer
face.
"""

from collections.abc import Sequence

import numpy as np

from optics.arrays import Complex, Index, Mask, Real
from optics.waves.coherent import normal_inside, normal_outside, squared
from optics.waves.guide import Guide, guide, media_of
from optics.waves.scene import Scene


def absorbed_shares(scene: Scene, owner: Index, polarisation: Index, q: Complex) -> Real:
    """Return the share of each mode's power that every medium of the scene absorbs, (medium, mode)."""
    media = media_of(scene)
    pile = guide(scene, owner, polarisation)
    core, last = media.index(scene.film), len(media) - 1
    kz = normal_inside(pile.eps, q)
    kz[0], kz[-1] = normal_outside(pile.index[0], q), normal_outside(pile.index[-1], q)
    field = _Field(pile, kz, q, polarisation == 1)
    amounts = np.zeros((scene.media, len(q)))
    down, up = list(range(core, last)), list(range(core - 1, 0, -1))
    film_mirror = _book(amounts, media, field, down, last, None)
    upper_face = 1.0 + film_mirror * np.exp(2j * pile.phase[core] * kz[core])
    _book(amounts, media, field, up, 0, upper_face)
    total = amounts.sum(axis=0)
    shares: Real = amounts / np.where(total > 0.0, total, 1.0)
    return shares


class _Field:
    """What integrals over a mode's field need, one column a mode."""

    def __init__(self, pile: Guide, kz: Complex, q: Complex, magnetic: Mask) -> None:
        self.eps, self.phase, self.kz = pile.eps, pile.phase, kz
        self.own = kz / pile.weight
        self.q_squared = squared(q)
        self.magnetic = magnetic

    def turn(self, j: int) -> Complex:
        """Return exp(2 i kz d) of a layer."""
        out: Complex = np.exp(2j * self.phase[j] * self.kz[j])
        return out

    def mirrors(self, layers: Sequence[int], behind: int) -> dict[int, Complex]:
        """Return the reflection at the outer face of each layer, inner to outer, before ``behind``."""
        out: dict[int, Complex] = {}
        face = self.own[behind]
        for j in reversed(layers):
            out[j] = (self.own[j] - face) / (self.own[j] + face)
            back = out[j] * self.turn(j)
            face = self.own[j] * (1.0 - back) / (1.0 + back)
        return out

    def loss(self, j: int, plain: Real, slope: Real) -> Real:
        """Return the absorption from the integrals of |F|^2 and |F'|^2: F is electric for s, magnetic for p."""
        electric = (self.q_squared * plain + slope) / squared(self.eps[j])
        out: Real = self.eps[j].imag * np.where(self.magnetic, electric, plain)
        return out

    def in_layer(self, j: int, mirror: Complex) -> Real:
        """Return what a layer absorbs of an outward wave of amplitude one."""
        kz, phase = self.kz[j], self.phase[j]
        decay, beat = 2.0 * kz.imag * phase, 2j * kz.real * phase
        faded = np.exp(-decay)
        direct = phase * _mean_exp(-decay) * (1.0 + squared(mirror) * faded)
        mixed = 2.0 * (mirror.conj() * faded * phase * _mean_exp(-beat)).real
        return self.loss(j, direct + mixed, squared(kz) * (direct - mixed))

    def behind(self, j: int) -> Real:
        """Return what a half-space absorbs of a wave of amplitude one at its face."""
        plain = 0.5 / np.maximum(self.kz[j].imag, 1e-300)
        return self.loss(j, plain, plain * squared(self.kz[j]))


def _mean_exp(z: "np.ndarray") -> "np.ndarray":
    """Return (exp(z) - 1)/z."""
    small = np.abs(z) < 1e-12
    safe = np.where(small, 1.0, z)
    return np.where(small, 1.0, np.expm1(safe) / safe)


def _book(
    amounts: Real, media: Sequence[int], field: _Field, layers: Sequence[int], behind: int, face: Complex | None
) -> Complex:
    """Add what ``layers``, inner to outer, and the half-space behind them absorb; return the first one's mirror.

    ``face`` is F at the first inner face; None starts with an outward wave of amplitude one.
    """
    mirror = field.mirrors(layers, behind)
    for j in layers:
        wave = np.ones_like(field.kz[j]) if face is None else face / (1.0 + mirror[j] * field.turn(j))
        amounts[media[j]] += squared(wave) * field.in_layer(j, mirror[j])
        face = wave * np.exp(1j * field.phase[j] * field.kz[j]) * (1.0 + mirror[j])
    if face is not None and field.eps[behind].imag.any():
        amounts[media[behind]] += squared(face) * field.behind(behind)
    return mirror[layers[0]] if layers else np.zeros_like(field.kz[behind])
