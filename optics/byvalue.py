"""Frozen dataclasses that hold arrays: compared, hashed and pickled by value."""

from dataclasses import fields
from typing import Any

import numpy as np
from numpy.typing import ArrayLike

from optics.arrays import Real


def read_only(values: ArrayLike) -> Real:
    """Return a copy of `values` as a float64 array that nobody can write into."""
    array = np.array(values, dtype=np.float64)
    array.flags.writeable = False
    return array


class ByValue:
    """Base of a dataclass declared with ``frozen=True, eq=False``; fields with ``compare=False`` are left out."""

    def __eq__(self, other: object) -> bool:
        if type(self) is not type(other):
            return NotImplemented
        return all(_same(getattr(self, name), getattr(other, name)) for name in _compared(self))

    def __hash__(self) -> int:
        return hash((type(self), *(_hashable(getattr(self, name)) for name in _compared(self))))

    def __setstate__(self, state: dict[str, Any]) -> None:
        # Unpickled arrays come back writeable.
        for name, value in state.items():
            object.__setattr__(self, name, read_only(value) if isinstance(value, np.ndarray) else value)


def _compared(instance: Any) -> list[str]:
    return [field.name for field in fields(instance) if field.compare]


def _same(one: object, other: object) -> bool:
    if isinstance(one, np.ndarray) or isinstance(other, np.ndarray):
        return np.array_equal(one, other)  # type: ignore[arg-type]
    return bool(one == other)


def _hashable(value: object) -> object:
    # Adding 0.0 turns -0.0, which equals 0.0, into the same bytes.
    return (value + 0.0).tobytes() if isinstance(value, np.ndarray) else value
