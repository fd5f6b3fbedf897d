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
    from axicfd.pipeline import solve
    from axicfd.results.result import Result

__version__ = VERSION

__all__ = ["AxicfdError", "Case", "Result", "load", "solve"]

# Public name -> the module that holds it. No module at the top of the package bears one of these names:
# importing it would put the module where the function should be.
_HOMES = {
    "AxicfdError": "axicfd.errors",
    "Case": "axicfd.case.model",
    "Result": "axicfd.results.result",
    "load": "axicfd.case.read",
    "solve": "axicfd.pipeline",
}


def __getattr__(name: str) -> Any:
    """Load a public name where it lives, the first time it is asked for."""
    home = _HOMES.get(name)
    if home is None:
        raise AttributeError(f"module 'axicfd' has no attribute {name!r}")
    value = getattr(import_module(home), name)
    if name in ("Result", "solve"):
        _show_in_notebooks()
    globals()[name] = value
    return value


def _show_in_notebooks() -> None:
    """Let results show themselves: results lie below output and cannot reach up to it by themselves."""
    from axicfd.output.notebook import html
    from axicfd.results.result import Result

    setattr(Result, "_repr_html_", html)  # noqa: B010


def __dir__() -> list[str]:
    return sorted([*__all__, "__version__"])
