"""How well the numbers of a stack are known: tolerances by key path, and tables of one material that disagree."""

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Literal, TypeAlias

from optics.collection import Collection
from optics.depth import Depth
from optics.faults import Faults, found
from optics.layer import OUTER_NAMES, Layer
from optics.light import Light
from optics.media.material import Material

Shape: TypeAlias = Literal["normal", "uniform"]
SHAPES = ("normal", "uniform")
PARTS = ("light", "emission", "collection", "sample")
HALF_WIDTH_PER_SD = 3.0**0.5  # of numbers spread evenly
MOST_SD = {"normal": 0.25, "uniform": 0.5}
"""Largest standard deviation of a thickness or of a scale on k, in units of the value: the deepest of some thousand
draws stays above zero."""


@dataclass(frozen=True, kw_only=True)
class Tolerance:
    """How well one number is known.

    Parameters
    ----------
    key
        Its key path: ``film.thickness_nm`` (thicknesses in nm whatever the file says), ``film.n_offset`` (added to
        n), ``film.k_scale`` (multiplied with k), ``light.spectrum.peak_nm`` and the like.
    sd
        Standard deviation, in the unit of the number.
    shape
        ``"normal"``, or ``"uniform"``: all values within sqrt(3) standard deviations alike.
    """

    key: str
    sd: float
    shape: Shape = "normal"

    def __post_init__(self) -> None:
        faults = Faults(self.key if isinstance(self.key, str) else "tolerance")
        sd = faults.number("sd", self.sd, above=0, example=15)
        faults.choice("shape", self.shape, SHAPES)
        faults.settle()
        object.__setattr__(self, "sd", sd)


@dataclass(frozen=True, kw_only=True)
class Alternatives:
    """Other tables for one material, from other laboratories.

    Parameters
    ----------
    key
        The material's key path, ``film.material``.
    materials
        The others; the first table listed is the stack's own.
    """

    key: str
    materials: tuple[Material, ...]

    def __post_init__(self) -> None:
        object.__setattr__(self, "materials", tuple(self.materials))
        faults = Faults(self.key if isinstance(self.key, str) else "alternatives")
        if not self.materials:
            faults.add("", "found no other table, expected at least one")
        for material in self.materials:
            faults.kind("material", material, Material)
        faults.settle()


def check_doubts(
    faults: Faults, *, layers: Sequence[Layer], tolerances: Sequence[Tolerance], alternatives: Sequence[Alternatives]
) -> None:
    """Note tolerances of what is not there, given twice, or so wide that a draw could fall below zero."""
    for each in tolerances:
        faults.kind("tolerances", each, Tolerance)
    for other in alternatives:
        faults.kind("alternatives", other, Alternatives)
    if faults.lines:
        return
    places = (*(layer.name for layer in layers), *OUTER_NAMES, *PARTS)
    keys = [each.key for each in tolerances] + [other.key for other in alternatives]
    for key in dict.fromkeys(keys):
        if not isinstance(key, str) or not any(key.startswith(f"{place}.") for place in places):
            faults.add("tolerances", f"{found(key)}: names nothing in this stack")
        if keys.count(key) > 1:
            faults.add(str(key), f"found {keys.count(key)} tolerances, expected one")
    values = {f"{layer.name}.thickness_nm": layer.thickness_nm for layer in layers}
    for each in tolerances:
        value = values.get(each.key, 1.0 if each.key.endswith(".k_scale") else None)
        if value is not None and each.sd > MOST_SD[each.shape] * value:
            part = "quarter" if each.shape == "normal" else "half"
            most = f"at most {MOST_SD[each.shape] * value:g}, a {part} of the value"
            faults.add(each.key, f"sd: found {each.sd:g}, expected {most}: a draw could fall below zero")


def check_uneven(faults: Faults, *, film: Layer, light: Light, depth: Depth, collection: Collection | None) -> None:
    """Note an uneven film together with an aperture or births over depth: those are known for one thickness alone."""
    place = f'layer "{film.name}"'
    if film.varies_nm and depth != "uniform":
        faults.add(place, 'varies_nm: found together with births over depth, expected depth = "uniform"')
    seen_through = getattr(light.spectrum, "na", None)
    if film.varies_nm and (collection is not None or seen_through is not None):
        faults.add(
            place,
            "varies_nm: found together with an aperture (collection or na), expected one of the two alone",
        )


def stated(tolerances: Sequence[Tolerance]) -> list[str]:
    """Return a sentence for each tolerance."""
    return [f"{each.key} is known to {each.sd:g} (one standard deviation, {each.shape})" for each in tolerances]
