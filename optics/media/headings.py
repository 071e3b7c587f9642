"""What a column of a laboratory's table is called, and what that means: quantity and unit.

Nothing is guessed from the numbers: a heading that leaves the quantity or its unit open stays open.
"""

import re
import unicodedata
from dataclasses import dataclass

__all__ = ["AXIS", "AXIS_UNITS", "DENSITY_UNITS", "Heading", "heading", "unit_named"]

AXIS = "axis"
"""The quantity along which a table runs: wavelength, photon energy, wavenumber or frequency."""

AXIS_UNITS = {
    "nm": "wavelength",
    "um": "wavelength",
    "angstrom": "wavelength",
    "cm": "wavelength",
    "mm": "wavelength",
    "m": "wavelength",
    "eV": "energy",
    "meV": "energy",
    "1/cm": "wavenumber",
    "1/m": "wavenumber",
    "THz": "frequency",
    "Hz": "frequency",
}
"""Units of the axis, and what each is a unit of."""

DENSITY_UNITS = ("1/cm", "1/m", "1/um", "1/nm")
"""Units of the absorption coefficient."""

_UNIT_WORDS = {
    "nm": ("nm", "nanometer", "nanometers", "nanometre", "nanometres"),
    "um": ("um", "micron", "microns", "micrometer", "micrometers", "micrometre", "micrometres"),
    "angstrom": ("angstrom", "angstroms", "ang", "aa", "a"),
    "cm": ("cm", "centimeter", "centimetre"),
    "mm": ("mm", "millimeter", "millimetre"),
    "m": ("m", "meter", "meters", "metre", "metres"),
    "eV": ("ev", "electronvolt", "electronvolts", "electron volt", "electron volts"),
    "meV": ("mev",),
    "THz": ("thz", "terahertz"),
    "Hz": ("hz", "hertz"),
}
_BARE = {"nm", "um", "angstrom", "eV", "meV", "THz"}  # units that alone make a heading; "a" and "m" may mean much else
_INVERSE = {
    f"1/{unit}": (
        f"1/{unit}",
        f"{unit}-1",
        f"{unit}^-1",
        f"{unit}^(-1)",
        f"{unit}^{{-1}}",
        f"{unit}**-1",
        f"per {unit}",
    )
    for unit in ("cm", "m", "um", "nm")
}
_UNITS = {word: unit for table in (_UNIT_WORDS, _INVERSE) for unit, words in table.items() for word in words}

_NAMES = {
    "wavelength": ("wavelength", "wavelengths", "lambda", "lam", "wl", "wvl", "wellenlange", "longueurdonde"),
    "energy": ("energy", "photonenergy", "energyphoton", "e", "ephoton", "hv", "hnu", "energie"),
    "wavenumber": ("wavenumber", "wavenumbers", "wn", "nubar", "wellenzahl"),
    "frequency": ("frequency", "freq", "f", "frequenz"),
    "n": ("n", "index", "refractiveindex", "refractiveindexn", "indexofrefraction", "nreal", "realn", "ren", "nlambda"),
    "k": (
        *("k", "kappa", "extinction", "extinctioncoefficient", "extinctioncoeff", "extinctioncoefficientk"),
        *("nimag", "imagn", "imn", "klambda", "extinctionk"),
    ),
    "eps1": ("eps1", "e1", "epsr", "epsreal", "realeps", "reeps", "eps'"),
    "eps2": ("eps2", "e2", "epsi", "epsimag", "imageps", "imeps", "eps''"),
    "alpha": (*("alpha", "absorption", "absorptioncoefficient", "absorptioncoeff", "absorptioncoef", "abscoeff"),),
}
_QUANTITIES = {word: quantity for quantity, words in _NAMES.items() for word in words}
_AXIS_NAMES = ("wavelength", "energy", "wavenumber", "frequency")
_LETTERS = {
    ord("\N{GREEK SMALL LETTER MU}"): "u",
    ord("\N{GREEK SMALL LETTER LAMDA}"): "lambda",
    ord("\N{GREEK SMALL LETTER ALPHA}"): "alpha",
    ord("\N{GREEK SMALL LETTER EPSILON}"): "eps",
    ord("\N{GREEK LUNATE EPSILON SYMBOL}"): "eps",
    ord("\N{GREEK SMALL LETTER KAPPA}"): "kappa",
    ord("\N{MINUS SIGN}"): "-",
    ord("\N{PRIME}"): "'",
    ord("\N{DOUBLE PRIME}"): "''",
}
_NO_UNIT = ("", "-", "1", "dimensionless", "no unit", "none", "a.u.", "arb. units")


@dataclass(frozen=True)
class Heading:
    """What a heading says.

    Parameters
    ----------
    text
        As it stands in the file.
    quantity
        ``"axis"``, ``"n"``, ``"k"``, ``"eps1"``, ``"eps2"``, ``"alpha"``; empty when the heading names none of them.
    unit
        One of `AXIS_UNITS` or `DENSITY_UNITS`; empty when it is not said or there is none.
    doubt
        Why the heading cannot be taken as it stands; empty when it can, or names nothing of use.
    kind
        For the axis: ``"wavelength"``, ``"energy"``, ``"wavenumber"`` or ``"frequency"``; empty when open.
    """

    text: str
    quantity: str = ""
    unit: str = ""
    doubt: str = ""
    kind: str = ""

    @property
    def said(self) -> str:
        """Say how the column is read."""
        name = (self.kind or "axis") if self.quantity == AXIS else self.quantity
        return f"{name} in {self.unit}" if self.unit else name


def heading(text: str) -> Heading:
    """Return what a column's heading means."""
    plain = _plain(text)
    for name, unit in _splits(plain):
        quantity = _QUANTITIES.get(_squeezed(name), "")
        if quantity:
            return _weighed(text, quantity, unit)
    unit = unit_named(plain)
    if unit in _BARE and plain != "a":
        return Heading(text, AXIS, unit, kind=AXIS_UNITS[unit])
    if unit in DENSITY_UNITS:
        return Heading(text, doubt=f"may be a wavenumber or an absorption coefficient in {unit}")
    return Heading(text)


def unit_named(text: str) -> str:
    """Return the unit that a word means, empty when it means none."""
    plain = _plain(text).strip("()[]{} ")
    return _UNITS.get(plain, "") or _UNITS.get(plain.replace(" ", "").replace("_", " "), "")


def _plain(text: str) -> str:
    """Return a heading in small letters, with Greek and raised signs written out."""
    small = unicodedata.normalize("NFKC", text.replace("Å", "angstrom")).strip().strip('"').lower()
    plain = small.translate(_LETTERS).replace("å", "angstrom").replace("epsilon", "eps")
    return unicodedata.normalize("NFKD", plain).encode("ascii", "ignore").decode().strip()


def _splits(plain: str) -> list[tuple[str, str | None]]:
    """Return the ways to read a heading as a name and a unit; None for a unit that is no known word."""
    ways: list[tuple[str, str | None]] = [(plain, "")]
    for cut in re.finditer(r"[(\[{/,_ ]", plain):
        name, rest = plain[: cut.start()], plain[cut.start() :]
        word = rest.strip("()[]{}_, ").removeprefix("in ").removeprefix("in_").strip()
        word = word[1:].strip() if word.startswith("/") else word
        word = word.strip("()[]{} ")
        if word in _NO_UNIT:
            ways.append((name, ""))
        elif unit_named(word):
            ways.append((name, unit_named(word)))
        elif rest[0] in "([{" and name:
            ways.append((name, None))
    return ways


def _squeezed(name: str) -> str:
    return re.sub(r"[\s_\-.()\[\]]+", "", name) if "eps'" in name else re.sub(r"[\s_\-.()\[\]']+", "", name)


def _weighed(text: str, quantity: str, unit: str | None) -> Heading:
    """Return the heading with its unit held against its quantity."""
    if quantity in _AXIS_NAMES:
        if unit is None or (unit and AXIS_UNITS.get(unit) != quantity):
            return Heading(text, doubt=f"names no known unit of a {quantity}", kind=quantity)
        return Heading(text, AXIS, unit, kind=quantity)
    if quantity == "alpha":
        if not unit or unit not in DENSITY_UNITS:
            return Heading(text, doubt=f"names no unit of an absorption coefficient ({', '.join(DENSITY_UNITS)})")
        return Heading(text, quantity, unit)
    if unit is None or unit:
        return Heading(text, doubt=f"names a unit, but {quantity} has none")
    return Heading(text, quantity)
