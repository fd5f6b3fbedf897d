"""Rate of a sweep on one and on two workers, against plain processes that solve the same variants in a row."""

import os
import resource
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

from axicfd.case.model import Case
from axicfd.case.write import to_toml
from axicfd.output.sweep import sweep

ROWS = 200
TURNS = 2  # of two workers and of two plain processes, by turns

# Every second row from the one named, each on the meshes of the base case; nothing is kept.
PLAIN = """
import sys
from axicfd.pipeline import solve
from axicfd.variants.plan import read_plan
from axicfd.variants.sweep import shared_meshes
plan = read_plan(sys.argv[1])
meshes = shared_meshes(plan.base)
for row in plan.rows[int(sys.argv[2])::2]:
    solve(row.case, like=meshes)
"""


def plan_of(case: Case, key: str, low: str, high: str, folder: Path) -> Path:
    """A plan of `ROWS` values of one key, written beside its case."""
    (folder / "case.toml").write_text(to_toml(case), encoding="utf-8")
    text = f'case = "case.toml"\n[[vary]]\nkey = "{key}"\nfrom = "{low}"\nto = "{high}"\ncount = {ROWS}\n'
    path = folder / "plan.toml"
    path.write_text(text, encoding="utf-8")
    return path


def clock(work: Callable[[], object]) -> tuple[float, float]:
    """(wall, processor) seconds of work and of the processes it waits for."""

    def processor() -> float:
        found = [resource.getrusage(who) for who in (resource.RUSAGE_SELF, resource.RUSAGE_CHILDREN)]
        return sum(usage.ru_utime + usage.ru_stime for usage in found)

    wall, used = time.perf_counter(), processor()
    work()
    return time.perf_counter() - wall, processor() - used


def rates(plan: Path) -> dict[str, list[tuple[float, float]]]:
    """(wall, processor) seconds of every turn of "one worker", "two workers" and "two plain processes"."""

    def swept(workers: int) -> None:
        with tempfile.TemporaryDirectory() as folder:
            table = sweep(plan, Path(folder) / "out", workers=workers)
            assert table.counts == {"solved": ROWS}

    def plain() -> None:
        one_thread = os.environ | {"OMP_NUM_THREADS": "1", "OPENBLAS_NUM_THREADS": "1", "NUMBA_NUM_THREADS": "1"}
        command = [sys.executable, "-c", PLAIN, str(plan)]
        processes = [subprocess.Popen([*command, str(half)], env=one_thread) for half in range(2)]
        assert [process.wait() for process in processes] == [0, 0]

    found: dict[str, list[tuple[float, float]]] = {"one worker": [clock(lambda: swept(1))]}
    for _ in range(TURNS):
        found.setdefault("two workers", []).append(clock(lambda: swept(2)))
        found.setdefault("two plain processes", []).append(clock(plain))
    return found
