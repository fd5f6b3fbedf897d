"""Dotted paths into a case: find, set and list. Sections and layers go by name: "section.jacket.length"."""

from __future__ import annotations

import copy
from collections.abc import Mapping
from typing import Any

from axicfd.case import keys
from axicfd.case.dotted import step as step_in_path
from axicfd.case.dotted import steps_of
from axicfd.case.model import Case, Part, layer_name
from axicfd.errors import InputError, bad_input

Place = tuple[str | int, ...]
Table = dict[str, Any]


def spelled(tree: Any, place: Place) -> str:
    """A place as a dotted path; sections and layers by their names, other list entries left out."""
    names: list[str] = []
    here = tree
    for step in place:
        try:
            there = here[step]
        except (KeyError, IndexError, TypeError):
            there = None
        if isinstance(step, str):
            names.append(step_in_path(step))
        elif names and names[-1] in ("section", "layer"):
            names.append(_entry_name(names[-1], there, step))
        here = there
    return ".".join(names)


def _entry_name(kind: str, entry: Any, index: int) -> str:
    """The name of a section or layer given as a table."""
    if isinstance(entry, dict):
        if kind == "layer":
            return layer_name(entry)
        if isinstance(entry.get("name"), str):
            return entry["name"]
    return f"{kind} {index + 1}"


def place_of(tree: Any, path: str) -> Place | None:
    """The place of a path in a tree, or None where a section or layer of that name does not exist.

    The last steps need not exist yet.
    """
    place: Place = ()
    here = tree
    for step in steps_of(path):
        if isinstance(here, list):
            kind = str(place[-1])
            index = next((i for i, entry in enumerate(here) if _entry_name(kind, entry, i) == step), None)
            if index is None:
                return None
            place, here = (*place, index), here[index]
        else:
            place, here = (*place, step), here.get(step) if isinstance(here, dict) else None
    return place


def find(tree: Any, path: str) -> Any:
    """The value at a path, or None."""
    place = place_of(tree, path)
    here = tree
    for step in place or (None,):
        try:
            here = here[step]
        except (KeyError, IndexError, TypeError):
            return None
    return here


def replaced(tree: Mapping[str, Any], changes: Mapping[str, Any]) -> Table:
    """A copy of the tree with values set by path; None takes a key out.

    Setting one of several alternatives removes the others, but not those that are set by the same changes.
    """
    changed = copy.deepcopy(dict(tree))
    set_now = [steps_of(path) for path in changes]
    for path, value in changes.items():
        _put(changed, path, copy.deepcopy(value), set_now)
    return changed


def _put(tree: Table, path: str, value: Any, set_now: list[list[str]]) -> None:
    from axicfd.case.read import part_at  # the models know their keys, reading knows how to walk them

    steps = steps_of(path)
    here: Any = tree
    place: Place = ()
    for step in steps[:-1]:
        if isinstance(here, list):
            kind = str(place[-1])
            names = [_entry_name(kind, entry, i) for i, entry in enumerate(here)]
            if step not in names:
                raise _no_such(path, kind, step, names)
            index = names.index(step)
            here, place = here[index], (*place, index)
        elif isinstance(here, dict):
            if step not in here:
                known = part_at(place)
                if known is not None and step not in known.model_fields:
                    raise _unknown(path, step, known)
                if step in ("section", "layer"):
                    raise _no_such(path, step, steps[-1], [])
                if len(place) == 1 and place[0] in ("stream", "fluid", "solid", "sensor", "quantity"):
                    raise _no_such(path, str(place[0]), step, list(here))
                here[step] = {}
            elif not isinstance(here[step], dict | list):
                raise bad_input(
                    path,
                    value,
                    f"goes into `{'.'.join(steps[: steps.index(step) + 1])}`, which is a value, not a table",
                )
            here, place = here[step], (*place, step)
    last = steps[-1]
    if isinstance(here, list):
        kind = str(place[-1])
        names = [_entry_name(kind, entry, i) for i, entry in enumerate(here)]
        raise (
            _no_such(path, kind, last, names)
            if last not in names
            else bad_input(path, value, f"is a whole {kind}", "Name the key in it that is to change.")
        )
    part = part_at(place)
    if part is not None and last not in part.model_fields and last not in part.not_yet:
        raise _unknown(path, last, part)
    if value is None:
        here.pop(last, None)
        return
    kept = {set_steps[-1] for set_steps in set_now if set_steps[:-1] == steps[:-1]}
    if part is not None and value is not False:
        for other in part.displaces.get(last, ()):
            if other not in kept:
                here.pop(other, None)
    here[last] = value


def _no_such(path: str, kind: str, name: str, names: list[str]) -> InputError:
    near = keys.nearest(name, names)
    listed = ", ".join(names)
    instead = (
        f"Write {near}." if near else f"There are: {listed}." if listed else f"The case has no {kind} of its own there."
    )
    return bad_input(path, None, f"names no {kind} of the case", instead)


def _unknown(path: str, name: str, part: type[Part]) -> InputError:
    near = keys.nearest(name, part.model_fields)
    return bad_input(
        path,
        None,
        f"is not a key of a case: `{name}` is not known there",
        f"Write `{near}`." if near else f"Known there: {', '.join(part.model_fields)}.",
    )


def values_in(case: Case) -> list[str]:
    """The paths of every value that the user gave in a case, in its order."""
    found: list[str] = []

    def walk(here: Any, place: Place) -> None:
        if isinstance(here, dict) and not (place and "value" in here):
            for name, entry in here.items():
                walk(entry, (*place, name))
        elif isinstance(here, list) and place and place[-1] in ("section", "layer"):
            for i, entry in enumerate(here):
                walk(entry, (*place, i))
        else:
            found.append(spelled(case._tree, place))

    walk(case._tree, ())
    return found
