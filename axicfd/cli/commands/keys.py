"""`axicfd keys [PATH]`: the keys of a case file, what they mean and what they accept."""

from __future__ import annotations

import argparse
from collections.abc import Iterator
from dataclasses import dataclass
from typing import Any, get_args, get_origin

from axicfd.cli import exits
from axicfd.errors import AxicfdError

SUMMARY = "list the keys of a case file, or those below PATH, such as stream or section.outside"


@dataclass(frozen=True)
class Listed:
    """One key: its dotted path without users' names, what it means and accepts; `later` if not open yet."""

    path: str
    meaning: str
    allowed: str = ""
    default: str = ""
    later: bool = False


def add_arguments(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("path", metavar="PATH", nargs="?", help="only keys whose path begins so")


def run(arguments: argparse.Namespace) -> int:
    from axicfd.cli import render

    out = render.console()
    everything = list(all_keys())
    wanted = arguments.path
    listed = [key for key in everything if wanted is None or _is_below(key.path, wanted)]
    if not listed:
        raise AxicfdError(_unknown(wanted, [key.path for key in everything]))
    render.rows(
        out,
        ["key", "meaning", "default"],
        [(key.path, f"not available yet: {key.meaning}" if key.later else key.meaning, key.default) for key in listed],
    )
    if wanted is not None:
        out.print()
        for key in listed:
            if key.allowed:
                out.print(f"{key.path} {key.allowed}")
    out.print()
    out.print("NAME stands for a name of yours; tables of names are written [stream.NAME], lists [[section]].")
    out.print(
        'A quantity may have a tolerance: { value = "2 mm", plus_minus = "0.05 mm" }, or std; see `axicfd spread`.'
    )
    return exits.SOLVED


def all_keys() -> Iterator[Listed]:
    """Every key of a case, in the order of the models, those that are not open yet included."""
    from axicfd.case.model import Case

    yield from _keys_of(Case, "")


def _keys_of(model: Any, before: str) -> Iterator[Listed]:
    from axicfd.case.keys import Key
    from axicfd.case.model import Part

    for name, field in model.model_fields.items():
        path = f"{before}{name}"
        declared = next((entry for entry in field.metadata if isinstance(entry, Key)), None)
        if declared is not None:
            yield Listed(path, declared.meaning, declared.allowed, _default(declared, field))
            continue
        inner, is_named = _inner_model(field.annotation)
        if isinstance(inner, type) and issubclass(inner, Part):
            if inner is not model:
                yield from _keys_of(inner, f"{path}.NAME." if is_named else f"{path}.")
    for name, meaning in model.not_yet.items():
        yield Listed(f"{before}{name}", meaning, later=True)


def _inner_model(annotation: Any) -> tuple[Any, bool]:
    """The model inside `dict[str, Model]`, `tuple[Model, ...]` or `... | None`, and whether users name it.

    Sections and layers are lists whose entries are called by their names in a path.
    """
    if get_origin(annotation) in (dict, tuple):
        kinds = [entry for entry in get_args(annotation) if entry not in (str, Ellipsis)]
        return kinds[0], True
    for entry in get_args(annotation):
        if get_origin(entry) in (dict, tuple):
            return _inner_model(entry)
        if entry is not type(None):
            return entry, False
    return annotation, False


def _default(declared: Any, field: Any) -> str:
    if field.is_required():
        return "(required)"
    if field.default is None or field.default in ("", (), {}):
        return ""
    return declared.write(field.default)


def _is_below(path: str, wanted: str) -> bool:
    """Whether `wanted` is the path or a part of it from the start, with or without users' names."""
    plain = [part for part in path.split(".") if part != "NAME"]
    asked = [part for part in wanted.split(".") if part != "NAME"]
    if plain[: len(asked)] == asked:
        return True
    # "stream.oil.fluid" is asked with a name of the user's: match it against NAME.
    full, given = path.split("."), wanted.split(".")
    pairs = zip(full, given, strict=False)
    return len(given) <= len(full) and all(have in ("NAME", want) for have, want in pairs)


def _unknown(wanted: str, known: list[str]) -> str:
    import difflib

    last = [path.rsplit(".", 1)[-1] for path in known]
    near = difflib.get_close_matches(wanted.rsplit(".", 1)[-1], last, 1, 0.6)
    hint = f" Did you mean `{known[last.index(near[0])]}`?" if near else ""
    return f"there is no key `{wanted}`.{hint} See all with `axicfd keys`."
