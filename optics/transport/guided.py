"""Guided modes of a stack: one row a mode at one wavelength."""

from __future__ import annotations

from dataclasses import dataclass, fields, replace
from typing import TYPE_CHECKING

import numpy as np

from optics.arrays import Complex, Real
from optics.fate.drawing import drawing_of
from optics.fate.scenes import Drawing, scenes
from optics.fate.solve import medium_names
from optics.stack import Stack
from optics.units import absorption_per_cm
from optics.waves.modes import POLARISATIONS, Modes, bound_modes, neighbours

if TYPE_CHECKING:
    import pandas as pd

COLUMNS = (
    "wavelength_nm",
    "polarisation",
    "order",
    "effective_index",
    "effective_index_k",
    "share",
    "absorption_per_cm",
    "group_index",
)
"""Columns of the table of modes; one ``taken:<layer>`` follows for every medium that absorbs some mode."""

BESIDE = 1e-5
"""Relative distance of the wavelengths between which the group index takes its slope."""


@dataclass(frozen=True)
class Guided:
    """Bound modes over the wavelengths of a stack.

    Attributes
    ----------
    modes
        The modes; ``power`` is in units of what the births radiate in the bulk of the film's material.
    group_index
        c over the group velocity, (mode,): n - wavelength dn/dwavelength of the effective index's real part.
    """

    modes: Modes
    group_index: Real


def guided_modes(stack: Stack, drawing: Drawing | None = None) -> Guided:
    """Return all bound modes of the stack's thin group, and how fast they are.

    Parameters
    ----------
    stack
        A stack whose film is thin.
    drawing
        Its arrays, where they are at hand.

    Raises
    ------
    InputError
        Where a material's table does not reach.
    """
    drawing = drawing or drawing_of(stack)
    ends = _beside(stack, drawing.wavelength_nm)
    piles = [_at(stack, drawing, end) for end in ends]
    parts, speeds = [], []
    for chosen, scene in scenes(drawing):
        modes = bound_modes(scene)
        low, high = (neighbours(replace(scene, index=i[:, chosen], phase=p[:, chosen]), modes).real for i, p in piles)
        wavelength, first, last = (each[chosen][modes.wavelength] for each in (drawing.wavelength_nm, *ends))
        speeds.append(modes.index.real - wavelength * (high - low) / (last - first))
        parts.append(replace(modes, wavelength=chosen[modes.wavelength]))
    whole = {part.name: np.concatenate([getattr(m, part.name) for m in parts], axis=-1) for part in fields(Modes)}
    modes, speed = Modes(**whole), np.concatenate(speeds)
    order = np.lexsort((modes.order, modes.polarisation, modes.wavelength))
    return Guided(modes.take(order), speed[order])


def _beside(stack: Stack, wavelength_nm: Real) -> tuple[Real, Real]:
    """Return wavelengths just below and above, within the reach of every table."""
    ranges = [material.range_nm for _, material, _ in stack.media]
    low, high = max(first for first, _ in ranges), min(last for _, last in ranges)
    below = np.maximum(wavelength_nm * (1.0 - BESIDE), np.minimum(low, wavelength_nm))
    return below, np.minimum(wavelength_nm * (1.0 + BESIDE), np.maximum(high, wavelength_nm))


def _at(stack: Stack, drawing: Drawing, wavelength_nm: Real) -> tuple[Complex, Real]:
    """Return index and phase of all media at wavelengths next to the stack's own."""
    index = np.array([material.index(wavelength_nm) for _, material, _ in stack.media])
    # plates and clear half-spaces stay as real as the scene has them: their loss is none of a mode's
    walls = np.array(drawing.plate)[:, None] & ((index * index).real > 0.0)
    index = np.where(walls, index.real + 1j * 0.0, index)
    return index, 2.0 * np.pi * drawing.thickness_nm[:, None] / wavelength_nm


def modes_table(stack: Stack, guided: Guided, *, wavelength_nm: Real, rate_factor: Real) -> pd.DataFrame:
    """Return a row a mode, columns ``COLUMNS`` and ``taken:<layer>``; ``share`` is of the births at its wavelength."""
    import pandas as pd

    modes = guided.modes
    at = wavelength_nm[modes.wavelength]
    columns = {
        "wavelength_nm": at,
        "polarisation": np.array(POLARISATIONS)[modes.polarisation],
        "order": modes.order,
        "effective_index": modes.index.real,
        "effective_index_k": modes.index.imag,
        "share": modes.power / rate_factor[modes.wavelength],
        "absorption_per_cm": absorption_per_cm(modes.index.imag, at),
        "group_index": guided.group_index,
    }
    for name, taken in zip(medium_names(stack), modes.taken, strict=True):
        if taken.any():
            columns[f"taken:{name}"] = taken
    return pd.DataFrame(columns)
