"""A plan of variants: one base case and what changes from row to row. Every row is a `Case` before anything is solved.

    case = "heater.toml"               relative to the plan

    [[vary]]                           these make a grid, except those that share a word under `together`
    key    = "stream.oil.mass_flow"
    values = ["1 g/s", "2 g/s"]        or from, to, count and spacing = "even" or "log"

`sample` takes points from the ranges instead of a grid; `rows` takes the rows from a CSV file.
"""

from __future__ import annotations

import csv
import math
import os
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from itertools import product
from pathlib import Path
from typing import Any, TypeGuard

from axicfd import units
from axicfd.case import keys, paths, read
from axicfd.case.keys import BadValue, Key, Number, PerName, Property, Quantity
from axicfd.case.lines import lines_of
from axicfd.case.model import Case
from axicfd.case.read import Place, Source, declared, load, part_at
from axicfd.errors import InputError, Mistake
from axicfd.variants.sample import latin_hypercube

MOST_ROWS = 100_000
MOST_MISTAKES = 20  # of rows that cannot be a case; a slip in a plan makes thousands alike
DIGITS = 10  # of a value between two ends: equal ones of two plans must be equal texts

TOP = ("case", "vary", "sample", "rows")
VARY = ("key", "values", "from", "to", "count", "spacing", "together")
SAMPLE = ("kind", "count", "seed")
SPACINGS = ("even", "log")
LATIN = "latin hypercube"


@dataclass(frozen=True)
class Row:
    """One variant. number : from 1        changes : key path -> value as written        case : the base with them"""

    number: int
    changes: Mapping[str, Any]
    case: Case


@dataclass(frozen=True)
class Plan:
    """keys : the paths that vary, in the order of the plan"""

    base: Case
    keys: tuple[str, ...]
    rows: tuple[Row, ...]


def read_plan(plan: str | os.PathLike | Mapping[str, Any], set: Mapping[str, Any] | None = None) -> Plan:
    """The plan in a file, in text that holds line breaks, or in the tables of a Python programme.

    In a programme numbers are SI, `case` may be a `Case` and `rows` a list of tables.
    set : values to change in the base case, as `axicfd.load` takes them
    Raises `InputError` with every mistake found, those of rows that cannot be a case included.
    """
    if isinstance(plan, Mapping):
        return _Reading(dict(plan), None, {}, Path(), in_file=False).plan(set)
    text, file, directory = read.text_of(plan, 'A plan is a text: case = "CASE.toml", then a [[vary]] for each key.')
    return _Reading(read.tables_of(text, file), file, lines_of(text), directory, in_file=True).plan(set)


@dataclass(frozen=True)
class _Step:
    """What one entry of the plan sets in one row. line : that says so, in `file`"""

    key: str
    value: Any
    file: str | None
    line: int | None


@dataclass(frozen=True)
class _Range:
    """The values between two ends; `at` takes a share between 0 and 1."""

    key: Key
    first: Any
    last: Any
    low: float
    high: float
    log: bool

    def at(self, share: float) -> Any:
        """The value as a plan would write it: in the unit of the first end, whole where it must be."""
        if share in (0.0, 1.0):
            return self.last if share else self.first
        value = self.low + share * (self.high - self.low)
        if self.log:
            value = self.low * (self.high / self.low) ** share
        if isinstance(self.key, Number) and self.key.whole:
            return round(value)
        if not isinstance(self.first, str):
            return float(f"{value:.{DIGITS}g}")
        unit = units.split(self.first)[1]
        return f"{units.from_si(value, unit, _kind(self.key)):.{DIGITS}g} {unit}"


class _Reading:
    """Reads one plan and keeps its mistakes."""

    def __init__(self, tree: dict, file: str | None, lines: Mapping[Place, int], directory: Path, in_file: bool):
        self.tree, self.file, self.lines, self.directory, self.in_file = tree, file, lines, directory, in_file
        self.mistakes: list[Mistake] = []

    def plan(self, set: Mapping[str, Any] | None) -> Plan:
        self._top()
        self._stop_if_wrong()
        self.base = self._base(set)
        tables = self._rows() if "rows" in self.tree else self._steps()
        self._stop_if_wrong()
        varied = tuple(dict.fromkeys(step.key for table in tables for step in table))
        rows = tuple(self._cases(tables))
        self._stop_if_wrong()
        return Plan(self.base, varied, rows)

    # ------------------------------------------------------------------ mistakes

    def _wrong(self, place: Place, value: object, allowed: str, instead: str = "") -> None:
        key = ".".join(str(step) for step in place if isinstance(step, str))
        self.mistakes.append(Mistake(self.file, self._line(place), key, value, allowed, instead))

    def _stop_if_wrong(self) -> None:
        if self.mistakes:
            raise InputError(self.mistakes)

    def _known(self, table: Mapping[str, Any], place: Place, known: Sequence[str]) -> None:
        for name in table:
            if name not in known:
                near = keys.nearest(name, known)
                instead = f"Write `{near}`." if near else f"Known here: {', '.join(known)}."
                self._wrong((*place, name), table[name], "is not a known key of a plan", instead)

    # ------------------------------------------------------------------ the parts of a plan

    def _top(self) -> None:
        tree = self.tree
        if "section" in tree or "stream" in tree:
            self._wrong((), None, "is a case, not a plan", 'A plan names one: case = "heater.toml".')
            return
        self._known(tree, (), TOP)
        if "case" not in tree:
            self._wrong(("case",), None, "is missing", 'Write case = "heater.toml", relative to the plan.')
        elif not isinstance(tree["case"], str) and (self.in_file or not isinstance(tree["case"], Case | Path)):
            self._wrong(("case",), tree["case"], "must be the name of a case file")
        vary = tree.get("vary")
        if "rows" in tree:
            for other in ("vary", "sample"):
                if other in tree:
                    self._wrong((other,), None, "stands beside `rows`, which gives the whole table", "Keep one.")
            if not isinstance(tree["rows"], str) and (self.in_file or not isinstance(tree["rows"], list | Path)):
                self._wrong(("rows",), tree["rows"], "must be the name of a CSV file")
        elif vary is None:
            self._wrong((), None, "varies nothing", "Write at least one [[vary]] with `key` and `values`.")
        elif not isinstance(vary, list) or not vary or not all(isinstance(entry, dict) for entry in vary):
            self._wrong(("vary",), None, "must be a list of tables", "Write [[vary]] above each one.")
        sample = tree.get("sample")
        if sample is not None and not isinstance(sample, dict):
            example = f'Write sample = {{ kind = "{LATIN}", count = 200, seed = 1 }}.'
            self._wrong(("sample",), sample, "must be a table", example)

    def _base(self, set: Mapping[str, Any] | None) -> Case:
        named = self.tree["case"]
        if isinstance(named, Case):
            return named.replace(set) if set else named
        return load(self.directory / named, set=set)

    def _steps(self) -> list[list[_Step]]:
        """The rows that the entries of `vary` make, as a grid or as a sample."""
        sampled = self._sample() if "sample" in self.tree else None
        groups: dict[Any, list[tuple[int, Any]]] = {}  # entries that step together, each with its values or range
        seen: dict[str, int] = {}
        for i, entry in enumerate(self.tree["vary"]):
            self._known(entry, ("vary", i), VARY)
            key, found = self._entry(i, entry, sampled is not None)
            if key in seen:
                self._wrong(("vary", i, "key"), key, "is varied twice", "Put all its values into one [[vary]].")
            seen[key or ""] = i
            word = entry.get("together")
            if word is not None and not isinstance(word, str):
                self._wrong(("vary", i, "together"), word, "must be a word that other [[vary]] share")
                word = None
            groups.setdefault(i if word is None else f"together {word}", []).append((i, found))
        if self.mistakes:
            return []
        if sampled is not None:
            shares = latin_hypercube(len(groups), *sampled)
            return [
                [self._step(i, found.at(float(share))) for members, share in zip(groups.values(), point, strict=True)
                 for i, found in members]
                for point in shares
            ]  # fmt: skip
        for members in groups.values():
            (first, values), *others = members
            for i, more in others:
                if len(more) != len(values):
                    other = self.tree["vary"][first]["key"]
                    allowed = f"takes {len(more)} values together with the {len(values)} of `{other}`"
                    self._wrong(("vary", i, "together"), self.tree["vary"][i]["together"], allowed, "Give as many.")
        count = math.prod(len(members[0][1]) for members in groups.values())
        if count > MOST_ROWS:
            self._wrong(("vary",), None, f"makes {count} rows, more than {MOST_ROWS}", "Use `sample` for so many keys.")
        if self.mistakes:
            return []
        choices = [
            [[self._step(i, found[n], n) for i, found in members] for n in range(len(members[0][1]))]
            for members in groups.values()
        ]
        return [[step for part in parts for step in part] for parts in product(*choices)]

    def _step(self, i: int, value: Any, n: int | None = None) -> _Step:
        entry: Place = ("vary", i)
        line = self._line((*entry, "values", n)) if n is not None else None
        line = line or self._line((*entry, "key"))
        return _Step(self.tree["vary"][i]["key"], value, self.file, line)

    def _sample(self) -> tuple[int, int] | None:
        """(count, seed)"""
        sample = self.tree["sample"]
        self._known(sample, ("sample",), SAMPLE)
        if sample.get("kind") != LATIN:
            self._wrong(("sample", "kind"), sample.get("kind"), f'must be "{LATIN}"')
        count, seed = sample.get("count"), sample.get("seed", 1)
        if not _is_whole(count) or not 1 <= count <= MOST_ROWS:
            self._wrong(("sample", "count"), count, f"must be a whole number from 1 to {MOST_ROWS}")
        if not _is_whole(seed) or seed < 0:
            self._wrong(("sample", "seed"), seed, "must be a whole number, at least 0")
        return (count, seed) if not self.mistakes else (1, 1)

    def _entry(self, i: int, entry: Mapping[str, Any], sampled: bool) -> tuple[str | None, Any]:
        """(key, list of its values, or its `_Range` where a sample is drawn); None for what is wrong."""
        place: Place = ("vary", i)
        key = entry.get("key")
        if not isinstance(key, str):
            instead = 'Write key = "stream.oil.mass_flow": the dotted path in the case file.'
            self._wrong((*place, "key"), key, "must be the path of a key" if "key" in entry else "is missing", instead)
            return None, None
        declaration = self._declared(key, self.file, self._line((*place, "key")))
        has_range = "from" in entry or "to" in entry
        if sampled:
            for name in ("values", "count"):
                if name in entry:
                    self._wrong((*place, name), entry[name], "has no meaning with `sample`", "Give `from` and `to`.")
            return key, self._range(place, entry, declaration)
        if "values" in entry and has_range:
            self._wrong((*place, "values"), None, "stands beside `from` and `to`", "Keep one.")
            return key, None
        if has_range:
            found = self._range(place, entry, declaration)
            count = entry.get("count")
            if not _is_whole(count) or not 2 <= count <= MOST_ROWS:
                self._wrong((*place, "count"), count, f"must be a whole number from 2 to {MOST_ROWS}")
                return key, None
            return key, [found.at(n / (count - 1)) for n in range(count)] if found else None
        values = entry.get("values")
        for name in ("count", "spacing"):
            if name in entry:
                self._wrong((*place, name), entry[name], "needs `from` and `to`", "Give them, or take it out.")
        if not isinstance(values, list | tuple) or not values:
            instead = 'Write values = ["1 g/s", "2 g/s"], or `from`, `to` and `count`.'
            self._wrong((*place, "values"), values, "must be a list of at least one value", instead)
            return key, None
        for n, value in enumerate(values):
            self._check(declaration, key, value, self.file, self._line((*place, "values", n)))
        return key, list(values)

    def _range(self, place: Place, entry: Mapping[str, Any], declaration: Key | None) -> _Range | None:
        key = entry["key"]
        spacing = entry.get("spacing", "even")
        if spacing not in SPACINGS:
            near = keys.nearest(spacing, SPACINGS) if isinstance(spacing, str) else None
            words = " or ".join(f'"{word}"' for word in SPACINGS)
            self._wrong((*place, "spacing"), spacing, f"must be {words}", f'Write "{near}".' if near else "")
        ends = []
        for name in ("from", "to"):
            if name not in entry:
                self._wrong((*place, name), None, "is missing", "A range has a `from` and a `to`.")
                continue
            if declaration is None or not _has_range(declaration):
                if self._at(place, "key") or declaration is not None:
                    allowed = "is not a number that could be stepped through"
                    self._wrong((*place, name), entry[name], allowed, "Give its values in a list, `values`.")
                continue
            end = self._check(declaration, key, entry[name], self.file, self._line((*place, name)))
            if end is not None and (isinstance(entry[name], dict) or not isinstance(end, int | float)):
                self._wrong((*place, name), entry[name], "must be one plain value")
                end = None
            ends.append(end)
        if len(ends) < 2 or None in ends or spacing not in SPACINGS:
            return None
        low, high = (float(end) for end in ends)
        if low == high:
            self._wrong((*place, "to"), entry["to"], "is where `from` is: the range is empty")
            return None
        if spacing == "log" and min(low, high) <= 0:
            name = "from" if low <= 0 else "to"
            self._wrong((*place, name), entry[name], 'must be above zero with spacing = "log"')
            return None
        return _Range(declaration, entry["from"], entry["to"], low, high, spacing == "log")  # type: ignore[arg-type]

    def _at(self, place: Place, name: str) -> bool:
        """Whether nothing is wrong with the key of an entry so far."""
        line = self._line((*place, name))
        return not any(mistake.line == line and mistake.file == self.file for mistake in self.mistakes)

    def _line(self, place: Place) -> int | None:
        return next((self.lines[place[:n]] for n in range(len(place), 0, -1) if place[:n] in self.lines), None)

    # ------------------------------------------------------------------ keys and values of the case

    def _declared(self, key: str, file: str | None, line: int | None) -> Key | None:
        """The declaration of the key at a path of the case; None where it has none or the path is wrong."""
        try:
            tree = paths.replaced(self.base._tree, {key: None})  # raises where the path leads nowhere
        except InputError as bad:
            self.mistakes += [Mistake(file, line, m.key, m.value, m.allowed, m.instead) for m in bad.mistakes]
            return None
        return declaration_of(tree, key)

    def _check(self, declaration: Key | None, key: str, value: Any, file: str | None, line: int | None) -> Any:
        """The value as the case keeps it; a mistake and None where it is none."""
        if declaration is None:
            return None  # told by the rows, where it is wrong
        try:
            found = declaration.read(value, self.in_file)
        except BadValue as bad:
            self.mistakes += [Mistake(file, line, key, p.value, p.allowed, p.instead) for p in bad.problems]
            return None
        return getattr(found, "value", found) if isinstance(declaration, Property) else found

    # ------------------------------------------------------------------ rows of a CSV file

    def _rows(self) -> list[list[_Step]]:
        given = self.tree["rows"]
        if isinstance(given, list):
            return [[_Step(key, value, None, None) for key, value in dict(row).items()] for row in given]
        file = self.directory / given
        try:
            with file.open(encoding="utf-8-sig", newline="") as opened:
                reader = csv.reader(opened, strict=True)
                lines = [(reader.line_num, [cell.strip() for cell in row]) for row in reader]
        except (OSError, UnicodeDecodeError, csv.Error) as why:
            reason = getattr(why, "strerror", None) or ("it is not UTF-8 text" if "codec" in str(why) else str(why))
            self._wrong(("rows",), str(given), f"cannot be read: {reason}")
            return []
        lines = [(number, row) for number, row in lines if any(row)]
        if len(lines) < 2:
            self._wrong(("rows",), str(given), "has no rows", "Give a header row of key paths and a row per variant.")
            return []
        return self._table(str(file), lines)

    def _table(self, file: str, lines: list[tuple[int, list[str]]]) -> list[list[_Step]]:
        (top, header), *body = lines
        if len(header) == 1 and ";" in header[0]:
            self.mistakes.append(Mistake(file, top, "", None, "has no columns", "Separate the cells by commas."))
            return []
        declarations = {key: self._declared(key, file, top) for key in header}
        if len(declarations) < len(header):
            self.mistakes.append(Mistake(file, top, "", None, "names a column twice"))
        tables = []
        for number, row in body:
            if len(row) != len(header):
                allowed = f"has {len(row)} cells where the header has {len(header)}"
                self.mistakes.append(Mistake(file, number, "", None, allowed))
                continue
            steps = [_Step(key, keys.toml_value(c), file, number) for key, c in zip(header, row, strict=True) if c]
            for step in steps:
                self._check(declarations[step.key], step.key, step.value, file, number)
            tables.append(steps)
        return tables

    # ------------------------------------------------------------------ the cases

    def _cases(self, tables: list[list[_Step]]) -> Iterator[Row]:
        """Each row as a case; those that cannot be one are mistakes, each told once."""
        told: set[tuple] = set()
        for number, steps in enumerate(tables, start=1):
            changes = {step.key: step.value for step in steps}
            try:
                tree = paths.replaced(self.base._tree, changes)
                places = {paths.place_of(tree, step.key): step for step in steps}
                lines = {place: step.line for place, step in places.items() if place and step.line}
                file = steps[0].file if steps else self.file
                case = read.build(tree, Source(file, lines), self.in_file)
            except InputError as bad:
                for mistake in bad.mistakes:
                    found = self._of_row(mistake, number, steps)
                    if (same := (found.line, found.key, found.allowed)) not in told:
                        told.add(same)
                        self.mistakes.append(found)
                if len(told) >= MOST_MISTAKES:
                    return
                continue
            yield Row(number, changes, case)

    def _of_row(self, mistake: Mistake, number: int, steps: list[_Step]) -> Mistake:
        """A mistake of a row's case, with the values that the row sets where it is not one of them by itself."""
        if not steps or (mistake.line is not None and any(mistake.key == step.key for step in steps)):
            return mistake
        values = ", ".join(f"{step.key} = {_as_written(step.value)}" for step in steps)
        allowed = f"{mistake.allowed}, in row {number} ({values})"
        return Mistake(
            steps[0].file, mistake.line or steps[0].line, mistake.key, mistake.value, allowed, mistake.instead
        )


def declaration_of(tree: Any, path: str) -> Key | None:
    """The declaration of the key at a path of a case's tree; None inside a law or table, which has none of its own."""
    place = paths.place_of(tree, path)
    if not place:
        return None
    part = part_at(place[:-1])
    if part is not None:
        return declared(part, str(place[-1]))
    above = part_at(place[:-2])
    table = declared(above, str(place[-2])) if above is not None else None
    return table.entry if isinstance(table, PerName) else None


def kind_of(tree: Any, path: str) -> str:
    """The kind of quantity at a path, a key of `units.KINDS`; "" where it is none."""
    declaration = declaration_of(tree, path)
    return _kind(declaration) if declaration is not None else ""


def _kind(declaration: Key) -> str:
    return declaration.kind if isinstance(declaration, Quantity) else ""


def _has_range(declaration: Key) -> bool:
    return isinstance(declaration, Quantity | Number)


def _is_whole(value: Any) -> TypeGuard[int]:
    return isinstance(value, int) and not isinstance(value, bool)


def _as_written(value: Any) -> str:
    return keys.toml_text(value) if isinstance(value, str) else str(value)
