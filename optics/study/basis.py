"""What the answers of a study rest on: when any of it has changed, an unfinished study cannot simply go on."""

import hashlib
import json
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path
from typing import Any

from optics.media.material import Material
from optics.stack import Stack
from optics.study.axes import Points


def basis(stack: Stack, *, stack_file: Path, points: Points | None = None, **settings: Any) -> dict[str, Any]:
    """Return hashes of the stack file, of every table and of the points, the version and the settings, by name."""
    try:
        tool = version("photonfate")
    except PackageNotFoundError:
        tool = ""
    found: dict[str, Any] = {"the version of photonfate": tool, f"the stack file {stack_file}": file_hash(stack_file)}
    materials = [material for _, material, _ in stack.media]
    materials += [material for each in stack.alternatives for material in each.materials]
    if points is not None:
        materials += [value for axis in points.axes for value in axis.values if isinstance(value, Material)]
    found |= {f"the table of {each.name}": each.sha256 for each in materials if each.sha256}
    spectrum = stack.light.spectrum
    if getattr(spectrum, "sha256", ""):
        found["the table of births"] = getattr(spectrum, "sha256", "")
    if getattr(stack.emission.depth, "sha256", ""):
        found["the table of depths"] = getattr(stack.emission.depth, "sha256", "")
    if points is not None:
        rows = [[axis.key, [str(label) for label in axis.labels]] for axis in points.axes]
        found["what is varied"] = hashlib.sha256(json.dumps([points.cases, rows]).encode()).hexdigest()
    return found | settings


def file_hash(path: Path) -> str:
    """Return the SHA-256 of a file."""
    return hashlib.sha256(path.read_bytes()).hexdigest()
