"""Cells of an Excel workbook, through pandas and openpyxl (the extra ``excel``)."""

import io
import math
from typing import Any

from optics.errors import InputError

__all__ = ["cells_of"]

_CURE = 'pip install "photonfate[excel]"'


def cells_of(content: bytes, *, place: str, sheet: str) -> tuple[list[list[str]], str]:
    """Return the cells of one sheet as text, row by row, and the sheet's name.

    Parameters
    ----------
    content
        The workbook.
    place
        What messages call it.
    sheet
        Which sheet; empty when there is but one that holds anything.

    Raises
    ------
    InputError
        When it is no workbook, the sheet is missing, or several hold something and none was named.
    """
    sheets = _sheets(content, place)
    if sheet:
        if sheet not in sheets:
            raise InputError(f'{place}: no sheet "{sheet}", expected one of {", ".join(sheets)}')
        return sheets[sheet], sheet
    filled = [name for name, rows in sheets.items() if any(any(row) for row in rows)]
    if len(filled) > 1:
        raise InputError(
            f"{place}: {len(filled)} sheets hold something ({', '.join(filled)}); say --sheet when importing it"
        )
    if not filled:
        raise InputError(f"{place}: found an empty workbook, expected a header and rows of numbers")
    return sheets[filled[0]], filled[0]


def _sheets(content: bytes, place: str) -> dict[str, list[list[str]]]:
    import pandas as pd

    try:
        frames = pd.read_excel(io.BytesIO(content), sheet_name=None, header=None, dtype=object, engine="openpyxl")
    except ImportError:
        raise InputError(f"{place}: reading Excel workbooks is not installed; {_CURE}") from None
    except Exception as error:  # the libraries raise whatever their zip and XML readers do
        raise InputError(f"{place}: not an Excel workbook that can be read ({type(error).__name__})") from None
    return {str(name): [[_text(cell) for cell in row] for row in frame.to_numpy()] for name, frame in frames.items()}


def _text(cell: Any) -> str:
    """Return a cell as text that reads back as the same number."""
    if cell is None or (isinstance(cell, float) and math.isnan(cell)):
        return ""
    return repr(float(cell)) if isinstance(cell, int | float) and not isinstance(cell, bool) else str(cell).strip()
