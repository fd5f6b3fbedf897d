"""How tables, the answer and cautions look on a terminal."""

from __future__ import annotations

import sys
from collections.abc import Iterable, Sequence
from typing import Any

from rich.console import Console
from rich.table import Table
from rich.text import Text

from axicfd.output import verdicts
from axicfd.output.headline import amount, headline, number
from axicfd.output.shown import Shown, shown_units
from axicfd.results.cautions import SAFETY, standing
from axicfd.results.limits import PASS

PLAIN_WIDTH = 120  # columns where the output is no terminal
CAUTIONS_SHOWN = 2  # the rest with --verbose

STANDING = (
    "Errors of properties and film coefficients are usually larger than those of the mesh. "
    "Density is held at its inlet value."
)
# From here on heat or pressure can hurt. Heat: 43 degC burns skin that touches it for hours (ISO 13732-1, from memory);
# cold and pressure, half a bar above the surroundings: common practice, no source.
HURTS_ABOVE = 316.15  # K
HURTS_BELOW = 263.15  # K
HURTS_PRESSURE = 1.5e5  # Pa absolute


def console(stream: Any = None) -> Console:
    """A console that prints users' own words as they are: no markup, no guessing at what to colour."""
    out = sys.stdout if stream is None else stream
    width = None if out.isatty() else PLAIN_WIDTH
    return Console(file=out, width=width, markup=False, highlight=False, emoji=False, soft_wrap=False)


def rows(target: Console, header: Sequence[str], body: Iterable[Sequence[str]], right: Sequence[int] = ()) -> None:
    """A table in columns, without boxes."""
    table = Table(box=None, pad_edge=False, padding=(0, 2, 0, 0), show_header=any(header))
    for place, name in enumerate(header):
        table.add_column(name, justify="right" if place in right else "left", header_style="dim")
    for row in body:
        table.add_row(*row)
    target.print(table)


def sentences(target: Console, said: Iterable[str]) -> None:
    """Verdicts, one below the other, and an empty line."""
    for text in said:
        target.print(Text(text, style="bold"))
    target.print()


def print_result(result: Any, hand: dict[str, float] | None, verbose: bool, where: str) -> None:
    """The headline table with its mesh errors, cautions, and where the rest is.

    hand : dotted quantity -> SI value of the hand estimate, shown beside the answer; None where there is none
    """
    out = console()
    summary, shown = result.summary, shown_units(result.case)
    if not summary["converged"]:
        out.print(Text("NOT CONVERGED: the numbers below are where the iteration stopped.", style="bold red"))
    bars = bool(summary.get("numerical_uncertainty"))
    header = [
        "",
        "quantity",
        "value",
        *(["mesh error"] if bars else []),
        "place",
        *(["by hand"] if hand else []),
    ]
    body = []
    for line in headline(summary, shown, verbose):
        cells = [line.owner, line.row.label, line.text]
        if bars:
            cells.append(line.bar)
        cells.append(line.place)
        if hand:
            estimate = hand.get(line.name)
            cells.append("" if estimate is None else amount(shown, line.row.kind, estimate, line.row.unit))
        body.append(cells)
    previous = ""
    for cells in body:  # the owner's name only where it changes
        cells[0], previous = ("" if cells[0] == previous else cells[0]), cells[0]
    rows(out, header, body, right=(2,))
    out.print()
    for verdict, sentence in verdicts.sentences(result, shown):
        out.print(Text(f"limit: {sentence}", style="" if verdict == PASS else "bold"), soft_wrap=True)
    if hand:
        out.print("By hand: constant inlet properties, no conduction along the wall, section by section.")
    if not bars:
        out.print("No mesh error is known for these values.")
    if "accuracy" in summary:
        _print_accuracy(out, summary["accuracy"], shown)
    out.print(STANDING)
    print_cautions(out, summary["cautions"], verbose)
    if can_hurt(result):
        out.print(SAFETY)
    _print_effort(out, summary, where)


def print_cautions(out: Console, cautions: Sequence[dict[str, Any]], verbose: bool) -> None:
    """The cautions that weigh most, in the order given, then those the case accepts; all of them when verbose."""
    if not cautions:
        out.print("No cautions.")
        return
    accepted = [caution for caution in cautions if caution.get("accepted")]
    cautions = standing(list(cautions))
    for caution in cautions if verbose else cautions[:CAUTIONS_SHOWN]:
        mark = "Caution" if caution.get("checked", True) else "Not checked"
        line = Text(f"{mark} ({caution['code']}): ", style="bold")
        line.append(str(caution["text"]), style="not bold")
        out.print(line)
        if verbose:
            facts = [f"{word}: {_fact(caution.get(word))}" for word in ("found", "limit", "place", "source")]
            out.print("   " + ", ".join(fact for fact in facts if not fact.endswith(": ")))
    hidden = len(cautions) - CAUTIONS_SHOWN
    if hidden > 0 and not verbose:
        out.print(f"{hidden} more with --verbose and in summary.json.")
    for caution in accepted:
        out.print(f"Accepted ({caution['code']}): {caution['accepted']}")
        if verbose:
            out.print(f"   {caution['text']}")


def can_hurt(result: Any) -> bool:
    """Whether the found temperatures or pressures are of the kind that hurts people."""
    summary = result.summary
    hottest = [entry.get("hottest_K") for entry in (summary.get("layer") or {}).values()]
    coldest = [entry.get("coldest_K") for entry in (summary.get("layer") or {}).values()]
    pressures = []
    for name, entry in summary["stream"].items():
        hottest.append(entry.get("hottest_wetted_wall_K"))
        coldest.append(entry.get("coldest_wetted_wall_K"))
        pressures.append(result.case.stream[name].outlet_pressure + (entry.get("pressure_drop_Pa") or 0.0))
    return (
        any(value is not None and value > HURTS_ABOVE for value in hottest)
        or any(value is not None and value < HURTS_BELOW for value in coldest)
        or any(value > HURTS_PRESSURE for value in pressures)
    )


def _print_accuracy(out: Console, found: dict[str, Any], shown: Shown) -> None:
    """Whether the mesh errors are as small as asked, and what per cent mean."""
    scale = found["scale"]
    span = amount(shown, "temperature_difference", scale["temperature_K"])
    sizes = [f"temperature {span}", f"heat {amount(shown, 'heat', scale['heat_W'])}"]
    sizes += [f"pressure {amount(shown, 'pressure', drop)}" for drop in scale["pressure_Pa"].values()]
    out.print(Text(found["text"], style="" if found["reached"] else "bold"))
    out.print(f"Scales of per cent: {', '.join(sizes)}.")


def _print_effort(out: Console, summary: dict[str, Any], where: str) -> None:
    cells = f"{summary['cells']:,}".replace(",", " ")
    out.print(
        f"{cells} cells{_counts(summary)}, {summary['iterations']} iterations, residual {summary['residual']:.1e}, "
        f"{summary['seconds']:.1f} s; results in {where}"
    )


def _counts(summary: dict[str, Any]) -> str:
    """The counts of the finest mesh, all layers: " (56 across, 704 along)"."""
    if "cells_across" not in summary:
        return ""
    return f" ({summary['cells_across']} across, {summary['cells_along']} along)"


def _fact(value: Any) -> str:
    if value is None:
        return ""
    return number(value) if isinstance(value, float) else str(value)


SWEEP_ROWS = 12  # of the table of a sweep; all are in its files
REASONS = 5  # of rows that are not solved


def print_sweep(table: Any, where: str) -> None:
    """The first rows of a sweep, those within their limits first, how many ended how and why, and where the rest is."""
    from axicfd.output.sweep_lines import header_and_lines

    out = console()
    header, body = header_and_lines(table, everything=False)
    solved = [line[:-1] for line in body if line[-1] == "solved"]
    rows(out, header[:-1], solved[:SWEEP_ROWS], right=range(len(header) - 1))
    if len(solved) > SWEEP_ROWS:
        out.print(f"{len(solved) - SWEEP_ROWS} more solved rows")
    out.print()
    reasons: dict[str, list[str]] = {}
    for row in table.rows:
        if row["status"] != "solved":
            reasons.setdefault(f"{row['status']}: {row['message']}", []).append(str(row["row"]))
    for reason, numbers in list(reasons.items())[:REASONS]:
        count = f"{len(numbers)} rows" if len(numbers) > 1 else f"row {numbers[0]}"
        out.print(Text(f"{count} {reason}", style="bold"))
    if len(reasons) > REASONS:
        out.print(f"{len(reasons) - REASONS} more reasons in the table")
    out.print(STANDING)
    counts = ", ".join(f"{count} {status or 'not solved yet'}" for status, count in table.counts.items())
    out.print(f"{len(table)} rows: {counts}; the table is {where}/sweep.csv, pictures with `axicfd draw {where}`")
