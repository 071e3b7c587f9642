"""The answer for one point of a study, in plain numbers that go through files and between processes unchanged."""

from collections.abc import Sequence
from typing import Any

import numpy as np

from optics.arrays import Real
from optics.fate.account import ledgers_of, most_together
from optics.fate.advice import advise
from optics.fate.births import born_inside
from optics.fate.drawing import drawing_of
from optics.fate.ledger import SHARES, Ledger
from optics.fate.scenes import Drawing
from optics.fate.wave import Settings
from optics.roughness import graded
from optics.spectrum import weights
from optics.stack import Stack

SETTINGS = Settings()
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


def side_by_side(stack: Stack) -> int:
    """Return how many stacks like this one are solved together in little more memory than one."""
    film, wavelength = stack.film, stack.light.wavelengths_nm
    depth = (
        0.0 if film.plate else 2.0 * np.pi * film.thickness_nm * np.abs(film.material.index(wavelength)) / wavelength
    )
    return most_together(len(wavelength), float(np.max(depth)))


def answers(stacks: Sequence[Stack], *, spectra: Sequence[bool] | None = None) -> list[Answer]:
    """Solve stacks and return `FIGURES` and `WORDS` of each, with ``spectra`` also `SPECTRAL` columns as lists.

    The numbers are those of `optics.solve`, without its tables. Stacks are best handed over together; see
    `optics.fate.account.ledgers_of`.
    """
    drawings = [drawing_of(graded(stack)) for stack in stacks]
    waved = [number for number, stack in enumerate(stacks) if not stack.film.plate]
    waves = dict(zip(waved, ledgers_of([drawings[number] for number in waved], SETTINGS, model="wave"), strict=True))
    rays = ledgers_of(drawings, SETTINGS, model="ray")
    kept = spectra or [False] * len(stacks)
    return [
        _answer(stack, drawing, waves.get(number), ray, spectra=asked)
        for number, (stack, drawing, ray, asked) in enumerate(zip(stacks, drawings, rays, kept, strict=True))
    ]


def _answer(stack: Stack, drawing: Drawing, wave: Ledger | None, ray: Ledger, *, spectra: bool) -> Answer:
    lead, ledger = ("wave", wave) if wave else ("ray", ray)
    born = born_inside(stack, drawing, ledger, model=lead, settings=SETTINGS).per_nm
    steps = weights(drawing.wavelength_nm)
    figures = _averages(ledger, born * steps)
    figures |= {f"{RAY}{name}": value for name, value in _averages(ray, born * steps).items()}
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
