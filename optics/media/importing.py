"""Importing a laboratory's table: a card of one's own, with where it came from and what was done to it."""

import os
import re
import tomllib
from contextlib import suppress
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any

from optics.errors import InputError
from optics.media.cabinet import bundled_names, find
from optics.media.card import checksum, parse_card
from optics.media.labfile import Hints, LabTable, read_lab
from optics.media.material import Material

__all__ = ["About", "Imported", "import_table"]

_NAME = re.compile(r"[a-z0-9][a-z0-9._-]*")
_MARK = "0" * 64  # stands for the checksum until the text that it is of is written


@dataclass(frozen=True, kw_only=True)
class About:
    """What the user says of a material: a line on what it is, its source, its licence."""

    title: str = ""
    source: str = ""
    licence: str = ""


@dataclass(frozen=True)
class Imported:
    """A card, what was understood on the way, and whether anything was written."""

    path: Path
    material: Material
    table: LabTable
    written: bool


def import_table(
    path: Path,
    *,
    name: str,
    cabinet: Path,
    hints: Hints | None = None,
    about: About | None = None,
    replace: bool = False,
) -> Imported:
    """Read a laboratory's table and put a card of it into a cabinet.

    Parameters
    ----------
    path
        The table.
    name
        What the material shall be called: small letters, digits, ``-``, ``_`` and points.
    cabinet
        The folder of cards; made when it is missing.
    hints
        What the file leaves open.
    about
        What the card says of the material.
    replace
        Whether a card of this name that holds something else may be lost.

    Returns
    -------
    Imported
        Nothing is written when the card is there already and says the same.

    Raises
    ------
    InputError
        When the table cannot be read, the name cannot be taken, or the card cannot be written.
    """
    _check_name(name)
    table = read_lab(path, place=str(path), hints=hints or Hints())
    text = _card(name, path, table, about or About())
    card = cabinet / f"{name}.toml"
    material = parse_card(text.encode(), place=f"card {card.name}", path=str(card.absolute()))
    if card.exists():
        if _same(card, text):
            return Imported(card, material, table, written=False)
        if not replace:
            raise InputError(
                f"{card}: is there and holds something else, and is kept; take another name, or say --replace "
                "to lose it"
            )
    _write(card, text)
    return Imported(card, material, table, written=True)


def _check_name(name: str) -> None:
    if not _NAME.fullmatch(name):
        raise InputError(f'name: found "{name}", expected small letters, digits, "-", "_" and points, as red-film')
    try:
        hidden = find(name)
    except InputError:
        return
    if hidden.name in bundled_names():
        raise InputError(f'name: "{name}" is the bundled {hidden.name}, which must not be hidden; take another name')


def _card(name: str, path: Path, table: LabTable, about: About) -> str:
    """Return a card's text."""
    import tomlkit

    medium = table.tabulated
    rows = zip(medium.wavelength_nm.tolist(), medium.n.tolist(), medium.k.tolist(), strict=True)
    card = tomlkit.document()
    card["name"] = name
    card["title"] = about.title or f"{name}, from {path.name}"
    card["source"] = about.source or f"file {path.name}"
    card["licence"] = about.licence or "not stated"
    card["range_nm"] = list(medium.range_nm)
    card["checksum"] = _MARK
    card["imported"] = {
        "original": path.name,
        "original_sha256": table.sha256,
        "date": datetime.now(UTC).date().isoformat(),
        "understood": list(table.understood),
        "converted": list(table.converted),
    }
    body = "\n".join(["wavelength_nm,n,k", *(",".join(map(repr, row)) for row in rows)])
    card["data"] = {"table": tomlkit.string(f"{body}\n", multiline=True)}
    text = tomlkit.dumps(card)
    return text.replace(_MARK, checksum(text))


def _same(card: Path, text: str) -> bool:
    """Say whether a card holds the same as a text, but for the day of the import and the words about it."""
    try:
        found = tomllib.loads(card.read_text(encoding="utf-8"))
    except (OSError, ValueError):
        return False
    return _essence(found) == _essence(tomllib.loads(text))


def _essence(card: dict[str, Any]) -> dict[str, Any]:
    imported = card.get("imported", {})
    return card | {"imported": {key: imported.get(key) for key in ("original", "original_sha256")}}


def _write(card: Path, text: str) -> None:
    """Write a card whole or not at all."""
    part = card.with_name(f".{card.name}.{os.getpid()}.part")
    try:
        card.parent.mkdir(parents=True, exist_ok=True)
        part.write_text(text, encoding="utf-8", newline="\n")
        part.replace(card)
    except OSError as error:
        raise InputError(f"{card}: cannot be written ({error.strerror or error}), expected a writable place") from None
    finally:
        with suppress(OSError):  # the cabinet itself may be missing
            part.unlink(missing_ok=True)
