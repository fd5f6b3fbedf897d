"""Solve the rows of a plan that are not solved yet, all on the meshes of the base case, and keep each as it ends.

What is kept, and where, is the store's business; a row is known by its case, the meshes and the version, so that the
same row is never solved twice and a changed one always.
"""

import hashlib
import json
import time
from collections.abc import Callable, Iterable, Mapping
from concurrent.futures import Executor
from dataclasses import asdict, dataclass, field, replace
from typing import Any, Protocol

from axicfd.case.layout import layout
from axicfd.case.model import Case
from axicfd.case.quantities import quantities, quantity
from axicfd.case.write import canonical
from axicfd.errors import RefusedModel
from axicfd.mesh.build import Family, Segment, family
from axicfd.mesh.spacing import Map
from axicfd.results.cautions import standing
from axicfd.results.result import Result
from axicfd.variants.plan import Plan, Row
from axicfd.variants.runner import SOLVED, Job, Outcome, run
from axicfd.version import VERSION


@dataclass(frozen=True)
class Record:
    """What came of a row.

    key         : of the row, see `row_key`
    values      : headline and limited quantities by their dotted name with unit suffix, SI; only of a solved row
    half_widths : of their mesh errors, same names        limits : path -> verdict
    cautions    : codes of those that stand               cells  : of the finest mesh; None where nothing was solved
    fields      : whether the whole result was kept; None where nobody asked for it
    """

    key: str
    status: str
    message: str
    seconds: float
    values: Mapping[str, float | None] = field(default_factory=dict)
    half_widths: Mapping[str, float | None] = field(default_factory=dict)
    limits: Mapping[str, str] = field(default_factory=dict)
    cautions: tuple[str, ...] = ()
    cells: int | None = None
    fields: bool | None = None


class Store(Protocol):
    """Where records are kept."""

    def records(self, keys: Iterable[str]) -> Mapping[str, Record]:
        """Those of the keys that are there."""

    def put(self, record: Record, result: Result | None) -> None:
        """Keep a record, at once and for good, with the whole result where there is one to keep."""


@dataclass(frozen=True)
class Progress:
    """How far a sweep has come.

    done of rows : with a status, found ones included        failed : those of them that are not solved
    seconds      : since the start        left : estimate of the seconds to go, None before the first row ended
    """

    done: int
    failed: int
    rows: int
    seconds: float
    left: float | None


def solve_rows(
    keyed: Mapping[str, Job],
    store: Store,
    *,
    on_progress: Callable[[Progress], Any] | None = None,
    workers: int | None = None,
    executor: Callable[[], Executor] | None = None,
    keep_fields: bool = False,
    retry: bool = False,
) -> None:
    """Solve the rows that the store lacks.

    keyed       : what `jobs_of` made of a plan
    workers, executor : as in `runner.run`
    keep_fields : hand whole results to the store; rows stored without are solved again
    retry       : solve rows that ended otherwise than solved again
    """
    found = store.records(keyed)
    left = {key: job for key, job in keyed.items() if _is_to_do(found.get(key), keep_fields, retry)}
    done, failed = len(keyed) - len(left), sum(r.status != SOLVED for k, r in found.items() if k not in left)
    begun = time.monotonic()

    def tell(ended: int = 0) -> None:
        if on_progress is not None:
            seconds = time.monotonic() - begun
            to_go = seconds / ended * (len(left) - ended) if ended else None
            on_progress(Progress(done + ended, failed, len(keyed), seconds, to_go))

    ended = 0

    def keep(outcome: Outcome) -> None:
        nonlocal ended, failed
        record, result = _record(outcome, keep_fields)
        store.put(record, result)
        ended += 1
        failed += outcome.status != SOLVED
        tell(ended)

    tell()
    made = with_fields if keep_fields else tabulated
    run(left.values(), keep, keep=made, workers=workers, executor=executor)


def _is_to_do(found: Record | None, keep_fields: bool, retry: bool) -> bool:
    if found is None or (retry and found.status != SOLVED):
        return True
    return keep_fields and found.fields is None


# ------------------------------------------------------------------------------------------- rows and meshes


def jobs_of(plan: Plan, meshes: Family) -> tuple[dict[str, Job], dict[int, str]]:
    """(key -> job, number of a row -> key); equal rows share one job."""
    jobs: dict[str, Job] = {}
    keys: dict[int, str] = {}
    text = meshes_text(meshes)
    for row in plan.rows:
        like = None if _chooses_its_own(row.case, plan.base) else meshes
        key = row_key(row, text if like is not None else "")
        keys[row.number] = key
        jobs.setdefault(key, Job(key, row.case, like))
    return jobs, keys


def row_key(row: Row, meshes: str) -> str:
    """Of all that a row's answer depends on: its case, the meshes and the version."""
    return hashlib.sha256("\n".join((VERSION, meshes, canonical(row.case))).encode()).hexdigest()


def shared_meshes(base: Case) -> Family:
    """The meshes that all rows take over; where the base asks for an accuracy it is solved for them."""
    if base.solve.accuracy is not None:
        from axicfd.pipeline import solve

        try:
            return solve(base).meshes
        except RefusedModel:  # the base case itself need not be among the rows
            pass
    return family(base, layout(base))


def meshes_text(meshes: Family) -> str:
    """Counts and maps of a family as JSON: all that its variants take over."""
    return json.dumps([[asdict(segment) for segment in line] for line in (meshes.radial, meshes.axial)])


def meshes_of(text: str, base: Case) -> Family:
    """The family of the base case with the counts and maps of a text that `meshes_text` made."""
    radial, axial = (tuple(Segment(**{**s, "map": Map(**s["map"])}) for s in line) for line in json.loads(text))
    return replace(family(base, layout(base)), radial=radial, axial=axial)


def _chooses_its_own(case: Case, base: Case) -> bool:
    """Whether a variant changes what chooses a mesh: then that has to act."""
    return _mesh_choice(case) != _mesh_choice(base)


def _mesh_choice(case: Case) -> tuple:
    stacks = [case.layer, *(section.layer or () for section in case.section)]
    return case.mesh, case.solve.accuracy, [[layer.cells_across for layer in stack] for stack in stacks]


# ------------------------------------------------------------------------------------------- what is kept


def tabulated(result: Result) -> dict[str, Any]:
    """The part of a `Record` that a Result gives."""
    summary = result.summary
    values: dict[str, float | None] = {}
    half_widths: dict[str, float | None] = {}
    if result.converged and not summary.get("refused"):
        case = result.case
        for of in (*quantities(case, headline_only=True), *(quantity(case, path) for path in case.limits)):
            name = ".".join(of.keys)
            values[name] = of.of(summary)
            half_widths[name] = of.of(summary.get("numerical_uncertainty"))
    limits = {path: str(found["verdict"]) for path, found in (summary.get("limits") or {}).items()}
    return {
        "values": values,
        "half_widths": half_widths,
        "limits": limits if values else {},
        "cautions": tuple(dict.fromkeys(str(caution["code"]) for caution in standing(summary["cautions"]))),
        "cells": int(summary["cells"]),
    }


def with_fields(result: Result) -> tuple[dict[str, Any], Result]:
    """The same with the whole result."""
    return tabulated(result), result


def _record(outcome: Outcome, keep_fields: bool) -> tuple[Record, Result | None]:
    found, result = outcome.answer if keep_fields and outcome.answer is not None else (outcome.answer, None)
    message = "; ".join(outcome.message.splitlines())
    fields = result is not None if keep_fields else None
    record = Record(outcome.key, outcome.status, message, outcome.seconds, **(found or {}), fields=fields)  # type: ignore[arg-type]
    return record, result
