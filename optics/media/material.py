"""A medium with its name and where its numbers come from."""

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import ArrayLike, NDArray

from optics.errors import InputError
from optics.media.dispersion import Medium

__all__ = ["Material"]


@dataclass(frozen=True)
class Material:
    """What a layer or an outer medium is made of.

    Parameters
    ----------
    name
        What messages, tables and reports call it.
    medium
        Its index, any `optics.media.dispersion.Medium`.
    title
        One line saying what the material is (form, temperature, direction of the ray).
    source
        Where the numbers come from: reference with DOI, page, or file.
    licence
        Licence of the numbers, empty when unknown.
    gas
        True for gases and vacuum: light that reaches such an outer medium counts as free.
    sha256
        Hash of the file (card or table) or of the page's numbers; empty for a constant.
    path
        The file that was read, empty when there is none.
    cautions
        What a careful reader should know about the numbers.
    understood
        How the file was read, in sentences; empty when it left nothing open.
    """

    name: str
    medium: Medium
    title: str = ""
    source: str = ""
    licence: str = ""
    gas: bool = False
    sha256: str = ""
    path: str = field(default="", compare=False)  # where a file lies does not change what it holds
    cautions: str = ""
    understood: tuple[str, ...] = field(default=(), compare=False)

    def __post_init__(self) -> None:
        if not isinstance(self.name, str) or not self.name.strip():
            raise InputError(f"material: name: found {self.name!r}, expected a name")
        if not (hasattr(self.medium, "index") and hasattr(self.medium, "range_nm")):
            raise InputError(
                f'material "{self.name}": medium: found {self.medium!r}, expected an index, as Constant(1.5)'
            )

    @property
    def range_nm(self) -> tuple[float, float]:
        """First and last wavelength [nm] at which the index is known."""
        return self.medium.range_nm

    def index(self, wavelength_nm: ArrayLike) -> NDArray[np.complex128]:
        """Complex index n + i k, same shape as ``wavelength_nm`` [nm].

        Raises
        ------
        InputError
            Outside ``range_nm``; the line names the material, its range and the cure.
        """
        try:
            return self.medium.index(wavelength_nm)
        except InputError as error:
            raise InputError(f'material "{self.name}": {fault}' for fault in error.faults) from None
