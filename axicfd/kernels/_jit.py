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
import os
import shutil
import sys
import tempfile
import time
from pathlib import Path

import numba

OPTIONS = {"error_model": "numpy"}
KEEP_DAYS = 60  # caches of other versions that nobody used for so long are removed


def _fingerprint() -> str:
    """Of every kernel source, its place (the compiler keeps a copy per place) and the options."""
    place = str(Path(__file__).resolve().parent)
    digest = hashlib.sha256(repr((sorted(OPTIONS.items()), numba.__version__, place)).encode())
    for path in sorted(Path(__file__).parent.glob("*.py")):
        digest.update(path.read_bytes())
    return digest.hexdigest()[:16]


def _user_cache() -> Path:
    """Where this kind of machine keeps caches; NUMBA_CACHE_DIR, if the user set it, comes first."""
    if os.environ.get("NUMBA_CACHE_DIR"):
        return Path(os.environ["NUMBA_CACHE_DIR"])
    if sys.platform == "win32":
        return Path(os.environ.get("LOCALAPPDATA", Path.home() / "AppData" / "Local"))
    if sys.platform == "darwin":
        return Path.home() / "Library" / "Caches"
    return Path(os.environ.get("XDG_CACHE_HOME") or Path.home() / ".cache")


def _cache_folder() -> Path | None:
    """A writable folder for this version of the kernels, or None where there is none."""
    try:
        folder = _user_cache() / "axicfd" / _fingerprint()
        folder.mkdir(parents=True, exist_ok=True)
        with tempfile.TemporaryFile(dir=folder):
            pass
        os.utime(folder)
        _remove_unused(folder)
        return folder
    except (OSError, RuntimeError):  # RuntimeError: no home folder
        return None


def _remove_unused(current: Path) -> None:
    for other in current.parent.iterdir():
        if other != current and time.time() - other.stat().st_mtime > KEEP_DAYS * 86400:
            shutil.rmtree(other, ignore_errors=True)


CACHE_FOLDER = _cache_folder()
if CACHE_FOLDER is not None:
    setattr(numba.config, "CACHE_DIR", str(CACHE_FOLDER))  # noqa: B010  not among its typed names


def kernel(function):
    """Compile a kernel on first use."""
    return numba.njit(cache=CACHE_FOLDER is not None, **OPTIONS)(function)


def is_warm() -> bool:
    """Whether kernels of this version lie compiled in the cache."""
    return CACHE_FOLDER is not None and any(CACHE_FOLDER.rglob("*.nbi"))
