"""`axicfd solve CASE`: solve, write the results folder, print the answer."""

from __future__ import annotations

import argparse
import sys
from pathlib import Path
from typing import Any

from axicfd.cli import exits
from axicfd.cli.commands._sets import add_set, chosen

SUMMARY = "solve a case, write its results folder and print the answer"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("case", metavar="CASE", help="a case file in TOML")
    parser.add_argument("--out", metavar="DIR", help="results folder (default: ./NAME-results)")
    parser.add_argument("--replace", action="store_true", help="replace the results folder if it exists")
    add_set(parser)
    parser.add_argument(
        "--strict",
        action="store_true",
        help="end with 3 when a caution stands that [accept] does not name, or a limit is too close to call",
    )
    parser.add_argument("--json", action="store_true", help="print summary.json alone on standard output")
    parser.add_argument("--verbose", action="store_true", help="print all quantities and all cautions")


def run(arguments: argparse.Namespace) -> int:
    # Folder first: nobody should wait for a solve to learn that its place is taken.
    from axicfd.output import folder

    where = Path(arguments.out) if arguments.out else Path(f"{Path(arguments.case).stem}-results")
    folder.refuse_unusable(where, arguments.replace)

    from axicfd.case.read import load
    from axicfd.output.shown import shown_units

    case = load(Path(arguments.case), set=chosen(arguments))

    from axicfd.cli.progress import Progress, say_if_cold
    from axicfd.pipeline import solve

    say_if_cold()
    progress = Progress(shown_units(case))
    try:
        result = solve(case, on_progress=progress)
    finally:
        progress.close()
    folder.write(result, where, arguments.replace)
    return _report(result, where, arguments)


def _report(result: Any, where: Path, arguments: argparse.Namespace) -> int:
    from axicfd.cli import estimate, render
    from axicfd.output import folder

    if arguments.json:
        sys.stdout.write(folder.summary_text(result.summary))
    else:
        render.print_result(result, estimate.by_hand(result.case), arguments.verbose, str(where))
    left = result.summary.get("refused")
    if left:
        print(f"error: {left} The folder {where} is kept and marked.", file=sys.stderr)
        return exits.UNUSABLE
    if not result.summary["converged"]:
        print(
            f"not converged: residual {result.summary['residual']:.1e} after {result.summary['iterations']} "
            f"iterations. The fields in {where} are kept and marked.",
            file=sys.stderr,
        )
        return exits.NOT_CONVERGED
    return _decision(result.summary, arguments.strict)


def _decision(summary: dict[str, Any], strict: bool) -> int:
    """Whether the limits pass and, if strict, nothing stands in the way of using the answer."""
    from axicfd.results.cautions import standing
    from axicfd.results.limits import FAIL, PASS

    limits = summary.get("limits") or {}
    failed = [path for path, entry in limits.items() if entry["verdict"] == FAIL]
    open_ones = [path for path, entry in limits.items() if entry["verdict"] not in (PASS, FAIL)]
    said = [f"{_count(len(failed), 'limit')} failed: {', '.join(failed)}"] if failed else []
    if strict and open_ones:
        said.append(f"{_count(len(open_ones), 'limit')} not settled: {', '.join(open_ones)}")
    if strict and (codes := sorted({str(caution["code"]) for caution in standing(summary["cautions"])})):
        said.append(f"{_count(len(codes), 'caution')} not accepted: {', '.join(codes)}")
    for sentence in said:
        print(sentence, file=sys.stderr)
    return exits.LIMIT_FAILED if said else exits.SOLVED


def _count(n: int, what: str) -> str:
    return f"{n} {what}{'s' if n > 1 else ''}"
