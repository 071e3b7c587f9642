"""What is seen of a solved film: spectra to lay over data, the share an aperture gathers, the angular pattern."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from optics.arrays import Real
from optics.depth import Decay, DepthTable, Pump
from optics.fate.births import SIDES, Born
from optics.fate.collection import gathered_power, pattern
from optics.fate.drawing import pump_of
from optics.fate.ledger import Ledger
from optics.fate.pump import Pumped
from optics.fate.scenes import Drawing
from optics.fate.wave import Settings
from optics.stack import Stack

if TYPE_CHECKING:
    import pandas as pd

PATTERN_STEP_DEG = 0.5
DEPTHS = 201  # rows of the depth profile


def collected_share(stack: Stack, drawing: Drawing, ledger: Ledger, *, model: str, settings: Settings) -> Real | None:
    """Return the share of the photons born that the stack's aperture gathers, (wavelength,); None without one."""
    if stack.collection is None:
        return None
    side = SIDES.index(stack.collection.side)
    power, _ = gathered_power(drawing, side=side, na=stack.collection.na, model=model, settings=settings)
    share: Real = power / ledger.rate_factor
    return share


def spectra_table(table: pd.DataFrame, born: Born, *, seen_outside: bool) -> pd.DataFrame:
    """Return births and what becomes of them, per nm: the curves to be laid over data.

    Parameters
    ----------
    table
        Outcomes of the model that leads.
    born
        The birth spectrum; where light seen outside was divided by little is marked.
    seen_outside
        Whether it came from light seen outside.
    """
    import pandas as pd

    births = table["births_per_nm"]
    columns = {
        "wavelength_nm": table["wavelength_nm"],
        "energy_eV": table["energy_eV"],
        "births_per_nm": births,
        "above_per_nm": births * table["free_above"],
        "below_per_nm": births * table["free_below"],
        "held_per_nm": births * (table["substrate"] + table["cover"]),
        "guided_per_nm": births * table["waveguided"],
    }
    if "collected" in table:
        columns["collected_per_nm"] = births * table["collected"]
    if seen_outside:
        columns["amplifies_noise"] = pd.Series(born.amplified.astype(int))
    return pd.DataFrame(columns)


def pattern_table(
    stack: Stack, drawing: Drawing, tables: dict[str, pd.DataFrame], ledgers: dict[str, Ledger]
) -> pd.DataFrame:
    """Return the light that leaves on the aperture's side, per steradian and photon born, against its outside angle.

    Parameters
    ----------
    stack, drawing
        What was solved; the stack has a collection.
    tables, ledgers
        Outcomes and ledgers by model.

    Returns
    -------
    DataFrame
        ``angle_deg``, and for each model ``<model>_per_sr`` and ``<model>_lambertian_per_sr``: cos(theta)/pi times
        everything that leaves on this side.
    """
    import pandas as pd

    if stack.collection is None:
        raise ValueError("a pattern needs the side of a collection")
    angles = np.arange(0.0, 90.0 + PATTERN_STEP_DEG, PATTERN_STEP_DEG)
    side = SIDES.index(stack.collection.side)
    columns = {"angle_deg": angles}
    for model, table in tables.items():
        weight = table["birth_weight"].to_numpy() / ledgers[model].rate_factor
        columns[f"{model}_per_sr"] = pattern(drawing, angles, side=side, model=model) @ weight
        whole = weight @ gathered_power(drawing, side=side, na=None, model=model)[0]
        columns[f"{model}_lambertian_per_sr"] = whole * np.cos(np.deg2rad(angles)).clip(0.0) / np.pi
    return pd.DataFrame(columns)


def aperture_deg(stack: Stack) -> float | None:
    """Return the half angle of the stack's aperture in the outer medium [deg]; None without one, or if it takes all.

    The outer index is taken at the middle of the light.
    """
    if stack.collection is None:
        return None
    outer = stack.above if stack.collection.side == "above" else stack.below
    middle = 0.5 * (stack.light.wavelengths_nm[[0]] + stack.light.wavelengths_nm[[-1]])
    sine = stack.collection.na / float(outer.material.index(middle).real[0])
    return None if sine >= 1.0 else float(np.rad2deg(np.arcsin(sine)))


def pump_in(stack: Stack) -> Pumped | None:
    """Return what the stack makes of its pump; None when births do not follow one."""
    depth = stack.emission.depth
    return pump_of(stack, depth) if isinstance(depth, Pump) else None


def depth_table(stack: Stack, drawing: Drawing, pump: Pumped | None) -> pd.DataFrame | None:
    """Return births over depth, the mean over the film being 1; None when they are even, or all in a sheet.

    A pump gives both ``linear``, its absorption, and ``square``.
    """
    import pandas as pd

    depth = stack.emission.depth
    if not isinstance(depth, Pump | Decay | DepthTable):
        return None
    x = np.linspace(0.0, 1.0, DEPTHS)
    columns = {"depth_nm": x * stack.film.thickness_nm}
    if pump is None:
        columns["births"] = drawing.moments.density(x)  # type: ignore[attr-defined]  # all but even births have one
    else:
        columns |= {"linear": pump.linear.density(x), "square": pump.square.density(x)}
    return pd.DataFrame(columns)
