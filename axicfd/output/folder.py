"""The results folder: written whole or not at all, and read back.

Everything goes into a temporary folder beside the target, which is renamed at the end; an interruption at any
moment leaves either the old state or the finished folder.
"""

from __future__ import annotations

import json
import math
import os
import shutil
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from axicfd.case.layout import Layout, layout
from axicfd.case.model import Case
from axicfd.case.read import load
from axicfd.case.write import to_toml
from axicfd.errors import ResultsFolderError
from axicfd.output import csv, vtr

SUMMARY = "summary.json"
CASE = "case.toml"
FIELDS = "fields.npz"


@dataclass(frozen=True)
class Stored:
    """A results folder read back; the attributes mean the same as those of a Result.

    folder : where it was read from
    """

    folder: Path
    case: Case
    layout: Layout
    version: str
    summary: dict[str, Any]
    axial: dict[str, dict[str, Any]]
    axial_half_width: dict[str, dict[str, Any]]
    outside: dict[str, Any]
    radial: dict[str, Any]
    fields: dict[str, Any]


def file_name(name: str) -> str:
    """A user's name as part of a file name: spaces become `-`."""
    return name.replace(" ", "-")


def axial_name(stream: str) -> str:
    """File of a stream's curves."""
    return f"axial-{file_name(stream)}.csv"


def half_width_name(stream: str) -> str:
    """File of the mesh errors of a stream's curves; only where nested meshes gave some."""
    return f"axial-{file_name(stream)}.half-width.csv"


def refuse_unusable(path: Path, replace: bool, mark: str = SUMMARY) -> None:
    """Raise ResultsFolderError if the folder could not be written; asked before the solve and after.

    mark : the file by which a folder of the same kind is known, which alone may be replaced
    """
    if not path.exists() and not path.is_symlink():
        parent = next((above for above in path.absolute().parents if above.exists()), Path("/"))
        if not parent.is_dir() or not os.access(parent, os.W_OK):
            raise ResultsFolderError(
                f"cannot write the folder {path}: {parent} cannot be written to. Give another place with --out."
            )
        return
    if not path.is_dir() or path.is_symlink():
        raise ResultsFolderError(f"{path} exists and is not a folder. Give another place with --out, or move it away.")
    if not replace:
        raise ResultsFolderError(
            f"the folder {path} exists already. Replace it with --replace, or give another place with --out."
        )
    if any(path.iterdir()) and not (path / mark).exists():
        # Replacing means deleting: a folder with someone's other files must not vanish by a slip of --out.
        raise ResultsFolderError(
            f"the folder {path} holds other files and no {mark}; only a results folder is replaced. "
            "Give another place with --out."
        )


def write(result: Any, path: Path, replace: bool = False) -> None:
    """Write the results folder of a Result; raises ResultsFolderError where that is not possible."""
    refuse_unusable(path, replace)
    with whole_or_not(path) as folder:
        _write_files(result, folder)


def read(path: Path) -> Stored:
    """Read a results folder back; raises ResultsFolderError naming the file that is missing or broken."""
    if not path.is_dir():
        raise ResultsFolderError(
            f"{path} is not a folder. Give the folder that `axicfd solve` wrote, such as heater-results."
        )
    if not (path / SUMMARY).exists():
        raise ResultsFolderError(
            f"the folder {path} is not a results folder: it has no {SUMMARY}. Write one with `axicfd solve`."
        )
    name = SUMMARY
    try:
        summary = json.loads((path / SUMMARY).read_text(encoding="utf-8"))
        tables, half_widths = {}, {}
        for stream in summary["stream"]:
            name = axial_name(stream)
            tables[stream] = csv.read_columns(path / name)
            if "numerical_uncertainty" in summary:
                name = half_width_name(stream)
                half_widths[stream] = csv.read_columns(path / name)
        name = "outside.csv"
        outside = csv.read_columns(path / name)
        name = "radial.csv"
        radial = csv.read_columns(path / name)
        name = FIELDS
        fields = _read_fields(path / FIELDS)
    except (OSError, ValueError, KeyError, TypeError, EOFError) as error:
        raise ResultsFolderError(
            f"{path / name} is missing or broken ({error}). Solve the case again to write the folder anew."
        ) from error
    case = load(path / CASE)
    return Stored(
        folder=path,
        case=case,
        layout=layout(case),
        version=str(summary.get("version", "")),
        summary=summary,
        axial=tables,
        axial_half_width=half_widths,
        outside=outside,
        radial=radial,
        fields=fields,
    )


def summary_text(summary: dict[str, Any]) -> str:
    """summary.json: numbers of numpy become plain ones, and what is not finite becomes null."""
    return json.dumps(_plain(summary), indent=2, ensure_ascii=False, allow_nan=False) + "\n"


def _write_files(result: Any, folder: Path) -> None:
    (folder / SUMMARY).write_text(summary_text(result.summary), encoding="utf-8")
    (folder / CASE).write_text(to_toml(result.case), encoding="utf-8")
    for stream, columns in result.axial.items():
        csv.write_columns(folder / axial_name(stream), columns)
    for stream, columns in result.axial_half_width.items():
        csv.write_columns(folder / half_width_name(stream), columns)
    csv.write_columns(folder / "outside.csv", result.outside)
    csv.write_columns(folder / "radial.csv", result.radial)
    arrays: dict[str, Any] = {key: np.asarray(value) for key, value in result.fields.items()}
    np.savez(folder / FIELDS, **arrays)
    outlet = {
        name: stream.outlet_pressure for name, stream in result.case.stream.items() if f"u.{name}" in result.fields
    }
    vtr.write_fields(folder / "fields.vtr", result.fields, outlet)


def _read_fields(path: Path) -> dict[str, Any]:
    with np.load(path, allow_pickle=False) as stored:
        fields: dict[str, Any] = {key: stored[key] for key in stored.files}
    for key, value in fields.items():
        if value.ndim == 0:
            fields[key] = value.item()
        elif value.dtype.kind == "U":
            fields[key] = value.tolist()
    return fields


@contextmanager
def whole_or_not(path: Path) -> Iterator[Path]:
    """A temporary folder that becomes `path` at the end, or vanishes when anything interrupts.

    Raises ResultsFolderError where the disk does not let it.
    """
    try:
        with _temporary(path) as folder:
            yield folder
    except OSError as error:
        raise ResultsFolderError(f"cannot write the folder {path}: {error.strerror or error}.") from error


@contextmanager
def _temporary(path: Path) -> Iterator[Path]:
    path.parent.mkdir(parents=True, exist_ok=True)
    unfinished = path.parent / f".{path.name}-unfinished-{os.getpid()}"
    old = path.parent / f".{path.name}-old-{os.getpid()}"
    unfinished.mkdir()
    try:
        yield unfinished
        if path.exists():
            path.rename(old)
            try:
                unfinished.rename(path)
            except BaseException:
                old.rename(path)
                raise
            shutil.rmtree(old)
        else:
            unfinished.rename(path)
    finally:
        shutil.rmtree(unfinished, ignore_errors=True)


def _plain(value: Any) -> Any:
    if isinstance(value, dict):
        return {str(key): _plain(entry) for key, entry in value.items()}
    if isinstance(value, list | tuple):
        return [_plain(entry) for entry in value]
    if isinstance(value, np.ndarray):
        return [_plain(entry) for entry in value.tolist()]
    if isinstance(value, np.generic):
        value = value.item()
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value
