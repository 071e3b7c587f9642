"""The spectrum born inside: as it is given, from the film's absorption, or from light seen outside."""

from dataclasses import dataclass

import numpy as np

from optics.arrays import Real
from optics.errors import InputError
from optics.fate.collection import gathered_power
from optics.fate.ledger import Ledger
from optics.fate.scenes import Drawing
from optics.fate.wave import Settings
from optics.radiation import EV_PER_K, PLACE, FromAbsorption, bleaching, equilibrium_rate
from optics.spectrum import given_per_nm, weights
from optics.stack import Stack
from optics.units import energy_eV

SIDES = ("above", "below")

AMPLIFIED = 10.0
"""Where a spectrum seen outside is divided by less than this part of the largest divisor, its noise grows as much."""

BLEACHED = 0.01
"""Bleaching of the births' absorption, in the mean over them, from which it should not be left out of the optics."""


@dataclass(frozen=True)
class Born:
    """The film material's own spectrum [1/nm], integral 1 by the trapezoid rule, and where noise was amplified."""

    per_nm: Real
    amplified: np.ndarray


def born_inside(stack: Stack, drawing: Drawing, ledger: Ledger, *, model: str, settings: Settings) -> Born:
    """Return the spectrum born inside, per unit rate factor.

    Parameters
    ----------
    stack, drawing
        What is solved.
    ledger
        Its ledger.
    model
        The model of that ledger, ``"wave"`` or ``"ray"``.
    settings
        How finely to integrate what an aperture gathers.

    Raises
    ------
    InputError
        When light was seen where none gets out.

    Notes
    -----
    Light seen outside is divided, wavelength by wavelength, by the power that this stack sends there (rate factor
    times share). That stays right however much light is taken back and born again: carriers forget the photon that
    made them, so that what they emit next has the same birth spectrum, only less of it. Every generation leaves by
    the same shares, and the sum over generations is the same spectrum times a number. (Light taken back is born again
    where it was taken; with births that are not even over depth this takes all generations to be born alike.)
    """
    spectrum, wavelength = stack.light.spectrum, drawing.wavelength_nm
    given = given_per_nm(spectrum, wavelength, film_index=drawing.index[drawing.film])
    if spectrum.seen == "inside" or isinstance(spectrum, FromAbsorption):
        return Born(given, np.zeros(given.shape, dtype=bool))
    side = SIDES.index(spectrum.seen)
    if spectrum.na is None and drawing.free[side]:
        sent = ledger.rate_factor * ledger.shares[("free_above", "free_below")[side]]
    else:
        sent = gathered_power(drawing, side=side, na=spectrum.na, model=model, settings=settings)[0]
    dark = (given > 0.0) & (sent <= 0.0)
    if dark.any():
        where = f"{wavelength[np.argmax(dark)]:.6g} nm"
        raise InputError(
            f'{PLACE}: seen: found "{spectrum.seen}", but none of the light born at {where} gets out there; '
            "the outer medium must let it pass"
        )
    born = np.divide(given, sent, out=np.zeros_like(given), where=sent > 0.0)
    return Born(born / (born @ weights(wavelength)), sent * AMPLIFIED < sent.max())


def births_warnings(stack: Stack, drawing: Drawing, born: Born, *, advised: str, lead: str) -> tuple[str, ...]:
    """Return what is to be said about the way to the birth spectrum.

    Parameters
    ----------
    stack, drawing, born
        What was solved.
    advised, lead
        The model advised for this stack, and the one whose shares a spectrum seen outside was divided by.
    """
    said = [_noise(stack, drawing, born), _bleached(stack, drawing, born)]
    if stack.light.spectrum.seen != "inside" and advised != lead:
        said.append(
            f"the spectrum seen {stack.light.spectrum.seen} was divided by shares from {lead} optics, though {advised} "
            "optics is advised here: fringes that a real film has not would go into the births"
        )
    return tuple(sentence for sentence in said if sentence)


def _noise(stack: Stack, drawing: Drawing, born: Born) -> str:
    if not born.amplified.any():
        return ""
    wavelength = drawing.wavelength_nm[born.amplified]
    share = float((born.per_nm * weights(drawing.wavelength_nm))[born.amplified].sum())
    return (
        f"light seen {stack.light.spectrum.seen}: at {wavelength.size} wavelengths from {wavelength[0]:g} to "
        f"{wavelength[-1]:g} nm its noise grows over {AMPLIFIED:g} times more than where most gets out; "
        f"{share:.1%} of the births are found there (amplifies_noise in spectra.csv)"
    )


def _bleached(stack: Stack, drawing: Drawing, born: Born) -> str:
    spectrum = stack.light.spectrum
    if not isinstance(spectrum, FromAbsorption) or spectrum.splitting_eV is None:
        return ""
    over = (energy_eV(drawing.wavelength_nm) - spectrum.splitting_eV) / (EV_PER_K * spectrum.temperature_K)
    mean = float(
        (born.per_nm * weights(drawing.wavelength_nm)) @ np.where(born.per_nm > 0.0, 1.0 - bleaching(over), 0.0)
    )
    if mean < BLEACHED:
        return ""
    return (
        f"splitting_eV = {spectrum.splitting_eV:g} bleaches {mean:.1%} of the absorption where light is born; what the "
        "film takes back is computed with the unbleached table and is too large by about as much"
    )


@dataclass(frozen=True)
class Radiation:
    """What the film's absorption implies for its radiation in the dark, over the light's wavelengths.

    Attributes
    ----------
    temperature_K
        Temperature [K].
    equilibrium_rate
        Photons emitted by the bulk [1/(cm3 s)] (van Roosbroeck & Shockley 1954).
    equilibrium_rate_in_stack
        The same times the mean rate factor [1/(cm3 s)].
    coefficient, coefficient_in_stack
        Radiative coefficient, either rate over the square of the intrinsic carrier density [cm3/s]; None where that
        was not given.
    """

    temperature_K: float
    equilibrium_rate: float
    equilibrium_rate_in_stack: float
    coefficient: float | None
    coefficient_in_stack: float | None


def radiation_of(stack: Stack, drawing: Drawing, rate_factor: float) -> Radiation | None:
    """Return what the film radiates in the dark, where its births follow from its absorption, else None."""
    spectrum = stack.light.spectrum
    if not isinstance(spectrum, FromAbsorption) or drawing.wavelength_nm.size < 2:
        return None
    film, kelvin = drawing.index[drawing.film], spectrum.temperature_K
    rate = equilibrium_rate(drawing.wavelength_nm, n=film.real, k=film.imag, temperature_K=kelvin)
    coefficient = None if spectrum.n_i_per_cm3 is None else rate / spectrum.n_i_per_cm3**2
    in_stack = None if coefficient is None else coefficient * rate_factor
    return Radiation(kelvin, rate, rate * rate_factor, coefficient, in_stack)
