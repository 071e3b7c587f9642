"""Repair of an absorption floor below the gap: an Urbach tail, or absorption measured by another method, in its place.

Fits to ellipsometry cannot see absorption below about 1e3 1/cm and leave a floor there, which a film would seem to
reabsorb with. Real edges end in an exponential tail, alpha = alpha_0 exp((E - E_0)/E_U) (F. Urbach, Phys. Rev. 92,
1324, 1953). The tail takes over where its value and its slope meet those of the table; n is kept.
"""

from dataclasses import dataclass, field, replace
from functools import lru_cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

from optics.arrays import Real
from optics.errors import InputError
from optics.faults import Faults
from optics.media.bandtail import find_floor, log_slope, rows_of
from optics.media.dispersion import Medium, Tabulated
from optics.media.domain import range_text, wavelengths_inside
from optics.media.material import Material
from optics.units import absorption_per_cm, energy_eV, k_from_absorption, wavelength_nm

__all__ = ["Grafted", "MeasuredTail", "Repair", "Tail", "UrbachTail", "repair"]


JOIN_WINDOW_EV = 0.004  # slopes are compared over a few rows, well below the energy of a tail
ROOM_MEV = 25.85  # kT at 300 K: births that follow from a slower tail's absorption rise without end to the red
SLOPES_MEET = 0.05  # slopes that differ by less are said to meet: rows 1 nm apart know them no better


@dataclass(frozen=True, kw_only=True)
class MeasuredTail:
    """Absorption measured by another method, such as photothermal deflection or a sensitive photocurrent.

    Parameters
    ----------
    table
        Wavelengths [nm] and k; its n means nothing.
    path, sha256
        The file it was read from and that file's hash; no part of the value.
    understood
        How the file was read.
    """

    table: Tabulated
    path: str = field(default="", compare=False)
    sha256: str = field(default="", compare=False)
    understood: tuple[str, ...] = field(default=(), compare=False)


@dataclass(frozen=True, kw_only=True)
class Tail:
    """What to put in the place of an absorption floor.

    Parameters
    ----------
    urbach_meV
        Energy [meV] of an Urbach tail.
    red_of_nm
        The join is looked for from this wavelength [nm] on; nothing at shorter ones is touched. None looks from where
        the edge falls fastest.
    fit
        Take the Urbach energy from the table, where its edge falls fastest.
    measured
        Absorption from another method instead of an Urbach tail.
    scaled
        Whether the measured absorption is scaled to meet the table's; else both must meet by themselves.
    """

    urbach_meV: float | None = None
    red_of_nm: float | None = None
    fit: bool = False
    measured: MeasuredTail | None = None
    scaled: bool = False

    def __post_init__(self) -> None:
        faults = Faults("tail")
        kinds = [self.urbach_meV is not None, bool(self.fit), self.measured is not None]
        if sum(kinds) != 1:
            faults.add("", 'expected one of urbach_meV, "fit" and table')
        if self.urbach_meV is not None:
            meV = faults.number("urbach_meV", self.urbach_meV, unit="meV", above=0, at_most=500, example=15)
            object.__setattr__(self, "urbach_meV", meV)
        if self.red_of_nm is not None:
            nm = faults.number("red_of_nm", self.red_of_nm, unit="nm", above=0, example=785)
            object.__setattr__(self, "red_of_nm", nm)
        if self.fit and self.red_of_nm is not None:
            faults.add("red_of_nm", 'found together with "fit", which finds the place by itself')
        faults.flag("scaled", self.scaled)
        if self.scaled is True and self.measured is None:
            faults.add("scaled", "found without a table to be scaled")
        faults.settle()


@dataclass(frozen=True)
class UrbachTail:
    """A medium whose absorption is an Urbach tail from a wavelength on.

    Parameters
    ----------
    whole
        Gives n everywhere, and k up to the join.
    join_nm
        Where the tail takes over [nm].
    join_per_cm
        Absorption [1/cm] there.
    urbach_eV
        Energy [eV] over which the tail falls by a factor e.
    """

    whole: Medium
    join_nm: float
    join_per_cm: float
    urbach_eV: float

    @property
    def range_nm(self) -> tuple[float, float]:
        """First and last wavelength [nm]: those of n."""
        return self.whole.range_nm

    def index(self, wavelength_nm: ArrayLike) -> NDArray[np.complex128]:
        """Complex index, same shape as ``wavelength_nm`` [nm]; InputError outside the range."""
        inside = wavelengths_inside(wavelength_nm, self.range_nm)
        index = self.whole.index(inside)
        below = (energy_eV(inside) - energy_eV(self.join_nm)) / self.urbach_eV
        tail = k_from_absorption(self.join_per_cm * np.exp(np.minimum(below, 0.0)), inside)
        return np.asarray(index.real + 1j * np.where(inside > self.join_nm, tail, index.imag))


@dataclass(frozen=True)
class Grafted:
    """A medium whose absorption comes from another table from a wavelength on.

    Parameters
    ----------
    whole
        Gives n everywhere, and k up to the join.
    join_nm
        Where the other table takes over [nm].
    red
        The other table.
    factor
        What its k is multiplied by.
    """

    whole: Medium
    join_nm: float
    red: Tabulated
    factor: float = 1.0

    @property
    def range_nm(self) -> tuple[float, float]:
        """First and last wavelength [nm] at which n and the absorption are known."""
        first, last = self.whole.range_nm
        return first, min(last, self.red.range_nm[1])

    def index(self, wavelength_nm: ArrayLike) -> NDArray[np.complex128]:
        """Complex index, same shape as ``wavelength_nm`` [nm]; InputError outside the range."""
        inside = wavelengths_inside(wavelength_nm, self.range_nm)
        index = self.whole.index(inside)
        beyond = self.red.index(np.maximum(inside, self.join_nm)).imag * self.factor
        return np.asarray(index.real + 1j * np.where(inside > self.join_nm, beyond, index.imag))


@dataclass(frozen=True)
class Repair:
    """A repaired material, and what was done in a sentence."""

    material: Material
    said: str


@lru_cache(maxsize=64)
def repair(material: Material, tail: Tail) -> Repair:
    """Return a material with its absorption floor replaced.

    Parameters
    ----------
    material
        One whose k stands in a table.
    tail
        What to put in the floor's place.

    Raises
    ------
    InputError
        When the material has no table of k, no floor is found where one is needed, or nothing meets.
    """
    rows = rows_of(material.medium)
    if rows is None:
        raise InputError(f'tail: the k of "{material.name}" is in no table, expected one whose floor can be replaced')
    if tail.red_of_nm is not None and not rows[0][0] < tail.red_of_nm < rows[0][-1]:
        span = range_text((float(rows[0][0]), float(rows[0][-1])))
        raise InputError(
            f"tail: red_of_nm: found {tail.red_of_nm:.12g}, expected a wavelength within the table, {span}"
        )
    medium, said = _grafted(material.medium, rows, tail) if tail.measured else _urbach(material.medium, rows, tail)
    return Repair(replace(material, medium=medium), said)


def _urbach(medium: Medium, rows: tuple[Real, Real], tail: Tail) -> tuple[Medium, str]:
    floor = find_floor(*rows)
    if floor is None and tail.red_of_nm is None:
        raise InputError(
            "tail: no floor was found in the table: its absorption falls like a tail to its end; leave tail out, "
            "or say from where to replace it, { urbach_meV = 15, red_of_nm = 785 }"
        )
    if tail.fit or tail.urbach_meV is None:
        if floor is None:
            raise InputError("tail: no floor was found")
        join, meV, met = floor.steepest_nm, floor.steepest_meV, True
        how = "the energy at which the table itself falls fastest, an upper limit as the floor adds to it there"
        how += "; above kT at 300 K, so births cannot follow from it" if meV > ROOM_MEV else ""
    else:
        start = tail.red_of_nm or (floor.steepest_nm if floor else rows[0][0])
        join, slope, met = _meeting(rows, start, 1e3 / tail.urbach_meV)
        meV = tail.urbach_meV
        how = "joined in value and slope" if met else _unmet(slope)
    alpha = float(absorption_per_cm(medium.index(join).imag, join))
    said = (
        f"k beyond {join:.1f} nm replaced by an Urbach tail of {meV:.3g} meV from {alpha:.3g} 1/cm "
        f"(Urbach 1953), {how}; n is kept"
    )
    return UrbachTail(medium, join, alpha, meV / 1e3), said


def _unmet(slope: float) -> str:
    falls = f"falls by a factor e in {1e3 / slope:.0f} meV" if slope > 0.0 else "does not fall"
    return f"joined in value only: the table {falls} there, and nowhere as fast as the tail"


def _meeting(rows: tuple[Real, Real], start_nm: float, wanted: float) -> tuple[float, float, bool]:
    """Return the wavelength [nm] where the table's slope comes down to the tail's, its slope [1/eV], whether they meet.

    The first such place red of the start; where there is none, the place where the slopes come closest.
    """
    energy, _, slope = log_slope(*rows, window_eV=JOIN_WINDOW_EV)
    inside = energy <= float(energy_eV(start_nm))
    energy, slope = energy[inside][::-1], slope[inside][::-1]  # going red
    if energy.size < 2:
        raise InputError("tail: red_of_nm leaves nothing of the table to replace")
    above = slope >= wanted
    falls = np.flatnonzero(above[:-1] & ~above[1:])
    if falls.size:
        place = int(falls[0])
        part = (slope[place] - wanted) / (slope[place] - slope[place + 1])
        return float(wavelength_nm(energy[place] + part * (energy[place + 1] - energy[place]))), wanted, True
    if above.all():
        raise InputError(
            f"tail: the table falls faster than {1e3 / wanted:.3g} meV to its end: there is nothing to replace; "
            "leave tail out, or give a smaller urbach_meV"
        )
    place = int(np.argmin(np.abs(slope - wanted)))
    close = abs(slope[place] / wanted - 1.0) <= SLOPES_MEET
    return float(wavelength_nm(energy[place])), float(slope[place]), bool(close)


def _grafted(medium: Medium, rows: tuple[Real, Real], tail: Tail) -> tuple[Medium, str]:
    if tail.measured is None:
        raise InputError("tail: no table given")
    red = tail.measured.table
    low, high = max(rows[0][0], red.range_nm[0], tail.red_of_nm or 0.0), min(rows[0][-1], red.range_nm[1])
    if low >= high:
        spans = f"{range_text((float(rows[0][0]), float(rows[0][-1])))} and {range_text(red.range_nm)}"
        raise InputError(f"tail: table and material share no wavelengths to join at ({spans})")
    energy, ours, our_slope = log_slope(*rows, window_eV=JOIN_WINDOW_EV)
    other_eV, others, other_slope = log_slope(red.wavelength_nm, red.k, window_eV=JOIN_WINDOW_EV)
    shared = (energy >= float(energy_eV(high))) & (energy <= float(energy_eV(low)))
    energy = energy[shared][::-1]
    gap = (ours[shared][::-1]) - np.interp(energy, other_eV, others)
    kink = (our_slope[shared][::-1]) - np.interp(energy, other_eV, other_slope)
    join_eV, factor = _scaled_join(energy, gap, kink) if tail.scaled else (_crossing(energy, gap, kink), 1.0)
    join = float(wavelength_nm(join_eV))
    grafted = Grafted(medium, join, red, factor)
    # The logarithms are straight between rows, the tables are not: the last bit of the step goes into the factor.
    step = float(medium.index(join).imag / red.index(join).imag)
    grafted = replace(grafted, factor=step)
    name = tail.measured.path.replace("\\", "/").rsplit("/", 1)[-1] or "a table"
    scaled = f", multiplied by {step:.3g}" if tail.scaled else ""
    slopes = float(np.interp(-join_eV, -energy, kink))
    how = (
        "joined in value and slope"
        if abs(slopes) < SLOPES_MEET * 100
        else f"slopes differ by {slopes:.0f} per eV there"
    )
    return grafted, f"k beyond {join:.1f} nm taken from {name}{scaled}, {how}; n is kept"


def _crossing(energy: Real, gap: Real, kink: Real) -> float:
    """Return the energy [eV] where two logarithms of absorption cross, with the least kink of all such places."""
    turns = np.flatnonzero(gap[:-1] * gap[1:] <= 0.0)
    if not turns.size:
        least = int(np.argmin(np.abs(gap)))
        raise InputError(
            f"tail: the table's absorption meets the material's nowhere; it comes closest at "
            f"{float(wavelength_nm(energy[least])):.4g} nm, with {np.exp(-gap[least]):.3g} times as much; "
            "scaled = true lets it be multiplied to meet where the slopes do"
        )
    place = int(turns[np.argmin(np.abs(kink[turns]))])
    span = gap[place] - gap[place + 1]
    part = gap[place] / span if span else 0.0
    return float(energy[place] + part * (energy[place + 1] - energy[place]))


def _scaled_join(energy: Real, gap: Real, kink: Real) -> tuple[float, float]:
    """Return the energy [eV] where the slopes meet (the reddest such place) and the factor that makes values meet."""
    turns = np.flatnonzero(kink[:-1] * kink[1:] <= 0.0)
    place = int(turns[-1]) if turns.size else int(np.argmin(np.abs(kink)))
    return float(energy[place]), float(np.exp(gap[place]))
