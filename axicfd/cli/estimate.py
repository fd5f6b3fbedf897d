"""The case in the plain numbers of the hand estimate, and the estimate in words."""

from __future__ import annotations

import math
from typing import Any

from axicfd.case.layout import Layout, PlacedSection, layout
from axicfd.case.model import Case
from axicfd.output.headline import amount, number
from axicfd.output.shown import Shown
from axicfd.solver.boundary import estimated_mass_flow
from axicfd.theory import conduction, groups
from axicfd.theory.hand import HandEstimate, HandStream, Stretch, hand_estimate

# A film so weak that it is none, to keep its resistance a number [W/(m2 K)].
NO_FILM = 1e-12


def by_hand(case: Case) -> dict[str, float] | None:
    """Dotted quantity -> SI value of the hand estimate; None where nothing flows or no estimate applies."""
    found = _estimate(case, layout(case))
    if found is None:
        return None
    stream = next(iter(case.stream))
    estimate = {
        f"stream.{stream}.mass_flow": inlet_state(case, layout(case)).mass_flow,
        f"stream.{stream}.outlet_temperature": found.outlet_temperature,
        f"stream.{stream}.pressure_drop": found.pressure_drop,
        f"stream.{stream}.heat_gain": found.heat_gain,
        f"stream.{stream}.hottest_wetted_wall": found.hottest_wetted_wall,
    }
    sections = _in_flow_order(case, layout(case))
    for section, stretch in zip(sections, found.stretches, strict=True):
        estimate[f"section.{section.name}.heat_in"] = stretch.heat - _generated_per_length(section) * section.length
    return estimate


def two_lines(case: Case, shown: Shown) -> list[str]:
    """The hand estimate in two lines, for `check`."""
    found = _estimate(case, layout(case))
    if found is None:
        return ["By hand: nothing flows, so this is conduction alone; no estimate."]
    flow = ""
    if next(iter(case.stream.values())).pressure_drop is not None:
        flow = f"flow {amount(shown, 'mass_flow', inlet_state(case, layout(case)).mass_flow)}, "
    return [
        f"By hand: {flow}outlet {amount(shown, 'temperature', found.outlet_temperature)}, "
        f"pressure drop {amount(shown, 'pressure', found.pressure_drop)}, "
        f"heat {amount(shown, 'heat', found.heat_gain)}, "
        f"hottest wetted wall {amount(shown, 'temperature', found.hottest_wetted_wall)}",
        "(constant inlet properties, no conduction along the wall, no viscous heating; "
        f"friction alone would warm the stream by {number(found.viscous_rise, 2)} K).",
    ]


def group_rows(case: Case, shown: Shown) -> list[list[str]]:
    """Rows of the dimensionless numbers at the inlet state: name, value, what it tells."""
    tube = layout(case)
    found = _estimate(case, tube)
    if found is None:
        return []
    stream = inlet_state(case, tube)
    heated = math.fsum(section.length for section in tube.sections if not _passes_no_heat(section))
    flat = stream.flat_inlet
    rows = [
        ["Reynolds", number(found.reynolds), "laminar below about 2000"],
        ["Prandtl", number(found.prandtl), ""],
        ["Péclet", number(found.peclet), "heat carried over heat conducted along the stream"],
        [
            "hydrodynamic entry length",
            amount(shown, "length", found.hydrodynamic_entry_length if flat else 0.0),
            "Durst et al. 2005" if flat else "the inlet is developed",
        ],
        ["thermal entry length", amount(shown, "length", found.thermal_entry_length), "0.0431 D Re Pr"],
    ]
    if heated:
        graetz = groups.graetz(found.peclet, stream.bore, heated)
        rows.insert(3, ["Graetz", number(graetz), f"over {amount(shown, 'length', heated)} heated length"])
    number_m = _axial_conduction(case, tube, stream, heated or tube.length)
    if number_m is not None:
        rows.append(
            [
                "conduction along the wall, M",
                number(number_m),
                f"small below about {groups.AXIAL_CONDUCTION_LIMIT:g} (Maranzana et al. 2004)",
            ]
        )
    return rows


def inlet_state(case: Case, tube: Layout) -> HandStream:
    """The one stream of a case with its properties at the inlet temperature."""
    name = tube.stream_names[0]
    stream, fluid = case.stream[name], case.fluid_of(name)
    inlet = stream.inlet_temperature
    density, viscosity = float(fluid.density(inlet)), float(fluid.viscosity(inlet))
    return HandStream(
        mass_flow=estimated_mass_flow(case, tube, name),
        inlet_temperature=inlet,
        bore=tube.bore_diameter,
        density=density,
        specific_heat=float(fluid.specific_heat(inlet)),
        conductivity=float(fluid.conductivity(inlet)),
        viscosity=viscosity,
        flat_inlet=stream.slips_at_inlet,
    )


def _estimate(case: Case, tube: Layout) -> HandEstimate | None:
    if len(tube.stream_names) != 1 or tube.sections[0].layers[0].kind != "stream":
        return None
    stream = inlet_state(case, tube)
    sections = _in_flow_order(case, tube)
    return hand_estimate(stream, [_stretch(case, section, stream.inlet_temperature) for section in sections])


def _in_flow_order(case: Case, tube: Layout) -> tuple[PlacedSection, ...]:
    backwards = case.stream[tube.stream_names[0]].direction == "-z"
    return tube.sections[::-1] if backwards else tube.sections


def _stretch(case: Case, section: PlacedSection, inlet: float) -> Stretch:
    """A section in numbers: solids at the inlet temperature, tables along z by their mean."""
    wall, reached = 0.0, True
    for layer in section.layers[1:]:
        if layer.kind == "void":
            reached = False
            break
        wall += conduction.area_resistance(layer.contact_resistance, layer.r_inner)
        conductivity = float(case.solid_of(layer.material).conductivity_r(inlet))
        wall += conduction.layer_resistance(layer.r_inner, layer.r_outer, conductivity)
    heat = _generated_per_length(section)
    outside, radius = section.outside, section.layers[-1].r_outer
    if not reached or outside.insulated:
        return Stretch(section.length, heat, None, wall)
    heat += _mean(outside.heat_flux, section) * 2 * math.pi * radius
    heat += _mean(outside.heat_per_length, section) + (outside.heat or 0.0) / section.length
    if outside.temperature is not None:
        contact = conduction.area_resistance(_mean(outside.contact_resistance, section), radius)
        return Stretch(section.length, heat, _mean(outside.temperature, section), wall, wall + contact)
    film = _mean(outside.film_coefficient, section)
    if film > NO_FILM:
        to_ambient = wall + conduction.film_resistance(film, radius)
        return Stretch(section.length, heat, _mean(outside.ambient, section), wall, to_ambient)
    return Stretch(section.length, heat, None, wall)


def _generated_per_length(section: PlacedSection) -> float:
    """Heat generated in the walls [W/m]."""
    return math.fsum(section.heat_density(layer) * layer.area for layer in section.layers)


def _mean(value: Any, section: PlacedSection) -> float:
    """Mean over the section of a number, a table along z, or nothing (0)."""
    if value is None:
        return 0.0
    if not hasattr(value, "z"):
        return float(value)
    places = sorted({0.0, section.length, *(z for z in value.z if 0.0 < z < section.length)})
    pairs = zip(places, places[1:], strict=False)
    return math.fsum((value.at(a) + value.at(b)) / 2 * (b - a) for a, b in pairs) / section.length


def _passes_no_heat(section: PlacedSection) -> bool:
    return section.outside.insulated and not _generated_per_length(section)


def _axial_conduction(case: Case, tube: Layout, stream: HandStream, length: float) -> float | None:
    """M of the first section's wall; None for a tube without one."""
    solids = [layer for layer in tube.sections[0].layers if layer.kind == "solid"]
    if not solids:
        return None
    carried = math.fsum(
        float(case.solid_of(layer.material).conductivity_z(stream.inlet_temperature)) * layer.area for layer in solids
    )
    return groups.axial_conduction_number(carried, 1.0, length, stream.mass_flow * stream.specific_heat)
