"""Tables of the results folder: UTF-8, comma and dot, one header row, an empty cell for no value."""

from __future__ import annotations

import csv
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

import numpy as np


def write_columns(path: Path, columns: Mapping[str, Any]) -> None:
    """Write named columns of equal length.

    columns : name -> (n,) array or list of numbers or words; nan and None become empty cells
    Numbers are written with the digits that read back as the same double. Raises ValueError when the lengths
    differ: a table cut short without a word would be worse.
    """
    names = list(columns)
    cells = [[_cell(value) for value in _as_list(columns[name])] for name in names]
    with path.open("w", encoding="utf-8", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        writer.writerow(names)
        writer.writerows(zip(*cells, strict=True))


def read_columns(path: Path) -> dict[str, Any]:
    """Read what `write_columns` wrote: name -> (n,) float array (nan for empty), or list of words."""
    with path.open(encoding="utf-8", newline="") as file:
        rows = list(csv.reader(file))
    if not rows:
        raise ValueError(f"{path.name} is empty: a header row is expected")
    names, body = rows[0], rows[1:]
    return {name: _column([row[i] for row in body]) for i, name in enumerate(names)}


def _as_list(values: Any) -> Sequence[Any]:
    return values.tolist() if isinstance(values, np.ndarray) else list(values)


def _cell(value: Any) -> str:
    if value is None:
        return ""
    if isinstance(value, str):
        return value
    if isinstance(value, bool | int):
        return str(int(value))
    return "" if np.isnan(value) else repr(float(value))


def _column(cells: list[str]) -> Any:
    try:
        return np.array([float(cell) if cell else np.nan for cell in cells])
    except ValueError:
        return cells
