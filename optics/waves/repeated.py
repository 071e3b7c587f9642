"""What is the same for several rows is computed once and handed to each."""

from dataclasses import fields, is_dataclass
from typing import Any, TypeVar

import numpy as np

from optics.arrays import Index

Thing = TypeVar("Thing")


def handed_out(thing: Thing, rows: Index) -> Thing:
    """Return a thing made of arrays, (..., row, node), with its row ``rows[i]`` as row i."""
    return _handed_out(thing, rows)  # type: ignore[no-any-return]


def _handed_out(thing: Any, rows: Index) -> Any:
    if isinstance(thing, np.ndarray):
        return np.take(thing, rows, axis=-2)
    if isinstance(thing, dict):
        return {key: _handed_out(part, rows) for key, part in thing.items()}
    if isinstance(thing, list | tuple):
        return type(thing)(_handed_out(part, rows) for part in thing)
    if is_dataclass(thing) and not isinstance(thing, type):
        return type(thing)(**{part.name: _handed_out(getattr(thing, part.name), rows) for part in fields(thing)})
    return thing
