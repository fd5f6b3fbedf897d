"""The one compile policy of all kernels, and where compiled kernels are kept.

cache=True           : compiled once per machine and version of the kernels
error_model="numpy"  : a division by zero gives inf, which the divergence watch sees, instead of an exception
no fastmath          : it makes isnan false, so that divergence would go unseen
serial               : on shared cores threads that wait cost more than they bring; parallelism goes across cases

The compiler's cache notices an edit only in the file of the kernel that is called, not in files of kernels that
this one
calls, nor a change of options. So the cache lies in a folder of its own, named after the sources of all kernels:
an edit anywhere starts an empty one, and kernels may call each other across files.
"""

import hashlib
from pathlib import Path

import numba

from axicfd import cache

OPTIONS = {"error_model": "numpy"}


def _fingerprint() -> str:
    """Of every kernel source, its place (the compiler keeps a copy per place) and the options."""
    place = str(Path(__file__).resolve().parent)
    digest = hashlib.sha256(repr((sorted(OPTIONS.items()), numba.__version__, place)).encode())
    for path in sorted(Path(__file__).parent.glob("*.py")):
        digest.update(path.read_bytes())
    return digest.hexdigest()[:16]


CACHE_FOLDER = cache.folder(_fingerprint())
if CACHE_FOLDER is not None:
    setattr(numba.config, "CACHE_DIR", str(CACHE_FOLDER))  # noqa: B010  not among its typed names


def kernel(function):
    """Compile a kernel on first use."""
    return numba.njit(cache=CACHE_FOLDER is not None, **OPTIONS)(function)


def is_warm() -> bool:
    """Whether kernels of this version lie compiled in the cache."""
    return CACHE_FOLDER is not None and any(CACHE_FOLDER.rglob("*.nbi"))
