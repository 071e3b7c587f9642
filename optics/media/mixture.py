"""Two media mixed well below a wavelength, as one effective medium."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from optics.media.dispersion import Medium


@dataclass(frozen=True)
class Bruggeman:
    """An effective medium in which both parts are treated alike.

    f (e1 - e)/(e1 + 2 e) + (1 - f) (e2 - e)/(e2 + 2 e) = 0 (Bruggeman 1935; for rough faces Aspnes, Thin Solid Films
    89, 249 (1982)), the root that absorbs.

    Parameters
    ----------
    first, second
        The two media.
    share
        Share of the volume that the first takes.
    """

    first: Medium
    second: Medium
    share: float

    @property
    def range_nm(self) -> tuple[float, float]:
        """Where both are known."""
        ranges = self.first.range_nm, self.second.range_nm
        return max(low for low, _ in ranges), min(high for _, high in ranges)

    def index(self, wavelength_nm: ArrayLike) -> NDArray[np.complex128]:
        """Complex index n + i k, same shape as ``wavelength_nm`` [nm]; InputError outside the range."""
        return bruggeman(self.first.index(wavelength_nm), self.second.index(wavelength_nm), self.share)


def bruggeman(first: NDArray[np.complex128], second: NDArray[np.complex128], share: float) -> NDArray[np.complex128]:
    """Return the index of a mixture of two indices, ``share`` of the first."""
    one, two = np.asarray(first) ** 2, np.asarray(second) ** 2
    b = (3.0 * share - 1.0) * one + (2.0 - 3.0 * share) * two
    root = np.sqrt(b * b + 8.0 * one * two)
    candidates = np.array([(b + root) / 4.0, (b - root) / 4.0])
    # with clear parts both roots are real and the positive one is meant
    real = np.abs(candidates.imag) <= 1e-12 * np.abs(candidates)
    rank = np.where(real, candidates.real > 0.0, candidates.imag > 0.0)
    eps = np.where(rank[0], candidates[0], candidates[1])
    out: NDArray[np.complex128] = np.sqrt(eps)
    return out.real + 1j * np.maximum(out.imag, 0.0)
