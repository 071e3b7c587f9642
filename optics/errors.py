"""The one exception that users meet."""

from collections.abc import Iterable


class InputError(ValueError):
    """Something that was handed in cannot be used.

    Parameters
    ----------
    faults
        One sentence, or several; each names the place, what was found, what is expected and,
        where there is one, the cure. ``str()`` gives a line a fault.
    """

    faults: tuple[str, ...]

    def __init__(self, faults: str | Iterable[str]) -> None:
        self.faults = (faults,) if isinstance(faults, str) else tuple(faults)
        super().__init__("\n".join(self.faults))

    def __reduce__(self) -> tuple[type["InputError"], tuple[tuple[str, ...]]]:
        return type(self), (self.faults,)
