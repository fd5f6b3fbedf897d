"""The tube in text: its measures, a drawing to scale along z, and its sections in words."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

from axicfd import units
from axicfd.output.headline import amount, number
from axicfd.output.shown import Shown

COLUMNS = 72  # characters the tube's length takes
ROWS = 4  # lines from the axis to the outside, more where every layer needs one of its own
SOLID_MARKS = "#=%@"
VOID_MARK = "."


def first_line(tube: Any, shown: Shown) -> str:
    """`bore 12 mm, outside 14 mm, 1.4 m long`."""
    bore, outside = (number(shown.value("diameter", value)) for value in (tube.bore_diameter, tube.outer_diameter))
    unit = shown.unit("diameter")
    length = amount(shown, "length", tube.length)
    if tube.bore_diameter == tube.outer_diameter:
        return f"bore {bore} {unit}, no wall, {length} long"
    return f"bore {bore} {unit}, outside {outside} {unit}, {length} long"


def to_scale(case: Any, tube: Any, shown: Shown) -> Iterator[str]:
    """Lines of a drawing: to scale along z, the radius stretched; each layer at least one line thick."""
    marks = _marks(tube)
    edges = [round(section.z0 / tube.length * COLUMNS) for section in tube.sections] + [COLUMNS]
    yield from _names(tube, edges)
    lower = list(reversed(list(_half(tube, marks, edges))))
    upper = list(reversed(lower))
    _write_streams(case, tube, upper)
    centre = ("- . " * COLUMNS)[:COLUMNS]
    for line in [*upper, centre, *lower]:
        yield "  " + line
    yield "  " + _ruler(edges)
    end = amount(shown, "length", tube.length)
    yield "  0" + end.rjust(COLUMNS - 1)
    if marks:
        yield "  " + "   ".join(f"{mark} {name}" for name, mark in marks.items())


def sections(case: Any, tube: Any, shown: Shown) -> Iterator[list[str]]:
    """Rows: section, from, to, layers, outside."""
    for placed, given in zip(tube.sections, case.section, strict=True):
        layers = ", ".join(_layer_words(layer, shown) for layer in placed.layers)
        start, end = (amount(shown, "length", z) for z in (placed.z0, placed.z1))
        yield [placed.name, start, end, layers, outside_words(case, given)]


def outside_words(case: Any, section: Any) -> str:
    """The outside condition in the user's units."""
    outside, path = section.outside, f"section.{section.name}.outside"
    parts = []
    if outside.temperature is not None:
        words = f"held at {_quantity(case, f'{path}.temperature', 'temperature', outside.temperature)}"
        if outside.contact_resistance is not None:
            key = "contact_resistance"
            words += f" through {_quantity(case, f'{path}.{key}', key, outside.contact_resistance)}"
        parts.append(words)
    for key in ("heat_flux", "heat", "heat_per_length"):
        value = getattr(outside, key)
        if value is not None:
            parts.append(_quantity(case, f"{path}.{key}", key, value))
    if outside.film_coefficient is not None:
        film = _quantity(case, f"{path}.film_coefficient", "film_coefficient", outside.film_coefficient)
        ambient = _quantity(case, f"{path}.ambient", "temperature", outside.ambient)
        parts.append(f"film {film} to {ambient}")
    for name, watts in section.generated.items():
        parts.append(f"{number(watts)} W in {name}")
    return ", ".join(parts) or "insulated"


def _quantity(case: Any, path: str, kind: str, value: Any) -> str:
    """A value in the unit the user wrote it in; a table along z by its two ends."""
    unit = case.unit_of(path) or ("degC" if kind == "temperature" else units.KINDS[kind].si)
    ends = (value.value[0], value.value[-1]) if hasattr(value, "z") else (value,)
    try:
        numbers = [f"{float(units.convert(end, unit, kind)):.6g}" for end in ends]
    except units.UnitError:
        unit = units.KINDS[kind].si
        numbers = [f"{end:.6g}" for end in ends]
    return f"{' to '.join(numbers)} {unit}".replace("^2", "²")


def _marks(tube: Any) -> dict[str, str]:
    names: dict[str, str] = {}
    for section in tube.sections:
        for layer in section.layers:
            if layer.kind == "solid" and layer.name not in names:
                names[layer.name] = SOLID_MARKS[len(names) % len(SOLID_MARKS)]
            elif layer.kind == "void":
                names["no material"] = VOID_MARK
    return names


def _half(tube: Any, marks: dict[str, str], edges: list[int]) -> Iterator[str]:
    """Lines from the outside to the axis. Bands end wherever a layer of any section ends."""
    radii = sorted({layer.r_outer for section in tube.sections for layer in section.layers} | {0.0})
    for inner, outer in reversed(list(zip(radii, radii[1:], strict=False))):
        middle = (inner + outer) / 2
        line = "".join(
            _mark_at(section, middle, marks) * (end - start)
            for section, start, end in zip(tube.sections, edges, edges[1:], strict=False)
        )
        for _ in range(max(1, round(ROWS * (outer - inner) / radii[-1]))):
            yield line.rstrip() or ""


def _write_streams(case: Any, tube: Any, upper: list[str]) -> None:
    """The stream's name and the way it flows, in the free line nearest the axis."""
    for name in tube.stream_names:
        words = f"  < {name}" if case.stream[name].direction == "-z" else f"  {name} >"
        free = [i for i, line in enumerate(upper) if not line.strip()]
        if free:
            upper[free[-1]] = words[:COLUMNS]


def _mark_at(section: Any, radius: float, marks: dict[str, str]) -> str:
    for layer in section.layers:
        if layer.r_inner <= radius < layer.r_outer:
            if layer.kind == "stream":
                return " "
            return VOID_MARK if layer.kind == "void" else marks[layer.name]
    return " "


def _names(tube: Any, edges: list[int]) -> Iterator[str]:
    """Section names above their sections; those too long for theirs stand one line higher."""
    fitting, longer = [" "] * COLUMNS, [" "] * COLUMNS
    for section, start, end in zip(tube.sections, edges, edges[1:], strict=False):
        name = section.name[:COLUMNS]
        line = fitting if len(name) < end - start else longer
        first = max(0, min((start + end - len(name)) // 2, COLUMNS - len(name)))
        line[first : first + len(name)] = name
    for line in (longer, fitting):
        if "".join(line).strip():
            yield "  " + "".join(line).rstrip()


def _ruler(edges: list[int]) -> str:
    line = ["-"] * COLUMNS
    for edge in edges:
        line[min(edge, COLUMNS - 1)] = "|"
    return "".join(line)


def _layer_words(layer: Any, shown: Shown) -> str:
    if layer.kind == "stream":
        return f"{layer.name} to {number(shown.value('diameter', 2 * layer.r_outer))} {shown.unit('diameter')}"
    thickness = number(shown.value("diameter", layer.r_outer - layer.r_inner))
    what = "no material" if layer.kind == "void" else layer.name
    if layer.kind == "solid" and layer.material and layer.material != layer.name:
        what += f" ({layer.material})"
    return f"{what} {thickness} {shown.unit('diameter')}"
