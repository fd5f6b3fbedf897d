"""Where everything is: sections along z, layers across r, in SI. All later stages read the geometry here."""

from __future__ import annotations

import math
from dataclasses import dataclass

from axicfd.case.keys import ZTable
from axicfd.case.model import Case, Outside, Section


@dataclass(frozen=True)
class PlacedLayer:
    """A layer in one section.

    kind               : "stream", "solid" or "void"
    material           : name of the stream or of the solid; empty for a void
    r_inner, r_outer   : [m]
    contact_resistance : [m2 K/W] at r_inner; 0 where there is none
    heat_per_volume    : [W/m3], and `generated` [W] in this section: the heat in the layer is the sum of both
    cells_across       : number of cells asked for, or None
    """

    name: str
    kind: str
    material: str
    r_inner: float
    r_outer: float
    contact_resistance: float = 0.0
    heat_per_volume: float = 0.0
    generated: float = 0.0
    cells_across: int | None = None

    @property
    def area(self) -> float:
        """Cross-section [m2]."""
        return math.pi * (self.r_outer - self.r_inner) * (self.r_outer + self.r_inner)


@dataclass(frozen=True)
class PlacedSection:
    """A section from z0 to z1 [m], its layers from the axis outward, and its outside condition.

    The ramp of a `joint_length` is already in the temperature table of `outside`.
    """

    name: str
    z0: float
    z1: float
    layers: tuple[PlacedLayer, ...]
    outside: Outside

    @property
    def length(self) -> float:
        """[m]"""
        return self.z1 - self.z0

    @property
    def surface_is_held(self) -> bool:
        """Whether the surface itself has a prescribed temperature, with nothing in between."""
        held = self.outside.temperature is not None and not self.outside.contact_resistance
        return held and self.layers[-1].kind != "void"

    @property
    def is_heated(self) -> bool:
        """Whether heat comes in or out from outside, or is generated here."""
        return not self.outside.insulated or any(self.heat_density(layer) for layer in self.layers)

    def heat_density(self, layer: PlacedLayer) -> float:
        """Heat generated in a layer of this section [W/m3], of both keys together."""
        return layer.heat_per_volume + layer.generated / (layer.area * self.length)


@dataclass(frozen=True)
class Layout:
    """The tube: sections in the order of z."""

    sections: tuple[PlacedSection, ...]

    @property
    def length(self) -> float:
        """Of the whole tube [m]."""
        return self.sections[-1].z1

    @property
    def bore_diameter(self) -> float:
        """Of the stream on the axis [m]."""
        return 2 * next(layer.r_outer for layer in self.sections[0].layers if layer.kind == "stream")

    @property
    def outer_diameter(self) -> float:
        """The largest of all sections [m]."""
        return 2 * max(section.layers[-1].r_outer for section in self.sections)

    @property
    def stream_names(self) -> tuple[str, ...]:
        """Streams from the axis outward, each once."""
        names = (layer.material for section in self.sections for layer in section.layers if layer.kind == "stream")
        return tuple(dict.fromkeys(names))


def layout(case: Case) -> Layout:
    """Place the sections and layers of a case."""
    outsides = _with_ramps(case)
    sections = []
    ends = [math.fsum(section.length for section in case.section[: i + 1]) for i in range(len(case.section))]
    for section, z0, z1, outside in zip(case.section, [0.0, *ends], ends, outsides, strict=False):
        sections.append(PlacedSection(section.name, z0, z1, _placed_layers(case, section), outside))
    return Layout(tuple(sections))


def _placed_layers(case: Case, section: Section) -> tuple[PlacedLayer, ...]:
    placed = []
    r = 0.0
    for layer in case.layers_of(section):
        if layer.diameter is not None or layer.outer_diameter is not None:
            r_outer = (layer.diameter or layer.outer_diameter or 0.0) / 2
        else:
            r_outer = r + (layer.thickness or 0.0)
        placed.append(
            PlacedLayer(
                layer.name,
                layer.kind,
                layer.stream or layer.solid or "",
                r,
                r_outer,
                layer.contact_resistance or 0.0,
                layer.heat_per_volume or 0.0,
                section.generated.get(layer.name, 0.0),
                layer.cells_across,
            )
        )
        r = r_outer
    return tuple(placed)


def end_temperatures(section: Section) -> tuple[float, float] | None:
    """The prescribed outside temperature at a section's start and end [K], or None where there is none."""
    temperature = section.outside.temperature
    if temperature is None:
        return None
    if isinstance(temperature, ZTable):
        return temperature.at(0.0), temperature.at(section.length)
    return temperature, temperature


def _with_ramps(case: Case) -> list[Outside]:
    """The outside conditions, with the ramp of each joint that has one in the temperatures on both sides."""
    tables = [_as_points(section) for section in case.section]
    for i in range(1, len(case.section)):
        joint, left, right = case.section[i].joint_length, tables[i - 1], tables[i]
        if not joint or left is None or right is None:
            continue
        before, half = case.section[i - 1].length, joint / 2
        low, high = _value_at(left, before - half), _value_at(right, half)
        left[:] = [point for point in left if point[0] < before - half] + [
            (before - half, low),
            (before, (low + high) / 2),
        ]
        right[:] = [(0.0, (low + high) / 2), (half, high)] + [point for point in right if point[0] > half]
    outsides = []
    for section, points in zip(case.section, tables, strict=True):
        outside = section.outside
        if points is not None and (isinstance(outside.temperature, ZTable) or len({value for _, value in points}) > 1):
            outside = outside.model_copy(update={"temperature": ZTable(*map(tuple, zip(*points, strict=True)))})
        outsides.append(outside)
    return outsides


def _as_points(section: Section) -> list[tuple[float, float]] | None:
    """A prescribed temperature as points (z, T) over the section."""
    temperature = section.outside.temperature
    if temperature is None:
        return None
    if isinstance(temperature, ZTable):
        return list(zip(temperature.z, temperature.value, strict=True))
    return [(0.0, temperature), (section.length, temperature)]


def _value_at(points: list[tuple[float, float]], z: float) -> float:
    z_points, values = zip(*points, strict=True)
    return ZTable(z_points, values).at(z)
