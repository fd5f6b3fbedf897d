"""`axicfd sweep PLAN`: solve a table of variants, go on where one was left."""

from __future__ import annotations

import argparse
import sys
from contextlib import nullcontext
from pathlib import Path
from typing import Any

from axicfd.cli import exits
from axicfd.cli.commands._sets import add_set, chosen
from axicfd.errors import AxicfdError

SUMMARY = "solve a table of variants; run again, it goes on where it was left"


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("plan", metavar="PLAN", help="a plan in TOML: a case and what varies")
    parser.add_argument("--out", metavar="DIR", help="folder of the sweep (default: ./NAME-results)")
    parser.add_argument("--replace", action="store_true", help="begin anew if the folder holds another sweep")
    parser.add_argument("--workers", metavar="N", type=int, help="processes on this machine (default: one per core)")
    parser.add_argument("--keep-fields", action="store_true", help="keep the results folder of every row under rows/")
    parser.add_argument("--retry", action="store_true", help="solve rows again that did not end solved")
    parser.add_argument("--parquet", metavar="FILE", help="write the table as a Parquet file too")
    add_set(parser)
    parser.add_argument("--cluster", metavar="ADDRESS", help="solve on a Dask cluster, such as tls://10.0.0.5:8786")
    parser.add_argument("--tls-ca", metavar="FILE", help="certificate of the authority that the cluster trusts")
    parser.add_argument("--tls-cert", metavar="FILE", help="own certificate")
    parser.add_argument("--tls-key", metavar="FILE", help="its key")


def run(arguments: argparse.Namespace) -> int:
    _check(arguments)
    from axicfd.variants.plan import read_plan

    plan = read_plan(Path(arguments.plan), set=chosen(arguments))
    where = Path(arguments.out) if arguments.out else Path(f"{Path(arguments.plan).stem}-results")

    from axicfd.cli import render
    from axicfd.cli.progress import Rows, say_if_cold
    from axicfd.output.sweep import sweep

    say_if_cold()
    with _executor(arguments) as executor:
        progress = Rows()
        try:
            table = sweep(
                plan,
                where,
                workers=arguments.workers,
                executor=executor,
                keep_fields=arguments.keep_fields,
                retry=arguments.retry,
                replace=arguments.replace,
                on_progress=progress,
            )
        except KeyboardInterrupt:
            progress.close()
            print(f"\ninterrupted: the rows solved so far are kept in {where}; run again to go on", file=sys.stderr)
            return exits.INTERRUPTED
        finally:
            progress.close()
    if arguments.parquet:
        table.to_parquet(arguments.parquet)
    render.print_sweep(table, str(where))
    return exits.SOLVED


def _check(arguments: argparse.Namespace) -> None:
    if arguments.workers is not None and arguments.workers < 1:
        raise AxicfdError(f"`--workers {arguments.workers}` must be at least 1.")
    if arguments.workers is not None and arguments.cluster:
        raise AxicfdError("`--workers` counts processes on this machine; a cluster has its own. Leave one out.")
    tls = [arguments.tls_ca, arguments.tls_cert, arguments.tls_key]
    if any(tls) and not (all(tls) and arguments.cluster):
        raise AxicfdError("`--tls-ca`, `--tls-cert` and `--tls-key` go together, and with `--cluster`.")
    for name in filter(None, tls):
        if not Path(name).is_file():
            raise AxicfdError(f"the file {name} does not exist.")
    if arguments.parquet:
        from importlib.util import find_spec

        if find_spec("pyarrow") is None:
            raise AxicfdError("`--parquet` needs the package pyarrow: `pip install axicfd[data]`.")


def _executor(arguments: argparse.Namespace) -> Any:
    """A context that gives what makes an executor, or None for processes on this machine."""
    if not arguments.cluster:
        return nullcontext()
    from axicfd.variants.cluster import Certificates, connected, is_exposed

    if is_exposed(arguments.cluster):
        print(
            f"warning: {arguments.cluster} is reached in plain. Whoever listens can read along, and whoever reaches "
            "the scheduler can run programs there. Use a tls:// address.",
            file=sys.stderr,
        )
    tls = Certificates(arguments.tls_ca, arguments.tls_cert, arguments.tls_key) if arguments.tls_ca else None
    return connected(arguments.cluster, tls)
