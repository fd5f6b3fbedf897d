"""`axicfd spread CASE`: from the tolerances of inputs to the spread of outputs, and which input is to blame."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path
from typing import Any

from axicfd.cli import exits
from axicfd.cli.commands._answers import add_answer, prepared

SUMMARY = "input tolerances to output spread, and which input is to blame"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("case", metavar="CASE", help='a case file with values such as { value = "2 mm", std = "1 %%" }')
    parser.add_argument("--full", action="store_true", help="also solve samples of all inputs, for ranges and bends")
    parser.add_argument("--count", type=int, metavar="N", help="samples of the full answer (default 100)")
    parser.add_argument("--seed", type=int, default=1, metavar="N", help="another seed gives other samples (default 1)")
    parser.add_argument("--of", action="append", default=[], metavar="QUANTITY", help="a quantity beside the headline")
    parser.add_argument("--workers", type=int, metavar="N", help="processes (default: one per core)")
    add_answer(parser, "spread")


def run(arguments: argparse.Namespace) -> int:
    from axicfd.errors import AxicfdError

    for name, least in (("count", 1), ("workers", 1), ("seed", 0)):
        given = getattr(arguments, name)
        if given is not None and given < least:
            raise AxicfdError(f"`--{name} {given}` must be at least {least}.")
    if arguments.count is not None and not arguments.full:
        raise AxicfdError("`--count` is for the full answer. Add --full.")
    where, case = prepared(arguments, "spread")

    from axicfd.cli.progress import Progress, Rows
    from axicfd.output import spread as shown_spread
    from axicfd.output.shown import shown_units
    from axicfd.variants.spread import COUNT, spread

    of_base, of_variants = Progress(shown_units(case)), Rows(of="variants")
    try:
        found = spread(
            case,
            full=arguments.full,
            count=arguments.count or COUNT,
            seed=arguments.seed,
            of=arguments.of,
            workers=arguments.workers,
            on_solve=of_base,
            on_progress=of_variants,
        )
    finally:
        of_base.close()
        of_variants.close()
    shown_spread.write(found, where, arguments.replace)
    if arguments.json:
        sys.stdout.write(shown_spread.text(found))
    else:
        _print(found, where)
    if not found.base.converged:
        print("not converged: the case itself has no answer, so nothing is known of its spread.", file=sys.stderr)
    return exits.SOLVED if found.solved else exits.NOT_CONVERGED


def _print(found: Any, where: Path) -> None:
    from axicfd.cli import render
    from axicfd.output import spread as words

    out = render.console()
    render.rows(out, ["input", "value", "tolerance", ""], words.input_rows(found), right=(1, 2))
    out.print()
    header = ["quantity", "value", "inputs (95 %)", "mesh", "to blame"]
    render.rows(out, header, words.output_rows(found), right=(1, 2, 3))
    out.print()
    for note in words.notes(found):
        out.print(note)
    out.print(words.APART)
    solves = 1 + 2 * len(found.inputs) + (0 if found.samples is None else len(found.samples))
    out.print(f"{solves} solves on the same mesh; results in {where}")
