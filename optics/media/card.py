"""Cards: one TOML file a material, with its source, licence, range, cautions and numbers.

The numbers stand below the line ``[data]``. They are one of ``constant`` (n), ``sellmeier``, ``cauchy``, ``table``
(n and k) or ``n_table``; ``k_table`` may join all but ``constant`` and ``table``. Tables are CSV text as
`optics.media.labtable` reads it. ``checksum`` is the SHA-256 of everything from the line ``[data]`` to the end,
line ends counted as one line feed, so that a changed number is noticed. A card that `optics.media.importing` wrote has
a table ``[imported]`` that says from what, when and how.
"""

import hashlib
import tomllib
from pathlib import Path
from typing import Any

from optics.errors import InputError
from optics.media.dispersion import Cauchy, Constant, Joined, Medium, Sellmeier, Tabulated, extinction_table
from optics.media.domain import ANY_RANGE
from optics.media.labtable import parse_columns
from optics.media.material import Material
from optics.media.sheet import decode

__all__ = ["checksum", "parse_card", "read_card"]

_HEADER = (
    "name",
    "title",
    "aliases",
    "source",
    "licence",
    "gas",
    "range_nm",
    "checksum",
    "cautions",
    "imported",
    "data",
)
_RANGE_TOLERANCE = 1e-9  # relative: a stated range is the range of the numbers, but for rounding


def read_card(path: Path) -> Material:
    """The material on a card.

    Raises
    ------
    InputError
        When the card cannot be read, lacks something, or was changed after its checksum was written.
    """
    try:
        content = path.read_bytes()
    except (OSError, ValueError) as error:  # ValueError: a path with a null character
        reason = getattr(error, "strerror", None) or str(error)
        raise InputError(f"card {path.name}: cannot be read ({reason})") from None
    return parse_card(content, place=f"card {path.name}", path=str(path))


def parse_card(content: bytes, *, place: str, path: str = "") -> Material:
    """The material on a card with this content; ``place`` is what messages call it."""
    text = decode(content, place=place).replace("\r\n", "\n")
    try:
        card = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise InputError(f"{place}: not a card in TOML ({error})") from None
    _check_header(card, place)
    if checksum(text) != card["checksum"]:
        raise InputError(
            f"{place}: the numbers do not match the card's checksum; install the package again, "
            "and keep tables of your own in files of their own"
        )
    range_nm = tuple(card.get("range_nm", ANY_RANGE))
    try:
        medium = _medium(card["data"], range_nm, place)
    except (KeyError, TypeError, ValueError) as error:
        if isinstance(error, InputError):
            raise
        raise InputError(f"{place}: data: not understood ({error})") from None
    _check_range(medium, range_nm, place)
    words = {key: card.get(key, "") for key in ("name", "title", "source", "licence", "cautions")}
    return Material(
        medium=medium, gas=card.get("gas", False), sha256=hashlib.sha256(content).hexdigest(), path=path, **words
    )


def checksum(text: str) -> str:
    """SHA-256 of a card's text from the line ``[data]`` on."""
    _, mark, data = text.replace("\r\n", "\n").partition("\n[data]\n")
    return hashlib.sha256((mark[1:] + data).encode()).hexdigest()


def _check_header(card: dict[str, Any], place: str) -> None:
    needed = ["name", "title", "source", "licence", "checksum", "data"]
    needed += [] if "constant" in card.get("data", {}) else ["range_nm"]
    faults = [f'{place}: key "{key}" is missing' for key in needed if key not in card]
    faults += [
        f'{place}: key "{key}" is not known, expected {", ".join(_HEADER)}' for key in card if key not in _HEADER
    ]
    if faults:
        raise InputError(faults)


def _medium(data: dict[str, Any], range_nm: tuple[float, float], place: str) -> Medium:
    if "constant" in data:
        return Constant(data["constant"])
    if "table" in data:
        columns = parse_columns(data["table"], place=f"{place}: table")
        return Tabulated(columns.wavelength_nm, columns.n, columns.k)  # type: ignore[arg-type]  # both were asked for
    clear = _clear(data, range_nm, place)
    if "k_table" not in data:
        return clear
    columns = parse_columns(data["k_table"], place=f"{place}: k_table", wanted=("k",))
    return Joined(clear, extinction_table(columns.wavelength_nm, columns.k))  # type: ignore[arg-type]


def _clear(data: dict[str, Any], range_nm: tuple[float, float], place: str) -> Medium:
    """The medium that gives n when k is zero or stands in a table of its own."""
    if "n_table" in data:
        columns = parse_columns(data["n_table"], place=f"{place}: n_table", wanted=("n",))
        return Tabulated(columns.wavelength_nm, columns.n, columns.wavelength_nm * 0.0)  # type: ignore[arg-type]
    if "cauchy" in data:
        return Cauchy(range_nm=range_nm, **data["cauchy"])
    sellmeier = data["sellmeier"]
    squares = sellmeier.get("resonances_um2") or [c**2 for c in sellmeier["resonances_um"]]
    pairs = tuple(zip(sellmeier["strengths"], squares, strict=True))
    return Sellmeier(range_nm=range_nm, terms=pairs, constant=sellmeier.get("constant", 1.0))


def _check_range(medium: Medium, stated: tuple[float, float], place: str) -> None:
    if medium.range_nm != stated and any(
        abs(a - b) > _RANGE_TOLERANCE * b for a, b in zip(medium.range_nm, stated, strict=True)
    ):
        raise InputError(f"{place}: range_nm: found {stated}, but the numbers cover {medium.range_nm}")
