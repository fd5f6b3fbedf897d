"""Solve on a cluster that is already there: a Dask scheduler is reached by its address, and none is ever started here.

Whoever reaches a scheduler runs programs as its user, so the way to it should be encrypted and both ends certified.
"""

from __future__ import annotations

import ipaddress
from collections.abc import Callable, Iterator
from concurrent.futures import Executor
from contextlib import contextmanager
from dataclasses import dataclass
from typing import Any

from axicfd.errors import AxicfdError
from axicfd.version import VERSION

WAIT = 30  # seconds for the scheduler to answer and for its first worker


@dataclass(frozen=True)
class Certificates:
    """Names of PEM files: of the authority both ends trust, of the own certificate and of its key."""

    ca: str
    certificate: str
    key: str


def is_exposed(address: str) -> bool:
    """Whether what is sent to an address crosses a network in plain."""
    scheme, sign, rest = address.partition("://")
    if sign and scheme in ("tls", "inproc"):
        return False
    host = (rest if sign else address).rpartition(":")[0].strip("[]")
    if host == "localhost":
        return False
    try:
        return not ipaddress.ip_address(host).is_loopback
    except ValueError:
        return True


@contextmanager
def connected(address: str, certificates: Certificates | None = None) -> Iterator[Callable[[], Executor]]:
    """What makes an executor on the cluster of a scheduler, such as "tls://10.0.0.5:8786"; for `runner.run`.

    Raises `AxicfdError` where the scheduler does not answer, has no workers, or they lack this version of axicfd.
    """
    try:
        from distributed import Client
        from distributed.security import Security
    except ImportError:
        raise AxicfdError("`--cluster` needs the package distributed: `pip install axicfd[cluster]`.") from None
    if certificates is None and address.startswith("tls://"):
        raise AxicfdError(f"{address} needs certificates: give --tls-ca, --tls-cert and --tls-key.")
    security: Any = None
    if certificates is not None:
        security = Security(
            tls_ca_file=certificates.ca,
            tls_client_cert=certificates.certificate,
            tls_client_key=certificates.key,
            require_encryption=True,
        )
    try:
        client = Client(address, security=security, timeout=WAIT, set_as_default=False)
    except (OSError, TimeoutError, ValueError, RuntimeError) as why:
        raise AxicfdError(f"the scheduler {address} cannot be reached: {why}.") from None
    try:
        _check_workers(client, address)
        # Equal calls are calls of their own: a row that is tried again must run again.
        yield lambda: client.get_executor(pure=False)
    finally:
        client.close()


def _check_workers(client: Any, address: str) -> None:
    try:
        client.wait_for_workers(1, timeout=WAIT)
    except TimeoutError:
        raise AxicfdError(f"the scheduler {address} has no workers. Start some, then sweep again.") from None
    try:
        versions = client.run(_version)
    except Exception as why:
        raise AxicfdError(
            f"the workers of {address} cannot load axicfd ({type(why).__name__}: {why}). "
            f"Install version {VERSION} where they run."
        ) from None
    others = sorted({version for version in versions.values() if version != VERSION})
    if others:
        raise AxicfdError(
            f"workers of {address} have axicfd {', '.join(others)}, this is {VERSION}. Install the same version there."
        )


def _version() -> str:
    return VERSION
