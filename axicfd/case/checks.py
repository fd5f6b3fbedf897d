"""Contradictions between keys.

`presence` judges what stands beside what in the tables as written, so that its findings come together with
those of single values; `contradictions` judges the values of a case whose keys are all readable.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from typing import TYPE_CHECKING, Any

from axicfd import units
from axicfd.case import keys
from axicfd.case.keys import ZTable
from axicfd.case.layout import PlacedLayer, PlacedSection, end_temperatures, layout
from axicfd.case.model import Case, FileProfile, Outside, Section, Stream, layer_name
from axicfd.errors import Mistake
from axicfd.materials.library import FLUIDS, SOLIDS

if TYPE_CHECKING:
    from axicfd.case.read import Source

Place = tuple[str | int, ...]

SAME_TEMPERATURE = 1e-6  # K; prescribed temperatures closer than this meet without a step
SAME_LENGTH = 1e-9  # relative; lengths closer than this are equal
GAS_DENSITY_CHANGE = 0.05  # density is held at its inlet value; our own limit for a gas
INLET_RADIUS_TOLERANCE = 0.02  # the radii of an inlet file may miss the bore's by this share of it


class _Findings:
    """Collects mistakes at places of one tree."""

    def __init__(self, tree: Any, source: Source) -> None:
        self.tree, self.source = tree, source
        self.mistakes: list[Mistake] = []

    def add(self, place: Place, value: object, allowed: str, instead: str = "") -> None:
        self.mistakes.append(self.source.mistake(self.tree, place, value, allowed, instead))


# ------------------------------------------------------------------------------------------------ presence


def presence(tree: Any, source: Source) -> list[Mistake]:
    """What must stand together, or must not, in the tables of a case. Passes over values of a wrong shape."""
    found = _Findings(tree, source)
    if not isinstance(tree, dict):
        return []
    for kind in ("stream", "fluid", "solid", "sensor"):
        _names(found, kind, _table(tree.get(kind)))
    for name, stream in _tables(tree.get("stream")):
        _one_flow(found, ("stream", name), stream)
        _known(found, ("stream", name, "fluid"), stream.get("fluid"), _table(tree.get("fluid")), FLUIDS)
    if isinstance(tree.get("stream"), dict):
        for name in [name for name, _ in _tables(tree["stream"])][1:]:
            found.add(
                ("stream", name),
                None,
                "is a second stream: several streams are not available yet",
                "Keep one [stream.NAME].",
            )
        if not tree["stream"]:
            found.add(
                ("stream",),
                None,
                "is empty",
                "Write a table [stream.NAME] with its fluid, inlet temperature and flow.",
            )
    _stack(found, ("layer",), tree.get("layer"))
    sections = tree.get("section")
    if isinstance(sections, list):
        if not sections:
            found.add(
                ("section",), None, "is empty", "Write at least one [[section]] with `length` and `outside`."
            )
        for i, section in enumerate(sections):
            if not isinstance(section, dict):
                continue
            _stack(found, ("section", i, "layer"), section.get("layer"))
            if not section.get("layer") and not tree.get("layer"):
                found.add(
                    ("section", i),
                    None,
                    "has no layers",
                    "Write [[layer]] tables for all sections, or [[section.layer]] in this one.",
                )
            _condition(found, ("section", i, "outside"), section.get("outside"))
            _generation(
                found,
                ("section", i, "generated"),
                section.get("generated"),
                section.get("layer", tree.get("layer")),
            )
        _unique_names(found, sections)
    ends = _table(tree.get("ends"))
    for end in ("first", "last"):
        faces = ends.get(end)
        if not isinstance(faces, dict):
            continue
        for face, condition in (
            faces.items() if any(isinstance(value, dict) for value in faces.values()) else [(None, faces)]
        ):
            _condition(found, ("ends", end, face) if face else ("ends", end), condition)
        if (
            isinstance(sections, list)
            and sections
            and isinstance(sections[0 if end == "first" else -1], dict)
        ):
            section = sections[0 if end == "first" else -1]
            _end_names(found, ("ends", end), faces, section.get("layer", tree.get("layer")))
    return found.mistakes


def _table(value: Any) -> dict:
    return value if isinstance(value, dict) else {}


def _tables(value: Any) -> Iterator[tuple[str, dict]]:
    for name, entry in _table(value).items():
        if isinstance(entry, dict):
            yield name, entry


def _names(found: _Findings, kind: str, named: dict) -> None:
    as_file_name: dict[str, str] = {}
    for name in named:
        if not keys.is_name(name):
            found.add((kind, name), None, "must have a name of letters, digits, spaces, - and _")
        twin = as_file_name.setdefault(name.replace(" ", "-"), name)
        if twin != name:
            found.add(
                (kind, name),
                None,
                f'is called the same as "{twin}" once spaces become -',
                "Give it another name.",
            )


def _one_flow(found: _Findings, place: Place, stream: dict) -> None:
    given = [flow for flow in Stream.FLOWS if flow in stream]
    later = [flow for flow in ("pressure_drop", "standard_volume_flow") if flow in stream]
    if not given and not later:
        listed = ", ".join(Stream.FLOWS)
        found.add(
            place,
            None,
            f"needs its flow: exactly one of {listed}",
            'Write mass_flow = "4 g/s"; zero is allowed.',
        )
    for extra in given[1:]:
        found.add(
            (*place, extra),
            stream[extra],
            f"stands beside `{given[0]}`: the flow is given by exactly one of {', '.join(Stream.FLOWS)}",
            "Keep the one that is known, take the other out.",
        )


def _stack(found: _Findings, place: Place, layers: Any) -> None:
    if not isinstance(layers, list):
        return
    if not layers:
        found.add(place, None, "is empty", "Write at least one layer: the stream with its diameter.")
    names: set[str] = set()
    for i, layer in enumerate(layers):
        if not isinstance(layer, dict):
            continue
        here = (*place, i)
        given = [what for what in ("stream", "solid", "void") if layer.get(what)]
        if not given and "gas_gap" not in layer:
            found.add(
                here,
                None,
                "is a layer of nothing",
                'Write exactly one of stream = "NAME", solid = "NAME", void = true.',
            )
        for extra in given[1:]:
            found.add(
                (*here, extra),
                layer[extra],
                f"stands beside `{given[0]}`: a layer is exactly one of stream, solid, void",
            )
        _known(found, (*here, "solid"), layer.get("solid"), _table(found.tree.get("solid")), SOLIDS)
        _stream_in_place(found, here, layer, on_axis=i == 0)
        _size(found, here, layer, on_axis=i == 0)
        if i == 0 and "contact_resistance" in layer:
            found.add(
                (*here, "contact_resistance"),
                layer["contact_resistance"],
                "sits at a layer's inner face, and the layer on the axis has none",
                "Give it to the next layer outward.",
            )
        name = layer_name(layer)
        if name in names:
            found.add(
                here,
                None,
                f'is called "{name}" like a layer before it in the same stack',
                'Give each its own name = "...".',
            )
        names.add(name)


def _known(found: _Findings, place: Place, name: Any, own: Mapping, built_in: Mapping) -> None:
    """A fluid or solid must be the user's own or built in."""
    if not isinstance(name, str) or name in own or name in built_in:
        return
    kind = str(place[-1])
    near = keys.nearest(name, [*own, *built_in])
    begins = [other for other in built_in if name and other.startswith(name)]
    if begins:
        instead = "Write " + " or ".join(f'"{other}"' for other in begins) + "."
    elif near:
        instead = f'Write "{near}".'
    else:
        listed = ", ".join([*own, *built_in])
        instead = f"Write a [{kind}.{keys.toml_key(name)}] with its properties, or one of: {listed}."
    found.add(place, name, f"is neither a [{kind}] of the case nor built in", instead)


def _stream_in_place(found: _Findings, place: Place, layer: dict, on_axis: bool) -> None:
    streams = [name for name, _ in _tables(found.tree.get("stream"))]
    name = layer.get("stream")
    if isinstance(name, str) and name not in streams:
        near = keys.nearest(name, streams)
        listed = f"There is: {', '.join(streams)}." if streams else "Write its table [stream.NAME]."
        found.add(
            (*place, "stream"), name, "is not a [stream] of the case", f'Write "{near}".' if near else listed
        )
    elif isinstance(name, str) and not on_axis:
        found.add(
            (*place, "stream"),
            name,
            "flows around another layer: rods, annuli and several streams are not available yet",
            "Put the stream on the axis, as the first layer.",
        )
    elif on_axis and name is None and (layer.get("solid") or layer.get("void")):
        found.add(
            place,
            None,
            "begins a stack that has no stream on the axis: rods, annuli and tubes without a stream "
            "are not available yet",
            f'Begin the stack with stream = "{streams[0] if streams else "NAME"}".',
        )


def _size(found: _Findings, place: Place, layer: dict, on_axis: bool) -> None:
    if on_axis:
        for other in ("thickness", "outer_diameter"):
            if other in layer:
                found.add(
                    (*place, other),
                    layer[other],
                    "is not for the layer on the axis, which is given by its diameter",
                    "Write the bore as `diameter`."
                    if other == "outer_diameter"
                    else "Write `diameter`: twice this, if it was meant as a radius.",
                )
        if not {"diameter", "thickness", "outer_diameter"} & set(layer):
            found.add(
                place, None, "has no diameter", 'The layer on the axis needs one: write diameter = "12 mm".'
            )
        return
    if "diameter" in layer:
        found.add(
            (*place, "diameter"),
            layer["diameter"],
            "is only for the layer on the axis",
            "Write `thickness` or `outer_diameter`.",
        )
    elif "thickness" in layer and "outer_diameter" in layer:
        found.add(
            (*place, "outer_diameter"),
            layer["outer_diameter"],
            "stands beside `thickness`",
            "Keep one of the two.",
        )
    elif "thickness" not in layer and "outer_diameter" not in layer:
        found.add(place, None, "has no thickness", 'Write thickness = "1 mm", or outer_diameter.')


def _unique_names(found: _Findings, sections: list) -> None:
    seen: dict[str, int] = {}
    for i, section in enumerate(sections):
        name = section.get("name") if isinstance(section, dict) else None
        if not isinstance(name, str):
            continue
        if name.replace(" ", "-") in seen:
            found.add(
                ("section", i, "name"),
                name,
                f"is the name of section {seen[name.replace(' ', '-')] + 1} too",
                "Give it another name.",
            )
        seen.setdefault(name.replace(" ", "-"), i)


_CHOICES = "insulated = true, a temperature, or heat and film_coefficient with ambient"


def _condition(found: _Findings, place: Place, condition: Any) -> None:
    """What may stand together in `outside` or at an end."""
    if not isinstance(condition, dict):
        return
    given = [
        name
        for name in Outside.model_fields
        if name in condition and not (name == "insulated" and condition[name] is False)
    ]
    heats = [name for name in Outside.HEATS if name in given]
    if not given and not any(name in Outside.not_yet for name in condition):
        found.add(place, condition, "says nothing", f"Write {_CHOICES}.")
        return

    def extra(name: str, allowed: str, instead: str) -> None:
        found.add((*place, name), condition[name], allowed, instead)

    if "insulated" in given:
        for name in given:
            if name != "insulated":
                extra(
                    name,
                    "stands beside `insulated = true`, which lets no heat through",
                    "Take one of the two out.",
                )
        return
    if "temperature" in given:
        for name in (*heats, "film_coefficient", "ambient"):
            if name in given:
                extra(
                    name,
                    "stands beside a prescribed `temperature`, which settles the heat by itself",
                    "A film is film_coefficient with ambient; a resistance to a temperature is "
                    "contact_resistance.",
                )
        return
    if "contact_resistance" in given:
        extra(
            "contact_resistance",
            "stands without the `temperature` it leads to",
            'Write temperature = "85 degC" beside it; for a resistance between two layers write it in '
            "the [[layer]].",
        )
    for name in heats[1:]:
        extra(
            name,
            f"stands beside `{heats[0]}`: the heat is given by one of {', '.join(Outside.HEATS)}",
            "Take one of the two out.",
        )
    if "film_coefficient" in given and "ambient" not in given:
        extra("film_coefficient", "stands without `ambient`", 'Write ambient = "20 degC" beside it.')
    if "ambient" in given and "film_coefficient" not in given:
        extra(
            "ambient",
            "stands without `film_coefficient`",
            'Write film_coefficient = "10 W/m^2/K" beside it, or `temperature` if the surface itself '
            "is held at it.",
        )


def _generation(found: _Findings, place: Place, generated: Any, stack: Any) -> None:
    layers = (
        {layer_name(layer): layer for layer in stack if isinstance(layer, dict)}
        if isinstance(stack, list)
        else {}
    )
    for name, heat in _table(generated).items() if layers else ():
        if name not in layers:
            near = keys.nearest(name, layers)
            listed = f"Its layers are: {', '.join(layers)}."
            found.add(
                (*place, name), heat, "names no layer of this section", f"Write `{near}`." if near else listed
            )
        elif layers[name].get("void"):
            found.add(
                (*place, name),
                heat,
                "means nothing in a void, which no heat crosses",
                "Name a solid or the stream.",
            )


def _end_names(found: _Findings, place: Place, faces: dict, stack: Any) -> None:
    layers = (
        {layer_name(layer): layer for layer in stack if isinstance(layer, dict)}
        if isinstance(stack, list)
        else {}
    )
    solids = [name for name, layer in layers.items() if layer.get("solid")]
    listed = f"Solid layers there: {', '.join(solids)}." if solids else "There is no solid layer there."
    for name, face in faces.items():
        if not layers or name == "all" or not isinstance(face, dict):
            continue
        if name in layers and name not in solids:
            found.add((*place, name), None, "has no end face with a condition: only solids have", listed)
        elif name not in solids:
            near = keys.nearest(name, solids)
            found.add(
                (*place, name), None, "names no layer of this end", f"Write `{near}`." if near else listed
            )
    if (
        layers
        and not solids
        and faces
        and not any(isinstance(face, dict) for face in faces.values())
        and "insulated" not in faces
    ):
        found.add(place, faces, "acts on the end faces of solids, and there are none", "Take it out.")


# ------------------------------------------------------------------------------------------------ values


def contradictions(case: Case, source: Source) -> list[Mistake]:
    """What cannot be true together in a case whose keys are all readable."""
    found = _Findings(case._tree, source)
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


def _sizes(case: Case, found: _Findings) -> None:
    for place, layers in _stacks(case):
        r = 0.0
        for i, layer in enumerate(layers):
            if layer.outer_diameter is not None:
                r_outer = layer.outer_diameter / 2
                if r_outer <= r * (1 + SAME_LENGTH):
                    written = units.written(2 * r, "length")
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


def _given(found: _Findings, place: Place, value: object) -> object:
    """The value as the user wrote it, or the model's where it was not written."""
    here = found.tree
    for step in place:
        try:
            here = here[step]
        except (KeyError, IndexError, TypeError):
            return value
    return here


def _same_bore(sections: tuple[PlacedSection, ...], found: _Findings) -> None:
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


def _layer_means_one_thing(case: Case, found: _Findings) -> None:
    first: dict[str, tuple[str, str]] = {}
    for place, layers in _stacks(case):
        for i, layer in enumerate(layers):
            content = (layer.kind, layer.stream or layer.solid or "void")
            if first.setdefault(layer.name, content) != content:
                found.add(
                    (*place, i),
                    None,
                    f'is called "{layer.name}", the name of a layer of {first[layer.name][1]} in '
                    "another section",
                    'Give it another name = "...".',
                )


# ------------------------------------------------------------------------------------------------ conditions


def _outsides(case: Case, sections: tuple[PlacedSection, ...], found: _Findings) -> None:
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


def _covers(found: _Findings, place: Place, table: ZTable, section: Section) -> None:
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
    return resistance is None or (
        min(resistance.value) <= 0 if isinstance(resistance, ZTable) else resistance <= 0
    )


_STEP = "the heat beside a step of prescribed temperature grows without limit as the mesh is refined"
_BRIDGES = "put a contact_resistance or a film_coefficient between"


def _joints(case: Case, found: _Findings) -> None:
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
        elif (
            both[0] is not None
            and both[1] is not None
            and _is_pinned(left.outside)
            and _is_pinned(right.outside)
        ):
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


def _end_joints(case: Case, end: str, section: Section, k: int, found: _Findings) -> None:
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
            written = _given(found, place, None) or _given(
                found, ("ends", end, "temperature"), face.temperature
            )
            found.add(
                place if key != "all" else ("ends", end, "temperature"),
                written,
                f"differs from the {was} outside section {section.name!r}: {_STEP}",
                f"Make them equal, or {_BRIDGES}.",
            )


# --------------------------------------------------------------------------------------- places, inlets, mesh


def _places(case: Case, sections: tuple[PlacedSection, ...], found: _Findings) -> None:
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


def _inlets(case: Case, bore: float, found: _Findings) -> None:
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


def _mesh(case: Case, sections: tuple[PlacedSection, ...], found: _Findings) -> None:
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
    if fewest > mesh.at_most:
        found.add(
            ("mesh", "at_most"),
            mesh.at_most,
            f"is less than `radial` times `axial`, {fewest}",
            f"Write at_most = {2 * fewest}, or smaller counts.",
        )


# ------------------------------------------------------------------------------------------------ heat


def _heat_has_somewhere_to_go(case: Case, sections: tuple[PlacedSection, ...], found: _Findings) -> None:
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
                if before.kind != "void" and min(before.r_outer, layer.r_outer) > max(
                    before.r_inner, layer.r_inner
                ):
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
        return not case.stream[layer.material].is_still
    ends = [end for end, at in (("first", 0), ("last", len(sections) - 1)) if at == s]
    return any(_settles(case.ends.of(end, layer.name)) for end in ends)


def _gas(case: Case, found: _Findings) -> None:
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
