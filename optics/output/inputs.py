"""What a result was made from: a copy of the stack file that can be solved again, and the hashes of all inputs."""

import hashlib
from collections.abc import Collection
from dataclasses import asdict, is_dataclass, replace
from pathlib import Path
from typing import Any

from optics.depth import DepthTable
from optics.errors import InputError
from optics.layer import layer_place
from optics.media.cabinet import CABINET, is_bundled
from optics.media.material import Material
from optics.media.tail import Tail
from optics.radiation import FromAbsorption
from optics.spectrum import Gaussian, SpectrumTable
from optics.stack import Stack
from optics.stackfile.writing import write_stack

STACK_FILE = "stack.toml"
TABLES = "tables"


def copy_inputs(stack: Stack, folder: Path, *, stack_file: Path | None, taken: Collection[str]) -> None:
    """Write the stack file and the tables it names into a result folder, so that they can be solved there.

    Parameters
    ----------
    stack
        What was solved.
    folder
        The result folder.
    stack_file
        Where the stack was read from: copied as it is when its tables can stand beside the copy as they stand
        beside the original. Otherwise, or when there is none, the stack is written anew with its tables in ``tables/``.
    taken
        Names in the result folder that a table must not have.
    """
    tables = tables_of(stack)
    places = _places_beside(tables, stack_file, taken)
    verbatim = stack_file is not None and places is not None
    if places is None:
        places = {path: _place(path, number) for number, path in enumerate(tables, start=1)}
    for path, sha256 in tables.items():
        _copy(Path(path), folder / places[path], sha256)
    copy = folder / STACK_FILE
    if verbatim and stack_file is not None:
        copy.write_bytes(stack_file.read_bytes())
    else:
        moved = _moved(stack, {path: folder / place for path, place in places.items()})
        copy.write_text(write_stack(moved, folder=folder), encoding="utf-8", newline="\n")


def files_of(stack: Stack, *stack_files: Path) -> list[str]:
    """Return every file that a stack rests on: where it was read from, and its tables."""
    return [*map(str, stack_files), *tables_of(stack)]


def tables_of(stack: Stack) -> dict[str, str]:
    """Return path and hash of every table that a stack was made from; cards of bundled materials are none."""
    materials = [material for _, material, _ in stack.media]
    materials += [material for each in stack.alternatives for material in each.materials]
    tables = {each.path: each.sha256 for each in materials if each.path and not is_bundled(each)}
    tails = [layer.tail.measured for layer in stack.layers if layer.tail and layer.tail.measured]
    tables |= {each.path: each.sha256 for each in tails if each.path}
    spectrum = stack.light.spectrum
    if isinstance(spectrum, SpectrumTable) and spectrum.path:
        tables[spectrum.path] = spectrum.sha256
    depth = stack.emission.depth
    if isinstance(depth, DepthTable) and depth.path:
        tables[depth.path] = depth.sha256
    return tables


def inputs_of(stack: Stack, stack_file: Path | None) -> dict[str, Any]:
    """Return the inputs of a stack with their sources and hashes, in plain values."""
    media = [
        {
            "place": place,
            "material": material.name,
            "source": material.source,
            "licence": material.licence,
            "path": "" if is_bundled(material) else material.path,
            "sha256": material.sha256,
        }
        for place, material, _ in stack.media
    ]
    media += [
        {"place": layer_place(layer.name), "tail": measured.path, "sha256": measured.sha256}
        for layer in stack.layers
        if layer.tail and (measured := layer.tail.measured)
    ]
    file = {} if stack_file is None else {"path": str(stack_file), "sha256": _hash(stack_file.read_bytes())}
    return {"stack_file": file, "media": media, "spectrum": _spectrum(stack)}


def settings_of(stack: Stack) -> dict[str, Any]:
    """Return what was asked of the computation, in plain values."""
    first, last = stack.light.range_nm
    return {
        "from_nm": first,
        "to_nm": last,
        "wavelengths": stack.light.wavelengths_nm.size,
        "horizontal_share": stack.emission.horizontal_share,
        "depth": _settings(stack.emission.depth),
        "collection": _settings(stack.collection),
    }


def _settings(part: object) -> Any:
    """Return a part of a stack in plain values: tables by path and hash."""
    if isinstance(part, DepthTable):
        return {"path": part.path, "sha256": part.sha256} if part.path else {"rows": part.depth_nm.size}
    return asdict(part) if is_dataclass(part) and not isinstance(part, type) else part


def _spectrum(stack: Stack) -> dict[str, Any]:
    spectrum = stack.light.spectrum
    if isinstance(spectrum, FromAbsorption):
        return {"kind": "from-absorption", **asdict(spectrum)}
    if isinstance(spectrum, Gaussian):
        shape = {"peak_nm": spectrum.peak_nm, "fwhm_nm": spectrum.fwhm_nm}
        return {"kind": "gaussian", "seen": spectrum.seen, "na": spectrum.na, **shape}
    file = {"path": spectrum.path, "sha256": spectrum.sha256}
    return {"kind": "table", "seen": spectrum.seen, "na": spectrum.na, **file}


def _is_card(path: str) -> bool:
    return path.endswith(".toml")  # tables never end so


def _place(path: str, number: int) -> Path:
    """Return where a table or a card of one's own stands in a result folder whose stack is written anew."""
    return Path(CABINET) / Path(path).name if _is_card(path) else Path(TABLES) / f"{number}-{Path(path).name}"


def _places_beside(tables: Collection[str], stack_file: Path | None, taken: Collection[str]) -> dict[str, Path] | None:
    """Return where each table stands as seen from the stack file; None when one could not stand there in the copy."""
    if stack_file is None:
        return None
    home, text = stack_file.parent.resolve(), stack_file.read_text(encoding="utf-8", errors="replace")
    places = {}
    for path in tables:
        try:
            place = Path(path).resolve().relative_to(home)
        except ValueError:
            if not _is_card(path):
                return None
            place = Path(CABINET) / Path(path).name  # the user's own card, found by its name beside the copy
        named_in_full = any(name in text for name in (path, Path(path).as_posix(), path.replace("\\", "\\\\")))
        if place.parts[0] in taken or (Path(path).is_absolute() and named_in_full):
            return None
        places[path] = place
    return places


def _copy(source: Path, target: Path, sha256: str) -> None:
    content = source.read_bytes()
    if _hash(content) != sha256:
        raise InputError(f"{source}: changed while it was being used; run again")
    target.parent.mkdir(parents=True, exist_ok=True)
    target.write_bytes(content)


def _moved(stack: Stack, tables: dict[str, Path]) -> Stack:
    """Return the stack with its tables at other paths."""

    def moved(material: Material) -> Material:
        if material.path not in tables:
            return material
        place = tables[material.path]
        if _is_card(material.path):
            return replace(material, path=str(place))
        return replace(material, path=str(place), name=place.stem, source=f"table {place.name}")

    spectrum = stack.light.spectrum
    if isinstance(spectrum, SpectrumTable) and spectrum.path in tables:
        spectrum = replace(spectrum, path=str(tables[spectrum.path]))
    emission = stack.emission
    if isinstance(emission.depth, DepthTable) and emission.depth.path in tables:
        emission = replace(emission, depth=replace(emission.depth, path=str(tables[emission.depth.path])))
    return replace(
        stack,
        above=replace(stack.above, material=moved(stack.above.material)),
        below=replace(stack.below, material=moved(stack.below.material)),
        layers=tuple(
            replace(layer, material=moved(layer.material), tail=_moved_tail(layer.tail, tables))
            for layer in stack.layers
        ),
        light=replace(stack.light, spectrum=spectrum),
        emission=emission,
        alternatives=tuple(
            replace(each, materials=tuple(moved(material) for material in each.materials))
            for each in stack.alternatives
        ),
    )


def _moved_tail(tail: Tail | None, tables: dict[str, Path]) -> Tail | None:
    if tail is None or tail.measured is None or tail.measured.path not in tables:
        return tail
    return replace(tail, measured=replace(tail.measured, path=str(tables[tail.measured.path])))


def _hash(content: bytes) -> str:
    return hashlib.sha256(content).hexdigest()
