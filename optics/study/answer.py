"""The answer for one point of a study, in plain numbers that go through files and between processes unchanged."""

from typing import Any

import numpy as np

from optics.fate.ledger import SHARES
from optics.fate.solve import Result, solve
from optics.fate.wave import Settings
from optics.stack import Stack

ONE_THREAD = Settings(threads=1)
RAY = "ray_"
FIGURES = (
    *SHARES,
    "rate_factor",
    *(f"{RAY}{share}" for share in SHARES),
    "numerical_error",
    "largest_closure",
)
"""Numbers of an answer: averages over the births by wave optics (by ray optics where that is alone), by ray optics
with `RAY` before their names, and how far they can be trusted."""

WORDS = ("model", "advised_model")
"""Words of an answer: the model of the leading shares, and the one advised."""

SPECTRAL = ("wavelength_nm", "births_per_nm", "birth_weight", "rate_factor", *SHARES)
"""Columns kept per wavelength where they are asked for."""

Answer = dict[str, Any]


def answer(stack: Stack, *, spectra: bool = False) -> Answer:
    """Solve a stack and return `FIGURES` and `WORDS`, with ``spectra`` also `SPECTRAL` columns as lists.

    One thread does the work: studies share the cores between processes.
    """
    return answer_of(solve(stack, settings=ONE_THREAD), spectra=spectra)


def answer_of(result: Result, *, spectra: bool = False) -> Answer:
    """Return the answer that a solved stack gives; see `answer`."""
    table = result.ray_table if result.table is None else result.table
    figures = {share: result.averages[share] for share in SHARES}
    figures["rate_factor"] = result.averages["rate_factor"]
    figures |= {f"{RAY}{share}": result.ray_averages[share] for share in SHARES}
    figures["numerical_error"] = result.numerical_error
    figures["largest_closure"] = float(np.abs(table["closure"]).max())
    words = {"model": "ray" if result.table is None else "wave", "advised_model": result.advised_model}
    columns = {name: table[name].tolist() for name in SPECTRAL} if spectra else None
    return {name: float(value) for name, value in figures.items()} | words | ({"spectra": columns} if spectra else {})
