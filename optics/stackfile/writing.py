"""Writing a stack as TOML that reads back as the same stack."""

import os
from collections.abc import Container, Iterator
from dataclasses import fields
from pathlib import Path
from typing import Any

from optics.arrays import Real
from optics.depth import Decay, Depth, DepthTable, Pump, Sheet
from optics.errors import InputError
from optics.light import Light, even_wavelengths
from optics.media.cabinet import bundled_names, find
from optics.media.dispersion import Constant
from optics.media.material import Material
from optics.media.tail import MeasuredTail, Tail
from optics.media.tailspec import measured_tail
from optics.radiation import FromAbsorption
from optics.sample import PerWavelength, Sample
from optics.spectrum import Gaussian, Spectrum
from optics.stack import PLATE_LIMIT_NM, Layer, Outer, Stack, layer_place
from optics.stackfile.doubts import put_back
from optics.units import nm_from_mm


def write_stack(stack: Stack, *, folder: str | Path | None = None) -> str:
    """Return the content of a stack file that describes the stack.

    Parameters
    ----------
    stack
        What to write.
    folder
        Where the file will stand: tables are named from there. None names them by their full paths.

    Raises
    ------
    InputError
        When a material was made in Python and is in no file from which it could be read back.
    """
    import tomlkit

    home = None if folder is None else Path(folder).resolve()
    document = tomlkit.document()
    if stack.title:
        document["title"] = stack.title
    for side, outer in (("above", stack.above), ("below", stack.below)):
        document[side] = _inline(_outer(outer, side, home))
    document["light"] = _light(stack.light, home)
    document["emission"] = {
        "horizontal_share": _number(stack.emission.horizontal_share),
        "depth": _inline(_depth(stack.emission.depth, home)),
    }
    if stack.collection is not None:
        document["collection"] = {"na": _number(stack.collection.na), "side": stack.collection.side}
    near_field = stack.emission.near_field
    if near_field is not None:
        parts = {"stand_off_nm": near_field.stand_off_nm, "to_index": near_field.to_index}
        document["emission"]["near_field"] = _inline({key: _number(value) for key, value in parts.items()})
    if stack.sample is not None:
        document["sample"] = {key: _inline(value) for key, value in _sample(stack.sample).items()}
    known = {each.key for each in stack.tolerances}
    layers = tomlkit.aot()
    for layer in stack.layers:
        table = tomlkit.table()
        for key, value in _layer(layer, home, known).items():
            table[key] = _inline(value)
        layers.append(table)
    document["layer"] = layers
    put_back(
        document,
        stack.tolerances,
        stack.alternatives,
        layers={layer.name: place for place, layer in enumerate(stack.layers)},
        spec=lambda material: _spec(material, "material", home),
        inline=_inline,
    )
    return tomlkit.dumps(document)


def _inline(value: Any) -> Any:
    import tomlkit

    if isinstance(value, list):
        return [_inline(part) for part in value]
    if not isinstance(value, dict):
        return value
    table = tomlkit.inline_table()
    for key, part in value.items():
        table[key] = _inline(part)
    return table


def _outer(outer: Outer, side: str, home: Path | None) -> Any:
    spec = _spec(outer.material, side, home)
    return spec if outer.counts_as is None else {"material": spec, "counts_as": outer.counts_as}


def _layer(layer: Layer, home: Path | None, known: Container[str]) -> dict[str, Any]:
    table = {"name": layer.name, "material": _spec(layer.material, layer_place(layer.name), home)}
    table |= _thickness(layer.thickness_nm, in_nm=bool(layer.varies_nm) or f"{layer.name}.thickness_nm" in known)
    if layer.varies_nm:
        table["thickness_nm"] = {"value": _number(layer.thickness_nm), "varies_nm": _number(layer.varies_nm)}
    if layer.emits:
        table["emits"] = True
    if layer.births_share is not None:
        table["births_share"] = _number(layer.births_share)
    if layer.receives:
        table["receives"] = True
    if layer.phases is not None:
        table["phases"] = layer.phases
    if layer.roughness_nm:
        table["roughness_nm"] = _number(layer.roughness_nm)
    if layer.tail is not None:
        table["tail"] = _tail(layer.tail, layer_place(layer.name), home)
    return table


def _tail(tail: Tail, place: str, home: Path | None) -> str | dict[str, Any]:
    if tail.fit:
        return "fit"
    parts: dict[str, Any] = {}
    if tail.measured is not None:
        parts["table"] = _measured(tail.measured, place, home)
    if tail.urbach_meV is not None:
        parts["urbach_meV"] = _number(tail.urbach_meV)
    if tail.red_of_nm is not None:
        parts["red_of_nm"] = _number(tail.red_of_nm)
    return parts | ({"scaled": True} if tail.scaled else {})


def _measured(measured: MeasuredTail, place: str, home: Path | None) -> str:
    try:
        if measured.path and measured_tail(measured.path) == measured:
            return _from_home(measured.path, home)
    except InputError:
        pass
    raise InputError(f"{place}: tail: its table was made in Python, or its file has changed since; save it as a file")


def _sample(sample: Sample) -> dict[str, Any]:
    """Return the keys of a sample, what is as by default left out except the edges."""
    table: dict[str, Any] = {"to_edge_mm": _number(sample.to_edge_mm), "edges": sample.edges}
    for field in fields(Sample):
        value = getattr(sample, field.name)
        if field.name in table or value == field.default:
            continue
        if isinstance(value, PerWavelength):
            rows = {"wavelength_nm": value.wavelength_nm, "values": value.values}
            table[field.name] = {key: [_number(each) for each in row.tolist()] for key, row in rows.items()}
        else:
            table[field.name] = _number(value)
    return table


def _thickness(thickness_nm: float, *, in_nm: bool) -> dict[str, Any]:
    """Return the thickness in mm for what is thick, when that loses nothing."""
    in_mm = thickness_nm / 1e6
    if not in_nm and thickness_nm > PLATE_LIMIT_NM and float(nm_from_mm(in_mm)) == thickness_nm:
        return {"thickness_mm": _number(in_mm)}
    return {"thickness_nm": _number(thickness_nm)}


def _light(light: Light, home: Path | None) -> dict[str, Any]:
    return _grid(light.wavelengths_nm) | {"spectrum": _spectrum(light.spectrum, home)}


def _grid(wavelengths: Real) -> dict[str, Any]:
    """Return first, last and step when these give back the very same wavelengths, else the list."""
    if wavelengths.size > 1:
        span = float(wavelengths[-1] - wavelengths[0])
        step = round(span / (wavelengths.size - 1), 9)
        even = {"from_nm": float(wavelengths[0]), "to_nm": float(wavelengths[-1]), "step_nm": step}
        try:
            same = step > 0 and even_wavelengths(**even).tolist() == wavelengths.tolist()
        except InputError:
            same = False  # a step that cannot be written in nine decimals
        if same:
            return {key: _number(value) for key, value in even.items()}
    return {"wavelengths_nm": [_number(value) for value in wavelengths.tolist()]}


def _spectrum(spectrum: Spectrum, home: Path | None) -> dict[str, Any]:
    table: dict[str, Any] = {"seen": spectrum.seen}
    if isinstance(spectrum, FromAbsorption):
        given = {key: getattr(spectrum, key) for key in ("temperature_K", "splitting_eV", "n_i_per_cm3")}
        numbers = {key: _number(value) for key, value in given.items() if value is not None}
        return {"kind": "from-absorption"} | table | numbers
    if spectrum.na is not None:
        table["na"] = _number(spectrum.na)
    if isinstance(spectrum, Gaussian):
        return table | {
            "kind": "gaussian",
            "peak_nm": _number(spectrum.peak_nm),
            "fwhm_nm": _number(spectrum.fwhm_nm),
        }
    table["kind"] = "table"
    if spectrum.path:
        return table | {"file": _from_home(spectrum.path, home)}
    rows = {"wavelength_nm": spectrum.wavelength_nm, "per_nm": spectrum.per_nm}
    return table | {key: [_number(value) for value in values.tolist()] for key, values in rows.items()}


def _depth(depth: Depth, home: Path | None) -> Any:
    if isinstance(depth, Pump):
        return {"pump_nm": _number(depth.pump_nm), "side": depth.side, "births": depth.births}
    if isinstance(depth, Decay):
        return {"decay_nm": _number(depth.decay_nm), "side": depth.side}
    if isinstance(depth, Sheet):
        return {"at_nm": _number(depth.at_nm)}
    if not isinstance(depth, DepthTable):
        return depth
    if depth.path:
        return {"table": _from_home(depth.path, home)}
    rows = {"depth_nm": depth.depth_nm, "births": depth.births}
    return {key: [_number(value) for value in values.tolist()] for key, values in rows.items()}


def _spec(material: Material, place: str, home: Path | None) -> Any:
    """Return the way to name a material under which it is found again, the same in every part."""
    for spec in _candidates(material):
        try:
            if find(spec, folder=home) == material:
                return _from_home(spec, home) if spec == material.path else spec
        except InputError:
            continue
    raise InputError(
        f'{place}: material: "{material.name}" was made in Python, or its file has changed since; '
        "save its n and k as a table and name that file"
    )


def _candidates(material: Material) -> Iterator[Any]:
    if isinstance(material.medium, Constant):
        yield {"n": _number(material.medium.n), "k": _number(material.medium.k)}
    if material.name in bundled_names():
        yield material.name
    if material.path.endswith(".toml"):  # a card in a cabinet that reading looks into
        yield material.name
    if material.path:
        yield material.path
    yield {"published": material.name}


def _from_home(path: str, home: Path | None) -> str:
    if home is None:
        return str(Path(path).absolute())
    try:
        return Path(os.path.relpath(path, home)).as_posix()
    except ValueError:  # on another drive
        return str(Path(path).absolute())


def _number(value: float) -> float | int:
    """Return whole numbers as people write them."""
    return int(value) if value.is_integer() and abs(value) < 1e15 else value
