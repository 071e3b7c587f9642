"""The light asked for: its wavelengths and the spectrum born on them."""

from dataclasses import dataclass

import numpy as np

from optics.arrays import Real
from optics.byvalue import ByValue, read_only
from optics.faults import Faults
from optics.radiation import FromAbsorption
from optics.spectrum import Gaussian, Spectrum, SpectrumTable, ascending, given_per_nm

LIGHT_RANGE_NM = (10.0, 1e6)  # outside it a wavelength is a slip of the unit
MOST_WAVELENGTHS = 100_000


@dataclass(frozen=True, kw_only=True, eq=False)
class Light(ByValue):
    """The wavelengths asked for and the spectrum born on them.

    Parameters
    ----------
    wavelengths_nm
        Ascending wavelengths in vacuum [nm]; even steps are not needed.
    spectrum
        What the film gives birth to, or what is seen of it outside.
    """

    wavelengths_nm: Real
    spectrum: Spectrum

    def __post_init__(self) -> None:
        faults = Faults()
        wavelengths = read_only([])
        with faults.collecting():
            wavelengths = checked_wavelengths(self.wavelengths_nm)
        faults.kind("light: spectrum", self.spectrum, Gaussian, SpectrumTable, FromAbsorption)
        faults.settle()
        if not isinstance(self.spectrum, FromAbsorption):  # that needs the film: the stack looks at it
            given_per_nm(self.spectrum, wavelengths)
        object.__setattr__(self, "wavelengths_nm", wavelengths)

    @classmethod
    def even(cls, *, from_nm: float, to_nm: float, step_nm: float, spectrum: Spectrum) -> "Light":
        """Return light on even steps; see `even_wavelengths`."""
        return cls(wavelengths_nm=even_wavelengths(from_nm=from_nm, to_nm=to_nm, step_nm=step_nm), spectrum=spectrum)

    @property
    def range_nm(self) -> tuple[float, float]:
        """First and last wavelength [nm]."""
        return float(self.wavelengths_nm[0]), float(self.wavelengths_nm[-1])


def checked_wavelengths(values: object) -> Real:
    """Return wavelengths [nm] as a read-only array, or refuse what is not ascending or not in nm."""
    faults = Faults("light")
    wavelengths = ascending(faults, "wavelengths_nm", values)
    if wavelengths.size > MOST_WAVELENGTHS:
        faults.add("wavelengths_nm", f"found {wavelengths.size}, expected at most {MOST_WAVELENGTHS}")
    low, high = LIGHT_RANGE_NM
    outside = wavelengths[(wavelengths < low) | (wavelengths > high)]
    if outside.size:
        faults.add("wavelengths_nm", f"found {outside[0]:.12g}, expected {low:.12g} to {high:.12g} nm; is the unit nm?")
    faults.settle()
    return wavelengths


def even_wavelengths(*, from_nm: float, to_nm: float, step_nm: float) -> Real:
    """Return wavelengths [nm] from `from_nm` to `to_nm`, both included, a whole number of steps apart."""
    faults = Faults("light")
    first = faults.number("from_nm", from_nm, unit="nm", above=0, example=700)
    last = faults.number("to_nm", to_nm, unit="nm", above=0, example=860)
    step = faults.number("step_nm", step_nm, unit="nm", above=0, example=1)
    if last <= first:
        faults.add("to_nm", f"found {last:.12g}, expected more than from_nm, {first:.12g}")
    faults.settle()
    steps = (last - first) / step
    whole = round(min(steps, 2 * MOST_WAVELENGTHS))
    if whole > MOST_WAVELENGTHS:
        faults.add(
            "step_nm", f"found {step:.12g}, {steps:.3g} steps, expected at most {MOST_WAVELENGTHS}; widen the step"
        )
    elif whole < 1 or abs(steps - whole) > 1e-9 * whole:  # a step like 0.1 is exact to 1e-16 only
        cure = f"to_nm = {first + max(1, int(steps)) * step:.12g} does"
        faults.add("step_nm", f"found {step:.12g}, whose steps from {first:.12g} do not end at {last:.12g}; {cure}")
    faults.settle()
    return read_only(np.linspace(first, last, whole + 1))
