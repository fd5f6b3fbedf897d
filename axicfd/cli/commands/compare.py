"""`axicfd compare DIR DIR`: two results side by side."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from axicfd.cli import exits

SUMMARY = "show two results side by side: inputs that differ, quantities with their differences and mesh errors"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("first", metavar="DIR", help="a results folder")
    parser.add_argument("second", metavar="DIR", help="the one to compare with it")
    parser.add_argument("--out", metavar="DIR", help="also write a folder with compare.json and compare.csv")
    parser.add_argument("--replace", action="store_true", help="replace that folder if it exists")
    parser.add_argument("--json", action="store_true", help="print compare.json alone on standard output")


def run(arguments: argparse.Namespace) -> int:
    from axicfd.output import comparison, folder

    if arguments.out:
        folder.refuse_unusable(Path(arguments.out), arguments.replace, comparison.MARK)
    found = comparison.compare(arguments.first, arguments.second)
    if arguments.out:
        comparison.write(found, Path(arguments.out), arguments.replace)
    if arguments.json:
        sys.stdout.write(comparison.json_text(found))
        return exits.SOLVED

    from axicfd.cli import render

    out = render.console()
    render.sentences(out, comparison.sentences(found))
    if found.inputs:
        render.rows(out, *comparison.input_rows(found))
    else:
        out.print("The cases are the same.")
    out.print()
    render.rows(out, *comparison.quantity_rows(found), right=(2, 3, 4))
    out.print()
    out.print(comparison.ADDED)
    return exits.SOLVED
