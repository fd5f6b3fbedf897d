"""Laminar flow and heat transfer in tubes and their walls.

    import axicfd

    case = axicfd.load("heater.toml")
    result = axicfd.solve(case)
    result.summary["stream"]["oil"]["outlet_temperature_K"]

The public names load on first use, so that asking for help never waits for the numerical libraries.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

from axicfd.version import VERSION

if TYPE_CHECKING:
    from axicfd.case.model import Case
    from axicfd.case.read import load
    from axicfd.errors import AxicfdError
    from axicfd.output.comparison import compare
    from axicfd.output.sweep import sweep
    from axicfd.pipeline import solve
    from axicfd.results.result import Result
    from axicfd.variants.find import find
    from axicfd.variants.matters import what_matters
    from axicfd.variants.spread import spread
    from axicfd.variants.wall import wall_effect

__version__ = VERSION

__all__ = [
    "AxicfdError",
    "Case",
    "Result",
    "compare",
    "find",
    "load",
    "solve",
    "spread",
    "sweep",
    "wall_effect",
    "what_matters",
]

# Public name -> the module that holds it. No module at the top of the package bears one of these names:
# importing it would put the module where the function should be.
_HOMES = {
    "AxicfdError": "axicfd.errors",
    "Case": "axicfd.case.model",
    "Result": "axicfd.results.result",
    "compare": "axicfd.output.comparison",
    "find": "axicfd.variants.find",
    "load": "axicfd.case.read",
    "solve": "axicfd.pipeline",
    "spread": "axicfd.variants.spread",
    "sweep": "axicfd.output.sweep",
    "wall_effect": "axicfd.variants.wall",
    "what_matters": "axicfd.variants.matters",
}


def __getattr__(name: str) -> Any:
    """Load a public name where it lives, the first time it is asked for."""
    home = _HOMES.get(name)
    if home is None:
        raise AttributeError(f"module 'axicfd' has no attribute {name!r}")
    value = getattr(import_module(home), name)
    if name in _SHOWN:
        _show_in_notebooks(name)
    globals()[name] = value
    return value


# Public name -> (module of the class it gives, class, module of the function that shows it, function).
_SHOWN = {
    "Result": ("axicfd.results.result", "Result", "axicfd.output.notebook", "html"),
    "solve": ("axicfd.results.result", "Result", "axicfd.output.notebook", "html"),
    "spread": ("axicfd.variants.spread", "Spread", "axicfd.output.spread", "html"),
    "compare": ("axicfd.output.comparison", "Comparison", "axicfd.output.comparison", "html"),
    "sweep": ("axicfd.output.sweep", "Sweep", "axicfd.output.sweep_lines", "html"),
    "find": ("axicfd.variants.find", "Found", "axicfd.output.finding", "html"),
    "wall_effect": ("axicfd.variants.wall", "WallEffect", "axicfd.output.effects", "wall_html"),
    "what_matters": ("axicfd.variants.matters", "Assumptions", "axicfd.output.effects", "assumption_html"),
}


def _show_in_notebooks(name: str) -> None:
    """Let results show themselves: they lie below output and cannot reach up to it by themselves."""
    home, shows, output, function = _SHOWN[name]
    setattr(getattr(import_module(home), shows), "_repr_html_", getattr(import_module(output), function))  # noqa: B010


def __dir__() -> list[str]:
    return sorted([*__all__, "__version__"])
