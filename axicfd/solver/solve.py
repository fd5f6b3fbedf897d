"""One case on one grid: the outer loop over properties, flow and energy."""

import time
from collections.abc import Callable

import numpy as np

from axicfd.case.model import Case, UsedFluid
from axicfd.kernels import momentum
from axicfd.mesh.grid import Array, Grid
from axicfd.mesh.nest import carry
from axicfd.solver import boundary, developed, properties
from axicfd.solver.convergence import Watch
from axicfd.solver.cycle import FlowCycle
from axicfd.solver.energy import Energy
from axicfd.solver.flow import CLOSED, Flow, stream_mesh
from axicfd.solver.state import HeatFields, Solution, StreamFields

FLOW_STEPS = 5  # plain flow iterations between two looks at the residual, or between two energy steps
HEAT_STEPS = 60  # energy steps at a given flow
CLOSED_ON_THE_WAY = 1e-4  # mass missing, as a share of the flow, per residual, while flow and heat are solved in turn
HEAT_DROP = 1e-3  # share of its residual that an energy step leaves while flow and heat are solved in turn

TROUBLE = "diverged", "no further progress", "iteration limit"

OnCheck = Callable[[int, float], None]


def solve_on(
    case: Case,
    grid: Grid,
    start: Solution | None = None,
    stop_below: float | None = None,
    on_check: OnCheck | None = None,
) -> Solution:
    """Solve a case on one grid.

    start      : the solution on another grid of the same case, to begin with
    stop_below : normalised residual at which to stop; default the case's own
    on_check   : called with (iteration, residual) at every look at the residual
    Never raises for want of convergence: the stop reason says it.
    """
    return _Run(case, grid, start, stop_below or case.solve.stop_below, on_check).go()


class _Run:
    """The state of one solve."""

    def __init__(self, case: Case, grid: Grid, start: Solution | None, stop_below: float, on_check: OnCheck | None):
        self.clock = time.perf_counter()
        self.case, self.grid, self.on_check = case, grid, on_check
        self.watch = Watch(stop_below)
        (self.name,) = grid.streams
        self.j0, self.j1 = grid.streams[self.name]
        self.stream = case.stream[self.name]
        self.fluid: UsedFluid = case.fluid_of(self.name)
        self.t_in = self.stream.inlet_temperature
        self.mirrored = self.stream.direction == "-z"
        self.density = float(self.fluid.density(self.t_in))
        self.mass_flow = boundary.mass_flow(case, grid.layout, self.name)
        self.iteration = 0
        self._set_up_energy(start)
        self.flow = self._set_up_flow(start) if self.mass_flow > 0.0 else None
        self.coupled = self.flow is not None and not self.fluid.viscosity.is_constant
        self.cycle = FlowCycle(self.flow) if self.flow is not None else None

    # ------------------------------------------------------------------ set-up

    def _set_up_energy(self, start: Solution | None) -> None:
        grid, cp, t_in = self.grid, self.fluid.specific_heat, self.t_in
        if cp.is_constant:
            value = float(cp(t_in))
            enthalpy, capacity = lambda t: value * t, lambda t: np.full(np.shape(t), value)
        else:
            enthalpy, capacity = lambda t: cp.integral(t_in, t + t_in), lambda t: cp(t + t_in)
        inflow = np.zeros(grid.nr)
        inflow[self.j0 : self.j1] = boundary.inlet_temperature(self.case, self.name, grid.rc[self.j0 : self.j1])
        self.energy = Energy(self.case, grid, t_in, enthalpy, capacity, inflow, self.mirrored)
        if start is not None:
            self.energy.t = carry(start.heat.t, start.grid.zc, start.grid.rc, grid.zc, grid.rc)
            self.energy.t[grid.kind == 0] = 0.0
        self.viscous = np.zeros(grid.shape)
        self.pressure_work = np.zeros(grid.shape)

    def _set_up_flow(self, start: Solution | None) -> Flow:
        grid = self.grid
        mesh = stream_mesh(grid, self.name, self.mirrored)
        shape = developed.velocity(mesh, self.density, self.mass_flow)
        rc = grid.rc[self.j0 : self.j1]
        u_in = boundary.inlet_velocity(self.case, self.name, self.mass_flow, self.density, rc, mesh.area, shape)
        uniform = properties.viscosity(
            self.fluid.viscosity, np.zeros((mesh.nz, mesh.nr)), None, None, mesh.gz, mesh.gr, self.t_in
        )
        flow = Flow(mesh, self.density, u_in, uniform)
        if start is not None and self.name in start.streams:
            old, g = start.streams[self.name], start.grid
            j0, j1 = g.streams[self.name]
            r_from, rf_from, rf = g.rc[j0:j1], g.r[j0 : j1 + 1], grid.r[self.j0 : self.j1 + 1]
            flow.start_from(
                self._turned(carry(old.u, g.z, r_from, grid.z, rc), sign=True),
                self._turned(carry(old.v, g.zc, rf_from, grid.zc, rf)),
                self._turned(carry(old.p, g.zc, r_from, grid.zc, rc)),
            )
        return flow

    def _turned(self, values: Array, sign: bool = False) -> Array:
        """Between global and the stream's own direction, both ways."""
        if not self.mirrored:
            return values
        return np.ascontiguousarray(-values[::-1] if sign else values[::-1])

    @property
    def _moving(self) -> Flow:
        """The flow, where there is one."""
        assert self.flow is not None
        return self.flow

    # ------------------------------------------------------------------ the loop

    def go(self) -> Solution:
        begin = self._fields()
        reason = self._attempt()
        if reason in TROUBLE and self.cycle is not None:
            # multigrid is fast and usually enough; the plain iteration is slow and sure
            self._fields(begin)
            self.cycle = None
            self.watch = Watch(self.watch.stop_below)
            reason = self._attempt()
        if reason == "diverged":
            self._fields(begin)
            self._refresh_viscosity()
            self._hand_over_flow()
        return self._solution(reason)

    def _attempt(self) -> str:
        self._refresh_viscosity()
        return self._solve_flow_and_heat() if self.coupled else self._solve_one_after_the_other()

    def _fields(self, restore: list[Array] | None = None) -> list[Array]:
        """The unknowns, copied; or put back from such a copy."""
        now = [self.flow.u, self.flow.v, self.flow.p, self.energy.t] if self.flow is not None else [self.energy.t]
        if restore is not None:
            for array, old in zip(now, restore, strict=True):
                array[...] = old
            if self.flow is not None:
                self.flow.refresh_mass()
        return [array.copy() for array in now]

    def _solve_one_after_the_other(self) -> str:
        """Flow first, where temperature does not act on it, then heat."""
        flow_residual = 0.0
        reason: str | None = None
        while self.flow is not None and reason is None:
            self._flow_steps()
            flow_residual = self.flow.residual()
            reason = self._check(flow_residual, 0.0)
        if reason in TROUBLE:
            return str(reason)
        self._hand_over_flow()
        error = self.energy.error()
        self._check(flow_residual, error)
        for _ in range(HEAT_STEPS):
            if error < self.watch.stop_below:
                break
            error = self.energy.step()
            reason = self._check(flow_residual, error)
            if reason == "diverged":
                return "diverged"
        return "converged" if error < self.watch.stop_below else "no further progress"

    def _solve_flow_and_heat(self) -> str:
        """Flow and heat in turn, where viscosity follows the temperature."""
        reason: str | None = None
        while reason is None:
            self._flow_steps()
            if not np.isfinite(self._moving.residual()):
                return "diverged"
            # continuity closed far below the residual is enough on the way, and a third cheaper in all
            self._hand_over_flow(max(CLOSED, CLOSED_ON_THE_WAY * min(self.watch.residual, 1.0)))
            self.energy.step(HEAT_DROP)
            self._refresh_viscosity()
            reason = self._check(self._moving.residual(), self.energy.error())
        return reason

    def _flow_steps(self) -> None:
        if self.cycle is not None:
            self.cycle.cycle()
            self.iteration += 1
            return
        for _ in range(FLOW_STEPS):
            self._moving.step()
        self.iteration += FLOW_STEPS

    def _check(self, flow: float, heat: float) -> str | None:
        if self.on_check is not None:
            self.on_check(self.iteration, max(flow, heat))
        return self.watch.verdict(self.iteration, flow, heat)

    # ------------------------------------------------------------------ what the equations pass to each other

    def _refresh_viscosity(self) -> None:
        if not self.coupled:
            return
        m = self._moving.mesh
        t = self._turned(self.energy.t[:, self.j0 : self.j1])
        self.energy.conductors.conduction(self.energy.t, self.energy.surroundings.outside)
        wall = self._turned(self.energy.conductors.face_minus[:, self.j1])
        inner = self._turned(self.energy.conductors.face_plus[:, self.j0]) if self.grid.r[self.j0] > 0.0 else None
        self._moving.viscosity = properties.viscosity(self.fluid.viscosity, t, wall, inner, m.gz, m.gr, self.t_in)
        if self.cycle is not None:
            self.cycle.refresh_viscosity()

    def _hand_over_flow(self, closed: float = CLOSED) -> None:
        """Mass fluxes and volume heat from the flow to the energy equation; `closed`: share of the flow that may
        be missing.
        """
        if self.flow is None:
            self.energy.set_flow(self.energy.mz, self.energy.mr)
            return
        f, here = self.flow, slice(self.j0, self.j1)
        f.close_continuity(closed)
        mz, mr = np.zeros_like(self.energy.mz), np.zeros_like(self.energy.mr)
        mz[:, here] = self._turned(f.mz, sign=True)
        mr[:, self.j0 : self.j1 + 1] = self._turned(f.mr)
        self.energy.set_flow(mz, mr)
        if self.case.physics.viscous_heating:
            phi = np.zeros_like(f.p)
            counted: Array | float = 1.0
            momentum.dissipation(f.mesh, f.viscosity, f.u, f.v, phi)
            if self.stream.slips_at_inlet:
                z, r = f.mesh.z, f.mesh.r
                counted = boundary.counted_near_corner(0.5 * (z[1:] + z[:-1]), 0.5 * (r[1:] + r[:-1]), r[-1])
            self.viscous[:, here] = self._turned(counted * phi)
            if not self.fluid.density.is_constant:
                self.pressure_work[:, here] = self._expansion(here) * self._turned(counted * _pressure_power(f))
            self.energy.volume_heat = self.viscous + self.pressure_work

    def _expansion(self, here: slice) -> Array:
        """beta T of the stream's cells: the share of the pressure power that appears as heat (1 for an ideal gas)."""
        t = self.energy.t[:, here] + self.t_in
        return -self.fluid.density.derivative(t) / self.fluid.density(t) * t

    # ------------------------------------------------------------------ the end

    def _solution(self, reason: str) -> Solution:
        e = self.energy
        e.residual()
        streams = {}
        if self.flow is not None:
            f = self.flow
            streams[self.name] = StreamFields(
                self._turned(f.u, sign=True),
                self._turned(f.v),
                self._turned(f.p),
                self._turned(f.mz, sign=True),
                self._turned(f.mr),
                self._turned(f.viscosity.corner[:, -1]),
            )
        faces = e.conductors
        heat = HeatFields(
            e.t, e.tz, e.tr, faces.face_minus, faces.face_plus, e.hz, e.hr, e.qz, e.qr,
            e.q_outside, e.q_first, e.q_last, e.generated, self.viscous, self.pressure_work, e.resolvable(),
        )  # fmt: skip
        seconds = time.perf_counter() - self.clock
        return Solution(
            self.grid, streams, heat, self.iteration, self.watch.residual, reason, seconds, tuple(self.watch.history)
        )


def _pressure_power(flow: Flow) -> Array:
    """(nz, nr) [W] velocity times pressure gradient, integrated over cells: each face's work goes half to either
    side.
    """
    m, u, v, p = flow.mesh, flow.u, flow.v, flow.p
    power = np.zeros_like(p)
    face = u[1:-1] * m.area * (p[1:] - p[:-1])
    power[1:] += 0.5 * face
    power[:-1] += 0.5 * face
    power[-1] -= u[-1] * m.area * p[-1]  # to the outlet plane, where p = 0
    if m.nz > 1:
        power[0] += u[0] * m.area * (p[1] - p[0]) * m.dzu[0] / m.dzu[1]  # from the inlet plane
    face = v[:, 1:-1] * m.ring[1:-1] * m.dz[:, None] * (p[:, 1:] - p[:, :-1])
    power[:, 1:] += 0.5 * face
    power[:, :-1] += 0.5 * face
    return power
