"""Solve every case of `cases` on the mesh that the tool chooses, and write down what it took.

    python -m validation.robustness.grid [WORD ...]     only cases whose name holds one of the words

Resumable: a case with a row in grid.csv is not solved again; delete the row, or the file, to repeat it.
TABLE.md is written from the rows.
"""

import csv
import sys
import time
from pathlib import Path

from axicfd.case.model import Case
from axicfd.pipeline import solve
from validation.robustness.cases import coupled_cases, flow_cases

HERE = Path(__file__).parent
ROWS, TABLE = HERE / "grid.csv", HERE / "TABLE.md"
COLUMNS = "case", "cells", "iterations", "most on coarser meshes", "seconds", "ended", "residual", "by"
MANY = 100  # iterations that are remarked on


def measured(name: str, case: Case) -> dict[str, str]:
    """One row: what the solve took, as text."""
    begun = time.perf_counter()
    result = solve(case)
    seconds = time.perf_counter() - begun
    solution = result.solution
    # the multigrid looks at the residual after its first cycle; the fallback begins where the multigrid gave up
    by = "multigrid" if solution.history and solution.history[0][0] <= 1 else "plain iteration"
    return {
        "case": name,
        "cells": str(solution.grid.cells),
        "iterations": str(solution.iterations),
        "most on coarser meshes": str(max((count for _, _, count, _ in result.history[:-1]), default=0)),
        "seconds": f"{seconds:.1f}",
        "ended": solution.stop_reason,
        "residual": f"{solution.residual:.1e}",
        "by": by,
    }


def read() -> list[dict[str, str]]:
    if not ROWS.exists():
        return []
    with ROWS.open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def main(words: list[str]) -> int:
    done = {row["case"] for row in read()}
    if not ROWS.exists():
        ROWS.write_text(",".join(COLUMNS) + "\n", encoding="utf-8")
    for name, case in (flow_cases() | coupled_cases()).items():
        if name in done or (words and not any(word in name for word in words)):
            continue
        row = measured(name, case)
        with ROWS.open("a", encoding="utf-8", newline="") as file:
            csv.DictWriter(file, COLUMNS).writerow(row)
        print(*row.values(), sep="   ", flush=True)
    write_table()
    return 0


def write_table() -> None:
    """TABLE.md from the rows, in the order of the cases."""
    order = list(flow_cases() | coupled_cases())
    rows = sorted((row for row in read() if row["case"] in order), key=lambda row: order.index(row["case"]))
    good = sum(row["ended"] == "converged" for row in rows)
    many = [row["case"] for row in rows if int(row["iterations"]) > MANY]
    lines = [
        "# What every case took",
        "",
        f"{good} of {len(rows)} cases converged to 1e-8 on the mesh that the tool chooses; {len(many)} took more "
        f"than {MANY} iterations. Written by `python -m validation.robustness.grid`; seconds on one core of a shared "
        "machine, coarser meshes included.",
        "",
        "| " + " | ".join(COLUMNS) + " |",
        "|" + "---|" * len(COLUMNS),
    ]
    lines += ["| " + " | ".join(row[c] for c in COLUMNS) + " |" for row in rows]
    TABLE.write_text("\n".join(lines) + "\n", encoding="utf-8")


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
