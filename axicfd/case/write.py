"""`Case` -> text of a case file, complete, in the user's own units where some were given.

Reading the text again gives an equal case: a number is written with as many digits as lead back to it.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from axicfd.case.keys import toml_key
from axicfd.case.limits import Accepted, Limits
from axicfd.case.model import Case, EndFace, Layer, Part, Section
from axicfd.case.read import declared


def to_toml(case: Case) -> str:
    """The text of a case file that reads back as `case`."""
    return _text(case, case._tree)


def canonical(case: Case) -> str:
    """A text that two cases share exactly when they ask for the same solve: SI values, without the title."""
    return _text(case, {}, leave_out=("title",))


def _text(case: Case, raw: Any, leave_out: tuple[str, ...] = ()) -> str:
    blocks = ["\n".join(_pairs(case, raw, ("limits", "accept", *leave_out)))]
    for kind in ("stream", "fluid", "solid"):
        for name, part in getattr(case, kind).items():
            blocks.append(_block(f"[{kind}.{toml_key(name)}]", _pairs(part, _inside(raw, kind, name))))
    for i, layer in enumerate(case.layer):
        blocks.append(_layer("[[layer]]", layer, _inside(raw, "layer", i)))
    for i, section in enumerate(case.section):
        blocks += _section(section, _inside(raw, "section", i))
    blocks.append(_block("[ends]", _ends(case, _inside(raw, "ends"))))
    for name, sensor in case.sensor.items():
        blocks.append(_block(f"[sensor.{toml_key(name)}]", _pairs(sensor, _inside(raw, "sensor", name))))
    for name, combined in case.quantity.items():
        blocks.append(_block(f"[quantity.{toml_key(name)}]", _pairs(combined, _inside(raw, "quantity", name))))
    for kind in ("limits", "accept"):
        key = declared(Case, kind)
        assert isinstance(key, Limits | Accepted)
        if lines := key.pairs(getattr(case, kind), _inside(raw, kind)):
            blocks.append(_block(f"[{kind}]", lines))
    for kind in ("mesh", "physics", "solve", "results"):
        if lines := _pairs(getattr(case, kind), _inside(raw, kind)):
            blocks.append(_block(f"[{kind}]", lines))
    return "\n\n".join(blocks) + "\n"


def _inside(raw: Any, *steps: str | int) -> Any:
    """What the user wrote at a place, or an empty table."""
    for step in steps:
        try:
            raw = raw[step]
        except (KeyError, IndexError, TypeError):
            return {}
    return raw


def _block(header: str, lines: list[str]) -> str:
    return "\n".join([header, *lines])


def _pairs(part: Part, raw: Any, leave_out: tuple[str, ...] = ()) -> list[str]:
    """`key = value` of every key of a table that has a value, tables within it left out."""
    raw = raw if isinstance(raw, Mapping) else {}
    lines = []
    for name in type(part).model_fields:
        key, value = declared(type(part), name), getattr(part, name)
        if key is None or value is None or value == () or name in leave_out:
            continue
        lines.append(f"{name} = {key.write(value, raw.get(name))}")
    return lines


def _inline(part: Part, raw: Any) -> str:
    switches = ("insulated",) if len(part.model_fields_set) and not getattr(part, "insulated", True) else ()
    return "{ " + ", ".join(_pairs(part, raw, switches)) + " }"


def _layer(header: str, layer: Layer, raw: Any) -> str:
    return _block(header, _pairs(layer, raw, () if layer.void else ("void",)))


def _section(section: Section, raw: Any) -> list[str]:
    leave_out = () if section.generated else ("generated",)
    lines = [
        *_pairs(section, raw, leave_out),
        f"outside = {_inline(section.outside, _inside(raw, 'outside'))}",
    ]
    blocks = [_block("[[section]]", lines)]
    for i, layer in enumerate(section.layer or ()):
        blocks.append(_layer("[[section.layer]]", layer, _inside(raw, "layer", i)))
    return blocks


def _ends(case: Case, raw: Any) -> list[str]:
    lines = []
    for end in ("first", "last"):
        faces: dict[str, EndFace] = getattr(case.ends, end)
        given = _inside(raw, end)
        if list(faces) == ["all"]:
            lines.append(f"{end} = {_inline(faces['all'], given.get('all', given))}")
            continue
        for name, face in faces.items():
            lines.append(f"{end}.{toml_key(name)} = {_inline(face, _inside(given, name))}")
    return lines
