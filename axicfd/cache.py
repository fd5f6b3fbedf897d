"""Where what takes long to make is kept between runs: compiled kernels, the table of units."""

import os
import shutil
import sys
import tempfile
import time
from pathlib import Path

KEEP_DAYS = 60  # folders, of other versions, that nobody used for so long are removed


def folder(name: str) -> Path | None:
    """A writable folder of this name among the user's caches, or None where there is none."""
    try:
        found = _user_cache() / "axicfd" / name
        found.mkdir(parents=True, exist_ok=True)
        with tempfile.TemporaryFile(dir=found):
            pass
        os.utime(found)
        _remove_unused(found)
        return found
    except (OSError, RuntimeError):  # RuntimeError: no home folder
        return None


def _user_cache() -> Path:
    """Where this kind of machine keeps caches; NUMBA_CACHE_DIR, if the user set it, comes first."""
    if os.environ.get("NUMBA_CACHE_DIR"):
        return Path(os.environ["NUMBA_CACHE_DIR"])
    if sys.platform == "win32":
        return Path(os.environ.get("LOCALAPPDATA", Path.home() / "AppData" / "Local"))
    if sys.platform == "darwin":
        return Path.home() / "Library" / "Caches"
    return Path(os.environ.get("XDG_CACHE_HOME") or Path.home() / ".cache")


def _remove_unused(current: Path) -> None:
    for other in current.parent.iterdir():
        if other != current and time.time() - other.stat().st_mtime > KEEP_DAYS * 86400:
            shutil.rmtree(other, ignore_errors=True)
