"""The compile policy: one decorator, a cache that every edit empties, and the same numbers without the compiler."""

import ast
import os
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from axicfd.kernels import _jit
from axicfd.kernels._jit import kernel

ROOT = Path(__file__).parents[2]
KERNELS = sorted(p for p in (ROOT / "axicfd" / "kernels").glob("*.py") if not p.name.startswith("_"))


def imports(path):
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            yield node.module


@pytest.mark.parametrize("path", KERNELS, ids=lambda p: p.stem)
def test_kernels_know_nothing_but_kernels(path):
    assert all(name in ("math", "numpy", "typing") or name.startswith("axicfd.kernels") for name in imports(path))


def test_an_edit_in_any_kernel_file_starts_an_empty_cache(tmp_path, monkeypatch):
    """The compiler's own cache serves old code where a kernel calls one of another file that was edited since."""
    for path in (ROOT / "axicfd" / "kernels").glob("*.py"):
        (tmp_path / path.name).write_bytes(path.read_bytes())
    monkeypatch.setattr(_jit, "__file__", str(tmp_path / "_jit.py"))
    before = _jit._fingerprint()
    assert before == _jit._fingerprint()
    with (tmp_path / "momentum.py").open("a") as file:
        file.write("# edited\n")
    assert _jit._fingerprint() != before


@pytest.mark.parametrize("path", sorted((ROOT / "tests" / "reference").glob("*.py")), ids=lambda p: p.stem)
def test_slow_versions_share_nothing_with_what_they_judge(path):
    assert not [name for name in imports(path) if name.startswith("axicfd")]


@pytest.mark.skipif("NUMBA_DISABLE_JIT" in os.environ, reason="plain floats raise")
def test_a_kernel_sees_what_is_not_a_number():
    """No fastmath: divergence must be seen; a division by zero gives inf, no exception."""

    @kernel
    def is_nan_after(a, b):
        return np.isnan(a / b), a / b

    assert is_nan_after(0.0, 0.0)[0]
    assert is_nan_after(1.0, 0.0)[1] == np.inf


@pytest.mark.skipif("NUMBA_DISABLE_JIT" in os.environ, reason="this is the run without the compiler")
def test_kernels_without_the_compiler():
    """Plain Python raises where an index leaves its array; compiled code reads on in silence."""
    # one solved tube touches every index that the others do, and takes long enough in plain Python
    others = "not few_cycles_for_any_tube and not plain_iteration_solves_it"
    command = [sys.executable, "-m", "pytest", "-q", "-p", "no:cacheprovider", "-k", others, str(Path(__file__).parent)]
    done = subprocess.run(
        command, capture_output=True, text=True, cwd=ROOT, env={**os.environ, "NUMBA_DISABLE_JIT": "1"}
    )
    assert done.returncode == 0, done.stdout[-3000:]
