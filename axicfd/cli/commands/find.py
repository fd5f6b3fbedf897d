"""`axicfd find CASE`: the input that gives a wanted quantity."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path
from typing import Any

from axicfd.cli import exits
from axicfd.cli.commands._answers import add_answer, prepared

SUMMARY = "find the input for which a quantity has a wanted value"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("case", metavar="CASE", help="a case file in TOML")
    parser.add_argument(
        "--change",
        action="append",
        required=True,
        metavar="KEY",
        help="the input to change, such as section.heater.length; as many as there are --until",
    )
    parser.add_argument(
        "--until",
        action="append",
        required=True,
        metavar='"QUANTITY = VALUE"',
        help='what is wanted, such as "stream.oil.outlet_temperature = 60 degC"',
    )
    parser.add_argument(
        "--between",
        nargs=2,
        metavar=("LOW", "HIGH"),
        help="limits of one input (default: a 32nd to 32 times its own value; of a temperature 150 K either way)",
    )
    add_answer(parser, "find")


def run(arguments: argparse.Namespace) -> int:
    where, case = prepared(arguments, "find")

    from axicfd.cli.progress import SearchProgress
    from axicfd.output import finding
    from axicfd.variants.find import find

    with SearchProgress() as progress:
        found = find(case, arguments.change, arguments.until, arguments.between, progress)
    finding.write(found, where, arguments.replace)
    if arguments.json:
        sys.stdout.write(finding.json_text(found))
    else:
        _print(found, arguments.case, where)
    return exits.SOLVED if found.answers else exits.NOT_CONVERGED


def _print(found: Any, case: str, where: Path) -> None:
    from axicfd.cli import render
    from axicfd.output import finding

    out = render.console()
    render.sentences(out, finding.sentences(found))
    out.print(finding.where_looked(found))
    if len(found.answers) == 1:
        render.print_cautions(out, found.answers[0].result.summary["cautions"], verbose=False)
    if found.answers:
        out.print("± is the mesh error. " + render.STANDING)
    for name, answer in zip(finding.answer_names(found), found.answers, strict=True):
        sets = " ".join(f'--set "{text}"' for text in finding.settings(found, answer))
        out.print(f"{where / name}: as from axicfd solve {case} {sets}", soft_wrap=True)
    if not found.answers:
        out.print(f"What was looked at is in {where / 'looks.csv'}")
