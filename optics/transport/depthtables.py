"""Tables of transport over the depth."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from optics.arrays import Real
from optics.transport.depth import DepthMatrix, InDepth
from optics.transport.landing import ENDS

if TYPE_CHECKING:
    import pandas as pd

HEAD = ("birth_from_nm", "birth_to_nm", "rate_factor")
"""First columns of a matrix: the slice of birth and its mean rate factor."""


def landing_columns(edges_nm: Real) -> list[str]:
    """Return the names of the landing columns, ``lands_<from>_to_<to>_nm``."""
    return [f"lands_{low:.6g}_to_{high:.6g}_nm" for low, high in pairwise(edges_nm)]


def matrix_table(found: InDepth, matrix: DepthMatrix) -> pd.DataFrame:
    """Return a row a slice of birth: ``HEAD``, the share that lands in each slice, the share that meets each other end.

    Landing columns and ends of a row add to one.
    """
    import pandas as pd

    edges = found.edges_nm
    columns: dict[str, Real] = dict(zip(HEAD, (edges[:-1], edges[1:], matrix.rate_factor), strict=True))
    columns |= dict(zip(landing_columns(edges), matrix.matrix.T, strict=True))
    columns |= dict(zip(ENDS, matrix.ends.T, strict=True))
    return pd.DataFrame(columns)


def escape_table(found: InDepth) -> pd.DataFrame:
    """Return model, birth_nm (middle of the slice), film (taken back anywhere in it) and the other ends."""
    import pandas as pd

    edges = found.edges_nm
    parts = []
    for name, matrix in (("wave", found.wave), ("ray", found.ray)):
        if matrix is not None:
            columns = {"model": name, "birth_nm": 0.5 * (edges[:-1] + edges[1:]), "film": matrix.matrix.sum(axis=1)}
            parts.append(pd.DataFrame(columns | dict(zip(ENDS, matrix.ends.T, strict=True))))
    return pd.concat(parts, ignore_index=True)


def by_wavelength_table(found: InDepth) -> pd.DataFrame:
    """Return the leading model's matrix wavelength by wavelength, tidy.

    Columns wavelength_nm, birth_from_nm, birth_to_nm, landing_from_nm, landing_to_nm, share.
    """
    import pandas as pd

    edges, shares = found.edges_nm, found.lead.by_wavelength
    count, slices = shares.shape[0], shares.shape[1]
    landing = np.tile(np.arange(slices), count * slices)
    birth = np.tile(np.repeat(np.arange(slices), slices), count)
    return pd.DataFrame(
        {
            "wavelength_nm": np.repeat(found.wavelength_nm, slices * slices),
            "birth_from_nm": edges[birth],
            "birth_to_nm": edges[birth + 1],
            "landing_from_nm": edges[landing],
            "landing_to_nm": edges[landing + 1],
            "share": shares.ravel(),
        }
    )
