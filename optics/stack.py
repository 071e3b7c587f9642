"""The stack: layers between two outer media, the light asked for and how it is emitted. No file is needed to have one."""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field, replace
from typing import Any, Literal, TypeAlias

import numpy as np

from optics.byvalue import ByValue, FloatArray, read_only
from optics.errors import InputError
from optics.faults import Faults, found
from optics.media.domain import RANGE_SLACK
from optics.media.material import Material
from optics.spectrum import Gaussian, Spectrum, SpectrumTable, ascending, births_per_nm
from optics.units import nm_from_mm, nm_from_um

PLATE_LIMIT_NM = 20_000.0  # a thicker layer carries intensities, not phases
ISOTROPIC = 2.0 / 3.0  # share of in-plane dipoles when all directions are alike
THICKNESS_TO_NM = {"thickness_nm": float, "thickness_um": nm_from_um, "thickness_mm": nm_from_mm}
THICKNESS_EXAMPLES = {"thickness_nm": 480, "thickness_um": 0.48, "thickness_mm": 1.1}
LIGHT_RANGE_NM = (10.0, 1e6)  # outside it a wavelength is a slip of the unit
MOST_WAVELENGTHS = 100_000
OUTER_NAMES = ("above", "below")
DEPTHS_LATER = ("pump_nm", "decay_nm", "at_nm", "table")

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
    """

    name: str
    material: Material
    thickness_nm: float
    emits: bool = False
    phases: Phases | None = None

    def __post_init__(self) -> None:
        faults = Faults(f'layer "{self.name}"' if isinstance(self.name, str) else "layer")
        faults.text("name", self.name, expected='a short text, for example "film"')
        if self.name in OUTER_NAMES:
            faults.add("name", f'found "{self.name}", which names an outer medium; choose another name')
        _check_type(faults, "material", self.material, Material)
        thickness = faults.number("thickness_nm", self.thickness_nm, unit="nm", above=0, example=480)
        faults.flag("emits", self.emits)
        if self.phases is not None:
            faults.choice("phases", self.phases, ("keep", "ignore"))
        faults.settle()
        object.__setattr__(self, "thickness_nm", thickness)
        object.__setattr__(self, "emits", bool(self.emits))

    @property
    def plate(self) -> bool:
        """Whether the layer carries intensities alone: over 20 um, unless `phases` says otherwise."""
        if self.phases is not None:
            return self.phases == "ignore"
        return self.thickness_nm > PLATE_LIMIT_NM


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
        _check_type(faults, "material", self.material, Material)
        if self.counts_as is not None:
            faults.choice("counts_as", self.counts_as, ("free", "held"))
        faults.settle()

    @property
    def free(self) -> bool:
        """Whether light that reaches it counts as free."""
        return self.material.gas if self.counts_as is None else self.counts_as == "free"


@dataclass(frozen=True, kw_only=True, eq=False)
class Light(ByValue):
    """The wavelengths asked for and the spectrum born on them.

    Parameters
    ----------
    wavelengths_nm
        Ascending wavelengths in vacuum [nm]; even steps are not needed.
    spectrum
        What the film gives birth to.
    """

    wavelengths_nm: FloatArray
    spectrum: Spectrum

    def __post_init__(self) -> None:
        faults = Faults("light")
        wavelengths = ascending(faults, "wavelengths_nm", self.wavelengths_nm)
        _check_range(faults, wavelengths)
        _check_type(faults, "spectrum", self.spectrum, Gaussian, SpectrumTable)
        faults.settle()
        births_per_nm(self.spectrum, wavelengths)
        object.__setattr__(self, "wavelengths_nm", wavelengths)

    @classmethod
    def even(cls, *, from_nm: float, to_nm: float, step_nm: float, spectrum: Spectrum) -> "Light":
        """Return light on even steps; see `even_wavelengths`."""
        return cls(wavelengths_nm=even_wavelengths(from_nm=from_nm, to_nm=to_nm, step_nm=step_nm), spectrum=spectrum)

    @property
    def range_nm(self) -> tuple[float, float]:
        """First and last wavelength [nm]."""
        return float(self.wavelengths_nm[0]), float(self.wavelengths_nm[-1])


@dataclass(frozen=True, kw_only=True)
class Emission:
    """How the film's dipoles lie and where they are.

    Parameters
    ----------
    horizontal_share
        Share of in-plane dipoles, 0 to 1; 2/3 is isotropic.
    depth
        Where in the film photons are born: ``"uniform"``.
    """

    horizontal_share: float = ISOTROPIC
    depth: str = "uniform"

    def __post_init__(self) -> None:
        faults = Faults("emission")
        share = faults.number("horizontal_share", self.horizontal_share, at_least=0, at_most=1, example=0.6667)
        _check_depth(faults, self.depth)
        faults.settle()
        object.__setattr__(self, "horizontal_share", share)


@dataclass(frozen=True, kw_only=True)
class Stack:
    """Everything that decides where a photon goes.

    Parameters
    ----------
    title
        A line that says what the stack is; may be empty.
    above, below
        The outer media.
    layers
        From above to below; one of them emits.
    light
        Wavelengths and birth spectrum.
    emission
        Dipole directions and depth.

    Raises
    ------
    InputError
        With every fault: no layer, none or two that emit, a name used twice, a material that does not cover
        the light, a film without a positive refractive index.
    """

    title: str = ""
    above: Outer
    below: Outer
    layers: tuple[Layer, ...]
    light: Light
    emission: Emission = field(default_factory=Emission)

    def __post_init__(self) -> None:
        object.__setattr__(self, "layers", tuple(self.layers))
        faults = Faults()
        faults.text("title", self.title, expected="a line of text", empty=True)
        for key, kind in (("above", Outer), ("below", Outer), ("light", Light), ("emission", Emission)):
            _check_type(faults, key, getattr(self, key), kind)
        for layer in self.layers:
            _check_type(faults, "layer", layer, Layer)
        faults.settle()
        check_layers(faults, names=[layer.name for layer in self.layers], emits=[layer.emits for layer in self.layers])
        check_media(faults, media=self.media, light=self.light)
        faults.settle()

    @property
    def film_index(self) -> int:
        """Place of the emitting layer, counted from above, the first being 0."""
        return next(place for place, layer in enumerate(self.layers) if layer.emits)

    @property
    def film(self) -> Layer:
        """The emitting layer."""
        return self.layers[self.film_index]

    @property
    def media(self) -> tuple[tuple[str, Material, bool], ...]:
        """Place, material and whether it emits, of the outer media and every layer, from above to below."""
        layers = [(f'layer "{layer.name}"', layer.material, layer.emits) for layer in self.layers]
        return (("above", self.above.material, False), *layers, ("below", self.below.material, False))

    def with_layer(self, name: str, **changes: Any) -> "Stack":
        """Return the stack with one layer changed.

        Parameters
        ----------
        name
            The layer to change.
        **changes
            Fields of `Layer`; the thickness as ``thickness_nm``, ``thickness_um`` or ``thickness_mm``; the
            material as anything `optics.media.cabinet.find` takes.
        """
        names = [layer.name for layer in self.layers]
        if name not in names:
            raise InputError(f'layer "{name}": not in this stack, which has {", ".join(names)}')
        faults = Faults(f'layer "{name}"')
        faults.known_keys(changes, ("name", "material", *THICKNESS_TO_NM, "emits", "phases"))
        changes = _in_nm(faults, changes)
        if "material" in changes:
            with faults.collecting("material"):
                changes["material"] = find(changes["material"])
        faults.settle()
        place = names.index(name)
        layers = (*self.layers[:place], replace(self.layers[place], **changes), *self.layers[place + 1 :])
        return replace(self, layers=layers)

    def with_film(self, name: str) -> "Stack":
        """Return the stack with the layer of this name emitting instead."""
        if name not in [layer.name for layer in self.layers]:
            raise InputError(f'layer "{name}": not in this stack')
        return replace(self, layers=tuple(replace(layer, emits=layer.name == name) for layer in self.layers))

    def with_above(self, material: Any, counts_as: CountsAs | None = None) -> "Stack":
        """Return the stack under another outer medium (an `Outer`, or anything `find` takes)."""
        return replace(self, above=outer(material, counts_as=counts_as, place="above"))

    def with_below(self, material: Any, counts_as: CountsAs | None = None) -> "Stack":
        """Return the stack on another outer medium (an `Outer`, or anything `find` takes)."""
        return replace(self, below=outer(material, counts_as=counts_as, place="below"))

    def with_light(self, **changes: Any) -> "Stack":
        """Return the stack with ``wavelengths_nm`` or ``spectrum`` changed."""
        _settle_keys("light", changes, ("wavelengths_nm", "spectrum"))
        return replace(self, light=replace(self.light, **changes))

    def with_emission(self, **changes: Any) -> "Stack":
        """Return the stack with ``horizontal_share`` or ``depth`` changed."""
        _settle_keys("emission", changes, ("horizontal_share", "depth"))
        return replace(self, emission=replace(self.emission, **changes))

    def flipped(self) -> "Stack":
        """Return the stack upside down."""
        return replace(self, above=self.below, below=self.above, layers=self.layers[::-1])


def even_wavelengths(*, from_nm: float, to_nm: float, step_nm: float) -> FloatArray:
    """Return wavelengths [nm] from `from_nm` to `to_nm`, both included, a whole number of steps apart."""
    faults = Faults("light")
    first = faults.number("from_nm", from_nm, unit="nm", above=0, example=700)
    last = faults.number("to_nm", to_nm, unit="nm", above=0, example=860)
    step = faults.number("step_nm", step_nm, unit="nm", above=0, example=1)
    if last <= first:
        faults.add("to_nm", f"found {last:.12g}, expected more than from_nm, {first:.12g}")
    faults.settle()
    steps = (last - first) / step
    whole = round(steps)
    if whole > MOST_WAVELENGTHS:
        faults.add("step_nm", f"found {step:.12g}, {whole} steps, expected at most {MOST_WAVELENGTHS}; widen the step")
    elif whole < 1 or abs(steps - whole) > 1e-9 * whole:  # a step like 0.1 is exact to 1e-16 only
        cure = f"to_nm = {first + max(1, int(steps)) * step:.12g} does"
        faults.add("step_nm", f"found {step:.12g}, whose steps from {first:.12g} do not end at {last:.12g}; {cure}")
    faults.settle()
    return read_only(np.linspace(first, last, whole + 1))


def outer(material: Any, *, counts_as: CountsAs | None = None, place: str = "outer") -> Outer:
    """Return an outer medium from an `Outer` or anything `optics.media.cabinet.find` takes."""
    faults = Faults(place)
    with faults.collecting():
        if isinstance(material, Outer):
            return material if counts_as is None else replace(material, counts_as=counts_as)
        return Outer(material=find(material), counts_as=counts_as)
    raise InputError(faults.lines)


def find(spec: Any) -> Material:
    """Return the material that `spec` means, as `optics.media.cabinet.find` does."""
    from optics.media import cabinet  # reads files: not needed to hold a stack

    return cabinet.find(spec)


def check_layers(faults: Faults, *, names: Sequence[str], emits: Sequence[bool]) -> None:
    """Note what is wrong with the layers taken together."""
    if not names:
        faults.add("layer", "found no layer, expected at least one; begin each with [[layer]]")
        return
    for name in dict.fromkeys(name for name in names if names.count(name) > 1):
        faults.add(f'layer "{name}"', f"name: used {names.count(name)} times, expected a name of its own for each")
    emitting = [name for name, emit in zip(names, emits, strict=True) if emit]
    if not emitting:
        faults.add("layer", f"emits: no layer emits, expected one; set emits = true in one of {', '.join(names)}")
    if len(emitting) > 1:
        faults.add("layer", f"emits: {len(emitting)} layers emit ({', '.join(emitting)}), expected one")


def check_media(faults: Faults, *, media: Iterable[tuple[str, Material, bool]], light: Light) -> None:
    """Note materials that do not cover the light, and an emitting one without a positive refractive index."""
    first, last = light.range_nm
    for place, material, emits in media:
        low, high = material.range_nm
        if first < low * (1 - RANGE_SLACK) or last > high * (1 + RANGE_SLACK):
            faults.add(
                place,
                f'material: "{material.name}" covers {low:.6g} to {high:.6g} nm, the light asks for {first:.12g} to '
                f"{last:.12g} nm; shorten the light's range, or give a material whose table reaches",
            )
            continue
        with faults.collecting(f"{place}: material"):
            index = material.index(light.wavelengths_nm).real
            if emits and index.min() <= 0:
                where = int(np.argmin(index))
                said = f"n = {index[where]:.6g} at {light.wavelengths_nm[where]:.12g} nm"
                faults.add(f"{place}: material", f"found {said}, expected n above 0 in the layer that emits")


def _check_type(faults: Faults, key: str, value: object, *kinds: type) -> None:
    if not isinstance(value, kinds):
        faults.add(key, f"found {found(value)}, expected {' or '.join(kind.__name__ for kind in kinds)}")


def _check_range(faults: Faults, wavelengths: FloatArray) -> None:
    low, high = LIGHT_RANGE_NM
    if wavelengths.size > MOST_WAVELENGTHS:
        faults.add("wavelengths_nm", f"found {wavelengths.size}, expected at most {MOST_WAVELENGTHS}")
    for value in wavelengths[[0, -1]] if wavelengths.size else ():
        if not low <= value <= high:
            faults.add("wavelengths_nm", f"found {value:.12g}, expected nm between {low:g} and {high:g}; is the unit nm?")


def _check_depth(faults: Faults, depth: object) -> None:
    later = [key for key in DEPTHS_LATER if isinstance(depth, dict) and key in depth]
    if later:
        faults.add("depth", f'found a table with {later[0]}: not available yet; expected "uniform"')
    else:
        faults.choice("depth", depth, ("uniform",))


def _settle_keys(place: str, changes: Iterable[str], valid: tuple[str, ...]) -> None:
    faults = Faults(place)
    faults.known_keys(tuple(changes), valid)
    faults.settle()


def _in_nm(faults: Faults, changes: dict[str, Any]) -> dict[str, Any]:
    """Return `changes` with the thickness, if there is one, in nm; note two of them."""
    given = [key for key in THICKNESS_TO_NM if key in changes]
    if len(given) > 1:
        faults.add(given[0], f"found {' and '.join(given)}, expected one of them")
    rest = {key: value for key, value in changes.items() if key not in THICKNESS_TO_NM}
    for key in given[:1]:
        unit = key.removeprefix("thickness_")
        number = faults.number(key, changes[key], unit=unit, above=0, example=THICKNESS_EXAMPLES[key])
        rest["thickness_nm"] = float(THICKNESS_TO_NM[key](number))
    return rest
