"""`axicfd draw DIR`: pictures of a results folder, written into it."""

from __future__ import annotations

import argparse
from pathlib import Path

from axicfd.cli import exits

SUMMARY = "draw the temperature and the curves along the tube of a results folder"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("folder", metavar="DIR", help="a results folder; the pictures are written into it")
    parser.add_argument("--format", choices=("png", "svg", "pdf"), default="png", help="kind of picture (png)")


def run(arguments: argparse.Namespace) -> int:
    from axicfd.output import figures, folder

    stored = folder.read(Path(arguments.folder))
    for path in figures.draw_all(stored, stored.folder, f".{arguments.format}"):
        print(f"wrote {path}")
    return exits.SOLVED
