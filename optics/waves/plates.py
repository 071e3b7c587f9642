"""Plates: thick slabs that carry intensities, with thin coatings between them, as the thin group sees them.

Per polarisation and in-plane wave number every interface (coatings included) has reflectances from both sides and one
transmittance; multiple passes are summed as geometric series from the outermost interface inwards.
"""

from collections.abc import Callable, Hashable
from dataclasses import dataclass
from typing import Any

import numpy as np

from optics.arrays import Complex, Mask, Real
from optics.waves.coherent import Mirror, Outlook, admittances, look, normal_on_axis, outlook_at, squared
from optics.waves.curves import middle
from optics.waves.elementary import turn, upper_root
from optics.waves.repeated import Thing, handed_out
from optics.waves.scene import Side, View


class Waves:
    """Admittances and layer phases of a view's media at real ``q``, each computed once when first asked for.

    ``short_of_film``, the film's index less ``q`` without cancellation, keeps digits next to the film's light line.
    What the film's thickness does not touch is computed once for rows that differ in nothing else.
    """

    def __init__(self, view: View, q: Real, short_of_film: Complex | None = None) -> None:
        self.view, self.q = view, q
        self._short_of_film = short_of_film
        self._made: dict[Hashable, Any] = {}
        self._copies = view.scene.repeats(view.owner, q[:, 0], q[:, -1])
        if self._copies is not None:
            one, _ = self._copies
            short = None if short_of_film is None else short_of_film[one]
            self._once = Waves(view.scene.view(view.owner[one]), q[one], short)

    def shared(self, name: Hashable, make: Callable[["Waves"], Thing]) -> Thing:
        """Return what ``make`` makes of these waves, whatever the film's thickness; made when it is first asked for."""
        if name not in self._made:
            if self._copies is None:
                self._made[name] = make(self)
            else:
                self._made[name] = handed_out(self._once.shared(name, make), self._copies[1])
        thing: Thing = self._made[name]
        return thing

    def kz(self, medium: int) -> Complex:
        """Normal wave number of a medium."""
        return self.shared(("kz", medium), lambda waves: waves._normal(medium))

    def _normal(self, medium: int) -> Complex:
        if self._short_of_film is None or medium != self.view.scene.film:
            return normal_on_axis(self.view.eps[medium], self.q)
        return upper_root(self._short_of_film * (self.view.film.index + self.q))

    def own(self, medium: int) -> Complex:
        """Admittance of a medium, (polarisation, row, node)."""
        return self.shared(("own", medium), lambda waves: admittances(waves.kz(medium), waves.view.eps[medium]))

    def layer(self, medium: int) -> tuple[Complex, Complex]:
        """Admittance and exp(2 i kz d) of a thin layer."""
        if medium != self.view.scene.film:
            return self.own(medium), self.shared(("turn", medium), lambda waves: waves._turn(medium))
        if "film" not in self._made:  # the one thing here that depends on the film's thickness
            self._made["film"] = self._turn(medium)
        return self.own(medium), self._made["film"]

    def _turn(self, medium: int) -> Complex:
        return turn(self.view.phase[medium], self.kz(medium))

    def look(self, layers: tuple[int, ...], behind: int) -> Outlook:
        """Look outwards through ``layers`` (nearest first) at the medium ``behind``."""
        film = self.view.scene.film
        if film not in layers:
            return self.shared(
                ("look", layers, behind),
                lambda waves: look([waves.layer(j) for j in layers], outlook_at(waves.own(behind))),
            )
        at = layers.index(film) + 1
        return look([self.layer(j) for j in layers[:at]], self.look(layers[at:], behind))

    def mirror(self, layers: tuple[int, ...], behind: int) -> Mirror:
        """Return what the film meets behind one of its faces: ``layers``, then the medium ``behind``."""
        return self.shared(
            ("mirror", layers, behind),
            lambda waves: waves.look(layers, behind).mirror(waves.own(waves.view.scene.film)),
        )


@dataclass(frozen=True)
class Meeting:
    """What one unit of power does when it meets layers: reflected, passed on, taken by each medium."""

    back: Real
    on: Real
    taken: dict[int, Real]


def meet(waves: Waves, origin: int, layers: tuple[int, ...], behind: int) -> Meeting:
    """Send light from the lossless medium ``origin`` through coherent ``layers`` to ``behind``."""
    if waves.view.scene.film in layers:
        return _meet(waves, origin, layers, behind)
    return waves.shared(("meet", origin, layers, behind), lambda one: _meet(one, origin, layers, behind))


def _meet(waves: Waves, origin: int, layers: tuple[int, ...], behind: int) -> Meeting:
    own = waves.own(origin)
    mirror = waves.look(layers, behind).mirror(own)
    incoming = own.real
    fluxes = mirror.sent(1.0 / np.where(incoming > 0.0, incoming, 1.0))
    taken = {j: fluxes[i] - fluxes[i + 1] for i, j in enumerate(layers) if waves.view.eps[j].imag.any()}
    return Meeting(squared(mirror.reflection), fluxes[-1], taken)


@dataclass(frozen=True)
class _Stage:
    """One plate and what lies behind it, on its way outwards."""

    plate: int
    pass_through: Real  # attenuation of one pass
    outward: Meeting
    inward: Meeting | None
    beyond: Real  # reflectance seen from inside the next plate, zero before an outer medium
    far_face: Real  # reflectance at this plate's far face, everything beyond included

    @property
    def seen(self) -> Real:
        """Reflectance of the plate and all beyond, seen from just inside its near face."""
        return self.pass_through * self.pass_through * self.far_face

    @property
    def onward(self) -> Real:
        """Power that enters the next medium, all orders, per unit that enters this plate."""
        series = 1.0 if self.inward is None else 1.0 - self.inward.back * self.beyond
        out: Real = self.pass_through * self.outward.on / series
        return out


@dataclass(frozen=True)
class Shell:
    """All plates of one side as the thin group sees them."""

    side: Side
    stages: tuple[_Stage, ...]
    reflects: Real
    passes: Real

    def taken(self, entering: Real) -> dict[int, Real]:
        """Return what each medium takes of the power ``entering`` the first plate, all orders summed."""
        out: dict[int, Real] = {}
        for stage in self.stages:
            lost = 1.0 - stage.pass_through
            out[stage.plate] = entering * lost * (1.0 + stage.pass_through * stage.far_face)
            arriving = entering * stage.pass_through
            entering = entering * stage.onward
            for medium, share in stage.outward.taken.items():
                out[medium] = arriving * share
            if stage.inward is not None:
                for medium, share in stage.inward.taken.items():
                    out[medium] = out.get(medium, 0.0) + entering * stage.beyond * share
        return out


def shell(waves: Waves, side: Side) -> Shell:
    """Fold the plates of ``side``, outermost first."""
    return waves.shared(("shell", side), lambda one: _shell(one, side))


def _shell(waves: Waves, side: Side) -> Shell:
    stages: list[_Stage] = []
    behind = side.outer
    for plate, coating in zip(reversed(side.plates), reversed(side.coatings), strict=True):
        outward = meet(waves, plate, coating, behind)
        inward = meet(waves, behind, coating[::-1], plate) if stages else None
        # where this plate is dark nothing gets past it: no series to sum behind it
        beyond = stages[-1].seen * (waves.kz(plate).real > 0.0) if stages else np.zeros_like(outward.back)
        far = outward.back
        if inward is not None:
            far = far + outward.on * outward.on * beyond / (1.0 - inward.back * beyond)
        stages.append(_Stage(plate, _one_pass(waves, plate), outward, inward, beyond, far))
        behind = plate
    stages.reverse()
    passes = np.ones_like(stages[0].far_face)
    for stage in stages:
        passes = passes * stage.onward
    return Shell(side, tuple(stages), stages[0].seen, passes)


def _one_pass(waves: Waves, plate: int) -> Real:
    """Return exp(-alpha t/cos(theta)); zero where light cannot travel in the plate."""
    kz = waves.kz(plate).real
    view = waves.view
    travels = kz > 0.0
    depth = 2.0 * view.loss[plate] * view.phase[plate] * view.index[plate].real
    out: Real = np.exp(-depth / np.where(travels, kz, 1.0)) * travels
    return out


def is_sink(view: View, side: Side, q: Real) -> Mask:
    """Tell per row whether light of this side cannot leave it: q beyond an index on its way out."""
    inside = middle(q)
    out: Mask = np.zeros(inside.shape, dtype=bool)
    for medium in side.clear:
        out |= inside > view.index[medium].real
    return out
