"""`axicfd matters CASE`: which effects matter?"""

from __future__ import annotations

import argparse
import sys
from pathlib import Path

from axicfd.cli.commands._sets import chosen
from axicfd.cli.commands.wall import add_contrast, ended, place

SUMMARY = "tell which effects matter: variable properties, viscous heating, the inlet, conduction along the fluid"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    add_contrast(parser, "matters")


def run(arguments: argparse.Namespace) -> int:
    from axicfd.output import folder

    where = place(arguments, "matters")
    folder.refuse_unusable(where, arguments.replace, "matters.json")

    from axicfd.case.read import load
    from axicfd.cli.progress import VariantProgress, say_if_cold
    from axicfd.output.shown import shown_units

    case = load(Path(arguments.case), set=chosen(arguments))

    from axicfd.output import effects, variants
    from axicfd.variants.matters import what_matters

    say_if_cold()
    shown = shown_units(case)
    with VariantProgress(shown) as progress:
        found = what_matters(case, arguments.care, progress)
    variants.write_matters(found, where, arguments.replace)
    if arguments.json:
        sys.stdout.write(variants.matters_text(found))
    else:
        from axicfd.cli import render

        out = render.console()
        render.sentences(out, effects.assumption_sentences(found))
        render.rows(out, *effects.assumption_rows(found))
        out.print()
        out.print(effects.care_text(found.care, shown))
        out.print(f"The cases without each effect in {where}")
    return ended(found.results["in full"], found.converged)
