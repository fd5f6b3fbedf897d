"""What must stand together, or must not, in the tables of a case as they were written.

These rules need no readable value, so that what they find comes together with the bad values. They pass over
what has a wrong shape, which is found elsewhere.
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from typing import TYPE_CHECKING, Any

from axicfd.case import keys
from axicfd.case.model import Outside, Stream, is_one_condition, layer_name
from axicfd.errors import Mistake
from axicfd.materials.library import FLUIDS, SOLIDS

if TYPE_CHECKING:
    from axicfd.case.read import Source

Place = tuple[str | int, ...]


class Findings:
    """Collects mistakes at places of one tree."""

    def __init__(self, tree: Any, source: Source) -> None:
        self.tree, self.source = tree, source
        self.mistakes: list[Mistake] = []

    def add(self, place: Place, value: object, allowed: str, instead: str = "") -> None:
        self.mistakes.append(self.source.mistake(self.tree, place, value, allowed, instead))


def in_structure(tree: dict, source: Source) -> list[Mistake]:
    """Names, materials and stacks: without them right nothing can be placed."""
    found = Findings(tree, source)
    for kind in ("stream", "fluid", "solid", "sensor", "quantity"):
        _names(found, kind, _table(tree.get(kind)))
    _streams(found, tree)
    _stack(found, ("layer",), tree.get("layer"))
    sections = tree.get("section")
    if sections == []:
        found.add(("section",), None, "is empty", "Write at least one [[section]] with `length` and `outside`.")
    for i, section in _entries(sections):
        _stack(found, ("section", i, "layer"), section.get("layer"))
        if not section.get("layer") and not tree.get("layer"):
            found.add(
                ("section", i),
                None,
                "has no layers",
                "Write [[layer]] tables for all sections, or [[section.layer]] in this one.",
            )
    _unique_names(found, sections)
    return found.mistakes


def in_conditions(tree: dict, source: Source) -> list[Mistake]:
    """Flows, outside conditions, generation and ends."""
    found = Findings(tree, source)
    for name, stream in _tables(tree.get("stream")):
        _one_flow(found, ("stream", name), stream)
    sections = tree.get("section")
    for i, section in _entries(sections):
        _condition(found, ("section", i, "outside"), section.get("outside"))
        stack = section.get("layer", tree.get("layer"))
        _generation(found, ("section", i, "generated"), section.get("generated"), stack)
    for end, faces in _tables(tree.get("ends")):
        per_layer = not is_one_condition(faces)
        for face, condition in faces.items() if per_layer else [("", faces)]:
            place: Place = ("ends", end, face) if face else ("ends", end)
            _condition(found, place, condition)
            if isinstance(condition, dict) and "heat_per_length" in condition:
                found.add(
                    (*place, "heat_per_length"),
                    condition["heat_per_length"],
                    "is for a length of tube",
                    "An end face takes `heat` or `heat_flux`.",
                )
        at_end = [section for _, section in _entries(sections)][0 if end == "first" else -1 :][:1]
        for section in at_end:
            _end_names(found, ("ends", end), faces, section.get("layer", tree.get("layer")))
    return found.mistakes


def _entries(value: Any) -> Iterator[tuple[int, dict]]:
    """The tables in a list of tables."""
    for i, entry in enumerate(value if isinstance(value, list) else ()):
        if isinstance(entry, dict):
            yield i, entry


def _streams(found: Findings, tree: dict) -> None:
    streams = tree.get("stream")
    if streams == {}:
        found.add(
            ("stream",),
            None,
            "is empty",
            "Write a table [stream.NAME] with its fluid, inlet temperature and flow.",
        )
    for i, (name, stream) in enumerate(_tables(streams)):
        _known(found, ("stream", name, "fluid"), stream.get("fluid"), _table(tree.get("fluid")), FLUIDS)
        if i:
            found.add(
                ("stream", name),
                None,
                "is a second stream: several streams are not available yet",
                "Keep one [stream.NAME].",
            )


def _table(value: Any) -> dict:
    return value if isinstance(value, dict) else {}


def _tables(value: Any) -> Iterator[tuple[str, dict]]:
    for name, entry in _table(value).items():
        if isinstance(entry, dict):
            yield name, entry


def _names(found: Findings, kind: str, named: dict) -> None:
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


def _one_flow(found: Findings, place: Place, stream: dict) -> None:
    given = [flow for flow in Stream.FLOWS if flow in stream]
    if not given and "standard_volume_flow" not in stream:
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


def _stack(found: Findings, place: Place, layers: Any) -> None:
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


def _known(found: Findings, place: Place, name: Any, own: Mapping, built_in: Mapping) -> None:
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


def _stream_in_place(found: Findings, place: Place, layer: dict, on_axis: bool) -> None:
    streams = [name for name, _ in _tables(found.tree.get("stream"))]
    name = layer.get("stream")
    if isinstance(name, str) and name not in streams:
        near = keys.nearest(name, streams)
        listed = f"There is: {', '.join(streams)}." if streams else "Write its table [stream.NAME]."
        found.add((*place, "stream"), name, "is not a [stream] of the case", f'Write "{near}".' if near else listed)
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


def _size(found: Findings, place: Place, layer: dict, on_axis: bool) -> None:
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
            found.add(place, None, "has no diameter", 'The layer on the axis needs one: write diameter = "12 mm".')
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


def _unique_names(found: Findings, sections: Any) -> None:
    seen: dict[str, int] = {}
    for i, section in _entries(sections):
        name = section.get("name")
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


def _condition(found: Findings, place: Place, condition: Any) -> None:
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
            if name in given and not (name == "ambient" and "film_coefficient" in given):
                extra(
                    name,
                    "stands beside a prescribed `temperature`, which settles the heat by itself",
                    "A film is film_coefficient with ambient; a resistance to a temperature is contact_resistance.",
                )
        return
    if "contact_resistance" in given:
        extra(
            "contact_resistance",
            "stands without the `temperature` it leads to",
            'Write temperature = "85 degC" beside it; for a resistance between two layers write it in the [[layer]].',
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
            'Write film_coefficient = "10 W/m^2/K" beside it, or `temperature` if the surface itself is held at it.',
        )


def _generation(found: Findings, place: Place, generated: Any, stack: Any) -> None:
    layers = {layer_name(layer): layer for layer in stack if isinstance(layer, dict)} if isinstance(stack, list) else {}
    for name, heat in _table(generated).items() if layers else ():
        if name not in layers:
            near = keys.nearest(name, layers)
            listed = f"Its layers are: {', '.join(layers)}."
            found.add((*place, name), heat, "names no layer of this section", f"Write `{near}`." if near else listed)
        elif layers[name].get("void"):
            found.add(
                (*place, name),
                heat,
                "means nothing in a void, which no heat crosses",
                "Name a solid or the stream.",
            )


def _end_names(found: Findings, place: Place, faces: dict, stack: Any) -> None:
    layers = {layer_name(layer): layer for layer in stack if isinstance(layer, dict)} if isinstance(stack, list) else {}
    solids = [name for name, layer in layers.items() if layer.get("solid")]
    listed = f"Solid layers there: {', '.join(solids)}." if solids else "There is no solid layer there."
    for name, face in faces.items():
        if not layers or name == "all" or not isinstance(face, dict) or is_one_condition(faces):
            continue
        if name in layers and name not in solids:
            found.add((*place, name), None, "has no end face with a condition: only solids have", listed)
        elif name not in solids:
            near = keys.nearest(name, solids)
            found.add((*place, name), None, "names no layer of this end", f"Write `{near}`." if near else listed)
    if layers and not solids and faces and is_one_condition(faces) and "insulated" not in faces:
        found.add(place, faces, "acts on the end faces of solids, and there are none", "Take it out.")
