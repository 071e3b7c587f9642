"""What a film that absorbs must emit: generalised Planck radiation from its own n and absorption."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike
from scipy.constants import Boltzmann, c, e, h

from optics.arrays import Real
from optics.errors import InputError
from optics.faults import Faults
from optics.units import absorption_per_cm, energy_eV

PLACE = "light.spectrum"
ROOM_K = 300.0
EV_PER_K = Boltzmann / e
LAST_NM = 5.0  # the red end in which hardly anything may be born,
MOST_AT_THE_END = 0.01  # not more than this share of the births
FAINT = 1e-6  # births below this part of the largest may rise: they move no share by more than that


@dataclass(frozen=True, kw_only=True)
class FromAbsorption:
    """Births that follow from the film's own n and absorption.

    Parameters
    ----------
    temperature_K
        Temperature of the carriers [K].
    splitting_eV
        Splitting of the quasi-Fermi levels [eV], whose carriers bleach the absorption; None: low excitation.
    n_i_per_cm3
        Intrinsic carrier density [1/cm3], from which the radiative coefficient follows; None: not known.
    seen
        ``"inside"`` alone: this is what the film gives birth to.
    """

    temperature_K: float = ROOM_K
    splitting_eV: float | None = None
    n_i_per_cm3: float | None = None
    seen: str = "inside"

    def __post_init__(self) -> None:
        faults = Faults(PLACE)
        kelvin = faults.number("temperature_K", self.temperature_K, unit="K", at_least=1, at_most=1e4, example=300)
        object.__setattr__(self, "temperature_K", kelvin)
        if self.splitting_eV is not None:
            split = faults.number("splitting_eV", self.splitting_eV, unit="eV", at_least=0, at_most=100, example=1.1)
            object.__setattr__(self, "splitting_eV", split)
        if self.n_i_per_cm3 is not None:
            density = faults.number("n_i_per_cm3", self.n_i_per_cm3, unit="1/cm3", above=0, at_most=1e25, example=1e10)
            object.__setattr__(self, "n_i_per_cm3", density)
        faults.choice("seen", self.seen, ("inside",))
        faults.settle()


def emission_per_nm(
    wavelength_nm: ArrayLike,
    *,
    n: ArrayLike,
    k: ArrayLike,
    temperature_K: float = ROOM_K,
    splitting_eV: float | None = None,
) -> Real:
    """Return the photons that an absorber emits into itself, per volume, time and wavelength [1/(cm3 s nm)].

    Parameters
    ----------
    wavelength_nm
        Vacuum wavelengths [nm].
    n, k
        The material's index at each, unexcited.
    temperature_K
        Temperature [K].
    splitting_eV
        Splitting of the quasi-Fermi levels [eV]. None: equilibrium, absorption as it is. Otherwise below every photon
        energy at which the material absorbs; beyond that there is gain.

    Notes
    -----
    Per energy it is 8 pi n^2 alpha E^2/(h^3 c^2) over exp((E - splitting)/kT) - 1 (van Roosbroeck & Shockley,
    Phys. Rev. 94, 1558, 1954; with a splitting Wuerfel, J. Phys. C 15, 3967, 1982), with the bleached absorption
    alpha tanh((E - splitting)/4kT) of symmetric bands (Katahara & Hillhouse, J. Appl. Phys. 116, 173504, 2014).
    """
    wavelength = np.asarray(wavelength_nm, dtype=float)
    energy = energy_eV(wavelength)
    over = (energy - (splitting_eV or 0.0)) / (EV_PER_K * temperature_K)
    absorption = absorption_per_cm(k, wavelength)
    if splitting_eV is not None:
        absorption = absorption * bleaching(over)
    modes = 8.0 * np.pi * e**3 / (h**3 * c**2) * 1e-4 * np.asarray(n, dtype=float) ** 2 * energy**2  # 1/(cm2 s eV)
    lit = absorption > 0.0
    # 1/(exp(x) - 1) as exp(-x)/(1 - exp(-x)): no overflow; where nothing absorbs x may have either sign
    occupation = np.exp(-over, where=lit, out=np.zeros_like(over)) / -np.expm1(-np.where(lit, over, 1.0))
    per_nm: Real = modes * absorption * occupation * energy / wavelength  # |dE/dwavelength|
    return per_nm


def bleaching(over: ArrayLike) -> Real:
    """Return tanh(x/4), the part of the absorption that carriers leave, at x = (E - splitting)/kT."""
    return np.asarray(np.tanh(0.25 * np.asarray(over, dtype=float)))


def equilibrium_rate(wavelength_nm: ArrayLike, *, n: ArrayLike, k: ArrayLike, temperature_K: float = ROOM_K) -> float:
    """Return the photons that an absorber in the dark emits into itself [1/(cm3 s)], by the trapezoid rule.

    Over the square of the intrinsic carrier density this is the radiative coefficient of the bulk
    (van Roosbroeck & Shockley 1954). Parameters as of `emission_per_nm`; wavelengths ascending.
    """
    from scipy.integrate import trapezoid

    rate = emission_per_nm(wavelength_nm, n=n, k=k, temperature_K=temperature_K)
    return float(trapezoid(rate, np.asarray(wavelength_nm, dtype=float)))


def births_from_absorption(spectrum: FromAbsorption, wavelength_nm: Real, index: np.ndarray) -> Real:
    """Return the births per nm, in no particular unit, or refuse what is no emission spectrum.

    Parameters
    ----------
    spectrum
        Temperature and splitting.
    wavelength_nm
        Ascending wavelengths [nm].
    index
        Complex index of the film at each.

    Raises
    ------
    InputError
        Where the film would amplify, absorbs nothing, or absorbs on a floor below its gap.
    """
    wavelength, k = np.asarray(wavelength_nm, dtype=float), index.imag
    if not (k > 0.0).any():
        raise InputError(_said("the film absorbs nothing at the light's wavelengths, so nothing would be born"))
    _refuse_gain(spectrum, wavelength, k)
    splitting, kelvin = spectrum.splitting_eV, spectrum.temperature_K
    births = emission_per_nm(wavelength, n=index.real, k=k, temperature_K=kelvin, splitting_eV=splitting)
    if not births.max() > np.finfo(float).tiny:
        raise InputError(
            _said(f"the births at {kelvin:g} K are too few for numbers to hold; move the light to the red")
        )
    births /= births.max()
    if wavelength.size > 1:
        _refuse_floor(wavelength, k, births)
    return births


def _refuse_gain(spectrum: FromAbsorption, wavelength: Real, k: Real) -> None:
    if spectrum.splitting_eV is None:
        return
    gain = (k > 0.0) & (energy_eV(wavelength) <= spectrum.splitting_eV)
    if gain.any():
        first = wavelength[np.argmax(gain)]
        raise InputError(
            f"{PLACE}: splitting_eV: found {spectrum.splitting_eV:.12g}, expected less than the photon energy wherever "
            f"the film absorbs; from {first:.6g} nm ({float(energy_eV(first)):.4g} eV) on there would be gain"
        )


def _refuse_floor(wavelength: Real, k: Real, births: Real) -> None:
    from scipy.integrate import trapezoid

    end = f"at the red end of the light, {wavelength[-1]:.6g} nm (k = {k[-1]:.2g})"
    cure = 'put a tail there (tail = "fit" in the layer), give a cleaner table, or let the light reach further'
    floor = "that is a floor or a cut, not a tail, and its births are not real"
    if births[-1] > births[-2] and births[-1] > FAINT:
        raise InputError(_said(f"births still rise {end}: {floor}; {cure}"))
    edge = max(wavelength[-1] - LAST_NM, wavelength[0])
    late = np.concatenate([[edge], wavelength[wavelength > edge]])
    share = trapezoid(np.interp(late, wavelength, births), late) / trapezoid(births, wavelength)
    if share > MOST_AT_THE_END:
        raise InputError(_said(f"{share:.1%} of the births lie in the last {LAST_NM:g} nm {end}: {floor}; {cure}"))


def _said(message: str) -> str:
    return f'{PLACE}: kind "from-absorption": {message}'
