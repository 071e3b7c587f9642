"""Tolerances: how far shares spread when every input is drawn from what is known of it, and which input matters."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from concurrent.futures import Executor
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from optics.arrays import Real
from optics.errors import InputError
from optics.fate.ledger import SHARES
from optics.media.material import Material
from optics.stack import Stack
from optics.study.answer import Answer
from optics.study.axes import Axis, Points
from optics.study.engine import Place, run
from optics.study.inputs import Input, inputs_of
from optics.study.keypath import value_at
from optics.study.sweep import Plan, Progress, work
from optics.tolerances import HALF_WIDTH_PER_SD

if TYPE_CHECKING:
    import pandas as pd


FEWEST_SAMPLES = 16
QUANTILES = {"low_95": 0.025, "low_68": 0.16, "median": 0.5, "high_68": 0.84, "high_95": 0.975}
SPREAD = (*SHARES, "rate_factor")
NOTHING = 1e-12
"""A share that varies less than this has no indices: rounding alone would be shared out among the inputs."""


@dataclass(frozen=True)
class Draws:
    """The points of a tolerance study.

    The first 2 ``samples`` points are two independent draws of all inputs, A and B; then, input by input, come A with
    that input taken from B (Saltelli et al., Comput. Phys. Commun. 181, 259, 2010); then the stack as it is, and the
    stack with each of its alternative tables.

    Attributes
    ----------
    stack, inputs, samples
        What is drawn.
    plan
        The points; spectra are kept of A and B alone.
    others
        Key path and material of every alternative table.
    """

    stack: Stack
    inputs: tuple[Input, ...]
    samples: int
    plan: Plan
    others: tuple[tuple[str, Material], ...]

    @property
    def own(self) -> int:
        """The point at which nothing is moved."""
        return self.samples * (len(self.inputs) + 2)


@dataclass(frozen=True)
class Spread:
    """What a tolerance study found.

    Attributes
    ----------
    inputs
        The inputs drawn.
    samples
        Size of each of the two independent draws.
    bands
        A row a share: the stack's own value, then median and 68 and 95 % bands of the average over the births.
    by_wavelength
        Tidy: wavelength_nm, share, median and bands.
    indices
        Tidy: share, input, first_order, total: parts of the variance that the input makes alone, and with others.
    alternatives
        A row an alternative table: key, material, its shares; the first row is the stack's own tables.
    convergence
        Largest change of a band and of an index when the number of samples is doubled, from half of them to all.
    own
        The answer for the stack as it is: wave minus ray and the numerical error stand there, apart from all this.
    """

    inputs: tuple[Input, ...]
    samples: int
    bands: pd.DataFrame
    by_wavelength: pd.DataFrame
    indices: pd.DataFrame
    alternatives: pd.DataFrame
    convergence: dict[str, float]
    own: Answer


def tolerance(
    stack: Stack,
    *,
    samples: int = 512,
    seed: int = 0,
    workers: int = 1,
    cluster: str = "",
    executor: Executor | None = None,
    progress: Progress | None = None,
) -> Spread:
    """Draw a stack's inputs from what is known of them, and return how far its shares spread.

    Parameters
    ----------
    stack
        The stack with its tolerances; where it says nothing of the film's thickness, n and k the defaults of
        `optics.study.inputs.inputs_of` stand in.
    samples
        A power of two, at least 16; samples x (inputs + 2) stacks are solved.
    seed
        Of the scrambling.
    workers, cluster, executor, progress
        As for `optics.study.sweep.sweep`.
    """
    draws = drawn_points(stack, samples=samples, seed=seed)
    count = len(draws.plan.points)
    found: dict[int, Answer] = {}
    for at, answers in run(
        work, draws.plan.pack, range(count), Place(workers, cluster, executor), units=draws.plan.units
    ):
        found.update(zip(at, answers, strict=True))
        if progress:
            progress(len(found), count)
    return spread(draws, ((point, found[point]) for point in range(count)))


def drawn_points(stack: Stack, *, samples: int, seed: int) -> Draws:
    """Return the points of a tolerance study."""
    if samples < FEWEST_SAMPLES or samples & (samples - 1):
        near = 2 ** max(4, round(np.log2(max(samples, 1))))
        raise InputError(f"samples: found {samples}, expected a power of two from {FEWEST_SAMPLES}, for example {near}")
    inputs = inputs_of(stack)
    drawn = values_drawn(inputs, samples=samples, seed=seed)
    others = tuple((each.key, material) for each in stack.alternatives for material in each.materials)
    own = np.array([[each.value for each in inputs]])
    rows = np.concatenate([drawn, np.repeat(own, 1 + len(others), axis=0)])
    axes = [Axis(each.key, tuple(column), tuple(column)) for each, column in zip(inputs, rows.T.tolist(), strict=True)]
    for key in dict.fromkeys(key for key, _ in others):
        material = value_at(stack, key)
        materials = (*[material] * (len(drawn) + 1), *(other if k == key else material for k, other in others))
        axes.append(Axis(key, materials, tuple(each.name for each in materials)))
    plan = Plan(stack, Points(tuple(axes), cases=True), spectra=True, spectral=2 * samples)
    return Draws(stack, inputs, samples, plan, others)


def values_drawn(inputs: Sequence[Input], *, samples: int, seed: int) -> Real:
    """Return values of the inputs, (point, input): A, B, then A with each input from B in turn.

    Scrambled Sobol points (Owen, J. Complexity 14, 466, 1998; `scipy.stats.qmc.Sobol`) in twice as many dimensions as
    there are inputs make A and B.
    """
    from scipy.stats import qmc

    count = len(inputs)
    points = qmc.Sobol(2 * count, scramble=True, seed=seed).random(samples)
    a, b = (
        np.stack([_quantile(i, p) for i, p in zip(inputs, part.T, strict=True)], axis=1)
        for part in (points[:, :count], points[:, count:])
    )
    mixed = []
    for place in range(count):
        one = a.copy()
        one[:, place] = b[:, place]
        mixed.append(one)
    return np.concatenate([a, b, *mixed])


def _quantile(each: Input, part: Real) -> Real:
    from scipy.stats import norm

    if each.shape == "uniform":
        return np.asarray(each.value + each.sd * HALF_WIDTH_PER_SD * (2.0 * part - 1.0))
    return np.asarray(each.value + each.sd * norm.ppf(np.clip(part, 1e-12, 1.0 - 1e-12)))


def indices_of(values: Real, *, samples: int, inputs: int) -> tuple[Real, Real]:
    """Return first-order and total indices, (figure, input), of figures at the points of `values_drawn`.

    Parameters
    ----------
    values
        (point, figure).
    samples, inputs
        As drawn; the first ``samples`` of a larger draw may be given.
    """
    from scipy.stats import sobol_indices

    blocks = values.reshape(inputs + 2, samples, -1).transpose(0, 2, 1)
    found = sobol_indices(func={"f_A": blocks[0], "f_B": blocks[1], "f_AB": blocks[2:]}, n=samples)
    shape = (blocks.shape[1], inputs)
    varies = blocks[:2].std(axis=(0, 2))[:, None] > NOTHING
    first, total = (np.reshape(each, shape) * varies for each in (found.first_order, found.total_order))
    return first, total


def spread(draws: Draws, answers: Iterator[tuple[int, Answer]]) -> Spread:
    """Return what the answers, which come in the order of the points, say."""
    count, samples = len(draws.inputs), draws.samples
    averages = np.empty((draws.own, len(SPREAD)))
    spectra: list[Real] = []
    wavelengths: list[float] = []
    rest: list[Answer] = []
    for point, found in answers:
        if point >= draws.own:
            rest.append(found)
            continue
        averages[point] = [found[name] for name in SPREAD]
        if point < 2 * samples:
            spectra.append(np.array([found["spectra"][name] for name in SPREAD]))
            wavelengths = found["spectra"]["wavelength_nm"]
    own = rest[0]
    return Spread(
        draws.inputs,
        samples,
        _bands(averages[: 2 * samples], own),
        _by_wavelength(np.array(spectra), wavelengths),
        _indices(draws.inputs, *indices_of(averages, samples=samples, inputs=count)),
        _alternatives(draws, rest),
        _convergence(averages, samples, count),
        own,
    )


def _bands(values: Real, own: Answer) -> pd.DataFrame:
    import pandas as pd

    levels = np.quantile(values, list(QUANTILES.values()), axis=0)
    columns = {
        "own": [own[name] for name in SPREAD],
        **dict(zip(QUANTILES, levels, strict=True)),
        "sd": values.std(axis=0),
    }
    return pd.DataFrame(columns, index=pd.Index(SPREAD, name="share"))


def _by_wavelength(spectra: Real, wavelengths: Sequence[float]) -> pd.DataFrame:
    """Return bands of every share at every wavelength; ``spectra`` is (sample, share, wavelength)."""
    import pandas as pd

    levels = np.quantile(spectra, list(QUANTILES.values()), axis=0)  # (level, share, wavelength)
    head = {"wavelength_nm": np.tile(wavelengths, len(SPREAD)), "share": np.repeat(SPREAD, len(wavelengths))}
    return pd.DataFrame(head | {name: level.ravel() for name, level in zip(QUANTILES, levels, strict=True)})


def _indices(inputs: Sequence[Input], first: Real, total: Real) -> pd.DataFrame:
    import pandas as pd

    keys = [each.key for each in inputs]
    head = {"share": np.repeat(SPREAD, len(keys)), "input": np.tile(keys, len(SPREAD))}
    return pd.DataFrame(head | {"first_order": first.ravel(), "total": total.ravel()})


def _alternatives(draws: Draws, rest: Sequence[Answer]) -> pd.DataFrame:
    import pandas as pd

    names = [("", "as in the stack"), *((key, material.name) for key, material in draws.others)]
    rows = [
        {"key": key, "material": name, **{share: found[share] for share in SPREAD}}
        for (key, name), found in zip(names, rest, strict=True)
    ]
    return pd.DataFrame(rows)


def _convergence(averages: Real, samples: int, inputs: int) -> dict[str, float]:
    """Return the largest changes from half the samples to all of them."""
    half = samples // 2
    blocks = averages.reshape(inputs + 2, samples, -1)
    part = blocks[:, :half].reshape(-1, averages.shape[1])
    levels = list(QUANTILES.values())
    bands = np.quantile(blocks[:2].reshape(-1, averages.shape[1]), levels, axis=0)
    before = np.quantile(part[: 2 * half], levels, axis=0)
    totals = [indices_of(each, samples=n, inputs=inputs)[1] for each, n in ((averages, samples), (part, half))]
    return {"band": float(np.abs(bands - before).max()), "index": float(np.abs(totals[0] - totals[1]).max())}
