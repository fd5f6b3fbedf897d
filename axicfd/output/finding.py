"""What a search for an input found: sentences, find.json, and the folder with the answers solved."""

from __future__ import annotations

from html import escape
from pathlib import Path
from typing import Any

from axicfd.output import csv, folder
from axicfd.output.headline import number, number_with_bar
from axicfd.variants.find import Answer, Found, Input, Target

MARK = "find.json"


def sentences(found: Found) -> list[str]:
    """One for each answer: "section.heater.length = 0.734 ±0.002 m gives layer.tube.hottest = 60.00 ±0.03 degC"."""
    said = [_answer(found, answer) for answer in found.answers]
    if not said:
        return [f"No answer. {found.why}"]
    if len(said) > 1:
        said.insert(0, f"{len(said)} answers:")
    return [*said, f"Not all was settled. {found.why}"] if found.why else said


def where_looked(found: Found) -> str:
    """The range and the effort, in one sentence."""
    effort = f"{_count(found.solves, 'solve')}, and {_count(len(found.looks), 'look')} on a coarse mesh"
    if found.between is None:
        return f"Begun from the case's own values; there may be other answers. {effort}."
    (one,) = found.inputs
    low, high = (f"{number(one.shown(value))} {one.unit}".rstrip() for value in found.between)
    return f"Looked through from {low} to {high}. {effort}."


def settings(found: Found, answer: Answer) -> list[str]:
    """What `--set` takes to solve an answer."""
    return [f"{i.path}={i.written(v)}" for i, v in zip(found.inputs, answer.inputs, strict=True)]


def html(found: Found) -> str:
    """The sentences as an HTML fragment; users' words are escaped."""
    return "".join(f"<p>{escape(text)}</p>" for text in (*sentences(found), where_looked(found)))


def json_text(found: Found) -> str:
    """find.json."""
    return folder.summary_text(found.as_dict())


def write(found: Found, path: Path, replace: bool = False) -> None:
    """find.json, the looks as looks.csv, and the results folder of every answer."""
    folder.refuse_unusable(path, replace, MARK)
    with folder.whole_or_not(path) as unfinished:
        (unfinished / MARK).write_text(json_text(found), encoding="utf-8")
        csv.write_columns(unfinished / "looks.csv", _look_columns(found))
        for name, answer in zip(answer_names(found), found.answers, strict=True):
            folder.write(answer.result, unfinished / name)


def answer_names(found: Found) -> list[str]:
    """Folders of the answers: found, or found-1, found-2 ..."""
    n = len(found.answers)
    return ["found"] if n == 1 else [f"found-{i}" for i in range(1, n + 1)]


def _answer(found: Found, answer: Answer) -> str:
    inputs = [
        _with_bar(i, f"{i.path} =", value, half)
        for i, value, half in zip(found.inputs, answer.inputs, answer.input_half_widths, strict=True)
    ]
    reached = [
        _with_bar(t, f"{t.quantity.path} =", value, half)
        for t, value, half in zip(found.targets, answer.quantities, answer.quantity_half_widths, strict=True)
    ]
    return f"{' and '.join(inputs)} {'gives' if len(inputs) == 1 else 'give'} {' and '.join(reached)}"


def _with_bar(of: Input | Target, name: str, value: float, half: float | None) -> str:
    width = (abs(of.shown(value + half) - of.shown(value)) or half) if half else None
    return f"{name} {number_with_bar(of.shown(value), width, digits=6)} {of.unit}".rstrip()


def _look_columns(found: Found) -> dict[str, Any]:
    columns: dict[str, Any] = {i.path: [entry.inputs[k] for entry in found.looks] for k, i in enumerate(found.inputs)}
    for k, target in enumerate(found.targets):
        name = target.quantity.path
        columns[name] = [None if entry.quantities is None else entry.quantities[k] for entry in found.looks]
    return {**columns, "why": [entry.why for entry in found.looks]}


def _count(n: int, word: str) -> str:
    return f"{n} {word}{'' if n == 1 else 's'}"
