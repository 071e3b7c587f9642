"""Tables and summaries as files."""

import json
import math
from collections.abc import Mapping
from pathlib import Path
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    from pandas import DataFrame

NUMBER = "%.10g"  # far below any error of the computation, and still readable
SUMMARY_DIGITS = 12


def write_table(table: "DataFrame", path: Path) -> None:
    """Write a table as CSV: one header row, no index, no comment lines, UTF-8, line feeds.

    Parameters
    ----------
    table
        Columns carry their unit in their name.
    path
        The file to write.
    """
    with path.open("w", encoding="utf-8", newline="") as file:
        table.to_csv(file, index=False, float_format=NUMBER, lineterminator="\n")


def write_summary(content: Mapping[str, Any], path: Path) -> None:
    """Write a summary as JSON, its numbers to 12 significant digits: what lies beyond them is rounding alone."""
    write_json(_rounded(content), path)


def write_json(content: Mapping[str, Any], path: Path) -> None:
    """Write plain values as JSON; numbers that JSON does not know (nan, infinite) become null."""
    text = json.dumps(_plain(content), indent=2, ensure_ascii=False, allow_nan=False)
    path.write_text(text + "\n", encoding="utf-8", newline="\n")


def _rounded(value: Any) -> Any:
    value = _plain(value)
    if isinstance(value, dict):
        return {name: _rounded(part) for name, part in value.items()}
    if isinstance(value, list):
        return [_rounded(part) for part in value]
    return float(f"{value:.{SUMMARY_DIGITS}g}") if isinstance(value, float) else value


def _plain(value: Any) -> Any:
    if isinstance(value, Mapping):
        return {str(key): _plain(part) for key, part in value.items()}
    if isinstance(value, np.ndarray | list | tuple):
        return [_plain(part) for part in value]
    if isinstance(value, np.generic):
        return _plain(value.item())
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value
