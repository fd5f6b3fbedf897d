"""What the commands share that ask a question of a case and write the answer into a folder NAME-WORD."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import Any

from axicfd.cli.commands._sets import add_set, chosen


def add_answer(parser: argparse.ArgumentParser, word: str) -> None:
    """Declare where the answer goes, and `--set`."""
    parser.add_argument("--out", metavar="DIR", help=f"folder of the answer (default: ./NAME-{word})")
    parser.add_argument("--replace", action="store_true", help="replace that folder if it exists")
    add_set(parser)
    parser.add_argument("--json", action="store_true", help=f"print {word}.json alone on standard output")


def prepared(arguments: argparse.Namespace, word: str) -> tuple[Path, Any]:
    """(folder of the answer, the case); the folder is known to be usable before anything is read or solved."""
    from axicfd.output import folder

    where = Path(arguments.out) if arguments.out else Path(f"{Path(arguments.case).stem}-{word}")
    folder.refuse_unusable(where, arguments.replace, f"{word}.json")

    from axicfd.case.read import load
    from axicfd.cli.progress import say_if_cold

    case = load(Path(arguments.case), set=chosen(arguments))
    say_if_cold()
    return where, case
