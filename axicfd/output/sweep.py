"""A sweep from end to end: its plan, its folder, its table.

The folder holds `sweep.sqlite`, from which a sweep goes on where it was left, and `sweep.csv`, the table made of it.
"""

from __future__ import annotations

import json
import os
import shutil
from collections.abc import Callable, Iterator, Mapping
from concurrent.futures import Executor
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from axicfd import units
from axicfd.case import keys, paths
from axicfd.case.model import Case
from axicfd.case.read import load
from axicfd.case.write import canonical, to_toml
from axicfd.errors import AxicfdError, ResultsFolderError
from axicfd.output import csv
from axicfd.output.sweep_store import NAME, SweepStore, fields_folder
from axicfd.variants.plan import Plan, declaration_of, kind_of, read_plan
from axicfd.variants.runner import SOLVED
from axicfd.variants.sweep import Progress, Record, jobs_of, meshes_of, meshes_text, shared_meshes, solve_rows

TABLE = "sweep.csv"
BAR = "numerical_uncertainty."  # before the name of a quantity: the half-width of its mesh error


@dataclass(frozen=True)
class Sweep:
    """The table of a sweep.

    base    : the case that the rows vary
    varied  : key path -> name of its column      units  : key path -> unit it was written in, "" without
    columns : name -> values of all rows, None where there is none; the columns of sweep.csv
    folder  : where it is kept; None for a sweep in memory
    """

    base: Case
    varied: Mapping[str, str]
    units: Mapping[str, str]
    columns: Mapping[str, tuple[Any, ...]]
    folder: Path | None

    def __len__(self) -> int:
        return len(self.columns["row"])

    def __getitem__(self, column: str) -> tuple[Any, ...]:
        """A column, by its name in sweep.csv: sweep["stream.oil.outlet_temperature_K"]."""
        if column not in self.columns:
            near = keys.nearest(column, self.columns)
            raise AxicfdError(f"the sweep has no column `{column}`." + (f" Did you mean `{near}`?" if near else ""))
        return self.columns[column]

    @property
    def rows(self) -> Iterator[dict[str, Any]]:
        """The rows as plain tables."""
        for values in zip(*self.columns.values(), strict=True):
            yield dict(zip(self.columns, values, strict=True))

    @property
    def counts(self) -> dict[str, int]:
        """How many rows ended how; "" stands for rows not solved yet."""
        found: dict[str, int] = {}
        for status in self["status"]:
            found[status or ""] = found.get(status or "", 0) + 1
        return found

    @property
    def quantities(self) -> list[str]:
        """The columns of headline quantities."""
        return [name.removeprefix(BAR) for name in self.columns if name.startswith(BAR)]

    def as_dict(self) -> dict[str, list[Any]]:
        """Plain data: name of a column -> its values."""
        return {name: list(values) for name, values in self.columns.items()}

    def to_pandas(self) -> Any:
        """A data frame with the columns of sweep.csv; needs the extra `data`."""
        try:
            import pandas
        except ImportError:
            raise AxicfdError("pandas is missing. Install it with `pip install axicfd[data]`.") from None
        return pandas.DataFrame(self.as_dict())

    def to_parquet(self, path: str | os.PathLike) -> None:
        """Write the table as a Parquet file; needs the extra `data`."""
        try:
            import pyarrow
            from pyarrow import parquet
        except ImportError:
            raise AxicfdError("pyarrow is missing. Install it with `pip install axicfd[data]`.") from None
        parquet.write_table(pyarrow.table(self.as_dict()), path)

    def __repr__(self) -> str:
        ended = ", ".join(f"{count} {status or 'not solved yet'}" for status, count in self.counts.items())
        return f"<Sweep of {self.base.title!r} over {', '.join(self.varied)}: {ended}>"


def sweep(
    plan: str | os.PathLike | Mapping[str, Any] | Plan,
    out: str | os.PathLike | None = None,
    *,
    workers: int | None = None,
    executor: Callable[[], Executor] | None = None,
    keep_fields: bool = False,
    retry: bool = False,
    replace: bool = False,
    on_progress: Callable[[Progress], Any] | None = None,
) -> Sweep:
    """Solve every row of a plan and give the table.

    plan        : a plan file, its text, or its tables: {"case": case, "vary": [{"key": ..., "values": [...]}]}
    out         : folder to keep it in; one that holds a sweep of the same base case is gone on with, so that only
                  rows it lacks are solved. Without one the table is in memory only.
    workers     : processes, by default one per core        executor : makes an executor to use instead
    keep_fields : keep the whole results folder of each row under rows/
    retry       : solve rows that did not end solved again
    replace     : begin anew where the folder holds another sweep
    on_progress : called with a `Progress` after each row
    Raises `InputError` for a plan that cannot be used, before anything is solved.
    """
    read = plan if isinstance(plan, Plan) else read_plan(plan)
    folder = Path(out) if out is not None else None
    if keep_fields and folder is None:
        raise AxicfdError("`keep_fields` needs a folder to keep them in: give `out`.")
    if folder is not None:
        _prepare(folder, read.base, replace)
    with SweepStore(None if folder is None else folder / NAME) as store:
        facts = store.facts()
        meshes = meshes_of(facts["meshes"], read.base) if "meshes" in facts else shared_meshes(read.base)
        jobs, keyed = jobs_of(read, meshes)
        varied = {key: column_of(read.base, key) for key in read.keys}
        written = {key: next(filter(None, (row.case.unit_of(key) for row in read.rows)), "") for key in read.keys}
        store.set_facts(
            {
                "base": canonical(read.base),
                "case": to_toml(read.base),
                "meshes": meshes_text(meshes),
                "varied": json.dumps(varied),
                "units": json.dumps(written),
            }
        )
        store.set_plan(
            {
                row.number: (keyed[row.number], {column: si_value(row.case, key) for key, column in varied.items()})
                for row in read.rows
            }
        )
        try:
            solve_rows(
                jobs,
                store,
                on_progress=on_progress,
                workers=workers,
                executor=executor,
                keep_fields=keep_fields,
                retry=retry,
            )
        finally:  # an interrupted sweep has its table too
            table = _table(store, read.base, folder)
            if folder is not None:
                write_table(table, folder / TABLE)
    return table


def read_sweep(folder: Path) -> Sweep:
    """The table of a sweep's folder as it stands. Raises `ResultsFolderError` where it holds none."""
    if not is_sweep(folder):
        raise ResultsFolderError(f"the folder {folder} holds no sweep: it has no {NAME}.")
    with SweepStore(folder / NAME) as store:
        facts = store.facts()
        if "case" not in facts:
            raise ResultsFolderError(f"{folder / NAME} holds no sweep. Run `axicfd sweep` again.")
        return _table(store, load(facts["case"]), folder)


def is_sweep(folder: Path) -> bool:
    return (folder / NAME).is_file()


def write_table(table: Sweep, path: Path) -> None:
    """sweep.csv, whole or not at all."""
    unfinished = path.with_name(f".{path.name}-unfinished-{os.getpid()}")
    try:
        csv.write_columns(unfinished, table.columns)
        unfinished.replace(path)
    finally:
        unfinished.unlink(missing_ok=True)


def column_of(base: Case, key: str) -> str:
    """The column of a varied key: its path with the SI unit, where it has one."""
    kind = kind_of(base._tree, key)
    return f"{key}_{units.in_name(kind)}" if kind else key


def si_value(case: Case, key: str) -> float | str | None:
    """The value of a key in a case for the table: an SI number, or the text of what is no number."""
    value = paths.find(case._tree, key)
    declaration = declaration_of(case._tree, key)
    if value is None or isinstance(value, bool) or declaration is None:
        return None if value is None else str(value).lower() if isinstance(value, bool) else str(value)
    found = declaration.read(value, False)
    if not isinstance(found, int | float):
        found = getattr(found, "value", found)  # a constant law
    return float(found) if isinstance(found, int | float) else declaration.write(declaration.read(value, False), value)


def _prepare(folder: Path, base: Case, replace: bool) -> None:
    """Make the folder, or see that it may be gone on with."""
    if folder.exists() and not folder.is_dir():
        raise ResultsFolderError(f"{folder} exists and is not a folder. Give another place with --out.")
    if folder.is_dir() and any(folder.iterdir()):
        if not is_sweep(folder):
            raise ResultsFolderError(
                f"the folder {folder} holds other files and no {NAME}. Give another place with --out."
            )
        if replace:
            _empty(folder)
            return
        with SweepStore(folder / NAME) as store:
            facts = store.facts()
        if facts.get("base", canonical(base)) != canonical(base):
            title = load(facts["case"]).title or "untitled"
            raise ResultsFolderError(
                f'the folder {folder} holds a sweep of another base case ("{title}" with other values). '
                "Give another place with --out, or begin anew with --replace."
            )
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as why:
        raise ResultsFolderError(
            f"cannot make the folder {folder}: {why.strerror or why}. Give another place with --out."
        ) from None


def _empty(folder: Path) -> None:
    """Remove what a sweep wrote, and nothing else."""
    for path in (*folder.glob(f"{NAME}*"), folder / TABLE):
        path.unlink(missing_ok=True)
    shutil.rmtree(folder / "rows", ignore_errors=True)


def _table(store: SweepStore, base: Case, folder: Path | None) -> Sweep:
    facts, plan = store.facts(), store.plan()
    varied = json.loads(facts["varied"])
    found = store.records(key for key, _ in plan.values())
    rows = [(number, key, values, found.get(key)) for number, (key, values) in plan.items()]
    records = [record for *_, record in rows if record is not None]
    columns: dict[str, list[Any]] = {"row": [number for number, *_ in rows]}
    for column in varied.values():
        columns[column] = [values.get(column) for _, _, values, _ in rows]
    columns["status"] = [record.status if record else None for *_, record in rows]
    columns["message"] = [record.message if record else None for *_, record in rows]
    for part, prefix in (("values", ""), ("half_widths", BAR), ("limits", "limits.")):
        for name in dict.fromkeys(name for record in records for name in getattr(record, part)):
            columns[f"{prefix}{name}"] = [getattr(record, part).get(name) if record else None for *_, record in rows]
    columns["cautions"] = [" ".join(record.cautions) if record else None for *_, record in rows]
    columns["cells"] = [record.cells if record else None for *_, record in rows]
    columns["seconds"] = [record.seconds if record else None for *_, record in rows]
    if folder is not None and any(record.fields for record in records):
        columns["folder"] = [_folder_name(folder, key, record) for _, key, _, record in rows]
    return Sweep(
        base, varied, json.loads(facts["units"]), {name: tuple(values) for name, values in columns.items()}, folder
    )


def _folder_name(folder: Path, key: str, record: Record | None) -> str | None:
    kept = record is not None and record.fields
    return fields_folder(folder, key).relative_to(folder).as_posix() if kept else None


__all__ = ["SOLVED", "Sweep", "column_of", "is_sweep", "read_sweep", "sweep"]
