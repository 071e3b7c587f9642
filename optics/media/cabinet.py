"""Where a material is found: by bundled name, in a cabinet of one's own, in a table, as a number, in the open database.

A cabinet is a folder of cards (`optics.media.card`): ``materials/`` beside the stack file, and one a user in the place
that the platform keeps for an application's data. A name is looked for in this order: beside the stack file, the
user's, the bundled ones. The import refuses names of bundled materials, and a name
that is both bundled and one's own is refused, so that none is ever hidden.
"""

import os
from collections.abc import Mapping
from difflib import get_close_matches
from functools import cache
from pathlib import Path

import numpy as np

from optics.errors import InputError
from optics.media.card import read_card
from optics.media.dispersion import Constant
from optics.media.labfile import WORKBOOKS, read_hashed
from optics.media.material import Material

__all__ = [
    "MaterialLike",
    "bundled",
    "bundled_names",
    "cabinet_beside",
    "find",
    "is_bundled",
    "is_table",
    "own_names",
    "users_cabinet",
]

MaterialLike = Material | str | Path | complex | Mapping[str, object]
"""What `find` takes: a material, a name or path, a number (also complex), {n, k} or {published}."""

CABINET = "materials"
"""Name of a cabinet's folder beside a stack file."""

CABINET_VARIABLE = "PHOTONFATE_MATERIALS"
"""Environment variable that names another folder for the user's own cabinet."""

_CARD_SUFFIX = ".toml"
_TABLE_SUFFIXES = (".csv", ".txt", ".dat", ".tsv", *WORKBOOKS, _CARD_SUFFIX)
_SPECS = 'a bundled name, a table file, a number, { n = ..., k = ... } or { published = "shelf/book/page" }'


def find(spec: MaterialLike, *, folder: str | Path | None = None) -> Material:
    """The material that a specification means.

    Parameters
    ----------
    spec
        A `Material` (returned as it is); the name of a card in a cabinet or of a bundled one; the path of a table (or
        of a card), that is text with a slash or ending in .csv, .txt, .dat, .tsv, .xlsx, .xlsm (or .toml); a real or
        complex number n + i k;
        ``{"n": ..., "k": ...}``; ``{"published": "main/Ag/Johnson"}``, a page of the open index database.
        The constant index 1 is vacuum and counts as a gas.
    folder
        Where relative paths start and the cabinet beside the stack file stands, the working directory when None.

    Raises
    ------
    InputError
        When nothing is found (with the nearest names), or what is found cannot be used.
    """
    if isinstance(spec, Material):
        return spec
    if isinstance(spec, Path):
        return _table(str(spec), folder)
    if isinstance(spec, str):
        return _table(spec, folder) if _is_path(spec) else _named(spec, folder)
    if isinstance(spec, Mapping):
        return _described(spec)
    if isinstance(spec, complex | int | float | np.number) and not isinstance(spec, bool):
        try:
            index = complex(spec)
        except OverflowError:  # a whole number of more than 308 digits
            raise InputError("material: found a number too large for an index") from None
        return _constant(index.real, index.imag)
    raise InputError(f"material: found {spec!r}, expected {_SPECS}")


def bundled_names() -> tuple[str, ...]:
    """Names of the bundled materials, sorted."""
    return tuple(sorted(_cards()))


def cabinet_beside(folder: str | Path | None) -> Path:
    """Return the cabinet that belongs to stack files in a folder (the working directory when None)."""
    return Path(folder or ".") / CABINET


def users_cabinet() -> Path:
    """Return the user's own cabinet, in the platform's place for an application's data."""
    if os.environ.get(CABINET_VARIABLE):
        return Path(os.environ[CABINET_VARIABLE])
    from platformdirs import user_data_path

    return user_data_path("photonfate", appauthor=False) / CABINET


def own_names(folder: str | Path | None = None) -> dict[str, Path]:
    """Return the cards of one's own by name: those beside stack files in a folder before the user's."""
    cabinets = (users_cabinet(), cabinet_beside(folder))
    cards = [card.absolute() for each in cabinets if each.is_dir() for card in sorted(each.glob(f"*{_CARD_SUFFIX}"))]
    return {card.stem: card for card in cards if not _copies_bundled(card)}


def _copies_bundled(card: Path) -> bool:
    """Say whether a card is a bundled one: in a checkout of this project they stand in a folder of that very name."""
    bundled = _cards().get(card.stem)
    return bundled is not None and (card == bundled or card.read_bytes() == bundled.read_bytes())


def is_table(spec: str) -> bool:
    """Say whether a specification names a table of numbers, not a card and not a name."""
    return _is_path(spec) and not spec.lower().endswith(_CARD_SUFFIX)


def is_bundled(material: Material) -> bool:
    """Say whether a material was read from a bundled card."""
    return Path(material.path) in _cards().values()


def _named(spec: str, folder: str | Path | None) -> Material:
    own = own_names(folder)
    name = spec.strip().lower()
    if name not in own:
        return bundled(spec, also=tuple(own))
    if name in _cards() or name in _aliases():
        raise InputError(
            f'material: "{name}" is bundled, and the name of a card of your own too ({own[name]}); '
            "give the path of that card, or rename it"
        )
    return read_card(own[name])


def bundled(name: str, *, also: tuple[str, ...] = ()) -> Material:
    """The bundled material of this name or alias; InputError with the nearest names (of these and ``also``) if none."""
    wanted = name.strip()
    cards = _cards()
    stem = wanted.lower() if wanted.lower() in cards else _aliases().get(wanted.lower(), "")
    if stem:
        return read_card(cards[stem])
    near = get_close_matches(wanted.lower(), [*cards, *_aliases(), *also], n=3, cutoff=0.6)
    names = dict.fromkeys(_aliases().get(word, word) for word in near)
    hint = f"did you mean {' or '.join(names)}?" if names else f"expected one of {', '.join(bundled_names())}"
    raise InputError(f'material: no bundled material is called "{wanted}"; {hint} (a table ends in .csv)')


@cache
def _cards() -> dict[str, Path]:
    """Cards by name. An installed package carries them inside; a source checkout has them beside the package."""
    package = Path(__file__).resolve().parents[1]
    folder = next((f for f in (package / "_materials", package.parent / "materials") if f.is_dir()), None)
    if folder is None:
        raise InputError("the bundled materials are missing; install the package again")
    return {card.stem: card for card in folder.glob("*.toml")}


@cache
def _aliases() -> dict[str, str]:
    """Card names by alias, lower case."""
    import tomllib

    headers = {stem: tomllib.loads(card.read_text(encoding="utf-8")) for stem, card in _cards().items()}
    return {alias.lower(): stem for stem, header in headers.items() for alias in header.get("aliases", [])}


def _is_path(spec: str) -> bool:
    return spec.lower().endswith(_TABLE_SUFFIXES) or "/" in spec or "\\" in spec


def _table(spec: str, folder: str | Path | None) -> Material:
    path = Path(folder or ".") / spec
    if spec.lower().endswith(_CARD_SUFFIX):
        return read_card(path.absolute())
    table = read_hashed(path, place=spec)
    where = str(path.resolve())  # good from any working directory
    return Material(
        name=path.stem,
        medium=table.tabulated,
        source=f"table {path.name}",
        sha256=table.sha256,
        path=where,
        understood=(*table.understood, *table.converted),
    )


def _described(spec: Mapping[str, object]) -> Material:
    known = ("n", "k", "published")
    faults = [_unknown_key(str(key), known) for key in spec if key not in known]
    if not faults and set(spec) == {"published"}:
        from optics.media.published import published

        return published(spec["published"])
    if not faults and "published" in spec:
        faults = ["material: found published together with n or k, expected one or the other"]
    if not faults and "n" not in spec:
        faults = [f"material: found no n, expected {_SPECS}"]
    if faults:
        raise InputError(faults)
    return _constant(spec["n"], spec.get("k", 0.0))


def _unknown_key(key: str, known: tuple[str, ...]) -> str:
    near = get_close_matches(key, known, n=1)
    hint = f'; did you mean "{near[0]}"?' if near else ""
    return f'material: key "{key}" is not known, expected n and k, or published{hint}'


def _constant(n: object, k: object) -> Material:
    try:
        medium = Constant(n, k)  # type: ignore[arg-type]  # Constant checks
    except InputError as error:
        raise InputError(f"material: {fault}" for fault in error.faults) from None
    name = f"{medium.n:.10g}" + (f"+{medium.k:.10g}i" if medium.k else "")
    gas = medium.n == 1.0 and medium.k == 0.0  # vacuum
    return Material(name=name, medium=medium, title="constant index", source="given as a number", gas=gas)
