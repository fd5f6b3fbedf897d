"""Does the wall matter? A case in full, with a wall that only resists across, and without its wall.

The three are cases of their own on the meshes of the first; the differences between neighbours are the effects of
conduction along the wall and of the wall's radial resistance.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from typing import Any

from axicfd.case.keys import ZTable
from axicfd.case.layout import Layout, PlacedSection, layout
from axicfd.case.model import AlongAcross, Case, Layer, Outside, expect_case
from axicfd.case.quantities import ResultQuantity, quantities, quantity
from axicfd.case.read import plain
from axicfd.errors import AxicfdError
from axicfd.glossary import Reported
from axicfd.materials.laws import Constant
from axicfd.pipeline import solve
from axicfd.results.result import Result
from axicfd.theory import groups
from axicfd.variants import contrast
from axicfd.variants.care import Care, read_care
from axicfd.variants.contrast import NO, YES, Effect, OnVariant

IN_FULL, ACROSS_ONLY, NO_WALL = "in full", "radial resistance only", "no wall"
RADIAL, AXIAL = "radial resistance of the wall", "axial conduction in the wall"
COLUMNS = "wetted_wall_temperature_K", "wall_heat_flux_W_m2", "nusselt", "bulk_temperature_K"
# What a variant leaves to the full case: its accuracy, for they share its meshes, and the judgement of its limits.
WITHOUT_VARIANTS: dict[str, Any] = {"solve.accuracy": None, "limits": None}
SAME_TEMPERATURE = 1e-6  # K; a surrounding this close to the inlet temperature drives no heat


@dataclass(frozen=True, eq=False)
class WallEffect:
    """What the wall changes.

    case, layer : what was asked; layer is the only one whose conduction along z was taken out, or None for all solids
    results     : IN_FULL, ACROSS_ONLY and, where layer is None, NO_WALL -> Result
    axial       : in full against radial resistance only
    radial      : radial resistance only against no wall; None for a single layer
    number      : axial conduction number M of the wall (or layer) over the heated length; None where nothing is heated
    predicted   : the verdict on axial conduction that M alone would have given
    """

    case: Case
    care: Care
    layer: str | None
    results: dict[str, Result] = field(repr=False)
    axial: Effect
    radial: Effect | None
    number: float | None

    @property
    def predicted(self) -> str | None:
        if self.number is None:
            return None
        return YES if self.number > groups.AXIAL_CONDUCTION_LIMIT else NO

    @property
    def effects(self) -> tuple[Effect, ...]:
        return (self.axial,) if self.radial is None else (self.radial, self.axial)

    @property
    def converged(self) -> bool:
        return all(result.converged for result in self.results.values())

    def judged(self, care: str | Sequence[str] | Care) -> WallEffect:
        """The same for another opinion of what matters; nothing is solved again."""
        cared = read_care(care)
        radial = None if self.radial is None else self.radial.judged(cared)
        return replace(self, care=cared, axial=self.axial.judged(cared), radial=radial)

    def __repr__(self) -> str:
        verdicts = "; ".join(f"{effect.name}: {effect.verdict}" for effect in self.effects)
        return f"<WallEffect of {self.case.title!r}: {verdicts}>"

    def as_dict(self) -> dict[str, Any]:
        """Plain data in SI, as in wall.json."""
        return {
            "title": self.case.title,
            "converged": self.converged,
            "care": {"per_cent": self.care.per_cent, **self.care.amounts},
            "layer": self.layer,
            **({} if self.radial is None else {"radial_resistance": contrast.as_plain(self.radial)}),
            "axial_conduction": contrast.as_plain(self.axial),
            "axial_conduction_number": {
                "value": self.number,
                "limit": groups.AXIAL_CONDUCTION_LIMIT,
                "predicts": self.predicted,
            },
            "variant": {
                name: {
                    "converged": result.converged,
                    "cells": result.summary["cells"],
                    **{part: plain_tree(result.summary[part]) for part in ("stream", "layer", "section", "sensor")},
                }
                for name, result in self.results.items()
            },
        }


def plain_tree(tree: Any) -> Any:
    """A copy of a tree of dicts that its owner may change."""
    return {key: plain_tree(leaf) for key, leaf in tree.items()} if isinstance(tree, dict) else tree


def wall_effect(
    case: Case,
    care: str | Sequence[str] | Care | None = None,
    layer: str | None = None,
    on_variant: OnVariant | None = None,
) -> WallEffect:
    """Solve a case in full, with radial resistance only and without its wall, and judge the differences.

    care  : from where on a change matters, "1 K", "2 %" of each scale (the default), or several such amounts
    layer : take the conduction along z out of this solid layer only; the case without wall is then left out
    Raises `AxicfdError` where there is no wall, no such layer or no flow, and what `solve` raises.
    """
    expect_case(case)
    cared = read_care(care)
    tube = layout(case)
    names = list(dict.fromkeys(p.name for s in tube.sections for p in s.layers if p.kind == "solid"))
    if not names:
        raise AxicfdError("This case has no wall: no section has a solid layer. There is nothing to take out.")
    if layer is not None and layer not in names:
        raise AxicfdError(f'`layer = "{layer}"` names no solid layer of the case. There are: {", ".join(names)}.')
    if all(stream.is_still for stream in case.stream.values()):
        raise AxicfdError(
            "Nothing flows in this case, so no stream takes up heat that the wall could move. Give a flow."
        )

    def tell(name: str) -> Any:
        return None if on_variant is None else lambda event: on_variant(name, event)

    full = solve(case, tell(IN_FULL))
    results = {IN_FULL: full}
    variants = {ACROSS_ONLY: radial_resistance_only(case, layer)}
    if layer is None:
        variants[NO_WALL] = without_wall(case)
    for name, variant in variants.items():
        results[name] = solve(variant, tell(name), like=full.meshes)
    asked = _compared(case, tube)
    across = results[ACROSS_ONLY]
    name = AXIAL if layer is None else f"axial conduction in {layer}"
    axial = contrast.effect(name, full, across, asked, cared, full, COLUMNS)
    radial = None
    if layer is None:
        radial = contrast.effect(RADIAL, across, results[NO_WALL], asked, cared, full, COLUMNS)
    return WallEffect(case, cared, layer, results, axial, radial, conduction_number(case, tube, _flow(full), layer))


# ------------------------------------------------------------------------------------------------ the variants


def radial_resistance_only(case: Case, layer: str | None = None) -> Case:
    """The case whose solids (or one layer of them) conduct nothing along z; their end faces then carry nothing.

    Each such solid becomes one of the case's own with the same law across.
    """
    changes: dict[str, Any] = dict(WITHOUT_VARIANTS)
    changes["title"] = f"{case.title}: {ACROSS_ONLY}"
    solids: dict[str, Any] = {name: plain(solid) for name, solid in case.solid.items()}

    def cut(one: Layer) -> dict[str, Any]:
        data = {**plain(one), "name": one.name}
        if one.solid is None or layer not in (None, one.name):
            return data
        used = case.solid_of(one.solid)
        name = _free_name(f"{one.solid} across only", case)
        solids[name] = {
            **solids.get(one.solid, {"outside_range": used.outside_range}),
            "conductivity": AlongAcross(used.conductivity_r, Constant(0.0)),
        }
        return {**data, "solid": name}

    changes["layer"] = [cut(one) for one in case.layer] or None
    for section in case.section:
        if section.layer is not None:
            changes[f'section."{section.name}".layer'] = [cut(one) for one in section.layer]
    changes["solid"] = solids
    ends = {end: _without_end(case, end, layer) for end in ("first", "last")}
    changes["ends"] = ends
    return case.replace(changes)


def _free_name(name: str, case: Case) -> str:
    plain_name = "".join(mark if mark.isascii() and (mark.isalnum() or mark in " -_") else " " for mark in name)
    found = " ".join(plain_name.split())
    while found in case.solid:
        found += " only"
    return found


def _without_end(case: Case, end: str, layer: str | None) -> dict[str, Any]:
    """The end faces with those of a layer, or of all, insulated; the other layers keep their heat."""
    if layer is None:
        return {"insulated": True}
    solids = [p for p in layout(case).sections[0 if end == "first" else -1].layers if p.kind == "solid"]
    faces = getattr(case.ends, end)
    area = sum(p.area for p in solids if p.name not in faces)
    found: dict[str, Any] = {}
    for p in solids:
        face = plain(case.ends.of(end, p.name))
        if p.name not in faces and face.get("heat") is not None:  # one heat that the faces share by area
            face["heat_flux"] = face.pop("heat") / area
        found[p.name] = {"insulated": True} if p.name == layer else face
    return found or {"insulated": True}


def without_wall(case: Case) -> Case:
    """The case whose stream is bare, with the outside conditions acting on the bore.

    Heat keeps its watts per length, generation in solids included; a film and a contact outside keep their resistance
    per length; a prescribed temperature stays as it is. Resistances between layers go with the wall, and what lies
    behind a void does not reach the bore. Sensors in or on the wall read the bore; combinations with quantities of a
    layer are left out.
    """
    tube = layout(case)
    first = case.section[0]
    stream = next(one for one in case.layers_of(first) if one.kind == "stream")
    changes: dict[str, Any] = dict(WITHOUT_VARIANTS)
    changes |= {"title": f"{case.title}: {NO_WALL}", "layer": [{**plain(stream), "name": stream.name}], "ends": None}
    for section, placed in zip(case.section, tube.sections, strict=True):
        path = f'section."{section.name}"'
        changes[f"{path}.layer"] = None
        changes[f"{path}.outside"] = _at_bore(section.outside, placed)
        kept = {name: heat for name, heat in section.generated.items() if name == stream.name}
        changes[f"{path}.generated"] = kept or None
    for name, combination in case.quantity.items():
        if any(path.startswith("layer.") for path in (*combination.plus, *combination.minus)):
            changes[f'quantity."{name}"'] = None
    for name, sensor in case.sensor.items():
        if sensor.at not in ("axis", "bulk"):
            changes[f'sensor."{name}".at'] = "outside"
    return case.replace(changes)


def _at_bore(outside: Outside, placed: PlacedSection) -> dict[str, Any]:
    """The condition on the bore that brings the same heat per length as the one on the outside of a wall."""
    bore = next(p.r_outer for p in placed.layers if p.kind == "stream")
    kinds = [p.kind for p in placed.layers]
    reached = kinds.index("void") if "void" in kinds else len(kinds)
    solids = [p for p in placed.layers[:reached] if p.kind == "solid"]
    made = sum(placed.heat_density(p) * p.area for p in solids)
    if reached < len(kinds):
        return {"heat_per_length": made} if made else {"insulated": True}
    ratio = placed.layers[-1].r_outer / bore
    found: dict[str, Any] = {}
    heat = _plus(_heat_per_length(outside, placed), made)
    if outside.temperature is not None:
        found["temperature"] = outside.temperature
        if outside.contact_resistance is not None:
            contact = _times(outside.contact_resistance, 1.0 / ratio)
            found["contact_resistance"] = contact
            # heat brought in at the bore acts like a plate warmer by what it takes to drive that heat back
            found["temperature"] = _plus(outside.temperature, _times(contact, made / (2.0 * math.pi * bore)))
        return found
    if heat != 0.0:
        found["heat_per_length"] = heat
    if outside.film_coefficient is not None:
        found |= {"film_coefficient": _times(outside.film_coefficient, ratio), "ambient": outside.ambient}
    return found or {"insulated": True}


def _heat_per_length(outside: Outside, placed: PlacedSection) -> float | ZTable:
    """[W/m] that an outside condition brings in, whichever way it is said."""
    if outside.heat is not None:
        return outside.heat / placed.length
    if outside.heat_flux is not None:
        return _times(outside.heat_flux, 2.0 * math.pi * placed.layers[-1].r_outer)
    return 0.0 if outside.heat_per_length is None else outside.heat_per_length


def _times(value: float | ZTable, factor: float) -> float | ZTable:
    return ZTable(value.z, tuple(factor * v for v in value.value)) if isinstance(value, ZTable) else factor * value


def _plus(a: float | ZTable, b: float | ZTable) -> float | ZTable:
    """The sum; of two tables on the places of both."""
    if not isinstance(a, ZTable) and not isinstance(b, ZTable):
        return a + b
    if not isinstance(a, ZTable):
        a, b = b, a
    assert isinstance(a, ZTable)
    z = tuple(sorted({*a.z, *(b.z if isinstance(b, ZTable) else ())}))
    return ZTable(z, tuple(a.at(x) + (b.at(x) if isinstance(b, ZTable) else b) for x in z))


# ------------------------------------------------------------------------------------------------ what is compared


@dataclass(frozen=True)
class HottestSolid:
    """The hottest place of a solid layer; where the layer is not there, the hottest wetted wall, on which the heat
    then acts.
    """

    layer: ResultQuantity
    bore: ResultQuantity
    path: str
    key: str
    label: str
    kind: str
    kind_of_difference: str

    def of(self, tree: Any) -> float | None:
        return self.bore.of(tree) if isinstance(tree, dict) and not tree.get("layer") else self.layer.of(tree)


@dataclass(frozen=True)
class HeatUpstream:
    """Heat into a stream through its wetted wall upstream of the first section that heats or cools it [W].

    sections : those upstream
    """

    stream: str
    sections: tuple[str, ...]

    key = "heat_upstream_W"
    kind = kind_of_difference = "heat"
    label = "heat carried upstream"
    row = Reported(key, label, "", "W", "through the wetted wall before the first section that heats or cools", "heat")

    @property
    def path(self) -> str:
        return f"stream.{self.stream}.heat_upstream"

    def of(self, tree: Any) -> float | None:
        values = [tree["section"][name]["heat_to_stream_W"].get(self.stream) for name in self.sections]
        return None if None in values else sum(values)


def _compared(case: Case, tube: Layout) -> list[contrast.Quantity]:
    found: list[contrast.Quantity] = []
    asked = list(quantities(case, headline_only=True))
    bore = next(of for of in asked if of.key == "hottest_wetted_wall_K")
    for of in asked:
        if of.keys[0] == "layer":
            found.append(HottestSolid(of, bore, of.path, of.key, of.label, of.kind, of.kind_of_difference))
        else:
            found.append(of)
    for name, stream in case.stream.items():
        found.append(quantity(case, f'stream."{name}".hottest_wetted_wall_z'))
        upstream = tuple(s.name for s in _upstream(case, tube, stream.direction == "-z", stream.inlet_temperature))
        if upstream:
            found.append(HeatUpstream(name, upstream))
    return found


def _upstream(case: Case, tube: Layout, backwards: bool, t_in: float) -> list[PlacedSection]:
    """The sections that the stream passes before the first one that drives heat; none where no section does."""
    order = list(tube.sections[::-1] if backwards else tube.sections)
    first = next((k for k, section in enumerate(order) if drives_heat(section, t_in)), 0)
    return order[:first]


def drives_heat(section: PlacedSection, t_in: float) -> bool:
    """Whether a section brings heat in, takes or makes some, or lies in surroundings not as warm as the inlet."""
    outside = section.outside
    if any(section.heat_density(p) for p in section.layers):
        return True
    heats = [getattr(outside, key) for key in outside.HEATS]
    around = [outside.temperature, outside.ambient if outside.film_coefficient else None]
    found = [h for heat in heats for h in _values(heat)]
    return any(found) or any(abs(T - t_in) > SAME_TEMPERATURE for value in around for T in _values(value))


def _values(value: float | ZTable | None) -> tuple[float, ...]:
    return () if value is None else value.value if isinstance(value, ZTable) else (value,)


def _flow(full: Result) -> float:
    return float(next(iter(full.summary["stream"].values()))["mass_flow_kg_s"])


def conduction_number(case: Case, tube: Layout, mass_flow: float, layer: str | None = None) -> float | None:
    """M = (k_w A_w / L) / (m cp) with the heated length L and the mean of k_w A_w over it, at the inlet temperature.

    mass_flow : of the first stream [kg/s]

    None where nothing is heated. Source: Maranzana, Perry & Maillet 2004 (see `theory.groups`).
    """
    name, stream = next(iter(case.stream.items()))
    t_in = stream.inlet_temperature
    heated = [s for s in tube.sections if drives_heat(s, t_in)]
    length = sum(s.length for s in heated)
    if not heated:
        return None
    conducted = sum(
        float(case.solid_of(p.material).conductivity_z(t_in)) * p.area * s.length
        for s in heated
        for p in s.layers
        if p.kind == "solid" and layer in (None, p.name)
    )
    capacity = mass_flow * float(case.fluid_of(name).specific_heat(t_in))
    return groups.axial_conduction_number(conducted / length, 1.0, length, capacity)
