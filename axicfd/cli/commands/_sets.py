"""The option `--set KEY=VALUE`, shared by the commands that read a case."""

from __future__ import annotations

import argparse
from typing import Any

from axicfd.errors import AxicfdError


def add_set(parser: argparse.ArgumentParser) -> None:
    """Declare the option; it may be given several times."""
    parser.add_argument(
        "--set",
        action="append",
        default=[],
        metavar="KEY=VALUE",
        help='change a key, such as "stream.oil.mass_flow=4 g/s"; may be given several times',
    )


def chosen(arguments: argparse.Namespace) -> dict[str, Any]:
    """Dotted path -> value, split at the first `=`; the value is TOML where it reads so, else a string."""
    from axicfd.case.keys import toml_value

    found: dict[str, Any] = {}
    for text in arguments.set:
        key, sign, value = text.partition("=")
        key = key.strip()
        if not sign or not key:
            raise AxicfdError(
                f'`--set {text}` must be KEY=VALUE. Write for example --set "stream.oil.mass_flow=4 g/s".'
            )
        if key in found:
            raise AxicfdError(f"`--set {key}=...` is given twice. Give it once.")
        found[key] = toml_value(value.strip())
    return found
