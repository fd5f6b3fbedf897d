"""The key `accuracy` on random cases: is what was asked for reached, and does the truth lie inside what was allowed?

    python -m validation.bars.accuracy_cases [NUMBER]

Solves 21 random cases (or NUMBER; none of those of random_cases) for 1, 0.3 and 0.1 %, and writes accuracy.csv (what
came out) and ACCURACY.md. The truth is extrapolated from the mesh the tool would choose by itself and two halvings
beyond. Resumable: a case that has rows in accuracy.csv is not solved again.
"""

import csv
import sys
import time
from pathlib import Path
from typing import Any

from axicfd.case.quantities import quantity
from axicfd.pipeline import solve
from validation.bars import study
from validation.bars.random_cases import NUMBER as FIRST
from validation.bars.random_cases import SEED, drawn

HERE = Path(__file__).parent
ROWS, TABLE = HERE / "accuracy.csv", HERE / "ACCURACY.md"
COLUMNS = (
    "case",
    "asked",
    "reached",
    "stopped by",
    "cells",
    "seconds",
    "quantities",
    "unknown",
    "inside",
    "worst",
    "where",
)
ASKED, NUMBER = ("1 %", "0.3 %", "0.1 %"), 21
HOPELESS = "0.000001 %"


def rows_of(number: int) -> list[tuple[Any, ...]]:
    """One row per accuracy asked for; `inside` counts the quantities whose truth is within what was allowed."""
    base = drawn(number).replace({"mesh.at_most": None})
    try:
        limits = study.limits(study.climb(base, study.MORE))
    except study.NotConverged as reason:
        return [(base.title, asked, "", str(reason), "", "", 0, 0, 0, "", "") for asked in ASKED]
    rows = []
    for asked in ASKED:
        begun = time.process_time()
        result = solve(base.replace({"solve.accuracy": asked}))
        seconds = time.process_time() - begun
        found = result.summary["accuracy"]
        inside, unknown, worst, where = 0, 0, 0.0, ""
        for path, judged in found["quantity"].items():
            keys = quantity(base, path).keys
            truth, known_to = limits.get(".".join(keys), (float("nan"), float("inf")))
            allowed = judged["allowed"]
            if not known_to <= study.SHARP * allowed:
                unknown += 1
                continue
            ratio = abs(result[".".join(keys)] - truth) / allowed
            inside += ratio <= 1.0
            if ratio > worst:
                worst, where = ratio, path
        stopped = found.get("stopped_by") or ""
        rows.append(
            (base.title, asked, found["reached"], stopped, result.summary["cells"], f"{seconds:.1f}",
             len(found["quantity"]), unknown, inside, f"{worst:.2g}", where)
        )  # fmt: skip
    return rows


def kept() -> list[dict[str, str]]:
    if not ROWS.exists():
        return []
    with ROWS.open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def main(number: int) -> None:
    done = {row["case"] for row in kept()}
    if not ROWS.exists():
        ROWS.write_text(",".join(COLUMNS) + "\n", encoding="utf-8")
    for k in range(FIRST, FIRST + number):
        if drawn(k).title in done:
            continue
        rows = rows_of(k)
        with ROWS.open("a", encoding="utf-8", newline="") as file:
            csv.writer(file, lineterminator="\n").writerows(rows)
        for row in rows:
            print(*row, sep="   ", flush=True)
    write_table()


def write_table() -> None:
    """ACCURACY.md from the rows, and one case that asks for what nothing can give."""
    rows = kept()
    lines = [
        "# Accuracy asked for, on random cases",
        "",
        f"{len({row['case'] for row in rows})} cases drawn with seed {SEED}, each for {', '.join(ASKED)} of the scale "
        "of every headline quantity. A truth that is not known to a quarter of what was allowed cannot judge. "
        "Seconds are of one processor. Written by `python -m validation.bars.accuracy_cases`.",
        "",
        "| asked | solves | reached | truths judged | of these inside | median cells | median s | largest s |",
        "|---|---|---|---|---|---|---|---|",
    ]
    for asked in ASKED:
        of = [row for row in rows if row["asked"] == asked and row["cells"]]
        judged = sum(int(row["quantities"]) - int(row["unknown"]) for row in of)
        inside = sum(int(row["inside"]) for row in of)
        cells = sorted(int(row["cells"]) for row in of)
        seconds = sorted(float(row["seconds"]) for row in of)
        reached = sum(row["reached"] == "True" for row in of)
        lines.append(
            f"| {asked} | {len(of)} | {reached} | {judged} | {inside} | {cells[len(cells) // 2]} | "
            f"{seconds[len(seconds) // 2]} | {seconds[-1]} |"
        )
    lines += ["", "## Not reached, or a truth outside", ""]
    lines += ["| case | asked | stopped by | cells | error / allowed | where |", "|---|---|---|---|---|---|"]
    lines += [
        f"| {row['case']} | {row['asked']} | {row['stopped by']} | {row['cells']} | {row['worst']} | {row['where']} |"
        for row in rows
        if row["reached"] != "True" or int(row["inside"]) + int(row["unknown"]) < int(row["quantities"])
    ]
    begun = time.process_time()
    hopeless = solve(drawn(FIRST).replace({"mesh.at_most": None, "solve.accuracy": HOPELESS})).summary["accuracy"]
    lines += [
        "",
        f"A hopeless one, {HOPELESS} of {drawn(FIRST).title}, ends after {time.process_time() - begun:.0f} s: "
        f"stopped by {hopeless['stopped_by']}; {hopeless['text']}",
    ]
    TABLE.write_text("\n".join(lines) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else NUMBER)
