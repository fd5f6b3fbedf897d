"""Climb the cases of the classes with two more halvings and keep what every quantity does in coverage/triples.csv.

    python -m validation.bars.limits

Resumable: a case that has rows is not solved again. The check solves the cases anew and takes the limits from the file.
"""

from pathlib import Path

from validation.bars import study
from validation.bars.classes import cases

TRIPLES = Path(__file__).parent / "coverage" / "triples.csv"
MESHES = 2_500, 10_000, 40_000  # `at_most`; the last is what the tool chooses by itself


def main() -> None:
    done = {t.case for t in study.read(TRIPLES)}
    for name, (group, case) in cases().items():
        if name in done:
            continue
        own = study.climb(case, study.MORE)
        limits = study.limits(own)
        rows = []
        for mesh in MESHES:
            found = own if mesh == MESHES[-1] else study.climb(case.replace({"mesh.at_most": mesh}))
            rows += study.triples(group, name, mesh, found, limits)
        study.write(TRIPLES, rows)
        print(f"{name}: {len(rows)} triples, {own.seconds:.0f} s", flush=True)


if __name__ == "__main__":
    main()
