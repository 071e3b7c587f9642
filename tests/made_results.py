"""Results made up for tests of what is written and shown: no physics in them, but shares that add to one."""

from dataclasses import dataclass, field

import numpy as np
import pandas as pd

from optics.light import Light
from optics.media import find
from optics.spectrum import Gaussian, births_per_nm, weights
from optics.stack import Emission, Layer, Outer, Stack
from optics.units import energy_eV

ENDS = ("reabsorbed", "waveguided", "substrate", "cover", "free_below", "free_above", "elsewhere")
EVEN = {"reabsorbed": 0.18, "waveguided": 0.55, "substrate": 0.1, "free_below": 0.06, "free_above": 0.05}
SEVEN = {
    "reabsorbed": 0.2,
    "waveguided": 0.4,
    "substrate": 0.12,
    "cover": 0.09,
    "free_below": 0.07,
    "free_above": 0.06,
    "elsewhere": 0.06,
}


@dataclass(frozen=True)
class MadeResult:
    """What `optics.solve` returns, by its names."""

    stack: Stack
    table: pd.DataFrame | None
    ray_table: pd.DataFrame
    where: pd.DataFrame
    reflection: pd.DataFrame
    index: pd.DataFrame
    averages: dict[str, float]
    ray_averages: dict[str, float]
    wave_minus_ray: dict[str, float]
    spectra: pd.DataFrame
    advised_model: str = "wave"
    advice: str = "The film is thinner than the coherence length of its emission."
    numerical_error: float = 2e-7
    error_by_share: dict[str, float] = field(default_factory=lambda: dict.fromkeys(ENDS, 2e-7))
    pattern: pd.DataFrame | None = None
    depth: pd.DataFrame | None = None
    depth_averages: dict[str, dict[str, float]] = field(default_factory=dict)
    pump: None = None
    radiation: None = None
    measured: None = None
    sample: None = None
    moved_by_tail: dict[str, float] = field(default_factory=dict)
    warnings: tuple[str, ...] = ("k stops falling at 720 nm",)
    assumptions: tuple[str, ...] = ("births are uniform over depth",)


def made_stack(title: str = "Invented film", wavelengths_nm: object = None, film: object = 2.5 + 0.02j) -> Stack:
    """Return a film on a plate in air."""
    wavelengths = np.arange(700.0, 861.0) if wavelengths_nm is None else np.asarray(wavelengths_nm, dtype=float)
    return Stack(
        title=title,
        above=Outer(material=find("air")),
        below=Outer(material=find("air")),
        layers=(
            Layer(name="film", material=find(film), thickness_nm=480.0, emits=True),
            Layer(name="glass", material=find("float-glass"), thickness_nm=1.1e6),
        ),
        light=Light(wavelengths_nm=wavelengths, spectrum=Gaussian(peak_nm=768.0, fwhm_nm=40.0)),
        emission=Emission(),
    )


def made_result(shares: dict[str, float] | None = None, *, ray: bool = False, stack: Stack | None = None) -> MadeResult:
    """Return a result with these average shares; what is missing to one goes to ``elsewhere``."""
    stack = stack or made_stack()
    ends = dict.fromkeys(ENDS, 0.0) | (SEVEN if shares is None else shares)
    ends["elsewhere"] += 1.0 - sum(ends.values())
    table = _outcomes(stack, ends)
    averages = {name: float(table[name] @ table["birth_weight"]) for name in (*ENDS, "trapped", "rate_factor")}
    ray_ends = {name: 0.95 * share for name, share in ends.items()} | {"reabsorbed": 0.95 * ends["reabsorbed"] + 0.05}
    ray_table = _outcomes(stack, ray_ends)
    ray_averages = {name: float(ray_table[name] @ ray_table["birth_weight"]) for name in averages}
    wavelength = stack.light.wavelengths_nm
    small = pd.DataFrame({"wavelength_nm": wavelength, "share": 1 / 3})
    return MadeResult(
        stack=stack,
        table=None if ray else table,
        ray_table=ray_table,
        where=small,
        reflection=small,
        index=small,
        averages=ray_averages if ray else averages,
        ray_averages=ray_averages,
        spectra=_spectra(table),
        wave_minus_ray={} if ray else {name: averages[name] - ray_averages[name] for name in averages},
    )


def _spectra(table: pd.DataFrame) -> pd.DataFrame:
    births = table["births_per_nm"]
    lights = {"above": table["free_above"], "below": table["free_below"], "held": table["substrate"] + table["cover"]}
    lights["guided"] = table["waveguided"]
    columns = {f"{name}_per_nm": births * share for name, share in lights.items()}
    return table[["wavelength_nm", "energy_eV", "births_per_nm"]].assign(**columns)


def _outcomes(stack: Stack, ends: dict[str, float]) -> pd.DataFrame:
    wavelength = stack.light.wavelengths_nm
    births = births_per_nm(stack.light.spectrum, wavelength)
    # Reabsorption falls along the spectrum and guided light takes over, as in real films.
    slope = np.linspace(1.0, -1.0, wavelength.size) if wavelength.size > 1 else np.zeros(1)
    tilt = min(ends["reabsorbed"], ends["waveguided"]) * slope
    columns = {name: np.full(wavelength.shape, share) for name, share in ends.items()}
    columns["reabsorbed"] = columns["reabsorbed"] + tilt
    columns["waveguided"] = columns["waveguided"] - tilt
    front = {
        "wavelength_nm": wavelength,
        "energy_eV": energy_eV(wavelength),
        "births_per_nm": births,
        "birth_weight": births * weights(wavelength),
        "rate_factor": np.full(wavelength.shape, 0.947),
    }
    back = {"trapped": columns["reabsorbed"] + columns["waveguided"], "closure": np.full(wavelength.shape, 1e-12)}
    return pd.DataFrame(front | columns | back)
