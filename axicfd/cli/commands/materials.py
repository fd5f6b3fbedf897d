"""`axicfd materials [NAME]`: what is built in, over which temperatures, and from where."""

from __future__ import annotations

import argparse
import math
from typing import Any

from axicfd.cli import exits
from axicfd.errors import AxicfdError

SUMMARY = "list the built-in fluids and solids, or show one with its range and source"
POINTS = 6  # temperatures in the table of one material


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("name", metavar="NAME", nargs="?", help='such as water or "stainless steel 316"')


def run(arguments: argparse.Namespace) -> int:
    from axicfd.cli import render
    from axicfd.materials.library import FLUIDS, SOLIDS
    from axicfd.output.headline import number

    out = render.console()
    if arguments.name is None:
        for title, found in (("fluids", FLUIDS), ("solids", SOLIDS)):
            body = [[name, _span(_laws(material)), material.note] for name, material in found.items()]
            render.rows(out, [title, "range", "note"], body)
            out.print()
        out.print("Show one with its source: axicfd materials NAME")
        return exits.SOLVED
    material = FLUIDS.get(arguments.name) or SOLIDS.get(arguments.name)
    if material is None:
        raise AxicfdError(_unknown(arguments.name, [*FLUIDS, *SOLIDS]))
    laws = _laws(material)
    out.print(f"{arguments.name}: {_span(laws)}")
    header = ["temperature, degC", *(f"{name.replace('_', ' ')}, {UNITS[name]}" for name in laws)]
    body = [[f"{T - 273.15:.1f}", *(number(float(law(T))) for law in laws.values())] for T in _temperatures(laws)]
    render.rows(out, header, body, right=range(len(header)))
    out.print(f"source: {material.source}")
    if material.note:
        out.print(f"note: {material.note}")
    return exits.SOLVED


UNITS = {"density": "kg/m³", "specific_heat": "J/(kg K)", "conductivity": "W/(m K)", "viscosity": "Pa s"}


def _laws(material: Any) -> dict[str, Any]:
    found = {name: getattr(material, name, None) for name in UNITS}
    return {name: law for name, law in found.items() if law is not None}


def _limits(laws: dict[str, Any]) -> tuple[float, float]:
    spans = [law.span for law in laws.values()]
    return max(low for low, _ in spans), min(high for _, high in spans)


def _span(laws: dict[str, Any]) -> str:
    low, high = _limits(laws)
    if math.isinf(low) and math.isinf(high):
        return "one value for all temperatures"
    return f"{low - 273.15:.4g} to {high - 273.15:.4g} degC"


def _temperatures(laws: dict[str, Any]) -> list[float]:
    low, high = _limits(laws)
    if math.isinf(low) or math.isinf(high):
        return [293.15]
    return [low + (high - low) * step / (POINTS - 1) for step in range(POINTS)]


def _unknown(name: str, known: list[str]) -> str:
    import difflib

    near = difflib.get_close_matches(name, known, 1, 0.5)
    hint = f' Did you mean "{near[0]}"?' if near else ""
    return f'there is no built-in material "{name}".{hint} See all with `axicfd materials`.'
