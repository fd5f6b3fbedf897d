"""Random cases over the range of the keys: how often the limit lies inside the printed mesh error.

    python -m validation.bars.random_cases [NUMBER]

Draws 60 cases (or NUMBER), seeded, solves each on its mesh and on two further halvings, and writes random.csv (values)
and RANDOM.md (what they say). Resumable: a case that has a row in random-cases.csv is not solved again.
"""

import csv
import sys
import time
from pathlib import Path

import numpy as np

from axicfd.case.model import Case
from axicfd.errors import AxicfdError
from axicfd.results import cautions
from validation.bars import study
from validation.bars.tube import INSULATED, Liquid, Stretch, Wall, film, heat, held, rising, tube

HERE = Path(__file__).parent
TRIPLES, CASES, TABLE = HERE / "random.csv", HERE / "random-cases.csv", HERE / "RANDOM.md"
COLUMNS = "case", "mesh", "cells", "seconds", "triples", "ended"
SEED, NUMBER = 1859, 60
MESHES, WEIGHTS = (2_500, 10_000, 40_000), (0.4, 0.4, 0.2)  # `at_most`; the last is the tool's own choice
LARGEST_REYNOLDS = 2000.0
TWENTYFOLD = np.log(20.0)


def drawn(number: int) -> Case:
    """The case of a number. Draws that the tool refuses (turbulent, contradictory) are drawn again."""
    random = np.random.default_rng([SEED, number])
    while True:
        try:
            case = _draw(random, number)
            if not any(found.get("refused") for found in cautions.before(case)):
                return case
        except AxicfdError:
            continue


def _draw(random: np.random.Generator, number: int) -> Case:
    def spread(low: float, high: float) -> float:
        return float(np.exp(random.uniform(np.log(low), np.log(high))))

    def chance(share: float) -> bool:
        return bool(random.random() < share)

    rise = spread(2.0, 60.0)  # K, roughly what is asked for
    reynolds = spread(0.5, LARGEST_REYNOLDS)
    prandtl = spread(0.01, 1e4)
    if reynolds * prandtl > 1e6:  # the range of Peclet numbers
        prandtl = 1e6 / reynolds
    diameter = spread(0.5, 40.0)
    specific_heat = 4000.0 if prandtl > 1.0 else 1000.0
    falls = TWENTYFOLD * random.random() / rise if chance(0.4) else 0.0
    liquid = Liquid(spread(0.05, 20.0), prandtl, falls, spread(700.0, 2000.0), specific_heat)
    hot = chance(0.7)
    inlet = 20.0 if hot else 20.0 + rise
    outer = inlet + rise if hot else inlet - rise
    walls = [
        Wall(
            liquid.conductivity * spread(0.1, 1e4),
            0.5 * diameter * spread(0.02, 2.0),
            0.0 if chance(0.8) else spread(0.01, 1.0) * diameter * 1e-3 / liquid.conductivity,
        )
        for _ in range(int(random.choice(3, p=(0.25, 0.5, 0.25))))
    ]
    length = diameter * spread(5.0, 500.0)
    shares = random.dirichlet(np.full(int(random.integers(1, 4)), 3.0))

    h = liquid.conductivity / (diameter * 1e-3) * spread(0.3, 30.0)  # Biot number of the film
    capacity = reynolds * np.pi / 4 * diameter * 1e-3 * liquid.viscosity * liquid.specific_heat

    def outside(part: float) -> str:
        kind = random.choice(["insulated", "heat", "film", "held", "rising"], p=(0.3, 0.25, 0.25, 0.1, 0.1))
        if kind == "insulated":
            return INSULATED
        if kind == "heat":
            across = 1.0 / (np.pi * part * 1e-3 * liquid.conductivity * 4.0)
            return heat((rise if hot else -rise) / (1.0 / capacity + across))
        if kind == "film":
            return film(h, outer)
        return held(outer) if kind == "held" else rising(h, inlet, outer, part)

    sections = [Stretch(length * share, outside(length * share)) for share in shares]
    if all(s.outside == INSULATED for s in sections):
        sections[-1] = Stretch(sections[-1].length, film(h, outer))
    if walls and chance(0.15):
        last = sections[-1]
        watts = 0.3 * capacity * rise
        sections[-1] = Stretch(last.length, last.outside, watts)
    ends = f"first = {{ {film(h, outer)} }}" if walls and chance(0.2) else ""
    return tube(
        f"random {number}", liquid, reynolds, diameter, sections, walls, inlet=inlet,
        profile="developed" if chance(0.3) else "flat", direction="-z" if chance(0.15) else "+z", ends=ends,
        dissipation=chance(0.5), at_most=int(random.choice(MESHES, p=WEIGHTS)),
    )  # fmt: skip


def ended() -> list[dict[str, str]]:
    if not CASES.exists():
        return []
    with CASES.open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def main(number: int) -> None:
    done = {row["case"] for row in ended()}
    if not CASES.exists():
        CASES.write_text(",".join(COLUMNS) + "\n", encoding="utf-8")
    for k in range(number):
        case = drawn(k)
        if case.title in done:
            continue
        begun, rows, cells, how = time.perf_counter(), [], 0, "converged"
        mesh = case.mesh.at_most or 0
        try:
            found = study.climb(case, study.MORE)
            rows, cells = study.triples("random", case.title, mesh, found, study.limits(found)), found.cells
        except study.NotConverged as reason:
            how = str(reason)
        study.write(TRIPLES, rows)
        row = case.title, mesh, cells, f"{time.perf_counter() - begun:.1f}", len(rows), how
        with CASES.open("a", encoding="utf-8", newline="") as file:
            csv.writer(file, lineterminator="\n").writerow(row)
        print(*row, sep="   ", flush=True)
    write_table()


def write_table() -> None:
    """RANDOM.md from the rows."""
    cases, all_rows = ended(), study.read(TRIPLES)
    of = study.distinct(study.judged(all_rows))
    good = sum(row["ended"] == "converged" for row in cases)
    lines = [
        "# Mesh errors of random cases",
        "",
        f"{len(cases)} cases drawn with seed {SEED}; {good} converged on their finest three meshes and two "
        "further halvings (the tool prints no mesh error without those three). "
        f"{len(of)} of {len(all_rows)} values judged: the others do not change between meshes, are another one in "
        f"other units, or have a limit that is not known to {study.SHARP:.0%} of the bar. "
        "Written by `python -m validation.bars.random_cases`.",
        "",
        *study.HEAD,
        study.line("all", of),
    ]
    lines += [study.line(f"at most {m} cells", [j for j in of if j.triple.mesh == m]) for m in MESHES]
    lines += [study.line(f"rule: {r}", [j for j in of if j.rule == r]) for r in sorted({j.rule for j in of})]
    lines += ["", "## Limits outside", "", *study.misses(of)]
    bad = [row for row in cases if row["ended"] != "converged"]
    if bad:
        lines += ["", "## Cases without a limit", ""]
        lines += [f"- {row['case']}: {row['ended']}" for row in bad]
    TABLE.write_text("\n".join(lines) + "\n", encoding="utf-8")


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else NUMBER)
