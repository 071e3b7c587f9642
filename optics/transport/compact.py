"""Compact forms of transport in the plane: what a model takes over when it cannot take a kernel.

Guided light alone, averaged over the modes with the share that the births put into each. The diffusion picture in two
dimensions: flights at the group velocity v end at the rate a v, a = 2 Im q, so that the mean square distance of an
exponential, 2/a^2, is 4 D/(a v): D = v/(2 a), and the steady profile is K0(r/L) with L^2 = D/(a v) = 1/(2 a^2).
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
from scipy.constants import c

from optics.arrays import Real
from optics.fate.scenes import Drawing
from optics.transport import rings

if TYPE_CHECKING:
    import pandas as pd

    from optics.transport.inplane import Parts

COLUMNS = (
    "wavelength_nm",
    "taken_back",
    "taken_back_rays",
    "taken_back_guided",
    "bound_in_no_mode",
    "guided_share",
    "absorption_in_plane_per_cm",
    "group_velocity_um_per_ps",
    "absorption_rate_per_ps",
    "diffusivity_cm2_per_s",
    "diffusion_length_um",
    "diffusion_miss",
)
"""Columns of the table of compact forms; guided quantities are not a number where no mode is."""

DISTANCES_UM = (0.0, 1.0, 3.0, 10.0, 30.0, 100.0)
NOTHING_LEFT = 1e-30
"""Of the births' peak: less guided light is written as 0."""

UM_PER_PS = c * 1e-6
"""Speed of light [um/ps]."""

CM2_PER_S = 1e8
"""One um/ps times one cm, in cm^2/s."""

ASSUMPTIONS = (
    "compact forms: absorption_in_plane_per_cm is 2 Im q, the mean over modes by the share of births in each",
    "compact forms: the group velocity is c over the mean of n - wavelength dn/dwavelength over the modes, as of "
    "pulses without loss; where n(wavelength) bends sharply it says little",
    "compact forms: the diffusivity is v/(2 x absorption in the plane), as if each flight in the plane were one step; "
    "diffusion_miss is the largest difference of the cumulative shares of its K0 profile and of the kernel",
)


def table(drawing: Drawing, parts: Parts) -> pd.DataFrame:
    """Return a row a wavelength, columns ``COLUMNS``."""
    import pandas as pd

    count = len(drawing.wavelength_nm)
    columns = {name: np.full(count, np.nan) for name in COLUMNS}
    columns["wavelength_nm"] = drawing.wavelength_nm
    columns["taken_back"] = parts.rays.total + parts.guided.total
    columns["taken_back_rays"], columns["taken_back_guided"] = parts.rays.total, parts.guided.total
    columns["bound_in_no_mode"] = parts.continuum
    if parts.modes is not None and len(parts.modes.modes):
        columns |= _guided(drawing, parts)
    return pd.DataFrame({name: columns[name] for name in COLUMNS})


def _guided(drawing: Drawing, parts: Parts) -> dict[str, Real]:
    if parts.modes is None:
        raise ValueError("no modes")
    modes, count = parts.modes.modes, len(drawing.wavelength_nm)
    share = parts.guided_shares
    whole = modes.summed(share, count)
    rate_cm = 4.0 * np.pi * modes.index.imag / drawing.wavelength_nm[modes.wavelength] * 1e7

    def mean(amount: Real) -> Real:
        out: Real = modes.summed(share * amount, count) / np.where(whole > 0.0, whole, np.nan)
        return out

    in_plane, velocity = mean(rate_cm), UM_PER_PS / mean(parts.modes.group_index)
    rate = in_plane * 1e-4 * velocity
    absorbing = np.where(in_plane > 0.0, in_plane, np.nan)
    length_um = 1e4 / (np.sqrt(2.0) * absorbing)
    return {
        "guided_share": whole,
        "absorption_in_plane_per_cm": in_plane,
        "group_velocity_um_per_ps": velocity,
        "absorption_rate_per_ps": rate,
        "diffusivity_cm2_per_s": 0.5 * velocity / absorbing * CM2_PER_S,
        "diffusion_length_um": length_um,
        "diffusion_miss": _miss(parts, length_um),
    }


def _miss(parts: Parts, length_um: Real) -> Real:
    """Return how far the diffusion picture of guided light is from the kernel that the film takes it back by."""
    whole = parts.guided.total
    kernel = parts.guided.within / np.where(whole > 0.0, whole, np.nan)
    picture = rings.on_disc_of_diffusion(
        np.where(np.isfinite(length_um), length_um, 1.0), parts.radius_nm[:, None] * 1e-3
    )
    out: Real = np.abs(kernel - picture).max(axis=0)
    return np.where(np.isfinite(length_um), out, np.nan)


def guided_spectrum(drawing: Drawing, parts: Parts, births_nm: Real) -> pd.DataFrame:
    """Return the spectrum of guided light after some distances: per nm and per photon born.

    What is below ``NOTHING_LEFT`` of the births' peak is 0: no photon is left.
    """
    import pandas as pd

    columns = {"wavelength_nm": drawing.wavelength_nm, "births_per_nm": births_nm}
    for distance in DISTANCES_UM:
        left = np.zeros(len(births_nm))
        if parts.modes is not None and len(parts.modes.modes):
            modes = parts.modes.modes
            rate_um = 4e3 * np.pi * modes.index.imag / drawing.wavelength_nm[modes.wavelength]
            left = modes.summed(parts.guided_shares * np.exp(-rate_um * distance), len(births_nm))
        guided = births_nm * left
        columns[f"guided_per_nm_{distance:g}_um"] = np.where(guided < NOTHING_LEFT * births_nm.max(), 0.0, guided)
    return pd.DataFrame(columns)


def averages(
    drawing: Drawing, parts: Parts, compact: pd.DataFrame, spectrum: pd.DataFrame, weight: Real
) -> dict[str, float]:
    """Return compact forms averaged over guided births, and mean wavelengths of the guided light."""
    said: dict[str, float] = {}
    by = weight * np.nan_to_num(compact["guided_share"].to_numpy())
    if by.sum() > 0.0:
        in_plane = float(by @ np.nan_to_num(compact["absorption_in_plane_per_cm"].to_numpy()) / by.sum())
        slowness = np.nan_to_num(1.0 / compact["group_velocity_um_per_ps"].to_numpy())
        velocity = float(by.sum() / (by @ slowness))
        said |= {"absorption_in_plane_per_cm": in_plane, "group_velocity_um_per_ps": velocity}
        said["absorption_rate_per_ps"] = in_plane * 1e-4 * velocity
        if in_plane > 0.0:
            said |= _diffusion(parts, weight, in_plane, velocity)
    steps = weight / np.where(spectrum["births_per_nm"] > 0.0, spectrum["births_per_nm"], 1.0).astype(float)
    for distance in DISTANCES_UM:
        left = spectrum[f"guided_per_nm_{distance:g}_um"].to_numpy() * steps
        if left.sum() > 0.0:
            said[f"guided_mean_wavelength_nm_{distance:g}_um"] = float(left @ drawing.wavelength_nm / left.sum())
            said[f"guided_share_{distance:g}_um"] = float(left.sum())
    return said


def _diffusion(parts: Parts, weight: Real, in_plane: float, velocity: float) -> dict[str, float]:
    length = 1e4 / (np.sqrt(2.0) * in_plane)
    said = {"diffusivity_cm2_per_s": 0.5 * velocity / in_plane * CM2_PER_S, "diffusion_length_um": length}
    whole = float(parts.guided.total @ weight)
    if whole > 0.0:
        picture = rings.on_disc_of_diffusion(np.array(length), parts.radius_nm * 1e-3)
        said["diffusion_miss"] = float(np.abs(parts.guided.within @ weight / whole - picture).max())
    return said
