"""`axicfd check CASE`: what a case says, before anything is solved."""

from __future__ import annotations

import argparse
from pathlib import Path

from axicfd.cli import exits
from axicfd.cli.commands._sets import add_set, chosen

SUMMARY = "read a case and show its layout, dimensionless numbers, cautions and a hand estimate; solves nothing"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("case", metavar="CASE", help="a case file in TOML")
    add_set(parser)
    parser.add_argument("--verbose", action="store_true", help="print all cautions with their limits and sources")


def run(arguments: argparse.Namespace) -> int:
    from axicfd.case.layout import layout
    from axicfd.case.read import load

    case = load(Path(arguments.case), set=chosen(arguments))

    from axicfd.cli import drawing, estimate, render
    from axicfd.output.shown import shown_units
    from axicfd.results import cautions

    tube, shown, out = layout(case), shown_units(case), render.console()
    out.print(drawing.first_line(tube, shown))
    out.print()
    for line in drawing.to_scale(case, tube, shown):
        out.print(line, soft_wrap=True)
    out.print()
    render.rows(out, ["section", "from", "to", "layers from the axis", "outside"], drawing.sections(case, tube, shown))
    out.print()
    groups = estimate.group_rows(case, shown)
    if groups:
        render.rows(out, ["at inlet state", "", ""], groups, right=(1,))
        out.print()
    for line in estimate.two_lines(case, shown):
        out.print(line)
    out.print()
    render.print_cautions(out, cautions.before(case), arguments.verbose)
    return exits.SOLVED
