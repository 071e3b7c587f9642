"""Taking keys out of a table that somebody wrote by hand."""

from collections.abc import Iterable, Mapping
from typing import Any

from optics.faults import Faults, found


class Keys:
    """A table whose unknown and missing keys are noted as faults.

    Parameters
    ----------
    table
        The table; a key whose value is None counts as not given.
    faults
        Where faults go.
    valid
        The keys that may stand in it.

    Attributes
    ----------
    meant
        Valid keys that an unknown one probably was meant to be: their absence is no second fault.
    """

    def __init__(self, table: Mapping[str, Any], faults: Faults, valid: tuple[str, ...]) -> None:
        self.faults = faults
        self.given = {key: value for key, value in table.items() if value is not None}
        self.meant = faults.known_keys(self.given, valid)

    def get(self, key: str, default: Any = None) -> Any:
        """Return the value of a key that may be left out."""
        return self.given.get(key, default)

    def need(self, key: str, expected: str) -> Any:
        """Return the value of a key that may not be left out; None when it was."""
        if key not in self.given and key not in self.meant:
            self.faults.add(key, f"missing, expected {expected}")
        return self.given.get(key)

    def table(self, key: str) -> Mapping[str, Any] | None:
        """Return a table in the table; None when it is left out or none."""
        value = self.given.get(key)
        if value is None or isinstance(value, Mapping):
            return value
        self.faults.add(key, f"found {found(value)}, expected a table of its own")
        return None

    def which(self, keys: Iterable[str], expected: str) -> str | None:
        """Return the one of the keys that is given, of which there must be one."""
        keys = tuple(keys)
        given = [key for key in keys if key in self.given]
        if not given and not self.meant.intersection(keys):
            self.faults.add(keys[0], f"missing, expected {expected}")
        if len(given) > 1:
            self.faults.add(given[0], f"found {' and '.join(given)}, expected one of them")
        return given[0] if len(given) == 1 else None
