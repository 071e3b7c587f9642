"""The main job: from a stack to where each photon goes."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from optics.arrays import Real
from optics.assumptions import assumptions
from optics.fate import advice, births, nearfield, outside
from optics.fate.account import ledger_of
from optics.fate.drawing import bracket, drawing_of
from optics.fate.ledger import SHARES, ZONES, Ledger
from optics.fate.overlay import Measured
from optics.fate.pump import Pumped
from optics.fate.reflection import Reflection, at_normal
from optics.fate.sampled import Sampled, sample_of
from optics.fate.scenes import Drawing, scenes
from optics.fate.wave import Settings
from optics.media.checks import floor_warning
from optics.roughness import graded
from optics.spectrum import SpectrumTable, weights
from optics.stack import Stack
from optics.units import energy_eV

if TYPE_CHECKING:
    import pandas as pd

COLUMNS = (
    "wavelength_nm",
    "energy_eV",
    "births_per_nm",
    "birth_weight",
    "rate_factor",
    *SHARES,
    "closure",
)
"""Columns of ``Result.table`` and ``Result.ray_table``; ``collected`` follows where the stack has a collection."""


@dataclass(frozen=True)
class Result:
    """Where the photons of a stack go.

    Attributes
    ----------
    stack
        The stack solved.
    table
        Wave optics, a row a wavelength, columns ``COLUMNS``: shares of the photons born at that wavelength. None for a
        film without phases (ray optics alone).
    ray_table
        The same from ray optics; its rate factor is one.
    where
        Tidy: wavelength_nm, layer, zone ("open", "held", "guided"), share: which layer takes what. From wave optics, or
        ray optics where that is alone.
    reflection
        wavelength_nm, side, R, T and a column ``A:<layer>`` a layer: normal incidence from above and from below.
    index
        wavelength_nm and columns ``<layer> n`` and ``<layer> k``: the index values used.
    averages, ray_averages
        Shares averaged over all photons born, and the mean rate factor; ``averages`` is from wave optics, or ray
        optics where that is alone.
    wave_minus_ray
        Difference of the two models, share by share; empty where ray optics is alone.
    advised_model, advice
        ``"wave"`` or ``"ray"`` by thickness and linewidth, and the reason.
    errors
        Estimated numerical error per wavelength (largest of all shares).
    error_by_share
        Estimated numerical error of each averaged share.
    spectra
        Per nm: births, light out above and below, held, guided and collected (of the model that leads); with a spectrum
        seen outside ``amplifies_noise`` marks where it was divided by little.
    pattern
        Light on the side of the stack's collection per steradian and photon born against the outside angle, with a
        Lambertian of the same whole; None without a collection.
    depth
        Births over depth, mean 1; None where they are even or all in a sheet.
    depth_averages
        With a pump: the averages for births that are even (``uniform``), along the pump's absorption (``linear``) and
        along its square (``square``).
    pump
        Absorbed share of the pump and carrier densities; None without one.
    radiation
        Emission in the dark and radiative coefficient; None unless births follow from absorption.
    measured
        A measurement laid over one of the spectra, by `optics.fate.overlay.lay_over`; else None.
    moved_by_tail
        How much the tails put in the place of absorption floors moved each of ``averages``, for the same births inside;
        empty without any.
    warnings, assumptions
        Sentences.
    sample
        Where held and guided light ends and the readings, for a stack with a sample; else None.
    """

    stack: Stack
    table: pd.DataFrame | None
    ray_table: pd.DataFrame
    where: pd.DataFrame
    reflection: pd.DataFrame
    index: pd.DataFrame
    averages: dict[str, float]
    ray_averages: dict[str, float]
    wave_minus_ray: dict[str, float]
    advised_model: str
    advice: str
    errors: Real
    error_by_share: dict[str, float]
    spectra: pd.DataFrame
    pattern: pd.DataFrame | None = None
    depth: pd.DataFrame | None = None
    depth_averages: dict[str, dict[str, float]] = field(default_factory=dict)
    pump: Pumped | None = None
    radiation: births.Radiation | None = None
    measured: Measured | None = None
    moved_by_tail: dict[str, float] = field(default_factory=dict)
    warnings: tuple[str, ...] = field(default=())
    assumptions: tuple[str, ...] = field(default=())
    sample: Sampled | None = None

    @property
    def numerical_error(self) -> float:
        """Largest estimated error of any share at any wavelength."""
        return float(self.errors.max())


def solve(stack: Stack, *, settings: Settings | None = None) -> Result:
    """Work out where the photons born in the stack's film go.

    Parameters
    ----------
    stack
        The stack.
    settings
        How finely to integrate; the default keeps every share within 1e-6.

    Returns
    -------
    Result
        Tables, averages, errors, advice.

    Raises
    ------
    InputError
        Where a material's table does not reach, a pump does not get to the film, or light is said to be seen where
        none gets out.
    """
    settings = settings or Settings()
    smooth = graded(stack)
    drawing = drawing_of(smooth)
    models = ("ray",) if stack.film.plate else ("wave", "ray")
    ledgers = {model: ledger_of(drawing, settings, model=model) for model in models}
    result = _result(smooth, drawing, ledgers, settings)
    moved = _moved_by_tail(stack, drawing, ledgers, result.averages, settings)
    said = (*result.warnings, *_rough_faces(stack))
    return replace(result, stack=stack, assumptions=assumptions(stack), moved_by_tail=moved, warnings=said)


def _result(stack: Stack, drawing: Drawing, ledgers: dict[str, Ledger], settings: Settings) -> Result:
    lead, ledger = next(iter(ledgers.items()))
    born = births.born_inside(stack, drawing, ledger, model=lead, settings=settings)
    shares = born.per_nm * weights(drawing.wavelength_nm)
    booked = {model: _booked(stack, drawing, born.per_nm, ledgers[model], model, settings) for model in ledgers}
    tables = {model: each.table for model, each in booked.items()}
    averages, ray_averages = booked[lead].averages, booked["ray"].averages
    model, why = _advice(stack, drawing, shares)
    names = medium_names(stack)
    pump = outside.pump_in(stack)
    return Result(
        stack=stack,
        table=tables.get("wave"),
        ray_table=tables["ray"],
        where=_where(drawing, names, ledger),
        reflection=_reflection(drawing, names),
        index=_index(drawing, names),
        averages=averages,
        ray_averages=ray_averages,
        wave_minus_ray={} if lead == "ray" else {name: averages[name] - ray_averages[name] for name in SHARES},
        advised_model=model,
        advice=why,
        errors=ledger.error,
        error_by_share=booked[lead].errors,
        spectra=outside.spectra_table(tables[lead], born, seen_outside=stack.light.spectrum.seen != "inside"),
        pattern=outside.pattern_table(stack, drawing, tables, ledgers) if stack.collection else None,
        depth=outside.depth_table(stack, drawing, pump),
        depth_averages=_bracketed(stack, drawing, born, pump, lead, settings),
        pump=pump,
        radiation=births.radiation_of(stack, drawing, averages["rate_factor"]),
        warnings=_warnings(stack, drawing, names, born, ledger, advised=model, lead=lead),
        sample=sample_of(stack, drawing, ledgers, settings) if stack.sample else None,
    )


def _bracketed(
    stack: Stack, drawing: Drawing, born: births.Born, pump: Pumped | None, model: str, settings: Settings
) -> dict[str, dict[str, float]]:
    """Return the averages for even births and births along a pump and its square; empty without a pump."""
    if pump is None:
        return {}
    return {
        name: _booked(stack, each, born.per_nm, ledger_of(each, settings, model=model), model, settings).averages
        for name, each in bracket(drawing, pump).items()
    }


def _moved_by_tail(
    stack: Stack, drawing: Drawing, ledgers: dict[str, Ledger], averages: dict[str, float], settings: Settings
) -> dict[str, float]:
    """Return the averages less those of the same births with every table as it was; empty where no layer has a tail."""
    if all(layer.tail is None for layer in stack.layers):
        return {}
    model, ledger = next(iter(ledgers.items()))
    born = births.born_inside(stack, drawing, ledger, model=model, settings=settings).per_nm
    light, wavelength = stack.light, drawing.wavelength_nm
    if wavelength.size > 1:  # births that followed from the repaired absorption stay as they are
        light = replace(light, spectrum=SpectrumTable(wavelength_nm=wavelength, per_nm=born))
    bare = replace(stack, light=light, layers=tuple(replace(layer, tail=None) for layer in stack.layers))
    drawn = replace(drawing_of(graded(bare)), moments=drawing.moments)
    booked = _booked(bare, drawn, born, ledger_of(drawn, settings, model=model), model, settings)
    return {name: averages[name] - value for name, value in booked.averages.items()}


def medium_names(stack: Stack) -> list[str]:
    """Return the names of all media, from above to below."""
    return ["above", *(layer.name for layer in stack.layers), "below"]


class _Booked(NamedTuple):
    """A model's table, its averages over the photons born and their errors."""

    table: pd.DataFrame
    averages: dict[str, float]
    errors: dict[str, float]


def _booked(stack: Stack, drawing: Drawing, spectrum: Real, ledger: Ledger, model: str, settings: Settings) -> _Booked:
    import pandas as pd

    steps = weights(drawing.wavelength_nm)
    born = spectrum * ledger.rate_factor
    born = born / (born @ steps)
    weight = born * steps
    columns = {
        "wavelength_nm": drawing.wavelength_nm,
        "energy_eV": energy_eV(drawing.wavelength_nm),
        "births_per_nm": born,
        "birth_weight": weight,
        "rate_factor": ledger.rate_factor,
        **ledger.shares,
        "closure": ledger.closure,
    }
    shares = dict(ledger.shares)
    collected = outside.collected_share(stack, drawing, ledger, model=model, settings=settings)
    if collected is not None:
        shares["collected"] = columns["collected"] = collected
    if stack.emission.near_field is not None and model == "wave":
        beyond = nearfield.transfer(drawing, stack.emission.near_field, settings).power
        shares["near_field"] = columns["near_field"] = beyond / ledger.rate_factor
    averages = {name: float(weight @ share) for name, share in shares.items()}
    averages["rate_factor"] = float((spectrum * steps) @ ledger.rate_factor)
    errors = {name: float(weight @ error) for name, error in ledger.errors.items()}
    order = [name for name in (*COLUMNS, "collected", "near_field") if name in columns]
    return _Booked(pd.DataFrame({name: columns[name] for name in order}), averages, errors)


def _advice(stack: Stack, drawing: Drawing, weight: Real) -> tuple[str, str]:
    if stack.film.plate:
        return "ray", "The film carries intensities alone (a plate), so there is no wave result."
    film = drawing.index[drawing.film]
    return advice.advise(drawing.wavelength_nm, weight, film, stack.film.thickness_nm)


def _where(drawing: Drawing, names: list[str], ledger: Ledger) -> pd.DataFrame:
    """Return which layer takes what, by zone, without the pairs that take nothing anywhere."""
    import pandas as pd

    zone, medium = np.nonzero(ledger.taken.any(axis=2))
    count = len(drawing.wavelength_nm)
    return pd.DataFrame(
        {
            "wavelength_nm": np.repeat(drawing.wavelength_nm, len(zone)),
            "layer": [names[each] for each in medium] * count,
            "zone": [ZONES[each] for each in zone] * count,
            "share": ledger.taken[zone, medium].T.ravel(),
        }
    )


def _reflection(drawing: Drawing, names: list[str]) -> pd.DataFrame:
    import pandas as pd

    sides = [_one_side(drawing, len(names), side) for side in (0, 1)]
    whole = pd.DataFrame(np.hstack(sides).T, columns=["wavelength_nm", "R", "T", *(f"A:{name}" for name in names)])
    whole.insert(1, "side", np.repeat(["above", "below"], len(drawing.wavelength_nm)))
    return whole


def _one_side(drawing: Drawing, media: int, side: int) -> Real:
    """Return wavelength, R, T and absorptances of light from one side; NaN where its outer medium is opaque."""
    whole = np.full((3 + media, len(drawing.wavelength_nm)), np.nan)
    whole[0] = drawing.wavelength_nm
    for chosen, scene in scenes(drawing):
        if not scene.sides[side].absorbs:
            met: Reflection = at_normal(scene, side, film_is_plate=drawing.plate[drawing.film])
            whole[1:, chosen] = np.vstack([met.reflectance, met.transmittance, met.taken])
    return whole


def _index(drawing: Drawing, names: list[str]) -> pd.DataFrame:
    import pandas as pd

    parts = np.stack([drawing.index.real, drawing.index.imag], axis=1).reshape(-1, len(drawing.wavelength_nm))
    heads = ["wavelength_nm", *(f"{name} {part}" for name in names for part in "nk")]
    return pd.DataFrame(np.vstack([drawing.wavelength_nm, parts]).T, columns=heads)


def _near_field(stack: Stack, drawing: Drawing) -> str | None:
    """Return a warning where the cut-off of a near field matters, else None."""
    asked = stack.emission.near_field
    if asked is None or stack.film.plate:
        return None
    return advice.cut_off_warning(nearfield.transfer(drawing, asked, Settings()), to_index=asked.to_index)


def _rough_faces(stack: Stack) -> list[str]:
    """Return what rough faces scatter, where that is worth a word."""
    above = [stack.above.material, *(layer.repaired for layer in stack.layers)]
    wavelength = stack.light.wavelengths_nm
    said = []
    for layer, neighbour in zip(stack.layers, above, strict=False):
        index = np.maximum(layer.repaired.index(wavelength).real, neighbour.index(wavelength).real)
        said.append(advice.roughness_warning(layer.name, layer.roughness_nm, wavelength, index))
    return [sentence for sentence in said if sentence]


def _warnings(
    stack: Stack, drawing: Drawing, names: list[str], born: births.Born, ledger: Ledger, *, advised: str, lead: str
) -> tuple[str, ...]:
    film = drawing.index[drawing.film]
    weight = born.per_nm * weights(drawing.wavelength_nm)
    said = [
        _near_field(stack, drawing)
        if stack.emission.near_field is not None
        else advice.metal_warning(names, drawing.index, drawing.thickness_nm, drawing.film),
        floor_warning(stack.film.name, stack.film.repaired, drawing.wavelength_nm, film.imag, weight),
        advice.error_warning(ledger.error),
        advice.near_field_warning(
            drawing.wavelength_nm, film, stack.film.thickness_nm, ledger.rate_factor, ledger.shares["trapped"]
        ),
        *births.births_warnings(stack, drawing, born, advised=advised, lead=lead),
    ]
    return tuple(sentence for sentence in said if sentence)
