"""The table of a sweep in the user's units: which columns, how their numbers look, which rows come first."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from html import escape
from typing import Any

from axicfd import units
from axicfd.case.paths import steps_of
from axicfd.case.quantities import quantities
from axicfd.output.headline import FINEST_TEMPERATURE, number, number_with_bar
from axicfd.output.shown import Shown, shown_units
from axicfd.output.sweep import BAR, SOLVED, Sweep
from axicfd.results.limits import FAIL, NOT_JUDGED, PASS, TOO_CLOSE
from axicfd.variants.plan import kind_of

LIMIT = "limits."
SHOWN_ROWS = 12  # of a table that shows itself in a notebook
VERDICTS = (PASS, TOO_CLOSE, NOT_JUDGED, FAIL)  # the best first
SHORT = ("outlet_temperature_K", "pressure_drop_Pa", "hottest_wetted_wall_K")  # of each stream, where space is short


@dataclass(frozen=True)
class Axis:
    """A column of numbers as it is shown. name : of the column        path : of the key or quantity"""

    name: str
    path: str
    label: str
    kind: str
    shown: Shown

    @property
    def title(self) -> str:
        unit = self.shown.unit(self.kind)
        return f"{self.label}, {unit}" if unit else self.label

    def value(self, si: Any) -> Any:
        """SI numbers in the shown unit."""
        return self.shown.value(self.kind, si)

    def difference(self, si: Any) -> Any:
        """The same for a half-width."""
        return self.shown.difference(self.kind, si)


def varied_axes(table: Sweep) -> list[Axis]:
    """One per varied key, in the unit the plan has it in."""
    labels = [_label(key) for key in table.varied]
    return [
        _varied(table, key, column, label if labels.count(label) == 1 else key)
        for (key, column), label in zip(table.varied.items(), labels, strict=True)
    ]


def quantity_axes(table: Sweep) -> list[Axis]:
    """One per headline quantity that has a value in some row."""
    shown = shown_units(table.base)
    known = {".".join(of.keys): of for of in quantities(table.base)}
    several = len(table.base.stream) > 1
    return [
        Axis(
            name,
            of.path,
            f"{of.keys[1]}: {of.label}" if several and of.keys[0] == "stream" else of.label,
            of.kind,
            shown,
        )
        for name in table.quantities
        if (of := known.get(name)) is not None and any(value is not None for value in table[name])
    ]


def limited(table: Sweep) -> list[str]:
    """The columns of verdicts."""
    return [name for name in table.columns if name.startswith(LIMIT)]


def verdict(row: dict[str, Any], limits: Iterable[str]) -> str:
    """The worst verdict of a row; what it ended as where it is not solved."""
    if row["status"] != SOLVED:
        return str(row["status"] or "not solved yet")
    found = [row[name] for name in limits if row[name] in VERDICTS]
    return max(found, key=VERDICTS.index, default="")


def sorted_rows(table: Sweep) -> list[dict[str, Any]]:
    """Rows that pass all limits first, then those not settled, those that fail, those not solved."""
    limits, order = limited(table), ("", *VERDICTS)

    def rank(row: dict[str, Any]) -> int:
        found = verdict(row, limits)
        return order.index(found) if found in order else len(order)

    return sorted(table.rows, key=rank)


def header_and_lines(table: Sweep, everything: bool = True) -> tuple[list[str], list[list[str]]]:
    """The table as text, sorted; only a few quantities where not everything is asked for."""
    varied, limits = varied_axes(table), limited(table)
    measured = [axis for axis in quantity_axes(table) if everything or _is_short(axis, limits)]
    header = ["row", *(axis.title for axis in varied), *(axis.title for axis in measured)]
    header += [*(["limits"] if limits else []), "status"]
    lines = []
    for row in sorted_rows(table):
        cells = [str(row["row"]), *(_plain(axis, row[axis.name]) for axis in varied)]
        cells += [_with_bar(axis, row[axis.name], row[BAR + axis.name]) for axis in measured]
        cells += [verdict(row, limits) if row["status"] == SOLVED else ""] if limits else []
        message = f": {row['message']}" if row["message"] else ""
        lines.append([*cells, f"{row['status'] or 'not solved yet'}{message}"])
    return header, lines


def as_text(header: Sequence[str], lines: Sequence[Sequence[str]]) -> str:
    """Columns under each other, without boxes; the last one ragged."""
    widths = [max(len(line[i]) for line in (header, *lines)) for i in range(len(header) - 1)]
    return "".join(
        "  ".join([*(cell.rjust(width) for cell, width in zip(line, widths, strict=False)), line[-1]]).rstrip() + "\n"
        for line in (header, *lines)
    )


def html(table: Sweep) -> str:
    """How a sweep shows itself in a notebook: its first rows, sorted, in the user's units with their mesh errors."""
    header, lines = header_and_lines(table)

    def written(cells: Sequence[str], tag: str) -> str:
        return "<tr>" + "".join(f"<{tag}>{escape(cell)}</{tag}>" for cell in cells) + "</tr>"

    rows = written(header, "th") + "".join(written(line, "td") for line in lines[:SHOWN_ROWS])
    counts = ", ".join(f"{count} {status}" for status, count in table.counts.items())
    more = f"<p>{len(lines) - SHOWN_ROWS} more rows</p>" if len(lines) > SHOWN_ROWS else ""
    title = f"<p><b>{escape(table.base.title or 'untitled')}</b>: {escape(counts)}</p>"
    return f"{title}<table>{rows}</table>{more}"


def _label(key: str) -> str:
    """ "section.band.outside.heat" -> "band: heat"."""
    steps = steps_of(key)
    what = steps[-1].replace("_", " ")
    return f"{steps[1]}: {what}" if len(steps) > 2 else what


def _varied(table: Sweep, key: str, column: str, label: str) -> Axis:
    kind = kind_of(table.base._tree, key)
    unit = (table.units[key] or ("degC" if kind == "temperature" else units.KINDS[kind].si)) if kind else ""
    return Axis(column, key, label, kind, Shown({kind: unit}))


def _is_short(axis: Axis, limits: Iterable[str]) -> bool:
    steps = steps_of(axis.name)
    asked_for = steps[0] == "quantity" or f"{LIMIT}{axis.path}" in limits
    return asked_for or (steps[0] == "stream" and steps[-1] in SHORT)


def _plain(axis: Axis, value: Any) -> str:
    if value is None:
        return ""
    return number(float(axis.value(value)), 6) if isinstance(value, int | float) else str(value)


def _with_bar(axis: Axis, value: float | None, half_width: float | None) -> str:
    if value is None:
        return ""
    finest = FINEST_TEMPERATURE if axis.kind.startswith("temperature") else None
    width = float(axis.difference(half_width)) if half_width else None
    return number_with_bar(float(axis.value(value)), width, finest, 6)
