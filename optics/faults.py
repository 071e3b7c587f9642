"""Checking what was handed in: every fault of an object collected, each said in one line of one form."""

import math
from collections.abc import Callable, Collection, Iterable
from difflib import SequenceMatcher
from numbers import Real
from typing import TypeGuard

import numpy as np

from optics.errors import InputError

LEAST_LIKENESS = 0.6  # of a misspelt name to a valid one, as difflib measures it
LONGEST_QUOTE = 40  # characters of a wrong value that a message shows


def found(value: object) -> str:
    """Say what a value is, so that a reader recognises it in the file or the call it came from."""
    if value is None:
        return "nothing"
    if isinstance(value, bool | np.bool_):
        return f"{str(bool(value)).lower()} (true or false)"
    if isinstance(value, str):
        return f"{quoted(value)} (text)" if value else "empty text"
    if isinstance(value, Real):
        return f"{as_float(value):.12g}"
    if isinstance(value, dict):
        return "a table" if value else "an empty table"
    if isinstance(value, list | tuple | np.ndarray):
        return f"a list of {len(value)}" if np.ndim(value) and len(value) else "an empty list"
    return f"{str(value)[:LONGEST_QUOTE]} ({type(value).__name__})"


def quoted(text: str) -> str:
    """Return text in quotes, cut when long."""
    return f'"{cut(text)}"'


def cut(text: str) -> str:
    """Return text, cut when too long to be quoted in a message."""
    return text if len(text) <= LONGEST_QUOTE else f"{text[:LONGEST_QUOTE]}..."


def is_number(value: object) -> TypeGuard[Real]:
    """Say whether a value is a real number; true and false are none."""
    return isinstance(value, Real) and not isinstance(value, bool | np.bool_)


def as_float(number: Real) -> float:
    """Return a real number as a float, infinite when it is too large for one."""
    try:
        return float(number)
    except OverflowError:
        return math.inf


def closest(name: str, valid: Iterable[str]) -> str | None:
    """Return the valid name that a misspelt one most resembles, the first of several, if any does."""
    likeness = {candidate: SequenceMatcher(None, name.lower(), candidate.lower()).ratio() for candidate in valid}
    best = max(likeness, key=lambda candidate: likeness[candidate])
    return best if likeness[best] >= LEAST_LIKENESS else None


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
        self.lines.append(_one_line(": ".join(part for part in (self.place, key, message) if part)))

    def collecting(self, key: str = "") -> "_Noting":
        """Return a context that notes the faults of whatever refuses in it, as faults of `key`, said once."""
        return _Noting(lambda line: self.add(key, line.removeprefix(f"{key}: ")))

    def taking_over(self) -> "_Noting":
        """Return a context that notes the faults of whatever refuses in it, whose lines name their place already."""
        return _Noting(lambda line: self.lines.append(_one_line(line)))

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
        if not is_number(value):
            self.add(key, f"found {found(value)}, expected {kind}{like}{_decimal_cure(value)}")
            return math.nan
        number = as_float(value)
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

    def text(self, key: str, value: object, *, expected: str, longest: int, empty: bool = False) -> None:
        """Note a `value` that is not one line of text of at most `longest` characters, without blanks around it."""
        if not isinstance(value, str) or not value.isprintable() or value.strip() != value or not (value or empty):
            self.add(key, f"found {found(value)}, expected {expected}")
        elif len(value) > longest:
            self.add(key, f"found {len(value)} characters, expected {expected} of at most {longest}")

    def choice(self, key: str, value: object, valid: Collection[str]) -> None:
        """Note a `value` that is none of the `valid` words."""
        if not isinstance(value, str) or value not in valid:
            words = " or ".join(f'"{word}"' for word in valid)
            self.add(key, f"found {found(value)}, expected {words}")

    def flag(self, key: str, value: object) -> None:
        """Note a `value` that is neither true nor false."""
        if not isinstance(value, bool | np.bool_):
            self.add(key, f"found {found(value)}, expected true or false")

    def kind(self, key: str, value: object, *kinds: type) -> None:
        """Note a `value` that is an instance of none of the `kinds`."""
        if not isinstance(value, kinds):
            self.add(key, f"found {found(value)}, expected {' or '.join(kind.__name__ for kind in kinds)}")

    def known_keys(self, table: Collection[str], valid: Collection[str]) -> set[str]:
        """Note every key of `table` that is not `valid`; return the valid ones that were probably meant."""
        meant = set()
        for key in table:
            if key in valid:
                continue
            close = closest(str(key), valid)
            self.add(
                str(key), f"unknown key; {f'did you mean {close}?' if close else 'valid here: ' + ', '.join(valid)}"
            )
            meant |= {close} if close else set()
        return meant


class _Noting:
    """A ``with`` block that an `InputError` ends without being raised, its faults noted."""

    def __init__(self, note: Callable[[str], None]) -> None:
        self.note = note

    def __enter__(self) -> None:
        return None

    def __exit__(self, _kind: object, error: object, _trace: object) -> bool:
        if not isinstance(error, InputError):
            return False
        for line in error.faults:
            self.note(line)
        return True


def _one_line(text: str) -> str:
    """Return text as one line, whatever the names in the input hold."""
    return "".join(c if c.isprintable() else c.encode("unicode_escape").decode() for c in text)


def _decimal_cure(value: object) -> str:
    """Return the cure for a number written as text, else nothing."""
    if not isinstance(value, str):
        return ""
    try:
        number = float(value.replace(",", ".", 1))
    except ValueError:
        return ""
    return f"; write {number:g} without quotes{' and with a decimal point' if ',' in value else ''}"
