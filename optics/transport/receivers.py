"""Several layers that emit or receive: a matrix of shares, source by receiver."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from optics.arrays import Real
from optics.assumptions import assumptions
from optics.fate import births
from optics.fate.account import ledger_of
from optics.fate.drawing import drawing_of
from optics.fate.ledger import Ledger
from optics.fate.wave import Settings
from optics.roughness import graded
from optics.spectrum import weights
from optics.stack import Stack

if TYPE_CHECKING:
    import pandas as pd

ENDS = ("substrate", "cover", "free_below", "free_above", "guided_unfinished")
HEAD = ("source", "births_share", "rate_factor")
ALL = "all"
"""Name of the row of all photons born; no layer of that name is a source at the same time."""

CONVENTIONS = (
    "receivers: what a layer takes of light born in it is reabsorbed + guided_reabsorbed, of light born elsewhere "
    "all it absorbs in every zone; births_share is of the photons born",
)


@dataclass(frozen=True)
class Receivers:
    """Who takes the light of whom.

    Attributes
    ----------
    stack
        The stack.
    table
        A row an emitting layer, and last one of all photons (source ``ALL``): ``HEAD``, a column ``to:<layer>`` for
        every layer that emits or receives, ``other_layers`` (the other layers and absorbing outer media, guided light
        included), and ``ENDS``; from ``to:`` on, a row adds to one. Averages over the spectrum.
    by_wavelength
        The same wavelength by wavelength, after wavelength_nm, without births_share and without the last row.
    models
        The model used for each source.
    """

    stack: Stack
    table: pd.DataFrame
    by_wavelength: pd.DataFrame
    models: dict[str, str]
    warnings: tuple[str, ...] = field(default=())
    assumptions: tuple[str, ...] = field(default=())


def receivers(stack: Stack, *, settings: Settings | None = None) -> Receivers:
    """Follow the light of every emitting layer to every layer that emits or receives.

    Parameters
    ----------
    stack
        One emitting layer, or several with a `births_share` each; any layer may set `receives`.
    settings
        How finely to integrate.

    Raises
    ------
    InputError
        As `optics.solve`.
    """
    import pandas as pd

    settings = settings or Settings()
    sources = [layer for layer in stack.layers if layer.emits]
    names = [layer.name for layer in stack.layers if layer.emits or layer.receives]
    rows, tables, models = [], [], {}
    for source in sources:
        alone = graded(stack.with_film(source.name))
        drawing = drawing_of(alone)
        model = models[source.name] = "ray" if source.plate else "wave"
        ledger = ledger_of(drawing, settings, model=model)
        shares = _shares(alone, ledger, names)
        born = births.born_inside(alone, drawing, ledger, model=model, settings=settings).per_nm
        weight = born * weights(drawing.wavelength_nm)
        by = weight * ledger.rate_factor / (weight @ ledger.rate_factor)
        part = 1.0 if source.births_share is None else source.births_share
        head = dict(zip(HEAD, (source.name, part, float(weight @ ledger.rate_factor / weight.sum())), strict=True))
        rows.append(head | {name: float(by @ share) for name, share in shares.items()})
        first = {"wavelength_nm": drawing.wavelength_nm, "source": source.name, "rate_factor": ledger.rate_factor}
        tables.append(pd.DataFrame(first | shares))
    table = pd.DataFrame([*rows, _of_all(rows)])
    said = (*assumptions(stack), *CONVENTIONS)
    return Receivers(stack, table, pd.concat(tables, ignore_index=True), models, (), said)


def _shares(stack: Stack, ledger: Ledger, names: list[str]) -> dict[str, Real]:
    """Return what each receiver, and every other end, takes of the light of the film."""
    place = {layer.name: number for number, layer in enumerate(stack.layers, start=1)}
    taken = ledger.taken.sum(axis=0)  # (medium, wavelength)
    out = {f"to:{name}": taken[place[name]] for name in names}
    others = np.ones(len(taken), dtype=bool)
    others[[place[name] for name in names]] = False
    out["other_layers"] = taken[others].sum(axis=0)
    return out | {name: ledger.shares[name] for name in ENDS}


def _of_all(rows: list[dict[str, object]]) -> dict[str, object]:
    """Return the mean over sources, weighted with their births."""
    parts = np.array([row["births_share"] for row in rows], dtype=float)
    out: dict[str, object] = {"source": ALL, "births_share": float(parts.sum())}
    for name in list(rows[0])[2:]:
        out[name] = float(parts @ np.array([row[name] for row in rows], dtype=float) / parts.sum())
    return out
