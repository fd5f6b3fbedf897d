"""Small made-up tubes for the laws: case text from pieces, and a solve on a mesh laid by hand.

All numbers are invented; a law holds for any.
"""

from dataclasses import dataclass
from functools import lru_cache

import numpy as np

from axicfd.case.layout import Layout, layout
from axicfd.case.model import Case
from axicfd.case.read import load
from axicfd.mesh.build import Family, Segment, family
from axicfd.mesh.grid import Grid
from axicfd.mesh.spacing import graded_map
from axicfd.results.axial import StreamView, stream_view
from axicfd.results.summary import summary
from axicfd.solver.solve import solve_on
from axicfd.solver.state import HeatFields, Solution, StreamFields

FLUID = """
density       = "1000 kg/m^3"
specific_heat = "4000 J/kg/K"
conductivity  = "0.5 W/m/K"
viscosity     = "2 mPa s"
"""

THICK_WALL = """
[[layer]]
stream   = "water"
diameter = "4 mm"

[[layer]]
name      = "inner wall"
solid     = "metal"
thickness = "1 mm"
contact_resistance = "1e-4 m^2 K/W"

[[layer]]
name      = "sleeve"
solid     = "plastic"
thickness = "2 mm"
contact_resistance = "3e-4 m^2 K/W"
"""

SOLIDS = """
[solid.metal]
conductivity = { r = "12 W/m/K", z = "20 W/m/K" }
[solid.plastic]
conductivity = "0.3 W/m/K"
"""

SECTIONS = """
[[section]]
name    = "lead-in"
length  = "20 mm"
outside = { insulated = true }

[[section]]
name    = "heater"
length  = "30 mm"
outside = { heat = "5 W" }

[[section]]
name    = "bath"
length  = "40 mm"
outside = { film_coefficient = "300 W/m^2/K", ambient = "40 degC" }
"""


def text(
    flow: str = 'mass_flow = "1 g/s"',
    fluid: str = FLUID,
    layers: str = THICK_WALL,
    sections: str = SECTIONS,
    solids: str = SOLIDS,
    rest: str = "",
    viscous: bool = False,
    inlet: str = "20 degC",
) -> str:
    """The text of a case; `flow` holds every other key of the stream."""
    return (
        f'title = "Law"\n[stream.water]\nfluid = "liquid"\ninlet_temperature = "{inlet}"\n{flow}\n'
        f"[fluid.liquid]{fluid}{solids}{layers}{sections}{rest}\n"
        f"[physics]\nviscous_heating = {str(viscous).lower()}\n"
    )


@dataclass(frozen=True)
class Run:
    """A solved case with what its tests look at."""

    case: Case
    layout: Layout
    solution: Solution

    @property
    def grid(self) -> Grid:
        return self.solution.grid

    @property
    def heat(self) -> HeatFields:
        return self.solution.heat

    @property
    def t(self) -> np.ndarray:
        """(nz, nr) [K] from the inlet temperature."""
        return self.solution.heat.t

    @property
    def flow(self) -> StreamFields:
        (fields,) = self.solution.streams.values()
        return fields

    @property
    def view(self) -> StreamView:
        return stream_view(self.case, self.solution, next(iter(self.grid.streams)))

    @property
    def summary(self) -> dict:
        return summary(self.case, self.layout, self.solution, {self.view.name: self.view})

    @property
    def span(self) -> float:
        """[K] largest distance of any temperature from the inlet temperature."""
        return float(np.abs(self.t).max())

    def in_section(self, number: int) -> slice:
        """Stations of a section, counted from 0."""
        return slice(*(int(i) for i in np.searchsorted(self.grid.section, [number, number + 1])))

    def surface(self) -> np.ndarray:
        """(nz,) [K] temperature of the outer surface, from the inlet temperature."""
        return self.heat.minus[np.arange(self.grid.nz), self.grid.outer]


@lru_cache(maxsize=64)
def run(
    case_text: str,
    radial: tuple[int, ...] | None = None,
    axial: tuple[int, ...] | None = None,
    stop_below: float = 1e-11,
    levels: int = 3,
) -> Run:
    """Solve a case, climbing `levels` meshes.

    radial, axial : even cells of every stretch between interfaces and of every section; None takes the case's
    own
                    graded mesh
    """
    case = load(case_text)
    place = layout(case)
    meshes = family(case, place)
    meshes = Family(place, _even(meshes.radial, radial), _even(meshes.axial, axial), meshes.places)
    solution = None
    for level in range(levels - 1, -1, -1):
        solution = solve_on(case, meshes.grid(level), solution, 1e-5 if level else stop_below)
    assert solution is not None
    return Run(case, place, solution)


def _even(segments: tuple[Segment, ...], cells: tuple[int, ...] | None) -> tuple[Segment, ...]:
    if cells is None:
        return segments
    even = graded_map(1.0, False, False)
    return tuple(Segment(s.start, s.end, n, even) for s, n in zip(segments, cells, strict=True))


def relative(found: np.ndarray, expected: np.ndarray) -> float:
    """Largest difference over the largest magnitude expected."""
    return float(np.abs(np.asarray(found) - expected).max() / np.abs(expected).max())
