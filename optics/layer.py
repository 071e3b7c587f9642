"""One layer of a stack, and the outer media that end it."""

from collections.abc import Callable
from dataclasses import dataclass, fields
from typing import Any, Literal, TypeAlias

from optics.faults import Faults, as_float, found, is_number, quoted
from optics.media.material import Material
from optics.media.tail import Tail, repair
from optics.units import nm_from_mm, nm_from_um

PLATE_LIMIT_NM = 20_000.0  # a thicker layer carries intensities, not phases
THICKNESS_TO_NM: dict[str, Callable[[float], Any]] = {
    "thickness_nm": float,
    "thickness_um": nm_from_um,
    "thickness_mm": nm_from_mm,
}
THICKNESS_EXAMPLES = {"thickness_nm": 480, "thickness_um": 0.48, "thickness_mm": 1.1}
LONGEST_NAME = 60  # characters that columns and figures have room for
OUTER_NAMES = ("above", "below")
SHARED_KEYS = ("births_share", "receives")  # of stacks with several emitting or receiving layers
BIRTHS_SLACK = 1e-6  # shares written in decimals may miss one by that much
MOST_UNEVEN = 1.0 / 6.0  # standard deviation over thickness: six of them stay inside the film

Phases: TypeAlias = Literal["keep", "ignore"]
CountsAs: TypeAlias = Literal["free", "held"]


@dataclass(frozen=True, kw_only=True)
class Layer:
    """One layer.

    Parameters
    ----------
    name
        Its name, used in messages and columns.
    material
        What it is made of.
    thickness_nm
        Thickness [nm].
    emits
        Whether photons are born in it.
    phases
        ``"keep"``: a thin layer, with interference; ``"ignore"``: a plate, without; None: by thickness.
    roughness_nm
        Root mean square height of its upper face [nm], well below a wavelength: a graded mixture of both sides.
    varies_nm
        For the emitting layer: standard deviation of its thickness within the spot [nm]; answers are the mean over it.
    tail
        What to put in the place of an absorption floor of its material; None leaves the material as it is.
    births_share
        Where several layers emit: the share of all photons that are born in this one.
    receives
        Whether what it absorbs of the film's light is asked for by name, as of a solar cell below or a second film.
    """

    name: str
    material: Material
    thickness_nm: float
    emits: bool = False
    phases: Phases | None = None
    roughness_nm: float = 0.0
    varies_nm: float = 0.0
    tail: Tail | None = None
    births_share: float | None = None
    receives: bool = False

    def __post_init__(self) -> None:
        faults = Faults(layer_place(self.name))
        check_layer(faults, **{part.name: getattr(self, part.name) for part in fields(self)})
        faults.settle()
        object.__setattr__(self, "thickness_nm", float(self.thickness_nm))
        object.__setattr__(self, "emits", bool(self.emits))
        object.__setattr__(self, "receives", bool(self.receives))
        if self.births_share is not None:
            object.__setattr__(self, "births_share", float(self.births_share))
        object.__setattr__(self, "roughness_nm", float(self.roughness_nm))
        object.__setattr__(self, "varies_nm", float(self.varies_nm))

    @property
    def plate(self) -> bool:
        """Whether the layer carries intensities alone: over 20 um, unless `phases` says otherwise."""
        if self.phases is not None:
            return self.phases == "ignore"
        return self.thickness_nm > PLATE_LIMIT_NM

    @property
    def repaired(self) -> Material:
        """Its material as light meets it: with the tail in place, if there is one."""
        return self.material if self.tail is None else repair(self.material, self.tail).material


@dataclass(frozen=True, kw_only=True)
class Outer:
    """A half-space that ends the stack.

    Parameters
    ----------
    material
        What it is made of.
    counts_as
        ``"free"``: light that gets there is out; ``"held"``: it is held in it; None: free in a gas, else held.
    """

    material: Material
    counts_as: CountsAs | None = None

    def __post_init__(self) -> None:
        faults = Faults()
        faults.kind("material", self.material, Material)
        if self.counts_as is not None:
            faults.choice("counts_as", self.counts_as, ("free", "held"))
        faults.settle()

    @property
    def free(self) -> bool:
        """Whether light that reaches it counts as free."""
        return self.material.gas if self.counts_as is None else self.counts_as == "free"


def in_nm(faults: Faults, key: str, thickness: object) -> float:
    """Return a thickness in nm; `key`, such as ``thickness_mm``, says its unit. Nan when it is none."""
    unit = key.removeprefix("thickness_")
    number = faults.number(key, thickness, unit=unit, above=0, example=THICKNESS_EXAMPLES[key])
    return float(THICKNESS_TO_NM[key](number))


def layer_place(name: object) -> str:
    """Return how messages call the layer of this name."""
    return f"layer {quoted(name)}" if isinstance(name, str) and name else "layer"


def check_layer(
    faults: Faults,
    *,
    name: object,
    material: object,
    thickness_nm: object,
    emits: object,
    phases: object,
    roughness_nm: object = 0.0,
    varies_nm: object = 0.0,
    tail: object = None,
    births_share: object = None,
    receives: object = False,
) -> None:
    """Note what is wrong with the parts of one layer."""
    faults.text("name", name, expected='a short text, for example "film"', longest=LONGEST_NAME)
    if name in OUTER_NAMES:
        faults.add("name", f'found "{name}", which names an outer medium; choose another name')
    faults.kind("material", material, Material)
    faults.number("thickness_nm", thickness_nm, unit="nm", above=0, example=480)
    faults.flag("emits", emits)
    if phases is not None:
        faults.choice("phases", phases, ("keep", "ignore"))
    faults.number("roughness_nm", roughness_nm, unit="nm", at_least=0, example=5)
    _check_varies(faults, varies_nm, thickness_nm, emits)
    faults.flag("receives", receives)
    if births_share is not None:
        faults.number("births_share", births_share, above=0, at_most=1, example=0.7)
        if not emits:
            faults.add("births_share", "found in a layer that does not emit; set emits = true in it")
    if tail is not None and not isinstance(tail, Tail):
        faults.add("tail", f"found {found(tail)}, expected a Tail")
    elif tail is not None and isinstance(material, Material):
        with faults.collecting("tail"):
            repair(material, tail)


def _check_varies(faults: Faults, varies_nm: object, thickness_nm: object, emits: object) -> None:
    """Note an unevenness of a layer that does not emit, or one that reaches through the layer."""
    varies = faults.number("varies_nm", varies_nm, unit="nm", at_least=0, example=20)
    if varies > 0 and not emits:
        faults.add("varies_nm", "found in a layer that does not emit, expected in the emitting one alone")
    elif is_number(thickness_nm) and varies > MOST_UNEVEN * as_float(thickness_nm) > 0:
        most = MOST_UNEVEN * as_float(thickness_nm)
        faults.add("varies_nm", f"found {varies:g}, expected at most a sixth of the thickness, {most:.6g}")
