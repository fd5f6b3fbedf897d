"""The flow of a stream whose pressure drop is given, found anew on each mesh.

On every nested mesh the flow is the one whose drop is the given one there, so all meshes solve the same problem: the
flow has a sequence of values, and with it a mesh error, like every other quantity, and the drop has none.
"""

import math
from collections.abc import Callable
from contextlib import suppress
from dataclasses import replace

from axicfd import units
from axicfd.case.model import Case
from axicfd.errors import RefusedModel
from axicfd.mesh.build import Family
from axicfd.mesh.grid import Grid
from axicfd.results import cautions
from axicfd.results.axial import stream_view
from axicfd.results.cautions import REYNOLDS_REFUSED, Ahead
from axicfd.solver import boundary
from axicfd.solver.solve import OnCheck, solve_on
from axicfd.solver.state import Solution

CLOSE = 1e-7  # share of the drop by which it may be missed where the residual allows it
CLOSE_TO_RESIDUAL = 10.0  # and as a multiple of the residual at which a mesh is left
ROUGH = 1e-5  # residual for flows that are still being sought
SEARCH = 1e-3  # of the logarithm of the flow, on the rough mesh
STEPS = 8  # solves on one mesh
LONGEST_STEP = 0.5  # of the logarithm of the flow
NEAR = 1.0  # difference of two logarithms up to which the flow of one is a good start for the other
SCAN = 1.5  # ratio of neighbouring flows where there may be several
THICKENS = 2.0  # ratio of the viscosity at a cold wall to that at the inlet from which there may be
FLOWS = 26  # of that ratio, where nothing bounds them
OUTWARD = 30  # doublings or halvings in search of two flows with the wanted one between them


class GivenDrop:
    """Finds the flow on one mesh after the other; what it learned on one is where it begins on the next."""

    def __init__(self, case: Case, meshes: Family):
        self.case, self.meshes, self.layout = case, meshes, meshes.layout
        (self.name,) = self.layout.stream_names
        self.stream, self.fluid = case.stream[self.name], case.fluid_of(self.name)
        assert self.stream.pressure_drop is not None
        self.wanted = self.stream.pressure_drop
        self.latest: float | None = None  # logarithm of the flow found last
        self.exponent = 1.0  # d ln(drop) / d ln(flow)

    def solve(self, grid: Grid, start: Solution | None, stop_below: float, on_check: OnCheck | None) -> Solution:
        """`solve_on` at the flow whose drop on this grid is the given one.

        Raises `RefusedModel` where no laminar flow or more than one has it. Where the flow is not found the stop
        reason says that the solve did not converge.
        """
        if self.latest is None:
            self.latest, start = self._search(on_check)
        x = self.latest
        if stop_below > self.case.solve.stop_below:  # a mesh that only gives a start may do so at about this flow
            return solve_on(self.at(math.exp(x)), grid, start, stop_below, on_check)
        close = max(CLOSE, CLOSE_TO_RESIDUAL * stop_below)
        below, seconds, iterations = max(ROUGH, stop_below), 0.0, 0
        last: tuple[float, float] | None = None
        for _ in range(STEPS):
            solution = solve_on(self.at(math.exp(x)), grid, start, below, on_check)
            start = solution if solution.stop_reason != "diverged" else start
            seconds, iterations = seconds + solution.seconds, iterations + solution.iterations
            miss = self._miss(solution)
            reached = solution.converged and below == stop_below and abs(miss) <= close
            if reached or not math.isfinite(miss):
                break
            if last is not None and abs(x - last[0]) > 1e3 * close:
                self.exponent = (miss - last[1]) / (x - last[0]) or 1.0
            last = x, miss
            if abs(miss) < ROUGH * CLOSE_TO_RESIDUAL**2:
                below = stop_below
            x -= min(max(miss / self.exponent, -LONGEST_STEP), LONGEST_STEP)
        if reached:
            self.latest = x
        reason = solution.stop_reason if reached or not solution.converged else "no further progress"
        return replace(solution, stop_reason=reason, seconds=seconds, iterations=iterations)

    def at(self, flow: float) -> Case:
        """The case with a mass flow [kg/s] in place of the drop."""
        return self.case.replace({f"stream.{self.name}.mass_flow": flow})

    def _miss(self, solution: Solution) -> float:
        """Logarithm of the drop over the given one."""
        drop = stream_view(self.case, solution, self.name).axis_pressure_at_inlet()
        return math.log(drop / self.wanted) if drop > 0.0 else math.nan

    # ------------------------------------------------------------------ before the first mesh

    def _search(self, on_check: OnCheck | None) -> tuple[float, Solution | None]:
        """The logarithm of the flow, and a solution near it, from hand numbers.

        On the rough mesh: the coarsest ones, of a cell or two across, are off by a factor, and may have another number
        of flows.
        """
        from scipy.optimize import brentq

        grid = self.meshes.grid(self.meshes.rough_level)
        tried: dict[float, float] = {}
        solved: dict[float, Solution] = {}

        def miss(x: float) -> float:
            if x not in tried:
                near = min(solved, key=lambda other: abs(x - other), default=math.inf)
                start = solved[near] if abs(x - near) < NEAR else None
                solution = solve_on(self.at(math.exp(x)), grid, start, ROUGH, on_check)
                if start is not None and not solution.converged:
                    solution = solve_on(self.at(math.exp(x)), grid, None, ROUGH, on_check)
                tried[x] = self._miss(solution)
                if solution.converged:
                    solved[x] = solution
            return tried[x]

        highest = math.log(self._flow_of_reynolds(REYNOLDS_REFUSED))
        places = sorted({min(math.log(flow), highest) for flow in self._flows_to_try(math.exp(highest))})
        lowest = next((k for k in range(len(places) - 1, 0, -1) if not math.isfinite(miss(places[k]))), 0)
        places = places[lowest:]  # below, it is so slow and cold that nothing is solved
        if len({miss(place) <= 0.0 for place in places}) == 1:
            self._widen(places, miss, highest)
        pairs = list(zip(places[:-1], places[1:], strict=True))
        brackets = [(a, b) for a, b in pairs if miss(a) <= 0.0 < miss(b) or miss(a) > 0.0 >= miss(b)]
        brackets = [pair for pair in brackets if all(math.isfinite(miss(place)) for place in pair)]
        roots = []
        for a, b in brackets:
            with suppress(ValueError):  # a flow in between has no drop
                roots.append(brentq(miss, a, b, xtol=SEARCH))
        roots.sort()
        if len(roots) > 1:  # where the model does not hold is no answer, if there is another
            roots = [root for root in roots if not self._refused(root, solved)] or roots
        if not roots:
            raise RefusedModel(
                f"No flow of {self.name} was found that has a pressure drop of {self._said(self.wanted)}. Give "
                "`mass_flow`, and look at the drop it has."
            )
        if len(roots) > 1:
            raise self._several(roots)
        near = sorted((x for x in tried if math.isfinite(tried[x])), key=lambda x: abs(x - roots[0]))[:2]
        self.exponent = (tried[near[0]] - tried[near[1]]) / (near[0] - near[1]) or 1.0
        return roots[0], solved.get(near[0])

    def _refused(self, root: float, solved: dict[float, Solution]) -> bool:
        near = min(solved, key=lambda x: abs(x - root))
        return bool(cautions.refusal(self.at(math.exp(near)), self.layout, solved[near]))

    def _flows_to_try(self, highest: float) -> list[float]:
        """One hand estimate; or many flows, where the stream is cooled and thickens.

        Slower flow is then colder and more viscous, so the drop may rise, fall and rise again with the flow. A cold
        wall thickens it no further than to its own temperature, which bounds the flows; a heat taken out does so
        without a limit.
        """
        inlet = float(self.fluid.viscosity(self.stream.inlet_temperature))
        ahead = Ahead(self.case, self.layout)
        viscosities = [inlet, *(float(self.fluid.viscosity(T)) for T in ahead.held)]

        def flow(viscosity: float) -> float:
            return boundary.flow_of_drop(self.case, self.layout, self.name, viscosity)

        if self.fluid.viscosity.is_constant:
            return [flow(inlet)]
        if ahead.heat_is_taken_out:
            return [highest / SCAN**k for k in range(FLOWS)]
        if max(viscosities) < THICKENS * inlet:
            return [flow(inlet)]
        low, high = flow(max(viscosities)) / SCAN, flow(min(viscosities)) * SCAN
        n = math.ceil(math.log(high / low) / math.log(SCAN))
        return [low * (high / low) ** (i / n) for i in range(n + 1)]

    def _widen(self, places: list[float], miss: Callable[[float], float], highest: float) -> None:
        """Add places outward until the drop is too small at the lowest or too large at the highest."""
        if miss(places[-1]) > 0.0:
            for _ in range(OUTWARD):
                places.insert(0, places[0] - math.log(2.0))
                if miss(places[0]) <= 0.0:
                    return
        for _ in range(OUTWARD):
            if miss(places[-1]) > 0.0:
                return
            if places[-1] >= highest:
                raise self._out_of_reach(self.wanted * math.exp(miss(highest)))
            places.append(min(places[-1] + math.log(2.0), highest))

    def _flow_of_reynolds(self, reynolds: float) -> float:
        viscosity = float(self.fluid.viscosity(self.stream.inlet_temperature))
        return reynolds * viscosity * math.pi * self.layout.bore_diameter / 4.0

    def _out_of_reach(self, drop: float) -> RefusedModel:
        return RefusedModel(
            f"No laminar flow of {self.name} has a pressure drop of {self._said(self.wanted)}: at Reynolds "
            f"{REYNOLDS_REFUSED:g}, up to which is computed here, it is about {self._said(drop)}. Lower "
            "`pressure_drop`, or narrow the bore."
        )

    def _several(self, roots: list[float]) -> RefusedModel:
        *most, last = [f"{units.convert(math.exp(x), 'g/s', 'mass_flow'):.3g} g/s" for x in roots]
        return RefusedModel(
            f"Several flows of {self.name} have a pressure drop of {self._said(self.wanted)}: about {', '.join(most)} "
            f"and {last}. The slower it flows the colder and more viscous it gets, so that the drop rises and falls "
            "again with the flow. Give the one you mean as `mass_flow`; "
            f'`axicfd find CASE --change stream.{self.name}.mass_flow --until "stream.{self.name}.pressure_drop = '
            f'{self._said(self.wanted)}"` finds each of them.'
        )

    def _said(self, drop: float) -> str:
        """A drop [Pa] to three digits, in the unit of the case."""
        unit = self.case.unit_of(f"stream.{self.name}.pressure_drop") or "Pa"
        return f"{float(units.convert(drop, unit, 'pressure_difference')):.3g} {unit}"
