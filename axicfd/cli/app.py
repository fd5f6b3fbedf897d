"""The command `axicfd`: the list of commands, and what happens when one goes wrong."""

from __future__ import annotations

import argparse
import difflib
import os
import sys
from collections.abc import Sequence
from typing import NoReturn

from axicfd import __version__
from axicfd.cli import exits
from axicfd.cli.commands import check, compare, draw, find, keys, materials, matters, new, solve, spread, sweep, wall
from axicfd.errors import AxicfdError

COMMANDS = {
    "new": new,
    "check": check,
    "solve": solve,
    "sweep": sweep,
    "wall": wall,
    "matters": matters,
    "spread": spread,
    "find": find,
    "compare": compare,
    "draw": draw,
    "materials": materials,
    "keys": keys,
}
LATER = ("report", "schema")

DESCRIPTION = """\
Laminar flow and heat transfer in tubes and their walls: outlet temperature, pressure drop, hottest wall,
fields and curves, from a case file in TOML."""


def main(argv: Sequence[str] | None = None) -> int:
    """Run the command line; returns the exit status. No traceback reaches a user."""
    words = list(sys.argv[1:] if argv is None else argv)
    # matrices are small here, and threads of the linear algebra that wait for a busy core cost seconds
    os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")  # a terminal of few characters gets "?" rather than a crash
    try:
        return _run(words)
    except AxicfdError as error:
        _say_error(str(error))
        return exits.UNUSABLE
    except KeyboardInterrupt:
        _say("\ninterrupted: no results folder was written")
        return exits.INTERRUPTED
    except BrokenPipeError:
        # The reader of a pipe went away, as `| head` does; Python would complain once more at its end.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return exits.SOLVED
    except MemoryError:
        _say_error("not enough memory for this mesh. Give a smaller `at_most` under [mesh].")
        return exits.UNUSABLE
    except OSError as error:
        place = f" {error.filename}" if error.filename else ""
        _say_error(f"cannot use{place}: {error.strerror or error}.")
        return exits.UNUSABLE
    except Exception as fault:
        if os.environ.get("AXICFD_TRACEBACK"):
            raise
        kind = type(fault).__name__
        _say_error(
            f"a fault in axicfd itself, not in your case ({kind}: {fault}). Please report it with the case "
            "file; AXICFD_TRACEBACK=1 shows where it happened."
        )
        return exits.UNUSABLE


def _run(words: list[str]) -> int:
    first = next((word for word in words if not word.startswith("-")), None)
    if first in LATER:
        _say_error(f"`axicfd {first}` is not available yet. Available: {', '.join(COMMANDS)}.")
        return exits.UNUSABLE
    if first is not None and first not in COMMANDS:
        near = difflib.get_close_matches(first, [*COMMANDS, *LATER], 1)
        hint = f" Did you mean `axicfd {near[0]}`?" if near else ""
        _say_error(f"there is no command `{first}`.{hint} Available: {', '.join(COMMANDS)}.")
        return exits.UNUSABLE
    try:
        arguments = _parser().parse_args(words)
    except SystemExit as leaving:  # help, version and usage errors leave from within the parser
        return int(leaving.code or 0)
    if arguments.command is None:
        _parser().print_help()
        return exits.UNUSABLE
    return COMMANDS[arguments.command].run(arguments)


class _Parser(argparse.ArgumentParser):
    """A parser whose complaint is one sentence and where to read more."""

    def error(self, message: str) -> NoReturn:
        _say_error(f"{message}. See `{self.prog} --help`.")
        raise SystemExit(exits.UNUSABLE)


def _parser() -> argparse.ArgumentParser:
    parser = _Parser(prog="axicfd", description=DESCRIPTION, allow_abbrev=False)
    parser.add_argument("--version", action="version", version=f"axicfd {__version__}")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", title="commands")
    for name, module in COMMANDS.items():
        command = commands.add_parser(name, help=module.SUMMARY, description=module.SUMMARY + ".", allow_abbrev=False)
        module.add_arguments(command)
    parser.epilog = "Not available yet: " + ", ".join(LATER) + "."
    return parser


def _say_error(text: str) -> None:
    _say("error: " + text.replace("\n", "\nerror: "))


def _say(text: str) -> None:
    print(text, file=sys.stderr)
