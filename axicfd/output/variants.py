"""Folders of `wall` and `matters`: verdicts, curves of all variants, the variants' own cases, a picture."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import numpy as np

from axicfd.case.write import to_toml
from axicfd.output import csv, effects, figures, folder
from axicfd.variants.matters import Assumptions
from axicfd.variants.wall import COLUMNS, WallEffect

WALL, MATTERS = "wall.json", "matters.json"
PICTURED = "wetted_wall_temperature_K", "wall_heat_flux_W_m2", "bulk_temperature_K"


def wall_text(found: WallEffect) -> str:
    """wall.json."""
    return folder.summary_text(effects.as_tree(found))


def matters_text(found: Assumptions) -> str:
    """matters.json."""
    return folder.summary_text(effects.as_tree(found))


def write_wall(found: WallEffect, path: Path, replace: bool = False) -> None:
    """wall.json, per stream the curves of all cases and their differences, a picture, and the cases themselves."""
    folder.refuse_unusable(path, replace, WALL)
    with folder.whole_or_not(path) as unfinished:
        (unfinished / WALL).write_text(wall_text(found), encoding="utf-8")
        _write_cases(found.results, unfinished)
        streams = list(next(iter(found.results.values())).axial)
        for stream in streams:
            name = "wall" if len(streams) == 1 else f"wall-{folder.file_name(stream)}"
            csv.write_columns(unfinished / f"{name}.csv", wall_columns(found, stream))
            figures.save(wall_picture(found, stream), unfinished / f"{name}.png")


def write_matters(found: Assumptions, path: Path, replace: bool = False) -> None:
    """matters.json and the cases themselves."""
    folder.refuse_unusable(path, replace, MATTERS)
    with folder.whole_or_not(path) as unfinished:
        (unfinished / MATTERS).write_text(matters_text(found), encoding="utf-8")
        _write_cases(found.results, unfinished)


def wall_columns(found: WallEffect, stream: str) -> dict[str, Any]:
    """Columns of wall.csv: the curves of each case, and what each effect changes in them, with half-widths."""
    columns: dict[str, Any] = {"z_m": next(iter(found.results.values())).axial[stream]["z_m"]}
    for name, result in found.results.items():
        for column in COLUMNS:
            columns[f"{_word(name)}_{column}"] = result.axial[stream][column]
    for effect in found.effects:
        for curve in effect.curves:
            if curve.stream == stream:
                columns[f"by_{_word(effect.name)}_{curve.column}"] = curve.difference
                columns[f"half_width_by_{_word(effect.name)}_{curve.column}"] = curve.half_width
    return {name: np.asarray(column) for name, column in columns.items()}


def wall_picture(found: WallEffect, stream: str) -> Any:
    """Wall and bulk temperature and wall flux of all cases under the tube."""
    return figures.variants_picture(found.results, stream, PICTURED, f"{stream}: what the wall changes")


def _word(name: str) -> str:
    return name.replace(" ", "_")


def _write_cases(results: dict[str, Any], unfinished: Path) -> None:
    for name, result in results.items():
        (unfinished / f"{folder.file_name(name)}.toml").write_text(to_toml(result.case), encoding="utf-8")
