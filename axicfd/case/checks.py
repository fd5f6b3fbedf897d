"""Contradictions between the values of a case whose keys are all readable and whose layers can be placed."""

from __future__ import annotations

import math
from collections.abc import Iterator
from typing import TYPE_CHECKING

from axicfd import units
from axicfd.case import keys
from axicfd.case.keys import ZTable
from axicfd.case.layout import PlacedLayer, PlacedSection, end_temperatures, layout
from axicfd.case.model import Case, FileProfile, Outside, Section
from axicfd.case.presence import Findings, Place
from axicfd.case.quantities import (
    NAMED,
    advice,
    combination_in,
    depends_on_mesh,
    key_named,
    kind_of_sum,
    quantities,
    quantity,
)
from axicfd.case.tolerance import FOLLOWS
from axicfd.errors import InputError, Mistake

if TYPE_CHECKING:
    from axicfd.case.read import Source

SAME_TEMPERATURE = 1e-6  # K; prescribed temperatures closer than this meet without a step
SAME_LENGTH = 1e-9  # relative; lengths closer than this are equal
GAS_DENSITY_CHANGE = 0.05  # density is held at its inlet value; our own limit for a gas
INLET_RADIUS_TOLERANCE = 0.02  # the radii of an inlet file may miss the bore's by this share of it


def contradictions(case: Case, source: Source) -> list[Mistake]:
    """What cannot be true together in a case whose keys are all readable."""
    found = Findings(case._tree, source)
    _sizes(case, found)
    if found.mistakes:
        return found.mistakes
    tube = layout(case)
    _same_bore(tube.sections, found)
    _layer_means_one_thing(case, found)
    _outsides(case, tube.sections, found)
    _joints(case, found)
    _places(case, tube.sections, found)
    _inlets(case, tube.bore_diameter, found)
    _mesh(case, tube.sections, found)
    _combinations(case, found)
    _limits(case, found)
    _accuracy(case, found)
    if not found.mistakes:
        _heat_has_somewhere_to_go(case, tube.sections, found)
        _gas(case, found)
    return found.mistakes


def _stacks(case: Case) -> Iterator[tuple[Place, tuple]]:
    """Each stack once, with its place."""
    if any(section.layer is None for section in case.section):
        yield ("layer",), case.layer
    for i, section in enumerate(case.section):
        if section.layer is not None:
            yield ("section", i, "layer"), section.layer


def _sizes(case: Case, found: Findings) -> None:
    for place, layers in _stacks(case):
        r = 0.0
        for i, layer in enumerate(layers):
            if layer.outer_diameter is not None:
                r_outer = layer.outer_diameter / 2
                if r_outer <= r * (1 + SAME_LENGTH):
                    written = units.written(2 * r, "length", "mm")
                    found.add(
                        (*place, i, "outer_diameter"),
                        _given(found, (*place, i, "outer_diameter"), layer.outer_diameter),
                        f"must be larger than the outer diameter of the layer inside it, {written}",
                    )
                    return
            else:
                r_outer = r + (layer.thickness or (layer.diameter or 0.0) / 2)
            if layer.void and (layer.heat_per_volume or layer.contact_resistance):
                name = "heat_per_volume" if layer.heat_per_volume else "contact_resistance"
                found.add(
                    (*place, i, name),
                    getattr(layer, name),
                    "means nothing in a void, which no heat crosses",
                    "Take it out.",
                )
            r = r_outer


def _given(found: Findings, place: Place, value: object) -> object:
    """The value as the user wrote it, or the model's where it was not written."""
    here = found.tree
    for step in place:
        try:
            here = here[step]
        except (KeyError, IndexError, TypeError):
            return value
    return here


def _same_bore(sections: tuple[PlacedSection, ...], found: Findings) -> None:
    bore = sections[0].layers[0].r_outer
    for i, section in enumerate(sections[1:], start=1):
        if not math.isclose(section.layers[0].r_outer, bore, rel_tol=SAME_LENGTH):
            was, here = (units.written(2 * r, "length", "mm") for r in (bore, section.layers[0].r_outer))
            found.add(
                ("section", i, "layer", 0, "diameter"),
                here,
                f"differs from the bore of section {sections[0].name!r}, {was}: steps of the bore are "
                "not available yet",
                "Give every section the same bore.",
            )


def _layer_means_one_thing(case: Case, found: Findings) -> None:
    first: dict[str, tuple[str, str]] = {}
    for place, layers in _stacks(case):
        for i, layer in enumerate(layers):
            content = (layer.kind, layer.stream or layer.solid or "void")
            if first.setdefault(layer.name, content) != content:
                found.add(
                    (*place, i),
                    None,
                    f'is called "{layer.name}", the name of a layer of {first[layer.name][1]} in another section',
                    'Give it another name = "...".',
                )


# ------------------------------------------------------------------------------------------------ conditions


def _outsides(case: Case, sections: tuple[PlacedSection, ...], found: Findings) -> None:
    for i, (section, placed) in enumerate(zip(case.section, sections, strict=True)):
        outside, place = section.outside, ("section", i, "outside")
        for name in Outside.model_fields:
            value = getattr(outside, name)
            if isinstance(value, ZTable):
                _covers(found, (*place, name), value, section)
        if placed.layers[-1].kind == "void" and not outside.insulated:
            found.add(
                place,
                _given(found, place, None),
                "acts on a void, which no heat crosses",
                "Write outside = { insulated = true }, or take the void out.",
            )


def _covers(found: Findings, place: Place, table: ZTable, section: Section) -> None:
    slack = SAME_LENGTH * section.length
    if abs(table.z[0]) <= slack and abs(table.z[-1] - section.length) <= slack:
        return
    z0, z1, length = (units.written(z, "length") for z in (table.z[0], table.z[-1], section.length))
    found.add(
        (*place, "z"),
        _given(found, (*place, "z"), None),
        f"must cover the section from its start to its end: it goes from {z0} to {z1}, the section "
        f"from 0 m to {length}",
        "z counts from the section's start.",
    )


def _is_pinned(outside: Outside) -> bool:
    """Whether a temperature is prescribed on the surface itself, with nothing between."""
    resistance = outside.contact_resistance
    if outside.temperature is None:
        return False
    return resistance is None or (min(resistance.value) <= 0 if isinstance(resistance, ZTable) else resistance <= 0)


_STEP = "the heat beside a step of prescribed temperature grows without limit as the mesh is refined"
_BRIDGES = "put a contact_resistance or a film_coefficient between"


def _joints(case: Case, found: Findings) -> None:
    """Steps of prescribed temperature have no finite heat: refused unless something stands between."""
    for i, (left, right) in enumerate(zip(case.section, case.section[1:], strict=False), start=1):
        place: Place = ("section", i, "joint_length")
        both = end_temperatures(left), end_temperatures(right)
        if right.joint_length is not None:
            joint = _given(found, place, right.joint_length)
            if both[0] is None or both[1] is None:
                found.add(
                    place,
                    joint,
                    "needs a prescribed `temperature` outside both sections that meet here",
                    "Take it out.",
                )
                continue
            after = case.section[i + 1].joint_length or 0.0 if i + 1 < len(case.section) else 0.0
            for section, taken in ((left, left.joint_length or 0.0), (right, after)):
                if right.joint_length / 2 + taken / 2 > section.length * (1 + SAME_LENGTH):
                    found.add(
                        place,
                        joint,
                        f"reaches beyond section {section.name!r}: half of the ramp lies in each section",
                        "Make it shorter.",
                    )
                    break
        elif both[0] is not None and both[1] is not None and _is_pinned(left.outside) and _is_pinned(right.outside):
            if abs(both[0][1] - both[1][0]) > SAME_TEMPERATURE:
                was, now = (units.written(T, "temperature", "degC") for T in (both[0][1], both[1][0]))
                at = ("section", i, "outside", "temperature")
                found.add(
                    at,
                    _given(found, at, now),
                    f"differs from the {was} outside section {left.name!r}: {_STEP}",
                    f'Give section {right.name!r} a joint_length = "2 mm" (a ramp centred on the '
                    f"joint), or {_BRIDGES}.",
                )
    if case.section[0].joint_length is not None:
        place = ("section", 0, "joint_length")
        found.add(
            place,
            _given(found, place, None),
            "has no section before it to join to",
            "Give it to the later one of two sections.",
        )
    for end, section, k in (("first", case.section[0], 0), ("last", case.section[-1], 1)):
        _end_joints(case, end, section, k, found)


def _end_joints(case: Case, end: str, section: Section, k: int, found: Findings) -> None:
    """Steps between a prescribed end temperature and the outside, and between two layers of the same end."""
    layers = case.layers_of(section)
    outside = end_temperatures(section)
    for inner, outer in zip(layers, layers[1:], strict=False):
        if inner.kind != "solid" or outer.kind != "solid" or outer.contact_resistance:
            continue
        a, b = case.ends.of(end, inner.name), case.ends.of(end, outer.name)
        if _is_pinned(a) and _is_pinned(b) and abs(a.temperature - b.temperature) > SAME_TEMPERATURE:  # type: ignore[operator]
            was = units.written(a.temperature, "temperature", "degC")  # type: ignore[arg-type]
            place: Place = ("ends", end, outer.name, "temperature")
            found.add(
                place,
                _given(found, place, b.temperature),
                f"differs from the {was} of the layer inside it: {_STEP}",
                f"Make them equal, or {_BRIDGES}.",
            )
    last = layers[-1]
    face = case.ends.of(end, last.name)
    if last.kind == "solid" and outside is not None and _is_pinned(section.outside) and _is_pinned(face):
        assert face.temperature is not None
        if abs(face.temperature - outside[k]) > SAME_TEMPERATURE:
            was = units.written(outside[k], "temperature", "degC")
            key = last.name if last.name in getattr(case.ends, end) else "all"
            place = ("ends", end, key, "temperature")
            written = _given(found, place, None) or _given(found, ("ends", end, "temperature"), face.temperature)
            found.add(
                place if key != "all" else ("ends", end, "temperature"),
                written,
                f"differs from the {was} outside section {section.name!r}: {_STEP}",
                f"Make them equal, or {_BRIDGES}.",
            )


# --------------------------------------------------------------------------------------- places, inlets, mesh


def _places(case: Case, sections: tuple[PlacedSection, ...], found: Findings) -> None:
    length = sections[-1].z1
    for name, sensor in case.sensor.items():
        place: Place = ("sensor", name)
        if sensor.z > length * (1 + SAME_LENGTH):
            at = (*place, "z")
            found.add(
                at,
                _given(found, at, sensor.z),
                f"lies beyond the tube, which is {units.written(length, 'length')} long",
                "z counts from the tube's start.",
            )
            continue
        stack = next((section for section in sections if sensor.z <= section.z1), sections[-1]).layers
        spots = ["outside", "axis", "bulk"]
        spots += [
            f"{layer.name} {face}"
            for j, layer in enumerate(stack)
            if layer.kind != "void"
            for face in ("inner", "outer")[0 if j else 1 :]
        ]
        if sensor.at not in spots:
            near = keys.nearest(sensor.at, spots)
            found.add(
                (*place, "at"),
                sensor.at,
                "is not a place in the cross-section there",
                f'Write "{near}".' if near else f"Write one of: {', '.join(spots)}.",
            )
        elif sensor.at == "outside" and stack[-1].kind == "void":
            found.add(
                (*place, "at"),
                sensor.at,
                "reads the outside of a void, which has no temperature",
                "Read a layer's face.",
            )
    for j, station in enumerate(case.results.stations):
        if station > length * (1 + SAME_LENGTH):
            at = ("results", "stations", j)
            found.add(
                at,
                _given(found, at, station),
                f"lies beyond the tube, which is {units.written(length, 'length')} long",
                "Stations count from the tube's start.",
            )


def _inlets(case: Case, bore: float, found: Findings) -> None:
    for name, stream in case.stream.items():
        fluid = case.fluid_of(name)
        low, high = fluid.span
        if fluid.outside_range == "refuse" and not low <= stream.inlet_temperature <= high:
            at: Place = ("stream", name, "inlet_temperature")
            reach = " to ".join(units.written(T, "temperature", "degC") for T in (low, high))
            found.add(
                at,
                _given(found, at, stream.inlet_temperature),
                f"lies outside the properties of {stream.fluid!r}, which are known from {reach}",
                'Give a wider table in [fluid.NAME], or outside_range = "hold" there.',
            )
        profile = stream.inlet_profile
        if isinstance(profile, FileProfile):
            at = ("stream", name, "inlet_profile")
            if (
                profile.r_m[0] > INLET_RADIUS_TOLERANCE * bore / 2
                or abs(profile.r_m[-1] - bore / 2) > INLET_RADIUS_TOLERANCE * bore / 2
            ):
                found.add(
                    at,
                    _given(found, at, None),
                    f"must reach from the axis to the bore's wall at {bore / 2:.6g} m; its r_m go from "
                    f"{profile.r_m[0]:g} to {profile.r_m[-1]:g}",
                    "Give radii in metres.",
                )
            if stream.is_still:
                found.add(
                    at,
                    _given(found, at, None),
                    "is a profile for a stream that does not flow",
                    "Take it out.",
                )


def _mesh(case: Case, sections: tuple[PlacedSection, ...], found: Findings) -> None:
    mesh = case.mesh
    if mesh.radial is not None:
        for place, layers in _stacks(case):
            if layers[0].cells_across is not None:
                at = (*place, 0, "cells_across")
                found.add(
                    at,
                    layers[0].cells_across,
                    "stands beside `mesh.radial`, which counts the same cells",
                    "Take one of the two out.",
                )
    if mesh.axial is not None and mesh.axial < len(sections):
        found.add(
            ("mesh", "axial"),
            mesh.axial,
            f"must be at least one cell for each of the {len(sections)} sections",
        )
    fewest = mesh.radial * mesh.axial if mesh.radial and mesh.axial else 0
    if mesh.at_most is not None and fewest > mesh.at_most:
        found.add(
            ("mesh", "at_most"),
            mesh.at_most,
            f"is less than `radial` times `axial`, {fewest}",
            f"Write at_most = {2 * fewest}, or smaller counts.",
        )


def _combinations(case: Case, found: Findings) -> None:
    """What `[quantity.NAME]` adds and takes away."""
    known = _formed(case)
    for name, combined in case.quantity.items():
        kinds: dict[str, list[str]] = {"plus": [], "minus": []}
        sound = True
        for side, of_side in kinds.items():
            for i, path in enumerate(getattr(combined, side)):
                wrong = _wrong_term(case, name, path, known)
                if wrong is None and not _builds_on_unsound(case, path, known):
                    of_side.append(quantity(case, path).kind)
                    continue
                sound = False
                if wrong:
                    found.add((NAMED, name, side, i), path, *wrong)
        if sound:
            try:
                kind_of_sum(kinds["plus"], kinds["minus"])
            except ValueError as why:
                hint = "As many in `minus` as in `plus` make a difference, one less makes a value such as a mean."
                found.add((NAMED, name), None, str(why), hint if "zero point" in str(why) else "")


def _formed(case: Case) -> set[str]:
    """Names of the combinations that can be formed as far as their kinds tell."""
    return {q.keys[1] for q in quantities(case, headline_only=True) if q.combined is not None}


def _wrong_term(case: Case, name: str, path: str, known: set[str]) -> tuple[str, str] | None:
    """(what is wrong, what to write) with a path in the combination of a name."""
    circle = _circle(case, name, path)
    if circle:
        return f"leads back to itself: {' -> '.join(circle)}", "Take it out of one of them."
    if _builds_on_unsound(case, path, known):
        return None  # said where it is wrong
    other = combination_in(path)
    if other is not None and other not in case.quantity:
        return "names no quantity of this case", advice(path, dict.fromkeys(case.quantity))
    try:
        term = quantity(case, path)
    except InputError as unknown:
        return unknown.mistakes[0].allowed, unknown.mistakes[0].instead
    if term.key.endswith("_z_m"):
        return "is a place, which is known to a cell and not refined like other results", "Take it out."
    return None


def _builds_on_unsound(case: Case, path: str, known: set[str]) -> bool:
    name = combination_in(path)
    return name in case.quantity and name not in known


def _circle(case: Case, name: str, path: str) -> list[str] | None:
    """The names on the way from a combination through one of its paths back to itself, or None."""
    ways = [([name], path)]
    while ways:
        way, path = ways.pop()
        step = combination_in(path)
        if step == name:
            return [*way, step]
        if step in case.quantity and step not in way:
            combined = case.quantity[step]
            ways += [([*way, step], further) for further in (*combined.plus, *combined.minus)]
    return None


def _limits(case: Case, found: Findings) -> None:
    """Paths in [limits] whose stream, layer, section or sensor the case does not have, or that say the same twice."""
    seen: dict[str, str] = {}
    known = _formed(case)
    for path in case.limits:
        if _builds_on_unsound(case, path, known):
            continue  # said where it is wrong
        try:
            limited = quantity(case, path).path
        except InputError as unknown:
            wrong = unknown.mistakes[0]
            found.add(("limits", path), _given(found, ("limits", path), None), wrong.allowed, wrong.instead)
            continue
        if limited in seen:
            found.add(
                ("limits", path),
                _given(found, ("limits", path), None),
                f"limits the same quantity as {seen[limited]}",
                "Write `below` and `above` in one entry.",
            )
        seen.setdefault(limited, path)


def _accuracy(case: Case, found: Findings) -> None:
    """Names in the table of `accuracy` that the case does not have."""
    wanted, known, every = case.solve.accuracy, _formed(case), list(quantities(case))
    for name in wanted if isinstance(wanted, dict) else ():
        place: Place = ("solve", "accuracy", name)
        if _builds_on_unsound(case, name, known):
            continue
        try:
            meant = (
                [quantity(case, name)]
                if "." in name
                else [q for q in every if q.keys[:1] + (q.key,) == key_named(name)]
            )
        except InputError as unknown:
            wrong = unknown.mistakes[0]
            found.add(place, _given(found, place, None), wrong.allowed, wrong.instead)
            continue
        if not meant:
            part, _ = key_named(name) or ("quantity", "")
            what = "solid layer" if part == "layer" else part
            found.add(place, _given(found, place, None), f"needs a {what}, and the case has none", "Take it out.")
        elif not any(depends_on_mesh(case, q) for q in meant):
            found.add(place, _given(found, place, None), f"has no mesh error: {FOLLOWS}", "Take it out.")


# ------------------------------------------------------------------------------------------------ heat


def _heat_has_somewhere_to_go(case: Case, sections: tuple[PlacedSection, ...], found: Findings) -> None:
    """Every connected part of the tube needs a flow or an outside temperature to settle its level."""
    group: dict[tuple[int, int], tuple[int, int]] = {}

    def root(node: tuple[int, int]) -> tuple[int, int]:
        while group[node] != node:
            node = group[node]
        return node

    for s, section in enumerate(sections):
        for j, layer in enumerate(section.layers):
            if layer.kind == "void":
                continue
            group[s, j] = (s, j)
            if j and (s, j - 1) in group:
                group[root((s, j))] = root((s, j - 1))
            for b, before in enumerate(sections[s - 1].layers) if s else ():
                if before.kind != "void" and min(before.r_outer, layer.r_outer) > max(before.r_inner, layer.r_inner):
                    group[root((s, j))] = root((s - 1, b))
    settled = set()
    for s, section in enumerate(sections):
        outermost = len(section.layers) - 1
        if (s, outermost) in group and _settles(section.outside):
            settled.add(root((s, outermost)))
        for j, layer in enumerate(section.layers):
            if (s, j) in group and _settled_inside(case, sections, s, layer):
                settled.add(root((s, j)))
    for s, j in sorted(node for node in group if group[node] == node and node not in settled):
        names = sorted({sections[a].layers[b].name for a, b in group if root((a, b)) == (s, j)})
        found.add(
            ("section", s),
            None,
            f"leaves the temperature of {', '.join(names)} open: nothing flows through, and no "
            "temperature or film stands outside",
            "Give a flow, or a temperature or a film_coefficient somewhere outside or at an end.",
        )


def _settles(outside: Outside) -> bool:
    film = outside.film_coefficient
    return outside.temperature is not None or (
        film is not None and (max(film.value) if isinstance(film, ZTable) else film) > 0
    )


def _settled_inside(case: Case, sections: tuple[PlacedSection, ...], s: int, layer: PlacedLayer) -> bool:
    if layer.kind == "stream":
        stream = case.stream[layer.material]
        forgotten = all(getattr(stream, flow) is None for flow in stream.FLOWS)  # said by itself
        return forgotten or not stream.is_still
    ends = [end for end, at in (("first", 0), ("last", len(sections) - 1)) if at == s]
    return any(_settles(case.ends.of(end, layer.name)) for end in ends)


def _gas(case: Case, found: Findings) -> None:
    """A gas whose density would change by more than 5 % at a temperature that is known beforehand."""
    for name, stream in case.stream.items():
        fluid = case.fluid_of(name)
        if not fluid.is_gas or stream.is_still:
            continue
        inlet = float(fluid.density(stream.inlet_temperature))
        for i, section in enumerate(case.section):
            for key in ("temperature", "ambient"):
                value = getattr(section.outside, key)
                if value is None:
                    continue
                for T in value.value if isinstance(value, ZTable) else (value,):
                    change = abs(float(fluid.density(T)) / inlet - 1)
                    if change > GAS_DENSITY_CHANGE:
                        place: Place = ("section", i, "outside", key)
                        found.add(
                            place,
                            _given(found, place, T),
                            f"changes the density of the gas {stream.fluid!r} by {100 * change:.0f} %; "
                            "more than 5 % is not available yet",
                            "Bring it closer to the inlet temperature.",
                        )
                        break
