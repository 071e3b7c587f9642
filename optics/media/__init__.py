"""What light meets: indices that depend on wavelength, and where they are found."""

from optics.media.cabinet import MaterialLike, bundled_names, find, own_names
from optics.media.dispersion import Cauchy, Constant, Joined, Medium, Sellmeier, Tabulated
from optics.media.labfile import read_table
from optics.media.material import Material

__all__ = [
    "Cauchy",
    "Constant",
    "Joined",
    "Material",
    "MaterialLike",
    "Medium",
    "Sellmeier",
    "Tabulated",
    "bundled_names",
    "find",
    "own_names",
    "read_table",
]
