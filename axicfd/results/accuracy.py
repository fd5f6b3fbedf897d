"""The accuracy a case asks for, held against the mesh errors found, and where the mesh is to be finer.

Per cent mean a share of a scale: of temperatures the largest distance from the inlet temperature, of heats the larger
of what is put in or taken out and of what a stream takes up, of pressure the pressure drop, of other quantities
themselves.
"""

import math
from dataclasses import asdict, dataclass
from typing import Any

import numpy as np

from axicfd.case.model import Case
from axicfd.case.quantities import HEADLINE, ResultQuantity, depends_on_mesh, key_named, quantities, quantity
from axicfd.case.tolerance import Tolerance
from axicfd.mesh.grid import NOTHING
from axicfd.solver.state import Solution

SMALLEST_TEMPERATURE = 1e-6  # K; a smaller scale is zero: nothing is refined for a share of it
FINEST = 2.0  # most refinement of a segment at a time
HOPELESS = 1e6  # excess of a quantity that has no half-width yet, or a very large one

PER_CENT_OF_ALL = {(part, key) for part, known in HEADLINE.items() for key in known if part != "sensor"}
PER_CENT_OF_ALL |= {("stream", "mass_flow_kg_s")}  # where it is found from a pressure drop


def with_mesh_error(case: Case, tree: dict[str, Any]) -> list[ResultQuantity]:
    """The quantities with a value in a tree whose mesh error can be asked for."""
    return [q for q in quantities(case) if depends_on_mesh(case, q) and q.of(tree) is not None]


def scales(summary: dict[str, Any], solution: Solution) -> dict[str, Any]:
    """What per cent mean: {"temperature_K": ..., "heat_W": ..., "pressure_Pa": {stream: ...}}."""
    ledger = summary["ledger"]
    heats = *ledger["section"].values(), *ledger["ends"].values(), *ledger["generated"].values()
    gains = [abs(e.get("heat_gain_W") or 0.0) for e in summary["stream"].values()]
    t = np.abs(solution.heat.t[solution.grid.kind != NOTHING])
    return {
        "temperature_K": float(t.max()),
        "heat_W": max(math.fsum(abs(heat) for heat in heats), *gains),
        "pressure_Pa": {name: abs(e.get("pressure_drop_Pa") or 0.0) for name, e in summary["stream"].items()},
    }


@dataclass(frozen=True)
class Judged:
    """One quantity: the half-width of its mesh error, None where it has none, and the one allowed; SI."""

    half_width: float | None
    allowed: float

    @property
    def ratio(self) -> float:
        """Half-width over the allowed one; inf where there is no half-width."""
        return math.inf if self.half_width is None else self.half_width / self.allowed


@dataclass(frozen=True)
class Verdict:
    """The quantities asked for by their dotted path.

    excess_r, excess_z : what r and z add to a half-width, over half of what is allowed; of quantities outside it, where
                         it is more than 1
    """

    quantity: dict[str, Judged]
    scale: dict[str, Any]
    excess_r: dict[str, float]
    excess_z: dict[str, float]

    @property
    def worst(self) -> str | None:
        """The path of the quantity that is furthest outside, or nearest to it."""
        return max(self.quantity, key=lambda path: self.quantity[path].ratio, default=None)

    @property
    def ratio(self) -> float:
        """The largest half-width over the allowed one."""
        return max((judged.ratio for judged in self.quantity.values()), default=0.0)

    @property
    def reached(self) -> bool:
        return self.ratio <= 1.0


def judge(case: Case, summary: dict[str, Any], solution: Solution) -> Verdict:
    """Hold the mesh errors of a solved case against the accuracy it asks for.

    Each direction may have half of what is allowed, so that the one with the larger share is refined first.
    """
    bars = summary.get("numerical_uncertainty") or {}
    scale = scales(summary, solution)
    found: dict[str, Judged] = {}
    excess: tuple[dict[str, float], dict[str, float]] = {}, {}
    for asked, tolerance in _asked(case, summary).items():
        allowed = _allowed(tolerance, asked, summary, scale)
        if allowed is None:
            continue
        judged = Judged(asked.of(bars), allowed)
        found[".".join(asked.keys)] = judged
        if judged.ratio <= 1.0:
            continue
        errors = [asked.of(bars.get(word)) for word in ("from_r", "from_z")]
        total = sum(abs(e) for e in errors if e is not None)
        for k, error in enumerate(errors):
            share = 0.5 if error is None or total == 0.0 else abs(error) / total
            if 2.0 * share * judged.ratio > 1.0:
                excess[k][".".join(asked.keys)] = 2.0 * share * judged.ratio
    return Verdict(found, scale, *excess)


def changes(case: Case, tree: dict[str, Any], other: dict[str, Any]) -> dict[str, float]:
    """Values of one tree less those of another, of the quantities that both have, by their place in the tree."""
    both = [(".".join(q.keys), q.of(tree), q.of(other)) for q in with_mesh_error(case, tree)]
    return {path: a - b for path, a, b in both if a is not None and b is not None}


def factors(excess: dict[str, float], cells: list[int], changes: list[dict[str, float] | None]) -> list[float]:
    """How many times the cells each segment of one direction should have, at most FINEST at a time.

    excess  : as in `Verdict`
    cells   : of each segment
    changes : how the quantities change where that segment alone is coarser; None where it is not known. The excess of a
              quantity is shared out like them; alike to all cells where one is missing
    The fewest cells for which what is left of the excess, by the square of the cell size, is 1: segments are refined
    like the cube root of their share per cell. None is left far behind the others, or the changes from mesh to mesh no
    longer look like second order: each gets at least the square root of the largest factor.
    """
    most = [1.0] * len(cells)
    for path, amount in excess.items():
        found = [(change or {}).get(path, math.nan) for change in changes]
        shares = np.abs(found)
        if not shares.sum() > 0.0:  # nan where one is missing
            shares = np.array(cells, dtype=float)
        amount = min(amount, HOPELESS)
        shares *= amount / shares.sum()
        way = np.cbrt(shares / cells)
        low, high = 0.0, math.sqrt(amount) / way[way > 0.0].min()
        for _ in range(60):
            middle = 0.5 * (low + high)
            enough = float((shares / np.maximum(1.0, middle * way) ** 2).sum()) <= 1.0
            low, high = (low, middle) if enough else (middle, high)
        most = [max(a, min(FINEST, high * b)) for a, b in zip(most, way.tolist(), strict=True)]
    least = max(most, default=1.0) ** 0.5
    return [max(a, least) for a in most]


def as_summary(verdict: Verdict, stopped_by: str | None, why: str, solves: int) -> dict[str, Any]:
    """The entry `accuracy` of the summary.

    stopped_by : None, "cells", "memory", "mesh" (counts fixed by the case), "solves" (too many), "convergence", "model"
    why        : the sentence about what stopped it
    """
    if verdict.reached and stopped_by is None:
        text = "The accuracy asked for is reached."
    else:
        worst = f"`{verdict.worst}`" if verdict.worst else "the mesh error"
        judged = verdict.quantity.get(verdict.worst or "")
        known = (
            ""
            if judged is None or judged.half_width is None
            else f", {float(f'{judged.ratio:.3g}'):.10g} times what is allowed"
        )
        text = f"The accuracy asked for is not reached, by most in {worst}{known}: {why}"
    return {
        "reached": verdict.reached and stopped_by is None,
        "stopped_by": stopped_by,
        "text": text,
        "solves": solves,
        "worst": verdict.worst,
        "scale": verdict.scale,
        "quantity": {path: asdict(judged) for path, judged in verdict.quantity.items()},
    }


def _asked(case: Case, tree: dict[str, Any]) -> dict[ResultQuantity, Tolerance]:
    """The quantities that have a value, with the tolerance of each; a path counts before a name for all."""
    wanted = case.solve.accuracy
    have = with_mesh_error(case, tree)
    if wanted is None:
        return {}
    if isinstance(wanted, Tolerance):
        return {q: wanted for q in have if (q.keys[0], q.key) in PER_CENT_OF_ALL}
    asked: dict[ResultQuantity, Tolerance] = {}
    for name, tolerance in sorted(wanted.items(), key=lambda entry: "." in entry[0]):
        one = quantity(case, name) if "." in name else None
        for q in have:
            if q == one or (one is None and (q.keys[0], q.key) == key_named(name)):
                asked[q] = tolerance
    return asked


def _allowed(
    tolerance: Tolerance, asked: ResultQuantity, summary: dict[str, Any], scale: dict[str, Any]
) -> float | None:
    """The half-width allowed in SI, or None where it would be a share of nothing."""
    if tolerance.amount is not None:
        return tolerance.amount
    assert tolerance.per_cent is not None
    share = tolerance.per_cent / 100.0
    kind = asked.row.kind
    if kind == "pressure":
        drops = scale["pressure_Pa"]
        return share * max((drops[name] for name in asked.keys if name in drops), default=max(drops.values())) or None
    if kind not in ("temperature", "temperature_difference", "heat"):
        return share * abs(asked.of(summary) or 0.0) or None
    if scale["temperature_K"] <= SMALLEST_TEMPERATURE:
        return None  # heats are round-off too where nothing is warmed or cooled
    return share * scale["heat_W" if kind == "heat" else "temperature_K"] or None
