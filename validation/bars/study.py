"""One case climbed past its own mesh: the values of every quantity on nested meshes, and the limit they go to.

The rows hold values and not verdicts, so that another rule can be tried without solving anything again.
"""

import csv
import math
import time
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from axicfd.case.layout import layout
from axicfd.case.model import Case
from axicfd.mesh.build import LEVELS, family
from axicfd.pipeline import NESTED, START_BELOW
from axicfd.results import axial, summary, uncertainty
from axicfd.results.result import WITH_BARS, least_widths
from axicfd.solver.solve import solve_on

MORE = 2  # halvings beyond the mesh that is judged
SHARP = 0.25  # a limit known to this share of a bar can judge it
COLUMNS = "class", "case", "mesh", "cells", "quantity", "v3", "v2", "v1", "v0", "spacing", "scale", "limit", "known_to"


@dataclass(frozen=True)
class Triple:
    """One quantity of one case on one mesh.

    group   : class of the case        mesh : `at_most` of the case        cells : of the finest mesh
    values  : on the last four nested meshes, coarsest first
    spacing : half-width of a place [m], by its cell, its last move and the flatness of its curve; nan for what is none
    scale   : what per cent are counted of        limit, known_to : where the values go, and how sharply that is known
    """

    group: str
    case: str
    mesh: int
    cells: int
    quantity: str
    values: tuple[float, ...]
    spacing: float
    scale: float
    limit: float
    known_to: float

    @property
    def printed(self) -> uncertainty.Estimate:
        """Value and half-width as the tool prints them."""
        if math.isfinite(self.spacing):
            return uncertainty.Estimate(self.values[-1], self.spacing, None, uncertainty.SPACING)
        return uncertainty.estimate(list(self.values))


@dataclass(frozen=True)
class Climb:
    """The headline trees of a case on nested meshes, coarsest first: those of its own mesh, and of further halvings."""

    cells: int
    judged: list[dict[str, Any]]
    finer: list[dict[str, Any]]
    least: uncertainty.LeastWidths  # of the case's mesh
    seconds: float


PATIENCE = 120.0  # seconds of one processor that a case may take


class NotConverged(Exception):
    """A mesh that does not converge, so that no mesh error is printed; or a case that takes too long."""


def climb(case: Case, more: int = 0) -> Climb:
    """The trees of the meshes that the tool solves in full, and of `more` halvings beyond."""
    begun, busy = time.perf_counter(), time.process_time()
    place = layout(case)
    meshes = family(case, place)
    solution, trees = None, []

    def not_for_ever(iteration: int, residual: float) -> None:
        if time.process_time() - busy > PATIENCE:
            raise NotConverged(f"level {level}: {residual:.1e} after {PATIENCE:.0f} s")

    for level in range(LEVELS - 1, -1 - more, -1):
        counts = level < NESTED
        below = case.solve.stop_below if counts else max(START_BELOW, case.solve.stop_below)
        solution = solve_on(case, meshes.grid(level), solution, below, not_for_ever)
        if not counts or (level == NESTED - 1 and not solution.converged):  # three meshes are enough for mesh errors
            solution = None if solution.stop_reason == "diverged" else solution
            continue
        if not solution.converged:
            raise NotConverged(f"level {level}: {solution.stop_reason} at {solution.residual:.1e}")
        views = axial.stream_views(case, solution)
        trees.append(summary.summary(case, place, solution, views))
        if level == 0:
            least = least_widths(case, trees[-1], solution, views)
    own = len(trees) - more
    judged, finer = trees[:own], trees[own:]
    return Climb(meshes.cells, judged, finer, least, time.perf_counter() - begun)


def leaves(tree: dict[str, Any], path: str = "") -> Iterator[tuple[str, float]]:
    """(dotted path, number) of the parts of a tree that get mesh errors."""
    for key, value in tree.items():
        if (not path and key not in WITH_BARS) or key == "why":
            continue
        if isinstance(value, dict):
            yield from leaves(value, f"{path}{key}.")
        elif isinstance(value, int | float) and not isinstance(value, bool):
            yield path + key, float(value)


def limit(values: list[float]) -> tuple[float, float]:
    """Where values on four nested meshes go, and how sharply that is known; sharper than any mesh error printed.

    Fixed second order where the last changes have a ratio of 3.2 to 5, else the observed order (Aitken); known to the
    change that one mesh less would make, or a tenth of the last correction.
    """

    def extrapolated(a: float, b: float, c: float) -> float:
        older, last = b - a, c - b
        ratio = older / last if last else math.inf
        if 3.2 <= ratio <= 5.0:
            return c + last / 3.0
        return c + last / (ratio - 1.0) if ratio > 1.3 else math.nan

    a, b, c, d = values
    now, before = extrapolated(b, c, d), extrapolated(a, b, c)
    if not math.isfinite(now) or not math.isfinite(before):
        return d, max(abs(d - c), abs(c - b) / 2.0)
    return now, max(abs(now - before) / 2.0, 0.1 * abs(now - d))


def triples(group: str, name: str, mesh: int, found: Climb, limits: dict[str, tuple[float, float]]) -> list[Triple]:
    """Every quantity of a climb that has a known limit and a value on all of its meshes."""
    of, flat = found.least.floor.scales, [dict(leaves(tree)) for tree in found.judged]
    _, widths, _ = uncertainty.estimate_tree(
        [{key: tree[key] for key in WITH_BARS} for tree in found.judged], found.least
    )
    bars = dict(leaves(widths))
    rows = []
    for quantity, value in flat[-1].items():
        values = tuple(tree.get(quantity, math.nan) for tree in flat)
        if quantity not in limits or not all(math.isfinite(v) for v in values[-3:]):
            continue
        spacing = bars[quantity] if quantity.endswith(uncertainty.PLACE) else math.nan
        if not math.isfinite(values[0]):
            values = values[1:]
        rows.append(
            Triple(
                group,
                name,
                mesh,
                found.cells,
                quantity,
                values,
                spacing,
                uncertainty.scale(tuple(quantity.split(".")), value, of),
                *limits[quantity],
            )
        )
    return rows


def limits(found: Climb) -> dict[str, tuple[float, float]]:
    """The limits of all quantities of a climb with two more halvings."""
    last = [dict(leaves(tree)) for tree in [*found.judged, *found.finer][-4:]]
    result = {}
    for quantity in last[-1]:
        values = [tree.get(quantity, math.nan) for tree in last]
        if all(math.isfinite(v) for v in values):
            result[quantity] = limit(values)
    return result


# --------------------------------------------------------------------------------------------- files


def write(path: Path, rows: list[Triple]) -> None:
    """Append rows to a file; the header comes with the first."""
    new = not path.exists()
    with path.open("a", encoding="utf-8", newline="") as file:
        writer = csv.writer(file, lineterminator="\n")
        if new:
            writer.writerow(COLUMNS)
        for t in rows:
            values = [""] * (4 - len(t.values)) + [repr(v) for v in t.values]
            spacing = "" if math.isnan(t.spacing) else f"{t.spacing:.4g}"
            tail = f"{t.scale:.6g}", repr(t.limit), f"{t.known_to:.3g}"
            writer.writerow([t.group, t.case, t.mesh, t.cells, t.quantity, *values, spacing, *tail])


def read(path: Path) -> list[Triple]:
    if not path.exists():
        return []
    with path.open(encoding="utf-8", newline="") as file:
        return [
            Triple(
                r["class"], r["case"], int(r["mesh"]), int(r["cells"]), r["quantity"],
                tuple(float(r[k]) for k in ("v3", "v2", "v1", "v0") if r[k]),
                float(r["spacing"] or "nan"), float(r["scale"]), float(r["limit"]), float(r["known_to"]),
            )
            for r in csv.DictReader(file)
        ]  # fmt: skip


# --------------------------------------------------------------------------------------------- counting


@dataclass(frozen=True)
class Judged:
    """A printed value and bar against the limit; error, bar and known_to in the quantity's unit."""

    triple: Triple
    rule: str
    error: float
    bar: float

    @property
    def inside(self) -> bool:
        return self.error <= self.bar


SAME_CHANGES = 1e-4  # relative difference of changes between meshes below which two quantities are one
NOTHING = 1e-7  # shares of the scale below which error and bar are those of the iteration: a balance fixes the value


def judged(rows: list[Triple]) -> list[Judged]:
    """The rows that can be judged: what changes between meshes, with a limit sharp enough, or clearly outside.

    A limit too blunt to tell may only tell against a bar, never for it.
    """
    found = []
    for t in rows:
        printed = t.printed
        if printed.half_width is not None:
            one = against(t, printed.value, printed.half_width, printed.rule)
            if one is not None:
                found.append(one)
    return found


def against(t: Triple, value: float, bar: float, rule: str) -> Judged | None:
    """A printed value and its bar against the limit, if that can be judged."""
    one = Judged(t, rule, abs(value - t.limit), bar)
    if t.scale == 0.0 or max(one.bar, one.error) <= NOTHING * t.scale:
        return None
    return one if t.known_to <= SHARP * one.bar or one.error > one.bar + t.known_to else None


def distinct(of: list[Judged]) -> list[Judged]:
    """Without those that are another quantity of their case in other units, as the heat is to the outlet temperature:
    their changes from mesh to mesh are in proportion, and they would count one error several times.
    """
    kept: list[Judged] = []
    seen: dict[tuple[str, int], list[np.ndarray]] = {}
    for j in of:
        changes = np.diff(j.triple.values)
        shape = changes / changes[-1] if changes[-1] else changes
        others = seen.setdefault((j.triple.case, j.triple.mesh), [])
        if not any(len(shape) == len(one) and np.allclose(shape, one, rtol=SAME_CHANGES) for one in others):
            others.append(shape)
            kept.append(j)
    return kept


@dataclass(frozen=True)
class Count:
    """How a set of judged bars did."""

    triples: int
    inside: float
    over_error: float  # median of bar over error
    half: float  # median of bar over scale
    ninety: float  # 90th percentile of bar over scale


def count(of: list[Judged]) -> Count:
    if not of:
        return Count(0, math.nan, math.nan, math.nan, math.nan)
    values = [j for j in of if j.rule != uncertainty.SPACING] or of  # the bar of a place is its cell, not an estimate
    ratio = [j.bar / max(j.error, 1e-300) for j in values]
    share = [j.bar / j.triple.scale for j in values]
    inside = float(np.mean([j.inside for j in of]))
    return Count(len(of), inside, float(np.median(ratio)), float(np.median(share)), float(np.quantile(share, 0.9)))


def line(name: str, of: list[Judged]) -> str:
    """A line of a table: name, triples, inside, bar over error, bar over scale."""
    c = count(of)
    if not c.triples:
        return f"| {name} | 0 | | | | |"
    over = f"{c.over_error:.1f}" if c.over_error < 1e4 else "no error"
    return f"| {name} | {c.triples} | {c.inside:.1%} | {over} | {c.half:.4%} | {c.ninety:.4%} |"


HEAD = [
    "| | triples | inside | median bar / error | median bar / scale | 90th percentile bar / scale |",
    "|---|---|---|---|---|---|",
]


def misses(of: list[Judged]) -> list[str]:
    """A table of the limits outside, worst first."""
    out = sorted((j for j in of if not j.inside), key=lambda j: -j.error / max(j.bar, 1e-300))
    lines = ["| class | case | mesh | quantity | rule | error / bar | error / scale |", "|---|---|---|---|---|---|---|"]
    lines += [
        f"| {j.triple.group} | {j.triple.case} | {j.triple.mesh} | {j.triple.quantity} | {j.rule} | "
        f"{j.error / max(j.bar, 1e-300):.2g} | {j.error / j.triple.scale:.1e} |"
        for j in out
    ]
    return lines
