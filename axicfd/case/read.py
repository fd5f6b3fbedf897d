"""Text of a case file -> `Case`; every mistake with its file and line."""

from __future__ import annotations

import os
import re
import tomllib
import typing
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from pydantic import BaseModel, ValidationError

from axicfd.case import keys, paths, quantities
from axicfd.case.lines import lines_of
from axicfd.case.model import Case, EndFace, Outside, Part, Stream, is_one_condition, layer_name
from axicfd.errors import InputError, Mistake

Place = tuple[str | int, ...]  # the way to a value in the tree of a case: names of tables, indices of lists


@dataclass(frozen=True)
class Source:
    """Where the values of a case come from, for the sentences about them.

    file    : name of the case file, or None for a case made in Python
    lines   : line of each key, table and list entry of the file
    settings: places that were set from outside the file (they have no line)
    """

    file: str | None = None
    lines: Mapping[Place, int] = field(default_factory=dict)
    settings: tuple[Place, ...] = ()

    def mistake(self, tree: Any, place: Place, value: object, allowed: str, instead: str = "") -> Mistake:
        """A mistake at a place in the tree; `value` None where nothing stands there."""
        key = paths.spelled(tree, place)
        if any(place[: len(setting)] == setting for setting in self.settings):
            return Mistake("set from outside the file", None, key, value, allowed, instead)
        for length in range(len(place), 0, -1):  # the nearest enclosing thing that has a line
            if place[:length] in self.lines:
                return Mistake(self.file, self.lines[place[:length]], key, value, allowed, instead)
        return Mistake(self.file, None, key, value, allowed, instead)


def load(case: str | os.PathLike, set: Mapping[str, Any] | None = None) -> Case:
    """The case in a file, in the case.toml of a results folder, or in text that holds line breaks.

    set : values to change, as `Case.replace` takes them, but with units as in the file
    Raises `InputError` with every mistake found.
    """
    text, file, directory = text_of(case)
    tree = tables_of(text, file)
    if "case" in tree and ("vary" in tree or "rows" in tree):
        sweep = f"`axicfd sweep {file}` solves its rows." if file else "`axicfd.sweep` solves its rows."
        raise InputError([Mistake(file, None, "", None, "is a plan of variants, not a case", sweep)])
    settings: list[Place] = []
    if set:
        before = tree
        tree = paths.replaced(tree, set)
        settings = [place for key in set if (place := paths.place_of(tree, key) or paths.place_of(before, key))]
    _find_files(tree, directory)
    return build(tree, Source(file, lines_of(text), tuple(settings)))


def build(tree: Mapping[str, Any], source: Source | None = None, in_file: bool = True) -> Case:
    """A case from the tables of a file (in_file) or of a Python programme, where bare numbers are SI."""
    return Case.model_validate(dict(tree), context={"source": source or Source(), keys.IN_FILE: in_file})


BEGIN_A_CASE = "`axicfd new NAME` writes a case to start from."


def tables_of(text: str, file: str | None) -> dict[str, Any]:
    """The tables of a TOML text. Raises `InputError` with the line where it is none."""
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as why:
        raise InputError([_syntax_mistake(file, text, str(why))]) from None


def text_of(case: str | os.PathLike, to_begin: str = BEGIN_A_CASE) -> tuple[str, str | None, Path]:
    """(text, name of the file, folder that paths in it are relative to).

    to_begin : what to say where there is no such file nor one of a similar name
    """
    if isinstance(case, str) and "\n" in case:
        return case, None, Path()
    path = Path(case)
    if path.is_dir():
        inside = path / "case.toml"
        if not inside.is_file():
            raise InputError(
                [
                    Mistake(
                        str(path),
                        None,
                        "",
                        None,
                        "is a folder without a case.toml in it",
                        "Name a case file.",
                    )
                ]
            )
        path = inside
    try:
        return path.read_text(encoding="utf-8-sig"), str(path), path.parent
    except FileNotFoundError:
        folder = path.parent if path.parent.is_dir() else Path()
        found = sorted(other.name for other in folder.glob("*.toml"))
        near = keys.nearest(path.name, found) or keys.nearest(path.name + ".toml", found)
        hint = f"Did you mean {folder / near}?" if near else to_begin
        raise InputError([Mistake(str(path), None, "", None, "does not exist", hint)]) from None
    except UnicodeDecodeError:
        raise InputError([Mistake(str(path), None, "", None, "is not UTF-8 text", "Save it as UTF-8.")]) from None
    except OSError as why:
        raise InputError([Mistake(str(path), None, "", None, f"cannot be read: {why.strerror or why}")]) from None


def _syntax_mistake(file: str | None, text: str, why: str) -> Mistake:
    """The parser's complaint with the place taken out of its text, and the commonest causes named."""
    line = None
    if "(at line " in why:
        why, _, rest = why.partition(" (at line ")
        line = int(rest.split(",")[0])
    elif "(at end of document)" in why:
        why = why.replace(" (at end of document)", "")
        line = len(text.splitlines())
    why = re.sub(r"\(([^()]*?),?\)", lambda names: names[1].replace("', '", ".").replace("'", "`"), why)
    read = text.splitlines()[line - 1].strip() if line and line <= len(text.splitlines()) else ""
    instead = ""
    after = read.partition("=")[2].strip()
    if after and after[0] not in "\"'[{" and any(mark.isalpha() for mark in after) and "Cannot overwrite" not in why:
        instead = f'A quantity or a word stands in quotes: "{after.partition("#")[0].strip()}".'
    elif "illegal character '\\n'" in why.lower():
        why = "a text has no closing quote"
        instead = f"Write {read.partition('#')[0].rstrip()}{after[:1]}."
    elif "Cannot overwrite" in why or "twice" in why or "declared" in why:
        instead = "The same key or table stands twice; for several sections or layers write [[section]], [[layer]]."
    allowed = f"is not TOML: {why[:1].lower()}{why[1:]}" + (f" in `{read}`" if read else "")
    return Mistake(file, line, "", None, allowed, instead)


def _find_files(tree: dict, directory: Path) -> None:
    """Make the names of files relative to the case file usable from anywhere."""
    streams = tree.get("stream")
    for stream in streams.values() if isinstance(streams, dict) else ():
        profile = stream.get("inlet_profile") if isinstance(stream, dict) else None
        if isinstance(profile, dict) and isinstance(profile.get("file"), str):
            profile["file"] = str(directory / profile["file"])


# ------------------------------------------------------------------------------------------------ the tree


def plain(data: Any) -> Any:
    """A copy made of dicts, lists and values only; keys whose value is None are left out."""
    if isinstance(data, BaseModel):
        return {name: plain(getattr(data, name)) for name in type(data).model_fields if name in data.model_fields_set}
    if isinstance(data, Mapping):
        return {key: plain(value) for key, value in data.items() if value is not None}
    if isinstance(data, list | tuple) and type(data) in (list, tuple):
        return [plain(value) for value in data]
    return data


def with_names(tree: Any) -> Any:
    """The tree with a name for every section: "section 1", "section 2" where none is given."""
    if not isinstance(tree, dict) or not isinstance(tree.get("section"), list):
        return tree
    sections = [
        {"name": f"section {i}"} | section if isinstance(section, dict) else section
        for i, section in enumerate(tree["section"], start=1)
    ]
    return tree | {"section": sections}


def with_kinds(tree: dict) -> dict:
    """The tree with the kinds of its named quantities beside the tables that hold values of quantities."""
    kinds = quantities.kinds_in(tree)
    told = dict(tree)
    if "limits" in tree:
        told["limits"] = keys.WithKinds(tree["limits"], kinds)
    if isinstance(tree.get("solve"), dict) and "accuracy" in tree["solve"]:
        told["solve"] = {**tree["solve"], "accuracy": keys.WithKinds(tree["solve"]["accuracy"], kinds)}
    return told


# ------------------------------------------------------------------------------------------------ the words


def as_input_error(found: ValidationError, tree: Any, source: Source, others: list[Mistake]) -> InputError:
    """The schema's findings in our own words, together with the contradictions already found."""
    mistakes = list(others)
    for error in found.errors(include_url=False):
        place = _place(error["loc"], tree)
        kind, value = error["type"], error["input"]
        part = part_at(error["loc"][:-1])
        if kind == "bad_value":
            for problem in error["ctx"]["bad"].problems:
                instead = _right_key(part, str(place[-1]), problem) or problem.instead
                mistakes.append(source.mistake(tree, place + problem.inner, problem.value, problem.allowed, instead))
        elif kind == "missing":
            mistakes.append(_missing(tree, place, part, source))
        elif kind == "extra_forbidden":
            mistakes.append(_unknown(tree, place, value, part, source))
        else:
            mistakes.append(_wrong_shape(tree, place, value, source))
    # keys right under [stream], where a name is missing, are one mistake and not many
    nameless = [mistake for mistake in mistakes if mistake.allowed == _NAMELESS]
    mistakes = [mistake for mistake in mistakes if mistake.allowed != _NAMELESS] + nameless[:1]
    unique = {(mistake.line, mistake.key, mistake.allowed): mistake for mistake in mistakes}
    return InputError(unique.values())


def _place(loc: Place, tree: Any) -> Place:
    """The place as the user wrote it: an end given as one condition has no "all" in it."""
    if len(loc) > 2 and loc[0] == "ends" and loc[2] == "all" and isinstance(tree, dict):
        end = tree.get("ends", {}).get(loc[1]) if isinstance(tree.get("ends"), dict) else None
        if is_one_condition(end) or not isinstance(end, dict):
            return (*loc[:2], *loc[3:])
    return loc


def part_at(loc: Place) -> type[Part] | None:
    """The model of the table at a place, or None where there is none."""
    part: type[Part] | None = Case
    inside = False  # whether the next step picks one entry of a list or of a table of names
    for step in loc:
        if inside:
            inside = False
            continue
        if part is None or step not in part.model_fields:
            return None
        annotation = part.model_fields[str(step)].annotation
        part = _part_in(annotation)
        inside = _is_container(annotation)
    return None if inside else part


def _part_in(annotation: Any) -> type[Part] | None:
    if isinstance(annotation, type) and issubclass(annotation, Part):
        return annotation
    return next((part for entry in typing.get_args(annotation) if (part := _part_in(entry))), None)


def _is_container(annotation: Any) -> bool:
    if typing.get_origin(annotation) in (dict, tuple):
        return True
    return any(_is_container(entry) for entry in typing.get_args(annotation))


def declared(part: type[Part], name: str) -> keys.Key | None:
    """The declaration of a key, or None where the key holds a table."""
    info = part.model_fields.get(name)
    return next((entry for entry in info.metadata if isinstance(entry, keys.Key)), None) if info else None


def key_at(place: Place) -> keys.Key | None:
    """The declaration of the value at a place: also of one layer's heat, and of a conductivity across or along."""
    if place[:1] == ("ends",):
        return declared(EndFace, str(place[-1]))
    part = part_at(place[:-1])
    if part is not None:
        return declared(part, str(place[-1]))
    of_all = declared(part, str(place[-2])) if (part := part_at(place[:-2])) else None
    return of_all.entry if isinstance(of_all, keys.PerName) else of_all


def tolerances_in(case: Case) -> dict[str, keys.InputTolerance]:
    """Path -> tolerance of every value that a case gives with one; the case was read without complaint."""
    found: dict[str, keys.InputTolerance] = {}
    for path in paths.values_in(case):
        value, place = paths.find(case._tree, path), paths.place_of(case._tree, path)
        if keys.has_tolerance(value) and place is not None:
            key = key_at(place)
            assert isinstance(key, keys.Quantity)
            found[path] = key.read_tolerance(value, in_file=False)
    return found


def _right_key(part: type[Part] | None, name: str, problem: keys.Problem) -> str:
    """For a value whose unit is that of another key of the same table: that key."""
    if part is None or not problem.looks_like:
        return ""
    for other in part.model_fields:
        key = declared(part, other)
        if other != name and isinstance(key, keys.Quantity) and key.kind in problem.looks_like:
            return f'Write `{other} = "{problem.value}"` if that is meant.'
    return ""


def _missing(tree: Any, place: Place, part: type[Part] | None, source: Source) -> Mistake:
    name = str(place[-1])
    key = declared(part, name) if part else None
    if key:
        return source.mistake(tree, place, None, f"is missing; it {key.allowed}", f"Write {name} = {key.example}.")
    instead = {
        "stream": "Write a table [stream.NAME] with its fluid, inlet temperature and flow.",
        "section": "Write at least one [[section]] with `length` and `outside`.",
        "outside": "Write outside = { insulated = true }, or the heat or film that acts on it.",
    }.get(name, "")
    return source.mistake(tree, place, None, "is missing", instead)


def _unknown(tree: Any, place: Place, value: Any, part: type[Part] | None, source: Source) -> Mistake:
    name = str(place[-1])
    if part and name in part.not_yet:
        return source.mistake(tree, place, value, f"is not available yet ({part.not_yet[name]})", "Take it out.")
    table = _table_words(place[:-1])
    if place[:-1] and name in Case.model_fields and declared(Case, name):
        return source.mistake(
            tree, place, value, f"stands inside {table}", "Move it above the first [table] of the file."
        )
    known = [*part.model_fields, *part.not_yet] if part else []
    if part is Case and name in Stream.model_fields:
        return source.mistake(tree, place, value, "stands above the first table", f"Move it into {_home_of(name)}.")
    near = keys.nearest(name, known)
    if near:
        return source.mistake(tree, place, value, "is not a known key", f"Write `{near}`.")
    above = keys.nearest(name, [top for top in Case.model_fields if declared(Case, top)])
    if above and place[:-1] and not isinstance(value, dict):
        return source.mistake(
            tree,
            place,
            value,
            f"is not a key of {table}",
            f"If `{above}` is meant, move it above the first [table].",
        )
    home = _home_of(name)
    if home:
        return source.mistake(tree, place, value, f"is not a key of {table}", f"It belongs into {home}.")
    listed = ", ".join(part.model_fields) if part else ""
    return source.mistake(tree, place, value, "is not a known key", f"Known here: {listed}." if listed else "")


_NAMELESS = "must be a table with a name"

_HOMES = {
    "stream": "[stream.NAME]",
    "fluid": "[fluid.NAME]",
    "solid": "[solid.NAME]",
    "layer": "[[layer]]",
    "section": "[[section]]",
    "sensor": "[sensor.NAME]",
    "quantity": "[quantity.NAME]",
    "mesh": "[mesh]",
    "physics": "[physics]",
    "solve": "[solve]",
    "results": "[results]",
}


def _home_of(name: str) -> str:
    """The table in which a key is at home, or an empty text."""
    for table, words in _HOMES.items():
        part = _part_in(Case.model_fields[table].annotation)
        if part and name in part.model_fields:
            return words
    return "`outside` of a [[section]]" if name in Outside.model_fields else ""


def _table_words(place: Place) -> str:
    """A table as its header would name it."""
    if not place:
        return "the top of the file"
    names = ".".join(keys.toml_key(step) for step in place if isinstance(step, str))
    return f"[[{names}]]" if isinstance(place[-1], int) else f"[{names}]"


def _wrong_shape(tree: Any, place: Place, value: Any, source: Source) -> Mistake:
    first = str(place[0]) if place else ""
    if first in ("section", "layer") or "layer" in place:
        name = ".".join(str(step) for step in place if isinstance(step, str))
        return source.mistake(tree, place, value, "must be a list of tables", f"Write [[{name}]] above each one.")
    if first in ("stream", "fluid", "solid", "sensor", "quantity") and len(place) <= 2:
        return source.mistake(tree, place, value, _NAMELESS, f"Write [{first}.NAME] above its keys.")
    if "outside" in place or first == "ends":
        return source.mistake(tree, place, value, "must be a table", "Write it in braces: { insulated = true }.")
    return source.mistake(tree, place, value, "must be a table", f"Write [{first}] above its keys." if first else "")


__all__ = [
    "InputError",
    "Source",
    "as_input_error",
    "build",
    "declared",
    "key_at",
    "layer_name",
    "load",
    "part_at",
    "plain",
    "tables_of",
    "text_of",
    "tolerances_in",
    "with_names",
]
