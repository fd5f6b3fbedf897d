"""Dotted paths as users write them: "stream.oil.mass_flow"; a name that holds a dot stands in double quotes."""

from __future__ import annotations

from collections.abc import Iterable

from axicfd.errors import bad_input


def steps_of(path: str) -> list[str]:
    """The names in a path; a name may stand in double quotes. Raises `InputError` where it is no path."""
    steps, name, quoted = [], "", False
    for mark in path:
        if mark == '"':
            quoted = not quoted
        elif mark == "." and not quoted:
            steps.append(name.strip())
            name = ""
        else:
            name += mark
    steps.append(name.strip())
    if quoted or not all(steps):
        raise bad_input(
            path, None, "is not a path", "Write names with dots between them, such as stream.water.mass_flow."
        )
    return steps


def step(name: str) -> str:
    """A name as part of a path."""
    return f'"{name}"' if "." in name else name


def dotted(names: Iterable[str]) -> str:
    """The path of these names."""
    return ".".join(map(step, names))
