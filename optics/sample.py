"""The sample around the spot: where its edges are, what scatters guided light, what film absorption is worth."""

from dataclasses import dataclass
from typing import Literal, TypeAlias

import numpy as np

from optics.arrays import Real
from optics.byvalue import ByValue
from optics.errors import InputError
from optics.faults import Faults, is_number
from optics.spectrum import ascending, numbers

PLACE = "sample"
TO_EDGE_MM = 12.5
"""Distance to the edge where none is given: a spot in the middle of a sample 25 mm wide."""

EDGES = ("collected", "lost")
HIGHEST_NEAR_FIELD_INDEX = 1e4

Edges: TypeAlias = Literal["collected", "lost"]


@dataclass(frozen=True, kw_only=True, eq=False)
class PerWavelength(ByValue):
    """A number per wavelength from a table, linear between its rows.

    Parameters
    ----------
    wavelength_nm
        Ascending wavelengths [nm].
    values
        The number at each.
    """

    wavelength_nm: Real
    values: Real

    def __post_init__(self) -> None:
        faults = Faults()
        wavelength = ascending(faults, "wavelength_nm", self.wavelength_nm)
        values = numbers(faults, "values", self.values)
        if not faults.lines and values.size != wavelength.size:
            faults.add("values", f"found {values.size}, expected {wavelength.size}, one a wavelength")
        faults.settle()
        object.__setattr__(self, "wavelength_nm", wavelength)
        object.__setattr__(self, "values", values)


Amount: TypeAlias = float | PerWavelength


@dataclass(frozen=True, kw_only=True)
class Sample:
    """What surrounds the spot at which the film is lit.

    Parameters
    ----------
    to_edge_mm
        Distance from the spot to the edge, the same in all directions [mm].
    edges
        Whether light that reaches the edge is ``"collected"`` or ``"lost"``.
    guided_scatter_per_cm
        Share of guided light scattered out per length [1/cm], a number or a table.
    rms_nm, correlation_nm
        Roughness of the film's faces and its correlation length [nm], from which that is estimated instead.
    scatter_up_share
        Share of scattered guided light that leaves upwards.
    recycling_share
        Share of the film's absorption that makes carriers, a number or a table.
    """

    to_edge_mm: float = TO_EDGE_MM
    edges: Edges = "collected"
    guided_scatter_per_cm: Amount = 0.0
    rms_nm: float | None = None
    correlation_nm: float | None = None
    scatter_up_share: float = 0.5
    recycling_share: Amount = 1.0

    def __post_init__(self) -> None:
        faults = Faults(PLACE)
        taken: dict[str, Amount | None] = {
            "to_edge_mm": faults.number("to_edge_mm", self.to_edge_mm, unit="mm", at_least=0, example=TO_EDGE_MM),
            "guided_scatter_per_cm": _amount(
                faults, "guided_scatter_per_cm", self.guided_scatter_per_cm, unit="1/cm", example=2
            ),
            "recycling_share": _amount(faults, "recycling_share", self.recycling_share, at_most=1, example=0.95),
            "scatter_up_share": faults.number(
                "scatter_up_share", self.scatter_up_share, at_least=0, at_most=1, example=0.5
            ),
        }
        faults.choice("edges", self.edges, EDGES)
        taken |= self._roughness(faults)
        faults.settle()
        for name, value in taken.items():
            object.__setattr__(self, name, value)

    def _roughness(self, faults: Faults) -> dict[str, float | None]:
        given = {"rms_nm": self.rms_nm, "correlation_nm": self.correlation_nm}
        if self.rms_nm is None and self.correlation_nm is None:
            return given
        if None in given.values():
            missing = next(name for name, value in given.items() if value is None)
            faults.add(missing, "missing, expected a length in nm; rms_nm and correlation_nm go together")
            return given
        if is_number(self.guided_scatter_per_cm) and self.guided_scatter_per_cm == 0:
            pass
        else:
            faults.add("rms_nm", "found together with guided_scatter_per_cm, expected one way or the other")
        return {
            "rms_nm": faults.number("rms_nm", self.rms_nm, unit="nm", at_least=0, at_most=1000, example=3),
            "correlation_nm": faults.number("correlation_nm", self.correlation_nm, unit="nm", above=0, example=50),
        }

    @property
    def rough(self) -> bool:
        """Whether scattering is estimated from roughness."""
        return self.rms_nm is not None

    @property
    def scatters(self) -> bool:
        """Whether anything scatters guided light."""
        if self.rms_nm is not None:
            return self.rms_nm > 0.0
        given = self.guided_scatter_per_cm
        return bool(given.values.any()) if isinstance(given, PerWavelength) else given > 0.0


@dataclass(frozen=True, kw_only=True)
class NearField:
    """Energy that goes over to neighbours beyond the light lines, counted on request.

    Parameters
    ----------
    stand_off_nm
        Births nearer than this to a face of the film are left out of it [nm]: nearer, the description by smooth media
        ends, and the transfer grows without bound.
    to_index
        Where the integral is cut off: in-plane wave number over that of vacuum.
    """

    stand_off_nm: float
    to_index: float

    def __post_init__(self) -> None:
        faults = Faults("emission: near_field")
        stand_off = faults.number("stand_off_nm", self.stand_off_nm, unit="nm", above=0, example=5)
        top = faults.number("to_index", self.to_index, above=0, at_most=HIGHEST_NEAR_FIELD_INDEX, example=4)
        faults.settle()
        object.__setattr__(self, "stand_off_nm", stand_off)
        object.__setattr__(self, "to_index", top)


def at_wavelengths(key: str, amount: Amount, wavelengths_nm: Real) -> Real:
    """Return an amount of the sample at each wavelength; refused where its table does not reach."""
    if not isinstance(amount, PerWavelength):
        return np.full(wavelengths_nm.shape, float(amount))
    first, last = float(amount.wavelength_nm[0]), float(amount.wavelength_nm[-1])
    if wavelengths_nm[0] < first or wavelengths_nm[-1] > last:
        raise InputError(
            f"{PLACE}: {key}: the table covers {first:.12g} to {last:.12g} nm, the light asks for "
            f"{wavelengths_nm[0]:.12g} to {wavelengths_nm[-1]:.12g} nm; add rows that reach"
        )
    return np.interp(wavelengths_nm, amount.wavelength_nm, amount.values)


def check_reach(faults: Faults, *, sample: Sample, wavelengths_nm: Real) -> None:
    """Note tables of a sample that do not reach over the light's wavelengths."""
    for key in ("guided_scatter_per_cm", "recycling_share"):
        with faults.taking_over():
            at_wavelengths(key, getattr(sample, key), wavelengths_nm)


def sample_notes(sample: Sample, *, asked: bool = True) -> tuple[str, ...]:
    """Return what a sample takes for granted; ``asked`` tells whether the stack has it or defaults stand in."""
    given = "" if asked else " (no [sample] given: defaults)"
    said = [
        f"sample: edge {sample.to_edge_mm:g} mm from the spot in all directions, light there {sample.edges}{given}",
        f"share of the film's absorption that makes carriers: {_told(sample.recycling_share)} (recycling_share)",
    ]
    if sample.rough:
        said.append(
            f"guided light scatters by Payne & Lacey from faces of {sample.rms_nm:g} nm rms and "
            f"{sample.correlation_nm:g} nm correlation length, an estimate"
        )
    elif sample.scatters:
        said.append(f"guided light scatters, {_told(sample.guided_scatter_per_cm)} per cm")
    else:
        said.append("nothing scatters guided light (guided_scatter_per_cm = 0)")
    if sample.scatters:
        said.append(
            f"of scattered light {sample.scatter_up_share:g} leaves upwards, isotropic in the medium that touches the "
            "film's group, and is followed through the plates"
        )
    return tuple(said)


def near_field_note(near_field: NearField) -> str:
    """Say how the near field is cut off."""
    return (
        f"near field: up to an in-plane index of {near_field.to_index:g}, births within {near_field.stand_off_nm:g} nm "
        "of the film's faces left out; per photon born, beside the shares"
    )


def roughness_note(place: str, roughness_nm: float) -> str:
    """Say how a rough face is treated."""
    return (
        f"{place}: upper face rough by {roughness_nm:g} nm rms: a graded Bruggeman mixture over "
        f"{2.0 * 3.0**0.5 * roughness_nm:.4g} nm, nothing born in it, its absorption booked as other layers'"
    )


def _told(amount: Amount) -> str:
    if isinstance(amount, PerWavelength):
        return f"{amount.values.min():g} to {amount.values.max():g} (by table)"
    return f"{amount:g}"


def _amount(
    faults: Faults, key: str, value: object, *, unit: str = "", at_most: float | None = None, example: float
) -> Amount:
    if not isinstance(value, PerWavelength):
        return faults.number(key, value, unit=unit, at_least=0, at_most=at_most, example=example)
    wrong = value.values < 0 if at_most is None else (value.values < 0) | (value.values > at_most)
    if wrong.any():
        where = int(np.argmax(wrong))
        limit = "of 0 or more" if at_most is None else f"from 0 to {at_most:g}"
        faults.add(key, f"value {where + 1}: found {value.values[where]:g}, expected numbers {limit}")
    return value
