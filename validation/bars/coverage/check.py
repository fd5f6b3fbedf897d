"""Limits inside the printed mesh errors: the cases of five classes on three meshes each, solved as a user would.

Writes TABLE.md beside it. The limits come from two more halvings (`validation.bars.limits`).
"""

from functools import lru_cache
from pathlib import Path
from typing import Any

from axicfd.pipeline import solve
from axicfd.results.result import Result
from validation.bars import study
from validation.bars.classes import CLASSES, SMOOTH, cases
from validation.bars.limits import MESHES, TRIPLES
from validation.bars.tube import Liquid, Stretch, tube
from validation.common import Row

HERE = Path(__file__).parent
SOURCE = "limits from two more halvings (triples.csv); what is asked of the bars is our own choice"
ENOUGH, ALL_INSIDE, CLASS_INSIDE = 150, 0.95, 0.90
FATTEST = 10.0  # median of bar over error where everything is smooth
HALF, NINETY = 0.003, 0.01  # of the scale, on the mesh that the tool chooses


@lru_cache
def judged() -> list[study.Judged]:
    """Every quantity of every case and mesh that can be judged, as the tool prints it."""
    stored: dict[tuple[str, int], list[study.Triple]] = {}
    for triple in study.read(TRIPLES):
        stored.setdefault((triple.case, triple.mesh), []).append(triple)
    found = []
    for name, (_, case) in cases().items():
        for mesh in MESHES:
            result = solve(case if mesh == MESHES[-1] else case.replace({"mesh.at_most": mesh}))
            bars = dict(study.leaves(result.summary.get("numerical_uncertainty", {})))
            for t in stored[name, mesh]:
                if t.quantity not in bars:
                    continue
                rule = _at(result.summary["numerical_uncertainty"]["rule"], t.quantity)
                one = study.against(t, _number(result, t.quantity), bars[t.quantity], rule)
                if one is not None:
                    found.append(one)
    return study.distinct(found)


def _number(result: Result, quantity: str) -> float:
    value = result[quantity]
    return float("nan") if value is None else float(value)


def _at(tree: dict[str, Any], path: str) -> str:
    node: Any = tree
    for part in path.split("."):
        node = node[part]
    return str(node)


def check() -> list[Row]:
    of = judged()
    write_table(of)
    total = study.count(of)
    chosen = study.count([j for j in of if j.triple.mesh == MESHES[-1]])
    rows = [
        _least("(quantity, case, mesh) triples judged", total.triples, ENOUGH),
        _least("limits inside, all classes", total.inside, ALL_INSIDE),
    ]
    for group in CLASSES:
        here = study.count([j for j in of if j.triple.group == group])
        rows.append(_least(f"limits inside, {group}", here.inside, CLASS_INSIDE))
        fattest = FATTEST if group == SMOOTH else None
        rows.append(_most(f"median bar over error, {group}", here.over_error, fattest))
    rows += exact()
    rows.append(_most("median bar on the chosen mesh, share of the scale", chosen.half, HALF))
    rows.append(_most("90th percentile of the bar on the chosen mesh, share of the scale", chosen.ninety, NINETY))
    return rows


def exact() -> list[Row]:
    """Developed flow from inlet to outlet: the bars of the three meshes hold the closed form."""
    liquid, reynolds, diameter, length = Liquid(), 100.0, 0.01, 0.2
    case = tube("developed flow", liquid, reynolds, 1e3 * diameter, [Stretch(1e3 * length)], profile="developed")
    mean = reynolds * liquid.viscosity / (liquid.density * diameter)
    wanted = {
        "pressure_drop_Pa": 32.0 * liquid.viscosity * mean * length / diameter**2,
        "largest_wall_shear_stress_Pa": 8.0 * liquid.viscosity * mean / diameter,
    }
    rows = []
    for mesh in MESHES:
        result = solve(case.replace({"mesh.at_most": mesh}))
        bars = result.summary["numerical_uncertainty"]["stream"]["liquid"]
        for key, value in wanted.items():
            found = _number(result, f"stream.liquid.{key}")
            what = f"{key} of developed flow, at most {mesh} cells: allowed is its bar"
            rows.append(Row(what, found, value, bars[key] / value, "Hagen-Poiseuille"))
    return rows


def _least(what: str, found: float, wanted: float) -> Row:
    """A row that fails below what is wanted: the shortfall counts, more is as good."""
    return Row(f"{what} (at least {wanted:g})", found, max(wanted, found), 0.0, SOURCE)


def _most(what: str, found: float, allowed: float | None) -> Row:
    if allowed is None:
        return Row(what, found, found, None, SOURCE, note="only asked of the smooth class")
    return Row(f"{what} (at most {allowed:g})", found, min(allowed, found), 0.0, SOURCE)


def write_table(of: list[study.Judged]) -> None:
    """TABLE.md"""
    lines = [
        "# Mesh errors against limits",
        "",
        f"Fifteen cases in five classes, each on {', '.join(map(str, MESHES[:-1]))} and {MESHES[-1]} cells at most "
        "(the last is the tool's own choice). Written by the check.",
        "",
        *study.HEAD,
        study.line("all", of),
    ]
    lines += [study.line(g, [j for j in of if j.triple.group == g]) for g in CLASSES]
    for mesh in MESHES:
        lines.append(study.line(f"at most {mesh} cells", [j for j in of if j.triple.mesh == mesh]))
    for group in CLASSES:
        for mesh in MESHES:
            here = [j for j in of if (j.triple.group, j.triple.mesh) == (group, mesh)]
            lines.append(study.line(f"{group}, at most {mesh} cells", here))
    lines += [study.line(f"rule: {r}", [j for j in of if j.rule == r]) for r in sorted({j.rule for j in of})]
    lines += ["", "## Limits outside", "", *study.misses(of)]
    (HERE / "TABLE.md").write_text("\n".join(lines) + "\n", encoding="utf-8")
