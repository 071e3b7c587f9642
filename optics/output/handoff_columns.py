"""Tables of a bundle: what every column and number means, and in which unit, taken from its name."""

import re
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from pandas import DataFrame

DIGITS = 12
"""Digits kept in every format alike: far below any error, and few enough that every reader of decimals gives the same
double."""

UNITS = (
    ("_per_cm3_s", "1/(cm3 s)"),
    ("_per_cm3", "1/cm3"),
    ("_cm3_per_s", "cm3/s"),
    ("_cm2_per_s", "cm2/s"),
    ("_um_per_ps", "um/ps"),
    ("_per_um_radius", "1/um"),
    ("per_um_radius", "1/um"),
    ("_per_nm", "1/nm"),
    ("_per_cm", "1/cm"),
    ("_per_ps", "1/ps"),
    ("per_cm2", "1/cm2"),
    ("_nm", "nm"),
    ("_um", "um"),
    ("_eV", "eV"),
    ("_deg", "deg"),
    ("_K", "K"),
)

AT_DISTANCE = re.compile(r"_\d+(\.\d+)?_um$")
"""What names of amounts left at a distance end in; their unit stands before it."""

TITLES = {
    "numbers": "averages over all photons born",
    "outcomes": "where photons end, wave optics: a row a wavelength",
    "outcomes_ray": "the same from ray optics",
    "readings": "p_r, p_e and p_a by reading, averaged",
    "reading_spectra": "the same wavelength by wavelength",
    "radiative": "factors on the radiative coefficient: bulk, times P, times P (1 - p_r)",
    "birth_depth": "births over depth, mean 1",
    "index": "the n and k used, from above to below",
    "where": "which layer takes what, by zone",
    "spectra": "births and light per nm",
    "kernel": "in-plane distance at which the film takes photons back, averaged over births",
    "exponentials": "the kernel as a sum of exponentials",
    "compact": "in-plane absorption, velocity, rate and diffusivity by wavelength",
    "modes": "guided modes: a row a mode and wavelength",
    "mode_absorbers": "which layer absorbs a mode",
    "guided_spectrum": "guided light left after some distances",
    "receivers": "who takes the light of the film: a layer by name, or another end",
    "kernel_spectra": "the kernel wavelength by wavelength",
    "depth_matrix": "from birth slice to landing slice, averaged over births",
    "depth_slices": "slices of the depth matrix with what leaves the film",
    "depth_spectra": "the depth matrix wavelength by wavelength",
    "bands": "spread of the averages within the tolerances of the inputs",
    "band_spectra": "the same wavelength by wavelength",
}

ENDS = {
    "reabsorbed": "taken back by the film at once",
    "waveguided": "bound to the thin layers after its first flight",
    "substrate": "held in the plate or half-space below",
    "cover": "held in the plate or half-space above",
    "free_below": "out below",
    "free_above": "out above",
    "elsewhere": "absorbed by other layers or plates",
    "trapped": "reabsorbed + waveguided",
    "guided_reabsorbed": "part of waveguided that the film takes",
    "guided_elsewhere": "part of waveguided that other layers take",
    "guided_unfinished": "part of waveguided that nothing absorbs",
    "near_field": "handed over to neighbours beyond the light lines",
}
OF_BORN = "share of the photons born"

MEANINGS = {name: f"{OF_BORN}: {what}" for name, what in ENDS.items()}
MEANINGS |= {f"ray_{name}": f"{OF_BORN}, ray optics: {what}" for name, what in ENDS.items()}
MEANINGS |= {
    "wavelength_nm": "wavelength in vacuum",
    "energy_eV": "photon energy",
    "births_per_nm": "photons born per nm, integral 1",
    "birth_weight": "share of all births at this wavelength, its step included; sum 1",
    "rate_factor": "P: emission over that in the bulk of the film's material",
    "closure": "power found on two ways, their difference over P",
    "collected": f"{OF_BORN}: gathered by the aperture",
    "taken_back": f"{OF_BORN}: taken by the film, guided light included, held light not",
    "held": f"{OF_BORN}: held in plates or outer media",
    "p_r": f"{OF_BORN}: makes carriers in the film again",
    "p_e": f"{OF_BORN}: leaves and counts as out",
    "p_a": f"{OF_BORN}: lost",
    "p_r_bulk": "1 - P (1 - p_r): for use with the bulk's radiative rate",
    "p_e_bulk": "P p_e",
    "p_a_bulk": "P p_a",
    "reading": "what becomes of held and guided light",
    "quantity": "what is multiplied",
    "factor": "over the bulk's radiative rate",
    "rate_per_cm3_s": "emission in the dark",
    "coefficient_cm3_per_s": "radiative coefficient",
    "layer": "name of the layer or outer medium",
    "zone": "open (could leave), held (in plates) or guided light",
    "share": OF_BORN,
    "n": "real part of the index",
    "k": "imaginary part of the index",
    "absorption_per_cm": "absorption coefficient, of the power",
    "above_per_nm": "light out above per nm",
    "below_per_nm": "light out below per nm",
    "held_per_nm": "light held per nm",
    "guided_per_nm": "light guided per nm",
    "collected_per_nm": "light gathered by the aperture per nm",
    "amplifies_noise": "1 where the births come from dividing by little light",
    "temperature_K": "temperature of the radiative coefficients",
    "numerical_error": "largest estimated numerical error of any share; inputs not counted",
}
MEANINGS |= {
    "radius_from_um": "inner edge of the ring; on a line, of the cells on both sides",
    "radius_to_um": "outer edge",
    "share_rays": "part of share that flies as rays",
    "share_guided": "part of share that is guided",
    "share_held": f"{OF_BORN}: held in plates and taken on a later round trip; no part of share",
    "cumulative": f"{OF_BORN}: taken back within radius_to_um",
    "per_um_radius": "share a unit of radius",
    "per_cm2": "share an area, circular symmetry",
    "line_per_cm": "share a length on a line through the spot, mean over the cells on both sides",
    "line_cumulative": f"{OF_BORN}: taken back within |x| < radius_to_um on that line",
    "form": "radius: of cumulative; line: of line_cumulative",
    "weight": "weight of (1 - exp(-distance/length_um))",
    "length_um": "length of the exponential",
    "largest_miss": "largest difference of sum and kernel",
    "taken_back_rays": f"{OF_BORN}: taken back as rays",
    "taken_back_guided": f"{OF_BORN}: taken back as guided light",
    "bound_in_no_mode": f"{OF_BORN}: bound, but carried by no mode",
    "guided_share": f"{OF_BORN}: in guided modes",
    "absorption_in_plane_per_cm": "2 Im q, mean over the modes",
    "group_velocity_um_per_ps": "velocity of guided light, mean over the modes",
    "absorption_rate_per_ps": "absorption in the plane times group velocity",
    "diffusivity_cm2_per_s": "photon diffusivity v/(2 x absorption in the plane)",
    "diffusion_length_um": "length of the diffusion picture",
    "diffusion_miss": "largest difference of cumulative shares, diffusion and kernel",
    "polarisation": "s (TE) or p (TM)",
    "order": "0 for the highest effective index",
    "effective_index": "real part of q/k0",
    "effective_index_k": "imaginary part of q/k0",
    "group_index": "c over the group velocity",
    "depth_nm": "depth from the film's upper face",
    "births": "births there over their mean",
    "linear": "births along the pump's absorption, over their mean",
    "square": "births along its square, over their mean",
    "pump_absorbed": "share of the incident pump that the film takes",
    "pump_carriers_per_cm3": "carriers born for an incident 1 uJ/cm2, mean over the film",
    "pump_peak_carriers_per_cm3": "the same where most are born",
    "birth_from_nm": "upper face of the slice of birth, from the film's upper face",
    "birth_to_nm": "its lower face",
    "landing_from_nm": "upper face of the slice where the film takes it back",
    "landing_to_nm": "its lower face",
    "film": f"{OF_BORN}: taken back anywhere in the film",
    "depth_matrix.share": "share of the photons born in the one slice that the film takes back in the other",
    "depth_spectra.share": "the same at one wavelength",
    "depth_slices.elsewhere": f"{OF_BORN}: absorbed by other layers or plates, bound light not",
    "depth_slices.guided_elsewhere": f"{OF_BORN}: bound light that other layers absorb",
    "depth_slices.guided_unfinished": f"{OF_BORN}: bound light that nothing absorbs",
    "bands.share": "the share meant",
    "band_spectra.share": "the share meant",
    "own": "of the stack as it is given",
    "median": "over the drawn inputs",
    "low_68": "68 % lie above this and below high_68, half of the rest on either side",
    "high_68": "see low_68",
    "low_95": "95 % lie above this and below high_95",
    "high_95": "see low_95",
    "sd": "standard deviation over the drawn inputs",
    "source": "the layer that emits",
    "receiver": "the layer, or the end, that takes its light",
    "receivers.share": f"{OF_BORN}: taken by the receiver",
    "modes.share": "share of the photons born at this wavelength that goes into the mode",
    "modes.absorption_per_cm": "2 Im q, of the power along the plane",
    "absorbed_share": "share of the mode's power that the layer absorbs",
    "kernel.share": f"{OF_BORN}: taken back by the film within the ring",
    "kernel_spectra.share": "share of the photons born at this wavelength: taken back within the ring",
    "kernel_spectra.cumulative": "the same within radius_to_um",
    "inplane_taken_back": f"{OF_BORN}: taken back by the film, held light not",
    "inplane_taken_back_rays": f"{OF_BORN}: taken back as rays",
    "inplane_taken_back_guided": f"{OF_BORN}: taken back as guided light",
    "inplane_taken_back_held": f"{OF_BORN}: taken of held light on later round trips",
    "inplane_beyond_grid": f"{OF_BORN}: taken back farther than the grid reaches",
    "inplane_bound_in_no_mode": f"{OF_BORN}: bound, but carried by no mode",
    "inplane_mean_um": "mean in-plane distance at which the film takes a photon back",
    "inplane_median_um": "median in-plane distance at which the film takes a photon back",
    "inplane_90_percent_within_um": "distance within which 90 % of them lie",
    "inplane_99_percent_within_um": "distance within which 99 % of them lie",
    "inplane_taken_back_beyond": f"{OF_BORN}: taken back farther than this",
    "inplane_guided_share": f"{OF_BORN}: guided, left after this distance",
    "inplane_guided_mean_wavelength_nm": "mean wavelength of guided light after this distance",
}
for _name in (
    "absorption_in_plane_per_cm",
    "group_velocity_um_per_ps",
    "absorption_rate_per_ps",
    "diffusivity_cm2_per_s",
    "diffusion_length_um",
    "diffusion_miss",
):
    MEANINGS[f"inplane_{_name}"] = f"{MEANINGS[_name]}; mean over guided births"
for _reading in ("faces", "wide", "sphere", "lost_edges"):
    _said = _reading.replace("_", " ")
    MEANINGS |= {f"{name}_{_reading}": f"{MEANINGS[name]} (reading {_said})" for name in ("p_r", "p_e", "p_a")}
    MEANINGS[f"radiative_factor_{_reading}"] = f"P (1 - p_r), net over bulk radiative rate (reading {_said})"


@dataclass(frozen=True)
class Column:
    """A column or number: its name with the unit in it, the unit alone and what it means."""

    name: str
    unit: str
    meaning: str


@dataclass(frozen=True)
class Sheet:
    """A table ready to be written: 12 digits, numbers and text alone, not a number where there is none or no bound."""

    name: str
    title: str
    columns: tuple[Column, ...]
    values: tuple[NDArray[Any], ...]

    @property
    def rows(self) -> int:
        """Number of rows."""
        return len(self.values[0]) if self.values else 0


@dataclass(frozen=True)
class Number:
    """A single number."""

    column: Column
    value: float


def column(name: str, *, table: str = "") -> Column:
    """Return what is known of a column or number of this name."""
    plain = AT_DISTANCE.sub("", name)
    meaning = MEANINGS.get(f"{table}.{name}") or MEANINGS.get(name) or MEANINGS.get(plain, "")
    return Column(name, unit_of(name), meaning)


def unit_of(name: str) -> str:
    """Return the unit that a name ends in; 1 where it names none."""
    plain = AT_DISTANCE.sub("", name)
    return next((unit for ending, unit in UNITS if plain.endswith(ending)), "1")


def sheet(name: str, table: "DataFrame") -> Sheet:
    """Return a table ready to be written."""
    columns = tuple(column(str(each), table=name) for each in table.columns)
    values = tuple(_values(table[each].to_numpy()) for each in table.columns)
    # a column of text has no unit
    columns = tuple(
        Column(each.name, "", each.meaning) if value.dtype == object else each
        for each, value in zip(columns, values, strict=True)
    )
    return Sheet(name, TITLES.get(name, name.replace("_", " ")), columns, values)


def numbers(values: Mapping[str, float]) -> tuple[Number, ...]:
    """Return numbers ready to be written."""
    rounded = _rounded(np.array(list(values.values()), dtype=float))
    return tuple(Number(column(name), float(value)) for name, value in zip(values, rounded, strict=True))


def _values(values: NDArray[Any]) -> NDArray[Any]:
    """Return 12-digit floats, whole numbers (yes and no as 1 and 0), or text."""
    if values.dtype.kind == "f":
        return _rounded(values)
    if values.dtype.kind in "biu":
        return values.astype(np.int64)
    return np.array([str(each) for each in values], dtype=object)


def _rounded(values: NDArray[np.float64]) -> NDArray[np.float64]:
    kept = np.where(np.isfinite(values), values, np.nan)
    return np.array([float(f"{value:.{DIGITS}g}") + 0.0 for value in kept])
