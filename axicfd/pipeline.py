"""solve(case) -> Result: climb the nested meshes of a case and interpret the finest.

The only place that joins mesh, solver and results; the command line, validation and scripts go through it.
"""

import time
from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

from axicfd.case.layout import layout
from axicfd.case.model import Case
from axicfd.mesh.build import LEVELS, family
from axicfd.results import cautions
from axicfd.results.axial import stream_view
from axicfd.results.result import Result, make_result
from axicfd.solver.solve import solve_on
from axicfd.solver.state import Solution
from axicfd.solver.warm_up import warm_up
from axicfd.version import VERSION

START_BELOW = 1e-5  # residual at which a coarse mesh that only gives a start hands over to the next one
NESTED = 4  # finest meshes that are solved in full, for the mesh error


@dataclass(frozen=True)
class Progress:
    """How far a solve has come.

    level of levels : mesh, 1 is the coarsest        cells : of that mesh
    outlet_temperature [K], pressure_drop [Pa] : of the last finished mesh, None before it or without flow
    seconds : since the start        residual : the last seen        done : this mesh is finished
    """

    level: int
    levels: int
    cells: int
    outlet_temperature: float | None
    pressure_drop: float | None
    seconds: float
    residual: float
    done: bool


OnProgress = Callable[[Progress], Any]


def solve(case: Case, on_progress: OnProgress | None = None, *, halvings: int = 0) -> Result:
    """Solve a case on the meshes it chooses (or its `[mesh]` asks for).

    on_progress : called with a `Progress` now and then
    halvings    : solve on a mesh refined this many times more, beyond the case's own finest
    Raises `RefusedModel` where the laminar model is known not to hold before anything is solved. A solve that does not
    converge is a Result with `converged` False.
    """
    cautions.before(case)  # raises where the model is refused
    warm_up()
    begun = time.perf_counter()
    place = layout(case)
    meshes = family(case, place)
    levels = LEVELS + halvings
    solution: Solution | None = None
    start: Solution | None = None  # nothing is taken from a mesh too coarse to converge on
    solutions: list[Solution] = []
    history = []
    shown: tuple[float | None, float | None] = (None, None)
    for number, level in enumerate(range(LEVELS - 1, -1 - halvings, -1), start=1):
        grid = meshes.grid(level)

        def tell(residual: float, done: bool, number: int = number, cells: int = grid.cells) -> None:
            if on_progress is not None:
                on_progress(Progress(number, levels, cells, *shown, time.perf_counter() - begun, residual, done))

        def looked(_: int, residual: float, tell: Callable[[float, bool], None] = tell) -> None:
            tell(residual, False)

        counts = number > levels - NESTED
        below = case.solve.stop_below if counts else max(START_BELOW, case.solve.stop_below)
        solution = solve_on(case, grid, start, below, looked)
        history.append((number, grid.cells, solution.iterations, solution.residual))
        shown = _headline(case, solution)
        tell(solution.residual, True)
        solutions = [*solutions, solution][-NESTED:] if solution.converged else [solution]
        start = None if solution.stop_reason == "diverged" else solution
    return make_result(case, place, solutions, history, time.perf_counter() - begun, VERSION)


def _headline(case: Case, solution: Solution) -> tuple[float | None, float | None]:
    """Outlet temperature [K] and pressure drop [Pa] of the first stream, for the progress line."""
    view = stream_view(case, solution, next(iter(solution.grid.streams)))
    if view.mass_flow == 0.0:
        return None, None
    return float(view.bulk[-1]) + view.t_in, view.axis_pressure_at_inlet()
