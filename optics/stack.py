"""The stack: layers between two outer media, the light asked for and how it is emitted; no file is needed."""

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, field, fields, replace
from typing import Any

import numpy as np

from optics.agreement import check_apertures, check_pump, check_spectrum
from optics.arrays import Real
from optics.collection import Collection
from optics.depth import Depth, check_depth, check_depth_in_film, opposite, turned
from optics.errors import InputError
from optics.faults import Faults, as_float, cut, is_number
from optics.layer import BIRTHS_SLACK
from optics.layer import LONGEST_NAME as LONGEST_NAME
from optics.layer import OUTER_NAMES as OUTER_NAMES
from optics.layer import PLATE_LIMIT_NM as PLATE_LIMIT_NM
from optics.layer import SHARED_KEYS as SHARED_KEYS
from optics.layer import THICKNESS_EXAMPLES as THICKNESS_EXAMPLES
from optics.layer import THICKNESS_TO_NM as THICKNESS_TO_NM
from optics.layer import CountsAs as CountsAs
from optics.layer import Layer as Layer
from optics.layer import Outer as Outer
from optics.layer import Phases as Phases
from optics.layer import check_layer as check_layer
from optics.layer import in_nm as in_nm
from optics.layer import layer_place as layer_place
from optics.light import Light
from optics.media.cabinet import MaterialLike, find
from optics.media.domain import RANGE_SLACK
from optics.media.material import Material
from optics.media.tailspec import tail_from
from optics.sample import NearField, Sample, check_reach
from optics.tolerances import Alternatives, Tolerance, check_doubts, check_uneven

ISOTROPIC = 2.0 / 3.0  # share of in-plane dipoles when all directions are alike
LONGEST_TITLE = 200  # characters that figures have room for
MOST_ROUGHNESS = 0.05  # of a wavelength: Aspnes 1982 asks for structure well below it
HALF_WIDTH_PER_RMS = 3.0**0.5  # of heights spread evenly


@dataclass(frozen=True, kw_only=True)
class Emission:
    """How the film's dipoles lie and where they are.

    Parameters
    ----------
    horizontal_share
        Share of in-plane dipoles, 0 to 1; 2/3 is isotropic.
    depth
        Where in the film photons are born: ``"uniform"``, or a `Pump`, `Decay`, `Sheet` or `DepthTable`.
    near_field
        How energy transfer beyond the light lines is counted; None: not at all.
    """

    horizontal_share: float = ISOTROPIC
    depth: Depth = "uniform"
    near_field: NearField | None = None

    def __post_init__(self) -> None:
        faults = Faults("emission")
        share = faults.number("horizontal_share", self.horizontal_share, at_least=0, at_most=1, example=0.6667)
        check_depth(faults, self.depth)
        if self.near_field is not None:
            faults.kind("near_field", self.near_field, NearField)
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
        From above to below; one of them emits, or several with a `births_share` each.
    light
        Wavelengths and birth spectrum.
    emission
        Dipole directions and depth.
    collection
        The aperture that gathers light outside; None: not asked for.
    sample
        Edges, scattering and what film absorption is worth; None: not asked for.
    tolerances, alternatives
        How well numbers are known, and other tables for its materials; the answer for the stack itself does not
        depend on them.

    Raises
    ------
    InputError
        With every fault: no layer, none or two that emit, a name used twice, a material that does not cover
        the light or the pump, a film without a positive refractive index, births outside the film.
    """

    title: str = ""
    above: Outer
    below: Outer
    layers: tuple[Layer, ...]
    light: Light
    emission: Emission = field(default_factory=Emission)
    collection: Collection | None = None
    sample: Sample | None = None
    tolerances: tuple[Tolerance, ...] = ()
    alternatives: tuple[Alternatives, ...] = ()

    def __post_init__(self) -> None:
        object.__setattr__(self, "layers", tuple(self.layers))
        for name in ("tolerances", "alternatives"):  # a file has no order of its own for these
            ordered = sorted(getattr(self, name), key=lambda each: str(getattr(each, "key", "")))
            object.__setattr__(self, name, tuple(ordered))
        faults = Faults()
        for key, kind in (("above", Outer), ("below", Outer), ("light", Light), ("emission", Emission)):
            faults.kind(key, getattr(self, key), kind)
        for layer in self.layers:
            faults.kind("layer", layer, Layer)
        if self.collection is not None:
            faults.kind("collection", self.collection, Collection)
        if self.sample is not None:
            faults.kind("sample", self.sample, Sample)
        faults.settle()
        check_title(faults, self.title)
        check_layers(
            faults,
            names=[layer.name for layer in self.layers],
            emits=[layer.emits for layer in self.layers],
            births=[layer.births_share for layer in self.layers],
        )
        check_media(faults, media=self.media, wavelengths_nm=self.light.wavelengths_nm)
        faults.settle()
        check_depth_in_film(
            faults, self.emission.depth, film=layer_place(self.film.name), thickness_nm=self.film.thickness_nm
        )
        check_pump(faults, media=self.media, depth=self.emission.depth)
        check_spectrum(faults, light=self.light, film=self.film.repaired)
        check_apertures(faults, media=self.media, light=self.light, collection=self.collection)
        if self.sample is not None:
            check_reach(faults, sample=self.sample, wavelengths_nm=self.light.wavelengths_nm)
        check_doubts(faults, layers=self.layers, tolerances=self.tolerances, alternatives=self.alternatives)
        check_uneven(faults, film=self.film, light=self.light, depth=self.emission.depth, collection=self.collection)
        check_roughness(faults, layers=self.layers, shortest_nm=self.light.range_nm[0])
        faults.settle()

    @property
    def film_index(self) -> int:
        """Place of the emitting layer (of several, the uppermost), counted from above, the first being 0."""
        return next(place for place, layer in enumerate(self.layers) if layer.emits)

    @property
    def film(self) -> Layer:
        """The emitting layer."""
        return self.layers[self.film_index]

    @property
    def media(self) -> tuple[tuple[str, Material, bool], ...]:
        """Place, material and whether it emits, of the outer media and every layer, from above to below."""
        layers = [(layer_place(layer.name), layer.repaired, layer.emits) for layer in self.layers]
        return (("above", self.above.material, False), *layers, ("below", self.below.material, False))

    def with_layer(self, name: str, /, **changes: Any) -> "Stack":
        """Return the stack with one layer changed.

        Parameters
        ----------
        name
            The layer to change.
        **changes
            Fields of `Layer`; the thickness as ``thickness_nm``, ``thickness_um`` or ``thickness_mm``; the
            material as anything `optics.media.cabinet.find` takes, the tail as anything
            `optics.media.tailspec.tail_from` takes.
        """
        names = [layer.name for layer in self.layers]
        if name not in names:
            raise InputError(f"{layer_place(name)}: not in this stack, which has {', '.join(names)}")
        faults = Faults(layer_place(name))
        faults.known_keys(
            changes,
            (
                "name",
                "material",
                *THICKNESS_TO_NM,
                "emits",
                "phases",
                "roughness_nm",
                "varies_nm",
                "tail",
                *SHARED_KEYS,
            ),
        )
        given = [key for key in THICKNESS_TO_NM if key in changes]
        if len(given) > 1:
            faults.add(given[0], f"found {' and '.join(given)}, expected one of them")
        elif given:
            changes["thickness_nm"] = in_nm(faults, given[0], changes.pop(given[0]))
        if "material" in changes:
            with faults.collecting("material"):
                changes["material"] = find(changes["material"])
        if changes.get("tail") is not None:
            with faults.collecting("tail"):
                changes["tail"] = tail_from(changes["tail"])
        faults.settle()
        place = names.index(name)
        layers = (*self.layers[:place], replace(self.layers[place], **changes), *self.layers[place + 1 :])
        return replace(self, layers=layers)

    def with_film(self, name: str) -> "Stack":
        """Return the stack with the layer of this name emitting instead."""
        if name not in [layer.name for layer in self.layers]:
            raise InputError(f"{layer_place(name)}: not in this stack")
        emitting = {layer.name: layer.name == name for layer in self.layers}
        layers = (
            replace(
                layer,
                emits=emitting[layer.name],
                varies_nm=layer.varies_nm if emitting[layer.name] else 0.0,
                births_share=None,
            )
            for layer in self.layers
        )
        return replace(self, layers=tuple(layers))

    def with_above(self, material: MaterialLike | Outer, counts_as: CountsAs | None = None) -> "Stack":
        """Return the stack under another outer medium (an `Outer`, or anything `find` takes)."""
        return replace(self, above=outer(material, counts_as=counts_as, place="above"))

    def with_below(self, material: MaterialLike | Outer, counts_as: CountsAs | None = None) -> "Stack":
        """Return the stack on another outer medium (an `Outer`, or anything `find` takes)."""
        return replace(self, below=outer(material, counts_as=counts_as, place="below"))

    def with_light(self, **changes: Any) -> "Stack":
        """Return the stack with ``wavelengths_nm`` or ``spectrum`` changed."""
        _settle_keys("light", changes, ("wavelengths_nm", "spectrum"))
        return replace(self, light=replace(self.light, **changes))

    def with_emission(self, **changes: Any) -> "Stack":
        """Return the stack with ``horizontal_share``, ``depth`` or ``near_field`` changed."""
        _settle_keys("emission", changes, ("horizontal_share", "depth", "near_field"))
        return replace(self, emission=replace(self.emission, **changes))

    def with_collection(self, collection: Collection | None) -> "Stack":
        """Return the stack with another aperture, or none."""
        return replace(self, collection=collection)

    def with_sample(self, **changes: Any) -> "Stack":
        """Return the stack with fields of its `Sample` changed; one of defaults is made where there is none."""
        _settle_keys("sample", changes, tuple(part.name for part in fields(Sample)))
        return replace(self, sample=replace(self.sample or Sample(), **changes))

    def flipped(self) -> "Stack":
        """Return the stack upside down; refused where faces are rough, which belong to upper sides."""
        faults = Faults()
        for layer in self.layers:
            if layer.roughness_nm:
                faults.add(layer_place(layer.name), "roughness_nm: cannot be turned upside down; set it to 0 first")
        faults.settle()
        spectrum, collection = self.light.spectrum, self.collection
        if spectrum.seen != "inside":
            spectrum = replace(spectrum, seen=opposite(spectrum.seen))
        return replace(
            self,
            above=self.below,
            below=self.above,
            layers=self.layers[::-1],
            light=replace(self.light, spectrum=spectrum),
            emission=replace(self.emission, depth=turned(self.emission.depth, self.film.thickness_nm)),
            collection=None if collection is None else replace(collection, side=opposite(collection.side)),
        )


def outer(material: MaterialLike | Outer, *, counts_as: CountsAs | None = None, place: str = "outer") -> Outer:
    """Return an outer medium from an `Outer` or anything `optics.media.cabinet.find` takes."""
    faults = Faults(place)
    with faults.collecting():
        if isinstance(material, Outer):
            return material if counts_as is None else replace(material, counts_as=counts_as)
        return Outer(material=find(material), counts_as=counts_as)
    raise InputError(faults.lines)


def check_title(faults: Faults, title: object) -> None:
    """Note a title that is not one line of text."""
    faults.text("title", title, expected="a line of text", longest=LONGEST_TITLE, empty=True)


def check_layers(faults: Faults, *, names: Sequence[str], emits: Sequence[bool], births: Sequence[object] = ()) -> None:
    """Note what is wrong with the layers taken together."""
    if not names:
        faults.add("layer", "found no layer, expected at least one; begin each with [[layer]]")
        return
    for name in dict.fromkeys(name for name in names if names.count(name) > 1):
        faults.add(layer_place(name), f"name: used {names.count(name)} times, expected a name of its own for each")
    emitting = [cut(name) for name, emit in zip(names, emits, strict=True) if emit]
    if not emitting:
        faults.add(
            "layer", f"emits: no layer emits, expected one; set emits = true in one of {', '.join(map(cut, names))}"
        )
    shares = [births[place] for place, emit in enumerate(emits) if emit and place < len(births)]
    _check_births(faults, emitting, [share for share in shares if share is not None])


def _check_births(faults: Faults, emitting: Sequence[str], shares: Sequence[object]) -> None:
    """Note several layers that emit without a share of the births each, or shares that do not add to one."""
    if len(emitting) > 1 and len(shares) < len(emitting):
        said = f"{len(emitting)} layers emit ({', '.join(emitting)}), expected one"
        faults.add("layer", f"emits: {said}, or births_share in each of them")
        return
    numbers = [as_float(share) for share in shares if is_number(share)]
    total = sum(numbers)
    if numbers and len(numbers) == len(shares) and abs(total - 1.0) > BIRTHS_SLACK:
        faults.add("layer", f"births_share: the shares add to {total:.6g}, expected 1 over the layers that emit")


def check_media(faults: Faults, *, media: Iterable[tuple[str, Material, bool]], wavelengths_nm: Real) -> None:
    """Note materials that do not cover the light, and an emitting one without a positive refractive index."""
    first, last = float(wavelengths_nm[0]), float(wavelengths_nm[-1])
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
            index = material.index(wavelengths_nm).real
            if emits and index.min() <= 0:
                where = int(np.argmin(index))
                said = f"n = {index[where]:.6g} at {wavelengths_nm[where]:.12g} nm"
                faults.add(f"{place}: material", f"found {said}, expected n above 0 in the layer that emits")


def check_roughness(faults: Faults, *, layers: Sequence[Layer], shortest_nm: float) -> None:
    """Note faces too rough for a graded layer: against the wavelength, or against a layer that they share."""
    rough = [layer.roughness_nm for layer in layers]
    for layer, below in zip(layers, [*rough[1:], 0.0], strict=True):
        if layer.roughness_nm > shortest_nm * MOST_ROUGHNESS:
            faults.add(
                layer_place(layer.name),
                f"roughness_nm: found {layer.roughness_nm:g}, expected at most {shortest_nm * MOST_ROUGHNESS:.4g}, "
                "a twentieth of the shortest wavelength; a rougher face scatters and is no graded layer",
            )
        taken = HALF_WIDTH_PER_RMS * (layer.roughness_nm + below)
        if taken >= layer.thickness_nm:
            faults.add(
                layer_place(layer.name),
                f"roughness_nm: rough faces take {taken:.4g} nm of this layer, expected less than its "
                f"{layer.thickness_nm:.6g} nm",
            )


def _settle_keys(place: str, changes: Iterable[str], valid: tuple[str, ...]) -> None:
    faults = Faults(place)
    faults.known_keys(tuple(changes), valid)
    faults.settle()
