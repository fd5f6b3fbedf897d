"""What a solve on one grid leaves behind."""

from dataclasses import dataclass, field

from axicfd.mesh.grid import Array, Grid


@dataclass(frozen=True)
class StreamFields:
    """Velocity, pressure and mass flow of one stream in global coordinates (+z to the right).

    u  : (nz + 1, nrs) [m/s] on axial faces          v  : (nz, nrs + 1) [m/s] on radial faces
    p  : (nz, nrs) [Pa] pressure in motion in cells, zero in the outlet plane
    mz : (nz + 1, nrs) [kg/s]                        mr : (nz, nrs + 1) [kg/s]
    viscosity_wall : (nz + 1,) [Pa s] at the outer wall on axial faces
    """

    u: Array
    v: Array
    p: Array
    mz: Array
    mr: Array
    viscosity_wall: Array


@dataclass(frozen=True)
class HeatFields:
    """Temperatures [K], from the inlet temperature, and heat flows [W] of the grid.

    t (nz, nr); tz (nz + 1, nr), tr (nz, nr + 1) convected face temperatures; minus, plus (nz, nr + 1) temperatures
    on the inner and outer side of each radial face; hz, hr convected enthalpy and qz, qr conducted heat through
    faces; outside (nz,), first (nr,), last (nr,) heat into the tube; generated, viscous, pressure_work (nz, nr).
    resolvable [W]: smallest heat scale against which round-off lets the balance be judged.
    """

    t: Array
    tz: Array
    tr: Array
    minus: Array
    plus: Array
    hz: Array
    hr: Array
    qz: Array
    qr: Array
    outside: Array
    first: Array
    last: Array
    generated: Array
    viscous: Array
    pressure_work: Array
    resolvable: float = 0.0


@dataclass(frozen=True)
class Solution:
    """The fields of one grid, and how the solve went.

    stop_reason : "converged", "no further progress", "iteration limit" or "diverged" (then the fields it began with)
    history     : (iteration, flow residual, energy residual) per check
    """

    grid: Grid
    streams: dict[str, StreamFields]
    heat: HeatFields
    iterations: int
    residual: float
    stop_reason: str
    seconds: float
    history: tuple[tuple[int, float, float], ...] = field(default=())

    @property
    def converged(self) -> bool:
        return self.stop_reason == "converged"
