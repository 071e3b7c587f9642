"""From plain tables, as TOML gives them, to a `Stack`: keys, units and materials; the objects check the values.

Every part is read even when others are faulty, so that one run shows all there is to mend: a part
that was refused is stood in for by a sound one, which has nothing more to be said against it.
"""

import math
from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path
from typing import Any, NamedTuple

from optics.arrays import Real
from optics.byvalue import read_only
from optics.collection import Collection
from optics.faults import Faults, found
from optics.light import Light, checked_wavelengths, even_wavelengths
from optics.media.cabinet import find
from optics.media.dispersion import Constant
from optics.media.material import Material
from optics.media.tail import Tail
from optics.media.tailspec import tail_from
from optics.radiation import FromAbsorption
from optics.sample import Sample
from optics.spectrum import Gaussian, Spectrum, given_per_nm
from optics.stack import (
    OUTER_NAMES,
    SHARED_KEYS,
    THICKNESS_TO_NM,
    Emission,
    Layer,
    Outer,
    Stack,
    check_layer,
    check_layers,
    check_media,
    check_title,
    in_nm,
    layer_place,
)
from optics.stackfile.births import spectrum_from
from optics.stackfile.depths import collection_from, depth_from
from optics.stackfile.doubts import INDEX_KEYS, Doubts
from optics.stackfile.keys import Keys
from optics.stackfile.samples import near_field_from, sample_from

STACK_KEYS = ("title", "above", "below", "light", "emission", "collection", "sample", "layer")
EVEN_KEYS = ("from_nm", "to_nm", "step_nm")
LIGHT_KEYS = (*EVEN_KEYS, "wavelengths_nm", "spectrum")
EMISSION_KEYS = ("horizontal_share", "depth", "near_field")
LAYER_KEYS = (
    "name",
    "material",
    *THICKNESS_TO_NM,
    "emits",
    "phases",
    "roughness_nm",
    "tail",
    "varies_nm",
    *SHARED_KEYS,
    *INDEX_KEYS,
)
OUTER_KEYS = ("material", "counts_as", *INDEX_KEYS)
SPEC_KEYS = ("n", "k", "published")
GRID = "a number in nm (from_nm, to_nm and step_nm, or a list wavelengths_nm)"
MATERIAL = 'a bundled name, for example "air", a table, "film.csv", or { n = 1.5, k = 0 }'

_MATERIAL = Material(name="stand-in", medium=Constant(1.0))
_SPECTRUM = Gaussian(peak_nm=1000.0, fwhm_nm=1e9)


class _Row(NamedTuple):
    """A layer as far as it could be read; the whole layer only when it has no fault."""

    name: str
    material: Material
    emits: bool
    layer: Layer | None
    births_share: object = None


def build_stack(tables: Mapping[str, Any], *, folder: str | Path = ".") -> Stack:
    """Return the stack that plain tables describe.

    Parameters
    ----------
    tables
        The content of a stack file: mappings, lists, texts and numbers. A material may also be a `Material`.
    folder
        Where the files that they name are looked for.

    Raises
    ------
    InputError
        With every fault.
    """
    faults = Faults()
    home = Path(folder).resolve()
    doubts = Doubts(faults, home)
    keys = Keys(doubts.taken_from(tables), faults, STACK_KEYS)
    title = keys.get("title", "")
    check_title(faults, title)
    above, below = (_outer(keys, side, home) for side in OUTER_NAMES)
    rows = _layers(keys, home)
    wavelengths, spectrum = _light(keys, home)
    emission = _emission(keys, home)
    collection = _collection(keys)
    sample = _sample(keys, home)
    if wavelengths.size:
        media = [("above", above.material, False), ("below", below.material, False)]
        media += [(layer_place(row.name), row.material, row.emits) for row in rows]
        check_media(faults, media=media, wavelengths_nm=wavelengths)
    faults.settle()
    return Stack(
        title=title,
        above=above,
        below=below,
        layers=tuple(row.layer for row in rows if row.layer),
        light=Light(wavelengths_nm=wavelengths, spectrum=spectrum),
        emission=emission,
        collection=collection,
        sample=sample,
        tolerances=tuple(doubts.tolerances),
        alternatives=tuple(doubts.alternatives),
    )


def _material(faults: Faults, key: str, spec: Any, home: Path) -> Material:
    """Return the material meant, or note why there is none."""
    with faults.collecting(key):
        return find(spec, folder=home)
    return _MATERIAL


def _outer(keys: Keys, side: str, home: Path) -> Outer:
    spec = keys.need(side, f"what the stack ends in: {MATERIAL}")
    if spec is None or isinstance(spec, Outer):
        return spec or Outer(material=_MATERIAL)
    faults = Faults(side)
    counts_as, key = None, ""
    if isinstance(spec, Mapping) and not set(spec) <= set(SPEC_KEYS):
        table = Keys(spec, faults, OUTER_KEYS)
        counts_as, spec, key = table.get("counts_as"), table.need("material", MATERIAL), "material"
    outer = Outer(material=_MATERIAL if spec is None else _material(faults, key, spec, home))
    with faults.collecting():
        outer = replace(outer, counts_as=counts_as)
    keys.faults.lines += faults.lines
    return outer


def _layers(keys: Keys, home: Path) -> list[_Row]:
    tables = keys.get("layer", [])
    if isinstance(tables, Mapping):
        keys.faults.add("layer", "found a table [layer], expected [[layer]], in double brackets, for each layer")
        return []
    if not isinstance(tables, list | tuple):
        keys.faults.add("layer", f"found {found(tables)}, expected [[layer]] for each layer")
        return []
    rows = [_layer(keys.faults, table, number, home) for number, table in enumerate(tables, start=1)]
    if "layer" not in keys.meant:
        births = [row.births_share for row in rows]
        check_layers(keys.faults, names=[row.name for row in rows], emits=[row.emits for row in rows], births=births)
    return rows


def _layer(faults: Faults, table: Any, number: int, home: Path) -> _Row:
    if not isinstance(table, Mapping):
        faults.add(f"layer {number}", f"found {found(table)}, expected a table, [[layer]]")
        return _Row(name=f"layer {number}", material=_MATERIAL, emits=False, layer=None)
    name = table.get("name")
    label = name if isinstance(name, str) and name else f"layer {number}"
    own = Faults(layer_place(name) if label == name else label)
    keys = Keys(table, own, LAYER_KEYS)
    keys.need("name", 'a short text, for example "film"')
    spec = keys.need("material", MATERIAL)
    unit = keys.which(THICKNESS_TO_NM, "a thickness, for example thickness_nm = 480")
    thickness = in_nm(own, unit, keys.get(unit)) if unit else math.nan
    # A misspelt "emits" was meant: that no layer emits would be a second fault of the same slip.
    parts = {
        "name": keys.get("name", label),
        "material": _MATERIAL if spec is None else _material(own, "material", spec, home),
        "thickness_nm": thickness if math.isfinite(thickness) else 1.0,
        "emits": keys.get("emits", "emits" in keys.meant),
        "phases": keys.get("phases"),
        "roughness_nm": keys.get("roughness_nm", 0.0),
        "varies_nm": keys.get("varies_nm", 0.0),
        "tail": _tail(own, keys.get("tail"), home),
        "births_share": keys.get("births_share"),
        "receives": keys.get("receives", False),
    }
    check_layer(own, **parts)
    faults.lines += own.lines
    layer = None if own.lines else Layer(**parts)
    material = layer.repaired if layer else parts["material"]
    share = parts["births_share"]
    return _Row(name=label, material=material, emits=bool(parts["emits"]), layer=layer, births_share=share)


def _tail(faults: Faults, spec: Any, home: Path) -> Tail | None:
    """Return the tail meant, or note why there is none."""
    if spec is not None:
        with faults.collecting("tail"):
            return tail_from(spec, folder=home)
    return None


def _light(keys: Keys, home: Path) -> tuple[Real, Spectrum]:
    """Return wavelengths, none when they were refused, and the spectrum."""
    faults = keys.faults
    light = keys.table("light")
    if light is None:
        if "light" not in keys.given:
            keys.need("light", "a table [light] with from_nm, to_nm, step_nm and [light.spectrum]")
        return read_only([]), _SPECTRUM
    own = Keys(light, Faults("light"), LIGHT_KEYS)
    wavelengths = _wavelengths(own)
    spectrum = _spectrum(own, home)
    faults.lines += own.faults.lines
    if wavelengths.size and not isinstance(spectrum, FromAbsorption):
        with faults.collecting():
            given_per_nm(spectrum, wavelengths)
    return wavelengths, spectrum


def _wavelengths(light: Keys) -> Real:
    """Return the wavelengths asked for, none when they were refused."""
    some = [key for key in EVEN_KEYS if key in light.given]
    with light.faults.taking_over():
        if "wavelengths_nm" in light.given and some:
            light.faults.add("wavelengths_nm", f"found together with {', '.join(some)}, expected one way or the other")
        elif "wavelengths_nm" in light.given:
            return checked_wavelengths(light.get("wavelengths_nm"))
        elif "wavelengths_nm" not in light.meant:
            values = {key: light.need(key, GRID) for key in EVEN_KEYS}
            if None not in values.values():
                return checked_wavelengths(even_wavelengths(**values))
    return read_only([])


def _spectrum(light: Keys, home: Path) -> Spectrum:
    expected = 'a table [light.spectrum], for example with kind = "gaussian", peak_nm = 768, fwhm_nm = 40'
    table = light.table("spectrum")
    if table is None:
        if "spectrum" not in light.given:
            light.need("spectrum", expected)
        return _SPECTRUM
    with light.faults.taking_over():
        return spectrum_from(table, home=home)
    return _SPECTRUM


def _emission(keys: Keys, home: Path) -> Emission:
    table = keys.table("emission")
    if table is None:
        return Emission()
    own = Keys(table, Faults("emission"), EMISSION_KEYS)
    keys.faults.lines += own.faults.lines
    parts = {key: own.given[key] for key in EMISSION_KEYS if key in own.given}
    if "depth" in parts:
        spec = parts.pop("depth")
        with keys.faults.taking_over():
            parts["depth"] = depth_from(spec, home=home)
    if "near_field" in parts:
        spec = parts.pop("near_field")
        with keys.faults.taking_over():
            parts["near_field"] = near_field_from(spec)
    with keys.faults.taking_over():
        return Emission(**parts)
    return Emission()


def _sample(keys: Keys, home: Path) -> Sample | None:
    given = keys.get("sample")
    if isinstance(given, Sample):
        return given
    table = keys.table("sample")
    if table is None:
        return None
    with keys.faults.taking_over():
        return sample_from(table, home=home)
    return None


def _collection(keys: Keys) -> Collection | None:
    given = keys.get("collection")
    if isinstance(given, Collection):
        return given
    table = keys.table("collection")
    if table is None:
        return None
    with keys.faults.taking_over():
        return collection_from(table)
    return None
