"""`axicfd draw DIR`: pictures of a results folder, written into it."""

from __future__ import annotations

import argparse
from pathlib import Path

from axicfd.cli import exits

SUMMARY = "draw a results folder (temperature, curves along the tube) or a sweep (curves, maps, table)"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("folder", metavar="DIR", help="folder of a solve or a sweep; the pictures are written into it")
    parser.add_argument("--format", choices=("png", "svg", "pdf"), default="png", help="kind of picture (png)")


def run(arguments: argparse.Namespace) -> int:
    from axicfd.output.sweep import is_sweep, read_sweep

    where = Path(arguments.folder)
    if is_sweep(where):
        from axicfd.output import sweep_figures

        for path in sweep_figures.draw_all(read_sweep(where), where, f".{arguments.format}"):
            print(f"wrote {path}")
        return exits.SOLVED
    from axicfd.output import figures, folder

    stored = folder.read(where)
    for path in figures.draw_all(stored, stored.folder, f".{arguments.format}"):
        print(f"wrote {path}")
    return exits.SOLVED
