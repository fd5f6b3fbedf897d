"""Compiling the kernels before the clock of a solve runs: once per machine and version, half a minute or so."""

from typing import Any

from axicfd.case.layout import layout
from axicfd.case.model import Case
from axicfd.kernels import _jit
from axicfd.mesh.build import family
from axicfd.solver.solve import solve_on

# The smallest case that goes through every kernel of an ordinary solve. Its numbers are read by nobody.
TABLES: dict[str, Any] = {
    "stream": {"water": {"fluid": "water", "inlet_temperature": 300.0, "reynolds": 50.0}},
    "layer": [
        {"stream": "water", "diameter": 0.01},
        {"name": "tube", "solid": "stainless steel 316", "thickness": 0.001},
    ],
    "section": [{"name": "all", "length": 0.1, "outside": {"heat_flux": 100.0}}],
    "mesh": {"radial": 16, "axial": 32},
}


def is_cold() -> bool:
    """Whether no kernel of this version was compiled before, or none can be kept on this machine."""
    return not _jit.is_warm()


def warm_up() -> None:
    """Compile the kernels by solving a tiny case, if they are not there yet."""
    if is_cold():
        case = Case(**TABLES)
        solve_on(case, family(case, layout(case)).grid())
