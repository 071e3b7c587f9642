"""Which table is to be looked into: a file as it stands, or the numbers behind a name."""

from collections.abc import Mapping
from pathlib import Path

import numpy as np

from optics.errors import InputError
from optics.media.bandtail import rows_of
from optics.media.cabinet import find, is_table
from optics.media.checks import Fitness, examine
from optics.media.dispersion import Constant
from optics.media.labfile import Hints, read_lab
from optics.media.material import Material

__all__ = ["fitness_of"]

SAME_ROW = 1e-6  # relative, within which a row is taken for the end of a range
SAMPLES = 401  # where a formula is looked at, evenly in wavelength


def fitness_of(
    spec: str | Mapping[str, object],
    *,
    folder: str | Path | None = None,
    hints: Hints | None = None,
    from_nm: float | None = None,
    to_nm: float | None = None,
) -> Fitness:
    """Look into a table or a material.

    Parameters
    ----------
    spec
        What `optics.media.cabinet.find` takes. A file of numbers is looked at as it stands, negative k included.
    folder
        Where it is looked for.
    hints
        What the file leaves open.
    from_nm, to_nm
        Wavelengths [nm] that it shall cover; None: its own ends.

    Raises
    ------
    InputError
        When it cannot be read, or is a constant.
    """
    if isinstance(spec, str) and is_table(spec):
        path = Path(folder or ".") / spec
        table = read_lab(path, place=spec, hints=hints or Hints(), signed=True)
        wavelength, n, k, name = table.wavelength_nm, table.n, table.k, path.stem
    else:
        material = find(spec, folder=folder)
        wavelength, n, k = _numbers(material)
        name = material.name
    if n is None:
        raise InputError(f"{spec}: holds absorption alone, expected n too")
    wanted = None
    if from_nm is not None or to_nm is not None:
        wanted = (from_nm or float(wavelength[0]), to_nm or float(wavelength[-1]))
        if wanted[0] >= wanted[1]:
            raise InputError(f"--from-nm: found {wanted[0]:g} up to {wanted[1]:g}, expected less than --to-nm")
    return examine(name, wavelength_nm=wavelength, n=n, k=k, wanted_nm=wanted)


def _numbers(material: Material) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return wavelengths [nm], n and k of a material: those of its own table, or samples of its formula."""
    if isinstance(material.medium, Constant):
        raise InputError(f'material "{material.name}": the same index at every wavelength: there is nothing to check')
    low, high = material.range_nm
    rows = rows_of(material.medium)
    if rows is None:
        wavelength = np.linspace(low, high, SAMPLES)
    else:
        inside = rows[0][(rows[0] >= low) & (rows[0] <= high)]
        ends = [end for end in (low, high) if not np.isclose(inside, end, rtol=SAME_ROW, atol=0.0).any()]
        wavelength = np.sort(np.concatenate([inside, ends]))  # where n has a grid of its own an end is a row of n alone
    index = material.index(wavelength)
    return wavelength, index.real, index.imag
