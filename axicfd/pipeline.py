"""solve(case) -> Result: climb the nested meshes of a case and interpret the finest.

The only place that joins mesh, solver and results; the command line, validation and scripts go through it.
"""

import time
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from axicfd.case.layout import layout
from axicfd.case.model import Case, expect_case
from axicfd.errors import RefusedModel
from axicfd.given_drop import GivenDrop
from axicfd.mesh.build import LEVELS, NEST, Family, family
from axicfd.mesh.grid import Grid
from axicfd.results import accuracy, cautions
from axicfd.results.accuracy import Verdict
from axicfd.results.axial import stream_view, stream_views
from axicfd.results.result import Result, make_result, tree_with_bars, with_accuracy
from axicfd.results.summary import summary
from axicfd.results.uncertainty import estimate
from axicfd.solver.solve import OnCheck, solve_on
from axicfd.solver.state import Solution
from axicfd.solver.warm_up import warm_up
from axicfd.version import VERSION

START_BELOW = 1e-5  # residual at which a coarse mesh that only gives a start hands over to the next one
NESTED = 4  # finest meshes that are solved in full, for the mesh error
LOOK_BELOW = 1e-6  # residual for a look on a coarse mesh
REFINED_TO = 400_000  # cells up to which a mesh is refined for an accuracy, where the case does not say
SOLVES = 10  # meshes tried for an accuracy


@dataclass(frozen=True)
class Progress:
    """How far a solve has come.

    level of levels : mesh, 1 is the coarsest        cells : of that mesh
    outlet_temperature [K], pressure_drop [Pa] : as the finished meshes tell them, None before one or without flow
    outlet_half_width [K], drop_half_width [Pa] : of their mesh errors, None where fewer than three meshes tell them
    seconds : since the start        residual : the last seen        done : this mesh is finished
    refinements : how often the whole family of meshes was made finer for the accuracy asked for
    """

    level: int
    levels: int
    cells: int
    outlet_temperature: float | None
    pressure_drop: float | None
    seconds: float
    residual: float
    done: bool
    refinements: int = 0
    outlet_half_width: float | None = None
    drop_half_width: float | None = None


OnProgress = Callable[[Progress], Any]
SolveOne = Callable[[Grid, Solution | None, float, OnCheck | None], Solution]


def solve(
    case: Case, on_progress: OnProgress | None = None, *, halvings: int = 0, like: Family | None = None
) -> Result:
    """Solve a case on the meshes it chooses (or its `[mesh]` asks for), or as fine as its `accuracy` needs.

    on_progress : called with a `Progress` now and then
    halvings    : solve on a mesh refined this many times more, beyond the case's own finest
    like        : meshes of another case, whose counts and maps are taken over as far as sections and layers
                  correspond, so that answers of variants do not jump with their meshes; `accuracy` is then not sought
    Raises `RefusedModel` where the laminar model is known not to hold before anything is solved. A solve that does not
    converge is a Result with `converged` False; an accuracy that is not reached is said in `summary["accuracy"]`.
    """
    expect_case(case)
    cautions.before(case)  # raises where the model is refused
    warm_up()
    climb = _Climb(case, on_progress, halvings)
    meshes = family(case, layout(case))
    if like is not None:
        return climb.on(meshes.like(like))
    return climb.on(meshes) if case.solve.accuracy is None else _accurate(case, meshes, climb)


def look(case: Case, like: Family) -> dict[str, Any]:
    """The headline tree of a case on one coarse mesh, to a few per cent: where to search, at a fifteenth of a solve.

    Raises `RefusedModel` where `solve` would, and where its answer would be refused or no solution is found.
    """
    cautions.before(case)
    warm_up()
    meshes = family(case, layout(case)).like(like)
    solution = _solver(case, meshes)(meshes.grid(meshes.rough_level), None, LOOK_BELOW, None)
    refused = cautions.refusal(case, meshes.layout, solution)
    if refused or not solution.converged:
        raise RefusedModel(refused or "The solve on a coarse mesh did not converge.")
    return summary(case, meshes.layout, solution, stream_views(case, solution))


class _Climb:
    """From the coarsest mesh of a family to the finest, as often as asked; progress and seconds run on."""

    def __init__(self, case: Case, on_progress: OnProgress | None, halvings: int):
        self.case, self.on_progress, self.halvings = case, on_progress, halvings
        self.begun = time.perf_counter()
        self._headlines: list[tuple[float, float]] = []  # of the meshes that mesh errors come from, coarsest first

    def on(self, meshes: Family, refinements: int = 0) -> Result:
        """Solve on the meshes of a family, each starting from the one before, and interpret them."""
        case, levels = self.case, LEVELS + self.halvings
        solve_one = _solver(case, meshes)
        start: Solution | None = None  # nothing is taken from a mesh too coarse to converge on
        solutions: list[Solution] = []
        history = []
        self._headlines = []
        for number, level in enumerate(range(LEVELS - 1, -1 - self.halvings, -1), start=1):
            grid = meshes.grid(level)

            def tell(residual: float, done: bool, number: int = number, cells: int = grid.cells) -> None:
                if self.on_progress is not None:
                    seconds = time.perf_counter() - self.begun
                    (outlet, outlet_half), (drop, drop_half) = self._so_far()
                    event = Progress(
                        number,
                        levels,
                        cells,
                        outlet,
                        drop,
                        seconds,
                        residual,
                        done,
                        refinements,
                        outlet_half,
                        drop_half,
                    )
                    self.on_progress(event)

            def looked(_: int, residual: float, tell: Callable[[float, bool], None] = tell) -> None:
                tell(residual, False)

            counts = number > levels - NESTED
            below = case.solve.stop_below if counts else max(START_BELOW, case.solve.stop_below)
            solution = solve_one(grid, start, below, looked)
            history.append((number, grid.cells, solution.iterations, solution.residual))
            headline = _headline(case, solution)
            if headline is not None:
                go_on = number > levels - NESTED + 1 and solution.converged
                self._headlines = [*(self._headlines if go_on else []), headline]
            tell(solution.residual, True)
            if solution.converged:  # mesh errors come from the finest meshes in a row that converged
                solutions = [*(s for s in solutions if s.converged), solution][-NESTED:]
            else:
                solutions = [solution]
            start = None if solution.stop_reason == "diverged" else solution
        halves = self._halves(solve_one, meshes, solutions)
        seconds = time.perf_counter() - self.begun
        return make_result(case, meshes, solutions, history, seconds, VERSION, halves)

    def _so_far(self) -> list[tuple[float | None, float | None]]:
        """(value, half-width) of the outlet temperature and of the pressure drop."""
        if not self._headlines:
            return [(None, None)] * 2
        if len(self._headlines) < 3:
            return [(value, None) for value in self._headlines[-1]]
        found = [estimate(list(values)) for values in zip(*self._headlines, strict=True)]
        return [(one.value, one.half_width) for one in found]

    def _halves(
        self, solve_one: SolveOne, meshes: Family, solutions: list[Solution]
    ) -> tuple[Solution, Solution] | None:
        """Solutions on the second finest mesh, coarsened along r only and along z only; a quarter of the finest's cost.

        None where the mesh errors have no sound base.
        """
        if len(solutions) < 3 or not all(s.converged for s in solutions):
            return None
        medium, below = 1 - self.halvings, self.case.solve.stop_below
        coarse_r = solve_one(meshes.grid(medium, medium + 1), solutions[-2], below, None)
        coarse_z = solve_one(meshes.grid(medium + 1, medium), solutions[-2], below, None)
        return (coarse_r, coarse_z) if coarse_r.converged and coarse_z.converged else None

    def factors(self, meshes: Family, result: Result, excess: dict[str, float], way: str) -> list[float]:
        """How many times the cells each radial or axial segment should have.

        On the third finest mesh one segment after the other is coarsened once more; each such solve takes a sixteenth
        of the finest's cells.
        """
        segments = meshes.radial if way == "radial" else meshes.axial
        refined = [k for k, segment in enumerate(segments) if segment.cells >= NEST]
        changes: list[dict[str, float] | None] = [None] * len(refined)
        if excess and len(refined) > 1 and len(result.nested) > 2:
            changes = [self._change(meshes.coarsened(**{way: k}), result) for k in refined]
        found = [1.0] * len(segments)
        wanted = accuracy.factors(excess, [segments[k].cells for k in refined], changes)
        for k, factor in zip(refined, wanted, strict=True):
            found[k] = factor
        return found

    def _change(self, coarser: Family, result: Result) -> dict[str, float] | None:
        """Difference of the quantities between the third finest mesh and the same one of a family with fewer cells."""
        grid = coarser.grid(2 - self.halvings)
        solution = _solver(self.case, coarser)(grid, result.solution, self.case.solve.stop_below, None)
        if not solution.converged:
            return None
        tree = tree_with_bars(self.case, result.layout, solution)
        return accuracy.changes(self.case, tree, result.nested[-3].tree)

    def ended(self, found: tuple[Result, Verdict], stopped_by: str | None, why: str, solves: int) -> Result:
        """The result with what came of the accuracy asked for."""
        result, verdict = found
        said = accuracy.as_summary(verdict, stopped_by, why, solves)
        return with_accuracy(result, said, time.perf_counter() - self.begun)


def _accurate(case: Case, meshes: Family, climb: _Climb) -> Result:
    """Solve on finer and finer families of meshes until the mesh errors are within the accuracy, or something stops it.

    The answer is that of the mesh with the smallest errors, held against what is allowed.
    """
    limit = case.mesh.at_most or REFINED_TO
    best: tuple[Result, Verdict] | None = None
    for solves in range(1, SOLVES + 1):
        try:
            result = climb.on(meshes, solves - 1)
        except MemoryError:
            if best is None:
                raise
            return climb.ended(best, "memory", f"there is no memory for a mesh of {meshes.cells} cells.", solves)
        verdict = accuracy.judge(case, result.summary, result.solution)
        if result.summary.get("refused"):
            return climb.ended((result, verdict), "model", "the model does not hold.", solves)
        if not result.converged:
            why = f"the solve on a mesh of {meshes.cells} cells did not converge."
            return climb.ended(best or (result, verdict), "convergence", why, solves)
        if best is None or verdict.ratio < best[1].ratio:
            best = result, verdict
        if verdict.reached:
            return climb.ended(best, None, "", solves)
        excess_r = verdict.excess_r if case.mesh.radial is None else {}
        excess_z = verdict.excess_z if case.mesh.axial is None else {}
        if not excess_r and not excess_z:
            why = f"`radial` or `axial` in [mesh] fixes the mesh, of {meshes.cells} cells."
            return climb.ended(best, "mesh", why, solves)
        finer_r = climb.factors(meshes, result, excess_r, "radial")
        finer_z = climb.factors(meshes, result, excess_z, "axial")
        refined = meshes.refined(finer_r, finer_z, limit)
        if refined is None:
            why = f"a finer mesh would have more than {limit} cells. Give a larger at_most in [mesh], or ask for less."
            return climb.ended(best, "cells", why, solves)
        meshes = refined
    assert best is not None
    return climb.ended(best, "solves", f"{SOLVES} meshes were tried. Ask for less.", SOLVES)


def _solver(case: Case, meshes: Family) -> SolveOne:
    """What solves a case on one mesh after the other."""
    if any(stream.pressure_drop is not None for stream in case.stream.values()):
        return GivenDrop(case, meshes).solve
    return lambda grid, start, below, looked: solve_on(case, grid, start, below, looked)


def _headline(case: Case, solution: Solution) -> tuple[float, float] | None:
    """Outlet temperature [K] and pressure drop [Pa] of the first stream, for the progress line; None without flow."""
    view = stream_view(case, solution, next(iter(solution.grid.streams)))
    if view.mass_flow == 0.0:
        return None
    return float(view.bulk[-1]) + view.t_in, view.axis_pressure_at_inlet()
