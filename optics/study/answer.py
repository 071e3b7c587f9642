"""The answer for one point of a study, in plain numbers that go through files and between processes unchanged."""

from typing import Any

import numpy as np

from optics.arrays import Real
from optics.fate.account import ledger_of
from optics.fate.advice import advise
from optics.fate.births import born_inside
from optics.fate.drawing import drawing_of
from optics.fate.ledger import SHARES, Ledger
from optics.fate.wave import Settings
from optics.roughness import graded
from optics.spectrum import weights
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

    The numbers are those of `optics.solve`, without its tables. One thread does the work: studies share the cores
    between processes.
    """
    smooth = graded(stack)
    drawing = drawing_of(smooth)
    models = ("ray",) if stack.film.plate else ("wave", "ray")
    ledgers = {model: ledger_of(drawing, ONE_THREAD, model=model) for model in models}
    lead, ledger = next(iter(ledgers.items()))
    born = born_inside(smooth, drawing, ledger, model=lead, settings=ONE_THREAD).per_nm
    steps = weights(drawing.wavelength_nm)
    figures = _averages(ledger, born * steps)
    figures |= {f"{RAY}{name}": value for name, value in _averages(ledgers["ray"], born * steps).items()}
    figures |= {"numerical_error": ledger.error.max(), "largest_closure": np.abs(ledger.closure).max()}
    film = drawing.index[drawing.film]
    advised, _ = advise(drawing.wavelength_nm, born * steps, film, stack.film.thickness_nm)
    words = {"model": lead, "advised_model": "ray" if stack.film.plate else advised}
    found: Answer = {name: float(figures[name]) for name in FIGURES} | words
    if spectra:
        found["spectra"] = _spectra(drawing.wavelength_nm, ledger, born, steps)
    return found


def _averages(ledger: Ledger, births: Real) -> dict[str, float]:
    """Return averages over photons born, ``births`` being those per unit rate factor, and the mean rate factor."""
    weight = births * ledger.rate_factor
    weight = weight / weight.sum()
    shares = {name: float(weight @ ledger.shares[name]) for name in SHARES}
    return shares | {"rate_factor": float(births @ ledger.rate_factor)}


def _spectra(wavelength_nm: Real, ledger: Ledger, born: Real, steps: Real) -> dict[str, list[float]]:
    per_nm = born * ledger.rate_factor
    per_nm = per_nm / (per_nm @ steps)
    columns = {
        "wavelength_nm": wavelength_nm,
        "births_per_nm": per_nm,
        "birth_weight": per_nm * steps,
        "rate_factor": ledger.rate_factor,
        **ledger.shares,
    }
    return {name: columns[name].tolist() for name in SPECTRAL}
