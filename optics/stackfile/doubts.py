"""Tolerances in a stack file: ``{ value = 480, sd = 15 }`` in the place of a number, lists of tables, and back."""

from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

from optics.errors import InputError
from optics.faults import Faults, as_float, found, is_number
from optics.layer import OUTER_NAMES, THICKNESS_TO_NM
from optics.media.cabinet import find
from optics.media.material import Material
from optics.tolerances import PARTS, SHAPES, Alternatives, Tolerance

VALUE_KEYS = ("value", "sd", "shape")
UNEVEN_KEYS = (*VALUE_KEYS, "varies_nm")
INDEX_KEYS = ("n_offset_sd", "k_scale_sd")
OFFSETS = ("n_offset", "k_scale")
SD_KEYS = ("sd", "shape")
SPEC_KEYS = ("n", "k", "published")
FIXED = ("light.from_nm", "light.to_nm", "light.step_nm", "light.wavelengths_nm")


class Doubts:
    """The tolerances and alternatives taken out of the tables of a stack file.

    Attributes
    ----------
    tolerances, alternatives
        As far as they could be read; what could not is noted as faults.
    """

    def __init__(self, faults: Faults, home: Path) -> None:
        self.faults, self.home = faults, home
        self.tolerances: list[Tolerance] = []
        self.alternatives: list[Alternatives] = []

    def taken_from(self, tables: Mapping[str, Any]) -> dict[str, Any]:
        """Return the tables with plain numbers and materials in the places of those with tolerances."""
        plain = dict(tables)
        for side in OUTER_NAMES:
            if side in plain:
                plain[side] = self._outer(side, plain[side])
        for part in PARTS:
            if isinstance(plain.get(part), Mapping):
                plain[part] = self._plain(plain[part], part, part)
        if isinstance(plain.get("layer"), list | tuple):
            plain["layer"] = [self._layer(each) if isinstance(each, Mapping) else each for each in plain["layer"]]
        return plain

    def _outer(self, side: str, spec: Any) -> Any:
        if not isinstance(spec, Mapping):
            return self._material(spec, f"{side}.material", side)
        if set(spec) <= set(SPEC_KEYS):
            return self._plain(spec, f"{side}.material", side)
        return self._indexed(spec, side, side)

    def _layer(self, table: Mapping[str, Any]) -> dict[str, Any]:
        name = table.get("name")
        if not isinstance(name, str) or not name:
            return dict(table)
        return self._indexed(table, name, f'layer "{name}"')

    def _indexed(self, table: Mapping[str, Any], key: str, place: str) -> dict[str, Any]:
        """Return the table of a layer or an outer medium, whose material and index may be in doubt."""
        plain = {name: value for name, value in table.items() if name not in INDEX_KEYS}
        for name in INDEX_KEYS:
            if name in table:
                self._index_sd(table[name], f"{key}.{name.removesuffix('_sd')}", f"{place}: {name}")
        if "material" in plain:
            plain["material"] = self._material(plain["material"], f"{key}.material", place)
        for name in THICKNESS_TO_NM:
            spec = plain.get(name)
            if isinstance(spec, Mapping) and "value" in spec:
                plain |= self._thickness(name, spec, key, place)
        return {
            name: value if name == "material" else self._plain(value, f"{key}.{name}", place)
            for name, value in plain.items()
        }

    def _thickness(self, name: str, spec: Mapping[str, Any], key: str, place: str) -> dict[str, Any]:
        """Return a thickness and its unevenness as plain keys; its tolerance is kept in nm."""
        own = Faults(f"{place}: {name}")
        own.known_keys(spec, UNEVEN_KEYS)
        self.faults.lines += own.lines
        if is_number(spec.get("sd")):
            spec = dict(spec) | {"sd": float(THICKNESS_TO_NM[name](float(spec["sd"])))}
        self._tolerance(spec, f"{key}.thickness_nm", f"{place}: {name}")
        return {name: spec["value"]} | ({"varies_nm": spec["varies_nm"]} if "varies_nm" in spec else {})

    def _material(self, spec: Any, key: str, place: str) -> Any:
        """Return the first of a list of materials, or the material given."""
        if isinstance(spec, Mapping):
            return self._plain(spec, key, place)
        if not isinstance(spec, list) or not spec:
            return spec
        others: list[Material] = []
        before = len(self.faults.lines)
        for each in spec[1:]:
            own = Faults(place)
            with own.collecting("material"):
                others.append(find(each, folder=self.home))
            self.faults.lines += own.lines
        if len(spec) > 1 and len(self.faults.lines) == before:
            self.alternatives.append(Alternatives(key=key, materials=tuple(others)))
        return spec[0]

    def _index_sd(self, spec: Any, key: str, place: str) -> None:
        table = spec if isinstance(spec, Mapping) else {"sd": spec}
        own = Faults(place)
        own.known_keys(table, SD_KEYS)
        self.faults.lines += own.lines
        self._tolerance(table, key, place, needed=True)

    def _plain(self, value: Any, key: str, place: str) -> Any:
        """Return a value, a table's inner ones too, with its tolerances taken out."""
        if not isinstance(value, Mapping):
            return value
        if "value" not in value:
            return {name: self._plain(inner, f"{key}.{name}", place) for name, inner in value.items()}
        what = f"{place}: {key.rpartition('.')[2]}"
        own = Faults(what)
        own.known_keys(value, VALUE_KEYS)
        if key in FIXED:
            own.add("", "found a tolerance, expected a number: wavelengths are what is asked for")
        self.faults.lines += own.lines
        if not own.lines:
            self._tolerance(value, key, what)
        return value["value"]

    def _tolerance(self, table: Mapping[str, Any], key: str, place: str, *, needed: bool = False) -> None:
        if "sd" not in table:
            if needed or "shape" in table:
                self.faults.lines.append(f"{place}: sd: missing, expected a number, for example 0.02")
            return
        own = Faults(place)
        if not is_number(table["sd"]) or not as_float(table["sd"]) > 0:
            own.add("sd", f"found {found(table['sd'])}, expected a number above 0, one standard deviation")
        shape = table.get("shape", "normal")
        own.choice("shape", shape, SHAPES)
        self.faults.lines += own.lines
        if not own.lines:
            with self.faults.taking_over():
                self.tolerances.append(Tolerance(key=key, sd=table["sd"], shape=shape))


def put_back(
    document: Any,
    tolerances: tuple[Tolerance, ...],
    alternatives: tuple[Alternatives, ...],
    *,
    layers: Mapping[str, int],
    spec: Callable[[Material], Any],
    inline: Callable[[Any], Any],
) -> None:
    """Write tolerances and alternatives into the document of a stack file.

    Parameters
    ----------
    document
        What was written without them.
    tolerances, alternatives
        To be put in.
    layers
        Places of the layers in the document, by name.
    spec, inline
        Return how a material is named, and a table as it is written in a line.
    """
    for each in alternatives:
        table, name = _at(document, each.key, layers, inline)
        table[name] = inline([table[name], *(spec(material) for material in each.materials)])
    for tolerance in tolerances:
        table, name = _at(document, tolerance.key, layers, inline)
        shape = {} if tolerance.shape == "normal" else {"shape": tolerance.shape}
        if name in OFFSETS:
            table[f"{name}_sd"] = inline({"sd": tolerance.sd, **shape}) if shape else tolerance.sd
            continue
        old = table[name]
        given = dict(old) if isinstance(old, Mapping) else {"value": old}
        table[name] = inline(given | {"sd": tolerance.sd, **shape})


def _at(document: Any, key: str, layers: Mapping[str, int], inline: Callable[[Any], Any]) -> tuple[Any, str]:
    """Return the table that holds what a key path names, and its name there."""
    names = [name for name in layers if key.startswith(f"{name}.")]
    if names:
        name = max(names, key=len)
        table, steps = document["layer"][layers[name]], key[len(name) + 1 :].split(".")
    else:
        table, steps = document, key.split(".")
        if steps[0] in OUTER_NAMES and not (
            isinstance(document[steps[0]], Mapping) and "material" in document[steps[0]]
        ):
            document[steps[0]] = inline({"material": document[steps[0]]})
    for step in steps[:-1]:
        table = table.get(step, {})
    if steps[-1] not in table and steps[-1] not in OFFSETS:
        raise InputError(f"{key}: has a tolerance, but the stack has no such number in its file")
    return table, steps[-1]
