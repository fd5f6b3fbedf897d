"""Make every deliberate fault in a copy of the package and see that its test fails.

    python -m tests.laws.try_faults [WORDS]     only faults with these words in their description

The package, the tests and the cases are copied to a temporary folder, once; each fault is made there and
taken back. Kernels are compiled into a cache of the copy's own, so that neither side sees the other's. First
all tests run on the unharmed copy: a test that fails there would catch anything.
"""

import os
import shutil
import subprocess
import sys
import tempfile
from pathlib import Path

from tests.laws.faults import FAULTS, Fault

ROOT = Path(__file__).parents[2]
COPIED = "axicfd", "tests", "validation", "cases"
ALL_PASSED, SOME_FAILED = 0, 1  # exit codes of pytest


def main(words: str = "") -> int:
    chosen = [fault for fault in FAULTS if words in fault.what]
    with tempfile.TemporaryDirectory() as place:
        copy = Path(place) / "copy"
        for name in COPIED:
            shutil.copytree(ROOT / name, copy / name, ignore=shutil.ignore_patterns("__pycache__"))
        shutil.copy2(ROOT / "pyproject.toml", copy)
        unharmed = sorted({fault.test for fault in chosen})
        code, tail = run(copy, unharmed)
        if code != ALL_PASSED:
            print(f"not usable: tests fail without any fault\n{tail}")
            return 1
        missed = [fault for fault in chosen if not caught(copy, fault)]
    print(f"{len(chosen) - len(missed)} of {len(chosen)} faults caught")
    return 1 if missed else 0


def caught(copy: Path, fault: Fault) -> bool:
    """Whether the fault's test fails on the harmed copy; says so on a line."""
    path = copy / "axicfd" / fault.file
    sound = path.read_text(encoding="utf-8")
    stamp = path.stat()
    assert sound.count(fault.old) == 1, fault.what
    path.write_text(sound.replace(fault.old, fault.new), encoding="utf-8")
    code, tail = run(copy, [fault.test])
    path.write_text(sound, encoding="utf-8")
    os.utime(path, ns=(stamp.st_atime_ns, stamp.st_mtime_ns))  # so that compiled kernels are known again
    verdict = {SOME_FAILED: "caught", ALL_PASSED: "NOT CAUGHT"}.get(code, f"BROKEN\n{tail}")
    print(f"{verdict:10s}  {fault.what}  ->  {fault.test}", flush=True)
    return code == SOME_FAILED


def run(copy: Path, tests: list[str]) -> tuple[int, str]:
    """Exit code of the tests on the copy, and the last lines they wrote."""
    surroundings = dict(os.environ, PYTHONPATH=str(copy), NUMBA_CACHE_DIR=str(copy / "compiled"))
    surroundings["PYTHONDONTWRITEBYTECODE"] = "1"
    command = [sys.executable, "-m", "pytest", "-q", "-x", "--tb=line", "-p", "no:cacheprovider", *tests]
    done = subprocess.run(command, cwd=copy, env=surroundings, capture_output=True, text=True)
    return done.returncode, done.stdout[-1500:] + done.stderr[-500:]


if __name__ == "__main__":
    sys.exit(main(" ".join(sys.argv[1:])))
