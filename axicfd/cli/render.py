"""How numbers, tables, the headline and cautions look on a terminal."""

from __future__ import annotations

import sys
from collections.abc import Iterable, Iterator, Sequence
from typing import Any

from rich.console import Console
from rich.table import Table
from rich.text import Text

from axicfd.glossary import Reported, quantity_name, summary_row
from axicfd.output.shown import Shown, shown_units

PLAIN_WIDTH = 110  # columns where the output is no terminal
CAUTIONS_SHOWN = 2  # the rest with --verbose

STANDING = (
    "Errors of properties and film coefficients are usually larger than those of the mesh. "
    "Density is held at its inlet value."
)
SAFETY = (
    "These results support, and do not replace, design to the local codes by licensed practice. "
    "With flow stopped the wall can get far hotter than shown."
)
# From here on heat or pressure can hurt. Common practice, no source: about what a hand bears for a moment on
# metal, and half a bar above the surroundings.
HURTS_ABOVE = 333.15  # K
HURTS_BELOW = 263.15  # K
HURTS_PRESSURE = 1.5e5  # Pa absolute

# The headline quantities, in the order they are printed.
STREAM_ROWS = (
    "outlet_temperature_K",
    "outlet_axis_temperature_K",
    "outlet_wall_temperature_K",
    "pressure_drop_Pa",
    "heat_gain_W",
    "hottest_wetted_wall_K",
)
LAYER_ROWS = ("hottest_K",)
SECTION_ROWS = ("heat_in_W",)
# With --verbose also these.
MORE_STREAM_ROWS = (
    "coldest_wetted_wall_K",
    "hydrostatic_Pa",
    "largest_wall_shear_stress_Pa",
    "thermal_resistance_K_W",
    "mean_residence_s",
    "hydrodynamic_entry_length_m",
    "thermal_entry_length_m",
    "mass_flow_kg_s",
    "mean_velocity_m_s",
    "reynolds",
    "largest_reynolds",
    "prandtl",
    "peclet",
    "graetz",
    "heated_length_m",
)


def console(stream: Any = None) -> Console:
    """A console that prints users' own words as they are: no markup, no guessing at what to colour."""
    out = sys.stdout if stream is None else stream
    width = None if out.isatty() else PLAIN_WIDTH
    return Console(file=out, width=width, markup=False, highlight=False, emoji=False, soft_wrap=False)


def number(value: float, digits: int = 4) -> str:
    """A number with so many significant digits, without an exponent where that is readable."""
    if value == 0:
        return "0"
    if not 1e-3 <= abs(value) < 1e6:
        return f"{value:.{digits - 1}e}"
    rounded = float(f"{value:.{digits}g}")
    return f"{rounded:.0f}" if abs(rounded) >= 10 ** (digits - 1) else f"{rounded:.{digits}g}"


def amount(shown: Shown, kind: str, value: float, unit: str = "") -> str:
    """A quantity as printed, with its unit: a temperature to a hundredth, the rest to four digits."""
    in_unit = float(shown.value(kind, value))
    text = f"{in_unit:.2f}" if kind == "temperature" else number(in_unit)
    return f"{text} {shown.unit(kind) if kind else unit}".rstrip()


def rows(
    target: Console, header: Sequence[str], body: Iterable[Sequence[str]], right: Sequence[int] = ()
) -> None:
    """A table in columns, without boxes."""
    table = Table(box=None, pad_edge=False, padding=(0, 3, 0, 0), show_header=any(header))
    for place, name in enumerate(header):
        table.add_column(name, justify="right" if place in right else "left", header_style="dim")
    for row in body:
        table.add_row(*row)
    target.print(table)


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
    for owner, path, row, value in headline(summary, verbose):
        cells = [owner, row.label, _value_text(shown, row, value, path, summary)]
        if bars:
            cells.append(_bar_text(shown, row, path, summary))
        cells.append(_place_text(shown, path, summary))
        if hand:
            estimate = hand.get(_dotted(path))
            cells.append("" if estimate is None else amount(shown, row.kind, estimate, row.unit))
        body.append(cells)
    previous = ""
    for cells in body:  # the owner's name only where it changes
        cells[0], previous = ("" if cells[0] == previous else cells[0]), cells[0]
    rows(out, header, body, right=(2,))
    out.print()
    if hand:
        out.print("By hand: constant inlet properties, no conduction along the wall, section by section.")
    if not bars:
        out.print("One mesh: no mesh error is known for these values.")
    out.print(STANDING)
    print_cautions(out, summary["cautions"], verbose)
    if can_hurt(result):
        out.print(SAFETY)
    _print_effort(out, summary, where)


def headline(summary: dict[str, Any], verbose: bool) -> Iterator[tuple[str, tuple[str, ...], Reported, Any]]:
    """(owner, path in the tree, glossary row, value) of each printed quantity."""
    stream_rows = STREAM_ROWS + MORE_STREAM_ROWS if verbose else STREAM_ROWS
    for kind, keys in (
        ("stream", stream_rows),
        ("layer", LAYER_ROWS),
        ("section", SECTION_ROWS),
        ("sensor", ("temperature_K",)),
    ):
        for name, entries in (summary.get(kind) or {}).items():
            owner = f"section {name}" if kind == "section" else f"sensor {name}" if kind == "sensor" else name
            for key in keys:
                if key in entries and (entries[key] is not None or verbose):
                    yield owner, (kind, name, key), summary_row(key), entries[key]


def print_cautions(out: Console, cautions: Sequence[dict[str, Any]], verbose: bool) -> None:
    """The cautions that weigh most, in the order given; all of them when verbose."""
    if not cautions:
        out.print("No cautions.")
        return
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


def _print_effort(out: Console, summary: dict[str, Any], where: str) -> None:
    cells = f"{summary['cells']:,}".replace(",", " ")
    out.print(
        f"{cells} cells, {summary['iterations']} iterations, residual {summary['residual']:.1e}, "
        f"{summary['seconds']:.1f} s; results in {where}"
    )


def _value_text(
    shown: Shown, row: Reported, value: Any, path: tuple[str, ...], summary: dict[str, Any]
) -> str:
    if value is None:
        why = _entry(summary, (*path[:-1], "why", path[-1]))
        return f"none ({why})" if why else "none"
    return amount(shown, row.kind, value, row.unit)


def _bar_text(shown: Shown, row: Reported, path: tuple[str, ...], summary: dict[str, Any]) -> str:
    half = _entry(summary["numerical_uncertainty"], path)
    if not isinstance(half, int | float):
        return ""
    return f"±{number(float(shown.difference(row.kind, half)), 2)} (mesh)"


def _place_text(shown: Shown, path: tuple[str, ...], summary: dict[str, Any]) -> str:
    """Where an extreme value was found: the entry of the same name with `_z_m`."""
    z = _entry(summary, (*path[:-1], f"{quantity_name(path[-1])}_z_m"))
    return f"at {amount(shown, 'length', z)}" if isinstance(z, int | float) else ""


def _entry(tree: Any, path: Sequence[str]) -> Any:
    for key in path:
        if not isinstance(tree, dict) or key not in tree:
            return None
        tree = tree[key]
    return tree


def _dotted(path: tuple[str, ...]) -> str:
    return ".".join((*path[:-1], quantity_name(path[-1])))


def _fact(value: Any) -> str:
    if value is None:
        return ""
    return number(value) if isinstance(value, float) else str(value)
