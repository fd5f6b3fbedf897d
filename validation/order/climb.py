"""A case on a row of nested meshes, each solved until its own algebraic error is far below its mesh error."""

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from axicfd.case.layout import layout
from axicfd.case.model import Case
from axicfd.mesh.build import family
from axicfd.results.result import Result, make_result
from axicfd.solver.solve import solve_on

STOP_BELOW = 1e-9

Read = Callable[[Result], float]


@dataclass(frozen=True)
class Sequence:
    """One quantity on meshes that double their cells in both directions, coarsest first.

    cells, values : (n,)
    exact : the value the errors are taken from: known, or extrapolated from the two finest with second order
    last  : how many of the finest meshes served the extrapolation only and are not judged
    """

    name: str
    cells: np.ndarray
    values: np.ndarray
    exact: float
    last: int = 0

    @property
    def errors(self) -> np.ndarray:
        return np.abs(self.values - self.exact)[: len(self.values) - self.last]

    @property
    def falls(self) -> np.ndarray:
        """Error over that of the next mesh: 4 with second order, 2 with first."""
        with np.errstate(divide="ignore", invalid="ignore"):
            return self.errors[:-1] / self.errors[1:]

    @property
    def orders(self) -> np.ndarray:
        """From the changes of three meshes each, without any exact value."""
        change = np.diff(self.values)
        with np.errstate(divide="ignore", invalid="ignore"):
            return np.log2(np.abs(change[:-1] / change[1:]))


def climb(case: Case, coarsest: int, finest: int) -> list[Result]:
    """Results on the family's levels from coarsest down to finest (0 is the mesh of the case, negative is finer)."""
    meshes = family(case, layout(case))
    solution, results = None, []
    for level in range(coarsest, finest - 1, -1):
        solution = solve_on(case, meshes.grid(level), solution, STOP_BELOW)
        if not solution.residual < 1e-8:
            raise RuntimeError(f"level {level} of {case.title}: {solution.stop_reason} at {solution.residual:.1e}")
        results.append(make_result(case, meshes, [solution], [], solution.seconds, "order"))
    return results


def sequence(name: str, results: list[Result], read: Read, exact: float | None = None) -> Sequence:
    """A quantity on all meshes of a climb; without an exact value the finest mesh only serves to extrapolate it."""
    values = np.array([read(result) for result in results])
    cells = np.array([result.summary["cells"] for result in results])
    if exact is None:
        return Sequence(name, cells, values, float(values[-1] + (values[-1] - values[-2]) / 3.0), last=1)
    return Sequence(name, cells, values, exact)


def at_station(results: list[Result], column: str, place: float) -> Read:
    """Reads a column of the (only) stream's curves at the face of the coarsest mesh nearest to a place [m].

    That face is a face of every mesh of the climb.
    """
    faces = results[0].solution.grid.z
    z = float(faces[np.argmin(np.abs(faces - place))])

    def read(result: Result) -> float:
        (curves,) = result.axial.values()
        return float(curves[column][np.argmin(np.abs(curves["z_m"] - z))])

    return read


def headline(key: str) -> Read:
    """Reads a quantity of the (only) stream's summary."""

    def read(result: Result) -> float:
        (stream,) = result.summary["stream"].values()
        return float(stream[key])

    return read
