"""A medium whose index is moved a little: what an offset of n or a scale on k does to an answer."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from optics.errors import InputError
from optics.media.dispersion import Medium


@dataclass(frozen=True)
class Nudged:
    """A medium with n raised by an offset and k multiplied by a scale, the same at every wavelength.

    Parameters
    ----------
    medium
        The medium as it was given.
    n_offset
        Added to n.
    k_scale
        Multiplied with k, 0 or more.
    """

    medium: Medium
    n_offset: float = 0.0
    k_scale: float = 1.0

    def __post_init__(self) -> None:
        if not self.k_scale >= 0.0:
            raise InputError(f"k_scale: found {self.k_scale:g}, expected a number from 0")

    @property
    def range_nm(self) -> tuple[float, float]:
        """First and last wavelength [nm] at which the index is known."""
        return self.medium.range_nm

    def index(self, wavelength_nm: ArrayLike) -> NDArray[np.complex128]:
        """Complex index, same shape as ``wavelength_nm`` [nm]; InputError outside the range or for n of 0 or less."""
        index = self.medium.index(wavelength_nm)
        moved = (index.real + self.n_offset) + 1j * (index.imag * self.k_scale)
        if self.n_offset < 0.0 and (moved.real <= 0.0).any():
            raise InputError(f"n_offset: found {self.n_offset:g}, which takes n to {moved.real.min():g}")
        return np.asarray(moved)


def nudged(medium: Medium, *, n_offset: float | None = None, k_scale: float | None = None) -> Medium:
    """Return a medium with a new offset of n or scale on k; those it has already are replaced, not added to."""
    own = medium if isinstance(medium, Nudged) else Nudged(medium)
    offset = own.n_offset if n_offset is None else float(n_offset)
    scale = own.k_scale if k_scale is None else float(k_scale)
    return own.medium if (offset, scale) == (0.0, 1.0) else Nudged(own.medium, offset, scale)
