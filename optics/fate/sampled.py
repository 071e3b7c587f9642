"""A stack in its sample: where held and guided light ends, the three readings, and the fully scrambled limit."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from optics.arrays import Real
from optics.fate.account import ledger_of
from optics.fate.births import born_inside
from optics.fate.drawing import drawing_of
from optics.fate.ends import FIRST, KINDS, PLACES, SampleEnds, follow
from optics.fate.ledger import Ledger
from optics.fate.readings import READINGS, Reading, readings
from optics.fate.scenes import Drawing
from optics.fate.scrambled import Scrambled, scrambled
from optics.fate.wave import Settings
from optics.roughness import graded
from optics.sample import Sample, at_wavelengths
from optics.spectrum import weights
from optics.stack import Stack

if TYPE_CHECKING:
    import pandas as pd

ENDLESS = 1e-9
"""Light that never ends in a sample without edges is worth a word from this share on."""


@dataclass(frozen=True)
class Sampled:
    """Where all light ends in a sample.

    Attributes
    ----------
    stack, sample
        The stack and its sample (of defaults where the stack has none).
    model
        The model that leads, ``"wave"`` or ``"ray"``.
    readings, ray_readings
        The readings of that model and of ray optics.
    scrambled
        The limit of light that is scrambled at every bounce, with this stack's faces and with open ones.
    ends
        Tidy: wavelength_nm, birth_weight, sample ("faces", "wide", "edged"), light ("first", "held", "guided",
        "scattered"), place, share; of the leading model.
    averages
        Mean shares, the keys of ``ends`` joined: sample, light, place.
    error
        Largest estimated numerical error of a share of held light.
    warnings
        Sentences.
    """

    stack: Stack
    sample: Sample
    model: str
    readings: tuple[Reading, ...]
    ray_readings: tuple[Reading, ...]
    scrambled: tuple[Scrambled, Scrambled]
    ends: pd.DataFrame
    averages: dict[tuple[str, str, str], float]
    error: float
    warnings: tuple[str, ...]

    def reading(self, name: str) -> Reading:
        """Return the reading of this name, of the leading model."""
        return next(reading for reading in self.readings if reading.name == name)


def sampled(stack: Stack, *, settings: Settings | None = None) -> Sampled:
    """Work out where all light of a stack ends in its sample.

    Parameters
    ----------
    stack
        The stack; without a sample of its own it is given one of defaults.
    settings
        How finely to integrate.

    Raises
    ------
    InputError
        As :func:`optics.fate.solve.solve`.
    """
    settings = settings or Settings()
    drawing = drawing_of(graded(stack))
    models = ("ray",) if stack.film.plate else ("wave", "ray")
    return sample_of(stack, drawing, {model: ledger_of(drawing, settings, model=model) for model in models}, settings)


def sample_of(stack: Stack, drawing: Drawing, ledgers: dict[str, Ledger], settings: Settings) -> Sampled:
    """Return the same for a stack whose ledgers, the leading one first, are known already."""
    sample = stack.sample or Sample()
    lead = next(iter(ledgers))
    born = born_inside(stack, drawing, ledgers[lead], model=lead, settings=settings).per_nm
    steps = weights(drawing.wavelength_nm)
    share = at_wavelengths("recycling_share", sample.recycling_share, drawing.wavelength_nm)
    ends = {model: follow(drawing, ledger, sample, settings, model=model) for model, ledger in ledgers.items()}
    read = {}
    for model, each in ends.items():
        births = born * steps * each.rate_factor
        read[model] = readings(
            each,
            births=births / births.sum(),
            rate_factor=float((born * steps) @ each.rate_factor),
            recycling_share=share,
            edges_lost=sample.edges == "lost",
        )
    births = born * steps * ends[lead].rate_factor
    births = births / births.sum()
    whole = _table(drawing, births, ends[lead])
    mixed = tuple(scrambled(drawing, births=births, recycling_share=share, open_faces=each) for each in (False, True))
    return Sampled(
        stack=stack,
        sample=sample,
        model=lead,
        readings=read[lead],
        ray_readings=read["ray"],
        scrambled=(mixed[0], mixed[1]),
        ends=whole,
        averages=_averages(whole),
        error=float(ends[lead].error.max()),
        warnings=_warnings(ends[lead], births),
    )


def _table(drawing: Drawing, births: Real, ends: SampleEnds) -> pd.DataFrame:
    import pandas as pd

    head = {"wavelength_nm": drawing.wavelength_nm, "birth_weight": births}
    parts = []
    for sample in ("faces", "wide", "edged"):
        keys = {"sample": sample, "light": "first"}
        parts += [pd.DataFrame(head | keys | {"place": name, "share": ends.first[name]}) for name in FIRST]
        for light, places in zip(KINDS, (ends.held, ends.along, ends.scattered), strict=True):
            keys = {"sample": sample, "light": light}
            parts += [
                pd.DataFrame(head | keys | {"place": place, "share": share})
                for place, share in zip(PLACES, places[sample], strict=True)
                if share.any()
            ]
        if sample == "faces":
            lost = {"sample": sample, "light": "held", "place": "where_it_entered", "share": ends.missing(sample)}
            parts.append(pd.DataFrame(head | lost))
    return pd.concat(parts, ignore_index=True)


def _averages(table: pd.DataFrame) -> dict[tuple[str, str, str], float]:
    out: dict[tuple[str, str, str], float] = {}
    columns = (table[name].tolist() for name in ("sample", "light", "place", "share", "birth_weight"))
    for sample, light, place, share, weight in zip(*columns, strict=True):
        key = (sample, light, place)
        out[key] = out.get(key, 0.0) + share * weight
    return out


def _warnings(ends: SampleEnds, births: Real) -> tuple[str, ...]:
    endless = float(births @ ends.total("wide", "unfinished"))
    outer = float(births @ ends.total("wide", "to_outer"))
    said = []
    if endless > ENDLESS:
        said.append(
            f"nothing absorbs {endless:.2g} of the photons born: in a sample without edges they never end; "
            f'"{READINGS[0]}" and "{READINGS[1]}" count them as lost'
        )
    if outer > ENDLESS:
        said.append(
            f"{outer:.2g} of the photons born end in an outer medium that holds them and never returns them; "
            "every reading counts them as lost"
        )
    return tuple(said)


def largest_gap(ends: SampleEnds) -> float:
    """Return how far the ends of the samples in which all light is followed are from adding to one, at worst."""
    return float(np.max([np.abs(ends.missing(sample)).max() for sample in ("wide", "edged")]))
