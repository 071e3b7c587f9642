"""The main job: from a stack to where each photon goes."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

import numpy as np

from optics.assumptions import assumptions
from optics.fate import advice, ray, wave_account
from optics.fate.ledger import SHARES, ZONES, Ledger, draw_up, merge
from optics.fate.reflection import Reflection, at_normal
from optics.fate.scenes import Drawing, scenes
from optics.fate.wave import Settings
from optics.media.checks import floor_warning
from optics.spectrum import births_per_nm, weights
from optics.stack import Stack
from optics.units import energy_eV
from optics.waves.coherent import Real

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
"""Columns of ``Result.table`` and ``Result.ray_table``."""


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
    warnings, assumptions
        Sentences.
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
    warnings: tuple[str, ...] = field(default=())
    assumptions: tuple[str, ...] = field(default=())

    @property
    def numerical_error(self) -> float:
        """Largest estimated error of any share at any wavelength."""
        return float(self.errors.max())


def drawing_of(stack: Stack) -> Drawing:
    """Return a stack's arrays at its wavelengths.

    Raises
    ------
    InputError
        Where a material's table does not reach.
    """
    wavelength = stack.light.wavelengths_nm
    return Drawing(
        wavelength_nm=wavelength,
        index=np.array([material.index(wavelength) for _, material, _ in stack.media]),
        thickness_nm=np.array([0.0, *(layer.thickness_nm for layer in stack.layers), 0.0]),
        plate=(True, *(layer.plate for layer in stack.layers), True),
        film=stack.film_index + 1,
        free=(stack.above.free, stack.below.free),
        in_plane=stack.emission.horizontal_share,
    )


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
        Where a material's table does not reach.
    """
    settings = settings or Settings()
    drawing = drawing_of(stack)
    rays = ledger_of(drawing, settings, model="ray")
    waves = None if stack.film.plate else ledger_of(drawing, settings, model="wave")
    return _result(stack, drawing, waves, rays)


def ledger_of(drawing: Drawing, settings: Settings, *, model: str) -> Ledger:
    """Return the ledger of one model, ``"wave"`` or ``"ray"``."""
    integrate = {"wave": wave_account.account, "ray": ray.account}[model]
    parts = list(scenes(drawing))
    account = merge([(chosen, integrate(scene, settings)) for chosen, scene in parts], len(drawing.wavelength_nm))
    walls = [medium for medium, plate in enumerate(drawing.plate) if plate and medium != drawing.film]
    return draw_up(account, film=drawing.film, walls=walls)


def _result(stack: Stack, drawing: Drawing, waves: Ledger | None, rays: Ledger) -> Result:
    spectrum = births_per_nm(stack.light.spectrum, drawing.wavelength_nm)
    ray_table, ray_averages, _ = _booked(drawing, spectrum, rays)
    table, averages, errors = (None, ray_averages, _) if waves is None else _booked(drawing, spectrum, waves)
    lead = rays if waves is None else waves
    shares = spectrum * weights(drawing.wavelength_nm)
    model, why = _advice(stack, drawing, shares)
    names = medium_names(stack)
    return Result(
        stack=stack,
        table=table,
        ray_table=ray_table,
        where=_where(drawing, names, lead),
        reflection=_reflection(drawing, names),
        index=_index(drawing, names),
        averages=averages,
        ray_averages=ray_averages,
        wave_minus_ray={} if waves is None else {name: averages[name] - ray_averages[name] for name in SHARES},
        advised_model=model,
        advice=why,
        errors=lead.error,
        error_by_share=errors,
        warnings=_warnings(stack, drawing, names, shares, lead),
        assumptions=assumptions(stack),
    )


def medium_names(stack: Stack) -> list[str]:
    """Return the names of all media, from above to below."""
    return ["above", *(layer.name for layer in stack.layers), "below"]


def _booked(
    drawing: Drawing, spectrum: Real, ledger: Ledger
) -> tuple[pd.DataFrame, dict[str, float], dict[str, float]]:
    """Return a model's table, its averages over the photons born and their errors."""
    import pandas as pd

    steps = weights(drawing.wavelength_nm)
    births = spectrum * ledger.rate_factor
    births = births / (births @ steps)
    weight = births * steps
    columns = {
        "wavelength_nm": drawing.wavelength_nm,
        "energy_eV": energy_eV(drawing.wavelength_nm),
        "births_per_nm": births,
        "birth_weight": weight,
        "rate_factor": ledger.rate_factor,
        **ledger.shares,
        "closure": ledger.closure,
    }
    averages = {name: float(weight @ share) for name, share in ledger.shares.items()}
    averages["rate_factor"] = float((spectrum * steps) @ ledger.rate_factor)
    errors = {name: float(weight @ error) for name, error in ledger.errors.items()}
    return pd.DataFrame({name: columns[name] for name in COLUMNS}), averages, errors


def _advice(stack: Stack, drawing: Drawing, weight: Real) -> tuple[str, str]:
    if stack.film.plate:
        return "ray", "The film carries intensities alone (a plate), so there is no wave result."
    film = drawing.index[drawing.film]
    return advice.advise(drawing.wavelength_nm, weight, film, stack.film.thickness_nm)


def _where(drawing: Drawing, names: list[str], ledger: Ledger) -> pd.DataFrame:
    """Return which layer takes what, by zone, without the pairs that take nothing anywhere."""
    import pandas as pd

    parts = [
        pd.DataFrame({"wavelength_nm": drawing.wavelength_nm, "layer": name, "zone": zone, "share": taken})
        for zone, media in zip(ZONES, ledger.taken, strict=True)
        for name, taken in zip(names, media, strict=True)
        if taken.any()
    ]
    columns = ["wavelength_nm", "layer", "zone", "share"]
    whole = pd.concat(parts, ignore_index=True) if parts else pd.DataFrame(columns=columns)
    return whole.sort_values(["wavelength_nm"], kind="stable", ignore_index=True)


def _reflection(drawing: Drawing, names: list[str]) -> pd.DataFrame:
    import pandas as pd

    tables = [_one_side(drawing, names, side) for side in (0, 1)]
    return pd.concat([t for t in tables if t is not None], ignore_index=True)


def _one_side(drawing: Drawing, names: list[str], side: int) -> pd.DataFrame:
    """Return R, T and absorptances of light from one side; not a number where its outer medium is opaque."""
    import pandas as pd

    count = len(drawing.wavelength_nm)
    whole = np.full((2 + len(names), count), np.nan)
    for chosen, scene in scenes(drawing):
        if scene.sides[side].absorbs:
            continue
        met: Reflection = at_normal(scene, side, film_is_plate=drawing.plate[drawing.film])
        whole[:, chosen] = np.vstack([met.reflectance, met.transmittance, met.taken])
    head = {"wavelength_nm": drawing.wavelength_nm, "side": ("above", "below")[side], "R": whole[0], "T": whole[1]}
    return pd.DataFrame(head | {f"A:{name}": share for name, share in zip(names, whole[2:], strict=True)})


def _index(drawing: Drawing, names: list[str]) -> pd.DataFrame:
    import pandas as pd

    columns = {"wavelength_nm": drawing.wavelength_nm}
    for name, index in zip(names, drawing.index, strict=True):
        columns |= {f"{name} n": index.real, f"{name} k": index.imag}
    return pd.DataFrame(columns)


def _warnings(stack: Stack, drawing: Drawing, names: list[str], weight: Real, ledger: Ledger) -> tuple[str, ...]:
    film = drawing.index[drawing.film]
    said = [
        advice.metal_warning(names, drawing.index, drawing.thickness_nm, drawing.film),
        floor_warning(stack.film.name, stack.film.material, drawing.wavelength_nm, film.imag, weight),
        advice.error_warning(ledger.error),
    ]
    return tuple(sentence for sentence in said if sentence)
