"""A shelf for what many thicknesses of one film have in common: halves of the thin group at equal wave numbers.

Reflections of both halves, admittances and plates do not depend on the film's thickness, nor do the nodes that a
quadrature begins with. Within ``with shelved():`` they are computed once and kept, read-only, as long as they are used
and there is room.
"""

from collections import OrderedDict
from collections.abc import Callable, Hashable, Iterator
from contextlib import contextmanager
from contextvars import ContextVar
from dataclasses import fields, is_dataclass
from hashlib import blake2b
from typing import Any, TypeVar

import numpy as np

ROOM_BYTES = 160_000_000
Thing = TypeVar("Thing")


class Kept:
    """What is kept for one set of wave numbers; without a shelf, what one caller has computed so far."""

    def __init__(self) -> None:
        self.things: dict[Hashable, Any] = {}
        self.size = 0

    def get(self, name: Hashable, make: Callable[[], Thing]) -> Thing:
        """Return the thing of this name, made when it is first asked for."""
        if name not in self.things:
            self.things[name] = make()
        thing: Thing = self.things[name]
        return thing


class _Shelved(Kept):
    """The same on a shelf, which counts its bytes; what is kept there is read-only."""

    def __init__(self, shelf: "Shelf") -> None:
        super().__init__()
        self.shelf = shelf

    def get(self, name: Hashable, make: Callable[[], Thing]) -> Thing:
        if name not in self.things:
            thing = make()
            size = _frozen(thing)
            self.things[name] = thing
            self.size += size
            self.shelf.held += size
        kept: Thing = self.things[name]
        return kept


class Shelf:
    """Sets of wave numbers, the ones used last kept longest."""

    def __init__(self, room: int = ROOM_BYTES) -> None:
        self.room, self.held = room, 0
        self._sets: OrderedDict[Hashable, _Shelved] = OrderedDict()

    def clear(self) -> None:
        """Let everything go at once."""
        self._sets.clear()
        self.held = 0

    def at(self, key: Hashable) -> Kept:
        """Return what is kept under a key, nothing yet when it is new."""
        kept = self._sets.get(key)
        if kept is None:
            kept = self._sets[key] = _Shelved(self)
        self._sets.move_to_end(key)
        while self.held > self.room and len(self._sets) > 1:
            _, old = self._sets.popitem(last=False)
            self.held -= old.size
            old.size = 0
        return kept


_SHELF: ContextVar[Shelf | None] = ContextVar("shelf", default=None)


@contextmanager
def shelved(room: int = ROOM_BYTES) -> Iterator[None]:
    """Keep what thicknesses share while the block runs."""
    shelf = Shelf(room)
    token = _SHELF.set(shelf)
    try:
        yield
    finally:
        _SHELF.reset(token)
        shelf.clear()


def kept_for(key: Callable[[], Hashable], *places: Any) -> Kept:
    """Return what is kept of one stack, told by ``key``, at wave numbers told by arrays (None: no array)."""
    shelf = _SHELF.get()
    if shelf is None:
        return Kept()
    return shelf.at((key(), digest(*(place for place in places if place is not None))))


def digest(*arrays: Any) -> bytes:
    """Return a hash of arrays by value and shape."""
    found = blake2b(digest_size=16)
    for array in arrays:
        found.update(repr((array.shape, array.dtype.str)).encode())
        found.update(np.ascontiguousarray(array).data)
    return found.digest()


def _frozen(thing: Any) -> int:
    """Make every array in a thing read-only, and return their bytes."""
    if isinstance(thing, np.ndarray):
        thing.flags.writeable = False
        return thing.nbytes
    if isinstance(thing, dict):
        return sum(_frozen(part) for part in thing.values())
    if isinstance(thing, list | tuple):
        return sum(_frozen(part) for part in thing)
    if is_dataclass(thing):
        return sum(_frozen(getattr(thing, part.name)) for part in fields(thing))
    return 0
