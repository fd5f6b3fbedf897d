"""`axicfd wall CASE`: does conduction in the wall matter?"""

from __future__ import annotations

import argparse
import sys
from typing import Any

from axicfd.cli import exits
from axicfd.cli.commands._answers import add_answer, prepared

SUMMARY = "tell whether the wall matters: in full, with radial resistance only, and without it"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    add_contrast(parser, "wall")
    parser.add_argument("--layer", metavar="NAME", help="take out the conduction along z of this layer only")


def add_contrast(parser: argparse.ArgumentParser, word: str) -> None:
    """Arguments of every command that solves a case in several ways and judges the differences."""
    parser.add_argument("case", metavar="CASE", help="a case file in TOML")
    parser.add_argument(
        "--care",
        action="append",
        metavar="AMOUNT",
        help='from where on a change matters: "1 K", "0.5 W", or per cent of each scale; may be given several times '
        "(default: 2 %%)",
    )
    add_answer(parser, word)


def run(arguments: argparse.Namespace) -> int:
    where, case = prepared(arguments, "wall")

    from axicfd.cli.progress import VariantProgress
    from axicfd.output import effects, variants
    from axicfd.output.shown import shown_units
    from axicfd.variants.wall import wall_effect

    shown = shown_units(case)
    with VariantProgress(shown) as progress:
        found = wall_effect(case, arguments.care, arguments.layer, progress)
    variants.write_wall(found, where, arguments.replace)
    if arguments.json:
        sys.stdout.write(variants.wall_text(found))
    else:
        from axicfd.cli import render

        out = render.console()
        render.sentences(out, effects.wall_sentences(found))
        render.rows(out, *effects.wall_rows(found))
        out.print()
        out.print("Largest differences along the tube (at the edges of heaters they are always large):")
        render.rows(out, ["", "", "", ""], effects.along_rows(found.effects, shown))
        out.print(effects.care_text(found.care, shown))
        out.print(f"Cases, curves and a picture in {where}")
    return ended(found.results["in full"], found.converged)


def ended(full: Any, converged: bool) -> int:
    """The exit status: of a case that left its model, of solves that did not converge, or of an answer."""
    left = full.summary.get("refused")
    if left:
        print(f"error: {left}", file=sys.stderr)
        return exits.UNUSABLE
    return exits.SOLVED if converged else exits.NOT_CONVERGED
