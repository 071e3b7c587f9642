"""Where in the film photons are born: evenly, by a pump, along a decay, in a sheet or as a table says."""

from dataclasses import dataclass, field, replace
from typing import Literal, TypeAlias

import numpy as np

from optics.arrays import Real
from optics.byvalue import ByValue
from optics.faults import Faults, found
from optics.spectrum import numbers

PLACE = "emission: depth"
SIDES = ("above", "below")
BIRTHS = ("linear", "square")
EXAMPLE = (
    'expected "uniform", { pump_nm = 532, side = "above" }, { decay_nm = 120, side = "above" }, { at_nm = 250 } '
    'or { table = "profile.csv" }'
)
PUMP_RANGE_NM = (10.0, 1e5)  # outside it a wavelength is a slip of the unit
MOST_ROWS = 2_000
DEPTH_SLACK = 1e-9  # a table written in decimals may end that much, relatively, before the film does

Side: TypeAlias = Literal["above", "below"]
Births: TypeAlias = Literal["linear", "square"]


@dataclass(frozen=True, kw_only=True)
class Pump:
    """Births where the excitation is absorbed, computed coherently in the same stack at normal incidence.

    Parameters
    ----------
    pump_nm
        Vacuum wavelength of the excitation [nm].
    side
        The side it comes from.
    births
        ``"linear"``: births follow the absorption; ``"square"``: its square, as luminescence of free carriers does
        before they spread.
    """

    pump_nm: float
    side: Side
    births: Births = "linear"

    def __post_init__(self) -> None:
        faults = Faults(PLACE)
        low, high = PUMP_RANGE_NM
        pump = faults.number("pump_nm", self.pump_nm, unit="nm", at_least=low, at_most=high, example=532)
        faults.choice("side", self.side, SIDES)
        faults.choice("births", self.births, BIRTHS)
        faults.settle()
        object.__setattr__(self, "pump_nm", pump)


@dataclass(frozen=True, kw_only=True)
class Decay:
    """Births that fall exponentially from one face of the film.

    Parameters
    ----------
    decay_nm
        Depth over which they fall by a factor e [nm].
    side
        The face with the most births.
    """

    decay_nm: float
    side: Side

    def __post_init__(self) -> None:
        faults = Faults(PLACE)
        length = faults.number("decay_nm", self.decay_nm, unit="nm", at_least=1e-3, example=120)
        faults.choice("side", self.side, SIDES)
        faults.settle()
        object.__setattr__(self, "decay_nm", length)


@dataclass(frozen=True, kw_only=True)
class Sheet:
    """A thin sheet of emitters.

    Parameters
    ----------
    at_nm
        Its depth below the film's upper face [nm].
    """

    at_nm: float

    def __post_init__(self) -> None:
        faults = Faults(PLACE)
        depth = faults.number("at_nm", self.at_nm, unit="nm", at_least=0, example=250)
        faults.settle()
        object.__setattr__(self, "at_nm", depth)


@dataclass(frozen=True, kw_only=True, eq=False)
class DepthTable(ByValue):
    """Births against depth, linear between the rows.

    Parameters
    ----------
    depth_nm
        Ascending depths below the film's upper face [nm], from 0 or less to the film's thickness or more.
    births
        Births at each, in any unit, none negative.
    path, sha256
        The file they were read from and that file's hash; no part of the value.
    """

    depth_nm: Real
    births: Real
    path: str = field(default="", compare=False)
    sha256: str = field(default="", compare=False)

    def __post_init__(self) -> None:
        faults = Faults(PLACE)
        depth = numbers(faults, "depth_nm", self.depth_nm)
        births = numbers(faults, "births", self.births)
        if not faults.lines:
            _check_rows(faults, depth, births)
        faults.settle()
        object.__setattr__(self, "depth_nm", depth)
        object.__setattr__(self, "births", births)


Depth: TypeAlias = Literal["uniform"] | Pump | Decay | Sheet | DepthTable
KINDS = (Pump, Decay, Sheet, DepthTable)


def check_depth(faults: Faults, depth: object) -> None:
    """Note a depth that is none."""
    if depth != "uniform" and not isinstance(depth, KINDS):
        faults.add("depth", f"found {found(depth)}, {EXAMPLE}")


def check_depth_in_film(faults: Faults, depth: Depth, *, film: str, thickness_nm: float) -> None:
    """Note a depth that lies outside the film, or that gives it no births; `film` is how messages call it."""
    if isinstance(depth, Sheet) and depth.at_nm > thickness_nm:
        faults.add(
            PLACE, f"at_nm: found {depth.at_nm:.12g}, expected 0 to {thickness_nm:.12g}, the thickness of {film}"
        )
    if isinstance(depth, DepthTable):
        first, last = depth.depth_nm[0], depth.depth_nm[-1]
        if first > 0.0 or last < thickness_nm * (1.0 - DEPTH_SLACK):
            said = f"the profile covers {first:.12g} to {last:.12g} nm, {film} reaches from 0 to {thickness_nm:.12g} nm"
            faults.add(PLACE, f"table: {said}; add rows that reach, zeros where nothing is born")
        elif not in_film(depth, thickness_nm)[1].any():
            faults.add(PLACE, f"table: no births between 0 and {thickness_nm:.12g} nm, expected some in {film}")


def opposite(side: str) -> Side:
    """Return the other side."""
    return "below" if side == "above" else "above"


def turned(depth: Depth, thickness_nm: float) -> Depth:
    """Return a depth as it is in the film upside down."""
    if isinstance(depth, Pump | Decay):
        return replace(depth, side=opposite(depth.side))
    if isinstance(depth, Sheet):
        return Sheet(at_nm=thickness_nm - depth.at_nm)
    if isinstance(depth, DepthTable):
        at, births = in_film(depth, thickness_nm)
        return DepthTable(depth_nm=thickness_nm - at[::-1], births=births[::-1])
    return depth


def in_film(table: DepthTable, thickness_nm: float) -> tuple[Real, Real]:
    """Return depths [nm] and births of a table cut to a film that reaches from 0 to `thickness_nm`."""
    inside = (table.depth_nm > 0.0) & (table.depth_nm < thickness_nm)
    depth = np.concatenate([[0.0], table.depth_nm[inside], [thickness_nm]])
    return depth, np.interp(depth, table.depth_nm, table.births)


def _check_rows(faults: Faults, depth: Real, births: Real) -> None:
    if not 2 <= depth.size <= MOST_ROWS:
        faults.add("depth_nm", f"found {depth.size} rows, expected 2 to {MOST_ROWS}")
    if births.size != depth.size:
        faults.add("births", f"found {births.size} values, expected {depth.size}, one a depth")
    falls = np.flatnonzero(np.diff(depth) <= 0)
    if falls.size:
        row = int(falls[0]) + 1
        said = f"value {row + 1}: found {depth[row]:.12g} after {depth[row - 1]:.12g}"
        faults.add("depth_nm", f"{said}, expected ascending depths, none twice; sort them")
    if births.min() < 0:
        row = int(np.argmax(births < 0))
        faults.add("births", f"value {row + 1}: found {births[row]:g}, expected births of 0 or more")
    elif not births.any():
        faults.add("births", "found zeros alone, expected births somewhere")
