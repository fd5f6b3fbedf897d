"""`axicfd matters CASE`: which effects matter?"""

from __future__ import annotations

import argparse
import sys

from axicfd.cli.commands._answers import prepared
from axicfd.cli.commands.wall import add_contrast, ended

SUMMARY = "tell which effects matter: variable properties, viscous heating, the inlet, conduction along the fluid"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    add_contrast(parser, "matters")


def run(arguments: argparse.Namespace) -> int:
    where, case = prepared(arguments, "matters")

    from axicfd.cli.progress import VariantProgress
    from axicfd.output import effects, variants
    from axicfd.output.shown import shown_units
    from axicfd.variants.matters import what_matters

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
