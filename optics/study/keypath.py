"""Key paths: names such as ``film.thickness_nm`` for everything in a stack that a study may change."""

from collections.abc import Mapping
from dataclasses import fields, is_dataclass, replace
from pathlib import Path
from typing import Any

from optics.errors import InputError
from optics.faults import closest, found, is_number, quoted
from optics.light import even_wavelengths
from optics.media.cabinet import find
from optics.media.dispersion import Constant
from optics.media.material import Material
from optics.stack import OUTER_NAMES, THICKNESS_TO_NM, Layer, Stack
from optics.study.nudged import nudged

INDEX_KEYS = ("material", "n_offset", "k_scale")
CONSTANT_KEYS = ("material.n", "material.k")
EVEN_KEYS = ("from_nm", "to_nm", "step_nm")
LAYER_KEYS = (*THICKNESS_TO_NM, *INDEX_KEYS, "phases", "roughness_nm", "varies_nm")
OUTER_KEYS = (*INDEX_KEYS, "counts_as")
PARTS = ("light", "emission", "collection", "sample")
NOT_VARIED = ("wavelengths_nm", "wavelength_nm", "per_nm", "x", "births", "path", "sha256", "spectrum", "depth")


def without_doubts(stack: Stack) -> Stack:
    """Return the stack without its tolerances and alternatives: what a study solves at each of its points."""
    return replace(stack, tolerances=(), alternatives=())


def is_material(key: str) -> bool:
    """Say whether a key path names a material rather than a number or a word."""
    return key in OUTER_NAMES or key.endswith(".material")


def keys_of(stack: Stack) -> tuple[str, ...]:
    """Return every key path of a stack that a study may change."""
    keys = [f"{layer.name}.{key}" for layer in stack.layers for key in (*LAYER_KEYS, *_constant(layer.material))]
    keys += [key for layer in stack.layers for key in _fields(layer.tail, f"{layer.name}.tail")]
    for side in OUTER_NAMES:
        material = getattr(stack, side).material
        keys += [f"{side}.{key}" for key in (*OUTER_KEYS, *_constant(material))]
    keys += [f"light.{key}" for key in EVEN_KEYS]
    keys += [key for part in PARTS for key in _fields(getattr(stack, part, None), part)]
    return tuple(keys)


def place_of(stack: Stack, key: str) -> tuple[str, str]:
    """Return the part of a stack that a key path names and the key in it.

    Raises
    ------
    InputError
        When the stack has no such key, with the nearest one.
    """
    if key in OUTER_NAMES:
        return key, "material"
    if key not in keys_of(stack):
        near = closest(key, keys_of(stack))
        hint = f"; did you mean {near}?" if near else f"; layers here: {', '.join(each.name for each in stack.layers)}"
        raise InputError(f"{quoted(key)}: not a key of this stack{hint}")
    names = [name for name in (*(each.name for each in stack.layers), *OUTER_NAMES) if key.startswith(f"{name}.")]
    place = max(names, key=len) if names else key.partition(".")[0]
    return place, key[len(place) + 1 :]


def value_at(stack: Stack, key: str) -> Any:
    """Return what stands at a key path: a number, a word or a `Material`."""
    place, name = place_of(stack, key)
    if place == "light" and name in EVEN_KEYS:
        return _even(stack)[name]
    part = _part(stack, place)
    if isinstance(part, Layer) and name in THICKNESS_TO_NM:
        one = float(THICKNESS_TO_NM[name](1.0))
        return part.thickness_nm / one
    medium = getattr(getattr(part, "material", None), "medium", None)
    if name in ("n_offset", "k_scale"):
        return getattr(medium, name, 0.0 if name == "n_offset" else 1.0)
    if name in CONSTANT_KEYS:
        return getattr(medium, name[-1])
    for step in name.split("."):
        part = getattr(part, step)
    return part


def changed(stack: Stack, key: str, value: Any, *, folder: str | Path | None = None) -> Stack:
    """Return the stack with the value at one key path replaced.

    Parameters
    ----------
    stack
        The stack.
    key
        For example ``film.thickness_nm``, ``glass.material``, ``above``, ``film.k_scale`` or
        ``light.spectrum.peak_nm``.
    value
        A number, a word, or for a material anything `optics.media.cabinet.find` takes.
    folder
        Where tables are looked for.

    Raises
    ------
    InputError
        When there is no such key, or the stack cannot have that value.
    """
    place, name = place_of(stack, key)
    shown = value.name if isinstance(value, Material) else found(value)
    try:
        return _changed(stack, place, name, value, folder)
    except InputError as error:
        raise InputError(f"{key} = {shown}: {fault}" for fault in error.faults) from None


def all_changed(stack: Stack, values: Mapping[str, Any], *, folder: str | Path | None = None) -> Stack:
    """Return the stack with the values at several key paths replaced, materials before what changes them."""
    for key in sorted(values, key=lambda each: not is_material(each)):
        stack = changed(stack, key, values[key], folder=folder)
    return stack


def _changed(stack: Stack, place: str, name: str, value: Any, folder: str | Path | None) -> Stack:
    if place == "light" and name in EVEN_KEYS:
        return stack.with_light(wavelengths_nm=even_wavelengths(**(_even(stack) | {name: value})))
    part = _part(stack, place)
    if isinstance(part, Layer) and name in THICKNESS_TO_NM:
        return stack.with_layer(place, **{name: value})
    if place in (*OUTER_NAMES, *(each.name for each in stack.layers)) and name in (*INDEX_KEYS, *CONSTANT_KEYS):
        if name in ("n_offset", "k_scale"):
            part = _grown(part)
        name, value = "material", _material(part.material, name, value, folder)
    return _with_part(stack, place, _replaced(part, name.split("."), value))


def _grown(part: Any) -> Any:
    """Return a layer with its tail grown into its material: what is nudged is the index that light meets."""
    return replace(part, material=part.repaired, tail=None) if getattr(part, "tail", None) is not None else part


def _material(old: Material, name: str, value: Any, folder: str | Path | None) -> Material:
    if name == "material":
        return find(value, folder=folder)
    if not is_number(value):
        raise InputError(f"found {found(value)}, expected a number")
    if name in CONSTANT_KEYS:
        medium = old.medium
        given = {"n": getattr(medium, "n", 1.0), "k": getattr(medium, "k", 0.0)} | {name[-1]: float(value)}
        return find(given)
    medium = nudged(old.medium, **{name: float(value)})
    medium.index([])  # nothing is asked of it yet: the stack looks at its values
    return replace(old, medium=medium)


def _replaced(part: Any, steps: list[str], value: Any) -> Any:
    if len(steps) > 1:
        value = _replaced(getattr(part, steps[0]), steps[1:], value)
    return replace(part, **{steps[0]: value})


def _part(stack: Stack, place: str) -> Any:
    layers = {layer.name: layer for layer in stack.layers}
    return layers[place] if place in layers else getattr(stack, place)


def _with_part(stack: Stack, place: str, part: Any) -> Stack:
    if isinstance(part, Layer):
        return replace(stack, layers=tuple(part if each.name == place else each for each in stack.layers))
    return replace(stack, **{place: part})


def _constant(material: Material) -> tuple[str, ...]:
    return CONSTANT_KEYS if isinstance(material.medium, Constant) else ()


def _even(stack: Stack) -> dict[str, float]:
    """Return the stack's wavelengths as first, last and step; the step is the mean one."""
    first, last = stack.light.range_nm
    count = stack.light.wavelengths_nm.size
    return {"from_nm": first, "to_nm": last, "step_nm": (last - first) / max(count - 1, 1)}


def _fields(part: Any, prefix: str) -> list[str]:
    """Return key paths of the numbers and words of nested parts."""
    keys = []
    for each in fields(part) if is_dataclass(part) else ():
        value = getattr(part, each.name)
        path = f"{prefix}.{each.name}"
        if is_dataclass(value):
            keys += _fields(value, path)
        elif each.name not in NOT_VARIED and not (isinstance(value, str) and each.name == "depth"):
            keys.append(path)
    return keys
