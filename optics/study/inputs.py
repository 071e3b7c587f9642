"""What an answer owes to its inputs: every one moved by its standard deviation, one at a time."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from optics.arrays import Real
from optics.fate.ledger import SHARES
from optics.fate.solve import Result
from optics.stack import Stack
from optics.study.answer import answers
from optics.study.keypath import changed, value_at, without_doubts
from optics.tolerances import Tolerance

if TYPE_CHECKING:
    import pandas as pd

DEFAULT_THICKNESS = 0.05
DEFAULT_K = 0.10
DEFAULT_N = 0.02
FIGURES = (*SHARES, "rate_factor")
LEADING = ("trapped", "substrate", "cover", "free_below", "free_above", "elsewhere")
"""Shares by which the most sensitive input is chosen: those that no convention cuts apart."""


@dataclass(frozen=True)
class Input:
    """One number in doubt: its key path, value, standard deviation, shape, and whether the file says so."""

    key: str
    value: float
    sd: float
    shape: str
    stated: bool

    def __str__(self) -> str:
        size = f"{100 * self.sd:.3g} %" if self.relative else f"{float(f'{self.sd:.3g}'):.12g}"
        return f"{self.name} {size}" + ("" if self.stated else " (default)")

    @property
    def name(self) -> str:
        """What it is called where people read: ``film.n`` for the key path ``film.n_offset``."""
        return named(self.key)

    @property
    def relative(self) -> bool:
        """Whether it is a scale."""
        return self.key.endswith(".k_scale")


def named(key: str) -> str:
    """Return what an input of this key path is called where people read."""
    for ending in (".n_offset", ".k_scale"):
        if key.endswith(ending):
            return key.removesuffix(ending) + ending[:2]
    return key


@dataclass(frozen=True)
class InputUncertainty:
    """How far averaged shares move within what is known of the inputs.

    Attributes
    ----------
    by_share
        Of every share and the rate factor: the root of the sum of squares of what each input does alone.
    by_input
        A row an input: key, value, sd, shape, stated, then a column a share, how far it moves.
    most_sensitive
        The input that moves a share the most, and which share.
    inputs
        The inputs moved.
    """

    by_share: dict[str, float]
    by_input: pd.DataFrame
    most_sensitive: tuple[str, str]
    inputs: tuple[Input, ...]

    def lines(self) -> tuple[str, ...]:
        """Return what the uncertainty rests on and what it owes the most to, a line each."""
        key, share = self.most_sensitive
        rests = ", ".join(str(each) for each in self.inputs)
        return (
            f"inputs +-: {rests}; each moved alone by one standard deviation",
            f"Most sensitive to {named(key)}: it moves {share.replace('_', ' ')} the most",
        )


def inputs_of(stack: Stack) -> tuple[Input, ...]:
    """Return the numbers in doubt: those of the stack's tolerances, and the film's thickness, n and k in any case.

    Where the stack says nothing of them the film's thickness is taken as known to 5 %, its k to 10 % and its n to
    0.02. A film that absorbs nothing has no k in doubt.
    """
    film = stack.film
    known = {each.key: each for each in stack.tolerances}
    said = set(known)
    defaults = []
    if f"{film.name}.thickness_nm" not in said:
        defaults.append(Tolerance(key=f"{film.name}.thickness_nm", sd=DEFAULT_THICKNESS * film.thickness_nm))
    if not said & {f"{film.name}.n_offset", f"{film.name}.material.n"}:
        defaults.append(Tolerance(key=f"{film.name}.n_offset", sd=DEFAULT_N))
    absorbs = bool(film.repaired.index(stack.light.wavelengths_nm).imag.any())
    if absorbs and not said & {f"{film.name}.k_scale", f"{film.name}.material.k"}:
        defaults.append(Tolerance(key=f"{film.name}.k_scale", sd=DEFAULT_K))
    return tuple(
        Input(each.key, float(value_at(stack, each.key)), each.sd, each.shape, each.key in known)
        for each in (*stack.tolerances, *defaults)
    )


def input_uncertainty(result: Result) -> InputUncertainty:
    """Return how far a solved stack's averaged shares move within its inputs.

    Every input is moved up and down by its standard deviation, the others kept; it counts with the root mean square
    of both moves, so that a share at its maximum over a fringe is not taken for one that nothing moves.

    Parameters
    ----------
    result
        What `optics.solve` returned.
    """
    stack = without_doubts(result.stack)
    base = np.array([result.averages[name] for name in FIGURES])
    inputs = inputs_of(result.stack)
    moved = answers([changed(stack, i.key, i.value + step) for i in inputs for step in (i.sd, -i.sd)])
    moves = np.array([[found[name] for name in FIGURES] for found in moved]).reshape(len(inputs), 2, len(FIGURES))
    return _summed(inputs, np.sqrt(np.mean(np.square(moves - base), axis=1)))


def _summed(inputs: Sequence[Input], moved: Real) -> InputUncertainty:
    import pandas as pd

    heads: list[Mapping[str, object]] = [
        {"key": i.key, "value": i.value, "sd": i.sd, "shape": i.shape, "stated": i.stated} for i in inputs
    ]
    table = pd.concat([pd.DataFrame(heads), pd.DataFrame(moved, columns=list(FIGURES))], axis=1)
    total = np.sqrt(np.square(moved).sum(axis=0))
    leading = moved[:, [FIGURES.index(name) for name in LEADING]]
    which, share = divmod(int(np.argmax(leading)), len(LEADING)) if leading.size else (0, 0)
    most = (inputs[which].key, LEADING[share]) if leading.size else ("", "")
    return InputUncertainty(dict(zip(FIGURES, total.tolist(), strict=True)), table, most, tuple(inputs))
