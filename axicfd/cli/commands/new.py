"""`axicfd new NAME`: a commented case to start from."""

from __future__ import annotations

import argparse
from pathlib import Path

from axicfd.cli import exits
from axicfd.errors import AxicfdError

SUMMARY = "write a commented starter case"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("name", metavar="NAME", help="writes ./NAME.toml; an existing file is left alone")


def run(arguments: argparse.Namespace) -> int:
    from axicfd.case import starter

    name = arguments.name.removesuffix(".toml")
    path = Path(f"{name}.toml")
    if not path.name.removesuffix(".toml"):
        raise AxicfdError('a case needs a name. Write `axicfd new heater` for "heater.toml".')
    path.parent.mkdir(parents=True, exist_ok=True)
    try:
        with path.open("x", encoding="utf-8") as file:
            file.write(starter.TEXT)
    except FileExistsError:
        raise AxicfdError(f"{path} exists already and is left as it is. Give another name.") from None
    print(f"wrote {path}; next: axicfd check {path}, axicfd solve {path}")
    return exits.SOLVED
