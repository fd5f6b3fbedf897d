"""The store of a sweep: one SQLite file that survives an end at any moment.

Only the process that runs the sweep writes, one row per transaction, in write-ahead mode: a killed one loses what was
being solved and nothing else. The file must lie on a disk of this machine: that mode does not work across a network.
"""

from __future__ import annotations

import json
import sqlite3
from collections.abc import Iterable, Mapping
from dataclasses import asdict, replace
from pathlib import Path
from typing import Any

from axicfd.errors import ResultsFolderError
from axicfd.variants.sweep import Record

NAME = "sweep.sqlite"
LAYOUT = "1"  # of the tables below
WAIT = 30.0  # seconds for another process that reads or writes
TABLES = """
create table if not exists fact (name text primary key, value text not null);
create table if not exists record (
    key text primary key, status text not null, message text not null, seconds real not null, found text not null
);
create table if not exists plan (number integer primary key, key text not null, varied text not null);
"""


class SweepStore:
    """Records by their key, and the plan that was run last; for use in a `with`. Without a path it lives in memory.

    Raises `ResultsFolderError` where the file cannot be read or written.
    """

    def __init__(self, path: Path | None) -> None:
        self.path = path
        try:
            self._connection = sqlite3.connect(":memory:" if path is None else path, timeout=WAIT)
            self._connection.execute("pragma journal_mode = wal")
            self._connection.executescript(TABLES)
            layout = self.facts().setdefault("layout", LAYOUT)
            self.set_facts({"layout": layout})
        except sqlite3.Error as why:
            raise self._broken(why) from None
        if layout != LAYOUT:
            raise ResultsFolderError(
                f"{path} was written by another version. Give another place with --out, or begin anew with --replace."
            )

    def __enter__(self) -> SweepStore:
        return self

    def __exit__(self, kind: Any, error: BaseException | None, trace: Any) -> None:
        self._connection.close()
        if isinstance(error, sqlite3.Error):
            raise self._broken(error) from None

    def facts(self) -> dict[str, str]:
        """What holds for the whole sweep: its base case, its meshes, what varies."""
        return dict(self._connection.execute("select name, value from fact"))

    def set_facts(self, facts: Mapping[str, str]) -> None:
        with self._connection:
            self._connection.executemany("insert or replace into fact values (?, ?)", facts.items())

    def set_plan(self, rows: Mapping[int, tuple[str, Mapping[str, Any]]]) -> None:
        """The rows in their order: number -> (key of its record, varied values by the name of their column)."""
        lines = [(number, key, json.dumps(varied)) for number, (key, varied) in rows.items()]
        with self._connection:
            self._connection.execute("delete from plan")
            self._connection.executemany("insert into plan values (?, ?, ?)", lines)

    def plan(self) -> dict[int, tuple[str, dict[str, Any]]]:
        """What `set_plan` was given last."""
        found = self._connection.execute("select number, key, varied from plan order by number")
        return {number: (key, json.loads(varied)) for number, key, varied in found}

    def records(self, keys: Iterable[str]) -> dict[str, Record]:
        wanted = set(keys)
        found = self._connection.execute("select key, status, message, seconds, found from record")
        return {
            key: Record(key, status, message, seconds, **_read(text))
            for key, status, message, seconds, text in found
            if key in wanted
        }

    def put(self, record: Record, result: Any = None) -> None:
        """Keep a record; with a result, its whole results folder first, so that a record's fields are there."""
        if result is not None and self.path is not None:
            from axicfd.output import folder

            folder.write(result, fields_folder(self.path.parent, record.key), replace=True)
        elif result is not None:
            record = replace(record, fields=None)
        plain = asdict(record)
        head = [plain.pop(name) for name in ("key", "status", "message", "seconds")]
        with self._connection:
            self._connection.execute("insert or replace into record values (?, ?, ?, ?, ?)", [*head, json.dumps(plain)])

    def _broken(self, why: Exception) -> ResultsFolderError:
        return ResultsFolderError(f"cannot use {self.path}: {why}. Move it away, or give another place with --out.")


def fields_folder(folder: Path, key: str) -> Path:
    """Where the whole result of a row is kept."""
    return folder / "rows" / key[:12]


def _read(text: str) -> dict[str, Any]:
    found = json.loads(text)
    return found | {"cautions": tuple(found["cautions"])}
