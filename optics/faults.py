"""Checking what was handed in: every fault of an object collected, each said in one line of one form."""

import math
from collections.abc import Collection, Iterator
from contextlib import contextmanager
from difflib import get_close_matches
from numbers import Real

import numpy as np

from optics.errors import InputError

LONGEST_QUOTE = 40  # characters of a wrong value that a message shows


def found(value: object) -> str:
    """Say what a value is, so that a reader recognises it in the file or the call it came from."""
    if value is None:
        return "nothing"
    if isinstance(value, bool | np.bool_):
        return f"{str(bool(value)).lower()} (true or false)"
    if isinstance(value, str):
        quoted = value if len(value) <= LONGEST_QUOTE else value[:LONGEST_QUOTE] + "..."
        return '"' + quoted.encode("unicode_escape").decode("ascii") + '" (text)' if value else "empty text"
    if isinstance(value, Real):
        return f"{float(value):.12g}"
    if isinstance(value, dict):
        return "a table" if value else "an empty table"
    if isinstance(value, list | tuple | np.ndarray):
        return f"a list of {len(value)}" if np.ndim(value) and len(value) else "an empty list"
    return f"{str(value)[:LONGEST_QUOTE]} ({type(value).__name__})"


def nearest(name: str, valid: Collection[str]) -> str:
    """Give the cure for a name that is not known: the valid one that it most resembles, or all of them."""
    close = get_close_matches(name.lower(), [v.lower() for v in valid], n=1, cutoff=0.6)
    for candidate in valid:
        if close and candidate.lower() == close[0]:
            return f'did you mean "{candidate}"?'
    return "valid here: " + ", ".join(valid)


class Faults:
    """A collector of faults.

    Parameters
    ----------
    place
        Put before every line, for example ``layer "film"``; empty for none.
    """

    def __init__(self, place: str = "") -> None:
        self.place = place
        self.lines: list[str] = []

    def add(self, key: str, message: str) -> None:
        """Note a fault of `key` (empty when the fault is of the whole object)."""
        self.lines.append(": ".join(part for part in (self.place, key, message) if part))

    @contextmanager
    def collecting(self, key: str = "") -> Iterator[None]:
        """Note the faults of whatever refuses inside the ``with`` block instead of letting it raise."""
        try:
            yield
        except InputError as error:
            for line in error.faults:
                self.add(key, line)

    def settle(self) -> None:
        """Raise `InputError` with everything noted, if anything was."""
        if self.lines:
            raise InputError(self.lines)

    def number(
        self,
        key: str,
        value: object,
        *,
        unit: str = "",
        example: float | None = None,
        above: float | None = None,
        at_least: float | None = None,
        at_most: float | None = None,
    ) -> float:
        """Return `value` as a float, or note why it is none and return nan."""
        kind = f"a number in {unit}" if unit else "a number"
        like = "" if example is None else f", for example {example:g}"
        if isinstance(value, bool | np.bool_) or not isinstance(value, Real):
            self.add(key, f"found {found(value)}, expected {kind}{like}{_decimal_cure(value)}")
            return math.nan
        number = float(value)
        rules = {
            "": math.isfinite(number),
            f" above {above:g}" if above is not None else "": above is None or number > above,
            f" from {at_least:g}" if at_least is not None else "": at_least is None or number >= at_least,
            f" up to {at_most:g}" if at_most is not None else "": at_most is None or number <= at_most,
        }
        if math.isfinite(number) and all(rules.values()):
            return number
        self.add(key, f"found {found(value)}, expected {kind}{''.join(rules)}{like}")
        return math.nan

    def text(self, key: str, value: object, *, expected: str, empty: bool = False) -> str:
        """Return `value` as a line of text, or note why it is none and return an empty one."""
        if isinstance(value, str) and (value.strip() == value != "" or (empty and not value)) and value.isprintable():
            return value
        self.add(key, f"found {found(value)}, expected {expected}")
        return ""

    def choice(self, key: str, value: object, valid: Collection[str]) -> None:
        """Note a `value` that is none of the `valid` words."""
        if not isinstance(value, str) or value not in valid:
            words = " or ".join(f'"{word}"' for word in valid)
            self.add(key, f"found {found(value)}, expected {words}")

    def flag(self, key: str, value: object) -> None:
        """Note a `value` that is neither true nor false."""
        if not isinstance(value, bool | np.bool_):
            self.add(key, f"found {found(value)}, expected true or false")

    def known_keys(self, table: Collection[str], valid: Collection[str]) -> None:
        """Note every key of `table` that is not `valid`."""
        for key in table:
            if key not in valid:
                self.add(key, f"unknown key; {nearest(key, valid)}")


def _decimal_cure(value: object) -> str:
    """Return the cure for a number written as text with a decimal comma, else nothing."""
    if not isinstance(value, str):
        return ""
    try:
        number = float(value.replace(",", ".", 1))
    except ValueError:
        return ""
    return f"; write it without quotes and with a decimal point: {number:g}"
