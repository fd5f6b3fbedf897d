"""The one compile policy of all kernels.

cache=True           : compiled once per machine (kernels that call each other share a file: the cache does not notice
                       an edit in another file)
error_model="numpy"  : a division by zero gives inf, which the divergence watch sees, instead of an exception
no fastmath          : it makes isnan false, so that divergence would go unseen
serial               : on shared cores threads that wait cost more than they bring; parallelism goes across cases
"""

import os
import tempfile
from pathlib import Path

import numba


def _cache_is_writable() -> bool:
    """Whether numba finds a place for its cache; without one, decorating with cache=True would fail at import."""
    places = [os.environ.get("NUMBA_CACHE_DIR"), str(Path(__file__).parent), str(Path.home() / ".cache")]
    for place in places:
        if not place:
            continue
        try:
            Path(place).mkdir(parents=True, exist_ok=True)
            with tempfile.TemporaryFile(dir=place):
                return True
        except OSError:
            continue
    return False


CACHE = _cache_is_writable()


def kernel(function):
    """Compile a kernel on first use."""
    return numba.njit(cache=CACHE, error_model="numpy")(function)
