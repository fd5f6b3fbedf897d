"""Two results side by side: what differs in the inputs, and by how much the headline quantities do."""

from __future__ import annotations

import os
from dataclasses import dataclass
from html import escape
from pathlib import Path
from typing import Any

from axicfd.case import keys, paths, read
from axicfd.case.model import Case
from axicfd.case.quantities import ResultQuantity, quantities
from axicfd.case.write import to_toml
from axicfd.output import csv, folder
from axicfd.output.headline import amount_with_bar, number_with_bar
from axicfd.output.shown import Shown, shown_units

MARK = "compare.json"
ORDER = "first", "second"
ADDED = (
    "Differences are second less first. Half-widths are bounds, so that of a difference is their sum; where it is as "
    "large as the difference the mesh does not tell the two apart."
)


@dataclass(frozen=True)
class Row:
    """A quantity in both results, SI; None where a result has no value or no half-width.

    told_apart : whether the difference is beyond the sum of the half-widths; None where one of these is unknown
    """

    of: ResultQuantity
    values: tuple[float | None, float | None]
    half_widths: tuple[float | None, float | None]

    @property
    def difference(self) -> float | None:
        first, second = self.values
        return None if first is None or second is None else second - first

    @property
    def half_width(self) -> float | None:
        first, second = self.half_widths
        return None if first is None or second is None else first + second

    @property
    def told_apart(self) -> bool | None:
        if self.difference is None or self.half_width is None:
            return None
        return abs(self.difference) > self.half_width


@dataclass(frozen=True, repr=False)
class Comparison:
    """Two results side by side.

    names  : the folders, or the titles of the cases
    inputs : (path, value in the first, value in the second) of what differs, as a case file has it; None where a case
             has no such value
    rows   : the headline quantities of either
    """

    names: tuple[str, str]
    cases: tuple[Case, Case]
    converged: tuple[bool, bool]
    inputs: tuple[tuple[str, Any, Any], ...]
    rows: tuple[Row, ...]

    def __repr__(self) -> str:
        told = sum(row.told_apart is True for row in self.rows)
        differ = "1 input differs" if len(self.inputs) == 1 else f"{len(self.inputs)} inputs differ"
        return (
            f"<Comparison of {self.names[0]} and {self.names[1]}: {differ}, {told} of "
            f"{len(self.rows)} quantities are told apart>"
        )

    def as_dict(self) -> dict[str, Any]:
        """Plain data, SI."""
        return {
            "results": list(self.names),
            "converged": list(self.converged),
            "inputs": [{"path": path, "values": [first, second]} for path, first, second in self.inputs],
            "quantities": [
                {
                    "path": row.of.path,
                    "unit": row.of.row.unit,
                    "values": list(row.values),
                    "half_widths": list(row.half_widths),
                    "difference": row.difference,
                    "half_width": row.half_width,
                    "told_apart": row.told_apart,
                }
                for row in self.rows
            ],
        }


def compare(first: Any, second: Any) -> Comparison:
    """Compare two results: each a `Result`, or a folder (or its path) that `axicfd solve` wrote.

    Raises `ResultsFolderError` where a folder cannot be read.
    """
    both = tuple(folder.read(Path(r)) if isinstance(r, str | os.PathLike) else r for r in (first, second))
    a, b = both
    of = {q.path: q for result in both for q in quantities(result.case, headline_only=True)}
    rows = []
    for quantity in of.values():
        values = quantity.of(a.summary), quantity.of(b.summary)
        bars = tuple(quantity.of(result.summary.get("numerical_uncertainty")) for result in both)
        if values != (None, None):
            rows.append(Row(quantity, values, (bars[0], bars[1])))
    return Comparison(
        (_name(a), _name(b)),
        (a.case, b.case),
        (bool(a.summary["converged"]), bool(b.summary["converged"])),
        tuple(_differing(a.case, b.case)),
        tuple(rows),
    )


def _name(result: Any) -> str:
    return str(result.folder if isinstance(result, folder.Stored) else result.case.title)


def _differing(a: Case, b: Case) -> list[tuple[str, Any, Any]]:
    """Values that are not the same in two cases, defaults counted as values."""
    first, second = _complete(a), _complete(b)
    found = []
    for path in {**first, **second}:
        x, y = first.get(path), second.get(path)
        if path != "title" and (x is None or y is None or x[1] != y[1]):
            found.append((path, x and x[0], y and y[0]))
    return found


def _complete(case: Case) -> dict[str, tuple[Any, Any]]:
    """Path -> (value as a case file has it, value as the models keep it) of everything that a case says."""
    whole = read.load(to_toml(case))
    found = {}
    for path in paths.values_in(whole):
        raw, place = paths.find(whole._tree, path), paths.place_of(whole._tree, path)
        key = read.key_at(place) if place else None
        try:
            found[path] = raw, key.read(raw, False) if key else raw
        except keys.BadValue:  # one value among several, such as an inlet profile
            found[path] = raw, raw
    return found


# ------------------------------------------------------------------------------------------------ in words


def sentences(found: Comparison) -> list[str]:
    """What is told apart, and whether either is unusable."""
    said = [f"{order}: {name}" for order, name in zip(ORDER, found.names, strict=True)]
    said += [
        f"{name} did not converge: its values are where the iteration stopped."
        for name, converged in zip(found.names, found.converged, strict=True)
        if not converged
    ]
    told = [row for row in found.rows if row.told_apart]
    open_ = [row for row in found.rows if row.told_apart is None]
    word = "quantity is" if len(told) == 1 else "quantities are"
    said.append(f"{len(told)} of {len(found.rows)} {word} told apart by more than the mesh errors.")
    if open_:
        said.append(f"{len(open_)} cannot be judged: a value or its mesh error is missing.")
    return said


def input_rows(found: Comparison) -> tuple[list[str], list[list[str]]]:
    """Head and rows of the inputs that differ."""
    return ["input", *ORDER], [[path, _written(a), _written(b)] for path, a, b in found.inputs]


def quantity_rows(found: Comparison) -> tuple[list[str], list[list[str]]]:
    """Head and rows of the quantities, in the units of the first case."""
    shown = shown_units(found.cases[0])
    body = []
    for row in found.rows:
        values = [_value(shown, row, k) for k in (0, 1)]
        remark = {None: "no mesh error", False: "not told apart", True: ""}[row.told_apart]
        if row.difference is None:
            remark = "in one only"
        body.append([" ".join(row.of.keys[:2]), row.of.row.label, *values, _difference(shown, row), remark])
    return ["", "quantity", *ORDER, "difference", ""], body


def html(found: Comparison) -> str:
    """An HTML fragment; users' words are escaped."""
    parts = [f"<p>{escape(text)}</p>" for text in sentences(found)]
    for head, body in (input_rows(found), quantity_rows(found)):
        lines = ["".join(f"<th>{escape(word)}</th>" for word in head)]
        lines += ["".join(f'<td style="text-align:left">{escape(word)}</td>' for word in line) for line in body]
        parts.append("<table>" + "".join(f"<tr>{line}</tr>" for line in lines) + "</table>")
    return "".join([*parts, f"<p>{escape(ADDED)}</p>"])


def json_text(found: Comparison) -> str:
    """compare.json."""
    return folder.summary_text(found.as_dict())


def write(found: Comparison, path: Path, replace: bool = False) -> None:
    """compare.json, and the quantities as compare.csv."""
    folder.refuse_unusable(path, replace, MARK)
    with folder.whole_or_not(path) as unfinished:
        (unfinished / MARK).write_text(json_text(found), encoding="utf-8")
        csv.write_columns(unfinished / "compare.csv", _columns(found))


def _columns(found: Comparison) -> dict[str, Any]:
    told = {None: "", False: "no", True: "yes"}
    return {
        "quantity": [row.of.path for row in found.rows],
        "unit": [row.of.row.unit for row in found.rows],
        "first": [row.values[0] for row in found.rows],
        "first_half_width": [row.half_widths[0] for row in found.rows],
        "second": [row.values[1] for row in found.rows],
        "second_half_width": [row.half_widths[1] for row in found.rows],
        "difference": [row.difference for row in found.rows],
        "half_width": [row.half_width for row in found.rows],
        "told_apart": [told[row.told_apart] for row in found.rows],
    }


def _value(shown: Shown, row: Row, k: int) -> str:
    value, of = row.values[k], row.of.row
    return "none" if value is None else amount_with_bar(shown, of.kind, value, row.half_widths[k], of.unit)


def _difference(shown: Shown, row: Row) -> str:
    if row.difference is None:
        return ""
    kind = row.of.row.kind
    value = float(shown.difference(kind, row.difference))
    text = number_with_bar(value, float(shown.difference(kind, row.half_width)) if row.half_width else None)
    unit = shown.difference_unit(kind) if kind else row.of.row.unit
    return f"{'+' if value > 0.0 else ''}{text} {unit}".rstrip()


def _written(value: Any) -> str:
    if value is None:
        return "-"
    return value if isinstance(value, str) else _as_toml(value)


def _as_toml(value: Any) -> str:
    from axicfd.errors import shown

    return shown(value)
