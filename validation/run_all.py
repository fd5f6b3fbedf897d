"""Run every validation problem and write validation/SUMMARY.md and the pictures.

python -m validation.run_all [WORD ...]     only problems whose path holds one of the words; SUMMARY.md then stays
"""

import importlib
import sys
import time
from datetime import date
from pathlib import Path

from axicfd import __version__
from validation.common import Row

HERE = Path(__file__).parent


def problems(words: list[str]) -> list[Path]:
    """Folders with a check.py, in order of their paths."""
    folders = sorted(path.parent for path in HERE.glob("*/*/check.py"))
    return [f for f in folders if not words or any(w in str(f.relative_to(HERE)) for w in words)]


def run(folder: Path) -> tuple[list[Row], float]:
    """The rows of one problem and the seconds they took."""
    module = importlib.import_module(".".join(("validation", *folder.relative_to(HERE).parts, "check")))
    begun = time.perf_counter()
    rows = module.check()
    if hasattr(module, "picture"):
        module.picture(folder)
    return rows, time.perf_counter() - begun


def as_markdown(folder: Path, rows: list[Row], seconds: float) -> list[str]:
    """The section of one problem."""
    name = folder.relative_to(HERE).as_posix()
    lines = [f"## [{name}]({name}/README.md)", "", f"{seconds:.0f} s", ""]
    lines += ["| quantity | computed | expected | deviation | allowed | | source |", "|---|---|---|---|---|---|---|"]
    for row in rows:
        verdict = {True: "pass", False: "**FAIL**", None: "shown"}[row.passed]
        allowed = "" if row.margin is None else f"{row.margin:.2g}"
        source = row.source + (f"; {row.note}" if row.note else "")
        lines.append(
            f"| {row.quantity} | {row.computed:.7g} | {row.expected:.7g} | {row.deviation:+.2e} "
            f"| {allowed} | {verdict} | {source} |"
        )
    return [*lines, ""]


def main(words: list[str]) -> int:
    text, failed, judged = [], 0, 0
    for folder in problems(words):
        rows, seconds = run(folder)
        judged += sum(row.passed is not None for row in rows)
        bad = [row for row in rows if row.passed is False]
        failed += len(bad)
        worst = max((abs(r.deviation) / r.margin for r in rows if r.margin), default=float("nan"))
        print(
            f"{folder.relative_to(HERE)}: {len(rows)} rows, {len(bad)} failed, "
            f"worst {worst:.2f} of its margin, {seconds:.0f} s"
        )
        for row in bad:
            print(f"    {row.quantity}: {row.computed:.7g} instead of {row.expected:.7g} ({row.deviation:+.2e})")
        text += as_markdown(folder, rows, seconds)
    head = [
        "# Validation",
        "",
        f"axicfd {__version__}, {date.today().isoformat()}: {judged - failed} of {judged} checks within their margins. "
        "Written by `python -m validation.run_all`.",
        "",
        "Deviation is (computed - expected) / scale; rows marked `shown` are not judged, with the reason beside the "
        "source.",
        "",
    ]
    if not words:
        (HERE / "SUMMARY.md").write_text("\n".join(head + text), encoding="utf-8")
    return 1 if failed else 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
